//! What can be done at a place with one stroke: mends of findings, contractions written out, letters and equations put
//! in, directives.
//!
//! Whatever is offered has been tried: its text is read again and judged, and where that is worse than before nothing is
//! offered. The order is that in which they are shown: mends first, what silences last.

mod declaring;
mod directives;
mod fixes;
mod fresh;
mod inserting;
#[cfg(test)]
mod tests;
mod writing;

use indexwise_grammar::span::Span;

use crate::finding::{Edit, Finding};
use crate::paper::{DocumentAnalysis, View};

pub use inserting::insertions;

/// One thing that can be done.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Action {
    /// What it does, as an imperative sentence without a full stop.
    pub title: String,
    /// What sort of thing it is.
    pub kind: ActionKind,
    /// Edits of this document, in order and apart.
    pub edits: Vec<Edit>,
    /// Whether it is surely what is meant: the only mend of its finding that may be made in bulk.
    pub preferred: bool,
}

/// What sort of thing an action is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum ActionKind {
    /// Mends a finding.
    Fix {
        /// The number of the finding in the analysis.
        finding: usize,
    },
    /// Writes the same in another way.
    Rewrite,
    /// Puts something in.
    Insert,
    /// Writes a sentence of the conventions: a symmetry, or that a rule is silent.
    Declare,
    /// Has a derivation verified.
    Check,
}

/// What can be done where a selection stands; it may be empty.
pub fn actions(view: &View, document: usize, selection: Span, analysis: &DocumentAnalysis) -> Vec<Action> {
    let touched: Vec<(usize, &Finding)> = touched(selection, analysis).collect();
    let at = selection.start;
    let mut out: Vec<Action> = Vec::new();
    out.extend(touched.iter().flat_map(|(number, finding)| fixes::mends(view, document, *number, finding)));
    out.extend(touched.iter().filter_map(|(_, finding)| directives::holds_with(view, document, finding)));
    out.extend(touched.iter().flat_map(|(_, finding)| declaring::symmetries(view, document, finding)));
    out.extend(writing::written_out(view, document, at));
    out.extend(fresh::fresh_dummies(view, document, at));
    out.extend(inserting::offered(view, document, at));
    out.extend(directives::check(view, document, at, analysis));
    for (_, finding) in &touched {
        let allow = directives::allow(view, document, finding);
        // Two findings of one rule in one formula are silenced by one sentence.
        out.extend(
            allow.filter(|allow| out.iter().all(|other| other.edits != allow.edits)).into_iter().collect::<Vec<_>>(),
        );
    }
    out
}

/// The findings that a selection touches, each with its number.
fn touched(selection: Span, analysis: &DocumentAnalysis) -> impl Iterator<Item = (usize, &Finding)> {
    let touches = move |finding: &Finding| finding.span.start <= selection.end && selection.start <= finding.span.end;
    analysis.findings.iter().enumerate().filter(move |(_, finding)| touches(finding))
}
