//! What is known besides a claim, imposed on the fields that are drawn.
//!
//! A given is an equation between fields at every place, so that the Taylor coefficients of the difference of its
//! sides vanish to as many orders as the claim can notice. For each given one field (or a metric that is arbitrary)
//! gives way: those of its coefficients on which the equations depend are solved for, modulo the prime, the others
//! stay as they were drawn. Killing's equation has a way of its own (`killing.rs`); else three ways are tried, in this
//! order:
//!
//! - degree by degree, the coefficients of the highest derivatives first met at that degree. They enter linearly even
//!   where the equation is not linear: Ricci's tensor in second derivatives of the metric;
//! - at the point, one coefficient of a single quadratic equation: `u_a u^a = -1`;
//! - all coefficients at once, with all givens for which that field has given way before: `\partial^i h_{ij} = 0` and
//!   `h_{ii} = 0`.
//!
//! Afterwards every given is evaluated again, and a point that does not obey all of them is no point. What is imposed
//! are consequences of the givens, to finite order, and so a claim that holds then follows from them; that a claim
//! differs then proves nothing.
//!
//! Trap: differential equations without solutions but 0 (a Killing field of an arbitrary metric, to high order) say
//! nothing; a field that such an equation leaves 0 is refused. That a field is 0 may be said without derivatives.

use std::cell::{Cell, RefCell};
use std::sync::Arc;

use super::compare::{Dimension, sides};
use super::killing::Killing;
use super::{Claim, degree};
use crate::evaluation::Point;
use crate::evaluation::families::Families;
use crate::evaluation::needs::{Needs, within_depth};
use crate::evaluation::sampled::{Part, Place, Sampled};
use crate::expression::{Expression, Given, MetricValues};
use crate::jet::{Order, Ring};
use crate::number::Number;
use crate::trouble::{Budget, Outcome, Trouble};

/// The most coefficients that are solved for at once; the equations are evaluated once for each.
pub const UNKNOWNS_BUDGET: usize = 400;

/// How often the orders of claim and givens are fitted to each other.
const ROUNDS: usize = 3;

/// A given as two sides, to be obeyed to a base order.
#[derive(Clone, Debug)]
pub(super) struct Condition {
    pub label: String,
    pub left: Expression,
    pub right: Expression,
    pub order: usize,
    /// Which fields and metrics stand in it, with the order of their highest derivative.
    depths: Vec<(Part, usize)>,
}

/// All givens of a claim.
#[derive(Debug, Default)]
pub(super) struct Givens {
    pub conditions: Vec<Condition>,
    /// The last given that a point did not obey.
    pub unmet: RefCell<Option<String>>,
    /// By how much the degrees of the drawn coefficients have grown, as a power of two.
    pub growth: Cell<u32>,
}

impl Condition {
    fn new(given: &Given, claim: &Claim) -> Outcome<Self> {
        let left = given.left.clone();
        let right = given.right.clone().unwrap_or_else(Expression::zero);
        [&left, &right].into_iter().try_for_each(within_depth)?;
        let needs = Needs::of([(&left, 0), (&right, 0)], &claim.world)?;
        let order = |need: &Option<Order>| need.map(|order| order.base);
        let fields = needs.fields.iter().enumerate().filter_map(|(i, need)| Some((Part::Field(i), order(need)?)));
        let metrics = needs.metrics.iter().enumerate().filter_map(|(i, need)| Some((Part::Metric(i), order(need)?)));
        let depths = fields.chain(metrics).collect();
        Ok(Self { label: given.label.clone(), left, right, order: 0, depths })
    }

    /// Whether derivatives of a field stand in it.
    fn differentiates(&self, part: Part) -> bool {
        self.depths.iter().any(|(own, depth)| *own == part && *depth > 0)
    }

