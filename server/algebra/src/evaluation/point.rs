//! A point: the fields of a world about one random place in one dimension, as far as a claim asks for them.
//!
//! Fields are drawn when the point is made (`sampled.rs`); what follows from them (geometry, definitions, tensors
//! with indices moved) is computed when first asked for and kept.

use std::cell::RefCell;
use std::collections::HashMap;
use std::hash::Hash;
use std::rc::Rc;
use std::sync::Arc;

use super::families::Families;
use super::functions::Functions;
use super::meter::Meter;
use super::needs::Needs;
use super::sampled::Sampled;
use super::slots::Slot;
use crate::contraction::{Factor, Label, contract, evaluated, planned};
use crate::expression::{Curvature, MetricValues, World};
use crate::geometry::{Geometry, Level};
use crate::jet::{Jet, Order, Ring, Variable};
use crate::number::Number;
use crate::tensor::Tensor;
use crate::trouble::{Outcome, Trouble};

/// What a tensor with slots comes from.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub(crate) enum Source {
    Field(usize),
    /// The body of one definition.
    Definition(usize),
    /// A group of definitions, by its first.
    Definitions(usize),
    /// `epsilon_{i..}` of a metric.
    Epsilon(usize),
    Christoffel(usize),
    Curvature(usize, Curvature),
    Coordinate(usize),
}

/// A tensor with its slots on these levels.
type Moved = (Source, Vec<Level>);

/// What is being computed has no value yet; asking for it again is a circle.
enum Kept<T> {
    Busy,
    Done(Outcome<Rc<T>>),
}

/// Values that are computed once.
struct Cache<K, T>(RefCell<HashMap<K, Kept<T>>>);

impl<K: Copy + Eq + Hash, T> Cache<K, T> {
    fn new() -> Self {
        Self(RefCell::new(HashMap::new()))
    }

    /// What is kept, or made and kept; `Shape` if making it asks for it.
    fn get(&self, key: K, make: impl FnOnce() -> Outcome<T>) -> Outcome<Rc<T>> {
        match self.0.borrow().get(&key) {
            Some(Kept::Done(value)) => return value.clone(),
            Some(Kept::Busy) => return Err(Trouble::Shape),
            None => {}
        }
        self.0.borrow_mut().insert(key, Kept::Busy);
        let made = make().map(Rc::new);
        self.0.borrow_mut().insert(key, Kept::Done(made.clone()));
        made
    }
}

/// The fields of a world at one point.
pub struct Point<'a, N: Number> {
    pub(super) world: &'a World,
    pub(super) families: Families,
    pub(super) needs: &'a Needs,
    pub(super) ring: Arc<Ring>,
    pub(super) meter: &'a Meter<'a>,
    sampled: Sampled<N>,
    spaces: Cache<usize, Geometry<N>>,
    tensors: Cache<Source, Tensor<N>>,
    moved: RefCell<HashMap<Moved, Rc<Tensor<N>>>>,
    pub(super) functions: RefCell<Functions<N>>,
}

/// The ring in which a claim is evaluated.
pub(crate) fn ring_for(families: &Families, needs: &Needs) -> Outcome<Arc<Ring>> {
    let smalls = if needs.top.small == 0 { 0 } else { needs.parameters.len() + usize::from(needs.sized) };
    Ring::with_small(families.variables(), smalls, needs.top)
}

impl<'a, N: Number> Point<'a, N> {
    /// The point of drawn coefficients.
    pub(crate) fn new(
        world: &'a World,
        families: Families,
        needs: &'a Needs,
        ring: &Arc<Ring>,
        sampled: Sampled<N>,
        meter: &'a Meter<'a>,
    ) -> Self {
        let functions = RefCell::new(Functions::new(sampled.functions));
        Self {
            world,
            families,
            needs,
            ring: ring.clone(),
            meter,
            sampled,
            spaces: Cache::new(),
            tensors: Cache::new(),
            moved: RefCell::new(HashMap::new()),
            functions,
        }
    }

    /// A metric with all that follows from it.
    pub(crate) fn space(&self, metric: usize) -> Outcome<Rc<Geometry<N>>> {
        let own = self.world.metrics.get(metric).ok_or(Trouble::Shape)?;
        self.spaces.get(metric, || {
            let values = match own.values {
                MetricValues::Defined(definition) => self.defined_metric(definition, own.family)?,
                _ => self
                    .sampled
                    .metrics
                    .get(metric)
                    .and_then(Option::as_ref)
                    .ok_or(Trouble::Shape)?
                    .tensor(&self.ring)?,
            };
            // Faddeev and LeVerrier: as many products of matrices as rows.
            self.charge(values.lengths().first().copied().unwrap_or_default(), 4, values.order())?;
            Geometry::along(values, self.families.first(own.family), self.world.signs)
        })
    }

    /// The metric that moves the indices of a family.
    pub(super) fn space_of(&self, family: usize) -> Outcome<Rc<Geometry<N>>> {
        self.space(self.families.metric(family).ok_or(Trouble::Shape)?)
    }

    /// A field on its own levels.
    pub(crate) fn whole_field(&self, field: usize) -> Outcome<Rc<Tensor<N>>> {
        self.tensor(Source::Field(field))
    }

    /// A tensor on its natural levels.
    fn tensor(&self, source: Source) -> Outcome<Rc<Tensor<N>>> {
        self.tensors.get(source, || match source {
            Source::Field(field) => self.field(field),
            Source::Definition(definition) => self.evaluated_body(definition),
            Source::Definitions(first) => self.assembled(first),
            Source::Epsilon(metric) => self.space(metric)?.epsilon_down(),
            Source::Christoffel(metric) => self.charged(metric, 4)?.christoffel().cloned(),
            Source::Curvature(metric, kind) => self.curvature(metric, kind),
            Source::Coordinate(family) => self.coordinate(family),
        })
    }

