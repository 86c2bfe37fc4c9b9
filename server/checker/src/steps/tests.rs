//! What is offered for a step that fails: identities are corrupted by one edit each, and the original has to be among
//! the fixes.
//!
//! The identities are textbook ones, from memory; that each holds as it stands is judged here before it is corrupted.

use std::fmt::Write as _;

use indexwise_grammar::hosts::Host;

use crate::finding::{Finding, Fix};
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
    let source = Source { path: "shell".to_owned(), text: text.into(), host: Host::Latex };
    let paper = Paper { documents: vec![source], ..Paper::default() };
    let mut documents = check(&paper, &Settings::default(), &Cancel::default()).documents;
    documents.pop().map(|document| document.findings).unwrap_or_default()
}

fn applied(text: &str, fix: &Fix) -> String {
    let mut text = text.to_owned();
    for edit in fix.edits.iter().rev() {
        text.replace_range(edit.span.start as usize..edit.span.end as usize, &edit.text);
    }
    text
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

#[test]
fn the_original_is_offered_for_most_single_edits() {
    let (mut failing, mut offered, mut report) = (0, 0, String::new());
    let mut mended_identities = 0;
    for (declared, formula) in IDENTITIES {
        let sound = findings(&document(declared, formula));
        if !sound.is_empty() {
            writeln!(report, "UNSOUND {formula}: {}", sound[0].message).unwrap();
            continue;
        }
        let mut any = false;
        for wrong in corruptions(formula) {
            let text = document(declared, &wrong);
            let found = findings(&text);
            let Some(finding) = found.iter().find(|finding| finding.rule.starts_with("step-")) else { continue };
            if !matches!(finding.rule, "step-fails" | "step-needs-dimension") {
                writeln!(report, "{} of {wrong}: {}", finding.rule, finding.message).unwrap();
                continue;
            }
            failing += 1;
            assert!(finding.fixes.len() <= 3);
            for fix in &finding.fixes {
                let after = findings(&applied(&text, fix));
                if !after.is_empty() {
                    writeln!(report, "HARM {wrong}: {}: {}", fix.title, after[0].message).unwrap();
                }
            }
            let original = bare(&document(declared, formula));
            if finding.fixes.iter().any(|fix| bare(&applied(&text, fix)) == original) {
                offered += 1;
                any = true;
            } else {
                let titles: Vec<&str> = finding.fixes.iter().map(|fix| fix.title.as_str()).collect();
                writeln!(report, "not offered for {wrong}: {titles:?}").unwrap();
            }
        }
        mended_identities += usize::from(any);
    }
    eprintln!("{offered} of {failing}, {mended_identities} identities\n{report}");
    assert_eq!(mended_identities, IDENTITIES.len(), "{report}");
    assert!(offered * 100 >= failing * 85, "{offered} of {failing}\n{report}");
}
