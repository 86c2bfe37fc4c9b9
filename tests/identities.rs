//! Published identities and their corrupted twins, judged as an author's own steps would be.
//!
//! `identities/*.tex` hold the identities, each with its source beside it; `identities/corrupted/*.tex` hold the same
//! ones under the same labels, each with one slip (a sign, a factor, an index, a lost or changed derivative).
//! `references/identities.py` shows by NumPy and SymPy alone that every identity holds and that every slip breaks it.
//! A wrong verdict in either direction fails here, and so does a step that is left undecided.

#![allow(clippy::panic, clippy::unwrap_used)]

use std::collections::BTreeMap;
use std::fs;
use std::path::{Path, PathBuf};

use indexwise_checker::finding::Finding;
use indexwise_checker::paper::DocumentAnalysis;
use indexwise_grammar::hosts::Host;
use indexwise_tests::analyse;

/// The least number of identities, and of corrupted ones.
const LEAST: usize = 120;
/// Slips that make an identity hold in some dimensions only, by label.
const NEEDS_DIMENSION: &[&str] = &[];
/// Slips that hold where a changed inverse metric is read as the change of the metric, raised: hints, and no proof.
const READ_IN_TWO_WAYS: &[&str] = &["vary-inverse", "vary-kinetic"];

/// The documents of a folder in the order of their names, with their texts.
fn documents(folder: &str) -> Vec<(PathBuf, String)> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join(folder);
    let entries = fs::read_dir(&folder).unwrap().map(|entry| entry.unwrap().path());
    let mut paths: Vec<PathBuf> = entries.filter(|path| path.extension().is_some_and(|end| end == "tex")).collect();
    paths.sort();
    paths.into_iter().map(|path| (path.clone(), fs::read_to_string(path).unwrap())).collect()
}

/// The labels of a document, each with the place where its formula begins and ends.
fn labels(text: &str) -> BTreeMap<&str, (usize, usize)> {
    let mut found = BTreeMap::new();
    for (begin, _) in text.match_indices("\\begin{equation}") {
        let end = begin + text[begin..].find("\\end{equation}").unwrap();
        let label = text[begin..end].split("\\label{").nth(1).and_then(|rest| rest.split('}').next()).unwrap();
        assert!(found.insert(label, (begin, end)).is_none(), "{label} stands twice");
    }
    found
}

/// The findings about steps between two places.
fn about_steps(analysis: &DocumentAnalysis, (begin, end): (usize, usize)) -> Vec<&Finding> {
    let inside = |finding: &&Finding| (begin..end).contains(&(finding.span.start as usize));
    analysis.findings.iter().filter(|finding| finding.rule.starts_with("step-")).filter(inside).collect()
}

/// Judges the documents of a folder; gives the labels, and the sentences about verdicts that `wrong` objects to.
fn judged(folder: &str, wrong: impl Fn(&str, &[&Finding]) -> bool, holds: bool) -> (Vec<String>, Vec<String>) {
    let (mut all, mut objections) = (Vec::new(), Vec::new());
    for (path, text) in documents(folder) {
        let analysis = analyse(Host::Latex, &text);
        let labels = labels(&text);
        for (label, place) in &labels {
            let found = about_steps(&analysis, *place);
            if wrong(label, &found) {
                let said: Vec<&str> = found.iter().map(|finding| finding.message.as_str()).collect();
                objections.push(format!("{}: {label}: {said:?}", path.display()));
            }
        }
        let steps = analysis.statistics.steps;
        let counted = if holds { (steps.holds, steps.fails) } else { (steps.fails, steps.holds) };
        let open = labels.keys().filter(|label| !holds && READ_IN_TWO_WAYS.contains(label)).count();
        if (counted, steps.undecided) != ((labels.len() - open, 0), open) {
            objections.push(format!("{}: {} identities, but {steps:?}", path.display(), labels.len()));
        }
        all.extend(labels.keys().map(|label| (*label).to_owned()));
    }
    (all, objections)
}

#[test]
fn published_identities_hold() {
    let (labels, objections) = judged("identities", |_, found| !found.is_empty(), true);
    assert!(objections.is_empty(), "{objections:#?}");
    assert!(labels.len() >= LEAST, "{} identities", labels.len());
}

#[test]
fn corrupted_identities_fail_with_a_proof() {
    let wanted = |label: &str| if NEEDS_DIMENSION.contains(&label) { "step-needs-dimension" } else { "step-fails" };
    let wrong = |label: &str, found: &[&Finding]| match found {
        [one] if READ_IN_TWO_WAYS.contains(&label) => one.rule != "step-not-shown",
        [one] => {
            let proved = one.verdict.as_ref().is_some_and(|verdict| verdict.counterexample.is_some());
            one.rule != wanted(label) || !proved
        }
        _ => true,
    };
    let (labels, objections) = judged("identities/corrupted", wrong, false);
    assert!(objections.is_empty(), "{objections:#?}");
    assert!(labels.len() >= LEAST, "{} corrupted identities", labels.len());
}

#[test]
fn every_identity_has_a_corrupted_twin() {
    for ((path, right), (_, corrupted)) in documents("identities").iter().zip(documents("identities/corrupted")) {
        let (right_labels, corrupted_labels) = (labels(right), labels(&corrupted));
        assert!(right_labels.keys().eq(corrupted_labels.keys()), "{}", path.display());
        for (label, (begin, end)) in &right_labels {
            let (other_begin, other_end) = corrupted_labels[label];
            assert_ne!(right[*begin..*end], corrupted[other_begin..other_end], "{label} is not changed");
        }
    }
    assert_eq!(documents("identities").len(), documents("identities/corrupted").len());
}
