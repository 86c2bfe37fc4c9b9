//! The laws of what an editor asks, on every fixture and demonstration document.
//!
//! - Tokens stand in the order of the text, apart, none empty, none across the end of a line; those of a stretch are
//!   those of the whole document that touch it.
//! - No question panics at any offset, also within a character, and every place that it names fits the text.
//! - What lights up with a place lights up with each place of it.
//! - A definition is among the references, where these are asked for with declarations.
//! - An index that is renamed to a fresh letter and back leaves the text as it was; with the fresh letter the tokens
//!   are the same in number and kind, and no finding is new.
//!
//! Damaged documents are asked, too. Offsets and renames are sampled, the same ones in every run.

#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic)]

use std::collections::BTreeMap;
use std::sync::Arc;

use indexwise_checker::editing::highlight::highlight;
use indexwise_checker::editing::hover::hover;
use indexwise_checker::editing::references::{File, Location, definition, references};
use indexwise_checker::editing::rename::{prepare_rename, rename};
use indexwise_checker::editing::tokens::{Token, TokenKind, tokens};
use indexwise_checker::finding::edited;
use indexwise_checker::paper::{Cancel, DocumentAnalysis, Paper, Settings, Source, StepMode, View};
use indexwise_grammar::hosts::Host;
use indexwise_grammar::span::Span;
use indexwise_tests::annotations::Fixture;
use indexwise_tests::documents_below;
use indexwise_tests::variants::damaged;

/// Offsets of a text that are asked about, apart from the tokens below.
const OFFSETS: usize = 6;
/// Tokens of a text that are asked about.
const TOKENS: usize = 4;
/// Tokens of a damaged text that are asked about.
const DAMAGED: usize = 2;
/// Renames of a text that are tried.
const RENAMES: usize = 1;
/// Renames that have to succeed in all texts together: most of those that are tried.
const FEWEST_RENAMES: usize = 60;

/// Letters to rename to, of each kind; those of the text are left out.
const FRESH: &[&str] =
    &["s", "p", "q", "l", "m", "n", "k", "j", "c", "d", "b", "a", "B", "C", "\\tau", "\\kappa", "\\lambda", "\\rho"];

fn view_of(host: Host, text: &str) -> View {
    let source = Source { path: "membrane".to_owned(), text: Arc::from(text), host };
    View::of(&Paper { documents: vec![source], ..Paper::default() }, &Cancel::default())
}

fn judged(view: &View) -> DocumentAnalysis {
    let settings = Settings { steps: StepMode::Off, ..Settings::default() };
    view.judge(&settings, &Cancel::default()).documents.remove(0)
}

/// Every document: its name, its host and its text without annotations.
fn texts() -> Vec<(String, Host, String)> {
    let all = [documents_below("fixtures"), documents_below("documents")].concat();
    assert!(all.len() > 20, "the documents have not been found");
    let named = |(path, host, text): (std::path::PathBuf, Host, String)| {
        (path.display().to_string(), host, Fixture::read(&text).text)
    };
    all.into_iter().map(named).collect()
}

fn whole(text: &str) -> Span {
    Span::new(0, text.len())
}

/// So many of a list, evenly spread.
fn sampled<T: Copy>(all: &[T], count: usize) -> Vec<T> {
    let step = all.len().div_ceil(count.max(1)).max(1);
    all.iter().step_by(step).copied().collect()
}

#[track_caller]
fn fits(text: &str, span: Span, about: &str) {
    assert!(span.start <= span.end && text.get(span.range()).is_some(), "{about}: {span:?} does not fit the text");
}

/// Asserts the law of tokens, and gives them.
#[track_caller]
fn ordered_tokens(view: &View, text: &str, about: &str) -> Vec<Token> {
    let all = tokens(view, 0, whole(text));
    for token in &all {
        fits(text, token.span, about);
        let own = token.span.of(text);
        assert!(!own.is_empty() && !own.contains(['\n', '\r']), "{about}: {token:?}");
    }
    assert!(all.is_sorted_by(|one, next| one.span.end <= next.span.start), "{about}: tokens overlap");
    all
}

#[test]
fn damaged_documents_are_answered_too() {
    for (seed, (name, host, text)) in (1..).zip(texts()) {
        let text = damaged(&text, seed);
        let view = view_of(host, &text);
        let about = format!("{name}, seed {seed}");
        let starts: Vec<u32> = ordered_tokens(&view, &text, &about).iter().map(|token| token.span.start).collect();
        for offset in sampled(&starts, DAMAGED).into_iter().chain([u32::try_from(text.len()).unwrap() / 2]) {
            let about = format!("{about} at {offset}");
            if let Some(found) = hover(&view, 0, offset, None) {
                fits(&text, found.span, &about);
            }
            lights_up_together(&view, &text, offset, &about);
            for (_, edits) in rename(&view, 0, offset, "q").unwrap_or_default() {
                assert!(edited(&text, &edits).is_some(), "{about}: {edits:?}");
            }
        }
    }
}

