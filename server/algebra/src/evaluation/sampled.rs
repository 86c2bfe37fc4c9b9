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
use crate::tensor::{Tensor, strides};
use crate::trouble::{Outcome, Trouble};

/// How many matrices are drawn before there is no invertible one: small integers are singular rather often.
const METRICS_TRIED: usize = 50;

/// The free coefficients of one field.
#[derive(Clone, Debug)]
pub(crate) struct Free<N> {
    lengths: Vec<usize>,
    order: Order,
    /// For each component its orbit, and how it follows from the first of it.
    orbits: Vec<(usize, Sign)>,
    /// For each orbit one coefficient for each monomial up to the order.
    values: Vec<Vec<N>>,
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

    /// The coefficients that may be other than 0: orbit and monomial.
    fn places(&self) -> Vec<(usize, usize)> {
        let alive = |orbit: usize| self.orbits.iter().any(|(own, sign)| *own == orbit && *sign != Sign::Neither);
        let monomials = || self.allowed.iter().enumerate().filter(|(_, free)| **free).map(|(monomial, _)| monomial);
        let orbits = (0..self.values.len()).filter(|orbit| alive(*orbit));
        orbits.flat_map(|orbit| monomials().map(move |monomial| (orbit, monomial))).collect()
    }

    /// The first component of each orbit.
    fn first_components(&self) -> Vec<Vec<usize>> {
        let mut next = 0;
        let mut found = Vec::new();
        let steps = strides(&self.lengths);
        for (place, (orbit, sign)) in self.orbits.iter().enumerate() {
            // Orbits are numbered in the order of their first components.
            if *orbit == next {
                next += 1;
                if *sign != Sign::Neither {
                    found.push(self.lengths.iter().zip(&steps).map(|(length, step)| place / step % length).collect());
                }
            }
        }
        found
    }

    fn zeroed(&self) -> Self {
        let values = self.values.iter().map(|row| vec![N::ZERO; row.len()]).collect();
        Self { values, ..self.clone() }
    }
}

/// A field or a metric.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Part {
    Field(usize),
    Metric(usize),
}

/// Where one coefficient stands.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Place {
    /// Of a field or metric: the orbit, the monomial.
    Of(Part, usize, usize),
    /// A coordinate of the point.
    Coordinate(usize),
}

/// Fields and metrics with the components that say everything about them.
pub(crate) struct Shown {
    pub fields: Vec<(usize, Vec<usize>)>,
    pub metrics: Vec<(usize, Vec<usize>)>,
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

    /// The values at the point of the metrics that are drawn, row by row, by their numbers.
    pub fn metric_values(&self) -> Vec<(usize, Vec<N>)> {
        let values = |(number, free): (usize, &Option<Free<N>>)| {
            let free = free.as_ref()?;
            let entry = |(orbit, _): &(usize, Sign)| Some(*free.values.get(*orbit)?.first()?);
            Some((number, free.orbits.iter().map(entry).collect::<Option<Vec<_>>>()?))
        };
        self.metrics.iter().enumerate().filter_map(values).collect()
    }

    /// The fields and metrics that are drawn.
    pub fn parts(&self) -> Vec<Part> {
        let drawn = |frees: &[Option<Free<N>>]| -> Vec<usize> {
            frees.iter().enumerate().filter(|(_, free)| free.is_some()).map(|(number, _)| number).collect()
        };
        let fields = drawn(&self.fields).into_iter().map(Part::Field);
        fields.chain(drawn(&self.metrics).into_iter().map(Part::Metric)).collect()
    }

    fn free(&self, part: Part) -> Option<&Free<N>> {
        match part {
            Part::Field(field) => self.fields.get(field)?.as_ref(),
            Part::Metric(metric) => self.metrics.get(metric)?.as_ref(),
        }
    }

    fn free_mut(&mut self, part: Part) -> Option<&mut Free<N>> {
        match part {
            Part::Field(field) => self.fields.get_mut(field)?.as_mut(),
            Part::Metric(metric) => self.metrics.get_mut(metric)?.as_mut(),
        }
    }

