//! A covariant derivative acts on something that is no tensor.

use crate::conventions::meanings::Role;
use crate::finding::{Finding, Severity};
use crate::terms::uses::Origin;
use crate::terms::{Flattened, Piece};

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
    let products = terms.sides.iter().flat_map(|side| &side.products);
    for piece in products.flat_map(|product| &product.pieces) {
        let Some(what) = no_tensor(terms, piece) else { continue };
        let message = format!("a covariant derivative acts on {what}, which is no tensor");
        let finding = Finding::plain(RULE.name, RULE.severity, piece.made.span, message);
        if !out.contains(&finding) {
            out.push(finding);
        }
    }
    out
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
        return Some(format!("the Christoffel symbol {}", terms.piece_name(piece)));
    }
    let flat = terms.eyes.meanings.derivatives.iter().any(|(name, _)| name == "\\partial");
    // `\nabla_a \partial_b V^c`; a semicolon stands inside of every derivative before the kernel.
    let partial =
        before.is_some_and(|before| piece.operators.iter().skip(before + 1).any(|kernel| kernel == "\\partial"));
    (partial && own > 0 && !flat).then(|| format!("a partial derivative of {}", terms.piece_name(piece)))
}

fn is_connection(terms: &Flattened<'_>, piece: &Piece, own: usize) -> bool {
    let known = terms.eyes.meanings.known(&piece.made.kernel, own);
    match known {
        Some(known) => known.role == Some(Role::Christoffel),
        None => piece.made.kernel == "\\Gamma" && own == 3,
    }
}
