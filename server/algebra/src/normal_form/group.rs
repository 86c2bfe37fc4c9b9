//! The group `S` of a monomial: the symmetries of its factors, and the exchange of equal factors.
//!
//! Its stabiliser chain needs no computation. The slots of all factors are base points in order; equal factors
//! stand side by side. While the first slot of a factor is open, the factor may be exchanged with a later equal
//! one; from then on, its own chain serves.

use super::monomial::{Factor, Parity};
use crate::symmetry::{Sign, SignedPermutation};

/// An element of the group: a symmetry of the factor whose slots begin at `offset`, and after it perhaps the
/// exchange of two runs of slots.
#[derive(Clone, Copy, Debug)]
pub(super) struct Motion<'a> {
    inner: Option<(usize, &'a SignedPermutation)>,
    swap: Option<Swap>,
}

/// Two runs of `slots` slots, at `first` and, after it, at `second`.
#[derive(Clone, Copy, Debug)]
struct Swap {
    first: usize,
    second: usize,
    slots: usize,
    sign: Sign,
}

impl Swap {
    fn image(self, slot: usize) -> usize {
        if (self.first..self.first + self.slots).contains(&slot) {
            slot - self.first + self.second
        } else if (self.second..self.second + self.slots).contains(&slot) {
            slot - self.second + self.first
        } else {
            slot
        }
    }
}

impl Motion<'_> {
    /// Where a slot goes.
    pub(super) fn image(&self, slot: usize) -> usize {
        let moved = match self.inner {
            Some((offset, inner)) if slot >= offset => offset + inner.image(slot - offset),
            _ => slot,
        };
        self.swap.map_or(moved, |swap| swap.image(moved))
    }

    /// The sign that it costs.
    pub(super) fn sign(&self) -> Sign {
        let inner = self.inner.map_or(Sign::Plus, |(_, inner)| inner.sign());
        inner * self.swap.map_or(Sign::Plus, |swap| swap.sign)
    }
}

/// A factor by the place of its slots among all slots.
struct Block<'a> {
    factor: &'a Factor,
    offset: usize,
}

/// The group of factors that are sorted by kind.
pub(super) struct Group<'a> {
    blocks: Vec<Block<'a>>,
    slots: usize,
}

impl<'a> Group<'a> {
    /// The factors must be sorted by `Factor::kind`.
    pub(super) fn new(factors: &'a [Factor]) -> Self {
        let mut slots = 0;
        let mut blocks = Vec::new();
        for factor in factors {
            blocks.push(Block { factor, offset: slots });
            slots += factor.slots.len();
        }
        Self { blocks, slots }
    }

    /// How many slots there are.
    pub(super) fn slots(&self) -> usize {
        self.slots
    }

    /// Whether the group holds the identity with a minus.
    pub(super) fn vanishes(&self) -> bool {
        let twins = self.blocks.iter().zip(self.blocks.iter().skip(1));
        // Two equal anticommuting factors without slots.
        let nilpotent = |(one, other): (&Block, &Block)| {
            let odd = one.factor.parity == Parity::Anticommuting && one.factor.slots.is_empty();
            odd && one.factor.kind() == other.factor.kind()
        };
        self.blocks.iter().any(|block| block.factor.symmetry.vanishes()) || twins.into_iter().any(nilpotent)
    }

    /// For every slot to which the subgroup that fixes the slots before `base` takes `base`, that slot and a
    /// motion that does it. Ascending.
    pub(super) fn steps(&self, base: usize) -> Vec<(usize, Motion<'a>)> {
        let holds = |block: &&Block| (block.offset..block.offset + block.factor.slots.len()).contains(&base);
        let Some(own) = self.blocks.iter().find(holds) else { return Vec::new() };
        let depth = base - own.offset;
        let Some(level) = own.factor.symmetry.chain().levels().get(depth) else { return Vec::new() };
        let equal = |block: &&Block| block.offset > own.offset && block.factor.kind() == own.factor.kind();
        let later = self.blocks.iter().filter(equal).filter(|_| depth == 0).map(|block| Some(swap(own, block)));
        let mut steps = Vec::new();
        for swap in std::iter::once(None).chain(later) {
            for (_, element) in level.orbit() {
                let motion = Motion { inner: Some((own.offset, element)), swap };
                steps.push((motion.image(base), motion));
            }
        }
        steps
    }

    /// What generates the subgroup that fixes the slots before `base`.
    fn generators(&self, base: usize) -> Vec<Motion<'a>> {
        let mut generators = Vec::new();
        for (place, block) in self.blocks.iter().enumerate() {
            let depth = base.saturating_sub(block.offset);
            if let Some(level) = block.factor.symmetry.chain().levels().get(depth) {
                let inner = level.generators().iter();
                generators.extend(inner.map(|inner| Motion { inner: Some((block.offset, inner)), swap: None }));
            }
            let next = self.blocks.get(place + 1).filter(|next| next.factor.kind() == block.factor.kind());
            if block.offset >= base
                && let Some(next) = next
            {
                generators.push(Motion { inner: None, swap: Some(swap(block, next)) });
            }
        }
        generators
    }

    /// The orbits of the subgroup that fixes the slots before `base`, on pairs of slots: the number of the orbit
    /// of `(p, q)` stands at place `p * slots + q`. The numbers depend on the group alone.
    pub(super) fn orbitals(&self, base: usize) -> Vec<u32> {
        let generators = self.generators(base);
        let pairs = self.slots * self.slots;
        let mut orbits: Vec<Option<u32>> = vec![None; pairs];
        for (number, start) in (0..).zip(0..pairs) {
            let mut pending = vec![start];
            while let Some(pair) = pending.pop() {
                let Some(orbit) = orbits.get_mut(pair).filter(|orbit| orbit.is_none()) else { continue };
                *orbit = Some(number);
                let (p, q) = (pair / self.slots, pair % self.slots);
                pending.extend(generators.iter().map(|motion| motion.image(p) * self.slots + motion.image(q)));
            }
        }
        orbits.into_iter().flatten().collect()
    }
}

fn swap(one: &Block, other: &Block) -> Swap {
    let sign = if one.factor.parity == Parity::Anticommuting { Sign::Minus } else { Sign::Plus };
    Swap { first: one.offset, second: other.offset, slots: one.factor.slots.len(), sign }
}
