//! Why a monomial or a bracket is zero, where that can be told in a sentence.
//!
//! The normal form says that a monomial is zero; here is looked for two labels whose exchange shows it. What is
//! found is always true, but not every zero has such a reason.

use super::monomial::{Label, Level, Monomial, Parity};
use super::sum::{Bracket, Place};
use crate::symmetry::Sign;

/// A reason why a monomial is zero. Factors are counted from 0, as the monomial has them.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Vanishing {
    /// The symmetry of the factor lets no such tensor be but zero.
    Kernel {
        /// Which factor.
        factor: usize,
    },
    /// A factor is antisymmetric in two slots that hold the same component.
    Components {
        /// The component.
        label: Label,
        /// The antisymmetric factor.
        factor: usize,
    },
    /// A factor is antisymmetric in two slots that are contracted with one another.
    Trace {
        /// The dummy.
        label: Label,
        /// The antisymmetric factor.
        factor: usize,
    },
    /// Exchanging two dummies leaves one side as it is and turns the other side's sign.
    Contraction {
        /// One dummy.
        first: Label,
        /// The other.
        second: Label,
        /// The factor that is symmetric in them, or two equal factors with one slot each: `u_a u_b`.
        symmetric: Vec<usize>,
        /// The factor that is antisymmetric in them, or two equal anticommuting ones.
        antisymmetric: Vec<usize>,
    },
}

/// A slot with its place.
#[derive(Clone, Copy)]
struct End {
    place: Place,
    label: Label,
    level: Level,
}

fn ends(monomial: &Monomial) -> Vec<End> {
    let factors = monomial.factors().iter().enumerate();
    let of = |(factor, content): (usize, &super::Factor)| -> Vec<End> {
        let slots = content.slots.iter().enumerate();
        slots.map(|(slot, held)| End { place: Place { factor, slot }, label: held.label, level: held.level }).collect()
    };
    factors.flat_map(of).collect()
}

/// The first reason found why the monomial is zero; nothing if there is none so simple, or if it is not zero.
pub fn vanishing_pair(monomial: &Monomial) -> Option<Vanishing> {
    let kernel = monomial.factors().iter().position(|factor| factor.symmetry.vanishes());
    if let Some(factor) = kernel {
        return Some(Vanishing::Kernel { factor });
    }
    let ends = ends(monomial);
    let equal = pairs(&ends).find_map(|(one, other)| within_a_factor(monomial, one, other));
    equal.or_else(|| {
        let dummies: Vec<(End, End)> = pairs(&ends)
            .filter(|(one, other)| one.label == other.label && matches!(one.label, Label::Dummy { .. }))
            .map(|(one, other)| (*one, *other))
            .collect();
        pairs(&dummies).find_map(|(first, second)| contraction(monomial, *first, *second))
    })
}

fn pairs<T>(items: &[T]) -> impl Iterator<Item = (&T, &T)> {
    items.iter().enumerate().flat_map(|(place, one)| items.iter().skip(place + 1).map(move |other| (one, other)))
}

/// Two ends of one label in antisymmetric slots.
fn within_a_factor(monomial: &Monomial, one: &End, other: &End) -> Option<Vanishing> {
    let alike = one.label == other.label && matching(one, other) && one.place.factor == other.place.factor;
    let (_, sign) = exchanged(monomial, one.place, other.place).filter(|_| alike)?;
    let (label, factor) = (one.label, one.place.factor);
    match (sign, label) {
        (Sign::Plus, _) | (_, Label::Free(_)) => None,
        (Sign::Minus, Label::Component(_)) => Some(Vanishing::Components { label, factor }),
        (Sign::Minus, Label::Dummy { .. }) => Some(Vanishing::Trace { label, factor }),
    }
}

/// Two dummies, each by its ends.
fn contraction(monomial: &Monomial, first: (End, End), second: (End, End)) -> Option<Vanishing> {
    let reason = |one: (End, End), other: (End, End)| {
        let (factors, sign) = exchanged(monomial, one.0.place, one.1.place)?;
        let (others, opposite) = exchanged(monomial, other.0.place, other.1.place)?;
        let matched = matching(&one.0, &one.1) && matching(&other.0, &other.1);
        let (symmetric, antisymmetric) = match (sign, opposite) {
            (Sign::Plus, Sign::Minus) => (factors, others),
            (Sign::Minus, Sign::Plus) => (others, factors),
            _ => return None,
        };
        let (first, second) = (first.0.label, second.0.label);
        matched.then_some(Vanishing::Contraction { first, second, symmetric, antisymmetric })
    };
    reason((first.0, second.0), (first.1, second.1)).or_else(|| reason((first.0, second.1), (first.1, second.0)))
}

/// Whether one end can take the place of the other.
fn matching(one: &End, other: &End) -> bool {
    match (one.label, other.label) {
        (Label::Dummy { family, movable, .. }, Label::Dummy { family: own, movable: moves, .. }) => {
            family == own && movable == moves && (movable || one.level == other.level)
        }
        (label, own) => label == own && one.level == other.level,
    }
}

/// The sign under exchange of the contents of two slots, all others staying, and the factors that it concerns.
fn exchanged(monomial: &Monomial, one: Place, other: Place) -> Option<(Vec<usize>, Sign)> {
    let factor = monomial.factors().get(one.factor)?;
    if one.factor == other.factor {
        return Some((vec![one.factor], factor.symmetry.exchange_sign(one.slot, other.slot)?));
    }
    let twin = monomial.factors().get(other.factor)?;
    let sign = if factor.parity == Parity::Anticommuting { Sign::Minus } else { Sign::Plus };
    (factor.kind() == twin.kind() && factor.slots.len() == 1).then_some((vec![one.factor, other.factor], sign))
}

/// The first two slots of a bracket in which the monomial has the opposite symmetry, so that the bracket is zero:
/// antisymmetrised symmetric slots, or the reverse. Nothing if there are none.
pub fn vanishing_bracket(monomial: &Monomial, bracket: &Bracket) -> Option<(Place, Place)> {
    let wanted = if bracket.antisymmetric { Sign::Plus } else { Sign::Minus };
    let opposed = |(one, other): &(&Place, &Place)| {
        one != other && exchanged(monomial, **one, **other).is_some_and(|(_, sign)| sign == wanted)
    };
    pairs(&bracket.slots).find(opposed).map(|(one, other)| (*one, *other))
}
