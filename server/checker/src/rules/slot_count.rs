//! A kernel carries another number of indices than declared.

use indexwise_grammar::conventions::Kind;

use crate::finding::{Finding, Severity};
use crate::ledger::shown;
use crate::terms::Flattened;
use crate::terms::uses::{Filling, Use};

use super::{Check, Rule};

pub(super) const RULE: Rule = Rule {
    name: "slot-count",
    severity: Severity::Error,
    summary: "A kernel carries too many or too few indices for its declaration.",
    page: include_str!("slot_count.md"),
    on: true,
    check: Check::Terms(check),
};

fn check(terms: &Flattened<'_>) -> Vec<Finding> {
    terms.uses.iter().filter_map(|made| finding(terms, made)).collect()
}

fn finding(terms: &Flattened<'_>, made: &Use) -> Option<Finding> {
    let own = made.own_slots().count();
    let meanings = terms.eyes.meanings;
    // Without indices a kernel is a name, a matrix or a trace.
    if own == 0 || made.unread || !meanings.declares(&made.kernel) {
        return None;
    }
    // A comma may separate slots as well as differentiate.
    let counts = meanings.slot_counts(&made.kernel);
    // A number beside as many letters as are declared is the name of an order, `E^0_{ij}`.
    let letters = made.own_slots().filter(|slot| slot.letter().is_some()).count();
    let fits = |count: &usize| *count == own || *count == made.slots.len() || *count == letters;
    let open = [Kind::Matrix, Kind::NonCommuting, Kind::Variation, Kind::EpsilonTensor, Kind::EpsilonSymbol];
    let open = open.into_iter().any(|kind| meanings.is_kind(&made.kernel, kind));
    if counts.iter().any(fits) || open || is_curvature(terms, made, own) || is_another(terms, made, own, &counts) {
        return None;
    }
    // What is declared by its name alone has no number of slots, but a scalar has none.
    let bare = counts.iter().all(|count| *count == 0);
    if bare && !meanings.is_kind(&made.kernel, Kind::Scalar) {
        return None;
    }
    let number = |count: &usize| if *count == 0 { "none".to_owned() } else { count.to_string() };
    let declared: Vec<String> = counts.iter().map(number).collect();
    let indices = if own == 1 { "index" } else { "indices" };
    let message =
        format!("{} carries {own} {indices} here, but is declared with {}", shown(&made.kernel), declared.join(" or "));
    Some(Finding::plain(RULE.name, RULE.severity, made.span, message))
}

/// Whether a kernel of the same name is meant: a vector beside a tensor, an epsilon of another size, the vector of an antisymmetric tensor in the
/// formula that makes it, components in pairs (`d_{14}`), or a kernel that the paper uses again in this way.
fn is_another(terms: &Flattened<'_>, made: &Use, own: usize, counts: &[usize]) -> bool {
    let same = |other: &&Use| other.kernel == made.kernel && !other.unread;
    let with = |slots: usize| {
        terms.uses.iter().filter(same).filter(|other| other.own_slots().count() == slots).take(2).count()
    };
    let uses = u8::try_from(own).map_or(0, |own| terms.judged.prices.uses_with(&made.kernel, own));
    let vector = own == 1 && counts.iter().all(|count| *count > 1);
    vector
        || matches!(made.letter.as_str(), "\\epsilon" | "\\varepsilon")
        || made.own_slots().all(|slot| matches!(slot.filling, Filling::Component(_)))
        || uses > 1
        || with(own) > 1
        || counts.iter().any(|count| with(*count) > 0)
}

/// `R` is a name for the Riemann tensor, the Ricci tensor and the scalar alike.
fn is_curvature(terms: &Flattened<'_>, made: &Use, own: usize) -> bool {
    let counts = terms.eyes.meanings.slot_counts(&made.kernel);
    let curvature = |count: &usize| {
        let known = terms.eyes.meanings.known(&made.kernel, *count);
        known.is_some_and(|known| matches!(known.role, Some(crate::conventions::meanings::Role::Curvature(_))))
    };
    counts.iter().any(curvature) && matches!(own, 2 | 4)
}
