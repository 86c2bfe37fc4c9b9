//! One side is symmetric in two free indices, the other is not.

use compact_str::CompactString;
use indexwise_algebra::symmetry::Sign;

use crate::finding::{Finding, Related, Severity};
use crate::ledger::shown;
use crate::terms::{Flattened, Side};

use super::{Check, Rule};

pub(super) const RULE: Rule = Rule {
    name: "symmetry-not-shared",
    severity: Severity::Hint,
    summary: "One side is symmetric or antisymmetric in two free indices, the other is not.",
    page: include_str!("symmetry_not_shared.md"),
    on: true,
    check: Check::Terms(check),
};

fn check(terms: &Flattened<'_>) -> Vec<Finding> {
    let mut out = Vec::new();
    for (number, pair) in terms.sides.windows(2).enumerate() {
        let [one, two] = pair else { continue };
        if !terms.is_equality(number) || !terms.is_complete(one) || !terms.is_complete(two) || states_one(one, two) {
            continue;
        }
        for (a, b) in free_pairs(one) {
            let signs = (terms.exchange(one, &a, &b), terms.exchange(two, &a, &b));
            match signs {
                (Some(Some(first)), Some(Some(second))) if first != second => {
                    out.push(finding(one, two, (&a, &b), first));
                }
                (Some(Some(sign)), Some(None)) if terms.is_arbitrary(two) => {
                    out.push(finding(one, two, (&a, &b), sign));
                }
                (Some(None), Some(Some(sign))) if terms.is_arbitrary(one) => {
                    out.push(finding(two, one, (&a, &b), sign));
                }
                _ => {}
            }
        }
    }
    out
}

/// Whether the statement itself claims a symmetry, of the same kernels with other letters: `\nabla_c b_{ab} = \nabla_b
/// b_{ac}`.
fn states_one(one: &Side, two: &Side) -> bool {
    matches!((one.products.as_slice(), two.products.as_slice()), ([one], [two]) if one.has_kernels_of(two))
}

/// Pairs of letters that are free on a side.
fn free_pairs(side: &Side) -> Vec<(CompactString, CompactString)> {
    let letters = side.free_letters();
    let pairs = letters.iter().enumerate().flat_map(|(n, one)| letters.iter().skip(n + 1).map(move |two| (one, two)));
    pairs.map(|(one, two)| (one.clone(), two.clone())).collect()
}

fn finding(with: &Side, without: &Side, (a, b): (&str, &str), sign: Sign) -> Finding {
    let word = if sign == Sign::Minus { "antisymmetric" } else { "symmetric" };
    let letters = format!("{} and {}", shown(a), shown(b));
    let message = format!("this side is not {word} in {letters}, but the other is");
    let related = vec![Related { span: with.span, message: format!("{word} in {letters}") }];
    Finding { related, ..Finding::plain(RULE.name, RULE.severity, without.span, message) }
}
