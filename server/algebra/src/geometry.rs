//! From a metric to its inverse, its volume element, its Christoffel symbols and its curvature.
//!
//! The metric is a matrix of jets, one row for each base variable of the ring, which are the coordinates. The
//! one idea: everything follows its definition slot by slot, so that there is nothing here to trust beyond the
//! definitions. Each derivative costs an order: of a metric known to order `d`, the connection is known to
//! `d - 1` and the curvature to `d - 2`. What has been computed is kept, and computed when first asked for.
//!
//! Defaults, printed by whoever shows a verdict and changed by `Signs`:
//! `R^i_{jkl} = d_k G^i_{jl} - d_l G^i_{jk} + G^i_{km} G^m_{jl} - G^i_{lm} G^m_{jk}`, `R_{jl} = R^i_{jil}`,
//! `R = g^{jl} R_{jl}`, `epsilon_{1..n} = root |g|`. These are the signs of Misner, Thorne and Wheeler,
//! "Gravitation" (1973), inside the front cover (from memory).
//!
//! Trap: `|g|` is `g` or `-g`, whichever is a positive residue, so that `root |g|` exists at every point modulo a
//! prime, but over the fractions only where `|g|` is a square.

mod connection;

use std::sync::OnceLock;

pub use connection::{Level, covariant, curvature};

use crate::contraction::{Label, contract};
use crate::jet::{Jet, sign};
use crate::matrix::{self, Characteristic};
use crate::number::{Number, reciprocal};
use crate::symbols::{delta, epsilon};
use crate::tensor::Tensor;
use crate::trouble::{Outcome, Trouble};

/// Which signs the curvature and the epsilon tensor have, against the defaults.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Signs {
    /// The curvature tensor has the other sign: `R^i_{jkl} = d_l G^i_{jk} - ..`.
    pub riemann_reversed: bool,
    /// The Ricci tensor sums over the first and the last slot of the curvature tensor, whatever its sign:
    /// `R_{jk} = R^i_{jki}`.
    pub ricci_reversed: bool,
    /// The epsilon tensor has the other sign: `epsilon_{1..n} = -root |g|`.
    pub epsilon_reversed: bool,
}

/// A metric and what follows from it.
#[derive(Debug)]
pub struct Geometry<N> {
    metric: Tensor<N>,
    inverse: Tensor<N>,
    determinant: Jet<N>,
    signs: Signs,
    /// The base variable that is the first coordinate.
    first: Option<usize>,
    christoffel: OnceLock<Outcome<Tensor<N>>>,
    riemann: OnceLock<Outcome<Tensor<N>>>,
    ricci: OnceLock<Outcome<Tensor<N>>>,
}

impl<N: Number> Geometry<N> {
    /// Of a metric `g_{ij}`, its rows and columns being the coordinates in order: `Shape` unless it is symmetric
    /// with one row for each base variable, `ZeroDivisor` if its determinant is 0 at the point.
    pub fn new(metric: Tensor<N>, signs: Signs) -> Outcome<Self> {
        if metric.lengths().first() != Some(&metric.ring().variables()) {
            return Err(Trouble::Shape);
        }
        Self::along(metric, Some(0), signs)
    }

    /// Of a metric whose rows are the base variables from a first one on: the metric of a part of the coordinates,
    /// the others being parameters; or of rows that are no coordinates, and then without a connection.
    pub fn along(metric: Tensor<N>, first: Option<usize>, signs: Signs) -> Outcome<Self> {
        if !metric.agrees(&matrix::transpose(&metric)?)? {
            return Err(Trouble::Shape);
        }
        let Characteristic { adjugate, determinant, .. } = matrix::characteristic(&metric)?;
        let inverse = adjugate.times(&determinant.inverse()?)?.sound()?;
        let (christoffel, riemann, ricci) = (OnceLock::new(), OnceLock::new(), OnceLock::new());
        Ok(Self { metric, inverse, determinant, signs, first, christoffel, riemann, ricci })
    }

