//! Exponential, logarithm, sine and cosine, of which nothing is used but their laws and their derivatives.
//!
//! A function has no residue for a value, but where arguments are independent its values are too. So the argument
//! of an exponential, a sine or a cosine is expanded into terms, a rational number times a monomial; each monomial
//! gets one random positive number for its exponential, and one random point of the circle for its angle. The
//! argument of a logarithm is taken apart into factors with rational powers; each factor gets one random number for
//! its logarithm. Then `exp(a + b) = exp(a) exp(b)`, `log(a b) = log(a) + log(b)`, the addition theorems and
//! `e^{i a} = cos a + i sin a` hold, and derivatives follow by the chain rule from the Taylor series.
//!
//! Monomials and factors are told apart by their values at the point, so that it does not matter how they are
//! written. Trap: a relation that is neither a sum of terms nor a product of factors is not seen (the logarithm of
//! `a^2 + 2ab + b^2`), so that two sides with functions that come out unequal are not shown to be.

use super::point::Point;
use super::{Value, evaluate, number_of, scalar};
use crate::draws::Draws;
use crate::expression::{Expression, Function};
use crate::number::Number;
use crate::rational::Rational;
use crate::trouble::{Budget, Outcome, Trouble};

/// The most terms that the argument of a function is expanded into.
pub const TERMS_BUDGET: usize = 64;

/// Angles are drawn as such a part of a monomial, so that its rational multiples with this denominator exist.
const PARTS_OF_AN_ANGLE: i64 = 12;

/// How many numbers are drawn to find one that is fit.
const TRIES: usize = 100;

/// Integers above this are not taken apart into primes under a logarithm.
const LARGEST_FACTORED: i128 = 1 << 20;

/// The values that have been given out.
#[derive(Debug)]
pub(super) struct Functions<N> {
    draws: Draws,
    /// For monomials by their value: the exponential.
    exponentials: Vec<(N, N)>,
    /// For monomials by their value: cosine and sine of a part of it.
    angles: Vec<(N, (N, N))>,
    /// For positive factors by their value: the logarithm.
    logarithms: Vec<(N, N)>,
}

/// A cosine and a sine.
type Turn<N> = (N, N);

/// A rational number times a power of `i` times a product.
#[derive(Clone, Debug)]
struct Term {
    number: Rational,
    /// The exponent of `i`, from 0 to 3.
    turns: u8,
    factors: Vec<Expression>,
}

impl<N: Number> Functions<N> {
    pub fn new(seed: u64) -> Self {
        let draws = Draws::from_seed(seed);
        Self { draws, exponentials: Vec::new(), angles: Vec::new(), logarithms: Vec::new() }
    }

    /// The exponential of a monomial, and 1, or of its opposite, and -1.
    fn exponential(&mut self, monomial: N) -> Outcome<(N, i64)> {
        let Self { draws, exponentials, .. } = self;
        given(exponentials, monomial, || {
            let root = fit(draws, |number: N| number.inverse().is_some())?;
            Ok(root * root)
        })
    }

    /// Cosine and sine of a part of a monomial, and 1, or of its opposite, and -1: the rational parametrisation of
    /// the circle.
    fn angle(&mut self, monomial: N) -> Outcome<(Turn<N>, i64)> {
        let Self { draws, angles, .. } = self;
        given(angles, monomial, || {
            let tangent = fit(draws, |tangent: N| (N::ONE + tangent * tangent).inverse().is_some())?;
            let square = tangent * tangent;
            let share = (N::ONE + square).inverse().ok_or(Trouble::ZeroDivisor)?;
            Ok(((N::ONE - square) * share, (tangent + tangent) * share))
        })
    }

