//! Verdicts that are carried along: what was found out about steps holds on, for now, in formulas that nobody touched.
//!
//! Without this every keystroke would take all verdicts away, to bring them back a moment later. Traps: a verdict may
//! rest on what is declared elsewhere, so that what is carried counts only until the steps have been judged anew;
//! whatever stands in a formula that was touched is dropped.

use std::sync::Arc;

use indexwise_checker::finding::{Finding, Related};
use indexwise_checker::paper::{Analysis, DocumentAnalysis, View};
use indexwise_grammar::span::Span;

use super::reading::{Judged, Picture};

/// What was found without judging steps, with what is still known of them from before.
pub fn carried(before: &Judged, picture: &Picture) -> Arc<Analysis> {
    if !before.analysis.documents.iter().any(knows_steps) {
        return picture.balance.clone();
    }
    let mut analysis = (*picture.balance).clone();
    for (number, document) in picture.documents.iter().enumerate() {
        let old = before.picture.document(&document.path);
        let (Some(old), Some(into)) = (old, analysis.documents.get_mut(number)) else { continue };
        let Some(found) = before.found(old) else { continue };
        let change = Change::between(before.picture.view.text(old), &picture.view, number);
        carry(found, &change, into);
    }
    Arc::new(analysis)
}

/// Whether anything is known of the steps of a document.
fn knows_steps(found: &DocumentAnalysis) -> bool {
    !found.steps.is_empty() || found.findings.iter().any(|finding| finding.verdict.is_some())
}

fn carry(found: &DocumentAnalysis, change: &Change, into: &mut DocumentAnalysis) {
    let steps = found.findings.iter().filter(|finding| finding.verdict.is_some());
    into.findings.extend(steps.filter_map(|finding| moved(finding, change)));
    into.findings.sort_by(|a, b| (a.span, a.rule, &a.message).cmp(&(b.span, b.rule, &b.message)));
    into.steps = found
        .steps
        .iter()
        .filter_map(|mark| {
            let mut mark = mark.clone();
            mark.span = change.moved(mark.span)?;
            Some(mark)
        })
        .collect();
}

/// A finding where it stands now; without fixes, which were tried on another text.
fn moved(finding: &Finding, change: &Change) -> Option<Finding> {
    let related = |related: &Related| Some(Related { span: change.moved(related.span)?, ..related.clone() });
    Some(Finding {
        span: change.moved(finding.span)?,
        related: finding.related.iter().map(related).collect::<Option<Vec<_>>>()?,
        fixes: Vec::new(),
        ..finding.clone()
    })
}

/// What differs between two texts, as one stretch.
struct Change {
    /// Where it begins in the old text.
    start: u32,
    /// Where it ends there.
    end: u32,
    /// How much longer the new text is.
    grown: i64,
    /// The stretch in the new text, with the formulas that it touches.
    touched: Span,
}

impl Change {
    fn between(old: &str, view: &View, document: usize) -> Self {
        let new = view.text(document);
        let (before, after) = (old.as_bytes(), new.as_bytes());
        let same = before.iter().zip(after).take_while(|(a, b)| a == b).count();
        let left = before.len().min(after.len()) - same;
        let rest = before.iter().rev().zip(after.iter().rev()).take(left).take_while(|(a, b)| a == b).count();
        let own = Span::new(same, after.len() - rest);
        let touches = |span: &Span| span.start <= own.end && own.start <= span.end;
        let formulas = view.formulas(document).iter().map(|formula| formula.span).filter(touches);
        Self {
            start: same as u32,
            end: (before.len() - rest) as u32,
            grown: after.len() as i64 - before.len() as i64,
            touched: formulas.fold(own, Span::join),
        }
    }

    /// Where a stretch of the old text stands now, unless it was touched.
    fn moved(&self, span: Span) -> Option<Span> {
        let is_before = span.end <= self.start;
        if !is_before && span.start < self.end {
            return None;
        }
        let shift = |at: u32| u32::try_from(i64::from(at) + self.grown).ok();
        let span = if is_before { span } else { Span { start: shift(span.start)?, end: shift(span.end)? } };
        // Nothing was changed where the texts are the same.
        let unchanged = self.grown == 0 && self.start == self.end;
        let untouched = span.end <= self.touched.start || self.touched.end <= span.start;
        (unchanged || untouched).then_some(span)
    }
}
