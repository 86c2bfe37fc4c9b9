//! The laws of numbers, for residues modulo both primes, their quadratic extensions, and fractions.

#![allow(clippy::unwrap_used)]

use super::*;
use crate::field::{Complex, FIRST, Residue, SECOND};
use crate::rational::Rational;

/// How many samples a law is tried on.
const TRIES: usize = 100;

/// States one law for all kinds of numbers.
macro_rules! law {
    ($name:ident, $law:ident) => {
        #[test]
        fn $name() {
            $law::<Residue<FIRST>>();
            $law::<Residue<SECOND>>();
            $law::<Complex<FIRST>>();
            $law::<Complex<SECOND>>();
            $law::<Exact>();
        }
    };
}

law!(late_sums_agree_with_sums_of_products, late_sums);
law!(integers_keep_sums_and_products, integers);
law!(reciprocals_and_integer_powers_agree, reciprocals);
law!(roots_of_squares_are_magnitudes, roots);
law!(powers_of_powers_multiply_exponents, powers);

fn late_sums<N: Number>() {
    let mut draws = Draws::from_seed(1);
    // Enough products to pass 2^127 several times, the largest residues among them.
    let numbers: Vec<(N, N)> = (0..500).map(|_| (N::draw(&mut draws), N::draw(&mut draws))).collect();
    let largest = std::iter::repeat_n((-N::ONE, -N::ONE), 500);
    let pairs: Vec<(N, N)> = numbers.into_iter().chain(largest).collect();
    let late = pairs.iter().fold(N::EMPTY, |sum, (a, b)| N::add_product(sum, *a, *b));
    let soon = pairs.iter().fold(N::ZERO, |sum, (a, b)| sum + *a * *b);
    assert_eq!(N::total(late), soon);
    // As long as it may be before it is brought down: debug builds would tell of an overflow.
    let run = |sum, run: &[(N, N)]| N::settled(run.iter().fold(sum, |sum, (a, b)| N::add_unsettled(sum, *a, *b)));
    let later = pairs.chunks(N::RUN).fold(N::EMPTY, run);
    assert_eq!(N::total(later), soon);
    assert_eq!(N::total(N::EMPTY), N::ZERO);
}

fn integers<N: Number>() {
    for a in -5..=5 {
        for b in -5..=5 {
            assert_eq!(N::from_integer(a) + N::from_integer(b), N::from_integer(a + b));
            assert_eq!(N::from_integer(a) * N::from_integer(b), N::from_integer(a * b));
            assert_eq!(N::from_integer(a) - N::from_integer(b), N::from_integer(a - b));
        }
        assert_eq!(N::from_integer(a).is_zero(), a == 0);
        assert_eq!(-N::from_integer(a), N::from_integer(-a));
    }
}

fn reciprocals<N: Number>() {
    let mut draws = Draws::from_seed(2);
    for _ in 0..TRIES {
        let a = N::draw(&mut draws);
        if a.is_zero() {
            continue;
        }
        assert_eq!(a * a.inverse().unwrap(), N::ONE);
        assert_eq!(a.power(-1, 1), a.inverse());
        assert_eq!(a.power(3, 1).unwrap(), a * a * a);
        assert_eq!(a.power(-4, 2).unwrap() * a * a, N::ONE);
        assert_eq!(a.power(0, 1), Some(N::ONE));
    }
    assert!(N::ZERO.inverse().is_none());
    assert!(N::ZERO.power(-1, 1).is_none());
    assert!(N::ONE.power(1, 0).is_none());
    assert_eq!(N::ZERO.power(2, 1), Some(N::ZERO));
}

fn roots<N: Number>() {
    for number in 1..20 {
        let a = N::from_integer(number);
        assert_eq!((a * a).root(), a.magnitude());
        assert_eq!((-a).magnitude(), a.magnitude());
        assert!((-(a * a)).root().is_none());
    }
    assert_eq!(N::ZERO.root(), Some(N::ZERO));
}

fn powers<N: Number>() {
    for number in 1..10 {
        let a = N::from_integer(number).magnitude().unwrap();
        let sixth = a.power(6, 1).unwrap();
        assert_eq!(sixth.power(1, 2), a.power(3, 1));
        assert_eq!(sixth.power(1, 3), a.power(2, 1));
        assert_eq!(sixth.power(5, 6), a.power(5, 1));
        assert_eq!(sixth.power(-2, 3).unwrap() * a.power(4, 1).unwrap(), N::ONE);
        // An odd root keeps the sign.
        assert_eq!((-(a * a * a)).power(1, 3), Some(-a));
    }
}

#[test]
fn fractions_have_no_roots_that_are_no_fractions() {
    let of = |number| Exact::from_integer(number);
    assert!(of(2).root().is_none());
    assert!(of(-4).root().is_none());
    assert!(of(9).power(1, 3).is_none());
    assert_eq!(of(-8).power(2, 3), Some(of(4)));
    assert_eq!(of(1).power(1, u64::MAX), Some(of(1)));
    let third = Exact::from(Rational::new(-1, 27).unwrap()).power(-1, 3);
    assert_eq!(third, Some(of(-3)));
}

#[test]
fn what_does_not_fit_spreads_and_equals_nothing() {
    let large = Exact::from(Rational::new(i128::MAX, 1).unwrap());
    let lost = large + Exact::ONE;
    assert!(large.is_sound() && !lost.is_sound());
    assert!(!(lost - large).is_sound() && !(lost * Exact::ONE).is_sound() && !(-lost).is_sound());
    assert_ne!(lost, lost);
    assert!(!lost.is_zero());
    assert_eq!(reciprocal(lost).unwrap_err(), Trouble::Overflow);
    assert_eq!(reciprocal(Exact::ZERO).unwrap_err(), Trouble::ZeroDivisor);
    assert!(!Exact::from_integer(3).power(1000, 1).unwrap().is_sound());
}

#[test]
fn numbers_off_the_real_line_have_neither_sign_nor_root() {
    let i = Complex::<FIRST>::I;
    assert_eq!(i.magnitude(), None);
    assert_eq!(Number::root(i), None);
    assert_eq!(Number::power(i, -2, 1), Some(-Complex::ONE));
}
