//! Symmetric slots contracted with antisymmetric ones.

use compact_str::CompactString;

use crate::finding::{Finding, Related, Severity};
use crate::ledger::shown;
use crate::terms::{Flattened, Product, Zero};

use super::silence::says_zero;
use super::{Check, Rule};

pub(super) const RULE: Rule = Rule {
    name: "vanishing-contraction",
    severity: Severity::Warning,
    summary: "Symmetric slots are contracted with antisymmetric ones, so that the term is zero.",
    page: include_str!("vanishing_contraction.md"),
    on: true,
    check: Check::Terms(check),
};

fn check(terms: &Flattened<'_>) -> Vec<Finding> {
    let mut out: Vec<Finding> = Vec::new();
    for (number, side) in terms.sides.iter().enumerate() {
        for product in &side.products {
            if let Some(zero) = terms.contraction_zero(product)
                && !says_zero(terms, number, product)
            {
                let finding = finding(terms, product, &zero);
                // A factor before a bracket meets each of its terms.
                if out.iter().all(|other| other.span != finding.span || other.message != finding.message) {
                    out.push(finding);
                }
            }
        }
    }
    out
}

fn finding(terms: &Flattened<'_>, product: &Product, zero: &Zero) -> Finding {
    let place = |pieces: &[usize]| {
        let spans = pieces.iter().filter_map(|at| product.pieces.get(*at)).map(|piece| piece.made.span);
        spans.reduce(|one, two| one.join(two)).unwrap_or(product.span)
    };
    let (span, message, related) = match zero {
        Zero::Pair { letters, symmetric, antisymmetric } => {
            let (one, two) = (shown(&letters.0), shown(&letters.1));
            let names = (terms.piece_names(product, symmetric), terms.piece_names(product, antisymmetric));
            if symmetric == antisymmetric {
                (place(antisymmetric), of_one_piece(product, symmetric, letters, &names.0), Vec::new())
            } else {
                let message = format!(
                    "this term is zero: {} is symmetric in {one} and {two}, {} is antisymmetric",
                    names.0, names.1
                );
                let related = Related { span: place(symmetric), message: format!("symmetric in {one} and {two}") };
                (place(antisymmetric), message, vec![related])
            }
        }
        Zero::Trace { letter, piece } => {
            let name = terms.piece_names(product, &[*piece]);
            let message =
                format!("this is zero: {name} is antisymmetric in the two slots that {} joins", shown(letter));
            (place(&[*piece]), message, Vec::new())
        }
        Zero::Together => {
            let message = "this term is zero: an exchange of its summed letters turns its sign".to_owned();
            (product.span, message, Vec::new())
        }
    };
    Finding { related, ..Finding::plain(RULE.name, RULE.severity, span, message) }
}

/// What is said where slots of one piece are contracted with others of it: mostly those of its derivatives.
fn of_one_piece(product: &Product, piece: &[usize], letters: &(CompactString, CompactString), name: &str) -> String {
    let (one, two) = (shown(&letters.0), shown(&letters.1));
    let made = piece.first().and_then(|at| product.pieces.get(*at)).map(|piece| &piece.made);
    let is_own = |letter: &CompactString| {
        made.is_some_and(|made| made.own_slots().filter(|slot| slot.letter() == Some(letter)).count() == 1)
    };
    match made.filter(|_| is_own(&letters.0) && is_own(&letters.1)) {
        Some(made) => {
            let kernel = shown(&made.kernel);
            format!("this term is zero: the derivatives are symmetric in {one} and {two}, {kernel} is antisymmetric")
        }
        None => {
            format!("this is zero: {name} is symmetric in two slots and antisymmetric in two that {one} and {two} join")
        }
    }
}
