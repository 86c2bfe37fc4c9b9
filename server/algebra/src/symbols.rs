//! The arrays of numbers that index notation is built on: delta, the generalised delta, epsilon.

use std::sync::Arc;

use crate::jet::Ring;
use crate::number::Number;
use crate::tensor::{SLOTS_BUDGET, Tensor};
use crate::trouble::{Budget, Outcome, Trouble};

/// The Kronecker delta: 1 where both indices are equal.
pub fn delta<N: Number>(ring: &Arc<Ring>, dimension: usize) -> Outcome<Tensor<N>> {
    generalised_delta(ring, dimension, 1)
}

/// The generalised delta with `count` upper slots, then `count` lower ones: the determinant of the deltas between
/// them, `+1` or `-1` where the lower indices are an even or odd permutation of distinct upper ones (Schouten,
/// "Ricci-Calculus", 1954, chapter I; from memory).
pub fn generalised_delta<N: Number>(ring: &Arc<Ring>, dimension: usize, count: usize) -> Outcome<Tensor<N>> {
    let slots = within_budget(count.saturating_mul(2))?;
    Tensor::from_numbers(ring, &vec![dimension; slots], |component| {
        let (upper, lower) = component.split_at(count.min(component.len()));
        permutation_sign(upper, lower)
    })
}

/// The permutation symbol with as many slots as dimensions: 1 at `(0, 1, .., n - 1)`, antisymmetric.
pub fn epsilon<N: Number>(ring: &Arc<Ring>, dimension: usize) -> Outcome<Tensor<N>> {
    let ordered: Vec<usize> = (0..within_budget(dimension)?).collect();
    Tensor::from_numbers(ring, &vec![dimension; dimension], |component| permutation_sign(&ordered, component))
}

/// So many slots, if an array may have them; asked before a list of their ranges is made.
fn within_budget(slots: usize) -> Outcome<usize> {
    if slots > SLOTS_BUDGET { Err(Trouble::Budget(Budget::Slots)) } else { Ok(slots) }
}

/// The sign of the permutation that leads from one list of distinct numbers to the other; 0 if there is none.
fn permutation_sign<N: Number>(from: &[usize], to: &[usize]) -> N {
    let places: Vec<Option<usize>> = to.iter().map(|item| from.iter().position(|other| other == item)).collect();
    let mut odd = false;
    for (number, place) in places.iter().enumerate() {
        let earlier = places.iter().take(number);
        if place.is_none() || earlier.clone().any(|other| other == place) {
            return N::ZERO;
        }
        odd ^= earlier.filter(|other| *other > place).count() % 2 == 1;
    }
    // Distinct places for every item of one list; the other may still hold a number twice.
    if from.len() != to.len() || from.iter().any(|item| !to.contains(item)) {
        return N::ZERO;
    }
    if odd { -N::ONE } else { N::ONE }
}
