//! Jets: Taylor polynomials about a point, truncated, in several variables.
//!
//! A field is drawn as a jet with random coefficients, and whatever is computed from jets by sums, products,
//! quotients, roots and derivatives is exact up to the order that remains. The one idea: a jet knows its order.
//! A derivative lowers it by one, a product knows what both factors know, and nothing is ever padded with zeros
//! that are not known, so that a claim is compared where it is known and nowhere else.
//!
//! Coefficients are those of the monomials (`x^2` has the coefficient `f''/2`), in the order of the ring: by
//! degree in the base variables, then in the small ones, then by exponents (`ring.rs`). Small variables carry a
//! variation, a derivative along a parameter, or the size of a small field.
//!
//! Source: Griewank and Walther, "Evaluating Derivatives" (2nd edition 2008), chapter 13, on truncated Taylor
//! arithmetic (from memory).
//!
//! Traps:
//! - Functions of a jet go through its constant term: without a reciprocal or a root of that there is none.
//! - `substitute` with inner jets that have constant terms is right for polynomials, not for truncated series.

mod levels;
mod order;
mod ring;
pub mod series;

use std::borrow::Cow;
use std::sync::Arc;

pub(crate) use levels::Pair;
pub use ring::{MONOMIALS_BUDGET, Order, Ring, VARIABLES_BUDGET, Variable};

use crate::number::{Number, at};
use crate::trouble::{Outcome, Trouble};

/// A truncated Taylor polynomial.
///
/// Invariant: the order is covered by the highest of the ring, and there is one coefficient for each monomial
/// up to it.
#[derive(Clone, Debug)]
pub struct Jet<N> {
    ring: Arc<Ring>,
    order: Order,
    coefficients: Vec<N>,
}

impl<N: Number> Jet<N> {
    /// A jet by its coefficients, in the order of `ring.monomials(order)`; `Shape` if their number does not fit.
    pub fn new(ring: &Arc<Ring>, order: Order, coefficients: Vec<N>) -> Outcome<Self> {
        if !ring.top().covers(order) || coefficients.len() != ring.width(order) {
            return Err(Trouble::Shape);
        }
        Ok(Self { ring: ring.clone(), order, coefficients })
    }

    /// A number, known to the highest order.
    pub fn constant(ring: &Arc<Ring>, number: N) -> Self {
        let order = ring.top();
        let mut coefficients = vec![N::ZERO; ring.width(order)];
        if let Some(first) = coefficients.first_mut() {
            *first = number;
        }
        Self { ring: ring.clone(), order, coefficients }
    }

    /// `value` plus a variable, to the highest order: a coordinate about a point, or a small parameter.
    /// `Shape` if there is no such variable.
    pub fn variable(ring: &Arc<Ring>, variable: Variable, value: N) -> Outcome<Self> {
        let number = ring.number(variable).ok_or(Trouble::Shape)?;
        let mut exponents = vec![0; ring.variables() + ring.smalls()];
        exponents.iter_mut().skip(number).take(1).for_each(|exponent| *exponent = 1);
        let mut jet = Self::constant(ring, value);
        // To order 0 the variable is no more than its value.
        if let Some(place) = ring.place(jet.order, &exponents) {
            jet.coefficients.iter_mut().skip(place).take(1).for_each(|coefficient| *coefficient = N::ONE);
        }
        Ok(jet)
    }

    /// The ring.
    pub const fn ring(&self) -> &Arc<Ring> {
        &self.ring
    }

    /// Up to which degrees the jet is known.
    pub const fn order(&self) -> Order {
        self.order
    }

    /// One coefficient for each monomial up to the order.
    pub fn coefficients(&self) -> &[N] {
        &self.coefficients
    }

    /// The coefficient of a monomial, by exponents of base variables, then of small ones; nothing if unknown.
    pub fn coefficient(&self, exponents: &[u8]) -> Option<N> {
        self.coefficients.get(self.ring.place(self.order, exponents)?).copied()
    }

    /// The value at the point.
    pub fn value(&self) -> N {
        at(&self.coefficients, 0)
    }

    /// What is known up to a lower order; `Order` if it is not lower.
    pub fn truncated(&self, order: Order) -> Outcome<Self> {
        if !self.order.covers(order) {
            return Err(Trouble::Order);
        }
        Ok(self.with(order, self.known_to(order).into_owned()))
    }

    /// The sum.
    pub fn plus(&self, other: &Self) -> Outcome<Self> {
        self.combined(other, |a, b| a + b)
    }

