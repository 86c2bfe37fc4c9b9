//! Another number before a term: the one that stands there times a small one, or one where none stands.

use indexwise_algebra::rational::Rational;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{Atom, Factor, FractionKind, Joint, Sum, Term};
use indexwise_grammar::write::write_sum;

use super::edits::{Change, Kind, Page};

/// The numbers by which a term may be off, as numerator and denominator.
const OFF_BY: [(i128, i128); 8] = [(2, 1), (1, 2), (3, 1), (1, 3), (4, 1), (1, 4), (2, 3), (3, 2)];
/// Those that are tried where no number stands.
const NEW: usize = 4;

/// A number that stands in a term as a factor.
struct Standing {
    /// Its factors: one, or two with a slash between them.
    factors: std::ops::Range<usize>,
    value: Rational,
    /// Whether the term is divided by it.
    below: bool,
}

/// The numbers by which terms differ that are called alike.
pub(super) fn ratios() -> impl Iterator<Item = Rational> {
    let off = OFF_BY.iter().filter_map(|(over, under)| Rational::new(*over, *under));
    std::iter::once(Rational::ONE).chain(off)
}

/// Other numbers for the first that stands in a term, or new ones before it.
pub(super) fn coefficients(term: &Term, page: &Page<'_>) -> Vec<Change<Term>> {
    let Some(number) = standing(term) else {
        return ratios().skip(1).take(NEW).filter_map(|ratio| inserted(term, ratio, page)).collect();
    };
    // Off by a small number, or another small number altogether.
    let mut values: Vec<Rational> = Vec::new();
    for ratio in ratios().skip(1) {
        values.extend(number.value.checked_mul(ratio));
    }
    values.extend(ratios());
    let mut seen = vec![number.value];
    values.retain(|value| {
        let new = !seen.contains(value);
        seen.push(*value);
        new
    });
    values.into_iter().filter_map(|value| replaced(term, &number, value, page)).collect()
}

/// The first number of a term.
fn standing(term: &Term) -> Option<Standing> {
    let plain =
        |factor: &Factor| if factor.scripts.is_empty() && factor.marks.is_empty() { value(factor) } else { None };
    let at = term.factors.iter().position(|factor| plain(factor).is_some())?;
    let number = plain(term.factors.get(at)?)?;
    if term.factors.get(at)?.joint == Joint::Slash {
        return Some(Standing { factors: at..at + 1, value: number, below: true });
    }
    if let Some(next) = term.factors.get(at + 1).filter(|next| next.joint == Joint::Slash) {
        let under = plain(next)?;
        return Some(Standing { factors: at..at + 2, value: number.checked_div(under)?, below: false });
    }
    Some(Standing { factors: at..at + 1, value: number, below: false })
}

/// The value of a number or of a fraction of two.
pub(super) fn value(factor: &Factor) -> Option<Rational> {
    let lone = |sum: &Sum| match sum.terms.as_slice() {
        [term] if term.sign.is_none() => match term.factors.as_slice() {
            [factor] if factor.scripts.is_empty() => number(factor),
            _ => None,
        },
        _ => None,
    };
    match &factor.atom {
        Atom::Fraction(fraction) if fraction.kind == FractionKind::Quotient => {
            lone(&fraction.over)?.checked_div(lone(&fraction.under)?)
        }
        _ => number(factor),
    }
}

fn number(factor: &Factor) -> Option<Rational> {
    let Atom::Number(number) = &factor.atom else { return None };
    number.parse::<u32>().ok().map(|number| Rational::from_integer(i64::from(number)))
}

/// A number as a sum, to be written.
fn as_sum(value: Rational) -> Option<Factor> {
    let whole = |part: i128| u64::try_from(part).ok().map(Factor::number);
    let (over, under) = (whole(value.numerator())?, whole(value.denominator())?);
    Some(if value.denominator() == 1 { over } else { Factor::quotient(Sum::of_factor(over), Sum::of_factor(under)) })
}

fn replaced(term: &Term, number: &Standing, value: Rational, page: &Page<'_>) -> Option<Change<Term>> {
    let spans = term.factors.get(number.factors.clone())?.iter().map(|factor| factor.span);
    let span = spans.reduce(Span::join)?;
    let mut copy = term.clone();
    let next = term.factors.get(number.factors.end);
    if value == Rational::ONE && !number.below && next.is_some_and(|next| next.joint == Joint::Beside) {
        copy.factors.drain(number.factors.clone());
        // What now begins the term hangs on nothing.
        let gone = Span { end: next?.span.start, ..span };
        let title = format!("Drop {} before {}", page.quoted(span), page.quoted(next?.span));
        return Some(Change { of: copy, edits: vec![page.edit(gone, "")], title, kind: Kind::Number });
    }
    if number.below && value.denominator() != 1 {
        return None;
    }
    let mut factor = as_sum(value)?;
    let by = write_sum(&Sum::of_factor(factor.clone()), page.dialect).text;
    factor.joint = term.factors.get(number.factors.start)?.joint;
    factor.span = span;
    copy.factors.splice(number.factors.clone(), [factor]);
    let title = format!("Write {by} for {}", page.quoted(span));
    Some(Change { of: copy, edits: vec![page.edit(span, &by)], title, kind: Kind::Number })
}

fn inserted(term: &Term, ratio: Rational, page: &Page<'_>) -> Option<Change<Term>> {
    let factor = as_sum(ratio)?;
    let mut by = write_sum(&Sum::of_factor(factor.clone()), page.dialect).text;
    let mut copy = term.clone();
    copy.factors.insert(0, factor);
    let title = format!("Write {by} before {}", page.quoted(term.span));
    by.push(' ');
    let start = Span { end: term.span.start, ..term.span };
    Some(Change { of: copy, edits: vec![page.edit(start, &by)], title, kind: Kind::NewNumber })
}
