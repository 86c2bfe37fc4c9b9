//! What is offered for a step that fails: identities are corrupted by one edit each, and the original has to be among
//! the fixes.
//!
//! The identities are textbook ones, from memory; that each holds as it stands is judged here before it is corrupted.

mod matrices;

use indexwise_grammar::hosts::Host;

use crate::finding::{Finding, Fix, edited};
use crate::paper::{Cancel, Paper, Settings, Source, check};

/// Declarations, and what is claimed under them.
const FLAT: &str = "i j k l m n run from 1 to 3; i j k l m n are cartesian; A_{ij} is symmetric; B_{ij} is a tensor; v_i is a tensor; \
                    w_i is a tensor; F_{ij} is antisymmetric; f is a scalar; h is a scalar; check this";
const CURVED: &str = "g_{ij} is a metric; V^i is a tensor; W_i is a tensor; T_{ij} is a tensor; \
                      F^{ij} is antisymmetric; f is a scalar; check this";

const IDENTITIES: [(&str, &str); 20] = [
    (FLAT, r"\epsilon_{ijk} \epsilon_{imn} = \delta_{jm} \delta_{kn} - \delta_{jn} \delta_{km}"),
    (FLAT, r"\epsilon_{ijk} \epsilon_{ijn} = 2 \delta_{kn}"),
    (FLAT, r"A_{ij} v_j + A_{ji} v_j = 2 A_{ij} v_j"),
    (
        FLAT,
        r"\epsilon_{ijk} \epsilon_{klm} \partial_j \partial_l v_m = \partial_i \partial_j v_j - \partial_j \partial_j v_i",
    ),
    (FLAT, r"\partial_i (f v_i) = f \partial_i v_i + v_i \partial_i f"),
    (FLAT, r"F_{ij} B_{ij} = \frac{1}{2} F_{ij} (B_{ij} - B_{ji})"),
    (FLAT, r"\partial_i (v_j v_j) = 2 v_j \partial_i v_j"),
    (FLAT, r"(v_i w_j - v_j w_i) v_j = v_i w_j v_j - w_i v_j v_j"),
    (FLAT, r"\partial_j (f A_{ij}) - f \partial_j A_{ij} = A_{ij} \partial_j f"),
    (
        FLAT,
        r"\partial_i \partial_i (f h) = h \partial_i \partial_i f + 2 (\partial_i f) (\partial_i h) + f \partial_i \partial_i h",
    ),
    (CURVED, r"\nabla_i V^j = \partial_i V^j + \Gamma^j_{ik} V^k"),
    (CURVED, r"\nabla_i W_j = \partial_i W_j - \Gamma^k_{ij} W_k"),
    (CURVED, r"\nabla_k T_{ij} = \partial_k T_{ij} - \Gamma^l_{ki} T_{lj} - \Gamma^l_{kj} T_{il}"),
    (CURVED, r"\nabla_i \nabla_j V^k - \nabla_j \nabla_i V^k = R^k{}_{lij} V^l"),
    (CURVED, r"\nabla_i \nabla_j W_k - \nabla_j \nabla_i W_k = - R^l{}_{kij} W_l"),
    (CURVED, r"\Gamma^i_{jk} = \frac{1}{2} g^{il} (\partial_j g_{lk} + \partial_k g_{jl} - \partial_l g_{jk})"),
    (CURVED, r"\partial_k g^{ij} = - g^{il} g^{jm} \partial_k g_{lm}"),
    (CURVED, r"\partial_k g_{ij} = \Gamma^l_{ki} g_{lj} + \Gamma^l_{kj} g_{il}"),
    (CURVED, r"\Gamma^i_{ik} = \frac{1}{2} g^{ij} \partial_k g_{ij}"),
    (CURVED, r"\nabla_i W_j - \nabla_j W_i = \partial_i W_j - \partial_j W_i"),
];

fn document(declared: &str, formula: &str) -> String {
    format!("% indexwise: {declared}\n$$ {formula} $$\n")
}

