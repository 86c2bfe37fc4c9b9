//! A covariant derivative acts on something that is no tensor.

use compact_str::CompactString;

use crate::conventions::meanings::Role;
use crate::finding::{Finding, Severity};
use crate::ledger::shown;
use crate::terms::uses::{Origin, UsedSlot};
use crate::terms::{Flattened, Piece, Product, Side};

use super::{Check, Rule};

pub(super) const RULE: Rule = Rule {
    name: "derivative-of-non-tensor",
    severity: Severity::Warning,
    summary: "A covariant derivative acts on a Christoffel symbol, or on a partial derivative of a tensor with slots.",
    page: include_str!("derivative_of_non_tensor.md"),
    on: true,
    check: Check::Terms(check),
};

fn check(terms: &Flattened<'_>) -> Vec<Finding> {
    let mut out: Vec<Finding> = Vec::new();
    for side in &terms.sides {
        for product in &side.products {
            for (at, piece) in product.pieces.iter().enumerate() {
                let Some(what) = no_tensor(terms, piece) else { continue };
                let message = format!("a covariant derivative acts on {what}, which is no tensor");
                let finding = Finding::plain(RULE.name, RULE.severity, piece.made.span, message);
                if !is_curl(side, product, at) && !out.contains(&finding) {
                    out.push(finding);
                }
            }
        }
    }
    out
}

/// Whether the derivative is antisymmetrised with a slot of what it acts on, in brackets or by another term with the
/// letters exchanged: a curl is a tensor.
fn is_curl(side: &Side, product: &Product, at: usize) -> bool {
    let Some(piece) = product.pieces.get(at) else { return false };
    let origin = |slot: usize| piece.made.slots.get(slot).map(|slot| slot.origin);
    let bracketed = product.brackets.iter().filter(|bracket| bracket.antisymmetric).any(|bracket| {
        let holds = |wanted| bracket.slots.iter().any(|(one, slot)| *one == at && origin(*slot) == Some(wanted));
        holds(Origin::Partial) && holds(Origin::Own)
    });
    let letters = |piece: &Piece, wanted: Origin| -> Vec<CompactString> {
        piece.made.slots.iter().filter(|slot| slot.origin == wanted).filter_map(UsedSlot::letter).cloned().collect()
    };
    let exchanged = |other: &Piece| {
        other.operators == piece.operators
            && other.made.kernel == piece.made.kernel
            && letters(other, Origin::Partial).iter().any(|letter| letters(piece, Origin::Own).contains(letter))
    };
    bracketed || side.products.iter().flat_map(|other| &other.pieces).any(exchanged)
}

/// What stands under a covariant derivative and is no tensor.
fn no_tensor(terms: &Flattened<'_>, piece: &Piece) -> Option<String> {
    if piece.opaque || !terms.has_connection() {
        return None;
    }
    let slots = &piece.made.slots;
    let origins = || slots.iter().map(|slot| slot.origin);
    let own = piece.made.own_slots().count();
    let covariant =
        |kernel: &str| kernel == "\\nabla" || terms.eyes.meanings.derivatives.iter().any(|(name, _)| name == kernel);
    let before = piece.operators.iter().position(|kernel| covariant(kernel));
    let after = origins().skip(piece.operators.len()).any(|origin| origin == Origin::Covariant);
    if before.is_none() && !after {
        return None;
    }
    if is_connection(terms, piece, own) {
        return Some(format!("the Christoffel symbol {}", shown(&piece.made.kernel)));
    }
    let flat = terms.eyes.meanings.derivatives.iter().any(|(name, _)| name == "\\partial");
    // `\nabla_a \partial_b V^c`; a semicolon stands inside of every derivative before the kernel.
    let partial =
        before.is_some_and(|before| piece.operators.iter().skip(before + 1).any(|kernel| kernel == "\\partial"));
    (partial && own > 0 && !flat).then(|| format!("a partial derivative of {}", shown(&piece.made.kernel)))
}

fn is_connection(terms: &Flattened<'_>, piece: &Piece, own: usize) -> bool {
    let known = terms.eyes.meanings.known(&piece.made.kernel, own);
    match known {
        Some(known) => known.role == Some(Role::Christoffel),
        None => piece.made.kernel == "\\Gamma" && own == 3,
    }
}
