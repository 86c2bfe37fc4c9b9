//! Small words between the author's own: the free indices at the end of a statement, the verdicts at its relations.

use indexwise_grammar::span::Span;

use crate::conventions::prices::LevelHabit;
use crate::finding::{JudgedStep, Outcome};
use crate::ledger::{Judged, shown};
use crate::paper::{Asked, DocumentAnalysis, View};

/// A word that is shown in the text and is not part of it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct InlayHint {
    /// Where it is shown.
    pub at: u32,
    /// A sign or a few words.
    pub text: String,
    /// One sentence about it.
    pub tooltip: String,
}

/// The hints in a stretch of a document, in the order of their places.
pub fn hints(view: &View, document: usize, within: Span, analysis: &DocumentAnalysis) -> Vec<InlayHint> {
    let mut out: Vec<InlayHint> = Vec::new();
    view.each_statement(document, within, |asked| out.extend(free_indices(&asked.judged(view.text(document)), asked)));
    out.extend(analysis.steps.iter().map(verdict));
    out.retain(|hint| within.start <= hint.at && hint.at <= within.end);
    out.sort_by_key(|hint| hint.at);
    out
}

/// The free indices of a statement that balances, at its end.
fn free_indices(judged: &Judged<'_>, asked: &Asked<'_>) -> Option<InlayHint> {
    let sketch = asked.sketch;
    if sketch.unjudged.is_some() || !asked.reading.odd.is_empty() || asked.formula.no_sum {
        return None;
    }
    let row = judged.rows().into_iter().find(|row| !row.any)?;
    let own = row.free.iter().filter(|(letter, _)| asked.prices.is_index_notation(letter));
    let level = |letter: &str, place| {
        let flat = asked.prices.level_habit(letter) == LevelHabit::Cartesian;
        if flat { "" } else { judged.level(place) }
    };
    let said = |letter: &str, place| format!("{} {}", shown(letter), level(letter, place)).trim_end().to_owned();
    let free: Vec<String> = own.map(|(letter, place)| said(letter, *place)).collect();
    (!free.is_empty()).then(|| InlayHint {
        at: sketch.span.end,
        text: format!("free: {}", free.join(", ")),
        tooltip: "every term of this statement has these free indices".to_owned(),
    })
}

/// The sign for a verdict.
fn verdict(mark: &JudgedStep) -> InlayHint {
    let text = match mark.outcome() {
        Outcome::Holds => "✓",
        Outcome::Fails => "✗",
        Outcome::Open => "?",
    };
    InlayHint { at: mark.span.end, text: text.to_owned(), tooltip: mark.said.clone() }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]

    use indexwise_grammar::hosts::Host;

    use super::*;
    use crate::editing::cursor::{analysis, view};

    /// The text with every hint in place, in brackets.
    #[track_caller]
    fn shows(text: &str, host: Host, want: &str) {
        let view = view(text, host);
        let mut shown = text.to_owned();
        for hint in hints(&view, 0, Span::new(0, text.len()), &analysis(&view)).iter().rev() {
            shown.insert_str(hint.at as usize, &format!("[{}]", hint.text));
        }
        assert_eq!(shown, want);
    }

    #[test]
    fn free_indices_with_their_levels() {
        shows(
            "$v^\\mu{}_\\nu = g^{\\mu\\rho} h_{\\rho\\nu}$ and $p = q_\\mu q^\\mu$.",
            Host::Latex,
            "$v^\\mu{}_\\nu = g^{\\mu\\rho} h_{\\rho\\nu}[free: μ up, ν down]$ and $p = q_\\mu q^\\mu$.",
        );
        let lead = "% indexwise: i j are cartesian\n";
        shows(&format!("{lead}$t_i = s_{{ij}} n_j$"), Host::Latex, &format!("{lead}$t_i = s_{{ij}} n_j[free: i]$"));
    }

    #[test]
    fn what_does_not_balance_or_is_no_index_is_silent() {
        for text in ["$x = y$", "$T_{\\rm eff} = 3$", "$p = v_i v_i$"] {
            shows(text, Host::Latex, text);
        }
        shows(
            "$A_{ij} = B_{ijk}$ with $C_{ij} = D_{ij}$.",
            Host::Latex,
            "$A_{ij} = B_{ijk}$ with $C_{ij} = D_{ij}[free: i, j]$.",
        );
    }

    #[test]
    fn verdicts_stand_at_their_relations() {
        let lead = "% indexwise: i j run from 1 to 3; i j are cartesian; v_i w_i are vectors; check this\n";
        shows(
            &format!("{lead}$v_i w_i = w_i v_i = 2 v_i w_i$"),
            Host::Latex,
            &format!("{lead}$v_i w_i =[✓] w_i v_i =[✗] 2 v_i w_i$"),
        );
    }
}
