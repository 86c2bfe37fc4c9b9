//! The labels of a monomial, taken out of its slots: what renaming changes in them and what it does not.

use std::collections::BTreeMap;

use super::monomial::{Label, Level, Slot};

/// What a slot holds, read in order. The least: free labels, then components, then dummies that stood before, then
/// a new dummy.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(super) enum Code {
    /// A free label or a component, by its rank in `Content::fixed`.
    Fixed(usize),
    /// A dummy, by the order of first places, and its rank in `Content::kinds`.
    Dummy { number: usize, kind: usize },
}

/// What no renaming changes in a dummy's end; a movable one has no level.
type Kind = (u16, bool, Level);

/// One end of a label, named by the slot in which it stood at first.
#[derive(Clone, Copy, Debug)]
pub(super) enum End {
    Fixed(usize),
    Dummy { dummy: usize, kind: usize, partner: usize },
}

/// The labels of the monomial.
pub(super) struct Content {
    ends: Vec<End>,
    /// How many dummies there are.
    pub(super) dummies: usize,
    fixed: Vec<Slot>,
    kinds: Vec<Kind>,
}

fn kind(slot: &Slot) -> Option<Kind> {
    match slot.label {
        Label::Dummy { family, movable: true, .. } => Some((family, true, Level::Neutral)),
        Label::Dummy { family, movable: false, .. } => Some((family, false, slot.level)),
        Label::Free(_) | Label::Component(_) => None,
    }
}

impl Content {
    /// The labels that stand in the slots, in order.
    pub(super) fn new(slots: &[Slot]) -> Self {
        let mut kinds: Vec<Kind> = slots.iter().filter_map(kind).collect();
        let mut fixed: Vec<Slot> = slots.iter().filter(|slot| kind(slot).is_none()).copied().collect();
        kinds.sort_unstable();
        kinds.dedup();
        fixed.sort_unstable();
        fixed.dedup();
        let mut places: BTreeMap<Label, (usize, Vec<usize>)> = BTreeMap::new();
        for (place, slot) in slots.iter().enumerate().filter(|(_, slot)| kind(slot).is_some()) {
            let dummy = places.len();
            places.entry(slot.label).or_insert((dummy, Vec::new())).1.push(place);
        }
        let end = |(place, slot): (usize, &Slot)| {
            let Some(own) = kind(slot) else { return End::Fixed(rank(&fixed, slot)) };
            let (dummy, ends) = places.get(&slot.label).map_or((0, &[][..]), |(dummy, ends)| (*dummy, &ends[..]));
            let partner = ends.iter().copied().find(|&other| other != place).unwrap_or(place);
            End::Dummy { dummy, kind: rank(&kinds, &own), partner }
        };
        Self { ends: slots.iter().enumerate().map(end).collect(), dummies: places.len(), fixed, kinds }
    }

    /// How many slots there are.
    pub(super) fn slots(&self) -> usize {
        self.ends.len()
    }

    /// The end that stood in a slot at first.
    pub(super) fn end(&self, end: usize) -> End {
        self.ends.get(end).copied().unwrap_or(End::Fixed(0))
    }

    /// The slots that a word's codes stand for; dummies are numbered from 0 in each family.
    pub(super) fn filled(&self, codes: &[Code]) -> Vec<Slot> {
        let mut numbers = BTreeMap::new();
        let mut counts = BTreeMap::new();
        let mut slots = Vec::new();
        for code in codes {
            match *code {
                Code::Fixed(rank) => slots.extend(self.fixed.get(rank)),
                Code::Dummy { number, kind } => {
                    let Some(&(family, movable, level)) = self.kinds.get(kind) else { continue };
                    let number = *numbers.entry(number).or_insert_with(|| {
                        let count = counts.entry(family).or_insert(0);
                        *count += 1;
                        *count - 1
                    });
                    slots.push(Slot { label: Label::Dummy { family, number, movable }, level });
                }
            }
        }
        slots
    }
}

fn rank<T: Ord>(sorted: &[T], item: &T) -> usize {
    sorted.partition_point(|other| other < item)
}
