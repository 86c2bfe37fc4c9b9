//! What follows from a connection alone: the covariant derivative and the curvature tensor.
//!
//! A connection is an array `G^i_{jk}` with slots `(i, j, k)`, the last being the index of the derivative:
//! `D_k V^i = d_k V^i + G^i_{jk} V^j`. For the Christoffel symbols, which are symmetric, the order of the lower
//! slots is immaterial.

use crate::contraction::{Label, contract};
use crate::number::Number;
use crate::tensor::Tensor;
use crate::trouble::{Outcome, Trouble};

/// How a slot takes part in a covariant derivative.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Level {
    /// Contravariant: `+ G^i_{jk} T^j`.
    Up,
    /// Covariant: `- G^j_{ik} T_j`.
    Down,
    /// Not at all: an index of another family, or a number that counts fields.
    Inert,
}

/// The covariant derivative of a tensor, its index in a new last slot; one order less is known of it.
/// `levels` says for each slot what it is; `Shape` if their number differs from that of the slots.
pub fn covariant<N: Number>(tensor: &Tensor<N>, levels: &[Level], connection: &Tensor<N>) -> Outcome<Tensor<N>> {
    corrected(tensor, levels, connection, tensor.gradient()?)
}

/// The same from the partial derivatives, which stand in a last slot.
pub(super) fn corrected<N: Number>(
    tensor: &Tensor<N>,
    levels: &[Level],
    connection: &Tensor<N>,
    gradient: Tensor<N>,
) -> Outcome<Tensor<N>> {
    if levels.len() != tensor.lengths().len() {
        return Err(Trouble::Shape);
    }
    let mut derivative = gradient;
    for (slot, level) in levels.iter().enumerate() {
        derivative = match level {
            Level::Up => derivative.plus(&correction(tensor, slot, connection, false)?)?,
            Level::Down => derivative.minus(&correction(tensor, slot, connection, true)?)?,
            Level::Inert => derivative,
        };
    }
    Ok(derivative)
}

/// `G^i_{jk} T^{..j..}`, or `G^j_{ik} T_{..j..}` for a lower slot: the connection acting on one slot.
fn correction<N: Number>(tensor: &Tensor<N>, slot: usize, connection: &Tensor<N>, lower: bool) -> Outcome<Tensor<N>> {
    let slots = Label::try_from(tensor.lengths().len()).map_err(|_| Trouble::Shape)?;
    let (derivative, summed) = (slots, slots + 1);
    let own = Label::try_from(slot).map_err(|_| Trouble::Shape)?;
    let labels: Vec<Label> = (0..slots).map(|label| if label == own { summed } else { label }).collect();
    let acting = if lower { [summed, own, derivative] } else { [own, summed, derivative] };
    contract(&[(tensor, &labels), (connection, &acting)], &(0..=slots).collect::<Vec<_>>())
}

/// The curvature tensor with slots `(i, j, k, l)`:
/// `R^i_{jkl} = d_k G^i_{jl} - d_l G^i_{jk} + G^i_{mk} G^m_{jl} - G^i_{ml} G^m_{jk}`, so that
/// `[D_k, D_l] V^i = R^i_{jkl} V^j` without torsion (Misner, Thorne and Wheeler, "Gravitation", 1973, equation
/// 11.12; from memory). One order less is known of it than of the connection.
pub fn curvature<N: Number>(connection: &Tensor<N>) -> Outcome<Tensor<N>> {
    curvature_from(connection, &connection.gradient()?)
}

/// The same from the partial derivatives of the connection, which stand in a last slot.
pub(super) fn curvature_from<N: Number>(connection: &Tensor<N>, gradient: &Tensor<N>) -> Outcome<Tensor<N>> {
    // Slots (i, j, l, k) of d_k G^i_{jl}.
    let derivative = gradient.swapped(2, 3)?;
    let product = contract(&[(connection, &[0, 4, 2]), (connection, &[4, 1, 3])], &[0, 1, 2, 3])?;
    let half = derivative.plus(&product)?;
    half.minus(&half.swapped(2, 3)?)
}
