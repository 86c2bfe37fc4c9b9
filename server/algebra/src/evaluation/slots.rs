//! Slots in use: levels, members, labels; and products, in which a label that stands twice is summed.

use super::Value;
use super::point::{Point, Source};
use crate::contraction::{Factor, Label};
use crate::expression::{Filling, Index};
use crate::geometry::Level;
use crate::number::Number;
use crate::tensor::Tensor;
use crate::trouble::{Outcome, Trouble};

/// A free slot of a value; of the natural slots of a tensor the label is its place.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct Slot {
    /// The label that fills it.
    pub label: Label,
    /// Its level.
    pub level: Level,
    /// Its family, as an index into `World::families`.
    pub family: usize,
}

impl Slot {
    /// Whether it takes a metric to bring this slot to a level.
    pub(super) fn moves_to(self, level: Level) -> bool {
        self.level != level && self.level != Level::Inert && level != Level::Inert
    }
}

/// Natural slots by family and level.
pub(super) fn natural(slots: impl IntoIterator<Item = (usize, Level)>) -> Vec<Slot> {
    slots.into_iter().zip(0..).map(|((family, level), label)| Slot { label, level, family }).collect()
}

/// A factor: an array and its slots.
pub(super) type Labelled<N> = (Tensor<N>, Vec<Slot>);

impl<N: Number> Point<'_, N> {
    /// A tensor with its slots filled.
    pub(super) fn filled(&self, source: Source, natural: &[Slot], indices: &[Index]) -> Outcome<Value<N>> {
        if natural.len() != indices.len() {
            return Err(Trouble::Shape);
        }
        let levels: Vec<Level> = indices.iter().map(|index| index.level).collect();
        let tensor = self.on_levels(source, natural, &levels)?;
        let families: Vec<usize> = natural.iter().map(|slot| slot.family).collect();
        self.labelled(&tensor, &families, indices)
    }

    /// An array whose slots, of these families, are filled; levels are as they are.
    pub(super) fn labelled(&self, tensor: &Tensor<N>, families: &[usize], indices: &[Index]) -> Outcome<Value<N>> {
        let mut tensor = tensor.clone();
        let mut slots = Vec::with_capacity(indices.len());
        // From the last on, so that places stay right when a slot goes.
        for (place, (index, family)) in indices.iter().zip(families).enumerate().rev() {
            let (from, count) = self.families.range(index.family, *family)?;
            match index.filling {
                Filling::Member(member) if member >= count => return Err(Trouble::Dimension),
                Filling::Member(member) => tensor = tensor.fixed(place, from + member).ok_or(Trouble::Shape)?,
                Filling::Label(label) => {
                    if index.family != *family {
                        tensor = tensor.ranged(place, from, count).ok_or(Trouble::Shape)?;
                    }
                    slots.push(Slot { label, level: index.level, family: index.family });
                }
            }
        }
        slots.reverse();
        self.multiplied(vec![(tensor, slots)])
    }

    /// The product, summed over labels that stand twice; free labels ascending. `Shape` for a label that stands
    /// three times, and for two ends that do not go together.
    pub(super) fn multiplied(&self, factors: Vec<Labelled<N>>) -> Outcome<Value<N>> {
        let mut slots: Vec<Slot> = factors.iter().flat_map(|(_, slots)| slots).copied().collect();
        slots.sort_unstable_by_key(|slot| slot.label);
        let mut free: Vec<Slot> = Vec::new();
        for same in slots.chunk_by(|a, b| a.label == b.label) {
            match same {
                [slot] => free.push(*slot),
                [a, b] if self.sums(*a, *b) => {}
                _ => return Err(Trouble::Shape),
            }
        }
        if let [(_, own)] = &factors[..]
            && *own == free
        {
            let tensor = factors.into_iter().next().map(|(tensor, _)| tensor).ok_or(Trouble::Shape)?;
            return Ok(Value { tensor, slots: free });
        }
        let labels: Vec<Vec<Label>> = factors.iter().map(|(_, slots)| labels_of(slots)).collect();
        let operands: Vec<Factor<N>> =
            factors.iter().zip(&labels).map(|((tensor, _), labels)| (tensor, &labels[..])).collect();
        let tensor = self.contract(&operands, &labels_of(&free))?;
        Ok(Value { tensor, slots: free })
    }

    /// Whether two slots may be the ends of a sum.
    fn sums(&self, a: Slot, b: Slot) -> bool {
        let levels_fit = match (a.level, b.level) {
            (Level::Inert, _) | (_, Level::Inert) => true,
            (a_level, b_level) => a_level != b_level || self.families.metric(a.family).is_none(),
        };
        a.family == b.family && levels_fit
    }
}

pub(super) fn labels_of(slots: &[Slot]) -> Vec<Label> {
    slots.iter().map(|slot| slot.label).collect()
}