    /// The difference.
    pub fn minus(&self, other: &Self) -> Outcome<Self> {
        self.combined(other, |a, b| a - b)
    }

    /// The product.
    pub fn times(&self, other: &Self) -> Outcome<Self> {
        let order = self.common(other)?;
        let (a, b) = (self.known_to(order), other.known_to(order));
        let product = |pairs: &Vec<Pair>| {
            let add = |sum, (i, j): &Pair| N::add_product(sum, at(&a, *i as usize), at(&b, *j as usize));
            N::total(pairs.iter().fold(N::EMPTY, add))
        };
        Ok(self.with(order, self.ring.products(order).iter().map(product).collect()))
    }

    /// The quotient; `ZeroDivisor` if the divisor is 0 at the point.
    pub fn over(&self, divisor: &Self) -> Outcome<Self> {
        self.times(&divisor.inverse()?)
    }

    /// The multiple by a number.
    pub fn scaled(&self, factor: N) -> Self {
        self.with(self.order, self.coefficients.iter().map(|coefficient| *coefficient * factor).collect())
    }

    /// The partial derivative; one order less is known of it.
    pub fn derivative(&self, variable: Variable) -> Outcome<Self> {
        let (order, table) = self.ring.derivative(self.order, variable)?;
        let term = |(place, factor): &Pair| at(&self.coefficients, *place as usize) * N::from_integer((*factor).into());
        Ok(self.with(order, table.iter().map(term).collect()))
    }

    /// `f(a)` for a function by its Taylor coefficients about the value of this jet (`series`), by Horner's
    /// scheme. `Shape` if there are fewer than `order.total() + 1`.
    pub fn composed(&self, series: &[N]) -> Outcome<Self> {
        let needed = series.get(..=self.order.total()).ok_or(Trouble::Shape)?;
        let mut change = self.clone();
        change.coefficients.iter_mut().take(1).for_each(|value| *value = N::ZERO);
        let mut sum = self.with(self.order, vec![N::ZERO; self.coefficients.len()]);
        for coefficient in needed.iter().rev() {
            sum = sum.times(&change)?;
            sum.coefficients.iter_mut().take(1).for_each(|value| *value = *value + *coefficient);
        }
        Ok(sum)
    }

    /// The reciprocal; `ZeroDivisor` if the value is 0.
    pub fn inverse(&self) -> Outcome<Self> {
        self.composed(&series::power(self.value(), -1, 1, self.length())?)
    }

    /// The power with the exponent `numerator / denominator`. A natural power always exists; another one if the
    /// value is not 0 (`ZeroDivisor`) and has it (`NoRoot`).
    pub fn power(&self, numerator: i64, denominator: u64) -> Outcome<Self> {
        let divides = denominator > 0 && numerator.unsigned_abs().is_multiple_of(denominator);
        if numerator >= 0 && divides {
            return self.natural_power(numerator.unsigned_abs() / denominator);
        }
        self.composed(&series::power(self.value(), numerator, denominator, self.length())?)
    }

    /// The square root that is positive at the point.
    pub fn root(&self) -> Outcome<Self> {
        self.power(1, 2)
    }

    /// `|a|`: this or its opposite, whichever is positive at the point. `ZeroDivisor` where it is 0, for there
    /// the absolute value is not smooth; `NoRoot` where it has no sign.
    pub fn magnitude(&self) -> Outcome<Self> {
        Ok(self.scaled(sign(self.value())?))
    }

    /// The exponential, of which the value at the point is given.
    pub fn exponential(&self, value: N) -> Outcome<Self> {
        self.composed(&series::exponential(value, self.length())?)
    }

    /// The logarithm, of which the value at the point is given; `ZeroDivisor` where the argument is 0.
    pub fn logarithm(&self, value: N) -> Outcome<Self> {
        self.composed(&series::logarithm(self.value(), value, self.length())?)
    }

    /// Sine and cosine, of which the values at the point are given.
    pub fn sine_and_cosine(&self, sine: N, cosine: N) -> Outcome<(Self, Self)> {
        let of = |s, c| self.composed(&series::sine(s, c, self.length())?);
        Ok((of(sine, cosine)?, of(cosine, -sine)?))
    }

