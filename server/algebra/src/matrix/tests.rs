//! The laws of determinants, adjugates and inverses, of numbers and of jets, at singular matrices too. The
//! comparison with SymPy stands in `tests/references/geometry.py`.

#![allow(clippy::unwrap_used)]

use std::sync::Arc;

use super::*;
use crate::draws::Draws;
use crate::field::{FIRST, Residue};
use crate::jet::{Order, Ring, Variable};
use crate::laws::law;
use crate::number::Exact;
use crate::sample;
use crate::symbols::{delta, epsilon};

law!(inverses_multiply_to_one_on_both_sides, inverses, and the extension);
law!(determinants_multiply, determinants, and the extension);
law!(the_determinant_is_the_sum_over_permutations, permutations, and the extension);
law!(the_adjugate_multiplies_to_the_determinant_at_singular_matrices_too, adjugates, and the extension);
law!(a_matrix_solves_its_characteristic_equation, cayley_hamilton, and the extension);
law!(jacobi_s_formula_holds_at_singular_matrices_too, jacobi, and the extension);
law!(the_derivative_of_the_inverse_is_minus_inverse_derivative_inverse, derivative_of_the_inverse, and the extension);
law!(a_small_change_changes_the_determinant_by_a_trace, small_changes, and the extension);
law!(traces_of_products_are_cyclic_and_transposition_reverses, traces, and the extension);

fn ring() -> Arc<Ring> {
    Ring::with_small(2, 1, Order { base: 1, small: 1 }).unwrap()
}

fn draw<N: Number>(ring: &Arc<Ring>, size: usize, draws: &mut Draws) -> Tensor<N> {
    sample::tensor(ring, ring.top(), &[size, size], &[], draws).unwrap()
}

/// A matrix with a determinant that does not vanish at the point.
fn regular<N: Number>(ring: &Arc<Ring>, size: usize, draws: &mut Draws) -> Tensor<N> {
    let regular = |matrix: &Tensor<N>| !determinant(matrix).unwrap().value().is_zero();
    (0..100).map(|_| draw::<N>(ring, size, draws)).find(regular).unwrap()
}

/// A matrix whose value at the point has the rank `rank`, while its derivatives are arbitrary.
fn singular<N: Number>(ring: &Arc<Ring>, size: usize, rank: usize, draws: &mut Draws) -> Tensor<N> {
    let matrix = draw::<N>(ring, size, draws);
    let narrow = |lengths: &[usize], draws: &mut Draws| sample::tensor::<N>(ring, ring.top(), lengths, &[], draws);
    let (left, right) = (narrow(&[size, rank], draws).unwrap(), narrow(&[rank, size], draws).unwrap());
    let product = times(&left, &right).unwrap();
    let value = |of: &Tensor<N>| Tensor::from_numbers(ring, &[size, size], |c| of.value(c).unwrap()).unwrap();
    matrix.plus(&value(&product)).unwrap().minus(&value(&matrix)).unwrap()
}

fn one<N: Number>(ring: &Arc<Ring>, size: usize) -> Tensor<N> {
    delta(ring, size).unwrap()
}

#[track_caller]
fn same<N: Number>(a: &Tensor<N>, b: &Tensor<N>) {
    assert!(a.agrees(b).unwrap());
}

#[track_caller]
fn same_jet<N: Number>(a: &Jet<N>, b: &Jet<N>) {
    assert!(a.agrees(b).unwrap(), "{a:?}\n{b:?}");
}

fn inverses<N: Number>() {
    let (ring, mut draws) = (ring(), Draws::from_seed(1));
    for size in 1..=4 {
        let matrix = regular::<N>(&ring, size, &mut draws);
        let inverse = inverse(&matrix).unwrap();
        same(&times(&matrix, &inverse).unwrap(), &one(&ring, size));
        same(&times(&inverse, &matrix).unwrap(), &one(&ring, size));
    }
    for size in 2..=4 {
        let matrix = singular::<N>(&ring, size, size - 1, &mut draws);
        assert_eq!(inverse(&matrix).unwrap_err(), Trouble::ZeroDivisor);
    }
}

