//! What the tests share: fixtures with inline expectations, the laws that hold for every document, generated
//! and damaged documents, and a reader of Rust sources.
//!
//! A test names its document and what is expected of it; how a document is checked and how findings are
//! compared stands here once. Everything in this crate serves tests, so that it may panic where a test fails.

#![allow(clippy::expect_used, clippy::panic, clippy::unwrap_used)]

pub mod annotations;
pub mod generate;
pub mod json_schema;
pub mod laws;
pub mod rust_source;
pub mod variants;

use std::fs;
use std::path::{Path, PathBuf};
use std::sync::Arc;

use indexwise_checker::paper::{Cancel, DocumentAnalysis, Paper, Settings, Source, check};
use indexwise_grammar::hosts::Host;

use annotations::{Fixture, Mismatch};

/// Checks one text as a paper of its own.
pub fn analyse(host: Host, text: &str) -> DocumentAnalysis {
    analyse_with(host, text, &Settings::default(), &Cancel::default())
}

/// Checks one text under settings; the check may be cancelled.
pub fn analyse_with(host: Host, text: &str, settings: &Settings, cancel: &Cancel) -> DocumentAnalysis {
    let source = Source { path: "membrane".to_owned(), text: Arc::from(text), host };
    let paper = Paper { documents: vec![source], ..Paper::default() };
    let mut documents = check(&paper, settings, cancel).documents;
    assert_eq!(documents.len(), 1, "a paper of one document has one analysis");
    documents.remove(0)
}

/// What an annotated text misses: annotations not met, findings not annotated, laws broken. In order of lines.
pub fn mismatches(host: Host, annotated: &str) -> Vec<Mismatch> {
    let fixture = Fixture::read(annotated);
    let analysis = match std::panic::catch_unwind(|| analyse(host, &fixture.text)) {
        Ok(analysis) => analysis,
        Err(_) => return vec![Mismatch { line: 1, message: "the check panicked".to_owned() }],
    };
    let mut found = fixture.compare(&analysis.findings);
    let broken = laws::broken(host, &fixture.text, &analysis);
    found.extend(broken.into_iter().map(|message| Mismatch { line: 1, message: format!("law: {message}") }));
    found.sort_by_key(|mismatch| mismatch.line);
    found
}

/// Asserts that every finding of an annotated text is annotated, every annotation met, and every law kept.
#[track_caller]
pub fn check_fixture(host: Host, annotated: &str) {
    let found: Vec<String> = mismatches(host, annotated).iter().map(ToString::to_string).collect();
    assert!(found.is_empty(), "{}\n---\n{annotated}", found.join("\n"));
}

/// The host of a file, by its suffix.
pub fn host_of(path: &Path) -> Option<Host> {
    match path.extension()?.to_str()? {
        "tex" => Some(Host::Latex),
        "md" => Some(Host::Markdown),
        "inote" => Some(Host::Note),
        _ => None,
    }
}

/// All files below a folder of this crate, in the order of their paths; none if there is no such folder.
pub fn files_below(folder: &str) -> Vec<PathBuf> {
    let mut pending = vec![Path::new(env!("CARGO_MANIFEST_DIR")).join(folder)];
    let mut files = Vec::new();
    while let Some(folder) = pending.pop() {
        for entry in fs::read_dir(folder).into_iter().flatten().flatten() {
            let path = entry.path();
            if path.is_dir() { pending.push(path) } else { files.push(path) }
        }
    }
    files.sort();
    files
}

/// The documents below a folder of this crate: path, host and text without a byte-order mark.
pub fn documents_below(folder: &str) -> Vec<(PathBuf, Host, String)> {
    let with_host = |path: PathBuf| host_of(&path).map(|host| (path, host));
    let documents = files_below(folder).into_iter().filter_map(with_host);
    documents
        .map(|(path, host)| {
            let bytes = fs::read(&path).unwrap_or_else(|error| panic!("{}: {error}", path.display()));
            let text = String::from_utf8_lossy(&bytes).trim_start_matches('\u{feff}').to_owned();
            (path, host, text)
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_silent_note_is_as_expected_and_a_wrong_expectation_is_not_met() {
        let note = "Field notes\n\n  E_ij = 1/2 (u_i,j + u_j,i)\n";
        check_fixture(Host::Note, note);
        assert_eq!(mismatches(Host::Note, &format!("{note}%~^ error index-thrice\n")).len(), 1);
    }

    #[test]
    fn files_are_found_in_the_order_of_their_paths() {
        let files = files_below("fixtures");
        assert!(files.len() > 20 && files.is_sorted());
        assert!(files_below("no such folder").is_empty());
    }

    #[test]
    fn a_generated_document_is_silent() {
        for seed in 0..4 {
            let text = generate::document(seed, 40_000);
            let analysis = analyse(Host::Latex, &text);
            assert!(analysis.statistics.indexed > 50, "{:?}", analysis.statistics);
            // Terms are drawn at random, and two of one side may come out alike.
            let findings = analysis.findings.iter().filter(|at| at.rule != "like-terms");
            let places: Vec<_> = findings.map(|at| (at.rule, at.span.of(&text), &at.message)).collect();
            assert!(places.is_empty(), "{places:#?}");
        }
    }
}
