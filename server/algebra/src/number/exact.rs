//! Fractions as numbers: what does not fit into 128 bits is unsound, spreads, and equals nothing.

use std::fmt;
use std::ops::{Add, Mul, Neg, Sub};

use super::{Number, common_divisor};
use crate::draws::Draws;
use crate::rational::Rational;

/// The largest size of a drawn integer; small, so that a counterexample can be read and its numbers fit.
const LARGEST_DRAWN: u64 = 3;

/// A fraction, or the mark of one that did not fit.
///
/// Trap: `PartialEq` is not reflexive; what did not fit differs from everything, itself among them.
#[derive(Clone, Copy, Debug)]
pub struct Exact(Option<Rational>);

impl Exact {
    /// The fraction; nothing if it did not fit.
    pub const fn value(self) -> Option<Rational> {
        self.0
    }

    fn combine(self, other: Self, operation: fn(Rational, Rational) -> Option<Rational>) -> Self {
        Self(self.0.zip(other.0).and_then(|(a, b)| operation(a, b)))
    }
}

impl From<Rational> for Exact {
    fn from(number: Rational) -> Self {
        Self(Some(number))
    }
}

impl PartialEq for Exact {
    fn eq(&self, other: &Self) -> bool {
        self.0.zip(other.0).is_some_and(|(a, b)| a == b)
    }
}

impl Add for Exact {
    type Output = Self;

    fn add(self, other: Self) -> Self {
        self.combine(other, Rational::checked_add)
    }
}

impl Sub for Exact {
    type Output = Self;

    fn sub(self, other: Self) -> Self {
        self.combine(other, Rational::checked_sub)
    }
}

impl Mul for Exact {
    type Output = Self;

    fn mul(self, other: Self) -> Self {
        self.combine(other, Rational::checked_mul)
    }
}

impl Neg for Exact {
    type Output = Self;

    fn neg(self) -> Self {
        Self(self.0.map(|number| -number))
    }
}

impl fmt::Display for Exact {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self.0 {
            Some(number) => number.fmt(f),
            None => f.write_str("too large"),
        }
    }
}

impl Number for Exact {
    type Sum = Self;

    // Whatever does not fit is marked at once.
    const RUN: usize = 64;
    const ZERO: Self = Self(Some(Rational::ZERO));
    const ONE: Self = Self(Some(Rational::ONE));
    const EMPTY: Self = Self::ZERO;

    fn from_integer(number: i64) -> Self {
        Rational::from_integer(number).into()
    }

    fn draw(draws: &mut Draws) -> Self {
        let drawn = draws.below(2 * LARGEST_DRAWN + 1).cast_signed();
        Self::from_integer(drawn - LARGEST_DRAWN.cast_signed())
    }

    fn is_sound(self) -> bool {
        self.0.is_some()
    }

    fn inverse(self) -> Option<Self> {
        self.0?.inverse().map(Self::from)
    }

    fn magnitude(self) -> Option<Self> {
        Some(Self(self.0.map(Rational::magnitude)))
    }

    fn power(self, numerator: i64, denominator: u64) -> Option<Self> {
        let shared = common_divisor(numerator.unsigned_abs(), denominator);
        let (numerator, denominator) =
            (i128::from(numerator).checked_div(i128::from(shared))?, denominator.checked_div(shared)?);
        let Some(base) = self.0 else { return Some(self) };
        if base == Rational::ZERO && numerator < 0 {
            return None;
        }
        let rooted = rational_root(base, denominator)?;
        // Only 0, 1 and -1 have powers that large which fit.
        let power = i32::try_from(numerator).ok().and_then(|exponent| rooted.checked_pow(exponent));
        Some(Self(power))
    }

    fn add_unsettled(sum: Self, a: Self, b: Self) -> Self {
        sum + a * b
    }

    fn settled(sum: Self) -> Self {
        sum
    }

    fn total(sum: Self) -> Self {
        sum
    }
}

/// The root of an order, of the same sign as the fraction; nothing if it is no fraction, for an even root of a
/// negative one, and for the order 0.
fn rational_root(number: Rational, order: u64) -> Option<Rational> {
    let negative = number < Rational::ZERO;
    if order == 0 || (negative && order.is_multiple_of(2)) {
        return None;
    }
    let upper = natural_root(number.numerator().unsigned_abs(), order)?;
    let lower = natural_root(number.denominator().unsigned_abs(), order)?;
    let root = Rational::new(i128::try_from(upper).ok()?, i128::try_from(lower).ok()?)?;
    Some(if negative { -root } else { root })
}

/// The root of a positive order if it is a natural number, by bisection.
fn natural_root(number: u128, order: u64) -> Option<u128> {
    let order = u32::try_from(order).unwrap_or(u32::MAX);
    let (mut low, mut high) = (0, number);
    while low < high {
        let middle = low + (high - low) / 2;
        match middle.checked_pow(order) {
            Some(power) if power < number => low = middle + 1,
            _ => high = middle,
        }
    }
    (low.checked_pow(order) == Some(number)).then_some(low)
}
