//! Random fields: what claims are evaluated on. All of them depend on the draws alone, and so on a seed.
//!
//! A field has random coefficients to the order asked for, the same at components that its symmetries relate.
//! The one idea: components that signed permutations of slots take into each other form an orbit; one component
//! of each is drawn and the others follow with their signs, or all are 0 if a component is its own opposite. No
//! mean over a group is taken, so that small integers stay small integers.
//!
//! Trap: symmetries that are no signed permutations (the cyclic one of a curvature tensor, a vanishing trace) are
//! not imposed here.

use std::sync::Arc;

use crate::draws::Draws;
use crate::jet::{Jet, Order, Ring, Variable};
use crate::number::Number;
use crate::tensor::Tensor;
use crate::trouble::{Outcome, Trouble};

/// How many metrics are drawn before there is none to be found: a determinant of small integers is 0 rather
/// often in low dimension, one of residues hardly ever.
const METRICS_TRIED: usize = 50;

/// A symmetry: the component whose index in slot `s` is `i[slots[s]]` is that at `i`, or its opposite.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct SlotSymmetry {
    /// A permutation of `0..k`.
    pub slots: Vec<usize>,
    /// Whether the sign changes.
    pub negative: bool,
}

impl SlotSymmetry {
    /// Two of `count` slots may be exchanged, without or with a change of sign.
    pub fn exchange(count: usize, a: usize, b: usize, negative: bool) -> Self {
        let other = |slot: usize| {
            if slot == a {
                b
            } else if slot == b {
                a
            } else {
                slot
            }
        };
        Self { slots: (0..count).map(other).collect(), negative }
    }
}

/// A jet with random coefficients.
pub fn jet<N: Number>(ring: &Arc<Ring>, order: Order, draws: &mut Draws) -> Outcome<Jet<N>> {
    Jet::new(ring, order, (0..ring.width(order)).map(|_| N::draw_real(draws)).collect())
}

/// The coordinates about a random point.
pub fn coordinates<N: Number>(ring: &Arc<Ring>, draws: &mut Draws) -> Outcome<Vec<Jet<N>>> {
    (0..ring.variables()).map(|number| Jet::variable(ring, Variable::Base(number), N::draw_real(draws))).collect()
}

/// A tensor with random coefficients and these symmetries, all that they generate among them.
/// `Shape` if one is no permutation of the slots or relates slots of different ranges.
pub fn tensor<N: Number>(
    ring: &Arc<Ring>,
    order: Order,
    lengths: &[usize],
    symmetries: &[SlotSymmetry],
    draws: &mut Draws,
) -> Outcome<Tensor<N>> {
    let pattern = Tensor::<N>::zero(ring, order, lengths)?;
    let orbits = orbits(lengths, pattern.size(), symmetries)?;
    let mut drawn: Vec<Jet<N>> = Vec::new();
    let mut components = Vec::with_capacity(pattern.size());
    let zero = Jet::constant(ring, N::ZERO).truncated(order)?;
    for (orbit, sign) in orbits {
        // Orbits are numbered in the order of their first components.
        if orbit == drawn.len() {
            drawn.push(jet(ring, order, draws)?);
        }
        let first = drawn.get(orbit).ok_or(Trouble::Shape)?;
        components.push(match sign {
            Sign::Same => first.clone(),
            Sign::Opposite => first.scaled(-N::ONE),
            Sign::Neither => zero.clone(),
        });
    }
    Tensor::from_jets(lengths, &components)
}

/// A small field: the product of a random tensor with a small variable.
pub fn small_tensor<N: Number>(
    ring: &Arc<Ring>,
    order: Order,
    lengths: &[usize],
    symmetries: &[SlotSymmetry],
    small: usize,
    draws: &mut Draws,
) -> Outcome<Tensor<N>> {
    let size = Jet::variable(ring, Variable::Small(small), N::ZERO)?;
    tensor(ring, order, lengths, symmetries, draws)?.times(&size)
}

/// A symmetric, invertible matrix of random jets, one row for each base variable, whose determinant has the sign
/// of `(-1)^minus` and a root at the point: there it is `M^T D M`, `D` having `minus` entries -1 and else 1.
///
/// `ZeroDivisor` if no invertible one is found.
pub fn metric<N: Number>(ring: &Arc<Ring>, order: Order, minus: usize, draws: &mut Draws) -> Outcome<Tensor<N>> {
    metric_of(ring, order, ring.variables(), minus, draws)
}