    /// How many rows the metric has.
    pub fn dimension(&self) -> usize {
        self.metric.lengths().first().copied().unwrap_or_default()
    }

    /// The partial derivatives by the coordinates, in a new last slot; `Shape` if there are none.
    pub fn gradient(&self, tensor: &Tensor<N>) -> Outcome<Tensor<N>> {
        tensor.gradient_by(self.first.ok_or(Trouble::Shape)?, self.dimension())
    }

    /// `g_{ij}`.
    pub const fn metric(&self) -> &Tensor<N> {
        &self.metric
    }

    /// `g^{ij}`.
    pub const fn inverse(&self) -> &Tensor<N> {
        &self.inverse
    }

    /// `g`, the determinant of `g_{ij}`.
    pub const fn determinant(&self) -> &Jet<N> {
        &self.determinant
    }

    /// The sign of the determinant, 1 or -1 as a number.
    pub fn sign(&self) -> Outcome<N> {
        sign(self.determinant.value())
    }

    /// `root |g|`; `NoRoot` if there is none among the numbers.
    pub fn volume(&self) -> Outcome<Jet<N>> {
        self.determinant.magnitude()?.root()
    }

    /// `epsilon_{i..}`, with `epsilon_{1..n} = root |g|`.
    pub fn epsilon_down(&self) -> Outcome<Tensor<N>> {
        epsilon(self.metric.ring(), self.dimension())?.times(&self.volume()?.scaled(self.orientation()))
    }

    /// `epsilon^{i..}`, all slots of `epsilon_{i..}` raised: `epsilon^{1..n} = sign(g) / root |g|`.
    pub fn epsilon_up(&self) -> Outcome<Tensor<N>> {
        let factor = self.volume()?.inverse()?.scaled(self.sign()? * self.orientation());
        epsilon(self.metric.ring(), self.dimension())?.times(&factor)
    }

    /// The sign of `epsilon_{1..n}`.
    fn orientation(&self) -> N {
        if self.signs.epsilon_reversed { -N::ONE } else { N::ONE }
    }

    /// A tensor with one slot raised by the inverse metric; the slots keep their order.
    pub fn raised(&self, tensor: &Tensor<N>, slot: usize) -> Outcome<Tensor<N>> {
        moved(tensor, slot, &self.inverse)
    }

    /// A tensor with one slot lowered by the metric; the slots keep their order.
    pub fn lowered(&self, tensor: &Tensor<N>, slot: usize) -> Outcome<Tensor<N>> {
        moved(tensor, slot, &self.metric)
    }

    /// The Christoffel symbols with slots `(i, j, k)`:
    /// `G^i_{jk} = 1/2 g^{im} (d_j g_{mk} + d_k g_{mj} - d_m g_{jk})`.
    pub fn christoffel(&self) -> Outcome<&Tensor<N>> {
        kept(&self.christoffel, || {
            // Slots (a, b, c) of d_c g_{ab}.
            let gradient = self.gradient(&self.metric)?;
            let half = reciprocal(N::from_integer(2))?;
            let lower = gradient.swapped(1, 2)?.plus(&gradient)?.minus(&gradient.permuted(&[2, 0, 1])?)?;
            contract(&[(&self.inverse, &[0, 3]), (&lower.scaled(half), &[3, 1, 2])], &[0, 1, 2])
        })
    }

    /// The covariant derivative of a tensor, its index in a new last slot.
    pub fn covariant(&self, tensor: &Tensor<N>, levels: &[Level]) -> Outcome<Tensor<N>> {
        connection::corrected(tensor, levels, self.christoffel()?, self.gradient(tensor)?)
    }

