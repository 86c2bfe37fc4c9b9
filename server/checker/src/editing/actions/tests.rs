//! Actions on small documents: the cursor, what is offered, and the text after it.

#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::indexing_slicing)]

use indexwise_grammar::hosts::Host;

use super::*;
use crate::editing::cursor::Placed;
use crate::finding::edited;

/// All actions with the texts that they leave.
#[track_caller]
fn offered(text: &str, host: Host) -> Vec<(Action, String)> {
    let placed = Placed::new(text, host);
    let found = actions(&placed.view, 0, placed.selection, &placed.analysis());
    let after = |action: Action| {
        let text = edited(&placed.text, &action.edits).unwrap_or_else(|| panic!("edits in order: {action:?}"));
        (action, text)
    };
    found.into_iter().map(after).collect()
}

/// The action with this title leaves this text.
#[track_caller]
fn does(host: Host, before: &str, title: &str, after: &str) {
    let found = offered(before, host);
    let titles: Vec<&str> = found.iter().map(|(action, _)| action.title.as_str()).collect();
    let Some((_, text)) = found.iter().find(|(action, _)| action.title == title) else {
        panic!("{before}\nno `{title}` among {titles:#?}")
    };
    assert_eq!(text, after, "{before}");
}

/// No action's title begins like this.
#[track_caller]
fn not(host: Host, before: &str, title: &str) {
    let found = offered(before, host);
    let odd: Vec<&str> =
        found.iter().map(|(action, _)| action.title.as_str()).filter(|t| t.starts_with(title)).collect();
    assert!(odd.is_empty(), "{before}\n{odd:?}");
}

const OUT: &str = "Write the contraction out";
const DECLARED: &str = "<!-- indexwise: i j k run from 1 to 2; i j k are cartesian -->\n\n";

#[track_caller]
fn written(before: &str, after: &str) {
    does(Host::Markdown, &format!("{DECLARED}{before}"), OUT, &format!("{DECLARED}{after}"));
}

#[test]
fn mends_come_first_and_the_only_sure_one_is_preferred() {
    let text = "Balance $A_{ab} = B_{ac} C_{cb}$, so $\\nabla_{\\mu T^{‸\\mu\\nu}} = J^\\nu$.";
    let found = offered(text, Host::Latex);
    let first = &found[0].0;
    assert_eq!((first.kind, first.preferred), (ActionKind::Fix { finding: 0 }, true));
    assert!(found[0].1.contains("\\nabla_{\\mu} T^{\\mu\\nu} = J"), "{}", found[0].1);
    assert_eq!(found.last().unwrap().0.title, "Allow script-swallows-factor here");
}

#[test]
fn away_from_a_finding_none_of_its_mends_is_offered() {
    let text = "We have $A_i = B_{‸ij} C_j$ and $D_i = E_{ij} F_j$, so $\\nabla_a T^{ab} = J^{c}$.";
    assert!(offered(text, Host::Latex).iter().all(|(action, _)| !matches!(action.kind, ActionKind::Fix { .. })));
    not(Host::Latex, text, "Allow");
}

#[test]
fn a_sum_takes_the_place_of_its_term() {
    written("$t_i = ‸\\sigma_{ij} n_j$", "$t_i = \\sigma_{i1} n_1 + \\sigma_{i2} n_2$");
    written("$t_i = p_i + \\sigma_{ij} ‸n_j$", "$t_i = p_i + \\sigma_{i1} n_1 + \\sigma_{i2} n_2$");
    written("$t_i = \\frac{‸\\sigma_{ij} n_j}{q}$", "$t_i = \\frac{\\sigma_{i1} n_1 + \\sigma_{i2} n_2}{q}$");
    written("$t_i = 2 (p_i + ‸\\sigma_{ij} n_j)$", "$t_i = 2 (p_i + \\sigma_{i1} n_1 + \\sigma_{i2} n_2)$");
}

#[test]
fn a_minus_goes_to_every_term_and_braces_become_brackets() {
    written("$t_i = p_i - ‸\\sigma_{ij} n_j$", "$t_i = p_i - \\sigma_{i1} n_1 - \\sigma_{i2} n_2$");
    written("$t_i = - ‸\\sigma_{ij} n_j$", "$t_i = -\\sigma_{i1} n_1 - \\sigma_{i2} n_2$");
    written("$t_i = q {‸\\sigma_{ij} n_j}$", "$t_i = q {(\\sigma_{i1} n_1 + \\sigma_{i2} n_2)}$");
}

#[test]
fn a_note_is_written_as_a_note() {
    let lead = "Sheet\n\nconventions\n  i j k run from 1 to 2\n  i j k are cartesian\n\n";
    does(
        Host::Note,
        &format!("{lead}  t_i = ‸sigma_ij n_j\n"),
        OUT,
        &format!("{lead}  t_i = sigma_i1 n_1 + sigma_i2 n_2\n"),
    );
}

