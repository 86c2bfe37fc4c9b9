//! A contraction written out in the author's own formula.
//!
//! The sum takes the place of the term with its sign, so that brackets are needed only where braces hold the term. What
//! is not one stretch of plain formula (a row break, a comment, an alignment mark inside) is left alone, since a sum on
//! one line would tear the layout.

use indexwise_grammar::hosts::Host;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::SignKind;

use crate::editing::spots::{Holder, Spot, spot_of};
use crate::editing::write_out::{WrittenOut, place, write_out};
use crate::finding::Edit;
use crate::paper::View;

use super::{Action, ActionKind};

/// Terms beyond which a sum is no longer put into a formula with one stroke.
const TERMS: usize = 27;

/// What a formula's text may not hold where a sum is to stand.
const LAYOUT: [&str; 7] = ["&", "\\\\", "%", "\\label", "\\nonumber", "\\notag", "\\tag"];

/// Writes out the contraction at a place.
pub(super) fn written_out(view: &View, document: usize, at: u32) -> Option<Action> {
    let answer = write_out(view, document, at).ok().filter(|answer| answer.terms.len() <= TERMS)?;
    let number = view.formula_number(document, at)?;
    let edit = view.statement_at(document, at, |asked| {
        let located = place::locate(asked, at).ok()?;
        replacement(&answer, &spot_of(asked.tree, located.term)?, view.text(document), view.host(document))
    });
    let edits = vec![edit.ok()??];
    let title = if answer.letters.len() > 1 { "Write the contractions out" } else { "Write the contraction out" };
    view.reads_as_well(document, number, &edits).then(|| Action {
        title: title.to_owned(),
        kind: ActionKind::Rewrite,
        edits,
        preferred: false,
    })
}

/// The edit that puts the sum in the place of its term.
fn replacement(answer: &WrittenOut, spot: &Spot<'_>, text: &str, host: Host) -> Option<Edit> {
    let term = spot.sum.terms.get(spot.at)?;
    let sum = if host == Host::Note { &answer.sum.note } else { &answer.sum.latex };
    let many = answer.terms.len() > 1 || sum.starts_with('-');
    let span = match term.sign {
        Some(sign) if matches!(sign.kind, SignKind::PlusMinus | SignKind::MinusPlus) => return None,
        Some(sign) => Span { start: sign.span.start, end: term.span.end },
        None => term.span,
    };
    if span.start > term.span.start || LAYOUT.iter().any(|sign| span.of(text).contains(sign)) {
        return None;
    }
    let bracketed = spot.holder == Holder::Open && many;
    let put = match (term.sign.is_some() && spot.at > 0, bracketed) {
        (false, false) => sum.clone(),
        (false, true) => format!("({sum})"),
        (true, true) => format!("+ ({sum})"),
        (true, false) => match sum.strip_prefix('-') {
            Some(rest) => format!("- {}", rest.trim_start()),
            None => format!("+ {sum}"),
        },
    };
    Some(Edit::pasted(text, span, &put))
}
