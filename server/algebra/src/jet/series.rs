//! Taylor coefficients of functions of one variable about a number: `f(a + h) = c_0 + c_1 h + c_2 h^2 + ...`.
//!
//! What a transcendental function is at `a` is the caller's to say: an exponential is any number that is not 0,
//! a logarithm any number at all, sine and cosine the parts of a unit. The derivatives then follow exactly, and
//! with them the chain rule (Griewank and Walther, "Evaluating Derivatives", 2008, chapter 13; from memory).

use crate::number::{Number, reciprocal};
use crate::trouble::{Outcome, Trouble};

/// `a^(numerator/denominator)`: the generalised binomial series. `ZeroDivisor` at 0, where it has none.
pub fn power<N: Number>(a: N, numerator: i64, denominator: u64, length: usize) -> Outcome<Vec<N>> {
    let inverse = reciprocal(a)?;
    let lower = i64::try_from(denominator).map_err(|_| Trouble::NoRoot)?;
    let exponent = N::from_integer(numerator) * N::from_integer(lower).inverse().ok_or(Trouble::NoRoot)?;
    let value = a.power(numerator, denominator).ok_or(Trouble::NoRoot)?;
    follow(value, length, |before, step| Ok(before * inverse * (exponent - integer(step)) * unit_share(step + 1)?))
}

/// The exponential that takes a value at `a`: `value / k!`.
pub fn exponential<N: Number>(value: N, length: usize) -> Outcome<Vec<N>> {
    follow(value, length, |before, step| Ok(before * unit_share(step + 1)?))
}

/// The logarithm that takes a value at `a`: `value`, then `(-1)^(k-1) / (k a^k)`. `ZeroDivisor` at 0.
pub fn logarithm<N: Number>(a: N, value: N, length: usize) -> Outcome<Vec<N>> {
    let inverse = reciprocal(a)?;
    let signed = (1..length).scan(-N::ONE, |power, step| {
        *power = *power * -inverse;
        Some(unit_share(step).map(|share| *power * share))
    });
    std::iter::once(Ok(value)).chain(signed).take(length).collect()
}

/// The sine of an argument of which sine and cosine are given; the cosine is that of `(cosine, -sine)`.
pub fn sine<N: Number>(sine: N, cosine: N, length: usize) -> Outcome<Vec<N>> {
    let mut turning = (sine, cosine);
    let mut share = N::ONE;
    let mut coefficients = Vec::with_capacity(length);
    for step in 0..length {
        coefficients.push(turning.0 * share);
        turning = (turning.1, -turning.0);
        share = share * unit_share(step + 1)?;
    }
    Ok(coefficients)
}

/// A sequence by its first member and what follows a member of a number.
fn follow<N: Number>(first: N, length: usize, next: impl Fn(N, usize) -> Outcome<N>) -> Outcome<Vec<N>> {
    let mut coefficients = Vec::with_capacity(length);
    let mut member = first;
    for step in 0..length {
        coefficients.push(member);
        member = next(member, step)?;
    }
    Ok(coefficients)
}

fn integer<N: Number>(number: usize) -> N {
    N::from_integer(i64::try_from(number).unwrap_or(i64::MAX))
}

/// `1 / number`.
fn unit_share<N: Number>(number: usize) -> Outcome<N> {
    reciprocal(integer(number))
}