    /// To which order a field or metric is drawn.
    pub fn order(&self, part: Part) -> Option<Order> {
        self.free(part).map(|free| free.order)
    }

    /// The orbit of a component, counted row by row, whose coefficients are those of the component itself.
    pub fn orbit(&self, part: Part, component: usize) -> Option<usize> {
        let (orbit, sign) = self.free(part)?.orbits.get(component)?;
        (*sign == Sign::Same).then_some(*orbit)
    }

    /// All coefficients that are free.
    pub fn places(&self) -> Vec<Place> {
        let of = |part: Part| {
            let places = self.free(part).map(Free::places).unwrap_or_default();
            places.into_iter().map(move |(orbit, monomial)| Place::Of(part, orbit, monomial))
        };
        let parts = self.parts();
        parts.into_iter().flat_map(of).chain((0..self.coordinates.len()).map(Place::Coordinate)).collect()
    }

    /// The free coefficients of a field or metric, each with the degrees of its monomial.
    pub fn graded(&self, part: Part, ring: &Ring) -> Vec<(Place, Order)> {
        let Some(free) = self.free(part) else { return Vec::new() };
        let degrees: Vec<Order> = ring.monomials(free.order).map(|monomial| ring.degrees(monomial)).collect();
        let graded = |(orbit, monomial): (usize, usize)| {
            let degree = degrees.get(monomial).copied().unwrap_or_default();
            (Place::Of(part, orbit, monomial), degree)
        };
        free.places().into_iter().map(graded).collect()
    }

    /// A coefficient; 0 where there is none.
    pub fn get(&self, place: Place) -> N {
        let number = match place {
            Place::Of(part, orbit, monomial) => {
                self.free(part).and_then(|free| free.values.get(orbit)?.get(monomial).copied())
            }
            Place::Coordinate(number) => self.coordinates.get(number).copied(),
        };
        number.unwrap_or(N::ZERO)
    }

    /// Changes a coefficient.
    pub fn set(&mut self, place: Place, value: N) {
        let entry = match place {
            Place::Of(part, orbit, monomial) => {
                self.free_mut(part).and_then(|free| free.values.get_mut(orbit)?.get_mut(monomial))
            }
            Place::Coordinate(number) => self.coordinates.get_mut(number),
        };
        if let Some(entry) = entry {
            *entry = value;
        }
    }

    /// The same with all fields 0, metrics `1` and `-1` on the diagonal, at the origin.
    pub fn plain(&self, world: &World) -> Self {
        let fields = self.fields.iter().map(|free| free.as_ref().map(Free::zeroed)).collect();
        let metric = |(free, metric): (&Option<Free<N>>, &crate::expression::Metric)| {
            let mut plain = free.as_ref()?.zeroed();
            plain.set_values(&diagonal::<N>(plain.lengths.first().copied()?, metric.minus));
            Some(plain)
        };
        let metrics = self.metrics.iter().zip(&world.metrics).map(metric).collect();
        let coordinates = vec![N::ZERO; self.coordinates.len()];
        Self { fields, metrics, coordinates, functions: self.functions }
    }

    /// Takes a field or metric from another point.
    pub fn replace_part(&mut self, part: Part, from: &Self) {
        if let (Some(own), Some(other)) = (self.free_mut(part), from.free(part)) {
            *own = other.clone();
        }
    }

    /// The components from which all others follow.
    pub fn shown(&self) -> Shown {
        let components = |frees: &[Option<Free<N>>]| {
            let of = |(number, free): (usize, &Option<Free<N>>)| {
                let components = free.as_ref().map(Free::first_components).unwrap_or_default();
                components.into_iter().map(move |component| (number, component))
            };
            frees.iter().enumerate().flat_map(of).collect()
        };
        Shown { fields: components(&self.fields), metrics: components(&self.metrics) }
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
