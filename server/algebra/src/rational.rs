//! Exact fractions of 128-bit integers, in which a counterexample is evaluated again.
//!
//! A fraction is in lowest terms with a positive denominator, so that equal fractions are equal pairs. Every
//! operation is checked: where a result does not fit, or is not defined, the answer is `None`, and whoever
//! asked says "undecided". Nothing wraps around and nothing is rounded.

use std::cmp::Ordering;
use std::fmt;
use std::ops::Neg;

use crate::field::Residue;

/// A fraction `numerator / denominator`.
///
/// Invariant: in lowest terms, `denominator > 0`, and `numerator > i128::MIN`, so that it can be negated.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub struct Rational {
    numerator: i128,
    denominator: i128,
}

impl Rational {
    /// 0.
    pub const ZERO: Self = Self { numerator: 0, denominator: 1 };

    /// 1.
    pub const ONE: Self = Self { numerator: 1, denominator: 1 };

    /// The fraction in lowest terms; nothing for the denominator 0 and for terms that do not fit.
    pub fn new(numerator: i128, denominator: i128) -> Option<Self> {
        let shared = common_divisor(numerator.unsigned_abs(), denominator.unsigned_abs());
        let size = i128::try_from(numerator.unsigned_abs().checked_div(shared)?).ok()?;
        let denominator_size = i128::try_from(denominator.unsigned_abs().checked_div(shared)?).ok()?;
        if denominator_size == 0 {
            return None;
        }
        let negative = (numerator < 0) != (denominator < 0);
        Some(Self { numerator: if negative { -size } else { size }, denominator: denominator_size })
    }

    /// The integer as a fraction.
    pub fn from_integer(number: i64) -> Self {
        Self { numerator: i128::from(number), denominator: 1 }
    }

    /// The upper number, in lowest terms; it carries the sign.
    pub const fn numerator(self) -> i128 {
        self.numerator
    }

    /// The lower number, in lowest terms; positive.
    pub const fn denominator(self) -> i128 {
        self.denominator
    }

    /// The sum, if it fits.
    pub fn checked_add(self, other: Self) -> Option<Self> {
        // Over the least common denominator, so that the intermediate numbers stay small.
        let shared = common_divisor(self.denominator.unsigned_abs(), other.denominator.unsigned_abs());
        let shared = i128::try_from(shared).ok()?;
        let (own, others) = (other.denominator / shared, self.denominator / shared);
        let numerator = self.numerator.checked_mul(own)?.checked_add(other.numerator.checked_mul(others)?)?;
        Self::new(numerator, self.denominator.checked_mul(own)?)
    }

    /// The difference, if it fits.
    pub fn checked_sub(self, other: Self) -> Option<Self> {
        self.checked_add(-other)
    }

    /// The product, if it fits.
    pub fn checked_mul(self, other: Self) -> Option<Self> {
        // Reduced crosswise first: then the product is in lowest terms and overflows only if it does not fit.
        let left = Self::new(self.numerator, other.denominator)?;
        let right = Self::new(other.numerator, self.denominator)?;
        let numerator = left.numerator.checked_mul(right.numerator)?;
        Self::new(numerator, left.denominator.checked_mul(right.denominator)?)
    }

    /// The quotient, if it fits and the divisor is not 0.
    pub fn checked_div(self, other: Self) -> Option<Self> {
        self.checked_mul(other.inverse()?)
    }

    /// The reciprocal; nothing for 0.
    pub fn inverse(self) -> Option<Self> {
        Self::new(self.denominator, self.numerator)
    }

    /// The power with an integer exponent, if it fits; `0^0` is 1, and 0 has no negative power.
    pub fn checked_pow(self, exponent: i32) -> Option<Self> {
        let base = if exponent < 0 { self.inverse()? } else { self };
        let size = exponent.unsigned_abs();
        Self::new(base.numerator.checked_pow(size)?, base.denominator.checked_pow(size)?)
    }

    /// The square root that is not negative, if it is a fraction.
    pub fn root(self) -> Option<Self> {
        let exact = |number: i128| {
            let root = u128::try_from(number).ok()?.isqrt();
            let root = i128::try_from(root).ok()?;
            (root * root == number).then_some(root)
        };
        Self::new(exact(self.numerator)?, exact(self.denominator)?)
    }

    /// The absolute value.
    pub fn magnitude(self) -> Self {
        if self.numerator < 0 { -self } else { self }
    }

    /// The residue modulo `P`; nothing if `P` divides the denominator.
    pub fn residue<const P: u64>(self) -> Option<Residue<P>> {
        let denominator = Residue::from_integer(self.denominator).inverse()?;
        Some(Residue::from_integer(self.numerator) * denominator)
    }
}

/// The greatest common divisor, by Euclid; 0 only for two zeros.
const fn common_divisor(mut a: u128, mut b: u128) -> u128 {
    while b != 0 {
        (a, b) = (b, a % b);
    }
    a
}

impl Neg for Rational {
    type Output = Self;

    fn neg(self) -> Self {
        Self { numerator: -self.numerator, ..self }
    }
}