    /// The highest order to which what gives way is needed, less what the derivatives in the given take.
    fn fit(&mut self, needs: &Needs) {
        let is_field = |part: &Part| matches!(part, Part::Field(_));
        let fields = self.depths.iter().any(|(part, _)| is_field(part));
        for (part, depth) in &self.depths {
            let need = match part {
                Part::Field(field) => needs.fields.get(*field),
                Part::Metric(metric) => needs.metrics.get(*metric),
            };
            if let Some(need) = need.copied().flatten().filter(|_| is_field(part) == fields) {
                self.order = self.order.max(need.base.saturating_sub(*depth));
            }
        }
    }
}

impl Givens {
    /// The givens of a claim, and what it asks for together with them.
    pub fn new(claim: &Claim) -> Outcome<(Self, Needs)> {
        let mut conditions =
            claim.world.givens.iter().map(|given| Condition::new(given, claim)).collect::<Outcome<Vec<_>>>()?;
        let needs = |conditions: &[Condition]| {
            let given = conditions.iter().flat_map(|own| [(&own.left, own.order), (&own.right, own.order)]);
            Needs::of([(&claim.left, 0), (&claim.right, 0)].into_iter().chain(given), &claim.world)
        };
        for _ in 0..ROUNDS {
            let needs = needs(&conditions)?;
            conditions.iter_mut().for_each(|condition| condition.fit(&needs));
        }
        let needs = needs(&conditions)?;
        Ok((Self { conditions, ..Self::default() }, needs))
    }

    /// Changes the draw so that it obeys all givens; `NoRoot` if it cannot be done from here.
    pub fn imposed<N: Number>(
        &self,
        dimension: &Dimension,
        ring: &Arc<Ring>,
        drawn: Sampled<N>,
    ) -> Outcome<Sampled<N>> {
        let mut imposing = Imposing { givens: self, dimension, ring, point: drawn, gave_way: Vec::new(), growth: 0 };
        for number in 0..self.conditions.len() {
            imposing.impose(number)?;
        }
        for condition in &self.conditions {
            if !imposing.obeys(&imposing.point, &[condition])? {
                return Err(self.fail(condition));
            }
        }
        self.growth.set(self.growth.get().max(imposing.growth));
        Ok(imposing.point)
    }

    fn fail(&self, condition: &Condition) -> Trouble {
        *self.unmet.borrow_mut() = Some(condition.label.clone());
        Trouble::NoRoot
    }
}

/// A draw that is being changed.
struct Imposing<'a, N: Number> {
    givens: &'a Givens,
    dimension: &'a Dimension<'a>,
    ring: &'a Arc<Ring>,
    point: Sampled<N>,
    /// For each condition that has been imposed, what gave way.
    gave_way: Vec<(usize, Part)>,
    growth: u32,
}

/// The coefficients of the difference of the sides of some conditions, each with its degrees.
type Residual<N> = Vec<(Order, N)>;

impl<'a, N: Number> Imposing<'a, N> {
    fn impose(&mut self, number: usize) -> Outcome<()> {
        let condition = self.givens.conditions.get(number).ok_or(Trouble::Shape)?;
        if self.obeys(&self.point, &[condition])? {
            return Ok(());
        }
        if self.impose_killing(number, condition)? {
            return Ok(());
        }
        for (part, depth) in self.candidates(condition) {
            let together = self.together(number, part);
            let ways = [Way::ByDegree(depth), Way::AtThePoint, Way::AtOnce];
            for way in ways {
                let conditions = if way == Way::AtOnce { &together[..] } else { &[condition][..] };
                let Some(solved) = self.solved(conditions, part, way)? else { continue };
                let vacuous = together.iter().any(|own| own.differentiates(part)) && is_nothing(&solved, part);
                if !vacuous && self.obeys(&solved, &together)? {
                    self.point = solved;
                    self.gave_way.push((number, part));
                    return Ok(());
                }
            }
        }
        Err(self.givens.fail(condition))
    }

