//! Slips put into documents that are right: nearly all are reported, each in the formula that holds it.
//!
//! The documents are generated (`generate` in the library), so that every letter in a script is an index and every
//! change of one is a slip. What is asked for is a share, not every single one, since a slip can happen to read as
//! something right. It guards against changes of the inference that buy silence with deafness.

#![allow(clippy::panic)]

use indexwise_checker::finding::{Finding, Severity};
use indexwise_grammar::hosts::{Host, Setting};
use indexwise_grammar::macros::Macros;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{Formula, ItemKind, Script, walk};
use indexwise_tests::{analyse, generate};

/// Bytes of a document: long enough to show its habits.
const SIZE: usize = 24_000;
/// Documents, each with its own seed.
const DOCUMENTS: u64 = 3;
/// Every so many scripts one is spoilt.
const STEP: usize = 9;

/// How a script is spoilt: its new text with its sign, or nothing where that cannot be. `letters` are those of the
/// formula.
type Spoil = fn(script: &str, letters: &[&str]) -> Option<String>;

/// Another letter in the place of the last one.
fn rename(script: &str, letters: &[&str]) -> Option<String> {
    let last = script.rfind(|sign: char| sign.is_ascii_lowercase())?;
    let other = ["h", "g", "f", "e"].into_iter().find(|other| !letters.contains(other))?;
    Some(format!("{}{other}{}", script.get(..last)?, script.get(last + 1..)?))
}

/// The last of several letters is lost.
fn lose(script: &str, _: &[&str]) -> Option<String> {
    let (before, last) = script.rsplit_once(' ')?;
    Some(format!("{before}{}", last.get(1..)?))
}

/// The script stands on the other level.
fn flip(script: &str, _: &[&str]) -> Option<String> {
    let other = if script.starts_with('^') { '_' } else { '^' };
    Some(format!("{other}{}", script.get(1..)?))
}

/// The scripts with letters of a formula.
fn scripts(formula: &Formula) -> Vec<Script> {
    let mut scripts: Vec<Script> = Vec::new();
    for side in formula.statements.iter().flat_map(|statement| &statement.sides) {
        walk(side, &mut |factor| scripts.extend(factor.scripts.iter().cloned()));
    }
    scripts.retain(|script| script.items.iter().any(|item| matches!(item.kind, ItemKind::Letter(_))));
    scripts
}

/// A text with one script spoilt, and the formula that holds it there.
fn spoilt(text: &str, formula: Span, script: Span, new: &str) -> (String, Span) {
    let (before, after) = (text.get(..script.start as usize), text.get(script.end as usize..));
    let spoilt = [before.unwrap_or_default(), new, after.unwrap_or_default()].concat();
    let end = spoilt.len() - (text.len() - formula.end as usize);
    (spoilt, Span::new(formula.start as usize, end))
}

/// Slips of one kind: how many were tried, and those that are not reported in their formula.
fn missed(spoil: Spoil) -> (usize, Vec<String>) {
    let (mut tried, mut missed) = (0, Vec::new());
    for text in (0..DOCUMENTS).map(|seed| generate::document(seed, SIZE)) {
        let document = indexwise_grammar::read(&text, Host::Latex, &Macros::default());
        let with_setting = document.formulas.iter().zip(&document.scan.regions);
        let displayed =
            with_setting.filter(|(_, region)| region.setting != Setting::Inline).map(|(formula, _)| formula);
        let all = displayed.flat_map(|formula| scripts(formula).into_iter().map(move |script| (formula, script)));
        for (formula, script) in all.step_by(STEP) {
            let own = scripts(formula);
            let letters: Vec<&str> =
                own.iter().flat_map(|script| &script.items).map(|item| item.span.of(&text)).collect();
            let Some(new) = spoil(script.span.of(&text), &letters) else { continue };
            let (with_slip, place) = spoilt(&text, formula.span, script.span, &new);
            tried += 1;
            let grave = |finding: &Finding| finding.severity != Severity::Hint;
            let findings = analyse(Host::Latex, &with_slip).findings;
            // By chance a generated sum has a term twice, which is a finding of its own, without a slip.
            let beside = |finding: &Finding| finding.rule != "like-terms" && !place.holds(finding.span);
            assert!(!findings.iter().any(beside), "blamed beside: {findings:#?}");
            if !findings.iter().any(grave) {
                missed.push(format!("{} for {} in {}", new, script.span.of(&text), place.of(&with_slip)));
            }
        }
    }
    (tried, missed)
}

/// At least so many in a hundred slips of a kind are reported as errors or warnings, and nothing in other formulas.
#[track_caller]
fn expect(percent: usize, spoil: Spoil) {
    let (tried, missed) = missed(spoil);
    assert!(tried >= 40, "only {tried} slips were tried");
    let found = tried - missed.len();
    assert!(found * 100 >= tried * percent, "{found} of {tried} slips are reported, not\n{}", missed.join("\n"));
}

#[test]
fn a_letter_for_another_is_reported() {
    expect(93, rename);
}

#[test]
fn a_lost_letter_is_reported() {
    expect(97, lose);
}

#[test]
fn a_level_for_the_other_is_reported() {
    expect(97, flip);
}
