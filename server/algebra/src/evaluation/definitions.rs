//! What definitions stand for: a body evaluated once, or several bodies that define one name component by
//! component (`g_{00} = ..`, `g_{0i} = ..`, `g_{ij} = ..`).
//!
//! Definitions of one name with the same levels belong together. A use with members exactly where one of them has
//! them is that body alone; any other use is the whole array, each slot of the largest of their families. Of a
//! metric, a component that nobody defines is that with its indices exchanged.

use super::families::Families;
use super::point::{Point, Source};
use super::slots::{labels_of, natural};
use super::{Value, evaluate, is_nothing};
use crate::expression::{Definition, Filling, Index};
use crate::jet::Jet;
use crate::number::Number;
use crate::tensor::Tensor;
use crate::trouble::{Outcome, Trouble};

/// The ranges of the slots, and the components in row-major order, as far as they are defined.
type Components<N> = (Vec<usize>, Vec<Option<Jet<N>>>);

impl<N: Number> Point<'_, N> {
    /// Evaluates what is asked for in the order of definitions, so that no body waits for a long chain of others.
    pub(crate) fn prepare(&self) {
        for (definition, need) in self.needs.definitions.iter().enumerate() {
            if need.is_some() {
                // A trouble is kept, and met again by whoever uses it.
                let _ = self.body(definition);
            }
        }
    }

    /// A definition in use.
    pub(super) fn defined(&self, definition: usize, slots: &[Index]) -> Outcome<Value<N>> {
        let own = self.world.definitions.get(definition).ok_or(Trouble::Shape)?;
        let group = Families::group(self.world, definition);
        let bodies = group.iter().filter_map(|member| Some((*member, self.world.definitions.get(*member)?)));
        let alone = bodies.clone().find(|(_, body)| self.is_body_alone(body, slots));
        if let Some((member, body)) = alone {
            let labelled = |index: &&Index| matches!(index.filling, Filling::Label(_));
            let own = natural(body.free.iter().filter(labelled).map(|index| (index.family, index.level)));
            let used: Vec<Index> =
                body.free.iter().zip(slots).filter(|(own, _)| labelled(own)).map(|(_, index)| *index).collect();
            return self.filled(Source::Definition(member), &own, &used);
        }
        let first = group.first().copied().ok_or(Trouble::Shape)?;
        let families = self.whole_families(&group)?;
        let own = natural(families.into_iter().zip(own.free.iter().map(|index| index.level)));
        self.filled(Source::Definitions(first), &own, slots)
    }

    /// Whether a use asks for the components of one body and for no others.
    fn is_body_alone(&self, body: &Definition, slots: &[Index]) -> bool {
        let whole = body.free.iter().all(|own| matches!(own.filling, Filling::Label(_)));
        body.free.len() == slots.len()
            && body.free.iter().zip(slots).all(|(own, index)| match (own.filling, index.filling) {
                (Filling::Member(a), Filling::Member(b)) => {
                    (a, own.family) == (b, index.family) && own.level == index.level
                }
                (Filling::Member(_), _) => false,
                (Filling::Label(_), _) => {
                    (whole || own.level == index.level) && self.families.range(index.family, own.family).is_ok()
                }
            })
    }

    /// The components of one body, a slot for each label on its left side.
    pub(super) fn body(&self, definition: usize) -> Outcome<std::rc::Rc<Tensor<N>>> {
        self.on_levels(Source::Definition(definition), &[], &[])
    }

    pub(super) fn evaluated_body(&self, definition: usize) -> Outcome<Tensor<N>> {
        let own = self.world.definitions.get(definition).ok_or(Trouble::Shape)?;
        let labelled = own.free.iter().filter_map(|index| match index.filling {
            Filling::Label(label) => Some((label, index)),
            Filling::Member(_) => None,
        });
        let labelled: Vec<_> = labelled.collect();
        if is_nothing(&own.body) {
            let sizes = labelled.iter().map(|(_, index)| self.families.size(index.family));
            return Tensor::zero(&self.ring, self.ring.top(), &sizes.collect::<Outcome<Vec<_>>>()?);
        }
        let Value { tensor, slots } = evaluate(&own.body, self)?;
        let places = labelled.iter().map(|(label, index)| {
            let fits = |slot: &super::Slot| slot.family == index.family && slot.level == index.level;
            let place = labels_of(&slots).iter().position(|other| other == label).ok_or(Trouble::Shape)?;
            if slots.get(place).is_some_and(fits) { Ok(place) } else { Err(Trouble::Shape) }
        });
        tensor.permuted(&places.collect::<Outcome<Vec<_>>>()?)
    }

    /// For each slot the largest of the families that it has in a group.
    fn whole_families(&self, group: &[usize]) -> Outcome<Vec<usize>> {
        let families = |member: &usize| {
            let own = self.world.definitions.get(*member).ok_or(Trouble::Shape)?;
            Ok(own.free.iter().map(|index| index.family).collect::<Vec<_>>())
        };
        let all = group.iter().map(families).collect::<Outcome<Vec<_>>>()?;
        let larger = |a: Vec<usize>, b: Vec<usize>| {
            a.into_iter().zip(b).map(|(a, b)| self.families.larger(a, b)).collect::<Vec<_>>()
        };
        all.into_iter().reduce(larger).ok_or(Trouble::Shape)
    }

    /// All components of a group; `Shape` if one is missing.
    pub(super) fn assembled(&self, first: usize) -> Outcome<Tensor<N>> {
        let group = Families::group(self.world, first);
        let families = self.whole_families(&group)?;
        let (lengths, components) = self.components(&group, &families)?;
        let jets = components.into_iter().map(|jet| jet.ok_or(Trouble::Shape)).collect::<Outcome<Vec<_>>>()?;
        Tensor::from_jets(&lengths, &jets)
    }

    /// The metric that a group of definitions gives.
    pub(super) fn defined_metric(&self, definition: usize, family: usize) -> Outcome<Tensor<N>> {
        let group = Families::group(self.world, definition);
        let (lengths, components) = self.components(&group, &[family, family])?;
        let size = self.families.size(family)?;
        let jet = |place: usize| {
            let exchanged = place % size * size + place / size;
            let at = |place: usize| components.get(place).cloned().flatten();
            at(place).or_else(|| at(exchanged)).ok_or(Trouble::Shape)
        };
        Tensor::from_jets(&lengths, &(0..size * size).map(jet).collect::<Outcome<Vec<_>>>()?)
    }

    /// The components that the bodies of a group define.
    fn components(&self, group: &[usize], families: &[usize]) -> Outcome<Components<N>> {
        let lengths = families.iter().map(|family| self.families.size(*family)).collect::<Outcome<Vec<_>>>()?;
        let size = crate::tensor::size(&lengths, self.ring.width(self.ring.top()))?;
        let mut components: Vec<Option<Jet<N>>> =
            vec![None; size.checked_div(self.ring.width(self.ring.top())).unwrap_or(0)];
        for member in group {
            let own = self.world.definitions.get(*member).ok_or(Trouble::Shape)?;
            if own.free.len() != lengths.len() {
                return Err(Trouble::Shape);
            }
            let body = self.body(*member)?;
            let (from, steps) = self.placed(&own.free, families, &lengths)?;
            let places = crate::tensor::places(body.lengths(), &steps);
            for (number, place) in places.into_iter().enumerate() {
                if let Some(entry) = components.get_mut(from + place) {
                    *entry = body.at(number);
                }
            }
        }
        Ok((lengths, components))
    }

    /// Where the components of a body stand in the whole array: the place of the first, and for each label how far
    /// apart two neighbours are.
    fn placed(&self, free: &[Index], families: &[usize], lengths: &[usize]) -> Outcome<(usize, Vec<usize>)> {
        let mut first = 0;
        let mut steps = Vec::new();
        for ((index, family), step) in free.iter().zip(families).zip(crate::tensor::strides(lengths)) {
            let (from, count) = self.families.range(index.family, *family)?;
            match index.filling {
                Filling::Member(member) if member >= count => return Err(Trouble::Dimension),
                Filling::Member(member) => first += (from + member) * step,
                Filling::Label(_) => {
                    first += from * step;
                    steps.push(step);
                }
            }
        }
        Ok((first, steps))
    }
}
