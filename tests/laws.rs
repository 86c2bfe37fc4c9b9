//! The laws that hold for every document, whatever it says.
//!
//! They are checked on each fixture beside its expectations:
//! - the host's regions stand in order, apart from one another, each around its body; there is one formula for
//!   each, and whatever the tree of a formula places lies in its region;
//! - all spans of findings lie in the text, on character boundaries; findings stand in the order of their places;
//!   one with a ledger keeps to one formula, with all that it relates;
//! - the edits of a fix are in order and apart; a fix that is applied removes its finding and adds no other
//!   error or warning;
//! - a second check says the same; line ends of two characters change nothing but offsets;
//! - a check that is cancelled at once still answers.

use std::collections::BTreeMap;

use indexwise_checker::finding::{Finding, Fix, Severity, edited};
use indexwise_checker::paper::{Cancel, DocumentAnalysis, Settings};
use indexwise_grammar::hosts::Host;
use indexwise_grammar::macros::Macros;
use indexwise_grammar::read;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{Formula, walk};

use crate::{analyse, analyse_with};

/// The laws that a text and its analysis break, one sentence each.
pub fn broken(host: Host, text: &str, analysis: &DocumentAnalysis) -> Vec<String> {
    let mut broken = reading(host, text);
    let misplaced = places(text, &analysis.findings);
    let sound = misplaced.is_empty();
    broken.extend(misplaced);
    broken.extend(astray(host, text, &analysis.findings));
    broken.extend(order(&analysis.findings));
    if sound {
        broken.extend(fixes(host, text, &analysis.findings));
    }
    if analyse(host, text) != *analysis {
        broken.push("a second check says something else".to_owned());
    }
    broken.extend(line_ends(host, text, analysis));
    let cancel = Cancel::default();
    cancel.cancel();
    broken.extend(places(text, &analyse_with(host, text, &Settings::default(), &cancel).findings));
    broken
}

/// Regions in order, apart, around their bodies, and in the text; each with a formula that keeps to it.
pub fn reading(host: Host, text: &str) -> Vec<String> {
    let document = read(text, host, &Macros::default());
    let regions = &document.scan.regions;
    let mut broken = Vec::new();
    for region in regions {
        if !fits(text, region.span) || !region.span.holds(region.body) || !fits(text, region.body) {
            broken.push(format!("a region does not fit the text: {region:?}"));
        }
    }
    if !regions.is_sorted_by(|one, next| one.span.end <= next.span.start) {
        broken.push("regions overlap or are out of order".to_owned());
    }
    if document.formulas.len() != regions.len() {
        broken.push(format!("{} formulas for {} regions", document.formulas.len(), regions.len()));
    }
    for (formula, region) in document.formulas.iter().zip(regions) {
        let strays = |(_, span): &(&str, Span)| !fits(text, *span) || !region.span.holds(*span);
        let astray = spans_of_tree(formula).into_iter().find(strays);
        broken.extend(astray.map(|(what, span)| format!("a {what} at {span:?} is outside of {:?}", region.span)));
    }
    broken
}

/// Everything that has a place in a formula: what it is, and its span.
fn spans_of_tree(formula: &Formula) -> Vec<(&'static str, Span)> {
    let mut spans = vec![("formula", formula.span)];
    spans.extend(formula.unread.iter().map(|part| ("unread part", part.span)));
    spans.extend(formula.unknown.iter().map(|(_, span)| ("macro", *span)));
    spans.extend(formula.labels.iter().map(|(_, span)| ("label", *span)));
    for statement in &formula.statements {
        spans.push(("statement", statement.span));
        spans.extend(statement.relations.iter().map(|relation| ("relation", relation.span)));
        for side in &statement.sides {
            walk(side, &mut |factor| {
                spans.push(("factor", factor.span));
                let items = factor.scripts.iter().flat_map(|script| &script.items);
                spans.extend(factor.scripts.iter().map(|script| ("script", script.span)));
                spans.extend(items.map(|item| ("script item", item.span)));
            });
        }
    }
    spans
}

/// Every span of every finding in the text and on character boundaries.
pub fn places(text: &str, findings: &[Finding]) -> Vec<String> {
    let misplaced = |finding: &Finding| {
        let spans = all_spans(finding);
        let odd = spans.into_iter().find(|span| !fits(text, *span))?;
        Some(format!("{} has a span {odd:?} that does not fit the text", finding.rule))
    };
    findings.iter().filter_map(misplaced).collect()
}