fn findings(text: &str) -> Vec<Finding> {
    findings_in(Host::Latex, text)
}

fn findings_in(host: Host, text: &str) -> Vec<Finding> {
    let source = Source { path: "shell".to_owned(), text: text.into(), host };
    let paper = Paper { documents: vec![source], ..Paper::default() };
    let mut documents = check(&paper, &Settings::default(), &Cancel::default()).documents;
    documents.pop().map(|document| document.findings).unwrap_or_default()
}

fn applied(text: &str, fix: &Fix) -> String {
    edited(text, &fix.edits).unwrap_or_default()
}

fn bare(text: &str) -> String {
    text.split_whitespace().collect()
}

/// Every text with one edit: signs, numbers, letters of one script, derivatives.
fn corruptions(formula: &str) -> Vec<String> {
    let swaps = [
        ("+", "-"),
        ("-", "+"),
        (r"\frac{1}{2}", "2"),
        (r"\frac{1}{2}", ""),
        (r"\frac{1}{2}", "3"),
        (" 2 ", " 3 "),
        (" 2 ", " "),
        (" 2 ", r" \frac{1}{2} "),
        (r"\nabla", r"\partial"),
        (r"\partial", r"\nabla"),
        ("= ", "= - "),
        ("= ", "= 2 "),
        ("= ", r"= \frac{1}{2} "),
    ];
    let mut all = Vec::new();
    for (from, to) in swaps {
        for (at, found) in formula.match_indices(from) {
            let mut copy = formula.to_owned();
            copy.replace_range(at..at + found.len(), to);
            // A sign after another is no edit that one makes.
            if !bare(&copy).contains("--") && !bare(&copy).contains("=2-") {
                all.push(copy);
            }
        }
    }
    all.extend(exchanged_across(formula));
    for (at, _) in formula.match_indices('{') {
        let inner: String = formula[at + 1..].chars().take_while(|sign| *sign != '}').collect();
        let letters: Vec<char> = inner.chars().collect();
        if letters.len() < 2 || !letters.iter().all(char::is_ascii_lowercase) {
            continue;
        }
        for (one, two) in [(0, 1), (1, letters.len() - 1)].iter().filter(|(one, two)| one != two) {
            let mut swapped = letters.clone();
            swapped.swap(*one, *two);
            let mut copy = formula.to_owned();
            copy.replace_range(at + 1..at + 1 + inner.len(), &swapped.into_iter().collect::<String>());
            all.push(copy);
        }
    }
    all
}

/// How many corrupted forms of some identities fail, and for how many of them the original is offered. No fix may leave
/// a finding behind, and each identity has to be found again at least once.
fn share(identities: &[(&str, &str)]) -> (usize, usize, Vec<String>) {
    let (mut failing, mut offered, mut report) = (0, 0, Vec::new());
    for (declared, formula) in identities {
        assert_eq!(findings(&document(declared, formula)), [], "{formula}");
        let before = offered;
        for wrong in corruptions(formula) {
            let text = document(declared, &wrong);
            let found = findings(&text);
            let Some(finding) = found.iter().find(|one| matches!(one.rule, "step-fails" | "step-needs-dimension"))
            else {
                continue;
            };
            failing += 1;
            assert!(finding.fixes.len() <= 3);
            for fix in &finding.fixes {
                assert_eq!(findings(&applied(&text, fix)), [], "{wrong}: {}", fix.title);
            }
            let original = bare(&document(declared, formula));
            if finding.fixes.iter().any(|fix| bare(&applied(&text, fix)) == original) {
                offered += 1;
            } else {
                let titles: Vec<&str> = finding.fixes.iter().map(|fix| fix.title.as_str()).collect();
                report.push(format!("not offered for {wrong}: {titles:?}"));
            }
        }
        assert!(offered > before, "{formula}: {report:#?}");
    }
    (offered, failing, report)
}

