//! Directives before a formula: have it verified, take a labelled formula as given, let a rule be silent.

use crate::editing::saying::before_formula;
use crate::finding::{Edit, Finding};
use crate::paper::{DocumentAnalysis, View};
use crate::rules;

use super::{Action, ActionKind};

/// Words of a message after which it names the label that a step holds with.
const HOLDS_WITH: &str = "; it holds with (";

/// Rules about a document rather than a formula: to silence them at one formula silences them everywhere.
const OF_DOCUMENTS: [&str; 6] =
    ["missing-part", "unread", "convention-unreadable", "convention-clash", "idle-allow", "unknown-label"];

/// Takes the labelled formula as given with which a step that is not shown is known to hold.
pub(super) fn holds_with(view: &View, document: usize, finding: &Finding) -> Option<Action> {
    let (_, named) = finding.message.split_once(HOLDS_WITH)?;
    let (label, _) = named.rsplit_once(')')?;
    let number = view.formula_number(document, finding.span.start)?;
    let sentence = format!("check this using ({label})");
    let edit = match view.checks_of(document, number).as_slice() {
        [] => before_formula(view, document, number, &sentence)?,
        [(span, 0), ..] => Edit { span: *span, text: sentence },
        // What is named already did not suffice; the message is about a step without it.
        _ => return None,
    };
    let title = format!("Check this using ({label}), with which it holds");
    Some(Action { title, kind: ActionKind::Check, edits: vec![edit], preferred: false })
}

/// Has the derivation at a place verified, where none of its steps is judged yet.
pub(super) fn check(view: &View, document: usize, at: u32, analysis: &DocumentAnalysis) -> Option<Action> {
    let number = view.formula_number(document, at)?;
    let formula = view.formulas(document).get(number)?;
    let judged = analysis.steps.iter().any(|mark| formula.span.holds(mark.span));
    if judged || !view.checks_of(document, number).is_empty() {
        return None;
    }
    let sides =
        view.sketches(document).filter(|(own, _)| *own == number).map(|(_, sketch)| sketch.sides.len()).max()?;
    let title = match sides {
        0 | 1 => return None,
        2 => "Check this step",
        _ => "Check this derivation",
    };
    let edit = before_formula(view, document, number, "check this")?;
    Some(Action { title: title.to_owned(), kind: ActionKind::Check, edits: vec![edit], preferred: false })
}

/// Lets the rule of a finding be silent for its formula.
pub(super) fn allow(view: &View, document: usize, finding: &Finding) -> Option<Action> {
    if OF_DOCUMENTS.contains(&finding.rule) || rules::find(finding.rule).is_none() {
        return None;
    }
    let number = view.formula_number(document, finding.span.start)?;
    let edit = before_formula(view, document, number, &format!("allow {} here", finding.rule))?;
    let title = format!("Allow {} here", finding.rule);
    Some(Action { title, kind: ActionKind::Declare, edits: vec![edit], preferred: false })
}
