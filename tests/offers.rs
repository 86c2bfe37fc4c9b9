//! The laws of what an editor offers, on every fixture and every demonstration document, at places spread over the text:
//!
//! - no question panics, at any place, nor on a text that ends there;
//! - what an action does leaves a text without new errors and warnings, and a mend takes its finding away; what asks for
//!   verdicts is compared without them, since to find a step wrong is what it is for;
//! - what a completion replaces touches the cursor; a growing selection grows, and holds the cursor;
//! - folds go over several lines; entries of the outline hold their parts.

#![allow(clippy::panic, clippy::unwrap_used, clippy::expect_used)]

use std::collections::BTreeMap;
use std::sync::Arc;

use indexwise_checker::editing::actions::{Action, ActionKind, actions, insertions};
use indexwise_checker::editing::completion::complete;
use indexwise_checker::editing::folding::{folds, selection};
use indexwise_checker::editing::hints::hints;
use indexwise_checker::editing::ledger_view::ledger_at;
use indexwise_checker::editing::lenses::lenses;
use indexwise_checker::editing::outline::{Entry, outline};
use indexwise_checker::finding::{Severity, edited};
use indexwise_checker::paper::{Cancel, DocumentAnalysis, Paper, Settings, Source, StepMode, View};
use indexwise_grammar::hosts::Host;
use indexwise_grammar::span::Span;
use indexwise_tests::annotations::Fixture;
use indexwise_tests::documents_below;

/// Places of a document at which everything is asked that is asked of a place.
const PLACES: usize = 25;
/// Places of a document at which what is offered is done, beside those of its findings.
const DONE: usize = 2;
/// Directives of one kind that are tried in a document: one is like the other.
const DIRECTIVES: usize = 2;
/// Places of a document at which the text ends.
const ENDS: usize = 2;

struct Sheet {
    name: String,
    host: Host,
    text: String,
    view: View,
    analysis: DocumentAnalysis,
}

/// Every document, judged without its steps.
fn sheets() -> Vec<Sheet> {
    let fixtures =
        documents_below("fixtures").into_iter().map(|(path, host, text)| (path, host, Fixture::read(&text).text));
    let all = fixtures.chain(documents_below("documents"));
    all.map(|(path, host, text)| {
        let view = view(host, &text);
        let analysis = judged(&view);
        Sheet { name: path.file_name().unwrap().to_string_lossy().into_owned(), host, text, view, analysis }
    })
    .collect()
}

fn view(host: Host, text: &str) -> View {
    let source = Source { path: "membrane".to_owned(), text: Arc::from(text), host };
    View::of(&Paper { documents: vec![source], ..Paper::default() }, &Cancel::default())
}

fn judged(view: &View) -> DocumentAnalysis {
    let settings = Settings { steps: StepMode::Off, ..Settings::default() };
    view.judge(&settings, &Cancel::default()).documents.remove(0)
}

/// Places spread over a text, on character boundaries, and the ends of some formulas.
fn places(sheet: &Sheet, count: usize) -> Vec<u32> {
    let step = (sheet.text.len() / count).max(1);
    // No multiple of a line's usual length, so that all columns are met.
    let spread = (0..=sheet.text.len()).step_by(step).map(|at| (at + at / step * 7 % step).min(sheet.text.len()));
    let formulas = sheet.view.formulas(0);
    let every = (formulas.len() / count).max(1);
    let ends = formulas.iter().step_by(every).flat_map(|formula| {
        let span = formula.span;
        [span.start as usize, span.start as usize + span.len() / 2, (span.end as usize).saturating_sub(3)]
    });
    let mut all: Vec<u32> =
        spread.chain(ends).filter(|at| sheet.text.is_char_boundary(*at)).map(|at| at as u32).collect();
    all.sort_unstable();
    all.dedup();
    all
}

#[track_caller]
fn fits(sheet: &Sheet, span: Span) {
    assert!(span.start <= span.end && sheet.text.get(span.range()).is_some(), "{}: {span:?}", sheet.name);
}

#[test]
fn every_place_has_its_answers() {
    for sheet in sheets() {
        for at in places(&sheet, PLACES) {
            for suggestion in complete(&sheet.view, 0, at) {
                fits(&sheet, suggestion.replaces);
                let touches = suggestion.replaces.start <= at && at <= suggestion.replaces.end;
                assert!(touches, "{} at {at}: {suggestion:?}", sheet.name);
            }
            let grown = selection(&sheet.view, 0, at);
            let grows = grown.is_sorted_by(|one, next| next.holds(*one) && one != next);
            let held = grown.iter().all(|span| span.start <= at && at <= span.end);
            assert!(grows && held, "{} at {at}: {grown:?}", sheet.name);
            for row in ledger_at(&sheet.view, 0, at, Some(&sheet.analysis)).iter().flat_map(|ledger| &ledger.rows) {
                fits(&sheet, row.span);
            }
            for (label, edits) in insertions(&sheet.view, 0, at) {
                assert!(edited(&sheet.text, &edits).is_some(), "{} at {at}: {label}", sheet.name);
            }
        }
    }
}

#[test]
fn every_document_has_its_structure() {
    for sheet in sheets() {
        for fold in folds(&sheet.view, 0) {
            assert!(fold.of(&sheet.text).contains('\n'), "{}: {fold:?}", sheet.name);
        }
        let whole = Span::new(0, sheet.text.len());
        let shown = hints(&sheet.view, 0, whole, &sheet.analysis);
        assert!(shown.is_sorted_by_key(|hint| hint.at), "{}", sheet.name);
        shown.iter().for_each(|hint| fits(&sheet, Span { start: hint.at, end: hint.at }));
        lenses(&sheet.view, 0, &sheet.analysis).iter().for_each(|lens| fits(&sheet, lens.span));
        holds_its_parts(&sheet, whole, &outline(&sheet.view, 0));
    }
}

