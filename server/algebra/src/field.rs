//! Residues `0 <= x < P` modulo a safe prime `P` just below 2^61: the numbers in which claims are evaluated.
//!
//! The one idea: `P` is a safe prime (`P` and `(P-1)/2` are prime) with `P = 3 mod 4`, so that the residues
//! imitate the real numbers in all that formulas ask for. A residue is *positive* if it is a non-zero square;
//! then exactly one of `a` and `-a` is positive, which gives `|a|`; the product of positive residues is
//! positive; every positive residue has exactly one positive root of every order below `(P-1)/2`, and roots
//! are multiplicative. And -1 is not a square, so there is room for an imaginary unit (`extension.rs`).
//!
//! Traps:
//! - Positive residues are not closed under addition: `1 + 1` is positive modulo `SECOND` (7 mod 8) and not
//!   modulo `FIRST` (3 mod 8). A claim that needs the root of 2 is evaluated modulo `SECOND`, or redrawn.
//! - There is no order: "positive" is a sign, and `a < b` has no meaning.
//! - The root of a residue that is not positive is `None`; whoever draws the point redraws it.
//!
//! Sources: Euler's criterion, Fermat's little theorem, and the root `a^((P+1)/4)` for `P = 3 mod 4`, as in
//! every textbook of number theory (from memory).

mod extension;

use std::ops::{Add, AddAssign, Mul, MulAssign, Neg, Sub, SubAssign};

pub use extension::Complex;

/// The first modulus, 2^61 - 2373: a safe prime, 3 mod 8.
pub const FIRST: u64 = (1 << 61) - 2373;

/// The second modulus, 2^61 - 3153, for a draw independent of the first: a safe prime, 7 mod 8.
pub const SECOND: u64 = (1 << 61) - 3153;

/// The width of both moduli in bits; products are folded at this place.
const WIDTH: u32 = 61;

/// The lowest bits, so many.
const LOW: u64 = (1 << WIDTH) - 1;

/// A residue `0 <= x < P`, where `P` is `FIRST` or `SECOND`.
///
/// Invariant: the number inside is below `P`, so that equal residues are equal numbers.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
pub struct Residue<const P: u64>(u64);

/// What takes the place of a sign: whether a residue is a square.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Sign {
    /// The residue is 0.
    Zero,
    /// A non-zero square.
    Positive,
    /// Not a square; the opposite is one.
    Negative,
}

impl<const P: u64> Residue<P> {
    /// Neutral for addition.
    pub const ZERO: Self = Self(0);

    /// Neutral for multiplication.
    pub const ONE: Self = Self(1);

    /// The order of the group of positive residues, a prime.
    pub const HALF: u64 = (P - 1) / 2;

    /// How far `P` lies below 2^61; also refuses a modulus that the folding of products does not fit.
    const GAP: u64 = {
        assert!(P < 1 << WIDTH && (1 << WIDTH) - P < 1 << 12 && P % 4 == 3);
        (1 << WIDTH) - P
    };

    /// The residue of any natural number.
    pub const fn new(number: u64) -> Self {
        Self(number % P)
    }

    /// The residue of any integer.
    pub const fn from_integer(number: i128) -> Self {
        Self(number.rem_euclid(P as i128) as u64)
    }

    /// The residue of any natural number of 128 bits, a sum of products among them, without a division: its six
    /// highest bits stand for multiples of 2^122 = GAP^2 mod P, less than 2^30 together.
    pub const fn from_wide(number: u128) -> Self {
        Self::lowered(Self::folded(number) + (number >> (2 * WIDTH)) as u64 * Self::GAP * Self::GAP)
    }

    /// A smaller number of the same residue, below 2^122 + 2^30: the six highest bits folded at 2^122 = GAP^2 mod P.
    pub const fn settled(number: u128) -> u128 {
        (number & ((1 << (2 * WIDTH)) - 1)) + ((number >> (2 * WIDTH)) as u64 * Self::GAP * Self::GAP) as u128
    }

    /// What the lowest 122 bits come to when they are folded at 2^61 = GAP mod P, twice: below 2^74, then below
    /// 2^61 + 2^25.
    const fn folded(number: u128) -> u64 {
        let once = (number as u64 & LOW) as u128 + ((number >> WIDTH) as u64 & LOW) as u128 * Self::GAP as u128;
        (once as u64 & LOW) + (once >> WIDTH) as u64 * Self::GAP
    }

    /// The residue of a number below 2 P.
    const fn lowered(number: u64) -> Self {
        Self(if number >= P { number - P } else { number })
    }

    /// The number `0 <= x < P`.
    pub const fn value(self) -> u64 {
        self.0
    }

