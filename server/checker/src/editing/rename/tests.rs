//! Renames as texts before and after, and what is refused.

#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::indexing_slicing)]

use super::*;
use crate::editing::cursor::{paper_of, view, with_cursor};
use crate::finding::edited;
use crate::paper::{Cancel, Settings, StepMode};

fn findings(view: &View) -> Vec<(&'static str, usize)> {
    let settings = Settings { steps: StepMode::Off, ..Settings::default() };
    let analysis = view.judge(&settings, &Cancel::default());
    let mut found: Vec<(&'static str, usize)> = Vec::new();
    for finding in analysis.documents.iter().flat_map(|document| &document.findings) {
        match found.iter_mut().find(|(rule, _)| *rule == finding.rule) {
            Some((_, count)) => *count += 1,
            None => found.push((finding.rule, 1)),
        }
    }
    found
}

/// Renames at the cursor, and finds nothing new in the text that comes out.
#[track_caller]
fn gives(host: Host, text: &str, to: &str, want: &str) {
    let (text, offset) = with_cursor(text);
    let before = view(&text, host);
    let edits = rename(&before, 0, offset, to).unwrap_or_else(|reason| panic!("{text}: {reason}"));
    let after = edits.iter().fold(text.clone(), |text, (_, own)| edited(&text, own).unwrap());
    assert_eq!(after, want);
    assert_eq!(findings(&view(&after, host)), findings(&before), "{after}");
}

#[track_caller]
fn refuses(host: Host, text: &str, to: &str, want: &str) {
    let (text, offset) = with_cursor(text);
    let edits = rename(&view(&text, host), 0, offset, to);
    assert_eq!(edits, Err(want.to_owned()), "{text}");
}

#[test]
fn a_dummy_in_its_term() {
    gives(Host::Markdown, "$A_{‸i} B_i C_k + D_i E_i F_k = G_k$", "j", "$A_{j} B_j C_k + D_i E_i F_k = G_k$");
    gives(Host::Markdown, "$n_k (A_‸i B_i + C_j C_j) = q_k$", "m", "$n_k (A_m B_m + C_j C_j) = q_k$");
    gives(Host::Markdown, "$n_‸i (A_i + B_i) = D_j D_j$", "k", "$n_k (A_k + B_k) = D_j D_j$");
}

#[test]
fn a_free_index_through_all_rows() {
    let text = "\\begin{align} A_‸i &= B_{ik} n_k + C_i \\\\ &= D_i \\end{align} where $C_i = E_i$";
    let want = "\\begin{align} A_j &= B_{jk} n_k + C_j \\\\ &= D_j \\end{align} where $C_i = E_i$";
    gives(Host::Latex, text, "j", want);
}

#[test]
fn a_letter_of_a_sum_sign() {
    gives(
        Host::Markdown,
        "$\\sum_{‸a=1}^N w_a v_a u_a = q$ and $w_a$",
        "b",
        "$\\sum_{b=1}^N w_b v_b u_b = q$ and $w_a$",
    );
}

#[test]
fn the_values_of_a_free_index_are_said_of_its_new_name() {
    gives(Host::Latex, "\\[A_‸i = B_i , \\quad i = 1, 2, 3\\]", "k", "\\[A_k = B_k , \\quad k = 1, 2, 3\\]");
    gives(
        Host::Latex,
        "\\[A_‸i = B_i , \\quad C_i = D_i , \\quad i = 1, 2\\]",
        "k",
        "\\[A_k = B_k , \\quad C_i = D_i , \\quad i = 1, 2\\]",
    );
}

#[test]
fn scopes_of_other_kinds() {
    gives(Host::Latex, "$\\nabla_{[‸a} R_{bc]de} = 0$", "f", "$\\nabla_{[f} R_{bc]de} = 0$");
    gives(Host::Latex, "$A_{ij}n_j \\approx B_‸i$", "k", "$A_{kj}n_j \\approx B_k$");
    gives(Host::Latex, "$A_‸i \\leq B_i$ and $A_{ij} = B_{ij}$", "k", "$A_k \\leq B_k$ and $A_{ij} = B_{ij}$");
    gives(Host::Latex, "$T^{ab}(x^‸c) = S^{ab}(x^c)$", "d", "$T^{ab}(x^d) = S^{ab}(x^d)$");
    gives(Host::Latex, "$u_{i,‸j} n_j = t_i$", "k", "$u_{i,k} n_k = t_i$");
    gives(
        Host::Latex,
        "$\\frac{\\partial \\sigma_{ij}}{\\partial x_‸j} + f_i = 0$",
        "k",
        "$\\frac{\\partial \\sigma_{ik}}{\\partial x_k} + f_i = 0$",
    );
    gives(Host::Latex, "$\\sum_{‸a<b} w_{ab} v_a v_b = q$", "c", "$\\sum_{c<b} w_{cb} v_c v_b = q$");
    gives(
        Host::Latex,
        "$[\\nabla_‸a, \\nabla_b] V^c = R^c{}_{dab} V^d$",
        "e",
        "$[\\nabla_e, \\nabla_b] V^c = R^c{}_{deb} V^d$",
    );
}

#[test]
fn greek_is_written_in_the_author_s_way() {
    gives(Host::Latex, "$A^{\\‸mu}B_{\\mu a} = C_a$", "\\rho", "$A^{\\rho}B_{\\rho a} = C_a$");
    gives(Host::Latex, "$A_‸i B_{ia} = C_{a}$", "\\mu", "$A_\\mu B_{\\mu a} = C_{a}$");
    gives(Host::Latex, "$A_‸ixB_{ai} = C_{a}$", "μ", "$A_\\mu xB_{a\\mu} = C_{a}$");
    gives(Host::Latex, "$A_{\\‸mu} B_{\\nu\\mu} = C_\\nu$", "k", "$A_{k} B_{\\nu k} = C_\\nu$");
    gives(Host::Latex, "$A_‸i B_{ai} = C_{a}$", "i'", "$A_{i'} B_{ai'} = C_{a}$");
    gives(Host::Latex, "$A^μ B_{‸μ a} = C_{a}$", "\\nu", "$A^ν B_{ν a} = C_{a}$");
}

#[test]
fn notes_keep_their_way_with_greek() {
    gives(Host::Note, "Waves:\n\n  A^{m‸u nu} B_nu = C^mu\n", "rho", "Waves:\n\n  A^{rho nu} B_nu = C^rho\n");
    gives(Host::Note, "Waves:\n\n  A^{μ ν} B_‸ν = C^μ\n", "rho", "Waves:\n\n  A^{μ ρ} B_ρ = C^μ\n");
    gives(Host::Note, "Waves:\n\n  A_‸ij B_i = C_j\n", "m", "Waves:\n\n  A_mj B_m = C_j\n");
    gives(Host::Note, "Waves:\n\n  A_‸ij B_i = C_j\n", "mu", "Waves:\n\n  A_μj B_mu = C_j\n");
}

#[test]
fn letters_that_collide_are_refused() {
    let text = "$A_{‸i} B_i C_{jj} D_k = G_k$";
    refuses(Host::Markdown, text, "k", "k is free in that statement already");
    refuses(Host::Markdown, text, "j", "j is summed in that term already");
    refuses(Host::Markdown, "$A_‸i = B_{ij} n_j$", "j", "j is summed in that statement already");
    refuses(Host::Markdown, "$m A_‸i = B_i$", "m", "m is a quantity in that statement");
    refuses(Host::Markdown, "$A_‸i (B_j C_j) D_i = q$", "j", "j is summed in that term already");
}

#[test]
fn what_is_no_letter_is_refused() {
    let text = "$A_‸i B_i = q$";
    for to in ["3", "ij", "", "\\mathrm{eff}", "i+1", "{", "a}_{b"] {
        refuses(Host::Markdown, text, to, &format!("{to} is no letter that an index can have"));
    }
    refuses(Host::Markdown, "The ‸sheet $A_i$", "j", "no index, kernel or label stands there");
    refuses(Host::Markdown, "$A_{‸00} B_i = C_i$", "j", "00 is no index, kernel or label of a formula");
}

#[test]
fn declared_families_are_kept() {
    let said = |text: &str| {
        let sentences = "i j k run from 1 to 3; a b run from 1 to 2; L is a label; r z are the coordinates";
        format!("<!-- indexwise: {sentences} -->\n{text}")
    };
    let text = said("$A_‸i B_i = q$");
    gives(Host::Markdown, &text, "k", &said("$A_k B_k = q$"));
    refuses(Host::Markdown, &text, "a", "a and i are declared in different families");
    refuses(Host::Markdown, &text, "m", "m is not declared to run with i j k");
    refuses(Host::Markdown, &text, "L", "L is declared a label");
    refuses(Host::Markdown, &text, "z", "z is declared to name a component");
    refuses(Host::Markdown, &said("$A_‸m B_m = q$"), "k", "k belongs to a declared family and m to none");
}

#[test]
fn macros_are_left_alone() {
    let macros = "\\newcommand{\\bend}[2]{\\kappa_{#1#2}}\\newcommand{\\tr}{\\kappa_{mm}}\\newcommand{\\twist}[1]{\\tau_{#1k}}\n";
    gives(
        Host::Latex,
        &format!("{macros}$\\bend{{‸i}}{{j}} n_j = q_i$"),
        "k",
        &format!("{macros}$\\bend{{k}}{{j}} n_j = q_k$"),
    );
    refuses(
        Host::Latex,
        &format!("{macros}$\\twist i n_‸k = q_i$"),
        "m",
        "k is written by the macro \\twist, whose definition is left alone",
    );
    refuses(
        Host::Latex,
        &format!("{macros}$\\be‸nd ij = q_{{ij}}$"),
        "\\sigma",
        "\\bend is a macro; only indices, kernels and labels are renamed",
    );
    refuses(
        Host::Latex,
        &format!("{macros}$‸\\kappa_{{ij}} = \\bend ij$"),
        "\\sigma",
        "κ is written by the macro \\bend, whose definition is left alone",
    );
}

#[test]
fn words_that_no_sum_is_meant_are_heeded() {
    refuses(
        Host::Markdown,
        "$A_{‸ij} B_i = C_{ij}$ (no sum)",
        "k",
        "the text says that no sum is meant, so that scopes are not known",
    );
}

/// Renames in the first of several LaTeX documents.
#[track_caller]
fn gives_in_all(texts: &[&str], to: &str, want: &[&str]) {
    let (first, offset) = with_cursor(texts[0]);
    let mut all = vec![first.as_str()];
    all.extend(&texts[1..]);
    let documents: Vec<(Host, &str)> = all.iter().map(|text| (Host::Latex, *text)).collect();
    let view = View::of(&paper_of(&documents, &[]), &Cancel::default());
    let edits = rename(&view, 0, offset, to).unwrap_or_else(|reason| panic!("{texts:?}: {reason}"));
    let mut after: Vec<String> = all.iter().map(|text| (*text).to_owned()).collect();
    for (number, own) in edits {
        after[number] = edited(&after[number], &own).unwrap();
    }
    assert_eq!(after, want);
}

#[test]
fn a_kernel_in_all_documents() {
    gives_in_all(
        &["% indexwise: E_{ij} is symmetric\n$‸E_{ij} = E_{ji}$", "$2E_{ij}n_j = E_i$ and $xE_{kk}$"],
        "\\sigma",
        &[
            "% indexwise: \\sigma_{ij} is symmetric\n$\\sigma_{ij} = \\sigma_{ji}$",
            "$2\\sigma_{ij}n_j = E_i$ and $x\\sigma_{kk}$",
        ],
    );
    gives_in_all(&["$‸h x_i = y_i$", "$\\sigma h = k$"], "\\alpha", &["$\\alpha x_i = y_i$", "$\\sigma \\alpha = k$"]);
    gives_in_all(&["$\\bar ‸h_{ij} = h_{ij}$"], "\\bar k", &["$\\bar k_{ij} = h_{ij}$"]);
    gives_in_all(
        &["% indexwise: g_{ij} is the metric; \\Gamma^i_{jk} is the Christoffel symbol of g\n$‸g_{ij} = g_{ji}$"],
        "h",
        &["% indexwise: h_{ij} is the metric; \\Gamma^i_{jk} is the Christoffel symbol of h\n$h_{ij} = h_{ji}$"],
    );
}

#[test]
fn kernels_that_collide_are_refused() {
    refuses(Host::Markdown, "$‸A_{ij} = B_{ij}$", "B", "B with 2 slots is in use already");
    gives(Host::Markdown, "$‸A_{ij} n_j = B_i$", "B", "$B_{ij} n_j = B_i$");
    refuses(Host::Markdown, "$‸A_i = B_i$", "\\partial", "∂ differentiates");
    refuses(Host::Markdown, "$‸A_i = B_i$", "x_i", "x_i is no name of a kernel");
    refuses(
        Host::Markdown,
        "<!-- indexwise: h is small -->\n$‸h_{ij} = q_{ij} h$",
        "k",
        "a sentence names h without slots, and h stands with several numbers of slots",
    );
}

#[test]
fn kernels_of_notes() {
    gives(Host::Note, "Sag:\n\n  s‸igma_ij n_j = t_i\n", "tau", "Sag:\n\n  tau_ij n_j = t_i\n");
    gives(Host::Note, "Sag:\n\n  ‸load_i = t_i\n", "weight", "Sag:\n\n  weight_i = t_i\n");
}

#[test]
fn labels_in_all_documents() {
    gives_in_all(
        &["See \\eqref{‸eq:u}.", "\\[u_i = w_i \\label{eq:u}\\] and \\cref{eq:v,eq:u}"],
        "eq:sag",
        &["See \\eqref{eq:sag}.", "\\[u_i = w_i \\label{eq:sag}\\] and \\cref{eq:v,eq:sag}"],
    );
    gives(
        Host::Note,
        "Load:\n\n  (s‸ag)  u_i = w_i\n\n  u_i n_i = w_i n_i   [sag]\n",
        "dip",
        "Load:\n\n  (dip)  u_i = w_i\n\n  u_i n_i = w_i n_i   [dip]\n",
    );
    let text = "\\[u_i = w_i \\label{‸a}\\] \\[u_i = v_i \\label{b}\\]";
    refuses(Host::Latex, text, "b", "the label b is given already");
    refuses(Host::Latex, text, "a b", "a b is no name of a label");
    refuses(Host::Latex, "see \\ref{‸c}", "d", "the label c is given nowhere");
}

#[test]
fn what_may_be_renamed_is_told_before() {
    let (text, offset) = with_cursor("$A_{\\‸mu} B^\\mu = q$");
    let found = prepare_rename(&view(&text, Host::Latex), 0, offset).unwrap();
    assert_eq!((found.text.as_str(), found.span.of(&text)), ("\\mu", "\\mu"));
    let (text, offset) = with_cursor("The ‸sheet");
    assert!(prepare_rename(&view(&text, Host::Latex), 0, offset).is_err());
}
