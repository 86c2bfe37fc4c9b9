//! Killing's equation, imposed by drawing a vector field and solving for the metric.
//!
//! `nabla_a xi_b + nabla_b xi_a = 0` says that the metric does not change along `xi`, and that is linear in it:
//! `xi^k d_k g_ij + g_kj d_i xi^k + g_ik d_j xi^k = 0`. So `xi^k` is drawn at random, and of the metric those Taylor
//! coefficients that no power of the first coordinate has; the others follow, degree by degree, since `xi^1` is not 0
//! at the point. These are all metrics with such a field near a point where it does not vanish: in coordinates in
//! which the field is the first one the metric does not depend on it, and the coordinates here are arbitrary ones.
//!
//! Solving for the field instead, for an arbitrary metric, leaves nothing but 0 to high order, and would say nothing.

use super::compare::Dimension;
use super::givens::Condition;
use crate::contraction::Label;
use crate::draws::Draws;
use crate::evaluation::sampled::{Part, Place, Sampled};
use crate::expression::{Expression, Filling, MetricValues, World};
use crate::geometry::Level;
use crate::jet::{Order, Ring};
use crate::number::Number;
use crate::rational::Rational;
use crate::trouble::{Outcome, Trouble};

/// The bases of a metric's coefficients: all monomials up to its order, and where each stands.
struct Table<'r> {
    monomials: Vec<&'r [u8]>,
    dimension: usize,
}

/// A condition that is Killing's equation.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Killing {
    field: usize,
    metric: usize,
}

impl Killing {
    /// Recognises it: two terms alike but for the exchange of their letters, of a metric that is arbitrary.
    pub fn of(condition: &Condition, world: &World) -> Option<Self> {
        let mut terms = Vec::new();
        collect(&condition.left, Rational::ONE, &mut terms)?;
        collect(&condition.right, -Rational::ONE, &mut terms)?;
        let [one, two] = terms.as_slice() else { return None };
        let alike = (one.factor, one.of, one.letters) == (two.factor, two.of, [two.letters[1], two.letters[0]]);
        let Self { field, metric } = one.of;
        let own = world.fields.get(field)?;
        let values = &world.metrics.get(metric)?.values;
        let free = *values == MetricValues::Arbitrary && !own.constant && !own.small && own.symmetries.is_empty();
        let distinct = one.letters[0] != one.letters[1];
        (alike && distinct && free && one.factor != Rational::ZERO && own.slots.len() == 1).then_some(one.of)
    }

    /// The field and the metric that give way.
    pub fn parts(self) -> [Part; 2] {
        [Part::Field(self.field), Part::Metric(self.metric)]
    }

    /// The draw with both of them anew; nothing where the equation cannot be solved like this. With it, by which
    /// power of two the degrees of the drawn coefficients have grown.
    pub fn imposed<N: Number>(
        self,
        dimension: &Dimension,
        ring: &Ring,
        drawn: &Sampled<N>,
    ) -> Outcome<Option<(Sampled<N>, u32)>> {
        let [field, metric] = self.parts();
        let world = &dimension.claim.world;
        let own = world.metrics.get(self.metric).ok_or(Trouble::Shape)?;
        let size = dimension.families.size(own.family)?;
        let (Some(order), Some(field_order)) = (drawn.order(metric), drawn.order(field)) else { return Ok(None) };
        let whole = dimension.families.first(own.family) == Some(0) && ring.variables() == size;
        if !whole || ring.smalls() > 0 {
            return Ok(None);
        }
        let table = Table { monomials: ring.monomials(order).collect(), dimension: size };
        let count = table.monomials.len();
        let work = (count * count).saturating_mul(size * size).saturating_mul(3 * size);
        dimension.meter.spend(work as u64)?;
        let mut draws = Draws::from_seed(drawn.functions);
        let vector: Vec<Vec<N>> = (0..size).map(|_| (0..count).map(|_| N::draw_real(&mut draws)).collect()).collect();
        let mut values: Vec<Vec<N>> = Vec::new();
        for component in 0..size * size {
            let Some(orbit) = drawn.orbit(metric, component) else { return Ok(None) };
            values.push((0..count).map(|monomial| drawn.get(Place::Of(metric, orbit, monomial))).collect());
        }
        if table.solve(&vector, &mut values, order).is_none() {
            return Err(Trouble::ZeroDivisor);
        }
        let mut point = drawn.clone();
        for (component, row) in values.iter().enumerate() {
            let orbit = drawn.orbit(metric, component).ok_or(Trouble::Shape)?;
            row.iter().enumerate().for_each(|(at, value)| point.set(Place::Of(metric, orbit, at), *value));
        }
        let level = world.fields.get(self.field).and_then(|own| own.slots.first()).map(|(_, level)| *level);
        let told = if level == Some(Level::Up) { vector } else { table.lowered(&vector, &values) };
        for (component, row) in told.iter().enumerate() {
            let orbit = drawn.orbit(field, component).ok_or(Trouble::Shape)?;
            let known = ring.monomials(field_order).enumerate();
            for (at, monomial) in known {
                let value = table.place(monomial).and_then(|from| row.get(from)).copied().ok_or(Trouble::Order)?;
                point.set(Place::Of(field, orbit, at), value);
            }
        }
        let steps = (order.base + 1) * (order.base + 2);
        Ok(Some((point, usize::BITS - steps.leading_zeros() + 1)))
    }
}