#[test]
fn what_would_tear_the_layout_is_not_written_out() {
    not(Host::Markdown, &format!("{DECLARED}$t_i = ‸p_i$"), OUT);
    let rows = "\\begin{align} t_i = {}& ‸\\sigma_{ij} \\\\ & n_j \\end{align}";
    not(Host::Latex, rows, OUT);
}

#[test]
fn fresh_letters_for_all_dummies_or_for_one() {
    let lead = "<!-- indexwise: i j k l m run from 1 to 3; i j k l m are cartesian -->\n\n";
    let text = |rest: &str| format!("{lead}{rest}");
    does(
        Host::Markdown,
        &text("$t_i = ‸c_{ijk} u_j v_k + p_i$"),
        "Write l m for the dummies j k",
        &text("$t_i = c_{ilm} u_l v_m + p_i$"),
    );
    does(
        Host::Markdown,
        &text("$t_i = c_{i‸jk} u_j v_k + p_i$"),
        "Write l for the dummy j",
        &text("$t_i = c_{ilk} u_l v_k + p_i$"),
    );
    not(Host::Markdown, &text("$t_i = ‸p_i$"), "Write");
    // The family has no letter left.
    let full = "<!-- indexwise: i j run from 1 to 3; i j are cartesian -->\n\n$t_i = ‸\\sigma_{ij} n_j$";
    not(Host::Markdown, full, "Write j");
    not(Host::Markdown, full, "Write k");
}

#[test]
fn greek_letters_stay_greek_and_commands_stay_apart() {
    does(
        Host::Latex,
        "$v_\\mu = ‸g_{\\mu\\nu}v^{\\nu}$ and $w_\\mu = g_{\\mu\\nu} w^\\nu$",
        "Write ρ for the dummy ν",
        "$v_\\mu = g_{\\mu\\rho}v^{\\rho}$ and $w_\\mu = g_{\\mu\\nu} w^\\nu$",
    );
}

const LABELLED: &str = "\\begin{equation}\\label{eq:hooke} \\sigma_{ij} = c_{ijkl} e_{kl} .\\end{equation}\n\
    \\begin{equation}\\label{eq:strain} e_{ij} = \\frac12 u_{i,j} + \\frac12 u_{j,i} \\end{equation}\n";

#[test]
fn a_labelled_equation_is_put_in_with_fresh_dummies() {
    let hooke = "Insert (eq:hooke) here with fresh dummies";
    // The dummies k l meet the letters that stand there.
    does(
        Host::Latex,
        &format!("{LABELLED}\\[ f_{{kl}} \\tau_{{ij}} = ‸ f_{{kl}} \\]"),
        hooke,
        &format!("{LABELLED}\\[ f_{{kl}} \\tau_{{ij}} = c_{{ijmn}} e_{{mn}} f_{{kl}} \\]"),
    );
}

#[test]
fn an_equation_that_meets_no_letter_keeps_its_own() {
    let before = format!("{LABELLED}\\[ \\tau_{{ij}} = ‸ \\]");
    does(Host::Latex, &before, "Insert (eq:hooke) here with fresh dummies", &before.replace('‸', "c_{ijkl} e_{kl}"));
}

#[test]
fn a_sum_is_put_in_brackets_where_a_minus_or_a_factor_stands() {
    let strain = "Insert (eq:strain) here with fresh dummies";
    let before = format!("{LABELLED}\\[ \\tau_{{ij}} = p_{{ij}} - ‸ \\]");
    does(Host::Latex, &before, strain, &before.replace('‸', "(\\frac12 u_{i,j} + \\frac12 u_{j,i})"));
    let before = format!("{LABELLED}\\[ \\tau_{{ij}} = ‸ q \\]");
    does(Host::Latex, &before, strain, &before.replace('‸', "(\\frac12 u_{i,j} + \\frac12 u_{j,i})"));
}

#[test]
fn an_empty_formula_takes_the_whole_equation() {
    let before = format!("{LABELLED}\\[ ‸ \\]");
    does(
        Host::Latex,
        &before,
        "Insert (eq:hooke) here with fresh dummies",
        &before.replace('‸', "\\sigma_{ij} = c_{ijkl} e_{kl}"),
    );
}

#[test]
fn a_number_is_not_put_in_nor_anything_right_before_a_factor() {
    let free = format!("{LABELLED}\\begin{{equation}} \\label{{eq:free}} p_{{ij}} n_j = 0 \\end{{equation}}\n");
    not(Host::Latex, &format!("{free}\\[ \\tau_{{ij}} = ‸ \\]"), "Insert (eq:free)");
    not(Host::Latex, &format!("{free}\\[ \\tau_{{ij}} = ‸p_{{ij}} \\]"), "Insert");
}