    /// Whether this is 0.
    pub const fn is_zero(self) -> bool {
        self.0 == 0
    }

    /// The power with a natural exponent; `0^0` is 1.
    pub fn pow(self, mut exponent: u64) -> Self {
        let (mut power, mut square) = (Self::ONE, self);
        while exponent > 0 {
            if exponent & 1 == 1 {
                power *= square;
            }
            square *= square;
            exponent >>= 1;
        }
        power
    }

    /// The reciprocal; nothing for 0.
    pub fn inverse(self) -> Option<Self> {
        (!self.is_zero()).then(|| self.pow(P - 2))
    }

    /// The sign, by Euler's criterion (the Legendre symbol).
    pub fn sign(self) -> Sign {
        match self.pow(Self::HALF).value() {
            0 => Sign::Zero,
            1 => Sign::Positive,
            _ => Sign::Negative,
        }
    }

    /// `|a|`: the positive one of `a` and `-a`, or 0.
    pub fn magnitude(self) -> Self {
        if self.sign() == Sign::Negative { -self } else { self }
    }

    /// The positive square root; 0 for 0, nothing for a negative residue.
    pub fn root(self) -> Option<Self> {
        let root = self.pow(P.div_ceil(4));
        (root * root == self).then_some(root)
    }

    /// The root of an odd order: the only residue whose power is this one, of the same sign.
    /// Nothing for an even order, or an order that `(P-1)/2` divides.
    pub fn odd_root(self, order: u64) -> Option<Self> {
        inverse_modulo(order, P - 1).map(|exponent| self.pow(exponent))
    }

    /// The power with the exponent `numerator / denominator`.
    ///
    /// Of a positive residue every such power is defined and positive; of a negative one if the denominator
    /// in lowest terms is odd. Nothing for other powers, for powers of 0 with a negative exponent, and for a
    /// denominator that `(P-1)/2` divides (0 among them).
    pub fn power(self, numerator: i64, denominator: u64) -> Option<Self> {
        let shared = common_divisor(numerator.unsigned_abs(), denominator);
        let (size, denominator) = (numerator.unsigned_abs().checked_div(shared)?, denominator.checked_div(shared)?);
        let base = if numerator < 0 { self.inverse()? } else { self };
        let rooted = match base.sign() {
            Sign::Zero if denominator % Self::HALF == 0 => return None,
            Sign::Zero => base,
            Sign::Positive => base.pow(inverse_modulo(denominator, Self::HALF)?),
            Sign::Negative => base.odd_root(denominator)?,
        };
        Some(rooted.pow(size))
    }
}

/// The greatest common divisor, by Euclid.
const fn common_divisor(mut a: u64, mut b: u64) -> u64 {
    while b != 0 {
        (a, b) = (b, a % b);
    }
    a
}

/// The number `0 <= x < modulus` with `number * x = 1 mod modulus`, by Euclid's extended algorithm.
fn inverse_modulo(number: u64, modulus: u64) -> Option<u64> {
    let (mut high, mut low) = (i128::from(modulus), i128::from(number % modulus));
    let (mut high_factor, mut low_factor) = (0_i128, 1_i128);
    while low != 0 {
        let quotient = high / low;
        (high, low) = (low, high - quotient * low);
        (high_factor, low_factor) = (low_factor, high_factor - quotient * low_factor);
    }
    let inverse = high_factor.rem_euclid(i128::from(modulus));
    (high == 1).then(|| u64::try_from(inverse).ok()).flatten()
}

impl<const P: u64> Add for Residue<P> {
    type Output = Self;

    fn add(self, other: Self) -> Self {
        Self::lowered(self.0 + other.0)
    }
}

impl<const P: u64> Sub for Residue<P> {
    type Output = Self;

    fn sub(self, other: Self) -> Self {
        self + -other
    }
}

impl<const P: u64> Neg for Residue<P> {
    type Output = Self;

    fn neg(self) -> Self {
        Self(if self.0 == 0 { 0 } else { P - self.0 })
    }
}

impl<const P: u64> Mul for Residue<P> {
    type Output = Self;

    fn mul(self, other: Self) -> Self {
        Self::lowered(Self::folded(u128::from(self.0) * u128::from(other.0)))
    }
}

impl<const P: u64> AddAssign for Residue<P> {
    fn add_assign(&mut self, other: Self) {
        *self = *self + other;
    }
}

impl<const P: u64> SubAssign for Residue<P> {
    fn sub_assign(&mut self, other: Self) {
        *self = *self - other;
    }
}

impl<const P: u64> MulAssign for Residue<P> {
    fn mul_assign(&mut self, other: Self) {
        *self = *self * other;
    }
}

#[cfg(test)]
mod tests;