    /// The logarithm of a positive number, which is 0 for 1 and the opposite for the reciprocal.
    fn logarithm(&mut self, factor: N) -> Outcome<N> {
        if factor == N::ONE {
            return Ok(N::ZERO);
        }
        if let Some((_, value)) = self.logarithms.iter().find(|(known, _)| *known == factor) {
            return Ok(*value);
        }
        if let Some((_, value)) = self.logarithms.iter().find(|(known, _)| *known * factor == N::ONE) {
            return Ok(-*value);
        }
        let value = N::draw_real(&mut self.draws);
        self.logarithms.push((factor, value));
        Ok(value)
    }
}

/// What a monomial was given, or is given now; with -1 if its opposite was.
fn given<N: Number, T: Copy>(
    table: &mut Vec<(N, T)>,
    monomial: N,
    make: impl FnOnce() -> Outcome<T>,
) -> Outcome<(T, i64)> {
    for (known, value) in table.iter() {
        if *known == monomial {
            return Ok((*value, 1));
        }
        if *known == -monomial {
            return Ok((*value, -1));
        }
    }
    let value = make()?;
    table.push((monomial, value));
    Ok((value, 1))
}

fn fit<N: Number>(draws: &mut Draws, is_fit: impl Fn(N) -> bool) -> Outcome<N> {
    (0..TRIES).map(|_| N::draw_real(draws)).find(|number| is_fit(*number)).ok_or(Trouble::Function)
}

