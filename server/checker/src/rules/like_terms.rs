//! Terms of one side that cancel or repeat one another.

use indexwise_algebra::rational::Rational;

use crate::finding::{Finding, Related, Severity};
use crate::terms::{Flattened, Product, Side};

use super::silence::says_zero;
use super::{Check, Rule};

pub(super) const RULE: Rule = Rule {
    name: "like-terms",
    severity: Severity::Hint,
    summary: "Two terms of one side are the same up to a number: they cancel, or one repeats the other.",
    page: include_str!("like_terms.md"),
    on: true,
    check: Check::Terms(check),
};

/// Pairs of one side from which the author writes a sum out to show what cancels.
const WRITTEN_OUT: usize = 3;
/// Products of one side that are compared with one another.
const COMPARED: usize = 64;

fn check(terms: &Flattened<'_>) -> Vec<Finding> {
    let sides = terms.sides.iter().enumerate();
    sides.map(|(number, side)| like(terms, number, side)).filter(|found| found.len() < WRITTEN_OUT).flatten().collect()
}

fn like(terms: &Flattened<'_>, number: usize, side: &Side) -> Vec<Finding> {
    let mut out = Vec::new();
    let mut told: Vec<usize> = Vec::new();
    for (at, later) in
        side.products.iter().enumerate().take(COMPARED).filter(|(_, product)| product.letters().next().is_some())
    {
        let earlier = side.products.iter().take(at).find(|earlier| {
            earlier.term != later.term
                && !told.contains(&earlier.term)
                && earlier.has_kernels_of(later)
                && terms.quotient(earlier, later).is_some()
        });
        let Some(earlier) = earlier.filter(|_| !told.contains(&later.term)) else { continue };
        // A product out of a bracket is one of several that the author wrote as one term.
        let multiplied_out = is_multiplied_out(side, earlier) || is_multiplied_out(side, later);
        if multiplied_out || next_collects(terms, number, later) || says_zero(terms, number, later) {
            continue;
        }
        told.push(later.term);
        out.extend(finding(terms, earlier, later));
    }
    out
}

/// Whether the next side has fewer terms of the kind.
fn next_collects(terms: &Flattened<'_>, number: usize, product: &Product) -> bool {
    let of_kind = |side: &Side| side.products.iter().filter(|other| other.has_kernels_of(product)).count();
    let sides = (terms.sides.get(number), terms.sides.get(number + 1));
    matches!(sides, (Some(own), Some(next)) if next.complete && of_kind(next) < of_kind(own))
}

fn is_multiplied_out(side: &Side, product: &Product) -> bool {
    side.products.iter().filter(|other| other.term == product.term).count() > 1
}

fn finding(terms: &Flattened<'_>, earlier: &Product, later: &Product) -> Option<Finding> {
    let quotient = terms.quotient(earlier, later)?;
    let message = if quotient == -Rational::ONE {
        "this term and another of this side cancel"
    } else {
        "this term is the same as another of this side, up to a number"
    };
    let related = vec![Related { span: earlier.span, message: "the other term".to_owned() }];
    Some(Finding { related, ..Finding::plain(RULE.name, RULE.severity, later.span, message.to_owned()) })
}