    /// The jet with other jets in the place of the base variables, small variables staying.
    ///
    /// If the inner jets have value 0 this is the composition of the functions; if not, it is right only if this
    /// jet is a whole polynomial (re-expansion about another point: `x + c` for `x`).
    /// `Shape` unless there is one inner jet for each base variable.
    pub fn substitute(&self, inner: &[Self]) -> Outcome<Self> {
        if inner.len() != self.ring.variables() {
            return Err(Trouble::Shape);
        }
        let smalls = (0..self.ring.smalls()).map(|i| Self::variable(&self.ring, Variable::Small(i), N::ZERO));
        let smalls = smalls.collect::<Outcome<Vec<_>>>()?;
        let factors: Vec<&Self> = inner.iter().chain(&smalls).collect();
        let order = inner.iter().try_fold(self.order, |order, jet| Ok(order.least(jet.common(self)?)))?;
        let mut powers: Vec<Self> = Vec::with_capacity(self.coefficients.len());
        let mut sum = Self::constant(&self.ring, N::ZERO).truncated(order)?;
        for (monomial, coefficient) in self.ring.monomials(self.order).zip(&self.coefficients) {
            let power = self.image(monomial, &factors, &powers)?;
            sum = sum.plus(&power.scaled(*coefficient))?;
            powers.push(power);
        }
        Ok(sum)
    }

    /// Whether every known coefficient is 0; `Overflow` if one did not fit.
    pub fn vanishes(&self) -> Outcome<bool> {
        all_zero(&self.coefficients)
    }

    /// Whether the two are equal up to the order that both are known to; `Overflow` if a coefficient did not fit.
    pub fn agrees(&self, other: &Self) -> Outcome<bool> {
        self.minus(other)?.vanishes()
    }

    /// A monomial in the factors: one factor times the power of the divisor, which stands earlier in the list.
    fn image(&self, monomial: &[u8], factors: &[&Self], powers: &[Self]) -> Outcome<Self> {
        let Some(number) = monomial.iter().position(|exponent| *exponent > 0) else {
            return Ok(Self::constant(&self.ring, N::ONE));
        };
        let mut divisor = monomial.to_vec();
        divisor.iter_mut().skip(number).take(1).for_each(|exponent| *exponent -= 1);
        let earlier = self.ring.place(self.order, &divisor).and_then(|place| powers.get(place));
        earlier.zip(factors.get(number)).map_or(Err(Trouble::Shape), |(power, factor)| power.times(factor))
    }

    fn natural_power(&self, mut exponent: u64) -> Outcome<Self> {
        let mut power = Self::constant(&self.ring, N::ONE).truncated(self.order)?;
        let mut square = self.clone();
        while exponent > 0 {
            if exponent & 1 == 1 {
                power = power.times(&square)?;
            }
            exponent >>= 1;
            if exponent > 0 {
                square = square.times(&square)?;
            }
        }
        Ok(power)
    }

    /// How many Taylor coefficients a function of this jet needs.
    const fn length(&self) -> usize {
        self.order.total() + 1
    }

    /// The order that both are known to; `Shape` for jets of different rings.
    fn common(&self, other: &Self) -> Outcome<Order> {
        if self.ring.fits(&other.ring) { Ok(self.order.least(other.order)) } else { Err(Trouble::Shape) }
    }

    fn combined(&self, other: &Self, operation: fn(N, N) -> N) -> Outcome<Self> {
        let order = self.common(other)?;
        let (a, b) = (self.known_to(order), other.known_to(order));
        Ok(self.with(order, a.iter().zip(b.iter()).map(|(a, b)| operation(*a, *b)).collect()))
    }

    /// The coefficients up to an order not above the own one.
    fn known_to(&self, order: Order) -> Cow<'_, [N]> {
        if order == self.order {
            return Cow::Borrowed(&self.coefficients);
        }
        let places = self.ring.restriction(self.order, order);
        Cow::Owned(places.into_iter().map(|place| at(&self.coefficients, place)).collect())
    }

    fn with(&self, order: Order, coefficients: Vec<N>) -> Self {
        Self { ring: self.ring.clone(), order, coefficients }
    }
}

/// 1 for a positive number, -1 for a negative one; `ZeroDivisor` for 0, `NoRoot` for a number without sign.
pub(crate) fn sign<N: Number>(number: N) -> Outcome<N> {
    let inverse = crate::number::reciprocal(number)?;
    Ok(number.magnitude().ok_or(Trouble::NoRoot)? * inverse)
}

/// Whether all numbers are 0; `Overflow` if one did not fit.
pub(crate) fn all_zero<N: Number>(numbers: &[N]) -> Outcome<bool> {
    if numbers.iter().all(|number| number.is_sound()) {
        Ok(numbers.iter().all(|number| number.is_zero()))
    } else {
        Err(Trouble::Overflow)
    }
}

#[cfg(test)]
mod tests;
