//! Numbers before a term: the coefficient of terms that coincide, multiplied into what the author wrote.

use compact_str::CompactString;
use indexwise_algebra::rational::Rational;
use indexwise_grammar::tree::{Atom, Factor, FractionKind, ItemKind, Joint, Product, SignKind, Sum, Term};

use crate::terms::{exact, plain_number};

/// Zero as a sum.
pub(super) fn zero() -> Sum {
    Sum::of_factor(Factor::number(0))
}

/// Takes a plus away, which nothing stands before.
pub(super) fn without_plus(term: &mut Term) {
    term.sign = term.sign.filter(|sign| sign.kind != SignKind::Plus);
}

/// The term times a number that is not zero; nothing if the number cannot be written.
pub(super) fn times(term: &Term, number: Rational) -> Option<Term> {
    if number == Rational::ONE {
        return Some(term.clone());
    }
    let (lead, taken) = leading_number(term).unwrap_or((Rational::ONE, 0));
    let rest = term.factors.get(taken..).unwrap_or_default();
    let total = lead.checked_mul(number)?;
    let mut rest = rest.to_vec();
    let written = number_factor(total.magnitude(), rest.is_empty())?;
    if let Some(next) = rest.first_mut() {
        next.joint = match (&next.atom, &written) {
            // Two numbers side by side would be one.
            (Atom::Number(_), Some(_)) => Joint::Times(Product::Dot),
            _ => Joint::Beside,
        };
    }
    let factors = written.into_iter().chain(rest).collect();
    let scaled = Term { factors, ..term.clone() };
    Some(if total.numerator() < 0 { scaled.signed(SignKind::Minus) } else { scaled })
}

/// A number that is not negative as a factor; none for 1 unless it stands alone. Nothing if it is too large.
#[allow(clippy::option_option)]
fn number_factor(number: Rational, alone: bool) -> Option<Option<Factor>> {
    if number == Rational::ONE && !alone {
        return Some(None);
    }
    let over = Factor::number(u64::try_from(number.numerator()).ok()?);
    let under = u64::try_from(number.denominator()).ok()?;
    if under == 1 {
        return Some(Some(over));
    }
    Some(Some(Factor::quotient(Sum::of_factor(over), Sum::of_factor(Factor::number(under)))))
}

/// The plain number that a term begins with, and how many factors make it up: `3`, `\frac{1}{2}`, `1/2`.
fn leading_number(term: &Term) -> Option<(Rational, usize)> {
    let plain = |at: usize| term.factors.get(at).filter(|one| one.scripts.is_empty() && one.marks.is_empty());
    let joined = |at: usize| {
        let multiplied =
            |factor: &Factor| matches!(factor.joint, Joint::Beside | Joint::Times(Product::Dot | Product::Star));
        term.factors.get(at).is_none_or(multiplied)
    };
    let slashed = plain(1).filter(|under| under.joint == Joint::Slash).map(|under| &under.atom);
    let (number, taken) = match (&plain(0)?.atom, slashed) {
        (Atom::Number(over), Some(Atom::Number(under))) => (exact(over)?.checked_div(exact(under)?)?, 2),
        (Atom::Number(text), None) => (exact(text)?, 1),
        (Atom::Fraction(fraction), None) if fraction.kind == FractionKind::Quotient => {
            (plain_number(&fraction.over)?.checked_div(plain_number(&fraction.under)?)?, 1)
        }
        _ => return None,
    };
    (joined(0) && joined(taken)).then_some((number, taken))
}

/// Takes Kronecker's deltas of equal values away, which are 1, or lets 1 stand where nothing else is left. `deltas` are
/// the numbers of the factors that are deltas of two values.
pub(super) fn without_deltas(term: &mut Term, deltas: &[usize]) {
    for at in deltas.iter().rev().copied().filter(|at| term.factors.get(*at).is_some_and(is_one)).collect::<Vec<_>>() {
        let next_below = term.factors.get(at + 1).is_some_and(|next| next.joint == Joint::Slash);
        let own = term.factors.get(at).map(|factor| factor.joint);
        if term.factors.len() > 1 && own != Some(Joint::Slash) && !(at == 0 && next_below) {
            term.factors.remove(at);
            if let Some(next) = term.factors.get_mut(at).filter(|_| at == 0) {
                next.joint = Joint::Beside;
            }
        } else if let (Some(place), Some(joint)) = (term.factors.get_mut(at), own) {
            *place = Factor { joint, ..Factor::number(1) };
        }
    }
}

/// `\delta^1_1`, `\delta_{rr}`: two equal values.
fn is_one(factor: &Factor) -> bool {
    let mut names = names_of(factor).into_iter();
    matches!((names.next(), names.next(), names.next()), (Some(one), Some(two), None) if one == two)
}

/// The letters and numbers in a factor's scripts.
pub(super) fn names_of(factor: &Factor) -> Vec<&CompactString> {
    let items = factor.scripts.iter().flat_map(|script| &script.items);
    items
        .filter_map(|item| match &item.kind {
            ItemKind::Letter(name) | ItemKind::Number(name) => Some(name),
            _ => None,
        })
        .collect()
}
