//! Counterexamples: fields with small integer coefficients at which the sides differ, made simple.
//!
//! The search starts from random points over the rationals, first with the metric `1` and `-1` on the diagonal, and
//! then takes away what is not needed for the difference: whole fields, runs of coefficients of halving length,
//! single ones; what stays becomes 1 where it can. The last point is evaluated once more, and what is reported is
//! what that gives. Numbers that grow beyond 128 bits, roots that are not rational and denominators that vanish only
//! mean that a trial is no witness.
//!
//! Logarithms have no rational values. Their derivatives have, and so a claim with logarithms has a witness if the
//! sides do not change with the values that the logarithms are given.

use std::cell::Cell;
use std::sync::Arc;

use super::compare::{Difference, Dimension};
use super::signature::negative_squares;
use super::{Assignment, Counterexample, Entry, functions};
use crate::evaluation::sampled::{MetricDraw, Part, Place, Sampled};
use crate::evaluation::{Meter, Point, ring_for};
use crate::geometry::Level;
use crate::jet::{Jet, Ring};
use crate::number::{Exact, Number};
use crate::rational::Rational;
use crate::tensor::strides;
use crate::trouble::{Budget, Trouble};

/// From how many random points the search starts, of each kind.
const STARTS: usize = 16;

/// The share of the multiplications of a verdict that its search for a witness may take: fractions are slow.
const SHARE: u64 = 40;

/// The number of a series of draws that no comparison uses.
const SERIES: u64 = 9;

/// A search in one dimension.
struct Search<'a> {
    dimension: &'a Dimension<'a>,
    ring: Arc<Ring>,
    trials: Cell<usize>,
    logarithms: bool,
}

/// A counterexample in one dimension, if one is found within the limits.
pub(super) fn witness(dimension: &Dimension) -> Option<Counterexample> {
    let used = functions::used(dimension.claim, dimension.needs);
    if used.others {
        return None;
    }
    let limits = dimension.limits;
    let meter = Meter::new(limits.step / SHARE, limits.total / SHARE, limits.stop);
    let dimension = &Dimension { meter: &meter, families: dimension.families.clone(), ..*dimension };
    let ring = ring_for(&dimension.families, dimension.needs).ok()?;
    let search = Search { dimension, ring, trials: Cell::new(limits.trials), logarithms: used.logarithms };
    let styles = [MetricDraw::Diagonal, MetricDraw::Congruent];
    let starts = (0..STARTS).flat_map(|number| styles.map(|style| (number, style)));
    let start = starts.filter_map(|(number, style)| search.drawn(number, style)).find(|point| search.differs(point))?;
    search.report(search.simplified(start))
}