fn holds_its_parts(sheet: &Sheet, whole: Span, entries: &[Entry]) {
    for entry in entries {
        fits(sheet, entry.span);
        let inside = whole.holds(entry.span) && entry.span.holds(entry.name_span);
        assert!(inside && !entry.name.is_empty(), "{}: {entry:?}", sheet.name);
        holds_its_parts(sheet, entry.span, &entry.children);
    }
}

#[test]
fn a_text_that_ends_anywhere_is_completed() {
    let mut suggested = 0;
    for sheet in sheets() {
        for at in places(&sheet, ENDS) {
            let begun = sheet.text.get(..at as usize).unwrap();
            suggested += complete(&view(sheet.host, begun), 0, at).len();
            let sign = ["_", "^{", "_{i"].into_iter().nth(at as usize % 3).unwrap();
            let text = format!("{begun}{sign}");
            suggested += complete(&view(sheet.host, &text), 0, text.len() as u32).len();
        }
    }
    assert!(suggested > 100, "{suggested}");
}

#[test]
fn what_is_offered_does_no_harm() {
    let (mut done, mut report) = (BTreeMap::new(), Vec::new());
    for sheet in sheets() {
        let mut tried: Vec<Action> = Vec::new();
        let findings = sheet.analysis.findings.iter().map(|finding| finding.span.start);
        for at in places(&sheet, DONE).into_iter().chain(findings) {
            for action in actions(&sheet.view, 0, Span { start: at, end: at }, &sheet.analysis) {
                let alike = tried.iter().filter(|other| other.title == action.title).count();
                let directive = matches!(action.kind, ActionKind::Check | ActionKind::Declare);
                if tried.contains(&action) || directive && alike >= DIRECTIVES {
                    continue;
                }
                tried.push(action.clone());
                *done.entry(format!("{:?}", action.kind).chars().take(4).collect::<String>()).or_insert(0) += 1;
                let harm = harm(&sheet, &action);
                report.extend(
                    harm.map(|harm| format!("{} at {at}: `{}` {harm}: {:?}", sheet.name, action.title, action.edits)),
                );
            }
        }
    }
    assert!(report.is_empty(), "{} of {done:?}\n{}", report.len(), report.join("\n"));
    assert!(done.len() >= 4 && done.values().all(|count| *count > 3), "{done:?}");
}

#[test]
fn labelled_equations_are_put_in_without_harm() {
    let (mut done, mut report) = (0, Vec::new());
    let labelled = |sheet: &Sheet| sheet.view.formulas(0).iter().any(|formula| !formula.labels.is_empty());
    for sheet in sheets().into_iter().filter(|sheet| sheet.host == Host::Latex && labelled(sheet)) {
        let end = sheet.view.formulas(0).last().unwrap().span.end as usize;
        for room in ["\n\\[ \\]\n", "\n\\[ q = \\]\n", "\n\\[ q_i = 2 w_i + \\]\n"] {
            let mut text = sheet.text.clone();
            text.insert_str(end, room);
            let at = (end + room.len() - "\\]\n".len()) as u32;
            let view = view(sheet.host, &text);
            let (analysis, name) = (judged(&view), sheet.name.clone());
            let sheet = Sheet { name, host: sheet.host, text, view, analysis };
            let found = actions(&sheet.view, 0, Span { start: at, end: at }, &sheet.analysis);
            for action in found.iter().filter(|action| action.kind == ActionKind::Insert) {
                done += 1;
                let harm = harm(&sheet, action);
                report
                    .extend(harm.map(|harm| format!("{}: `{}` {harm}: {:?}", sheet.name, action.title, action.edits)));
            }
        }
    }
    assert!(report.is_empty(), "{} of {done}\n{}", report.len(), report.join("\n"));
    assert!(done > 8, "{done}");
}

/// What is wrong after an action, if anything is.
fn harm(sheet: &Sheet, action: &Action) -> Option<String> {
    let Some(text) = edited(&sheet.text, &action.edits) else { return Some("has edits out of order".to_owned()) };
    let after = judged(&view(sheet.host, &text));
    let counts = |analysis: &DocumentAnalysis| {
        let mut counts: BTreeMap<&str, usize> = BTreeMap::new();
        for finding in analysis.findings.iter().filter(|finding| finding.severity != Severity::Hint) {
            *counts.entry(finding.rule).or_default() += 1;
        }
        counts
    };
    let (old, new) = (counts(&sheet.analysis), counts(&after));
    if let Some((rule, _)) = new.iter().find(|(rule, count)| old.get(*rule).is_none_or(|old| *old < **count)) {
        return Some(format!("adds {rule}"));
    }
    if let ActionKind::Fix { finding } = action.kind {
        let rule = sheet.analysis.findings.get(finding)?.rule;
        let count = |analysis: &DocumentAnalysis| analysis.findings.iter().filter(|other| other.rule == rule).count();
        if count(&after) >= count(&sheet.analysis) {
            return Some(format!("leaves {rule}"));
        }
    }
    let read = |analysis: &DocumentAnalysis| analysis.statistics.unread;
    (read(&after) > read(&sheet.analysis)).then(|| "leaves more unread".to_owned())
}