impl PartialOrd for Rational {
    fn partial_cmp(&self, other: &Self) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

impl Ord for Rational {
    /// Compares whole parts, then the reciprocals of what remains: never overflows, and ends as Euclid's
    /// algorithm does.
    fn cmp(&self, other: &Self) -> Ordering {
        let (mut a, mut b) = ((self.numerator, self.denominator), (other.numerator, other.denominator));
        loop {
            let whole = a.0.div_euclid(a.1).cmp(&b.0.div_euclid(b.1));
            let (rest_a, rest_b) = (a.0.rem_euclid(a.1), b.0.rem_euclid(b.1));
            if whole != Ordering::Equal || rest_a == 0 || rest_b == 0 {
                return whole.then(rest_a.min(1).cmp(&rest_b.min(1)));
            }
            // a.1 / rest_a against b.1 / rest_b, turned around.
            (a, b) = ((b.1, rest_b), (a.1, rest_a));
        }
    }
}

impl fmt::Display for Rational {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self.denominator {
            1 => write!(f, "{}", self.numerator),
            _ => write!(f, "{}/{}", self.numerator, self.denominator),
        }
    }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]

    use super::*;
    use crate::draws::Draws;
    use crate::field::FIRST;

    /// How many samples a law is tried on.
    const TRIES: usize = 300;

    fn draw(draws: &mut Draws) -> Rational {
        Rational::new(i128::from(draws.below(101)) - 50, i128::from(draws.below(50)) + 1).unwrap()
    }

    #[test]
    fn fractions_are_a_field() {
        let mut draws = Draws::from_seed(21);
        for _ in 0..TRIES {
            let (a, b, c) = (draw(&mut draws), draw(&mut draws), draw(&mut draws));
            let add = |x: Rational, y| x.checked_add(y).unwrap();
            let mul = |x: Rational, y| x.checked_mul(y).unwrap();
            assert_eq!(add(a, b), add(b, a));
            assert_eq!(add(add(a, b), c), add(a, add(b, c)));
            assert_eq!(mul(mul(a, b), c), mul(a, mul(b, c)));
            assert_eq!(mul(a, add(b, c)), add(mul(a, b), mul(a, c)));
            assert_eq!(a.checked_sub(a), Some(Rational::ZERO));
            assert_eq!(a.checked_div(a), (a != Rational::ZERO).then_some(Rational::ONE));
        }
    }

    #[test]
    fn terms_are_lowest_and_the_denominator_positive() {
        let half = Rational::new(-6, -12).unwrap();
        assert_eq!((half.numerator(), half.denominator()), (1, 2));
        assert_eq!(Rational::new(3, -6).unwrap().numerator(), -1);
        assert_eq!(Rational::new(0, -7), Some(Rational::ZERO));
        assert_eq!(Rational::new(0, 0), None);
        assert_eq!(Rational::new(1, 0), None);
    }

    #[test]
    fn residues_follow_the_arithmetic() {
        let mut draws = Draws::from_seed(22);
        for _ in 0..TRIES {
            let (a, b) = (draw(&mut draws), draw(&mut draws));
            let of = |x: Rational| x.residue::<FIRST>().unwrap();
            assert_eq!(of(a.checked_add(b).unwrap()), of(a) + of(b));
            assert_eq!(of(a.checked_mul(b).unwrap()), of(a) * of(b));
        }
        assert_eq!(Rational::new(1, i128::from(FIRST)).unwrap().residue::<FIRST>(), None);
    }

    #[test]
    fn order_agrees_with_cross_multiplication() {
        let mut draws = Draws::from_seed(23);
        for _ in 0..TRIES {
            let (a, b) = (draw(&mut draws), draw(&mut draws));
            assert_eq!(a.cmp(&b), (a.numerator * b.denominator).cmp(&(b.numerator * a.denominator)));
        }
        let (large, larger) = (Rational::new(i128::MAX, 2).unwrap(), Rational::new(i128::MAX, 1).unwrap());
        assert!(large < larger && -larger < -large);
    }

    #[test]
    fn roots_square_back_and_are_exact_only() {
        let mut draws = Draws::from_seed(24);
        for _ in 0..TRIES {
            let a = draw(&mut draws);
            assert_eq!(a.checked_mul(a).unwrap().root(), Some(a.magnitude()));
        }
        assert_eq!(Rational::from_integer(2).root(), None);
        assert_eq!(Rational::from_integer(-4).root(), None);
    }

    #[test]
    fn what_does_not_fit_is_nothing() {
        let (max, two) = (Rational::new(i128::MAX, 1).unwrap(), Rational::from_integer(2));
        assert_eq!(max.checked_add(Rational::ONE), None);
        assert_eq!(max.checked_mul(two), None);
        assert_eq!(max.checked_mul(two.inverse().unwrap()), Rational::new(i128::MAX, 2));
        assert_eq!(two.checked_pow(127), None);
        assert_eq!(Rational::new(i128::MIN, 1), None);
        assert_eq!(Rational::new(i128::MIN, 2), Rational::new(i128::MIN / 2, 1));
        assert_eq!(Rational::new(1, i128::MIN), None);
        assert_eq!(Rational::ZERO.inverse(), None);
        assert_eq!(Rational::ZERO.checked_pow(-1), None);
    }

    #[test]
    fn powers_repeat_the_product() {
        let a = Rational::new(-2, 3).unwrap();
        assert_eq!(a.checked_pow(3), Rational::new(-8, 27));
        assert_eq!(a.checked_pow(-2), Rational::new(9, 4));
        assert_eq!(Rational::ZERO.checked_pow(0), Some(Rational::ONE));
    }

    #[test]
    fn fractions_print_as_people_write_them() {
        assert_eq!(Rational::new(-6, 4).unwrap().to_string(), "-3/2");
        assert_eq!(Rational::from_integer(7).to_string(), "7");
    }
}
