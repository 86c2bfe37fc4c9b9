//! The laws of the residues, each tried on pseudo-random samples modulo both primes.

#![allow(clippy::unwrap_used)]

use super::*;
use crate::draws::Draws;

/// How many samples a law is tried on.
const TRIES: usize = 300;

/// States one law for both moduli.
macro_rules! law {
    ($name:ident, $law:ident) => {
        #[test]
        fn $name() {
            $law::<FIRST>();
            $law::<SECOND>();
        }
    };
}

law!(residues_are_a_field, field_axioms);
law!(products_agree_with_division_by_the_modulus, folding);
law!(integers_map_homomorphically, integers);
law!(signs_multiply, signs);
law!(roots_square_back, square_roots);
law!(roots_are_multiplicative_on_positive_residues, multiplicative_roots);
law!(odd_roots_are_unique_and_keep_the_sign, odd_roots);
law!(rational_powers_obey_the_laws_of_exponents, rational_powers);
law!(powers_that_do_not_exist_are_nothing, missing_powers);

/// As good as uniform: 2^64 is about eight times the modulus.
fn residue<const P: u64>(draws: &mut Draws) -> Residue<P> {
    Residue::new(draws.bits())
}

/// A residue other than 0.
fn unit<const P: u64>(draws: &mut Draws) -> Residue<P> {
    Residue::new(1 + draws.below(P - 1))
}

/// An integer of 64 bits with a sign.
fn integer(draws: &mut Draws) -> i128 {
    i128::from(draws.bits().cast_signed())
}

fn field_axioms<const P: u64>() {
    let mut draws = Draws::from_seed(1);
    for _ in 0..TRIES {
        let (a, b, c) = (residue::<P>(&mut draws), residue(&mut draws), residue(&mut draws));
        assert_eq!(a + b, b + a);
        assert_eq!((a + b) + c, a + (b + c));
        assert_eq!(a + Residue::ZERO, a);
        assert_eq!(a + -a, Residue::ZERO);
        assert_eq!(a - b, -(b - a));
        assert_eq!(a * b, b * a);
        assert_eq!((a * b) * c, a * (b * c));
        assert_eq!(a * (b + c), a * b + a * c);
        assert_eq!(a * Residue::ONE, a);
        let unit = unit::<P>(&mut draws);
        assert_eq!(unit * unit.inverse().unwrap(), Residue::ONE);
    }
    assert_eq!(Residue::<P>::ZERO.inverse(), None);
}

fn folding<const P: u64>() {
    let mut draws = Draws::from_seed(2);
    let mut pairs: Vec<_> = (0..TRIES).map(|_| (draws.bits() % P, draws.bits() % P)).collect();
    for wide in [0, 1, u128::MAX, u128::MAX - 1, 1 << 127, (u128::from(P) << 66) - 1, u128::from(P) << 66] {
        assert_eq!(Residue::<P>::from_wide(wide).value(), (wide % u128::from(P)) as u64);
    }
    let edges = [0, 1, 2, P / 2, P - 2, P - 1];
    pairs.extend(edges.iter().flat_map(|&a| edges.iter().map(move |&b| (a, b))));
    for (a, b) in pairs {
        let expected = (u128::from(a) * u128::from(b) % u128::from(P)) as u64;
        assert_eq!((Residue::<P>::new(a) * Residue::new(b)).value(), expected);
    }
}

fn integers<const P: u64>() {
    let mut draws = Draws::from_seed(3);
    for _ in 0..TRIES {
        let (a, b) = (integer(&mut draws), integer(&mut draws));
        let of = Residue::<P>::from_integer;
        assert_eq!(of(a) + of(b), of(a + b));
        assert_eq!(of(a) * of(b), of(a * b));
        assert_eq!(-of(a), of(-a));
    }
    assert_eq!(Residue::<P>::from_integer(-1).value(), P - 1);
    assert_eq!(Residue::<P>::new(u64::MAX).value(), u64::MAX % P);
}

fn signs<const P: u64>() {
    let mut draws = Draws::from_seed(4);
    for _ in 0..TRIES {
        let (a, b) = (unit::<P>(&mut draws), unit(&mut draws));
        let positive = (a.sign() == Sign::Positive) == (b.sign() == Sign::Positive);
        assert_eq!((a * b).sign() == Sign::Positive, positive);
        assert_ne!(a.sign(), (-a).sign());
        assert_eq!((a * a).sign(), Sign::Positive);
        assert_eq!(a.magnitude().sign(), Sign::Positive);
        assert_eq!(a.magnitude(), (-a).magnitude());
        assert_eq!((a * b).magnitude(), a.magnitude() * b.magnitude());
    }
    assert_eq!(Residue::<P>::ZERO.sign(), Sign::Zero);
    assert_eq!(Residue::<P>::ZERO.magnitude(), Residue::ZERO);
}

fn square_roots<const P: u64>() {
    let mut draws = Draws::from_seed(5);
    for _ in 0..TRIES {
        let a = unit::<P>(&mut draws);
        let root = (a * a).root().unwrap();
        assert_eq!(root, a.magnitude());
        assert_eq!((-(a * a)).root(), None);
    }
    assert_eq!(Residue::<P>::ZERO.root(), Some(Residue::ZERO));
    assert_eq!(Residue::<P>::new(9).root(), Some(Residue::new(3).magnitude()));
}