/// The same with any number of rows.
pub fn metric_of<N: Number>(
    ring: &Arc<Ring>,
    order: Order,
    dimension: usize,
    minus: usize,
    draws: &mut Draws,
) -> Outcome<Tensor<N>> {
    let symmetric = [SlotSymmetry::exchange(2, 0, 1, false)];
    for _ in 0..METRICS_TRIED {
        let field = tensor::<N>(ring, order, &[dimension, dimension], &symmetric, draws)?;
        let values = congruent::<N>(dimension, minus, draws);
        let wanted = Tensor::from_numbers(ring, &[dimension, dimension], |component| {
            let [row, column] = component else { return N::ZERO };
            values.get(row * dimension + column).copied().unwrap_or(N::ZERO)
        })?;
        let drawn =
            Tensor::from_numbers(ring, &[dimension, dimension], |component| field.value(component).unwrap_or(N::ZERO))?;
        let metric = field.plus(&wanted)?.minus(&drawn)?;
        if !crate::matrix::determinant(&metric)?.value().is_zero() {
            return Ok(metric);
        }
    }
    Err(Trouble::ZeroDivisor)
}

/// `M^T D M` for a random `M`, row by row.
pub(crate) fn congruent<N: Number>(dimension: usize, minus: usize, draws: &mut Draws) -> Vec<N> {
    let rows: Vec<Vec<N>> = (0..dimension).map(|_| (0..dimension).map(|_| N::draw_real(draws)).collect()).collect();
    let sign = |row: usize| if row < minus { -N::ONE } else { N::ONE };
    let entry = |a: usize, b: usize| {
        let at = |row: &[N], column: usize| row.get(column).copied().unwrap_or(N::ZERO);
        rows.iter().enumerate().fold(N::ZERO, |sum, (number, row)| sum + sign(number) * at(row, a) * at(row, b))
    };
    (0..dimension * dimension).map(|place| entry(place / dimension, place % dimension)).collect()
}

/// How a component follows from the first of its orbit.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Sign {
    /// The same.
    Same,
    /// Its opposite.
    Opposite,
    /// It is its own opposite: 0.
    Neither,
}

impl Sign {
    const fn changed(self, negative: bool) -> Self {
        match (self, negative) {
            (Self::Same, true) => Self::Opposite,
            (Self::Opposite, true) => Self::Same,
            _ => self,
        }
    }
}

/// For each component in row-major order the number of its orbit, and how it follows from the first component.
pub(crate) fn orbits(lengths: &[usize], size: usize, symmetries: &[SlotSymmetry]) -> Outcome<Vec<(usize, Sign)>> {
    let images = symmetries.iter().map(|symmetry| images(lengths, symmetry)).collect::<Outcome<Vec<_>>>()?;
    let mut found: Vec<Option<(usize, Sign)>> = vec![None; size];
    let mut vanishing: Vec<bool> = Vec::new();
    for first in 0..size {
        if found.get(first).is_some_and(Option::is_some) {
            continue;
        }
        let mut pending = vec![(first, Sign::Same)];
        let orbit = vanishing.len();
        vanishing.push(false);
        while let Some((place, sign)) = pending.pop() {
            let Some(entry) = found.get_mut(place) else { continue };
            if let Some((_, known)) = entry {
                vanishing.iter_mut().skip(orbit).take(1).for_each(|vanishes| *vanishes |= *known != sign);
                continue;
            }
            *entry = Some((orbit, sign));
            // The inverse of a permutation is one of its powers, so that forward steps reach the whole orbit.
            pending.extend(
                symmetries.iter().zip(&images).filter_map(|(symmetry, images)| {
                    Some((images.get(place).copied()?, sign.changed(symmetry.negative)))
                }),
            );
        }
    }
    let settled = |entry: Option<(usize, Sign)>| {
        let (orbit, sign) = entry.ok_or(Trouble::Shape)?;
        Ok((orbit, if vanishing.get(orbit).is_some_and(|vanishes| *vanishes) { Sign::Neither } else { sign }))
    };
    found.into_iter().map(settled).collect()
}

/// For each component the place of that which a symmetry takes it to.
fn images(lengths: &[usize], symmetry: &SlotSymmetry) -> Outcome<Vec<usize>> {
    let mut sorted = symmetry.slots.clone();
    sorted.sort_unstable();
    let moved: Vec<usize> = symmetry.slots.iter().filter_map(|slot| lengths.get(*slot).copied()).collect();
    if !sorted.into_iter().eq(0..lengths.len()) || moved != lengths {
        return Err(Trouble::Shape);
    }
    // The index of slot `slots[s]` is taken to slot `s`, whose step it gets.
    let own = crate::tensor::strides(lengths);
    let mut steps = vec![0; lengths.len()];
    for (slot, step) in symmetry.slots.iter().zip(own) {
        steps.iter_mut().skip(*slot).take(1).for_each(|entry| *entry = step);
    }
    Ok(crate::tensor::places(lengths, &steps))
}

#[cfg(test)]
mod tests;