    /// Imposes Killing's equation by solving for the metric, if the condition is that and nothing of it is settled yet.
    fn impose_killing(&mut self, number: usize, condition: &Condition) -> Outcome<bool> {
        let Some(killing) = Killing::of(condition, &self.dimension.claim.world) else { return Ok(false) };
        if self.gave_way.iter().any(|(_, part)| killing.parts().contains(part)) {
            return Ok(false);
        }
        let Some((point, growth)) = killing.imposed(self.dimension, self.ring, &self.point)? else { return Ok(false) };
        if !self.obeys(&point, &[condition])? {
            return Ok(false);
        }
        self.point = point;
        self.growth = self.growth.saturating_add(growth);
        self.gave_way.extend(killing.parts().map(|part| (number, part)));
        Ok(true)
    }

    /// What may give way, with the order of its derivatives: fields that vary before constants, those that have not yet
    /// before those that have, few derivatives before many; metrics last.
    fn candidates(&self, condition: &Condition) -> Vec<(Part, usize)> {
        let world = &self.dimension.claim.world;
        let arbitrary = |part: Part| match part {
            Part::Field(_) => true,
            Part::Metric(metric) => {
                world.metrics.get(metric).is_some_and(|metric| metric.values == MetricValues::Arbitrary)
            }
        };
        let mut candidates: Vec<_> = condition.depths.iter().copied().filter(|(part, _)| arbitrary(*part)).collect();
        let is_constant = |part: Part| match part {
            Part::Field(field) => world.fields.get(field).is_some_and(|field| field.constant),
            Part::Metric(_) => false,
        };
        let rank = |part: Part| {
            let before = self.gave_way.iter().any(|(_, other)| *other == part);
            (matches!(part, Part::Metric(_)), is_constant(part), before)
        };
        candidates.sort_by_key(|(part, depth)| (rank(*part), *depth));
        candidates
    }

