//! An arrangement of a monomial's labels in its slots, settled slot by slot.

use super::colours::{self, Colours};
use super::content::{Code, Content, End};
use super::group::Motion;
use crate::symmetry::Sign;

/// An arrangement: the word that an element of `S` makes of the monomial, with its sign.
#[derive(Clone)]
pub(super) struct State {
    /// The end that stands in each slot.
    word: Vec<usize>,
    /// The numbers of the dummies that stand in the slots settled so far.
    numbers: Vec<Option<usize>>,
    settled_dummies: usize,
    /// The sign between the monomial and the word.
    pub(super) sign: Sign,
}

impl State {
    /// The word as it is given, nothing settled.
    pub(super) fn new(slots: usize, dummies: usize) -> Self {
        Self { word: (0..slots).collect(), numbers: vec![None; dummies], settled_dummies: 0, sign: Sign::Plus }
    }

    /// How the end that stands in a slot would be read if it came next.
    pub(super) fn code(&self, content: &Content, slot: usize) -> Code {
        match self.word.get(slot).map_or(End::Fixed(0), |&end| content.end(end)) {
            End::Fixed(rank) => Code::Fixed(rank),
            End::Dummy { dummy, kind, .. } => {
                let number = self.numbers.get(dummy).copied().flatten().unwrap_or(self.settled_dummies);
                Code::Dummy { number, kind }
            }
        }
    }

    /// The word moved, and the slot `base` settled.
    pub(super) fn moved(&self, content: &Content, base: usize, motion: &Motion) -> Self {
        let word: Vec<usize> =
            (0..self.word.len()).filter_map(|slot| self.word.get(motion.image(slot)).copied()).collect();
        let mut state = Self { word, sign: self.sign * motion.sign(), ..self.clone() };
        if let Some(End::Dummy { dummy, .. }) = state.word.get(base).map(|&end| content.end(end))
            && let Some(number) = state.numbers.get_mut(dummy).filter(|number| number.is_none())
        {
            *number = Some(state.settled_dummies);
            state.settled_dummies += 1;
        }
        state
    }

    /// The colours of the slots under the subgroup that has these orbitals.
    pub(super) fn colours(&self, content: &Content, orbitals: &[u32]) -> Colours {
        let mut slot_of = vec![0; self.word.len()];
        for (slot, &end) in self.word.iter().enumerate() {
            if let Some(place) = slot_of.get_mut(end) {
                *place = slot;
            }
        }
        let colour = |&end: &usize| match content.end(end) {
            End::Fixed(rank) => colours::mixed(0, rank as u64),
            End::Dummy { dummy, kind, .. } => {
                let number = self.numbers.get(dummy).copied().flatten().map_or(0, |number| number as u64 + 1);
                colours::mixed(number + 1, kind as u64)
            }
        };
        let partner = |&end: &usize| match content.end(end) {
            End::Fixed(_) => None,
            End::Dummy { partner, .. } => slot_of.get(partner).copied(),
        };
        let contents: Vec<u64> = self.word.iter().map(colour).collect();
        let partners: Vec<Option<usize>> = self.word.iter().map(partner).collect();
        colours::refine(&contents, &partners, orbitals)
    }
}