impl<N: Number> Point<'_, N> {
    /// A function of a scalar.
    pub(super) fn function(&self, function: Function, of: &Expression) -> Outcome<Value<N>> {
        let argument = scalar(of, self)?;
        let jet = match function {
            Function::Exp => argument.exponential(self.exponential(of)?)?,
            Function::Log => {
                let value = argument.value();
                if value.magnitude() != Some(value) {
                    return Err(Trouble::NoRoot);
                }
                argument.logarithm(self.logarithm(of)?)?
            }
            Function::Sin | Function::Cos => {
                let (cosine, sine) = self.turn(of)?;
                let (sine, cosine) = argument.sine_and_cosine(sine, cosine)?;
                if function == Function::Sin { sine } else { cosine }
            }
        };
        Ok(self.scalar(&jet))
    }

    /// The value of an exponential at the point.
    fn exponential(&self, of: &Expression) -> Outcome<N> {
        let mut product = N::ONE;
        for term in terms(of)? {
            product = product
                * match (&term.factors[..], term.turns % 2) {
                    ([Expression::Function(Function::Log, inner)], 0) => {
                        let number = if term.turns == 2 { -term.number } else { term.number };
                        rational_power(scalar(inner, self)?.value(), number)?
                    }
                    (_, 0) => {
                        let number = if term.turns == 2 { -term.number } else { term.number };
                        let monomial = self.monomial(&term)?;
                        if monomial.is_zero() {
                            continue;
                        }
                        let (value, sign) = self.functions.borrow_mut().exponential(monomial)?;
                        rational_power(value, if sign < 0 { -number } else { number })?
                    }
                    _ => {
                        let unit = N::imaginary_unit().ok_or(Trouble::NoRoot)?;
                        let number = if term.turns == 3 { -term.number } else { term.number };
                        let (cosine, sine) = self.turn_of(&Term { number, ..term })?;
                        cosine + unit * sine
                    }
                };
        }
        Ok(product)
    }

    /// Cosine and sine of an argument at the point, by the addition theorems.
    fn turn(&self, of: &Expression) -> Outcome<Turn<N>> {
        let mut total = (N::ONE, N::ZERO);
        for term in terms(of)? {
            let number = match term.turns {
                0 => term.number,
                2 => -term.number,
                _ => return Err(Trouble::Function),
            };
            total = added(total, self.turn_of(&Term { number, ..term })?);
        }
        Ok(total)
    }

    /// Cosine and sine of a term: a whole multiple of the angle that its monomial was given.
    fn turn_of(&self, term: &Term) -> Outcome<Turn<N>> {
        let parts = Rational::from_integer(PARTS_OF_AN_ANGLE);
        let count = term.number.checked_mul(parts).filter(|count| count.denominator() == 1).ok_or(Trouble::Function)?;
        let count = i64::try_from(count.numerator()).map_err(|_| Trouble::Function)?;
        let monomial = self.monomial(term)?;
        if monomial.is_zero() {
            return Ok((N::ONE, N::ZERO));
        }
        let ((cosine, sine), sign) = self.functions.borrow_mut().angle(monomial)?;
        let sine = if (count < 0) == (sign < 0) { sine } else { -sine };
        Ok(multiple((cosine, sine), count.unsigned_abs()))
    }

    /// The value of a term without its number.
    fn monomial(&self, term: &Term) -> Outcome<N> {
        match &term.factors[..] {
            [] => Ok(N::ONE),
            factors => Ok(scalar(&Expression::Product(factors.to_vec()), self)?.value()),
        }
    }

    /// The value of a logarithm at the point.
    fn logarithm(&self, of: &Expression) -> Outcome<N> {
        let mut sum = N::ZERO;
        let mut pending = vec![(of.clone(), Rational::ONE)];
        let mut taken = 0;
        while let Some((factor, exponent)) = pending.pop() {
            taken += 1;
            if taken > TERMS_BUDGET {
                return Err(Trouble::Budget(Budget::Terms));
            }
            match factor {
                Expression::Product(factors) => {
                    let (scalars, others) = self.split(factors)?;
                    pending.extend(scalars.into_iter().map(|factor| (factor, exponent)));
                    if !others.is_empty() {
                        sum = sum + self.one_logarithm(&Expression::Product(others), exponent)?;
                    }
                }
                Expression::Quotient(over, under) => pending.extend([(*over, exponent), (*under, -exponent)]),
                Expression::Power(of, power) => {
                    pending.push((*of, exponent.checked_mul(power).ok_or(Trouble::Overflow)?));
                }
                Expression::Magnitude(of) => pending.push((*of, exponent)),
                Expression::Function(Function::Exp, of) => {
                    sum = sum + scalar(&of, self)?.value() * number_of(exponent)?;
                }
                Expression::Number(number) if number != Rational::ZERO => {
                    for (prime, count) in primes(number)? {
                        let value = self.functions.borrow_mut().logarithm(positive(number_of(prime)?)?)?;
                        let count = exponent.checked_mul(count).ok_or(Trouble::Overflow)?;
                        sum = sum + value * number_of(count)?;
                    }
                }
                other => sum = sum + self.one_logarithm(&other, exponent)?,
            }
        }
        Ok(sum)
    }

    /// The logarithm of the size of one factor, times an exponent.
    fn one_logarithm(&self, factor: &Expression, exponent: Rational) -> Outcome<N> {
        let size = positive(scalar(factor, self)?.value())?;
        let value = self.functions.borrow_mut().logarithm(size)?;
        Ok(value * number_of(exponent)?)
    }

    /// The factors without free labels, and the others, which belong together.
    fn split(&self, factors: Vec<Expression>) -> Outcome<(Vec<Expression>, Vec<Expression>)> {
        let (mut scalars, mut others) = (Vec::new(), Vec::new());
        for factor in factors {
            let list = if evaluate(&factor, self)?.slots.is_empty() { &mut scalars } else { &mut others };
            list.push(factor);
        }
        Ok((scalars, others))
    }
}

/// The size of a number that is not 0.
fn positive<N: Number>(number: N) -> Outcome<N> {
    if number.is_zero() {
        return Err(Trouble::ZeroDivisor);
    }
    number.magnitude().ok_or(Trouble::NoRoot)
}

fn rational_power<N: Number>(number: N, exponent: Rational) -> Outcome<N> {
    let (upper, lower) = super::exponent_of(exponent)?;
    number.power(upper, lower).ok_or(Trouble::NoRoot)
}

