//! Determinant, adjugate, inverse and characteristic polynomial of matrices of jets, singular ones too.
//!
//! A matrix is a tensor with two slots of the same length: the row, then the column. The one idea: the method of
//! Faddeev and LeVerrier needs products of matrices and divisions by 1, 2, .., n alone, no division by entries,
//! so that it holds in every ring of truncated polynomials and at singular points. It gives the adjugate and
//! the determinant at once, and the inverse is their quotient.
//!
//! Source: Faddeev and Sominsky (1949) after LeVerrier (1840), as in Gantmacher, "The Theory of Matrices",
//! volume 1, chapter IV (from memory).

use crate::contraction::{Factor, MULTIPLICATIONS_BUDGET, contract, planned};
use crate::jet::Jet;
use crate::number::Number;
use crate::symbols::delta;
use crate::tensor::Tensor;
use crate::trouble::{Budget, Outcome, Trouble};

/// What the method of Faddeev and LeVerrier gives of a matrix `A`.
#[derive(Clone, Debug)]
pub struct Characteristic<N> {
    /// `det(x - A) = c[0] + c[1] x + ... + c[n] x^n`, with `c[n] = 1`.
    pub coefficients: Vec<Jet<N>>,
    /// The transposed matrix of cofactors: `A adj(A) = det(A)`.
    pub adjugate: Tensor<N>,
    /// The determinant.
    pub determinant: Jet<N>,
}

/// The characteristic polynomial, the adjugate and the determinant; `Shape` for what is no square matrix, a budget
/// if the products together pass `contraction::MULTIPLICATIONS_BUDGET`.
pub fn characteristic<N: Number>(matrix: &Tensor<N>) -> Outcome<Characteristic<N>> {
    let size = side(matrix)?;
    let product: [Factor<N>; 2] = [(matrix, &[0, 1]), (matrix, &[1, 2])];
    let cost = planned(&product, &[0, 2])?.cost().multiplications;
    if cost.saturating_mul(size as u64) > MULTIPLICATIONS_BUDGET {
        return Err(Trouble::Budget(Budget::Multiplications));
    }
    let unit = delta(matrix.ring(), size)?.truncated(matrix.order())?;
    let mut coefficients = vec![Jet::constant(matrix.ring(), N::ONE).truncated(matrix.order())?];
    let mut adjugate = unit.clone();
    for step in 1..=size {
        let product = times(matrix, &adjugate)?;
        let divisor = N::from_integer(i64::try_from(step).map_err(|_| Trouble::Shape)?);
        let share = -divisor.inverse().ok_or(Trouble::ZeroDivisor)?;
        let coefficient = trace(&product)?.scaled(share);
        if step < size {
            adjugate = product.plus(&unit.times(&coefficient)?)?;
        }
        coefficients.push(coefficient);
    }
    coefficients.reverse();
    let constant = coefficients.first().ok_or(Trouble::Shape)?;
    let sign = |odd: bool| if odd { -N::ONE } else { N::ONE };
    let determinant = constant.scaled(sign(size % 2 == 1));
    Ok(Characteristic { adjugate: adjugate.scaled(sign(size % 2 == 0)), determinant, coefficients })
}

/// The determinant, of a singular matrix too.
pub fn determinant<N: Number>(matrix: &Tensor<N>) -> Outcome<Jet<N>> {
    Ok(characteristic(matrix)?.determinant)
}

/// The adjugate, the transposed matrix of cofactors, of a singular matrix too.
pub fn adjugate<N: Number>(matrix: &Tensor<N>) -> Outcome<Tensor<N>> {
    Ok(characteristic(matrix)?.adjugate)
}

/// The inverse; `ZeroDivisor` if the determinant is 0 at the point.
pub fn inverse<N: Number>(matrix: &Tensor<N>) -> Outcome<Tensor<N>> {
    let Characteristic { adjugate, determinant, .. } = characteristic(matrix)?;
    adjugate.times(&determinant.inverse()?)?.sound()
}

/// The transposed matrix.
pub fn transpose<N: Number>(matrix: &Tensor<N>) -> Outcome<Tensor<N>> {
    side(matrix)?;
    matrix.swapped(0, 1)
}

/// The trace.
pub fn trace<N: Number>(matrix: &Tensor<N>) -> Outcome<Jet<N>> {
    side(matrix)?;
    matrix.trace(0, 1)?.to_jet()
}

/// The product of two matrices.
pub fn times<N: Number>(left: &Tensor<N>, right: &Tensor<N>) -> Outcome<Tensor<N>> {
    contract(&[(left, &[0, 1]), (right, &[1, 2])], &[0, 2])
}

/// The number of rows, and of columns.
fn side<N: Number>(matrix: &Tensor<N>) -> Outcome<usize> {
    match matrix.lengths() {
        [rows, columns] if rows == columns => Ok(*rows),
        _ => Err(Trouble::Shape),
    }
}

#[cfg(test)]
mod tests;