    /// A condition with those imposed before for which the same gave way.
    fn together(&self, number: usize, part: Part) -> Vec<&'a Condition> {
        let givens = self.givens;
        let before = self.gave_way.iter().filter(|(_, other)| *other == part).map(|(number, _)| *number);
        before.chain([number]).filter_map(|number| givens.conditions.get(number)).collect()
    }

    /// The draw changed in one way; nothing if that way does not lead on.
    fn solved(&mut self, conditions: &[&Condition], part: Part, way: Way) -> Outcome<Option<Sampled<N>>> {
        let graded = self.point.graded(part, self.ring);
        let all = |_: Order| true;
        let mut point = self.point.clone();
        match way {
            Way::AtOnce => {
                let places: Vec<Place> = graded.iter().map(|(place, _)| *place).collect();
                if !self.step(&mut point, conditions, &places, all)? {
                    return Ok(None);
                }
            }
            Way::AtThePoint => {
                let here = |degree: Order| degree == Order::default();
                let places = graded.iter().filter(|(_, degree)| here(*degree)).map(|(place, _)| *place);
                if !self.quadratic(&mut point, conditions, &places.collect::<Vec<_>>())?
                    || !self.by_degree(&mut point, conditions, &graded, 0)?
                {
                    return Ok(None);
                }
            }
            Way::ByDegree(depth) => {
                if !self.by_degree(&mut point, conditions, &graded, depth)? {
                    return Ok(None);
                }
            }
        }
        Ok(Some(point))
    }

    fn by_degree(
        &mut self,
        point: &mut Sampled<N>,
        conditions: &[&Condition],
        graded: &[(Place, Order)],
        depth: usize,
    ) -> Outcome<bool> {
        let top = conditions.iter().map(|condition| condition.order).max().unwrap_or_default();
        for small in 0..=self.ring.top().small {
            for base in 0..=top {
                let unknown = Order { base: base + depth, small };
                let places = graded.iter().filter(|(_, degree)| *degree == unknown).map(|(place, _)| *place);
                let places: Vec<Place> = places.collect();
                if !self.step(point, conditions, &places, |degree| degree == Order { base, small })? {
                    return Ok(false);
                }
            }
        }
        Ok(true)
    }

    /// Solves the equations of some degrees for some coefficients, in which they are taken to be linear; false if
    /// that is not possible.
    fn step(
        &mut self,
        point: &mut Sampled<N>,
        conditions: &[&Condition],
        places: &[Place],
        which: impl Fn(Order) -> bool,
    ) -> Outcome<bool> {
        let now = chosen(&self.residual(point, conditions)?, &which);
        if now.iter().all(|number| number.is_zero()) {
            return Ok(true);
        }
        if places.len() > UNKNOWNS_BUDGET {
            return Err(Trouble::Budget(Budget::Unknowns));
        }
        let mut columns = Vec::with_capacity(places.len());
        for place in places {
            let mut changed = point.clone();
            changed.set(*place, point.get(*place) + N::ONE);
            let then = chosen(&self.residual(&changed, conditions)?, &which);
            if then.len() != now.len() {
                return Err(Trouble::Shape);
            }
            columns.push(then.iter().zip(&now).map(|(then, now)| *then - *now).collect::<Vec<_>>());
        }
        let size = (now.len() as u64).saturating_mul((places.len() as u64).saturating_pow(2));
        self.dimension.meter.spend(size)?;
        let Some(change) = solution(columns, now) else { return Ok(false) };
        for (place, change) in places.iter().zip(change) {
            point.set(*place, point.get(*place) + change);
        }
        self.grow(conditions, places.len());
        Ok(true)
    }

    /// Solves a single equation at the point, quadratic in each of some coefficients, for the first for which that is
    /// possible; false if there is none such.
    fn quadratic(&mut self, point: &mut Sampled<N>, conditions: &[&Condition], places: &[Place]) -> Outcome<bool> {
        let here = |degree: Order| degree == Order::default();
        for place in places {
            let start = point.get(*place);
            let mut values = Vec::new();
            for step in [0, 1, -1] {
                point.set(*place, start + N::from_integer(step));
                values.extend(chosen(&self.residual(point, conditions)?, &here));
            }
            point.set(*place, start);
            let [at, above, below] = values[..] else { return Ok(false) };
            let half = N::from_integer(2).inverse().ok_or(Trouble::ZeroDivisor)?;
            let (linear, square) = ((above - below) * half, (above + below) * half - at);
            let radicand = linear * linear * half * half - square * at;
            let Some((root, divisor)) = radicand.root().zip(square.inverse()) else { continue };
            point.set(*place, start + (root - linear * half) * divisor);
            self.grow(conditions, 2);
            return Ok(true);
        }
        Ok(false)
    }

    fn grow(&mut self, conditions: &[&Condition], unknowns: usize) {
        let Dimension { claim, needs, families, .. } = self.dimension;
        let degree = |own: &&Condition| degree::bound((&own.left, &own.right), &claim.world, needs, families);
        let most = conditions.iter().map(degree).max().unwrap_or(1).saturating_mul(unknowns as u64).saturating_add(1);
        self.growth = self.growth.saturating_add(u64::BITS - most.leading_zeros());
    }

    fn obeys(&self, point: &Sampled<N>, conditions: &[&Condition]) -> Outcome<bool> {
        Ok(self.residual(point, conditions)?.iter().all(|(_, number)| number.is_zero()))
    }

    fn residual(&self, sampled: &Sampled<N>, conditions: &[&Condition]) -> Outcome<Residual<N>> {
        let Dimension { claim, needs, families, meter, .. } = self.dimension;
        meter.spend(0)?;
        let families: Families = families.clone();
        let point = Point::new(&claim.world, families, needs, self.ring, sampled.clone(), meter);
        point.prepare();
        let mut residual = Vec::new();
        for condition in conditions {
            let Some((left, right)) = sides(&condition.left, &condition.right, &point)? else { continue };
            let difference = left.tensor.minus(&right.tensor)?;
            let order = difference.order().least(Order { base: condition.order, small: usize::MAX });
            let difference = difference.truncated(order)?;
            let degrees = self.ring.monomials(order).map(|monomial| self.ring.degrees(monomial));
            let degrees = degrees.flat_map(|degree| std::iter::repeat_n(degree, difference.size()));
            residual.extend(degrees.zip(difference.numbers().iter().copied()));
        }
        Ok(residual)
    }
}