/// The last letter of a script and the first of the next change places.
fn exchanged_across(formula: &str) -> Vec<String> {
    let script = |at: &usize| {
        let inner = formula[at + 1..].split('}').next().unwrap_or_default();
        !inner.is_empty() && inner.bytes().all(|sign| sign.is_ascii_lowercase())
    };
    let places: Vec<usize> = formula.match_indices('{').map(|(at, _)| at).filter(script).collect();
    let pairs = places.iter().zip(places.iter().skip(1));
    let swapped = pairs.map(|(one, two)| {
        let (from, to) = (one + formula[*one..].find('}').unwrap_or(2) - 1, two + 1);
        let mut copy = formula.to_owned();
        copy.replace_range(from..=from, &formula[to..=to]);
        copy.replace_range(to..=to, &formula[from..=from]);
        copy
    });
    swapped.collect()
}

#[test]
fn the_original_is_offered_for_most_single_edits_of_flat_identities() {
    let (flat, _) = IDENTITIES.split_at(10);
    let (offered, failing, report) = share(flat);
    assert!(failing >= 20 && offered * 100 >= failing * 85, "{offered} of {failing}: {report:#?}");
}

#[test]
fn the_original_is_offered_for_most_single_edits_of_curved_identities() {
    let (_, curved) = IDENTITIES.split_at(10);
    let (offered, failing, report) = share(curved);
    assert!(failing >= 20 && offered * 100 >= failing * 85, "{offered} of {failing}: {report:#?}");
}

/// The titles of the fixes of the only finding.
#[track_caller]
fn offers(host: Host, text: &str) -> Vec<String> {
    let found = findings_in(host, text);
    assert_eq!(found.len(), 1, "{found:?}");
    found.iter().flat_map(|finding| &finding.fixes).map(|fix| fix.title.clone()).collect()
}

/// The message of the only finding.
#[track_caller]
fn message(text: &str) -> String {
    let found = findings(text);
    assert_eq!(found.len(), 1, "{found:?}");
    found[0].message.clone()
}

#[test]
fn a_correction_that_is_missing_is_written_out() {
    let said = |formula: &str| offers(Host::Latex, &document(CURVED, formula));
    assert!(said(r"\nabla_i V^j = \partial_i V^j").contains(&r"Add + \Gamma^j_{im} V^m".to_owned()));
    assert!(said(r"\nabla_i W_j = \partial_i W_j").contains(&r"Add - \Gamma^m_{ij} W_m".to_owned()));
    let one = said(r"\nabla_k T_{ij} = \partial_k T_{ij} - \Gamma^l_{ki} T_{lj}");
    assert!(one.contains(&r"Add - \Gamma^m_{kj} T_{im}".to_owned()), "{one:?}");
}

#[test]
fn what_is_empty_is_not_offered() {
    // An exchange in the first term would make both terms vanish together.
    for title in offers(Host::Latex, &document(FLAT, r"F_{ij} B_{ij} = 2 F_{ij} B_{ij}")) {
        assert!(title.starts_with("Drop 2") || title.contains(r"\frac"), "{title}");
    }
}

#[test]
fn a_part_that_a_macro_made_is_not_edited_where_it_is_called() {
    let text =
        format!("\\newcommand{{\\twice}}{{3 A_{{ij}}}}\n{}", document(FLAT, r"A_{ij} v_j + A_{ji} v_j = \twice v_j"));
    assert!(!findings(&text).is_empty());
    for fix in findings(&text).iter().flat_map(|finding| &finding.fixes) {
        assert_eq!(findings(&applied(&text, fix)), [], "{}", fix.title);
    }
}

#[test]
fn notes_are_mended_in_their_own_spelling() {
    let text = "The collar\n\nconventions\n  i j k run from 1 to 3\n  i j k are cartesian\n  A_ij is symmetric\n  v_i is a tensor\n\n\
                So that\n\n  f_i = A_ij v_j + A_ji v_j\n      = 1/2 A_ij v_j\n";
    let found = findings_in(Host::Note, text);
    let fixes: Vec<String> = found.iter().flat_map(|finding| &finding.fixes).map(|fix| applied(text, fix)).collect();
    assert!(fixes.contains(&text.replace("1/2", "2")), "{found:?}");
}