/// Cosine and sine of a sum.
fn added<N: Number>((c, s): Turn<N>, (d, t): Turn<N>) -> Turn<N> {
    (c * d - s * t, s * d + c * t)
}

/// Cosine and sine of a multiple.
fn multiple<N: Number>(mut turn: Turn<N>, mut count: u64) -> Turn<N> {
    let mut total = (N::ONE, N::ZERO);
    while count > 0 {
        if count & 1 == 1 {
            total = added(total, turn);
        }
        turn = added(turn, turn);
        count >>= 1;
    }
    total
}

/// The prime factors of the size of a number that is not 0, with their exponents, by trial division.
fn primes(number: Rational) -> Outcome<Vec<(Rational, Rational)>> {
    let mut found = Vec::new();
    for (mut rest, sign) in [(number.numerator().abs(), 1), (number.denominator(), -1)] {
        if rest > LARGEST_FACTORED {
            return Err(Trouble::Function);
        }
        let mut divisor = 2;
        while rest > 1 {
            if divisor * divisor > rest {
                divisor = rest;
            }
            let mut count = 0;
            while rest % divisor == 0 {
                rest /= divisor;
                count += sign;
            }
            if count != 0 {
                let prime = Rational::new(divisor, 1).ok_or(Trouble::Overflow)?;
                found.push((prime, Rational::from_integer(count)));
            }
            divisor += 1;
        }
    }
    Ok(found)
}

/// The terms of an argument, products multiplied out.
fn terms(expression: &Expression) -> Outcome<Vec<Term>> {
    let one = |turns, factors| vec![Term { number: Rational::ONE, turns, factors }];
    let found = match expression {
        Expression::Number(number) => vec![Term { number: *number, turns: 0, factors: Vec::new() }],
        Expression::Imaginary => one(1, Vec::new()),
        Expression::Sum(parts) => parts.iter().map(terms).collect::<Outcome<Vec<_>>>()?.concat(),
        Expression::Product(parts) => {
            let mut products = one(0, Vec::new());
            for part in parts {
                products = multiplied(&products, &terms(part)?)?;
            }
            products
        }
        Expression::Quotient(over, under) => {
            let under = match &terms(under)?[..] {
                [term] if term.turns == 0 => vec![Term {
                    number: term.number.inverse().ok_or(Trouble::ZeroDivisor)?,
                    turns: 0,
                    factors: if term.factors.is_empty() { Vec::new() } else { vec![reciprocal(closed(&term.factors))] },
                }],
                _ => one(0, vec![reciprocal((**under).clone())]),
            };
            multiplied(&terms(over)?, &under)?
        }
        other => one(0, vec![other.clone()]),
    };
    if found.len() > TERMS_BUDGET { Err(Trouble::Budget(Budget::Terms)) } else { Ok(found) }
}

fn multiplied(left: &[Term], right: &[Term]) -> Outcome<Vec<Term>> {
    if left.len().saturating_mul(right.len()) > TERMS_BUDGET {
        return Err(Trouble::Budget(Budget::Terms));
    }
    let product = |a: &Term, b: &Term| {
        let number = a.number.checked_mul(b.number).ok_or(Trouble::Overflow)?;
        let mut factors = a.factors.clone();
        // What was a product keeps its dummies to itself.
        if b.factors.len() > 1 {
            factors.push(closed(&b.factors))
        } else {
            factors.extend(b.factors.iter().cloned())
        }
        Ok(Term { number, turns: (a.turns + b.turns) % 4, factors })
    };
    left.iter().flat_map(|a| right.iter().map(move |b| product(a, b))).collect()
}

fn closed(factors: &[Expression]) -> Expression {
    match factors {
        [factor] => factor.clone(),
        _ => Expression::Product(factors.to_vec()),
    }
}

fn reciprocal(of: Expression) -> Expression {
    Expression::Quotient(Box::new(Expression::Number(Rational::ONE)), Box::new(of))
}
