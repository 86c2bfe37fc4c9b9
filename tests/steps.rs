//! The cases that the verification of steps has to get right, as documents in `steps/`, annotated like fixtures.
//!
//! What is here takes more evaluation than a fixture may, on which every offered fix is tried again; only findings are
//! compared, and what is said of every step that was judged. The counterexamples of `steps/wrong*.tex` are computed again
//! by `references/counterexamples.py`.

#![allow(clippy::panic, clippy::unwrap_used)]

use std::fs;

use indexwise_checker::finding::StepVerdict;
use indexwise_checker::paper::DocumentAnalysis;
use indexwise_tests::annotations::Fixture;
use indexwise_tests::{analyse, files_below, host_of};

/// The least number of failing steps whose counterexamples are written out in full.
const COUNTEREXAMPLES: usize = 20;

/// Documents by the beginning of their names, with their analyses and what their annotations miss.
fn judged(beginning: &str) -> Vec<(String, DocumentAnalysis)> {
    let mut found = Vec::new();
    for path in files_below("steps") {
        let name = path.file_name().unwrap().to_str().unwrap().to_owned();
        if !name.starts_with(beginning) {
            continue;
        }
        let fixture = Fixture::read(&fs::read_to_string(&path).unwrap());
        let analysis = analyse(host_of(&path).unwrap(), &fixture.text);
        let missed: Vec<String> = fixture.compare(&analysis.findings).iter().map(ToString::to_string).collect();
        assert!(missed.is_empty(), "{name}: {missed:#?}");
        found.push((name, analysis));
    }
    assert!(!found.is_empty(), "{beginning}");
    found
}

fn verdicts(beginning: &str) -> Vec<StepVerdict> {
    judged(beginning).into_iter().flat_map(|(_, analysis)| analysis.steps).map(|step| step.verdict).collect()
}

fn kinds(verdicts: &[StepVerdict]) -> Vec<&'static str> {
    verdicts.iter().map(|verdict| verdict.verdict).collect()
}

#[test]
fn what_is_wrong_is_shown_by_numbers() {
    let verdicts = verdicts("wrong");
    assert!(verdicts.len() >= COUNTEREXAMPLES);
    for verdict in verdicts {
        let found = verdict.counterexample.unwrap_or_else(|| panic!("{}", verdict.verdict));
        assert_eq!((verdict.verdict, verdict.fails), ("fails", vec![found.dimension]));
        assert_ne!(found.left, found.right);
        let fields = found.fields.iter();
        let whole = fields.clone().all(|field| {
            let inside = field.component.iter().all(|member| (1..=found.dimension).contains(member));
            let terms = field.terms.iter().all(|(_, exponents)| exponents.len() == found.variables.len());
            inside && terms && !field.terms.is_empty() && field.levels.len() == field.component.len()
        });
        // A step without fields has numbers of its own.
        assert!(whole && fields.count() >= found.values.len(), "{found:?}");
    }
}

#[test]
fn some_steps_need_a_dimension() {
    let weyl = verdicts("dimensions-three");
    let verdicts = verdicts("dimensions.");
    let told = |of: &StepVerdict| (of.verdict, of.holds.clone(), of.fails.clone(), of.undefined.clone());
    let needs = |holds: &[usize], fails: &[usize], undefined: &[usize]| {
        ("needs dimension", holds.to_vec(), fails.to_vec(), undefined.to_vec())
    };
    let expected =
        [needs(&[2], &[3, 4], &[]), needs(&[2], &[3, 4], &[]), needs(&[4], &[2, 3], &[]), needs(&[2, 3, 4], &[5], &[])];
    assert_eq!(verdicts.iter().take(expected.len()).map(told).collect::<Vec<_>>(), expected);
    assert!(verdicts.iter().skip(expected.len()).all(|verdict| verdict.verdict == "holds"), "{verdicts:?}");
    let three = needs(&[3], &[4], &[2]);
    assert_eq!(weyl.iter().map(told).collect::<Vec<_>>(), [three.clone(), three]);
    says_what_it_rests_on(&verdicts);
}

#[test]
fn givens_are_used_and_a_failure_under_them_is_no_proof() {
    let verdicts = verdicts("givens");
    let kinds = kinds(&verdicts);
    assert_eq!(kinds.iter().filter(|kind| **kind == "holds").count(), kinds.len() - 1, "{kinds:?}");
    let dimensions: Vec<_> = verdicts.iter().take(3).map(|verdict| verdict.holds.as_slice()).collect();
    assert_eq!(dimensions, [[2, 3, 4]; 3], "Killing's equation");
    assert!(verdicts.iter().all(|verdict| verdict.counterexample.is_none()));
}

#[test]
fn an_ordinary_page_has_no_errors() {
    for (name, analysis) in judged("ordinary") {
        assert_eq!(analysis.statistics.steps.fails, 0, "{name}");
        assert!(analysis.statistics.steps.undecided > 5, "{name}: what is no step is told as a hint");
    }
    judged("in-words");
}

#[test]
fn signs_are_told_and_can_be_declared() {
    let messages: Vec<String> = judged("signs.")
        .into_iter()
        .flat_map(|(_, analysis)| analysis.findings)
        .filter(|finding| finding.rule == "step-fails")
        .map(|finding| finding.message)
        .collect();
    let said = [
        "the other sign of the curvature tensor, declared by R^i{}_{jkl} := ",
        "the other sign of the curvature tensor, declared by R^i{}_{jkl} := ",
        "the other sign of the epsilon tensor, declared by \\epsilon_{ijk} := -\\sqrt{|g|} \\varepsilon_{ijk}",
        "epsilon as a symbol, declared by \\epsilon is a symbol",
    ];
    assert_eq!(messages.len(), said.len());
    for (message, said) in messages.iter().zip(said) {
        assert!(message.contains(&format!("; it holds with {said}")), "{message}");
    }
    judged("signs-declared");
    judged("signs-under-roots");
}

#[test]
fn reasons_that_are_labels_are_used() {
    assert_eq!(kinds(&verdicts("reasons")), ["holds", "holds by form", "holds by form", "fails"]);
}

#[test]
fn what_asks_too_much_is_undecided() {
    for (name, analysis) in judged("hostile") {
        assert_eq!(analysis.statistics.formulas, analysis.steps.len(), "{name}: every formula has a verdict");
    }
    judged("cyclic");
    judged("readings");
    judged("functions");
}

/// Dimensions, defaults and the chance of error are told.
fn says_what_it_rests_on(verdicts: &[StepVerdict]) {
    let einstein = verdicts.first().unwrap();
    assert_eq!(einstein.tried, [2, 3, 4]);
    assert_eq!(einstein.defaults.first().map(String::as_str), Some("g is the metric"));
    assert!(einstein.defaults.iter().any(|said| said == "R_{jl} = R^i_{jil}"), "{:?}", einstein.defaults);
    let held = verdicts.iter().find(|verdict| verdict.verdict == "holds" && verdict.holds.len() > 1).unwrap();
    assert!(held.error_bits.is_some_and(|bits| bits >= 60), "{held:?}");
}
