//! Monomials: products of kernels whose slots carry labels. Plain data, checked once when it is put together.

use std::collections::BTreeMap;
use std::sync::Arc;

use crate::symmetry::{MOST_SLOTS, SlotSymmetry};

/// The most slots of one monomial.
pub const MONOMIAL_SLOTS: usize = 128;

/// What stands in a slot.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Label {
    /// A free label, which stands once.
    Free(u32),
    /// A fixed value, which may stand any number of times; equal ones on one level are interchangeable.
    Component(u32),
    /// A summed label, which stands exactly twice. Its name is the pair of family and number, and it is renamed
    /// within its family alone.
    Dummy {
        /// Which letters may take its place.
        family: u16,
        /// The name within the family.
        number: u32,
        /// Whether a metric moves the family's indices: then the levels of its ends do not matter.
        movable: bool,
    },
}

/// The level of a label. It belongs to the label and moves with it.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Level {
    /// No level: a Cartesian index, or the end of a movable dummy in a normal form.
    #[default]
    Neutral,
    /// Upper.
    Up,
    /// Lower.
    Down,
}

/// A slot with its content.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Slot {
    /// What stands there.
    pub label: Label,
    /// On which level.
    pub level: Level,
}

/// Whether exchanging two factors costs a sign.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Parity {
    /// It costs nothing.
    #[default]
    Commuting,
    /// It costs a sign for two factors of this parity, equal or not.
    Anticommuting,
}

/// A kernel with its slots. Factors are ordered by kernel first, in normal forms too.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Factor {
    /// Which kernel: factors with equal kernel, parity, symmetry and number of slots are the same tensor.
    pub kernel: u32,
    /// What stands in the slots, in order.
    pub slots: Vec<Slot>,
    /// How it passes other factors.
    pub parity: Parity,
    /// The symmetry of the kernel, for as many slots.
    pub symmetry: Arc<SlotSymmetry>,
}

impl Factor {
    /// What two interchangeable factors agree in, by which a normal form sorts them.
    pub(super) fn kind(&self) -> (u32, Parity, usize, &SlotSymmetry) {
        (self.kernel, self.parity, self.slots.len(), &self.symmetry)
    }
}

/// A product of factors.
///
/// Invariant: each factor has as many slots as its symmetry, a free label stands once, a dummy stands twice, and
/// there are at most `MONOMIAL_SLOTS` slots.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Monomial {
    factors: Vec<Factor>,
}

/// Why factors are no monomial.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Malformed {
    /// The factor of this number has more or fewer slots than its symmetry, or more than `MOST_SLOTS`.
    SlotCount(usize),
    /// A free label that does not stand once, or a dummy that does not stand twice.
    Repetition(Label),
    /// More than `MONOMIAL_SLOTS` slots.
    TooManySlots,
}

impl Monomial {
    /// The product of the factors in this order, or the first reason why it is none. Two dummies of one family
    /// and number, one movable and one not, are two labels that stand once.
    pub fn new(factors: Vec<Factor>) -> Result<Self, Malformed> {
        let fits = |factor: &Factor| factor.slots.len() == factor.symmetry.slots() && factor.slots.len() <= MOST_SLOTS;
        if let Some(odd) = factors.iter().position(|factor| !fits(factor)) {
            return Err(Malformed::SlotCount(odd));
        }
        let mut counts = BTreeMap::new();
        for slot in factors.iter().flat_map(|factor| &factor.slots) {
            *counts.entry(slot.label).or_insert(0_usize) += 1;
        }
        let wrong = |(label, count): (&Label, &usize)| match label {
            Label::Free(_) if *count != 1 => Some(*label),
            Label::Dummy { .. } if *count != 2 => Some(*label),
            _ => None,
        };
        if let Some(label) = counts.iter().find_map(wrong) {
            return Err(Malformed::Repetition(label));
        }
        if counts.values().sum::<usize>() > MONOMIAL_SLOTS {
            return Err(Malformed::TooManySlots);
        }
        Ok(Self { factors })
    }

    /// For factors that are known to keep the invariant.
    pub(super) fn trusted(factors: Vec<Factor>) -> Self {
        Self { factors }
    }

    /// The factors in order.
    pub fn factors(&self) -> &[Factor] {
        &self.factors
    }

    /// All slots, factor by factor.
    pub fn slots(&self) -> impl Iterator<Item = &Slot> {
        self.factors.iter().flat_map(|factor| &factor.slots)
    }

    /// The monomial with another content in each slot; the caller keeps the invariant.
    pub(super) fn refilled(&self, content: impl Fn(&Slot) -> Slot) -> Self {
        let refill = |factor: &Factor| Factor { slots: factor.slots.iter().map(&content).collect(), ..factor.clone() };
        Self { factors: self.factors.iter().map(refill).collect() }
    }
}

/// A monomial in normal form; only `normal_form` makes one.
///
/// Dummies are numbered from 0 in each family by their first place, and movable ones have no level.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Canonical(Monomial);

impl Canonical {
    pub(super) fn new(monomial: Monomial) -> Self {
        Self(monomial)
    }

    /// The form as a monomial, to be shown or computed with.
    pub fn monomial(&self) -> &Monomial {
        &self.0
    }
}