impl Search<'_> {
    fn drawn(&self, number: usize, style: MetricDraw) -> Option<Sampled<Exact>> {
        let Dimension { claim, families, needs, .. } = self.dimension;
        let seed = self.dimension.seed(SERIES, number);
        Sampled::draw(&claim.world, families, needs, &self.ring, seed, style).ok()
    }

    /// Whether the metrics have the signatures that were declared.
    fn has_signatures(&self, point: &Sampled<Exact>) -> bool {
        point.metric_values().into_iter().all(|(number, values)| {
            let metric = self.dimension.claim.world.metrics.get(number);
            let rows = values.len().isqrt();
            metric.is_some_and(|metric| negative_squares(rows, &values) == Some(metric.minus.min(rows)))
        })
    }

    /// Whether the sides differ at a point; false as well once there are no trials left.
    fn differs(&self, point: &Sampled<Exact>) -> bool {
        if !self.has_signatures(point) {
            return false;
        }
        let Some(left) = self.trials.get().checked_sub(1) else { return false };
        self.trials.set(left);
        self.difference(point).is_some_and(|difference| difference.place.is_some())
    }

    fn difference(&self, point: &Sampled<Exact>) -> Option<Difference<Exact>> {
        let difference = match self.dimension.difference(&self.ring, point.clone()) {
            Err(Trouble::Stopped | Trouble::Budget(Budget::Total)) => {
                self.trials.set(0);
                return None;
            }
            other => other.ok()??,
        };
        if self.logarithms && difference.place.is_some() {
            let other = Sampled { functions: !point.functions, ..point.clone() };
            let other = self.dimension.difference(&self.ring, other).ok()??;
            if (&other.place, other.numbers()) != (&difference.place, difference.numbers()) {
                return None;
            }
        }
        Some(difference)
    }

    /// The point made as simple as the trials allow.
    fn simplified(&self, mut point: Sampled<Exact>) -> Sampled<Exact> {
        let plain = point.plain(&self.dimension.claim.world);
        let parts = point.parts();
        for part in parts {
            let mut simpler = point.clone();
            simpler.replace_part(part, &plain);
            self.keep(&mut point, simpler);
        }
        let mut length = self.changed(&point, &plain).len().div_ceil(2).max(1);
        loop {
            for run in self.changed(&point, &plain).chunks(length) {
                let mut simpler = point.clone();
                run.iter().for_each(|place| simpler.set(*place, plain.get(*place)));
                self.keep(&mut point, simpler);
            }
            if length == 1 {
                break;
            }
            length = length.div_ceil(2);
        }
        for place in self.changed(&point, &plain) {
            if point.get(place) != Exact::ONE {
                let mut simpler = point.clone();
                simpler.set(place, Exact::ONE);
                self.keep(&mut point, simpler);
            }
        }
        point
    }

    fn keep(&self, point: &mut Sampled<Exact>, simpler: Sampled<Exact>) {
        if self.differs(&simpler) {
            *point = simpler;
        }
    }

    /// The places at which a point is not plain.
    fn changed(&self, point: &Sampled<Exact>, plain: &Sampled<Exact>) -> Vec<Place> {
        point.places().into_iter().filter(|place| point.get(*place) != plain.get(*place)).collect()
    }

    /// What is said of a point, from a last evaluation.
    fn report(&self, point: Sampled<Exact>) -> Option<Counterexample> {
        let difference = self.difference(&point)?;
        let (left, right) = difference.numbers()?;
        let (left, right) = (left.value()?, right.value()?);
        let (order, place) = difference.place?;
        if left == right {
            return None;
        }
        let component = difference.slots.iter().map(|slot| slot.label).zip(place).collect();
        Some(Counterexample {
            dimension: self.dimension.dimension,
            entries: self.entries(point.clone())?,
            variables: self.variables(),
            assignments: self.assignments(point)?,
            component,
            order,
            left,
            right,
        })
    }

    /// The components that are not 0, in the order of the world: fields, metrics, coordinates.
    fn assignments(&self, point: Sampled<Exact>) -> Option<Vec<Assignment>> {
        let Dimension { claim, needs, families, meter, .. } = self.dimension;
        let world = &claim.world;
        let mut found = Vec::new();
        let mut add = |name: &str, component: Vec<usize>, jet: &Jet<Exact>| {
            if let Some(value) = self.text(jet) {
                found.push(Assignment { name: name.to_owned(), component, value });
            }
        };
        let coordinates = point.coordinates.clone();
        let shown = point.shown();
        let evaluated = Point::new(world, families.clone(), needs, &self.ring, point, meter);
        for (field, component) in shown.fields {
            let own = world.fields.get(field)?;
            add(&own.name, component.clone(), &evaluated.whole_field(field).ok()?.get(&component)?);
        }
        for (metric, component) in shown.metrics {
            let own = world.metrics.get(metric)?;
            add(&own.name, component.clone(), &evaluated.space(metric).ok()?.metric().get(&component)?);
        }
        for (number, value) in coordinates.into_iter().enumerate() {
            add("x", vec![number], &Jet::constant(&self.ring, value));
        }
        Some(found)
    }

    /// All components that are not 0, in the order of the world: fields, metrics, coordinates.
    fn entries(&self, point: Sampled<Exact>) -> Option<Vec<Entry>> {
        let Dimension { claim, needs, families, meter, .. } = self.dimension;
        let world = &claim.world;
        let (parts, coordinates) = (point.parts(), point.coordinates.clone());
        let evaluated = Point::new(world, families.clone(), needs, &self.ring, point, meter);
        let mut found = Vec::new();
        let mut add = |name: &str, levels: Vec<Level>, component: Vec<usize>, jet: &Jet<Exact>| {
            let terms = self.terms(jet)?;
            if !terms.is_empty() {
                found.push(Entry { name: name.to_owned(), levels, component, terms });
            }
            Some(())
        };
        for part in parts {
            let (name, levels, tensor) = match part {
                Part::Field(field) => {
                    let own = world.fields.get(field)?;
                    let levels: Vec<Level> = own.slots.iter().map(|(_, level)| *level).collect();
                    (&own.name, levels, (*evaluated.whole_field(field).ok()?).clone())
                }
                Part::Metric(metric) => {
                    let tensor = evaluated.space(metric).ok()?.metric().clone();
                    (&world.metrics.get(metric)?.name, vec![Level::Down; 2], tensor)
                }
            };
            for place in 0..tensor.size() {
                let steps = strides(tensor.lengths());
                let component: Vec<usize> =
                    tensor.lengths().iter().zip(&steps).map(|(length, step)| place / step % length).collect();
                add(name, levels.clone(), component.clone(), &tensor.get(&component)?)?;
            }
        }
        for (number, value) in coordinates.into_iter().enumerate() {
            add("x", vec![Level::Up], vec![number], &Jet::constant(&self.ring, value))?;
        }
        Some(found)
    }

    /// The coefficients of a jet that are not 0; nothing where one is no fraction.
    fn terms(&self, jet: &Jet<Exact>) -> Option<Vec<(Rational, Vec<u8>)>> {
        let mut terms = Vec::new();
        for (monomial, coefficient) in self.ring.monomials(jet.order()).zip(jet.coefficients()) {
            let number = coefficient.value()?;
            if number != Rational::ZERO {
                terms.push((number, monomial.to_vec()));
            }
        }
        Some(terms)
    }

    /// The names of the variables: coordinates, the common size of small fields, parameters.
    fn variables(&self) -> Vec<String> {
        let needs = self.dimension.needs;
        let coordinates = (0..self.ring.variables()).map(|number| format!("x_{}", number + 1));
        let size = needs.sized.then(|| "size".to_owned());
        let parameters =
            needs.parameters.iter().filter_map(|number| self.dimension.claim.world.parameters.get(*number));
        coordinates.chain(size).chain(parameters.cloned()).collect()
    }

    /// A jet as a polynomial; nothing for 0. The common size of small fields is left out.
    fn text(&self, jet: &Jet<Exact>) -> Option<String> {
        let mut text = String::new();
        for (monomial, coefficient) in self.ring.monomials(jet.order()).zip(jet.coefficients()) {
            let number = coefficient.value()?;
            if number == Rational::ZERO {
                continue;
            }
            let factors = self.factors(monomial);
            let sign = match (text.is_empty(), number < Rational::ZERO) {
                (true, true) => "-",
                (true, false) => "",
                (false, true) => " - ",
                (false, false) => " + ",
            };
            text.push_str(sign);
            let size = number.magnitude();
            match (size == Rational::ONE, factors.is_empty()) {
                (_, true) => text.push_str(&size.to_string()),
                (true, false) => text.push_str(&factors),
                (false, false) => text.push_str(&format!("{size} {factors}")),
            }
        }
        (!text.is_empty()).then_some(text)
    }

    /// A monomial as it is written: `x_1^2 x_3`, parameters by their names.
    fn factors(&self, monomial: &[u8]) -> String {
        let needs = self.dimension.needs;
        let names = |number: usize| match number.checked_sub(self.ring.variables()) {
            None => Some(format!("x_{}", number + 1)),
            Some(small) => {
                let parameter = needs.parameters.get(small.checked_sub(usize::from(needs.sized))?)?;
                self.dimension.claim.world.parameters.get(*parameter).cloned()
            }
        };
        let factor = |(number, exponent): (usize, &u8)| match exponent {
            0 => None,
            1 => names(number),
            _ => Some(format!("{}^{exponent}", names(number)?)),
        };
        monomial.iter().enumerate().filter_map(factor).collect::<Vec<_>>().join(" ")
    }
}
