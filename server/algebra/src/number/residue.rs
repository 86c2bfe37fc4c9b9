//! Residues as numbers. A sum of products stands unreduced in 128 bits: a product is below 2^122, so that only every
//! so many of them (`RUN`) the sum has to be brought down.

use super::Number;
use crate::draws::Draws;
use crate::field::Residue;

impl<const P: u64> Number for Residue<P> {
    /// Congruent to the sum; below 2^122 + 2^30 when settled.
    type Sum = u128;

    /// A settled sum and 62 products are below 64 times 2^122.
    const RUN: usize = 62;

    const ZERO: Self = Self::ZERO;
    const ONE: Self = Self::ONE;
    const EMPTY: u128 = 0;

    fn from_integer(number: i64) -> Self {
        Self::from_integer(i128::from(number))
    }

    fn draw(draws: &mut Draws) -> Self {
        Self::new(draws.bits())
    }

    fn inverse(self) -> Option<Self> {
        self.inverse()
    }

    fn magnitude(self) -> Option<Self> {
        Some(self.magnitude())
    }

    fn power(self, numerator: i64, denominator: u64) -> Option<Self> {
        // Integer exponents are the common case, and need no sign.
        match (denominator, u64::try_from(numerator)) {
            (1, Ok(exponent)) => Some(self.pow(exponent)),
            (1, Err(_)) => Some(self.inverse()?.pow(numerator.unsigned_abs())),
            (2, _) if numerator == 1 => self.root(),
            _ => self.power(numerator, denominator),
        }
    }

    fn add_unsettled(sum: u128, a: Self, b: Self) -> u128 {
        sum + u128::from(a.value()) * u128::from(b.value())
    }

    fn settled(sum: u128) -> u128 {
        Self::settled(sum)
    }

    fn total(sum: u128) -> Self {
        Self::from_wide(sum)
    }
}