    /// The curvature tensor `R^i_{jkl}` with slots `(i, j, k, l)`.
    pub fn riemann(&self) -> Outcome<&Tensor<N>> {
        kept(&self.riemann, || {
            let christoffel = self.christoffel()?;
            let curvature = connection::curvature_from(christoffel, &self.gradient(christoffel)?)?;
            Ok(if self.signs.riemann_reversed { curvature.scaled(-N::ONE) } else { curvature })
        })
    }

    /// The Ricci tensor `R_{jl}`.
    pub fn ricci(&self) -> Outcome<&Tensor<N>> {
        kept(&self.ricci, || self.riemann()?.trace(0, if self.signs.ricci_reversed { 3 } else { 2 }))
    }

    /// The curvature scalar `R = g^{jl} R_{jl}`.
    pub fn scalar(&self) -> Outcome<Jet<N>> {
        contract(&[(&self.inverse, &[0, 1]), (self.ricci()?, &[0, 1])], &[])?.to_jet()
    }

    /// The Einstein tensor `G_{jl} = R_{jl} - 1/2 R g_{jl}`.
    pub fn einstein(&self) -> Outcome<Tensor<N>> {
        let half = reciprocal(N::from_integer(2))?;
        self.ricci()?.minus(&self.metric.times(&self.scalar()?.scaled(half))?)
    }

    /// The Weyl tensor `C^i_{jkl}`, the part of the curvature tensor without traces, of the same sign:
    /// `R^i_{jkl} - 1/(n-2) (d^i_k R_{jl} - d^i_l R_{jk} + g_{jl} R^i_k - g_{jk} R^i_l)
    /// + R/((n-1)(n-2)) (d^i_k g_{jl} - d^i_l g_{jk})` (Wald, "General Relativity", 1984, equation 3.2.28; from
    /// memory). `Dimension` below 3, where a coefficient does not exist.
    pub fn weyl(&self) -> Outcome<Tensor<N>> {
        let dimension = i64::try_from(self.dimension()).map_err(|_| Trouble::Dimension)?;
        let share = N::from_integer(dimension - 2).inverse().filter(|_| dimension > 2).ok_or(Trouble::Dimension)?;
        let scalar_share = share * N::from_integer(dimension - 1).inverse().ok_or(Trouble::Dimension)?;
        // The traces of the curvature tensor in force, whatever the sign of the Ricci tensor in force.
        let ricci = self.riemann()?.trace(0, 2)?;
        let mixed = self.raised(&ricci, 0)?;
        let unit = delta(self.metric.ring(), self.dimension())?;
        let scalar = mixed.trace(0, 1)?.to_jet()?.scaled(scalar_share);
        let traces = unit.outer(&ricci)?.plus(&mixed.outer(&self.metric)?)?.scaled(share);
        // Slots (i, k, j, l) so far.
        let half = traces.minus(&unit.outer(&self.metric)?.times(&scalar)?)?.swapped(1, 2)?;
        self.riemann()?.minus(&half.minus(&half.swapped(2, 3)?)?)
    }
}

/// What is kept, or made and kept.
fn kept<T>(cell: &OnceLock<Outcome<T>>, make: impl FnOnce() -> Outcome<T>) -> Outcome<&T> {
    cell.get_or_init(make).as_ref().map_err(|trouble| *trouble)
}

/// A tensor with one slot contracted with a symmetric matrix.
fn moved<N: Number>(tensor: &Tensor<N>, slot: usize, by: &Tensor<N>) -> Outcome<Tensor<N>> {
    let slots = Label::try_from(tensor.lengths().len()).map_err(|_| Trouble::Shape)?;
    let slot = Label::try_from(slot).ok().filter(|slot| *slot < slots).ok_or(Trouble::Shape)?;
    let free: Vec<Label> = (0..slots).collect();
    let labels: Vec<Label> = free.iter().map(|label| if *label == slot { slots } else { *label }).collect();
    contract(&[(tensor, &labels), (by, &[slot, slots])], &free)
}

#[cfg(test)]
mod tests;
