//! Completions on texts that are half typed.

#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::indexing_slicing)]

use indexwise_grammar::hosts::Host;

use super::*;
use crate::editing::cursor::Placed;

fn found(text: &str, host: Host) -> (String, u32, Vec<Suggestion>) {
    let placed = Placed::new(text, host);
    let found = complete(&placed.view, 0, placed.at());
    (placed.text.clone(), placed.at(), found)
}

/// The texts that are suggested of one kind, in order.
#[track_caller]
fn of_kind(host: Host, text: &str, kind: SuggestionKind) -> Vec<String> {
    let (_, at, found) = found(text, host);
    assert!(found.iter().all(|one| one.replaces.start <= at && at <= one.replaces.end), "{found:?}");
    assert!(found.iter().enumerate().all(|(rank, one)| one.rank == rank));
    found.into_iter().filter(|one| one.kind == kind).map(|one| one.text).collect()
}

#[track_caller]
fn owed(text: &str, want: &[&str]) {
    assert_eq!(of_kind(Host::Latex, text, SuggestionKind::Owed), want, "{text}");
}

/// The text after the first suggestion is taken.
#[track_caller]
fn first(host: Host, before: &str, after: &str) {
    let (mut text, _, found) = found(before, host);
    let Some(first) = found.first() else { panic!("{before}: nothing") };
    text.replace_range(first.replaces.range(), &first.text);
    assert_eq!(text, after, "{before}");
}

#[test]
fn what_the_left_side_has_is_owed() {
    owed("$A_i = B_‸$", &["i"]);
    owed("$A_{ij} = B_i C_‸$", &["j"]);
    owed("$A_{ij} = B_i C_j$ so $t_i = \\sigma_{ij} n_‸$", &["j"]);
    owed("$A_{ij} = B_i + C_{‸}$", &["ij", "i", "j"]);
    owed("$A_{ij} = B_{ij} + D_{ik} C_{‸}$", &["jk", "j", "k"]);
}

#[test]
fn a_brace_or_a_formula_still_open_is_no_obstacle() {
    owed("$A_{i} = B_{‸", &["i"]);
    owed("$A_{i} = B_{‸$ and $x = y$", &["i"]);
    owed("\\begin{equation} A_{ij} = B_{i‸", &["j"]);
    owed("\\[ A_{ij} = B_{i‸ \\] and then $x = y_{k}$", &["j"]);
    owed("$$ A_{ij} = B_{‸ $$ and then $x = y_{k}$", &["ij", "i", "j"]);
}

#[test]
fn levels_are_kept() {
    let lead = "\\( a_\\mu = g_{\\mu\\nu} a^\\nu, b_\\mu = g_{\\mu\\nu} b^\\nu, c_\\mu = g_{\\mu\\nu} c^\\nu, \
        d_\\mu = g_{\\mu\\nu} d^\\nu, e_\\mu = g_{\\mu\\nu} e^\\nu, f_\\mu = g_{\\mu\\nu} f^\\nu \\) ";
    owed(&format!("{lead} $F^\\mu{{}}_\\nu = G^{{‸}}$"), &["\\mu"]);
    owed(&format!("{lead} $F^\\mu{{}}_\\nu = G^\\mu{{}}_‸$"), &["\\nu"]);
    owed(&format!("{lead} $F_\\mu = g_{{\\mu\\rho}} G^‸$"), &["\\rho"]);
    owed(&format!("{lead} $F_\\mu = g_{{\\mu\\rho}} G_‸$"), &[]);
}

#[test]
fn inside_of_brackets_the_other_terms_say_what_is_owed() {
    owed("$E_{ij} = \\frac12 (\\partial_i u_j + \\partial_j u_‸)$", &["i"]);
    owed("$E_{ij} = \\frac12 (\\partial_i u_j + \\partial_‸ u_i)$", &["j"]);
    owed("$A_{ij} = p_i (q_j + r_{‸})$", &["j"]);
    owed("$A_{ij} = p_i (r_{‸})$", &["j"]);
}

#[test]
fn a_command_half_typed_is_replaced() {
    first(Host::Latex, "$A_{\\mu\\nu} = B_{\\mu\\n‸}$", "$A_{\\mu\\nu} = B_{\\mu\\nu}$");
    first(Host::Latex, "$A_{\\mu i} = B_{\\mu‸}$", "$A_{\\mu i} = B_{\\mu i}$");
    first(Host::Latex, "$A_{ij} = B_‸$", "$A_{ij} = B_{ij}$");
    first(Host::Latex, "$A_{ij} = B_{‸$", "$A_{ij} = B_{ij$");
}

