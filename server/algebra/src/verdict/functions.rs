//! Which functions a claim uses, and whether their values may be related in ways that are not seen.

use super::Claim;
use crate::evaluation::needs::Needs;
use crate::expression::{Expression, Function};

/// What is used.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub(super) struct Used {
    /// Logarithms.
    pub logarithms: bool,
    /// Exponentials, sines, cosines.
    pub others: bool,
    /// Some argument is more than a sum of products of fields, so that values may be related: `\log\det (A B)`.
    pub related: bool,
}

/// The functions of a claim and of the definitions that it asks for.
pub(super) fn used(claim: &Claim, needs: &Needs) -> Used {
    let mut used = Used::default();
    let mut pending = expressions(claim, needs);
    while let Some(expression) = pending.pop() {
        if let Expression::Function(function, of) = expression {
            let logarithm = *function == Function::Log;
            used.logarithms |= logarithm;
            used.others |= !logarithm;
            used.related |= !is_plain(of, !logarithm);
        }
        pending.extend(expression.parts());
    }
    used
}

/// Both sides, and the bodies of the definitions in use.
pub(super) fn expressions<'a>(claim: &'a Claim, needs: &Needs) -> Vec<&'a Expression> {
    let definitions = claim.world.definitions.iter().zip(&needs.definitions).filter(|(_, need)| need.is_some());
    definitions.map(|(definition, _)| &definition.body).chain([&claim.left, &claim.right]).collect()
}

/// Whether an argument is made of fields by products, quotients and powers, and by sums if these are multiplied out.
fn is_plain(of: &Expression, sums: bool) -> bool {
    let mut pending = vec![(of, sums)];
    while let Some((expression, sums)) = pending.pop() {
        let (plain, within) = match expression {
            Expression::Number(_) | Expression::Imaginary | Expression::Dimension(_) => (true, sums),
            Expression::Field { .. } | Expression::Coordinate(_) => (true, sums),
            Expression::Product(_) => (true, sums),
            Expression::Sum(_) => (sums, sums),
            Expression::Quotient(..) | Expression::Power(..) | Expression::Magnitude(_) => (true, false),
            _ => (false, false),
        };
        if !plain {
            return false;
        }
        pending.extend(expression.parts().into_iter().map(|part| (part, within)));
    }
    true
}
