//! The quadratic extension: `a + b i` with `i i = -1`, the numbers in which `i` stands for the imaginary unit.
//!
//! Since `P = 3 mod 4`, -1 is not a square and this is a field of `P^2` elements. Complex conjugation is its
//! Frobenius map `z -> z^P`, an automorphism, so that whatever is computed from `z` is conjugated with it.
//!
//! Trap: the norm `z * conjugate(z)` takes negative values too (it takes every residue), so that
//! `|z| = root(norm)` exists for half of all `z` only.

use std::ops::{Add, Mul, Neg, Sub};

use super::Residue;

/// `real + imaginary * i`, both parts residues modulo `P`.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
pub struct Complex<const P: u64> {
    /// The part without `i`.
    pub real: Residue<P>,
    /// The factor of `i`.
    pub imaginary: Residue<P>,
}

impl<const P: u64> Complex<P> {
    /// Neutral for addition.
    pub const ZERO: Self = Self::new(Residue::ZERO, Residue::ZERO);

    /// Neutral for multiplication.
    pub const ONE: Self = Self::new(Residue::ONE, Residue::ZERO);

    /// The imaginary unit.
    pub const I: Self = Self::new(Residue::ZERO, Residue::ONE);

    /// `real + imaginary * i`.
    pub const fn new(real: Residue<P>, imaginary: Residue<P>) -> Self {
        Self { real, imaginary }
    }

    /// The complex conjugate, which is also the power with exponent `P`.
    pub fn conjugate(self) -> Self {
        Self::new(self.real, -self.imaginary)
    }

    /// `z * conjugate(z)`, a residue; 0 for 0 only.
    pub fn norm(self) -> Residue<P> {
        self.real * self.real + self.imaginary * self.imaginary
    }

    /// The reciprocal; nothing for 0.
    pub fn inverse(self) -> Option<Self> {
        let shrink = self.norm().inverse()?;
        Some(Self::new(self.real * shrink, -(self.imaginary * shrink)))
    }

    /// `z / conjugate(z)`: a number of norm 1, as `e^{i \theta}` is; every number of norm 1 is of this form
    /// (Hilbert's theorem 90). Nothing for 0.
    pub fn unit(self) -> Option<Self> {
        Some(self * self.conjugate().inverse()?)
    }

    /// The power with a natural exponent; `0^0` is 1.
    pub fn pow(self, mut exponent: u64) -> Self {
        let (mut power, mut square) = (Self::ONE, self);
        while exponent > 0 {
            if exponent & 1 == 1 {
                power = power * square;
            }
            square = square * square;
            exponent >>= 1;
        }
        power
    }
}

impl<const P: u64> From<Residue<P>> for Complex<P> {
    fn from(real: Residue<P>) -> Self {
        Self::new(real, Residue::ZERO)
    }
}

impl<const P: u64> Add for Complex<P> {
    type Output = Self;

    fn add(self, other: Self) -> Self {
        Self::new(self.real + other.real, self.imaginary + other.imaginary)
    }
}

impl<const P: u64> Sub for Complex<P> {
    type Output = Self;

    fn sub(self, other: Self) -> Self {
        Self::new(self.real - other.real, self.imaginary - other.imaginary)
    }
}

impl<const P: u64> Neg for Complex<P> {
    type Output = Self;

    fn neg(self) -> Self {
        Self::new(-self.real, -self.imaginary)
    }
}

impl<const P: u64> Mul for Complex<P> {
    type Output = Self;

    fn mul(self, other: Self) -> Self {
        Self::new(
            self.real * other.real - self.imaginary * other.imaginary,
            self.real * other.imaginary + self.imaginary * other.real,
        )
    }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]

    use super::super::{FIRST, SECOND};
    use super::*;
    use crate::draws::Draws;

    /// How many triples a law is tried on.
    const TRIES: usize = 200;

    fn triples<const P: u64>(seed: u64) -> impl Iterator<Item = [Complex<P>; 3]> {
        let mut draws = Draws::from_seed(seed);
        let mut residue = move || Residue::new(draws.bits());
        (0..TRIES).map(move |_| std::array::from_fn(|_| Complex::new(residue(), residue())))
    }

    fn is_a_field<const P: u64>() {
        for [a, b, c] in triples::<P>(11) {
            assert_eq!(a + b, b + a);
            assert_eq!(a * b, b * a);
            assert_eq!((a * b) * c, a * (b * c));
            assert_eq!(a * (b + c), a * b + a * c);
            assert_eq!(a - b, a + -b);
            assert_eq!(a * a.inverse().unwrap(), Complex::ONE);
        }
        assert_eq!(Complex::<P>::I * Complex::I, -Complex::<P>::ONE);
        assert_eq!(Complex::<P>::ZERO.inverse(), None);
    }

    #[test]
    fn the_extensions_are_fields() {
        is_a_field::<FIRST>();
        is_a_field::<SECOND>();
    }

    fn conjugates_by_frobenius<const P: u64>() {
        for [a, b, _] in triples::<P>(12) {
            assert_eq!(a.pow(P), a.conjugate());
            assert_eq!((a * b).conjugate(), a.conjugate() * b.conjugate());
            assert_eq!(a * a.conjugate(), a.norm().into());
        }
    }

    #[test]
    fn conjugation_is_the_frobenius_map() {
        conjugates_by_frobenius::<FIRST>();
        conjugates_by_frobenius::<SECOND>();
    }

    #[test]
    fn units_have_norm_one_and_obey_the_addition_theorem() {
        let half = Residue::<FIRST>::new(2).inverse().unwrap();
        let cosine = |z: Complex<FIRST>| (z + z.conjugate()).real * half;
        for [a, b, _] in triples::<FIRST>(13) {
            let (a, b) = (a.unit().unwrap(), b.unit().unwrap());
            assert_eq!(a.norm(), Residue::ONE);
            assert_eq!(cosine(a * b), a.real * b.real - a.imaginary * b.imaginary);
        }
        assert_eq!(Complex::<FIRST>::ZERO.unit(), None);
    }
}