#[test]
fn an_edit_that_breaks_the_next_step_is_not_offered() {
    let text = document(FLAT, r"A_{ij} v_j + A_{ji} v_j = 3 A_{ij} v_j = 2 v_j A_{ij}");
    for finding in findings(&text) {
        let first = finding.fixes.first().map(|fix| applied(&text, fix));
        assert_eq!(first.map(|text| findings(&text)), Some(Vec::new()), "{finding:?}");
    }
    let last = document(FLAT, r"A_{ij} v_j + A_{ji} v_j = 2 A_{ij} v_j = 3 A_{ij} v_j");
    for fix in findings(&last).iter().flat_map(|finding| &finding.fixes) {
        assert_eq!(findings(&applied(&last, fix)), [], "{}", fix.title);
    }
}

const COMMUTATOR: &str = r"\nabla_i \nabla_j V^k - \nabla_j \nabla_i V^k = R^k{}_{lji} V^l";
const REVERSED: &str = r"R^i{}_{jkl} := \partial_l \Gamma^i_{jk} - \partial_k \Gamma^i_{jl} + \Gamma^i_{lm} \Gamma^m_{jk} - \Gamma^i_{km} \Gamma^m_{jl}";

#[test]
fn other_signs_of_the_curvature_are_named_and_can_be_declared() {
    let said = message(&document(CURVED, COMMUTATOR));
    assert!(
        said.ends_with(&format!("; it holds with the other sign of the curvature tensor, declared by {REVERSED}")),
        "{said}"
    );
    let declared = format!("{REVERSED}; {CURVED}");
    assert_eq!(findings(&document(&declared, COMMUTATOR)), []);
    // What follows from the curvature tensor takes its sign.
    let ricci = r"\nabla_i \nabla_j V^i - \nabla_j \nabla_i V^i = R_{lj} V^l";
    let curved = format!("R_{{ij}} is the Ricci tensor of g; {CURVED}");
    assert_eq!(findings(&document(&curved, ricci)), []);
    let declared = format!("{REVERSED}; {curved}");
    assert!(message(&document(&declared, ricci)).starts_with("this step does not hold"));
    let both = format!(r"{REVERSED}; R_{{jl}} := R^i{{}}_{{jli}}; {curved}");
    assert_eq!(findings(&document(&both, ricci)), []);
}

#[test]
fn a_definition_by_itself_is_told() {
    let declared = format!("P_{{ij}} := 2 Q_{{ij}}; Q_{{ij}} := P_{{ij}}; {FLAT}");
    let said = message(&document(&declared, r"A_{ij} v_j + A_{ji} v_j = 2 A_{ij} v_j"));
    assert_eq!(said, "Q is defined by itself");
    let declared = format!("P_{{ij}} := 2 A_{{ij}}; Q_{{ij}} := P_{{ij}} + A_{{ij}}; {FLAT}");
    assert_eq!(findings(&document(&declared, r"Q_{ij} v_j = 3 A_{ij} v_j")), []);
}

#[test]
fn a_label_that_makes_a_step_hold_is_named() {
    let claim = document(FLAT, r"(v_i + w_i) (v_i + w_i) = v_i v_i + w_i w_i");
    let labelled = "\\begin{equation} v_i w_i = 0 \\label{eq:across} \\end{equation}\n";
    let other = "\\begin{equation} u_i w_i = 0 \\label{eq:other} \\end{equation}\n";
    let unknown = claim.replace("v_i is a tensor; ", "");
    let said = message(&format!("{labelled}{other}{unknown}"));
    assert!(said.ends_with("; it holds with (eq:across)"), "{said}");
    assert!(!message(&format!("{other}{unknown}")).contains("it holds with"));
}
