//! Checks every document in `fixtures/`: its annotations, and the laws that hold for every document.
//!
//! To add a case, add a file or a few lines to one; `annotations` in the library says how findings are written
//! down. A failure prints each mismatch with file and line, and findings in the form in which they are annotated.

#![allow(clippy::panic)]

use indexwise_tests::{documents_below, mismatches};

/// Fewer fixtures than this, and the folder has not been found.
const FEWEST: usize = 20;

#[test]
fn fixtures_say_what_is_found() {
    let fixtures = documents_below("fixtures");
    assert!(fixtures.len() >= FEWEST, "only {} fixtures were found", fixtures.len());
    let mut report = Vec::new();
    for (path, host, text) in &fixtures {
        let name = path.file_name().unwrap_or_default().to_string_lossy();
        report.extend(mismatches(*host, text).iter().map(|at| format!("{name}:{}: {}", at.line, at.message)));
    }
    assert!(report.is_empty(), "{} mismatches\n{}", report.len(), report.join("\n"));
}
