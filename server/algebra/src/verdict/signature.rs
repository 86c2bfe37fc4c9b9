//! The signature of a matrix of fractions: a counterexample has to have the metric that was declared.

use crate::number::{Exact, Number};
use crate::rational::Rational;

/// How many negative squares a symmetric, invertible matrix of so many rows has, given row by row; nothing for a
/// singular one and where a number does not fit.
///
/// By Lagrange's reduction of a quadratic form to a sum of squares; that their signs do not depend on the way is
/// Sylvester's law of inertia (Gantmacher, "The Theory of Matrices", volume 1, chapter X; from memory).
pub(super) fn negative_squares(rows: usize, entries: &[Exact]) -> Option<usize> {
    let mut form: Vec<Vec<Exact>> = entries.chunks(rows.max(1)).map(<[Exact]>::to_vec).collect();
    let mut negative = 0;
    while !form.is_empty() {
        let place = match diagonal(&form) {
            Some(place) => place,
            None => made_diagonal(&mut form)?,
        };
        let pivot_row = form.get(place)?.clone();
        let pivot = *pivot_row.get(place)?;
        negative += usize::from(pivot.value()? < Rational::ZERO);
        let share = pivot.inverse()?;
        for row in &mut form {
            let factor = *row.get(place)? * share;
            row.iter_mut().zip(&pivot_row).for_each(|(entry, other)| *entry = *entry - factor * *other);
        }
        form.remove(place);
        for row in &mut form {
            row.remove(place);
        }
    }
    Some(negative)
}

/// Where an entry on the diagonal is not 0.
fn diagonal(form: &[Vec<Exact>]) -> Option<usize> {
    form.iter().enumerate().position(|(place, row)| row.get(place).is_some_and(|entry| !entry.is_zero()))
}

/// Adds one variable to another so that an entry on the diagonal, all of which are 0, becomes another; where it is.
fn made_diagonal(form: &mut [Vec<Exact>]) -> Option<usize> {
    let other = form.first()?.iter().position(|entry| !entry.is_zero())?;
    let row = form.get(other)?.clone();
    form.first_mut()?.iter_mut().zip(row).for_each(|(entry, more)| *entry = *entry + more);
    for row in form {
        let more = *row.get(other)?;
        let entry = row.first_mut()?;
        *entry = *entry + more;
    }
    Some(0)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::draws::Draws;
    use crate::sample::congruent;

    fn of(rows: usize, entries: &[i64]) -> Option<usize> {
        negative_squares(rows, &entries.iter().map(|entry| Exact::from_integer(*entry)).collect::<Vec<_>>())
    }

    #[test]
    fn signatures_of_known_forms() {
        assert_eq!(of(2, &[1, 0, 0, -1]), Some(1));
        assert_eq!(of(2, &[0, 1, 1, 0]), Some(1));
        assert_eq!(of(3, &[0, 1, 0, 1, 0, 0, 0, 0, -2]), Some(2));
        assert_eq!(of(2, &[1, 1, 1, 1]), None);
        assert_eq!(of(2, &[0, 0, 0, 1]), None);
    }

    #[test]
    fn a_change_of_basis_keeps_the_signature() {
        let mut draws = Draws::from_seed(31);
        for minus in 0..4 {
            for _ in 0..50 {
                let form = congruent::<Exact>(4, minus, &mut draws);
                assert!([None, Some(minus)].contains(&negative_squares(4, &form)), "{form:?}");
            }
        }
    }
}
