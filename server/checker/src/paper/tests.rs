//! Tests of what the caller may want of a check: which rules, and how grave each is.

use super::*;

const TEXT: &str =
    "$A_i = B_i$ and $A_i = C_i$, but $A_i = B^j C_{ij} + D_i + E_k$ and $q_i = \\frac{\\sigma_{ij} n_j}$";

/// Rules and severities of what is found in the text.
fn found(settings: &Settings) -> Vec<(&'static str, Severity)> {
    let source = Source { path: "shell".to_owned(), text: TEXT.into(), host: Host::Markdown };
    let paper = Paper { documents: vec![source], ..Paper::default() };
    let documents = check(&paper, settings, &Cancel::default()).documents;
    documents.iter().flat_map(|document| &document.findings).map(|found| (found.rule, found.severity)).collect()
}

fn levels(levels: &[(&str, Option<Severity>)]) -> Settings {
    let levels = levels.iter().map(|(rule, level)| ((*rule).to_owned(), *level)).collect();
    Settings { levels, ..Settings::default() }
}

const MISMATCH: &str = "free-index-mismatch";

#[test]
fn a_level_replaces_the_severity_of_a_rule_and_of_no_other() {
    assert_eq!(found(&Settings::default()), [(MISMATCH, Severity::Error)]);
    for severity in [Severity::Hint, Severity::Warning, Severity::Error] {
        assert_eq!(found(&levels(&[(MISMATCH, Some(severity))])), [(MISMATCH, severity)]);
    }
    assert_eq!(found(&levels(&[("index-thrice", None)])), [(MISMATCH, Severity::Error)]);
}

#[test]
fn a_rule_that_is_off_is_silent_and_the_last_word_counts() {
    assert_eq!(found(&levels(&[(MISMATCH, None)])), []);
    assert_eq!(found(&levels(&[(MISMATCH, Some(Severity::Hint)), (MISMATCH, None)])), []);
    assert_eq!(found(&levels(&[(MISMATCH, None), (MISMATCH, Some(Severity::Hint))])), [(MISMATCH, Severity::Hint)]);
}

#[test]
fn a_rule_that_is_asked_for_by_name_is_on_whatever_its_level() {
    let named = || vec![MISMATCH.to_owned()];
    let off = levels(&[(MISMATCH, None)]);
    assert_eq!(found(&Settings { only: named(), ..off }), [(MISMATCH, Severity::Error)]);
    let hint = levels(&[(MISMATCH, Some(Severity::Hint))]);
    assert_eq!(found(&Settings { only: named(), ..hint.clone() }), [(MISMATCH, Severity::Hint)]);
    assert_eq!(found(&Settings { without: named(), ..hint.clone() }), []);
    assert_eq!(found(&Settings { only: named(), without: named(), ..hint }), []);
}

#[test]
fn a_level_switches_on_what_is_off_by_default() {
    let unread = |level| found(&levels(&[("unread", level), (MISMATCH, None)]));
    assert_eq!(unread(Some(Severity::Warning)), [("unread", Severity::Warning)]);
    assert_eq!(unread(None), []);
}

#[test]
fn a_scan_made_before_counts_for_its_own_text_alone() {
    let source = Source { path: "shell".to_owned(), text: TEXT.into(), host: Host::Markdown };
    let elsewhere = Scanned::new("no formula".into(), Host::Markdown);
    let of_another_host = Scanned::new(source.text.clone(), Host::Note);
    let own = Scanned::new(source.text.clone(), Host::Markdown);
    for made in [None, Some(elsewhere), Some(of_another_host), Some(own)] {
        let paper = Paper { documents: vec![source.clone()], scans: vec![made], ..Paper::default() };
        let documents = check(&paper, &Settings::default(), &Cancel::default()).documents;
        let rules: Vec<_> = documents.iter().flat_map(|document| &document.findings).map(|found| found.rule).collect();
        assert_eq!(rules, [MISMATCH]);
    }
}