/// Findings with a ledger that leave the formula that they are about.
pub fn astray(host: Host, text: &str, findings: &[Finding]) -> Vec<String> {
    if findings.iter().all(|finding| finding.ledger.is_none()) {
        return Vec::new();
    }
    let regions = read(text, host, &Macros::default()).scan.regions;
    let mut broken = Vec::new();
    for finding in findings {
        let Some(ledger) = &finding.ledger else { continue };
        let region = regions.iter().find(|region| region.span.holds(ledger.statement));
        let keeps = |region: Span| all_spans(finding).iter().all(|span| region.holds(*span));
        if !region.is_some_and(|region| keeps(region.span)) {
            broken.push(format!("{} at {:?} leaves the formula that it is about", finding.rule, finding.span));
        }
    }
    broken
}

fn fits(text: &str, span: Span) -> bool {
    span.start <= span.end && text.get(span.range()).is_some()
}

/// Every span that a finding holds.
fn all_spans(finding: &Finding) -> Vec<Span> {
    let mut spans = Vec::new();
    map_spans(finding, &mut |span| {
        spans.push(span);
        span
    });
    spans
}

/// Findings by their places.
fn order(findings: &[Finding]) -> Option<String> {
    let ordered = findings.is_sorted_by_key(|finding| finding.span.start);
    (!ordered).then(|| "findings are not in the order of their places".to_owned())
}

/// Each fix removes its finding and adds no error or warning.
fn fixes(host: Host, text: &str, findings: &[Finding]) -> Vec<String> {
    let mut broken = Vec::new();
    for finding in findings {
        for fix in &finding.fixes {
            let problem = match edited(text, &fix.edits) {
                None => Some("has edits that overlap or are out of order".to_owned()),
                Some(mended) => worsened(findings, finding, &analyse(host, &mended).findings),
            };
            broken.extend(problem.map(|problem| describe(finding, fix, &problem)));
        }
    }
    broken
}

fn describe(finding: &Finding, fix: &Fix, problem: &str) -> String {
    format!("the fix `{}` of {} ({}) {problem}", fix.title, finding.rule, finding.message)
}

/// What is wrong with the findings after the fix of one of those before. Offsets move with an edit, so that
/// findings are told apart by rule and counted.
fn worsened(before: &[Finding], mended: &Finding, after: &[Finding]) -> Option<String> {
    let (before, after) = (counts(before), counts(after));
    let count = |of: &BTreeMap<_, _>, key: &(Severity, &str)| of.get(key).copied().unwrap_or(0_usize);
    let own = (mended.severity, mended.rule);
    if count(&after, &own) >= count(&before, &own) {
        return Some("does not remove it".to_owned());
    }
    let grave = after.keys().filter(|(severity, _)| *severity != Severity::Hint);
    let more = grave.into_iter().find(|key| count(&after, key) > count(&before, key))?;
    Some(format!("adds {} {}", more.0.word(), more.1))
}

fn counts(findings: &[Finding]) -> BTreeMap<(Severity, &'static str), usize> {
    let mut counts = BTreeMap::new();
    for finding in findings {
        *counts.entry((finding.severity, finding.rule)).or_insert(0) += 1;
    }
    counts
}

/// The same text with `\r\n` line ends has the same analysis, but for offsets.
fn line_ends(host: Host, text: &str, analysis: &DocumentAnalysis) -> Option<String> {
    if text.contains('\r') {
        return None;
    }
    let long = text.replace('\n', "\r\n");
    let found = analyse(host, &long);
    let findings: Vec<Finding> = found.findings.iter().map(|finding| with_short_line_ends(&long, finding)).collect();
    (findings != analysis.findings || found.statistics != analysis.statistics)
        .then(|| format!("line ends of two characters change the analysis: {findings:?}"))
}

/// A finding in a text with `\r\n` line ends, as it would stand in the text with `\n`.
fn with_short_line_ends(text: &str, finding: &Finding) -> Finding {
    let returns: Vec<usize> = text.match_indices('\r').map(|(byte, _)| byte).collect();
    let before = |offset: u32| returns.partition_point(|byte| *byte < offset as usize);
    let moved = |offset: u32| offset as usize - before(offset);
    let mut short = map_spans(finding, &mut |span| Span::new(moved(span.start), moved(span.end)));
    for edit in short.fixes.iter_mut().flat_map(|fix| &mut fix.edits) {
        edit.text = edit.text.replace("\r\n", "\n");
    }
    short
}

