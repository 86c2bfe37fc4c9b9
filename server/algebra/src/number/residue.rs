//! Residues as numbers. A sum of products stands unreduced in 128 bits: a product is below 2^122, so that only every
//! so many of them (`RUN`) the sum has to be looked at, and is brought down if it has passed 2^127.

use super::Number;
use crate::draws::Draws;
use crate::field::Residue;

/// From this bit on a sum of products is brought down.
const FULL: u32 = 127;

/// `P << SHIFT` lies just below `1 << FULL` for both moduli.
const SHIFT: u32 = 66;

impl<const P: u64> Number for Residue<P> {
    /// Congruent to the sum; below 2^127 + 2^78 when settled, since `P << SHIFT` falls short of 2^127 by less.
    type Sum = u128;

    /// 16 products are below 2^126, and carry no settled sum over 2^128.
    const RUN: usize = 16;
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
        if sum >> FULL == 0 { sum } else { sum - (u128::from(P) << SHIFT) }
    }

    fn total(sum: u128) -> Self {
        Self::from_wide(sum)
    }
}
