//! What the rest of the crate asks of numbers, so that one code runs over residues, their quadratic extension
//! and fractions.
//!
//! The one idea: operations that are many (`+`, `*`, sums of products) always give a number, operations that
//! are few (reciprocal, root) may give nothing. Fractions of bounded integers fit by being *unsound* where a
//! result does not fit: such a number spreads through sums and products, equals nothing, and is found by
//! `is_sound` before anything is concluded (`Tensor::agrees` and its kin do so).
//!
//! Trap: the laws of numbers hold for sound numbers only.

mod complex;
mod exact;
mod residue;

use std::fmt::Debug;
use std::ops::{Add, Mul, Neg, Sub};

pub use exact::Exact;

use crate::draws::Draws;
use crate::trouble::{Outcome, Trouble};

/// Numbers of a field in which `1 + 1 + ... + 1` is not 0 for any number of summands below 2^60.
pub trait Number:
    Copy
    + Debug
    + PartialEq
    + Add<Output = Self>
    + Sub<Output = Self>
    + Mul<Output = Self>
    + Neg<Output = Self>
    + Send
    + Sync
    + 'static
{
    /// A sum of products that is brought into range only when it is complete.
    type Sum: Copy;

    /// How many products a settled sum has room for; positive.
    const RUN: usize;

    /// Neutral for addition.
    const ZERO: Self;

    /// Neutral for multiplication.
    const ONE: Self;

    /// The sum of no products.
    const EMPTY: Self::Sum;

    /// The image of an integer.
    fn from_integer(number: i64) -> Self;

    /// A number that depends on the draws alone: any residue, a small integer as a fraction.
    fn draw(draws: &mut Draws) -> Self;

    /// The same without an imaginary part: what fields are drawn from.
    fn draw_real(draws: &mut Draws) -> Self {
        Self::draw(draws)
    }

    /// The number whose square is -1, where there is one.
    fn imaginary_unit() -> Option<Self> {
        None
    }

    /// Whether this is 0; false for an unsound number.
    fn is_zero(self) -> bool {
        self == Self::ZERO
    }

    /// Whether this is a number at all, and not the mark of a result that did not fit.
    fn is_sound(self) -> bool {
        true
    }

    /// The reciprocal; nothing for 0.
    fn inverse(self) -> Option<Self>;

    /// `|a|`: which of `a` and `-a` is positive, or 0. Nothing for numbers without a sign.
    fn magnitude(self) -> Option<Self>;

    /// The power with the exponent `numerator / denominator`, that root which keeps signs: positive of a positive
    /// number. Nothing where there is no such number, and for a power of 0 with a negative exponent.
    fn power(self, numerator: i64, denominator: u64) -> Option<Self>;

    /// The square root that is positive or 0, if there is one.
    fn root(self) -> Option<Self> {
        self.power(1, 2)
    }

    /// The sum with one product more.
    fn add_product(sum: Self::Sum, a: Self, b: Self) -> Self::Sum {
        Self::settled(Self::add_unsettled(sum, a, b))
    }

    /// The sum with one product more, at most `RUN` times before it is settled again: what inner loops are made of.
    fn add_unsettled(sum: Self::Sum, a: Self, b: Self) -> Self::Sum;

    /// The same sum, with room for `RUN` products more.
    fn settled(sum: Self::Sum) -> Self::Sum;

    /// The number that a sum has come to.
    fn total(sum: Self::Sum) -> Self;
}

/// The reciprocal, or which trouble there is instead.
pub(crate) fn reciprocal<N: Number>(number: N) -> Outcome<N> {
    if !number.is_sound() {
        return Err(Trouble::Overflow);
    }
    number.inverse().ok_or(Trouble::ZeroDivisor)
}

/// The number at a place of a list; 0 beyond its end.
pub(crate) fn at<N: Number>(numbers: &[N], place: usize) -> N {
    numbers.get(place).copied().unwrap_or(N::ZERO)
}

/// The greatest common divisor, by Euclid; 0 only for two zeros.
const fn common_divisor(mut a: u64, mut b: u64) -> u64 {
    while b != 0 {
        (a, b) = (b, a % b);
    }
    a
}

#[cfg(test)]
mod tests;