fn multiplicative_roots<const P: u64>() {
    let mut draws = Draws::from_seed(6);
    for _ in 0..TRIES {
        let (a, b) = (unit::<P>(&mut draws).magnitude(), unit::<P>(&mut draws).magnitude());
        assert_eq!((a * b).root().unwrap(), a.root().unwrap() * b.root().unwrap());
        assert_eq!(a.inverse().unwrap().root(), a.root().unwrap().inverse());
    }
}

fn odd_roots<const P: u64>() {
    let mut draws = Draws::from_seed(7);
    for _ in 0..TRIES {
        let a = residue::<P>(&mut draws);
        for order in [1, 3, 5, 7, 9] {
            let root = a.odd_root(order).unwrap();
            assert_eq!(root.pow(order), a);
            assert_eq!(root.sign(), a.sign());
            assert_eq!(a.pow(order).odd_root(order), Some(a));
        }
    }
    assert_eq!(Residue::<P>::from_integer(-8).odd_root(3), Some(Residue::from_integer(-2)));
}

fn rational_powers<const P: u64>() {
    let mut draws = Draws::from_seed(8);
    for _ in 0..TRIES {
        let a = unit::<P>(&mut draws).magnitude();
        let power = |n, d| a.power(n, d).unwrap();
        assert_eq!(power(1, 2), a.root().unwrap());
        assert_eq!(power(1, 3), a.odd_root(3).unwrap());
        assert_eq!(power(1, 3) * power(1, 6), power(1, 2));
        assert_eq!(power(-4, 1), a.pow(4).inverse().unwrap());
        assert_eq!(power(2, 4), power(1, 2));
        assert_eq!(power(5, 4).sign(), Sign::Positive);
        assert_eq!((-a).power(2, 6), (-a).odd_root(3));
        assert_eq!((-a).power(2, 1), Some(a * a));
    }
}

fn missing_powers<const P: u64>() {
    let (zero, minus_one) = (Residue::<P>::ZERO, -Residue::<P>::ONE);
    assert_eq!(minus_one.power(1, 2), None);
    assert_eq!(minus_one.odd_root(2), None);
    assert_eq!(zero.power(-1, 1), None);
    assert_eq!(zero.power(1, 2), Some(zero));
    assert_eq!(Residue::<P>::ONE.power(1, 0), None);
    assert_eq!(zero.power(0, 0), None);
    assert_eq!(Residue::<P>::ONE.power(1, Residue::<P>::HALF), None);
}

/// Miller and Rabin's test with the first twelve primes as bases, which is a proof below 3.3 * 10^24
/// (Sorenson and Webster, 2015; from memory). It uses plain division, not the arithmetic under test.
fn is_prime(number: u64) -> bool {
    const BASES: [u64; 12] = [2, 3, 5, 7, 11, 13, 17, 19, 23, 29, 31, 37];
    if number < 2 || BASES.iter().any(|&base| number.is_multiple_of(base)) {
        return BASES.contains(&number);
    }
    let twos = (number - 1).trailing_zeros();
    BASES.iter().all(|&base| {
        let mut power = power_modulo(base, (number - 1) >> twos, number);
        if power == 1 {
            return true;
        }
        (0..twos).any(|_| {
            let passes = power == number - 1;
            power = (u128::from(power) * u128::from(power) % u128::from(number)) as u64;
            passes
        })
    })
}

fn power_modulo(base: u64, exponent: u64, modulus: u64) -> u64 {
    let wide = u128::from(modulus);
    let bits = (0..u64::BITS).rev().map(|bit| exponent >> bit & 1);
    bits.fold(1, |power, bit| power * power % wide * if bit == 1 { u128::from(base) } else { 1 } % wide) as u64
}

#[test]
fn the_primality_test_tells_primes_from_composites() {
    let primes: Vec<u64> = (0..100).filter(|&number| is_prime(number)).collect();
    let sieved: Vec<u64> = (2..100).filter(|n| (2..*n).all(|divisor| n % divisor != 0)).collect();
    assert_eq!(primes, sieved);
    assert!(is_prime((1 << 61) - 1));
    // Strong pseudoprimes to base 2, and the square of a prime near 2^31.
    assert!([2047, 3277, 3_215_031_751, 2_147_483_647 * 2_147_483_647].iter().all(|&number| !is_prime(number)));
}

#[test]
fn the_moduli_are_safe_primes_of_the_stated_classes() {
    for (modulus, class) in [(FIRST, 3), (SECOND, 7)] {
        assert!(is_prime(modulus));
        assert!(is_prime((modulus - 1) / 2));
        assert_eq!(modulus % 8, class);
    }
}

#[test]
fn two_is_positive_modulo_the_second_prime_only() {
    assert_eq!(Residue::<FIRST>::new(2).sign(), Sign::Negative);
    assert_eq!(Residue::<SECOND>::new(2).sign(), Sign::Positive);
}
