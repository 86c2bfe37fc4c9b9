//! Antisymmetrised symmetric slots, or the reverse.

use crate::finding::{Finding, Severity};
use crate::terms::{Bracketed, Flattened, Product};

use super::silence::says_zero;
use super::{Check, Rule};

pub(super) const RULE: Rule = Rule {
    name: "vanishing-bracket",
    severity: Severity::Warning,
    summary: "Square brackets around symmetric slots, or round ones around antisymmetric slots, make the term zero.",
    page: include_str!("vanishing_bracket.md"),
    on: true,
    check: Check::Terms(check),
};

fn check(terms: &Flattened<'_>) -> Vec<Finding> {
    let mut out = Vec::new();
    for (number, side) in terms.sides.iter().enumerate() {
        for product in side.products.iter().filter(|product| !product.brackets.is_empty()) {
            let zero = product.brackets.iter().find(|bracket| terms.bracket_zero(product, bracket));
            if let Some(bracket) = zero
                && !says_zero(terms, number, product)
            {
                out.push(finding(terms, product, bracket));
            }
        }
    }
    out
}

fn finding(terms: &Flattened<'_>, product: &Product, bracket: &Bracketed) -> Finding {
    let pieces: Vec<_> = bracket.slots.iter().filter_map(|(piece, _)| product.pieces.get(*piece)).collect();
    let name = pieces.first().map(|piece| terms.piece_name(piece)).unwrap_or_default();
    let span = pieces.iter().map(|piece| piece.made.span).reduce(|one, two| one.join(two)).unwrap_or(product.span);
    let (held, around) = if bracket.antisymmetric { ("symmetric", "square") } else { ("antisymmetric", "round") };
    let message = format!("this is zero: {name} is {held} in the slots that the {around} brackets hold");
    Finding::plain(RULE.name, RULE.severity, span, message)
}