    /// A metric of which something is asked that costs about so many sums over its range.
    pub(super) fn charged(&self, metric: usize, power: u32) -> Outcome<Rc<Geometry<N>>> {
        let space = self.space(metric)?;
        self.charge(space.dimension(), power, space.metric().order())?;
        Ok(space)
    }

    fn charge(&self, range: usize, power: u32, order: Order) -> Outcome<()> {
        self.meter.spend((range as u64).saturating_pow(power).saturating_mul(self.ring.pairs(order)))
    }

    fn curvature(&self, metric: usize, kind: Curvature) -> Outcome<Tensor<N>> {
        let space = self.charged(metric, 5)?;
        match kind {
            Curvature::Riemann => space.riemann().cloned(),
            Curvature::Ricci => space.ricci().cloned(),
            Curvature::Scalar => Ok(Tensor::scalar(&space.scalar()?)),
            Curvature::Einstein => space.einstein(),
            Curvature::Weyl => space.weyl(),
        }
    }

    fn coordinate(&self, family: usize) -> Outcome<Tensor<N>> {
        let (first, size) = (self.families.first(family).ok_or(Trouble::Shape)?, self.families.size(family)?);
        let jet = |number: usize| {
            let value = self.sampled.coordinates.get(number).copied().unwrap_or(N::ZERO);
            Jet::variable(&self.ring, Variable::Base(number), value)
        };
        let jets = (first..first + size).map(jet).collect::<Outcome<Vec<_>>>()?;
        Tensor::from_jets(&[size], &jets)
    }

    /// A field, without its trace and of its size.
    fn field(&self, field: usize) -> Outcome<Tensor<N>> {
        let own = self.world.fields.get(field).ok_or(Trouble::Shape)?;
        let free = self.sampled.fields.get(field).and_then(Option::as_ref).ok_or(Trouble::Shape)?;
        let mut tensor = free.tensor(&self.ring)?;
        if own.traceless {
            tensor = self.without_trace(tensor, &own.slots)?;
        }
        if own.small {
            tensor = tensor.times(&Jet::variable(&self.ring, Variable::Small(0), N::ZERO)?)?;
        }
        Ok(tensor)
    }

    /// `T_{ij..} - 1/n g_{ij} g^{kl} T_{kl..}`, the levels as they are.
    fn without_trace(&self, tensor: Tensor<N>, slots: &[(usize, Level)]) -> Outcome<Tensor<N>> {
        let [(family, first), (other, second), ..] = slots else { return Err(Trouble::Shape) };
        let size = self.families.size(*family)?;
        let unit = || crate::symbols::delta(&self.ring, size);
        let (metric, inverse) = match (first, second) {
            (Level::Down, Level::Down) | (Level::Up, Level::Up) if self.families.metric(*family).is_some() => {
                let space = self.space_of(*family)?;
                let pair = (space.metric().clone(), space.inverse().clone());
                if *first == Level::Down { pair } else { (pair.1, pair.0) }
            }
            _ => (unit()?, unit()?),
        };
        if family != other {
            return Err(Trouble::Shape);
        }
        let count = Label::try_from(tensor.lengths().len()).map_err(|_| Trouble::Shape)?;
        let all: Vec<Label> = (0..count).collect();
        let rest: Vec<Label> = (2..count).collect();
        let trace = self.contract(&[(&inverse, &[0, 1]), (&tensor, &all)], &rest)?;
        let share = N::from_integer(size as i64).inverse().ok_or(Trouble::ZeroDivisor)?;
        tensor.minus(&metric.outer(&trace)?.scaled(share))
    }

    /// A tensor with its slots on other levels, moved by the metrics of their families.
    pub(super) fn on_levels(&self, source: Source, natural: &[Slot], levels: &[Level]) -> Outcome<Rc<Tensor<N>>> {
        let own = self.tensor(source)?;
        let moves = natural.iter().zip(levels).any(|(slot, level)| slot.moves_to(*level));
        if !moves {
            return Ok(own);
        }
        let key = (source, levels.to_vec());
        if let Some(tensor) = self.moved.borrow().get(&key) {
            return Ok(tensor.clone());
        }
        let mut tensor = (*own).clone();
        for (place, (slot, level)) in natural.iter().zip(levels).enumerate() {
            if slot.moves_to(*level) {
                tensor = self.moved_slot(&tensor, place, slot.family, *level)?;
            }
        }
        let tensor = Rc::new(tensor);
        self.moved.borrow_mut().insert(key, tensor.clone());
        Ok(tensor)
    }

    /// A tensor with one slot brought to a level from the other.
    pub(super) fn moved_slot(&self, tensor: &Tensor<N>, place: usize, family: usize, to: Level) -> Outcome<Tensor<N>> {
        let space = self.space_of(family)?;
        let by = if to == Level::Up { space.inverse() } else { space.metric() };
        let count = Label::try_from(tensor.lengths().len()).map_err(|_| Trouble::Shape)?;
        let place = Label::try_from(place).map_err(|_| Trouble::Shape)?;
        let free: Vec<Label> = (0..count).collect();
        let labels: Vec<Label> = free.iter().map(|label| if *label == place { count } else { *label }).collect();
        self.contract(&[(tensor, &labels), (by, &[place, count])], &free)
    }

    /// A contraction that is paid for.
    pub(super) fn contract(&self, factors: &[Factor<N>], free: &[Label]) -> Outcome<Tensor<N>> {
        if let [_] = factors {
            return contract(factors, free);
        }
        let plan = planned(factors, free)?;
        self.meter.spend(plan.cost().multiplications)?;
        evaluated(factors, &plan, self.meter.step())
    }
}