/// How equations are solved.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Way {
    /// Degree by degree, for coefficients that are so many degrees higher.
    ByDegree(usize),
    /// One quadratic equation at the point, then degree by degree.
    AtThePoint,
    /// All at once.
    AtOnce,
}

/// The numbers of some degrees.
fn chosen<N: Number>(residual: &Residual<N>, which: &impl Fn(Order) -> bool) -> Vec<N> {
    residual.iter().filter(|(degree, _)| which(*degree)).map(|(_, number)| *number).collect()
}

/// Whether all coefficients of a field are 0.
fn is_nothing<N: Number>(point: &Sampled<N>, part: Part) -> bool {
    let own = |place: &Place| matches!(place, Place::Of(of, ..) if *of == part);
    point.places().iter().filter(|place| own(place)).all(|place| point.get(*place).is_zero())
}

/// Numbers `x` with `sum of x[j] columns[j] = -constant`, by Gauss's elimination, those that are free being 0;
/// nothing if there are none.
fn solution<N: Number>(columns: Vec<Vec<N>>, constant: Vec<N>) -> Option<Vec<N>> {
    let unknowns = columns.len();
    let row = |number: usize| -> Vec<N> {
        let entries = columns.iter().map(|column| column.get(number).copied().unwrap_or(N::ZERO));
        entries.chain(constant.get(number).map(|value| -*value)).collect()
    };
    let mut rows: Vec<Vec<N>> = (0..constant.len()).map(row).collect();
    let mut pivots: Vec<(usize, Vec<N>)> = Vec::new();
    while let Some(mut row) = rows.pop() {
        for (place, pivot) in &pivots {
            reduce(&mut row, *place, pivot);
        }
        let Some(place) = row.iter().take(unknowns).position(|entry| !entry.is_zero()) else {
            if row.last().is_some_and(|value| !value.is_zero()) {
                return None;
            }
            continue;
        };
        let share = row.get(place)?.inverse()?;
        row.iter_mut().for_each(|entry| *entry = *entry * share);
        pivots.iter_mut().for_each(|(_, other)| reduce(other, place, &row));
        pivots.push((place, row));
    }
    let mut found = vec![N::ZERO; unknowns];
    for (place, row) in pivots {
        *found.get_mut(place)? = *row.last()?;
    }
    Some(found)
}

/// Takes the multiple of a pivot row away that has the same entry at its place.
fn reduce<N: Number>(row: &mut [N], place: usize, pivot: &[N]) {
    let factor = row.get(place).copied().unwrap_or(N::ZERO);
    if !factor.is_zero() {
        row.iter_mut().zip(pivot).for_each(|(entry, other)| *entry = *entry - factor * *other);
    }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]

    use super::*;
    use crate::draws::Draws;
    use crate::field::{FIRST, Residue};

    #[test]
    fn solutions_solve_and_contradictions_have_none() {
        type R = Residue<FIRST>;
        let mut draws = Draws::from_seed(5);
        for (equations, unknowns) in [(3, 3), (2, 5), (1, 1), (4, 6)] {
            let mut list = |count: usize| (0..count).map(|_| R::draw(&mut draws)).collect::<Vec<_>>();
            let columns: Vec<Vec<R>> = (0..unknowns).map(|_| list(equations)).collect();
            let constant = list(equations);
            let x = solution(columns.clone(), constant.clone()).unwrap();
            for (row, value) in constant.iter().enumerate() {
                let sum = columns.iter().zip(&x).fold(*value, |sum, (column, x)| sum + column[row] * *x);
                assert_eq!(sum, R::ZERO);
            }
        }
        let (one, two) = (R::ONE, R::new(2));
        assert_eq!(solution(vec![vec![one, two]], vec![one, one]), None);
        assert_eq!(solution(vec![vec![one, two]], vec![one, two]), Some(vec![-one]));
        assert_eq!(solution::<R>(Vec::new(), vec![one]), None);
    }
}