fn determinants<N: Number>() {
    let (ring, mut draws) = (ring(), Draws::from_seed(2));
    for size in 1..=4 {
        let (a, b) = (draw::<N>(&ring, size, &mut draws), draw::<N>(&ring, size, &mut draws));
        let product = determinant(&times(&a, &b).unwrap()).unwrap();
        same_jet(&product, &determinant(&a).unwrap().times(&determinant(&b).unwrap()).unwrap());
        same_jet(&determinant(&transpose(&a).unwrap()).unwrap(), &determinant(&a).unwrap());
    }
    assert_eq!(determinant(&one::<N>(&ring, 5)).unwrap().value(), N::ONE);
}

/// Leibniz's formula, by the permutation symbol: `det A = e^{i j k} A_{1 i} A_{2 j} A_{3 k}`.
fn permutations<N: Number>() {
    let (ring, mut draws) = (ring(), Draws::from_seed(3));
    let matrix = draw::<N>(&ring, 3, &mut draws);
    let rows: Vec<Tensor<N>> = (0..3).map(|row| matrix.fixed(0, row).unwrap()).collect();
    let symbol = epsilon::<N>(&ring, 3).unwrap();
    let sum = contract(&[(&symbol, &[0, 1, 2]), (&rows[0], &[0]), (&rows[1], &[1]), (&rows[2], &[2])], &[]).unwrap();
    same_jet(&sum.to_jet().unwrap(), &determinant(&matrix).unwrap());
}

fn adjugates<N: Number>() {
    let mut draws = Draws::from_seed(4);
    let ring = ring();
    for size in 1..=4 {
        for rank in 1..=size {
            let matrix = singular::<N>(&ring, size, rank, &mut draws);
            let Characteristic { adjugate, determinant, .. } = characteristic(&matrix).unwrap();
            let scalar = one::<N>(&ring, size).times(&determinant).unwrap();
            same(&times(&matrix, &adjugate).unwrap(), &scalar);
            same(&times(&adjugate, &matrix).unwrap(), &scalar);
            assert!(rank == size || determinant.value().is_zero());
        }
        // Two ranks below the size, every cofactor is 0 at the point.
        if size > 2 {
            let matrix = singular::<N>(&ring, size, size - 2, &mut draws);
            assert!(adjugate(&matrix).unwrap().values().iter().all(|number| number.is_zero()));
        }
    }
    let single = draw::<N>(&ring, 1, &mut draws);
    same(&adjugate(&single).unwrap(), &one(&ring, 1));
}

fn cayley_hamilton<N: Number>() {
    let (ring, mut draws) = (ring(), Draws::from_seed(5));
    for size in 1..=4 {
        let matrix = draw::<N>(&ring, size, &mut draws);
        let Characteristic { coefficients, .. } = characteristic(&matrix).unwrap();
        let unit = one::<N>(&ring, size);
        // Horner's scheme, with the matrix in the place of the unknown.
        let value = coefficients.iter().rev().fold(unit.scaled(N::ZERO), |sum, coefficient| {
            times(&sum, &matrix).unwrap().plus(&unit.times(coefficient).unwrap()).unwrap()
        });
        assert!(value.vanishes().unwrap());
        let trace = trace(&matrix).unwrap().scaled(-N::ONE);
        same_jet(coefficients.get(size - 1).unwrap(), &trace);
    }
    // In three dimensions: A^3 - tr A A^2 + 1/2 ((tr A)^2 - tr A^2) A - det A = 0.
    let a = draw::<N>(&ring, 3, &mut draws);
    let square = times(&a, &a).unwrap();
    let tr = trace(&a).unwrap();
    let half = N::from_integer(2).inverse().unwrap();
    let second = tr.times(&tr).unwrap().minus(&trace(&square).unwrap()).unwrap().scaled(half);
    let terms = times(&square, &a).unwrap().minus(&square.times(&tr).unwrap()).unwrap();
    let terms = terms.plus(&a.times(&second).unwrap()).unwrap();
    same(&terms, &one::<N>(&ring, 3).times(&determinant(&a).unwrap()).unwrap());
}