#[test]
fn no_equation_is_put_into_a_script_or_a_word() {
    for place in ["\\tau_{i‸j} = 0", "\\ta‸u_{ij} = 0", "\\tau_‸{ij} = 0"] {
        let placed = Placed::new(&format!("{LABELLED}\\[ {place} \\]"), Host::Latex);
        assert_eq!(insertions(&placed.view, 0, placed.at()), [], "{place}");
    }
    let placed = Placed::new(&format!("{LABELLED}\\[ \\tau_{{ij}} = 2‸ \\]"), Host::Latex);
    let labels: Vec<String> = insertions(&placed.view, 0, placed.at()).into_iter().map(|(label, _)| label).collect();
    assert_eq!(labels, ["eq:hooke", "eq:strain"]);
}

#[test]
fn a_derivation_is_checked_by_a_directive_before_it() {
    let chain = "A_i = B_{ij} C_j = D_i";
    does(
        Host::Latex,
        &format!("Text\n\n  \\[ {chain}‸ \\]\n"),
        "Check this derivation",
        &format!("Text\n\n  % indexwise: check this\n  \\[ {chain} \\]\n"),
    );
    does(
        Host::Latex,
        "Here $x_i = y_i$ and $‸A_i = B_{ij} C_j$\n",
        "Check this step",
        "Here $x_i = y_i$ and \n% indexwise: check this\n$A_i = B_{ij} C_j$\n",
    );
    does(
        Host::Markdown,
        &format!("Text\n\n$$\n{chain}‸\n$$\n"),
        "Check this derivation",
        &format!("Text\n\n<!-- indexwise: check this -->\n$$\n{chain}\n$$\n"),
    );
    does(
        Host::Markdown,
        &format!("Here\n${chain}‸$ is said.\n"),
        "Check this derivation",
        &format!("Here <!-- indexwise: check this -->\n${chain}$ is said.\n"),
    );
    not(Host::Latex, &format!("% indexwise: check this\n\\[ {chain}‸ \\]\n"), "Check");
    not(Host::Latex, "\\[ A_{ij}‸ B_j \\]\n", "Check");
    // In a note steps are judged without being asked for.
    not(Host::Note, &format!("Sheet\n\n  {chain}‸\n"), "Check");
}

#[test]
fn a_label_that_a_step_holds_with_is_taken_as_given() {
    let lead = "% indexwise: i j run from 1 to 3; i j are cartesian; w_i is a tensor\n\
        \\begin{equation} v_i w_i = 0 \\label{eq:across} \\end{equation}\n";
    let step = "\\begin{equation} (v_i + w_i) (v_i + w_i) ‸= v_i v_i + w_i w_i \\end{equation}\n";
    let before = format!("{lead}% indexwise: check this\n{step}");
    let after = before.replace('‸', "").replace("check this\n", "check this using (eq:across)\n");
    does(Host::Latex, &before, "Check this using (eq:across), with which it holds", &after);
}

#[test]
fn a_rule_is_allowed_last_and_in_the_form_of_its_host() {
    let lead = "Balance $A_i = B_{ij} C_j$ and $D_i = E_{ij} F_j$.\n\n";
    does(
        Host::Markdown,
        &format!("{lead}$A_{{ij}} = B_{{i‸k}}$\n"),
        "Allow free-index-mismatch here",
        &format!("{lead}<!-- indexwise: allow free-index-mismatch here -->\n$A_{{ij}} = B_{{ik}}$\n"),
    );
    let note = "Sheet\n\n  A_i = B_ij C_j\n  D_i = E_ij F_j\n";
    does(
        Host::Note,
        &format!("{note}  G_i = H_i‸k\n"),
        "Allow free-index-mismatch here",
        &format!("{note}  indexwise: allow free-index-mismatch here\n  G_i = H_ik\n"),
    );
}

#[test]
fn a_symmetry_that_a_finding_asks_for_is_declared() {
    let lead = "% indexwise: i j k run from 1 to 3; i j k are cartesian; S_{ij} is symmetric; T_{ij} is a tensor\n";
    let before = format!("{lead}\\[ S_{{ij}} = 2 ‸T_{{ij}} \\]\n");
    let after = before.replace('‸', "").replace("tensor\n", "tensor\n%   T_{ij} is symmetric\n");
    does(Host::Latex, &before, "Declare that T is symmetric", &after);
    // A second kernel without the symmetry is left, so that one sentence does not do.
    let two = lead.replace("T_{ij} is a tensor", "T_{ij} U_{ij} are tensors");
    not(Host::Latex, &format!("{two}\\[ S_{{ij}} = ‸U_{{ij}} + T_{{ij}} \\]\n"), "Declare that");
}

#[test]
fn custom_is_put_aside_by_a_declaration() {
    let before = "Torques\n\n\\[ m^i = h \\sigma^i + ‸\\epsilon^{ijk} g_{jk} \\]\n";
    let after = format!("% indexwise: g_{{jk}} is a tensor\n{}", before.replace('‸', ""));
    does(Host::Latex, before, "Declare that g has no symmetry", &after);
}

#[test]
fn nothing_is_offered_in_prose() {
    assert_eq!(offered("Plain ‸words, $A_i = B_i$.", Host::Latex), []);
    assert_eq!(offered("‸", Host::Note), []);
}