#[test]
fn tokens_are_in_order_and_apart() {
    for (name, host, text) in texts() {
        let view = view_of(host, &text);
        let all = ordered_tokens(&view, &text, &name);
        let middle = Span::new(text.len() / 3, text.len() / 2);
        let touching = |token: &&Token| token.span.start <= middle.end && middle.start <= token.span.end;
        let expected: Vec<Token> = all.iter().filter(touching).copied().collect();
        assert_eq!(tokens(&view, 0, middle), expected, "{name}");
    }
}

#[test]
fn every_offset_has_an_answer_that_fits() {
    for (name, host, text) in texts() {
        let view = view_of(host, &text);
        let analysis = judged(&view);
        let mut offsets: Vec<u32> = (0..=u32::try_from(text.len()).unwrap() + 2).collect();
        offsets = sampled(&offsets, OFFSETS);
        let starts: Vec<u32> = tokens(&view, 0, whole(&text)).iter().map(|token| token.span.start).collect();
        offsets.extend(sampled(&starts, TOKENS));
        for offset in offsets {
            let about = format!("{name} at {offset}");
            if let Some(found) = hover(&view, 0, offset, Some(&analysis)) {
                fits(&text, found.span, &about);
                assert!(!found.markdown.trim().is_empty(), "{about}");
            }
            if let Ok(found) = prepare_rename(&view, 0, offset) {
                assert_eq!(found.span.of(&text), found.text, "{about}");
                assert!(highlight(&view, 0, offset).iter().any(|lit| lit.span == found.span), "{about}");
            }
            lights_up_together(&view, &text, offset, &about);
            let (defined, all) = (definition(&view, 0, offset), references(&view, 0, offset, true));
            let fits_own = |place: &Location| place.file == File::Document(0) && text.get(place.span.range()).is_some();
            assert!(all.iter().all(fits_own), "{about}: {all:?}");
            assert!(defined.iter().all(|place| all.contains(place)), "{about}: {defined:?} is not in {all:?}");
        }
    }
}

#[track_caller]
fn lights_up_together(view: &View, text: &str, offset: u32, about: &str) {
    let spans = |offset: u32| highlight(view, 0, offset).iter().map(|lit| lit.span).collect::<Vec<_>>();
    let lit = spans(offset);
    for span in &lit {
        fits(text, *span, about);
    }
    // One other place; the cursor wanders over all of them.
    if let Some(span) = lit.iter().rev().find(|span| span.start != offset) {
        assert_eq!(spans(span.start), lit, "{about}: {span:?} lights up otherwise");
    }
}

/// Kinds of tokens in their order, and findings by rule.
fn kept(view: &View, text: &str) -> (Vec<TokenKind>, BTreeMap<&'static str, usize>) {
    let mut found = BTreeMap::new();
    for finding in judged(view).findings {
        *found.entry(finding.rule).or_insert(0) += 1;
    }
    (tokens(view, 0, whole(text)).iter().map(|token| token.kind).collect(), found)
}

#[test]
fn a_rename_and_back_changes_nothing() {
    let mut done = 0;
    for (name, host, text) in texts() {
        let view = view_of(host, &text);
        let indices: Vec<Span> = tokens(&view, 0, whole(&text))
            .iter()
            .filter(|token| matches!(token.kind, TokenKind::Free | TokenKind::Dummy))
            .map(|token| token.span)
            .collect();
        let before = kept(&view, &text);
        for span in sampled(&indices, RENAMES) {
            let old = span.of(&text);
            let alike = |fresh: &&&str| fresh.starts_with('\\') == old.starts_with('\\');
            let tried = FRESH.iter().filter(alike).find_map(|fresh| rename(&view, 0, span.start, fresh).ok());
            let Some(edits) = tried.filter(|edits| old.starts_with('\\') || old.len() == 1 && !edits.is_empty()) else {
                continue;
            };
            let about = format!("{name}: {old} at {}", span.start);
            let [(0, edits)] = edits.as_slice() else { panic!("{about}: {edits:?}") };
            let renamed = edited(&text, edits).expect("edits in order and apart");
            let after = view_of(host, &renamed);
            assert_eq!(kept(&after, &renamed), before, "{about}\n{renamed}");
            let shift = edits.iter().take_while(|edit| edit.span.start < span.start);
            let moved: i64 = shift.map(|edit| edit.text.len() as i64 - edit.span.len() as i64).sum();
            let place = u32::try_from(i64::from(span.start) + moved).unwrap();
            let back = match rename(&after, 0, place, old) {
                Ok(back) => back,
                // The old letter stands in the statement for something else, too: it is not fresh.
                Err(reason) if reason.contains("in that statement") => continue,
                Err(reason) => panic!("{about}: {reason}"),
            };
            let [(0, back)] = back.as_slice() else { panic!("{about}: {back:?}") };
            assert_eq!(edited(&renamed, back).as_deref(), Some(text.as_str()), "{about}");
            done += 1;
        }
    }
    assert!(done >= FEWEST_RENAMES, "only {done} renames went through");
}