/// The finding with every span mapped.
fn map_spans(finding: &Finding, map: &mut dyn FnMut(Span) -> Span) -> Finding {
    let mut mapped = finding.clone();
    mapped.span = map(mapped.span);
    for related in &mut mapped.related {
        related.span = map(related.span);
    }
    for edit in mapped.fixes.iter_mut().flat_map(|fix| &mut fix.edits) {
        edit.span = map(edit.span);
    }
    if let Some(ledger) = &mut mapped.ledger {
        ledger.statement = map(ledger.statement);
        for row in &mut ledger.rows {
            row.span = map(row.span);
        }
    }
    mapped
}

#[cfg(test)]
mod tests {
    use indexwise_checker::finding::Edit;

    use super::*;
    use indexwise_checker::finding::{Ledger, Related};

    fn finding(rule: &'static str, start: usize, end: usize) -> Finding {
        Finding {
            rule,
            severity: Severity::Error,
            span: Span::new(start, end),
            message: String::new(),
            related: Vec::new(),
            fixes: Vec::new(),
            ledger: None,
            verdict: None,
        }
    }

    fn edit(start: usize, end: usize, text: &str) -> Edit {
        Edit { span: Span::new(start, end), text: text.to_owned() }
    }

    #[test]
    fn spans_beside_the_text_or_inside_a_character_are_seen() {
        assert!(places("aμb", &[finding("x", 1, 3)]).is_empty());
        assert_eq!(places("aμb", &[finding("x", 2, 3)]).len(), 1);
        assert_eq!(places("aμb", &[finding("x", 1, 5)]).len(), 1);
        let related = vec![Related { span: Span::new(0, 2), message: String::new() }];
        assert_eq!(places("aμb", &[Finding { related, ..finding("x", 1, 3) }]).len(), 1);
    }

    #[test]
    fn findings_that_leave_their_formula_are_seen() {
        let text = "The flux is $J^a = q^b$ and $v_a = 0$.";
        let statement = Span::new(13, 22);
        let ledger = Some(Ledger { statement, rows: Vec::new() });
        let about = |start, end| [Finding { ledger: ledger.clone(), ..finding("x", start, end) }];
        assert!(astray(Host::Latex, text, &about(15, 16)).is_empty());
        assert_eq!(astray(Host::Latex, text, &about(2, 3)).len(), 1);
        assert_eq!(astray(Host::Latex, text, &about(31, 32)).len(), 1);
        assert!(astray(Host::Latex, text, &[finding("x", 2, 3)]).is_empty());
    }

    #[test]
    fn disorder_is_seen() {
        assert!(order(&[finding("x", 1, 3), finding("y", 1, 2), finding("x", 4, 5)]).is_none());
        assert!(order(&[finding("x", 4, 5), finding("x", 1, 3)]).is_some());
    }

    #[test]
    fn edits_are_applied_in_order_and_apart() {
        assert_eq!(edited("A_i B_j", &[edit(2, 3, "k"), edit(6, 7, "kl")]).as_deref(), Some("A_k B_kl"));
        assert_eq!(edited("A_i", &[edit(3, 3, "_j")]).as_deref(), Some("A_i_j"));
        assert_eq!(edited("A_i B_j", &[edit(4, 6, ""), edit(5, 7, "")]), None);
        assert_eq!(edited("A_i B_j", &[edit(4, 5, ""), edit(0, 1, "")]), None);
        assert_eq!(edited("A_i", &[edit(2, 9, "")]), None);
    }

    #[test]
    fn a_fix_that_mends_nothing_or_harms_is_seen() {
        let before = [finding("index-thrice", 0, 1), finding("dummy-levels", 2, 3)];
        let [thrice, levels] = &before;
        assert!(worsened(&before, thrice, std::slice::from_ref(levels)).is_none());
        assert!(worsened(&before, thrice, &before).is_some());
        assert!(worsened(&before, thrice, &[levels.clone(), levels.clone()]).is_some());
        let hint = Finding { severity: Severity::Hint, ..finding("index-also-quantity", 0, 1) };
        assert!(worsened(&before, thrice, &[levels.clone(), hint]).is_none());
    }

    #[test]
    fn offsets_with_long_line_ends_are_mapped_back() {
        let text = "A_i\r\nB_j\r\nC_k";
        let mapped = with_short_line_ends(text, &finding("x", 7, 12));
        assert_eq!(mapped.span, Span::new(6, 10));
        assert_eq!(mapped.span.of("A_i\nB_j\nC_k"), "j\nC_");
    }

    #[test]
    fn an_analysis_that_another_check_does_not_repeat_is_seen() {
        let made_up = DocumentAnalysis { findings: vec![finding("x", 0, 1)], ..DocumentAnalysis::default() };
        let broken = broken(Host::Note, "Field notes\n", &made_up);
        assert_eq!(broken.len(), 2, "{broken:?}");
    }
}
