//! An index is moved through a partial derivative with a metric that is not constant.

use indexwise_algebra::rational::Rational;
use indexwise_grammar::tree::Level;

use crate::conventions::built_in::{is_constant_metric, is_metric_by_custom};
use crate::conventions::meanings::Role;
use crate::finding::{Finding, Related, Severity};
use crate::ledger::shown;
use crate::terms::uses::{Filling, Origin};
use crate::terms::{Contracted, Flattened, Piece, Product, Side, contracted};

use super::{Check, Rule};

pub(super) const RULE: Rule = Rule {
    name: "metric-moved-through-partial",
    severity: Severity::Warning,
    summary: "An index is raised or lowered inside a partial derivative with a metric that is not constant.",
    page: include_str!("metric_moved_through_partial.md"),
    on: true,
    check: Check::Terms(check),
};

/// Products of a side that are compared with those of the other.
const COMPARED: usize = 64;

fn check(terms: &Flattened<'_>) -> Vec<Finding> {
    // Where the derivative of a metric or a connection stands too, the author has kept count.
    if terms.sides.iter().flat_map(|side| &side.products).any(|product| keeps_count(terms, product)) {
        return Vec::new();
    }
    let mut out = Vec::new();
    for (number, pair) in terms.sides.windows(2).enumerate() {
        let [one, two] = pair else { continue };
        if terms.is_equality(number) {
            out.extend(moved(terms, one, two));
            out.extend(moved(terms, two, one));
        }
    }
    out
}

fn keeps_count(terms: &Flattened<'_>, product: &Product) -> bool {
    product.pieces.iter().any(|piece| {
        let partial = piece.made.slots.iter().any(|slot| slot.origin == Origin::Partial);
        piece.opaque && !piece.made.slots.is_empty()
            || partial && is_metric(terms, piece)
            || piece.made.letter == "\\Gamma"
    })
}

/// Products of a side with a metric outside of a derivative that stand on the other side with the index moved inside.
fn moved(terms: &Flattened<'_>, outside: &Side, inside: &Side) -> Vec<Finding> {
    let mut out = Vec::new();
    for product in outside.products.iter().take(COMPARED) {
        for (at, metric) in product.pieces.iter().enumerate().filter(|(_, piece)| is_metric(terms, piece)) {
            for moved in contracted(product, at, metric).into_iter().filter(|moved| moved.held) {
                let same = |other: &&Product| terms.quotient(&moved.product, other) == Some(Rational::ONE);
                if let Some(other) = inside.products.iter().take(COMPARED).find(same) {
                    out.push(finding(terms, metric, &moved, other));
                }
            }
        }
    }
    out
}

fn finding(terms: &Flattened<'_>, metric: &Piece, moved: &Contracted, other: &Product) -> Finding {
    let name = terms.piece_name(metric);
    let (Filling::Index(now) | Filling::Component(now)) = &moved.slot.filling;
    let verb = if moved.slot.level == Level::Up { "raised" } else { "lowered" };
    let message = format!(
        "{} is {verb} to {} through a partial derivative with {name}, which is not constant: its derivative is missing",
        shown(&moved.letter),
        shown(now)
    );
    let related = vec![Related { span: metric.made.span, message: "the metric stands outside here".to_owned() }];
    Finding { related, ..Finding::plain(RULE.name, RULE.severity, other.span, message) }
}

/// Whether a piece is a metric whose components are not constant.
fn is_metric(terms: &Flattened<'_>, piece: &Piece) -> bool {
    let own = piece.made.own_slots().count();
    if piece.opaque || own != 2 {
        return false;
    }
    match terms.eyes.meanings.known(&piece.made.kernel, own) {
        Some(known) => matches!(known.role, Some(Role::Metric { constant: false, .. })),
        None => {
            is_metric_by_custom(&piece.made.kernel)
                && !is_constant_metric(&piece.made.letter)
                && terms.eyes.customs.curved
        }
    }
}
