//! Hovers, as Markdown.

#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::indexing_slicing)]

use indexwise_grammar::hosts::Host;

use super::*;
use crate::editing::cursor::{paper_of, view, with_cursor};
use crate::paper::{Cancel, Settings};

/// The hover at the cursor of a text that is judged, with what it is about.
fn asked(host: Host, text: &str) -> Option<(String, String)> {
    let (text, offset) = with_cursor(text);
    let view = view(&text, host);
    let analysis = view.judge(&Settings::default(), &Cancel::default());
    hover(&view, 0, offset, analysis.documents.first()).map(|one| (one.span.of(&text).to_owned(), one.markdown))
}

/// The paragraphs of a hover.
#[track_caller]
fn says(host: Host, text: &str, about: &str, want: &[&str]) {
    let (span, markdown) = asked(host, text).unwrap_or_else(|| panic!("nothing for {text}"));
    assert_eq!(span, about, "{text}");
    assert_eq!(markdown.split("\n\n").collect::<Vec<_>>(), want, "{text}");
    assert!(!markdown.contains('<'), "{markdown}");
}

const SAID: &str = "<!-- indexwise: i j k l run from 1 to 3; F_{ij} is antisymmetric; T_{ij} is symmetric -->\n";

#[test]
fn nothing_is_said_in_prose() {
    assert_eq!(asked(Host::Markdown, "The ‸sheet $A_i = B_i$"), None);
    assert_eq!(asked(Host::Markdown, "$A_i ‸+ B_i$"), None);
    assert!(hover(&view("$A_i$", Host::Markdown), 3, 1, None).is_none());
}

#[test]
fn a_free_index_tells_level_range_and_evidence() {
    says(
        Host::Markdown,
        "$Q^{\\‸mu} = G^{\\mu}_{\\nu} n^\\nu$",
        "\\mu",
        &[
            "**μ**: free index, up; it stands twice in the statement",
            "runs over 0 1 2 3 by custom, since no range is declared; an index, as one statement of the document uses it",
        ],
    );
    says(
        Host::Markdown,
        "<!-- indexwise: i j run from 1 to 20 -->\n$A_‸i = B_i$",
        "i",
        &[
            "**i**: free index; it stands twice in the statement",
            "runs over 1 2 3 .. 20 like j, as declared; an index by declaration",
        ],
    );
    says(
        Host::Note,
        "Sag\n\nconventions\n  i j run from 1 to n\n\n  sigma_‸ij n_j = t_i\n",
        "i",
        &[
            "**i**: free index; it stands twice in the statement",
            "is declared to end with n like j, taken as 1 2 3; an index by declaration",
        ],
    );
}

#[test]
fn a_summed_index_is_written_out() {
    says(
        Host::Markdown,
        "$A_‸i B_i = q$",
        "i",
        &[
            "**i**: summed index; its partner stands on `B`",
            "runs over 1 2 3 by custom, since no range is declared; an index, as one statement of the document uses it",
            "`A_i B_i` summed over i:\n`A_1 B_1 + A_2 B_2 + A_3 B_3`",
        ],
    );
    says(
        Host::Note,
        "Sag:\n\n  sigma_i‸j n_j = t_i\n",
        "j",
        &[
            "**j**: summed index; its partner stands on `n`",
            "runs over 1 2 3 by custom, since no range is declared; an index, as one statement of the document uses it",
            "`sigma_ij n_j` summed over j:\n`sigma_i1 n_1 + sigma_i2 n_2 + sigma_i3 n_3`",
        ],
    );
}

#[test]
fn what_vanishes_is_struck_out_and_what_coincides_collected() {
    says(
        Host::Markdown,
        &format!("{SAID}$Q^k_k = F_{{ij}} A^{{‸ij}}$"),
        "i",
        &[
            "**i**: summed index, up; its partner stands down on `F`",
            "runs over 1 2 3 like j k l, as declared; an index by declaration",
            "`F_{ij} A^{ij}` summed over i:\n`F_{1j} A^{1j} + F_{2j} A^{2j} + F_{3j} A^{3j}`",
            "`F_{ij} A^{ij}` summed over i j:\n`F_{12} A^{12} + F_{13} A^{13} + F_{21} A^{21} + F_{23} A^{23} + F_{31} A^{31} + F_{32} A^{32}`",
            "~~`F_{11} A^{11}`~~ (`F_{11}` is 0), ~~`F_{22} A^{22}`~~ (`F_{22}` is 0), ~~`F_{33} A^{33}`~~ (`F_{33}` is 0)",
        ],
    );
    says(
        Host::Markdown,
        &format!("{SAID}$q = F_{{‸ii}}$"),
        "i",
        &[
            "**i**: summed index; its partner stands on `F`",
            "runs over 1 2 3 like j k l, as declared; an index by declaration",
            "`F_{ii}` summed over i:\n`0`",
            "~~`F_{11}`~~, ~~`F_{22}`~~, ~~`F_{33}`~~",
        ],
    );
    let (_, markdown) = asked(Host::Markdown, &format!("{SAID}$q = T_{{‸ij}} T_{{ij}}$")).unwrap();
    assert!(markdown.contains("+ 2 T_{12} T_{12} +"), "{markdown}");
}