/// `d det A = tr(adj A dA)`, and with the inverse where there is one.
fn jacobi<N: Number>() {
    let (ring, mut draws) = (ring(), Draws::from_seed(6));
    for (size, rank) in [(2, 1), (3, 1), (3, 2), (3, 3), (4, 3)] {
        let matrix = singular::<N>(&ring, size, rank, &mut draws);
        let Characteristic { adjugate, determinant, .. } = characteristic(&matrix).unwrap();
        for variable in [Variable::Base(0), Variable::Base(1), Variable::Small(0)] {
            let change = matrix.derivative(variable).unwrap();
            let slope = trace(&times(&adjugate, &change).unwrap()).unwrap();
            same_jet(&determinant.derivative(variable).unwrap(), &slope);
        }
        if let Ok(inverse) = inverse(&matrix) {
            let change = matrix.derivative(Variable::Small(0)).unwrap();
            let slope = trace(&times(&inverse, &change).unwrap()).unwrap().times(&determinant).unwrap();
            same_jet(&determinant.derivative(Variable::Small(0)).unwrap(), &slope);
            let logarithm = determinant.logarithm(N::from_integer(3)).unwrap();
            let slope = trace(&times(&inverse, &change).unwrap()).unwrap();
            same_jet(&logarithm.derivative(Variable::Small(0)).unwrap(), &slope);
        }
    }
}

fn derivative_of_the_inverse<N: Number>() {
    let (ring, mut draws) = (ring(), Draws::from_seed(7));
    let matrix = regular::<N>(&ring, 3, &mut draws);
    let inverse = inverse(&matrix).unwrap();
    let change = matrix.gradient().unwrap();
    let product = contract(&[(&inverse, &[0, 3]), (&change, &[3, 4, 2]), (&inverse, &[4, 1])], &[0, 1, 2]).unwrap();
    same(&inverse.gradient().unwrap(), &product.scaled(-N::ONE));
}

/// `det(A + h) = det A + det A tr(A^{-1} h)` up to squares of `h`, and not up to its cubes.
fn small_changes<N: Number>() {
    let mut draws = Draws::from_seed(8);
    for (small, holds) in [(1, true), (2, false)] {
        let ring = Ring::with_small(1, 1, Order { base: 0, small }).unwrap();
        let matrix = regular::<N>(&ring, 3, &mut draws);
        let change = sample::small_tensor::<N>(&ring, ring.top(), &[3, 3], &[], 0, &mut draws).unwrap();
        let before = determinant(&matrix).unwrap();
        let after = determinant(&matrix.plus(&change).unwrap()).unwrap();
        let trace = trace(&times(&inverse(&matrix).unwrap(), &change).unwrap()).unwrap();
        let first_order = before.plus(&before.times(&trace).unwrap()).unwrap();
        assert_eq!(after.agrees(&first_order).unwrap(), holds);
        assert!(!after.agrees(&before).unwrap());
    }
}

fn traces<N: Number>() {
    let (ring, mut draws) = (ring(), Draws::from_seed(9));
    let (a, b) = (draw::<N>(&ring, 3, &mut draws), draw::<N>(&ring, 3, &mut draws));
    let product = |x: &Tensor<N>, y: &Tensor<N>| times(x, y).unwrap();
    let turned = |x: &Tensor<N>| transpose(x).unwrap();
    same_jet(&trace(&product(&a, &b)).unwrap(), &trace(&product(&b, &a)).unwrap());
    same(&turned(&product(&a, &b)), &product(&turned(&b), &turned(&a)));
    // tr(A^T B) = A_{ij} B_{ij}.
    let sum = contract(&[(&a, &[0, 1]), (&b, &[0, 1])], &[]).unwrap().to_jet().unwrap();
    same_jet(&trace(&product(&turned(&a), &b)).unwrap(), &sum);
}

#[test]
fn a_matrix_that_is_too_large_is_refused() {
    let ring = Ring::new(1, 0).unwrap();
    let zero = |size| Tensor::<Residue<FIRST>>::zero(&ring, ring.top(), &[size, size]).unwrap();
    assert_eq!(determinant(&zero(120)).unwrap_err(), Trouble::Budget(Budget::Multiplications));
    assert!(determinant(&zero(20)).unwrap().vanishes().unwrap());
}

#[test]
fn what_is_no_square_matrix_is_refused() {
    let ring = ring();
    for lengths in [&[2, 3][..], &[2], &[2, 2, 2], &[]] {
        let tensor = Tensor::<Exact>::zero(&ring, ring.top(), lengths).unwrap();
        assert_eq!(characteristic(&tensor).unwrap_err(), Trouble::Shape);
        assert_eq!(transpose(&tensor).unwrap_err(), Trouble::Shape);
        assert_eq!(trace(&tensor).unwrap_err(), Trouble::Shape);
    }
}