#[test]
fn fresh_letters_are_those_of_the_family() {
    let lead = "% indexwise: i j k l run from 1 to 3\n";
    assert_eq!(of_kind(Host::Latex, &format!("{lead}$A_i = B_{{i‸}}$"), SuggestionKind::Fresh), ["j", "k", "l"]);
    let fresh = of_kind(Host::Latex, "$A_\\mu = B_{\\mu‸}$", SuggestionKind::Fresh);
    assert!(
        fresh.len() == 4 && fresh.iter().all(|letter| letter.starts_with('\\') || letter.starts_with(" \\")),
        "{fresh:?}"
    );
}

#[test]
fn a_note_has_runs_and_names() {
    first(Host::Note, "Sheet\n\n  A_ij = B_‸\n", "Sheet\n\n  A_ij = B_ij\n");
    first(Host::Note, "Sheet\n\n  A_ij = B_i‸\n", "Sheet\n\n  A_ij = B_ij\n");
    first(Host::Note, "Sheet\n\n  A_{mu nu} = B_‸\n", "Sheet\n\n  A_{mu nu} = B_{mu nu}\n");
    first(Host::Note, "Sheet\n\n  A_{mu nu} = B_{mu ‸}\n", "Sheet\n\n  A_{mu nu} = B_{mu nu}\n");
}

#[test]
fn kernels_come_with_their_slots() {
    let lead =
        "% indexwise: i j k run from 1 to 3; g_{ij} is the metric; \\Gamma^i_{jk} is the Christoffel symbol of g\n";
    let kernels = |text: &str| of_kind(Host::Latex, &format!("{lead}{text}"), SuggestionKind::Kernel);
    assert_eq!(kernels("$A = \\Ga‸$"), ["\\Gamma^i_{jk}"]);
    assert_eq!(kernels("$A = g‸$"), ["g_{ij}"]);
    assert_eq!(kernels("$R^i{}_j = \\Gamma^i{}_{jk} v^k, \\Ga‸$"), ["\\Gamma^i{}_{jk}"]);
    assert_eq!(kernels("\\Ga‸"), [""; 0]);
}

#[test]
fn sentences_go_on_as_their_forms_do() {
    let rest = |text: &str| of_kind(Host::Latex, text, SuggestionKind::Sentence);
    assert_eq!(rest("% indexwise: i j run‸")[0], "run from 1 to 3");
    assert_eq!(rest("% indexwise: i j run from 1 to 3; T_{ij} is sym‸")[..2], ["symmetric", "symmetric in i j"]);
    assert!(rest("% indexwise: h is small\n%   g is the ‸").contains(&"metric".to_owned()));
    assert_eq!(rest("% indexwise: ‸").len(), indexwise_grammar::conventions::FORMS.len());
    assert_eq!(rest("% indexwise: skip th‸"), ["this"]);
    assert_eq!(of_kind(Host::Markdown, "<!-- indexwise: skip ‸", SuggestionKind::Sentence), ["this"]);
    assert_eq!(of_kind(Host::Note, "conventions\n  h is sm‸\n", SuggestionKind::Sentence), ["small"]);
    assert_eq!(rest("% index‸"), [""; 0]);
}

#[test]
fn rules_and_labels_in_directives() {
    let rules = of_kind(Host::Latex, "% indexwise: allow dummy-‸", SuggestionKind::Rule);
    assert_eq!(rules, ["dummy-captured", "dummy-levels"]);
    let ends = of_kind(Host::Latex, "% indexwise: allow dummy-levels ‸", SuggestionKind::Sentence);
    assert_eq!(ends, ["here", "in this file"]);
    let labelled = "\\begin{equation}\\label{eq:trace} T = g_{ij} T^{ij} \\end{equation}\n";
    for (text, want) in [
        ("% indexwise: check this using ‸", "(eq:trace)"),
        ("% indexwise: check this using (eq:t‸", "(eq:trace)"),
        ("% indexwise: check this using (eq:a), (‸", "(eq:trace)"),
        ("see \\eqref{‸}", "eq:trace"),
        ("see \\cref{eq:a,eq:‸}", "eq:trace"),
    ] {
        assert_eq!(of_kind(Host::Latex, &format!("{labelled}{text}"), SuggestionKind::Label), [want], "{text}");
    }
    assert_eq!(of_kind(Host::Latex, &format!("{labelled}\\label{{eq:‸}}"), SuggestionKind::Label), [""; 0]);
}

#[test]
fn nothing_in_prose() {
    for text in ["Words and a file_‸ name", "the index i‸", "$x = y$ and file_{‸", "\\section{On g‸}"] {
        assert_eq!(found(text, Host::Latex).2, [], "{text}");
    }
    assert_eq!(found("Margin words_‸\n", Host::Note).2, []);
    assert_eq!(found("A `code_‸` span", Host::Markdown).2, []);
}
