//! What a point is made of: the free coefficients of all fields and metrics that a claim asks for.
//!
//! A field with symmetries is kept by orbits of components, one row of coefficients for each, so that whoever
//! looks for a simpler point changes one coefficient and keeps the symmetry. Nothing here is derived: traces are
//! taken out, and sizes multiplied in, when the point is built (`point.rs`).

use std::sync::Arc;

use super::families::Families;
use super::needs::Needs;
use crate::draws::Draws;
use crate::expression::{MetricValues, World};
use crate::jet::{Jet, Order, Ring};
use crate::number::Number;
use crate::sample::{Sign, SlotSymmetry, congruent, orbits};
use crate::tensor::Tensor;
use crate::trouble::{Outcome, Trouble};

/// How many matrices are drawn before there is no invertible one: small integers are singular rather often.
const METRICS_TRIED: usize = 50;

/// The free coefficients of one field.
#[derive(Clone, Debug)]
pub(crate) struct Free<N> {
    pub lengths: Vec<usize>,
    order: Order,
    /// For each component its orbit, and how it follows from the first of it.
    orbits: Vec<(usize, Sign)>,
    /// For each orbit one coefficient for each monomial up to the order.
    pub values: Vec<Vec<N>>,
    /// Which monomials may have a coefficient.
    allowed: Vec<bool>,
}

/// Which monomials of a field are free.
#[derive(Clone, Copy)]
struct Freedom {
    /// It depends on position.
    position: bool,
    /// It depends on the parameters.
    parameters: bool,
    /// The change with the parameters depends on position though the field does not.
    change_position: bool,
}

impl Freedom {
    /// Whether a monomial may have a coefficient; `sized` says whether the first small variable is the common size.
    fn allows(self, monomial: &[u8], variables: usize, sized: bool) -> bool {
        let (base, small) = monomial.split_at_checked(variables).unwrap_or((monomial, &[]));
        let (size, parameters) = small.split_at_checked(usize::from(sized)).unwrap_or((small, &[]));
        let still = parameters.iter().all(|exponent| *exponent == 0);
        let here = base.iter().all(|exponent| *exponent == 0);
        size.iter().all(|exponent| *exponent == 0)
            && (still || self.parameters)
            && (here || if still { self.position } else { self.change_position })
    }
}

impl<N: Number> Free<N> {
    fn drawn(
        ring: &Arc<Ring>,
        (order, sized): (Order, bool),
        lengths: Vec<usize>,
        symmetries: &[SlotSymmetry],
        freedom: Freedom,
        draws: &mut Draws,
    ) -> Outcome<Self> {
        let size = Tensor::<N>::zero(ring, order, &lengths)?.size();
        let orbits = orbits(&lengths, size, symmetries)?;
        let count = orbits.iter().map(|(orbit, _)| orbit + 1).max().unwrap_or_default();
        let allowed: Vec<bool> =
            ring.monomials(order).map(|monomial| freedom.allows(monomial, ring.variables(), sized)).collect();
        let mut row = || allowed.iter().map(|free| if *free { N::draw_real(draws) } else { N::ZERO }).collect();
        let values = (0..count).map(|_| row()).collect();
        Ok(Self { lengths, order, orbits, values, allowed })
    }

    /// The field.
    pub fn tensor(&self, ring: &Arc<Ring>) -> Outcome<Tensor<N>> {
        let component = |(orbit, sign): &(usize, Sign)| {
            let row = self.values.get(*orbit).ok_or(Trouble::Shape)?;
            let factor = match sign {
                Sign::Same => N::ONE,
                Sign::Opposite => -N::ONE,
                Sign::Neither => N::ZERO,
            };
            Ok(Jet::new(ring, self.order, row.clone())?.scaled(factor))
        };
        let jets = self.orbits.iter().map(component).collect::<Outcome<Vec<_>>>()?;
        Tensor::from_jets(&self.lengths, &jets)
    }

    /// Gives the components of a matrix their values at the point, row by row.
    fn set_values(&mut self, values: &[N]) {
        for ((orbit, _), value) in self.orbits.iter().zip(values) {
            if let Some(entry) = self.values.get_mut(*orbit).and_then(|row| row.first_mut()) {
                *entry = *value;
            }
        }
    }

