//! A line above a derivation: how many of its steps are verified, or that it may be.

use indexwise_grammar::span::Span;
use indexwise_grammar::tree::RelationKind;

use crate::finding::Outcome;
use crate::paper::{DocumentAnalysis, View};

/// What is shown above a formula.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Lens {
    /// The formula.
    pub span: Span,
    /// What is said; `CHECK` where it is an offer.
    pub title: String,
}

/// The title of a lens that offers to have a derivation verified.
pub const CHECK: &str = "check this derivation";

/// Sides from which a statement is a derivation.
pub(super) const SIDES: usize = 3;

/// The lenses of a document in the order of its formulas.
pub fn lenses(view: &View, document: usize, analysis: &DocumentAnalysis) -> Vec<Lens> {
    let chains: Vec<usize> = view.chains(document);
    let mut marks = analysis.steps.iter().peekable();
    let mut out = Vec::new();
    for (number, formula) in view.formulas(document).iter().enumerate() {
        let mut counts = [0_usize; 3];
        while let Some(mark) = marks.next_if(|mark| mark.span.start < formula.span.end) {
            let at = match mark.outcome() {
                Outcome::Holds => 0,
                Outcome::Fails => 1,
                Outcome::Open => 2,
            };
            if let Some(count) = counts.get_mut(at).filter(|_| formula.span.holds(mark.span)) {
                *count += 1;
            }
        }
        let title = match counted(counts) {
            Some(title) => title,
            None if chains.contains(&number) => CHECK.to_owned(),
            None => continue,
        };
        out.push(Lens { span: formula.span, title });
    }
    out
}

/// "3 steps verified, 1 failed, 1 open"; nothing where no step was judged.
fn counted([holds, fails, open]: [usize; 3]) -> Option<String> {
    let mut said: Vec<String> = Vec::new();
    for (count, word) in [(holds, "verified"), (fails, "failed"), (open, "open")] {
        let steps = match (said.is_empty(), count) {
            (_, 0) => continue,
            (true, 1) => "1 step".to_owned(),
            (true, _) => format!("{count} steps"),
            _ => count.to_string(),
        };
        said.push(format!("{steps} {word}"));
    }
    (!said.is_empty()).then(|| said.join(", "))
}

impl View {
    /// The numbers of the formulas that hold a derivation: a statement of several sides that are said to be equal.
    pub(super) fn chains(&self, document: usize) -> Vec<usize> {
        let equal = |kind: &&RelationKind| **kind == RelationKind::Equal;
        let chains = self.sketches(document).filter(|(_, sketch)| sketch.sides.len() >= SIDES);
        let chains = chains.filter(|(_, sketch)| sketch.relations.iter().filter(equal).count() + 1 >= SIDES);
        let mut numbers: Vec<usize> = chains.map(|(number, _)| number).collect();
        numbers.dedup();
        numbers
    }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]

    use indexwise_grammar::hosts::Host;

    use super::*;
    use crate::editing::cursor::{analysis, view};

    #[track_caller]
    fn shows(text: &str, want: &[(&str, &str)]) {
        let view = view(text, Host::Latex);
        let found = lenses(&view, 0, &analysis(&view));
        let found: Vec<(&str, &str)> = found.iter().map(|lens| (lens.span.of(text), lens.title.as_str())).collect();
        assert_eq!(found, want, "{text}");
    }

    #[test]
    fn counts_where_steps_are_judged() {
        let lead = "% indexwise: i j run from 1 to 3; i j are cartesian; v_i w_i are vectors\n";
        let three = "$v_i w_i = w_i v_i = v_j w_j = 2 v_i w_i$";
        shows(
            &format!("{lead}$v_i = w_i$ % \n% indexwise: check this\n{three} and $p = v_i v_i$"),
            &[(three, "2 steps verified, 1 failed")],
        );
        let one = "$v_i w_i = w_i v_i$";
        shows(&format!("{lead}% indexwise: check this\n{one}"), &[(one, "1 step verified")]);
    }

    #[test]
    fn an_offer_where_a_chain_is_not_judged() {
        let chain = "$A_i = B_{ij} C_j = D_i$";
        shows(&format!("Here {chain} and $A_i = B_i$ and $a < b_i < c$."), &[(chain, CHECK)]);
        shows(&format!("% indexwise: skip this\n{chain}\n"), &[]);
    }
}