impl Table<'_> {
    fn place(&self, exponents: &[u8]) -> Option<usize> {
        self.monomials.iter().position(|monomial| *monomial == exponents)
    }

    /// The monomial with the exponent of a variable one higher, less another monomial; nothing if it is none.
    fn shifted(&self, monomial: &[u8], variable: Option<usize>, less: &[u8]) -> Option<usize> {
        let exponents = monomial
            .iter()
            .zip(less)
            .enumerate()
            .map(|(at, (exponent, less))| exponent.checked_add(u8::from(variable == Some(at)))?.checked_sub(*less));
        self.place(&exponents.collect::<Option<Vec<u8>>>()?)
    }

    /// Solves for the coefficients of the metric that a power of the first coordinate has; nothing if `xi^1` is 0 at
    /// the point.
    fn solve<N: Number>(&self, vector: &[Vec<N>], values: &mut [Vec<N>], order: Order) -> Option<()> {
        let size = self.dimension;
        let first = vector.first()?.first()?.inverse()?;
        let degree = |monomial: &[u8]| monomial.iter().map(|exponent| usize::from(*exponent)).sum::<usize>();
        let mut equations: Vec<&[u8]> =
            self.monomials.iter().copied().filter(|monomial| degree(monomial) < order.base).collect();
        // What a higher power of the first coordinate has follows from what lower ones have.
        equations.sort_by_key(|monomial| (degree(monomial), monomial.first().copied()));
        for monomial in equations {
            let none = vec![0; size];
            let unknown = self.shifted(monomial, Some(0), &none)?;
            let power = N::from_integer(i64::from(*monomial.first()?) + 1).inverse()?;
            for i in 0..size {
                for j in i..size {
                    // Together with the unknown as 0, this is what it has to undo.
                    *values.get_mut(i * size + j)?.get_mut(unknown)? = N::ZERO;
                    *values.get_mut(j * size + i)?.get_mut(unknown)? = N::ZERO;
                    let rest = self.equation(vector, values, monomial, [i, j])?;
                    let solved = -rest * first * power;
                    *values.get_mut(i * size + j)?.get_mut(unknown)? = solved;
                    *values.get_mut(j * size + i)?.get_mut(unknown)? = solved;
                }
            }
        }
        Some(())
    }

    /// The coefficient of a monomial in `xi^k d_k g_ij + g_kj d_i xi^k + g_ik d_j xi^k`.
    fn equation<N: Number>(
        &self,
        vector: &[Vec<N>],
        values: &[Vec<N>],
        monomial: &[u8],
        [i, j]: [usize; 2],
    ) -> Option<N> {
        let size = self.dimension;
        let metric = |one: usize, two: usize, at: usize| values.get(one * size + two)?.get(at).copied();
        let mut sum = N::ZERO;
        for (at, part) in self.monomials.iter().enumerate() {
            for (k, row) in vector.iter().enumerate() {
                if let Some(shifted) = self.shifted(monomial, Some(k), part) {
                    let power = power_of(self.monomials.get(shifted)?, k);
                    sum = sum + *row.get(at)? * metric(i, j, shifted)? * power;
                }
                // Here the part is one of the metric, and the derivative takes from the vector.
                for (own, other) in [(i, j), (j, i)] {
                    if let Some(shifted) = self.shifted(monomial, Some(own), part) {
                        let power = power_of(self.monomials.get(shifted)?, own);
                        sum = sum + metric(k, other, at)? * *row.get(shifted)? * power;
                    }
                }
            }
        }
        Some(sum)
    }

    /// `g_ik xi^k`.
    fn lowered<N: Number>(&self, vector: &[Vec<N>], values: &[Vec<N>]) -> Vec<Vec<N>> {
        let zero = |row: Option<&Vec<N>>, at: usize| row.and_then(|row| row.get(at)).copied().unwrap_or(N::ZERO);
        let component = |i: usize| -> Vec<N> {
            let coefficient = |monomial: &&[u8]| {
                let mut sum = N::ZERO;
                for (at, part) in self.monomials.iter().enumerate() {
                    let Some(other) = self.shifted(monomial, None, part) else { continue };
                    for (k, row) in vector.iter().enumerate() {
                        sum = sum + zero(values.get(i * self.dimension + k), at) * zero(Some(row), other);
                    }
                }
                sum
            };
            self.monomials.iter().map(coefficient).collect()
        };
        (0..self.dimension).map(component).collect()
    }
}

fn power_of<N: Number>(monomial: &[u8], variable: usize) -> N {
    N::from_integer(monomial.get(variable).map_or(0, |exponent| i64::from(*exponent)))
}

/// `factor nabla_a xi_b`.
struct Term {
    factor: Rational,
    of: Killing,
    letters: [Label; 2],
}

/// The terms of an expression, if all of them are first covariant derivatives of a field with one lower slot.
fn collect(expression: &Expression, factor: Rational, terms: &mut Vec<Term>) -> Option<()> {
    let mut pending = vec![(expression, factor)];
    while let Some((part, factor)) = pending.pop() {
        match part {
            Expression::Number(number) if *number == Rational::ZERO => {}
            Expression::Sum(parts) => pending.extend(parts.iter().map(|part| (part, factor))),
            Expression::Product(parts) => {
                let (mut factor, mut others) = (factor, Vec::new());
                for part in parts {
                    match part {
                        Expression::Number(number) => factor = factor.checked_mul(*number)?,
                        other => others.push(other),
                    }
                }
                match others[..] {
                    _ if factor == Rational::ZERO => {}
                    [one] => pending.push((one, factor)),
                    _ => return None,
                }
            }
            Expression::Covariant { metric, index, of } => {
                let Expression::Field { field, slots } = &**of else { return None };
                let [slot] = slots[..] else { return None };
                let (Filling::Label(one), Filling::Label(two)) = (index.filling, slot.filling) else { return None };
                if [index.level, slot.level] != [Level::Down; 2] {
                    return None;
                }
                terms.push(Term { factor, of: Killing { field: *field, metric: *metric }, letters: [one, two] });
            }
            _ => return None,
        }
    }
    Some(())
}