#[test]
fn a_long_sum_is_cut() {
    let text = "<!-- indexwise: i j run from 1 to 15 -->\n$q = A_{‸i} B_{i}$";
    let (_, markdown) = asked(Host::Markdown, text).unwrap();
    assert!(markdown.ends_with("+ A_{12} B_{12} and 3 more`"), "{markdown}");
    // More than the budget for sums is not written out at all.
    let (_, markdown) = asked(Host::Markdown, &text.replace("15", "999")).unwrap();
    assert!(!markdown.contains("summed over"), "{markdown}");
}

#[test]
fn sums_of_other_kinds() {
    says(
        Host::Markdown,
        "$Q = \\sum_‸a A_a B_a$",
        "a",
        &["**a**: bound by a sum sign; it stands twice under it", "an index by the notation"],
    );
    let (_, markdown) = asked(Host::Markdown, "$Q = (\\partial_‸i w)^2$").unwrap();
    assert!(markdown.starts_with("**i**: summed index; the square over it closes it"), "{markdown}");
    let (_, markdown) = asked(Host::Markdown, "$A_{‸ij} B_i = C_{ij}$ (no sum)").unwrap();
    assert!(markdown.starts_with("**i**: index; the text says that no sum is meant"), "{markdown}");
}

#[test]
fn what_is_no_index_says_so() {
    let text = "$Q_{i1} = ‸\\partial_j T_{ij} \\rho_{\\rm m}$";
    says(Host::Markdown, text, "\\partial", &["**∂**: partial derivative"]);
    let component = "**1**: component; it names a value, no letter to sum";
    says(Host::Markdown, "$Q_{i‸1} = T_{ij} n_j$", "1", &[component]);
    let label = "**m**: label; it belongs to the kernel's name and is no index";
    says(Host::Markdown, "$Q_{i} = T_{ij} n_j \\rho_{\\rm ‸m}$", "m", &[label]);
}

#[test]
fn a_kernel_tells_what_is_declared_and_defined() {
    says(
        Host::Markdown,
        "<!-- indexwise: T_{ij} is symmetric -->\n$Q_{i} = \\partial_j ‸T_{ij}$\n\n$T_{ij} := A_i B_j$",
        "T",
        &[
            "**T**: kernel with 2 slots, symmetric in slots 1 2",
            "declared: `T_{ij} is symmetric`",
            "defined: `T_{ij} := A_i B_j`",
            "used twice in this document, first in line 2",
        ],
    );
    says(
        Host::Markdown,
        "Prose.\n\n$‸\\sigma = q$ and $\\sigma_{ij} n_j = t_i$",
        "\\sigma",
        &["**σ**: kernel with no slots", "used once in this document, first in line 3"],
    );
}

#[test]
fn a_relation_tells_its_verdict() {
    let head =
        "% indexwise: derivations are checked; i j run from 1 to 3; A_{ij} B_{ij} are tensors; T_{ij} is symmetric\n";
    says(
        Host::Latex,
        &format!("{head}\\[q = A_{{ij}} T_{{ij}} ‸= A_{{ij}} T_{{ji}} \\]"),
        "=",
        &["**verified**: this step holds in dimension 3 by its form"],
    );
    let (span, markdown) =
        asked(Host::Latex, &format!("{head}\\[q = A_{{ij}} B_{{ij}} ‸= A_{{ij}} B_{{ji}} \\]")).unwrap();
    assert_eq!(span, "=");
    assert!(markdown.starts_with("**fails**\n\n"), "{markdown}");
    assert!(markdown.contains("counterexample in dimension 3: with `"), "{markdown}");
    assert!(markdown.contains("left side `") && markdown.contains("right side `"), "{markdown}");
}

#[test]
fn macros_labels_and_rules_tell_what_they_stand_for() {
    says(
        Host::Latex,
        "\\newcommand{\\bend}[2][i]{\\kappa_{#1#2}}\n$\\b‸end[j]k$",
        "\\bend",
        &["**\\bend**: macro", "`\\bend[#1 = i]{#2}` stands for `\\kappa_{#1#2}`", "defined in line 1"],
    );
    says(
        Host::Latex,
        "\\[u_i = w_i \\label{eq:u}\\]\nby \\eqref{‸eq:u}",
        "eq:u",
        &["**eq:u**: line 1", "```latex\n\\[u_i = w_i \\label{eq:u}\\]\n```"],
    );
    says(
        Host::Note,
        "Sag:\n\n  (sag) sigma_ij n_j = t_i\n\n  sigma_ij n_j m_i = t_i m_i   [s‸ag]\n",
        "sag",
        &["**sag**: line 3", "```\n(sag) sigma_ij n_j = t_i\n```"],
    );
    let (span, page) = asked(Host::Latex, "% indexwise: allow ind‸ex-thrice in this file\n").unwrap();
    assert_eq!(span, "index-thrice");
    assert!(page.starts_with("# index-thrice\n"), "{page}");
}

#[test]
fn a_macro_of_a_style_names_its_file() {
    let (text, offset) = with_cursor("$\\b‸end_i$");
    let view = View::of(&paper_of(&[(Host::Latex, &text)], &["\n\\newcommand{\\bend}{\\kappa}"]), &Cancel::default());
    let found = hover(&view, 0, offset, None).unwrap();
    assert!(found.markdown.ends_with("defined in sheet-0, line 2"), "{}", found.markdown);
}