    /// Places of the coefficients that may be other than 0: orbit and monomial.
    pub fn places(&self) -> impl Iterator<Item = (usize, usize)> + '_ {
        let alive = |orbit: usize| self.orbits.iter().any(|(own, sign)| *own == orbit && *sign != Sign::Neither);
        let monomials = self.allowed.iter().enumerate().filter(|(_, free)| **free).map(|(monomial, _)| monomial);
        let monomials: Vec<usize> = monomials.collect();
        (0..self.values.len())
            .filter(move |orbit| alive(*orbit))
            .flat_map(move |orbit| monomials.clone().into_iter().map(move |monomial| (orbit, monomial)))
    }
}

/// The free coefficients of everything that a claim asks for.
#[derive(Clone, Debug)]
pub(crate) struct Sampled<N> {
    pub fields: Vec<Option<Free<N>>>,
    pub metrics: Vec<Option<Free<N>>>,
    /// The coordinates of the point.
    pub coordinates: Vec<N>,
    /// From which the values of functions are drawn.
    pub functions: u64,
}

/// How the values of metrics at the point are drawn.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum MetricDraw {
    /// `M^T D M` for a random `M`.
    Congruent,
    /// `1` and `-1` on the diagonal.
    Diagonal,
}

impl<N: Number> Sampled<N> {
    /// A draw; it depends on the seed and on what is asked for alone.
    pub fn draw(
        world: &World,
        families: &Families,
        needs: &Needs,
        ring: &Arc<Ring>,
        seed: u64,
        style: MetricDraw,
    ) -> Outcome<Self> {
        let mut draws = Draws::from_seed(seed);
        let coordinates = (0..ring.variables()).map(|_| N::draw_real(&mut draws)).collect();
        let fields = world.fields.iter().zip(&needs.fields).map(|(field, need)| {
            let Some(order) = need else { return Ok(None) };
            let lengths = field.slots.iter().map(|(family, _)| families.size(*family)).collect::<Outcome<Vec<_>>>()?;
            let position = !field.constant;
            let freedom = Freedom { position, parameters: field.varies, change_position: position };
            let order = (*order, needs.sized);
            Free::drawn(ring, order, lengths, &field.symmetries, freedom, &mut draws).map(Some)
        });
        let fields = fields.collect::<Outcome<Vec<_>>>()?;
        let metrics = world.metrics.iter().zip(&needs.metrics).map(|(metric, need)| match (need, &metric.values) {
            (None, _) | (_, MetricValues::Defined(_)) => Ok(None),
            (Some(order), _) => {
                let size = families.size(metric.family)?;
                drawn_metric(metric, ring, (*order, needs.sized), size, style, &mut draws).map(Some)
            }
        });
        let metrics = metrics.collect::<Outcome<Vec<_>>>()?;
        Ok(Self { fields, metrics, coordinates, functions: draws.bits() })
    }
}

fn drawn_metric<N: Number>(
    metric: &crate::expression::Metric,
    ring: &Arc<Ring>,
    order: (Order, bool),
    size: usize,
    style: MetricDraw,
    draws: &mut Draws,
) -> Outcome<Free<N>> {
    let position = metric.values == MetricValues::Arbitrary;
    let freedom = Freedom { position, parameters: metric.varies, change_position: true };
    let symmetric = [SlotSymmetry::exchange(2, 0, 1, false)];
    let mut free = Free::drawn(ring, order, vec![size, size], &symmetric, freedom, draws)?;
    if metric.values == MetricValues::Flat || style == MetricDraw::Diagonal {
        free.set_values(&diagonal::<N>(size, metric.minus));
        return Ok(free);
    }
    for _ in 0..METRICS_TRIED {
        free.set_values(&congruent::<N>(size, metric.minus, draws));
        let values = free.tensor(ring)?.truncated(Order::default())?;
        if !crate::matrix::determinant(&values)?.value().is_zero() {
            return Ok(free);
        }
    }
    Err(Trouble::ZeroDivisor)
}

/// `-1` as often as the signature says, then `1`, row by row.
fn diagonal<N: Number>(size: usize, minus: usize) -> Vec<N> {
    let entry = |row: usize| if row < minus { -N::ONE } else { N::ONE };
    (0..size * size).map(|place| if place / size == place % size { entry(place / size) } else { N::ZERO }).collect()
}
