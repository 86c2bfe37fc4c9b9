//! Symmetries of the slots of a tensor: which permutations of its labels change it by a sign at most.
//!
//! A symmetry is a group of signed permutations, given by generators. The one idea: the group is kept as a
//! stabiliser chain (`symmetry/chain.rs`), so that its order, membership with the sign, and the walk over its
//! cosets that the normal form needs are cheap though the group may have `n!` elements.
//!
//! Traps:
//! - A permutation acts on *slots*. Rearranging the labels `w` by `s` puts `w[s(q)]` into slot `q`, and
//!   `s in group` says `T[w rearranged by s] = sign(s) T[w]`. Rearranging by `a` and then by `b` is rearranging
//!   by `a.after(b)`.
//! - A label moves together with its level. A symmetry between an upper and a lower slot is true only where a
//!   metric moves the index; who declares the symmetry answers for that.
//! - A group may hold the identity with a minus: then every tensor of that symmetry is zero (`vanishes`).
//!
//! Slots are counted from 0.

mod chain;
mod permutation;

use std::cmp::Ordering;
use std::hash::{Hash, Hasher};

pub(crate) use chain::Chain;
pub use permutation::{MOST_SLOTS, Sign, SignedPermutation};

/// A group of signed permutations of the slots of one kernel.
///
/// Two symmetries are equal if they have the same slots and generators; the same group by other generators is
/// another value. One kernel should have one symmetry.
#[derive(Clone, Debug)]
pub struct SlotSymmetry {
    slots: usize,
    /// Sorted, without the plain identity.
    generators: Vec<SignedPermutation>,
    /// Follows from the generators.
    chain: Chain,
}

impl SlotSymmetry {
    /// The group that the generators span, on as many slots; generators on fewer leave the last slots alone.
    /// Nothing if there are more than `MOST_SLOTS` slots or if a generator has more than `slots`.
    pub fn new(slots: usize, generators: &[SignedPermutation]) -> Option<Self> {
        let fits = slots <= MOST_SLOTS && generators.iter().all(|generator| generator.slots() <= slots);
        let embedded = || generators.iter().filter_map(|generator| generator.embedded(0, slots));
        fits.then(|| Self::spanned(slots, embedded().collect()))
    }

    fn spanned(slots: usize, mut generators: Vec<SignedPermutation>) -> Self {
        generators.retain(|generator| !generator.is_identity() || generator.sign() == Sign::Minus);
        generators.sort();
        generators.dedup();
        let chain = Chain::new(slots, &generators);
        Self { slots, generators, chain }
    }

    /// No symmetry. Slots beyond `MOST_SLOTS` are cut off; a factor with them is then refused as malformed.
    pub fn none(slots: usize) -> Self {
        Self::spanned(slots.min(MOST_SLOTS), Vec::new())
    }

    /// Symmetric in the slots `which`; nothing if one of them is missing or named twice.
    pub fn symmetric(slots: usize, which: &[usize]) -> Option<Self> {
        Self::exchanging(slots, which, Sign::Plus)
    }

    /// Antisymmetric in the slots `which`; nothing if one of them is missing or named twice.
    pub fn antisymmetric(slots: usize, which: &[usize]) -> Option<Self> {
        Self::exchanging(slots, which, Sign::Minus)
    }

    fn exchanging(slots: usize, which: &[usize], sign: Sign) -> Option<Self> {
        let mut sorted = which.to_vec();
        sorted.sort_unstable();
        let pairs = sorted.iter().zip(sorted.iter().skip(1));
        let generators: Option<Vec<_>> =
            pairs.map(|(&a, &b)| SignedPermutation::exchange(slots, &[a], &[b], sign)).collect();
        let last = sorted.last().copied().unwrap_or_default();
        (last < slots.max(1)).then_some(())?;
        Self::new(slots, &generators?)
    }

    /// The Riemann tensor with four slots on one level, `R_abcd`: antisymmetric in each pair, symmetric under
    /// exchange of the pairs (8 elements). The cyclic identity is no slot symmetry and is not contained.
    /// Source: Misner, Thorne and Wheeler, "Gravitation" (1973), chapter 13 (from memory).
    pub fn riemann() -> Self {
        let parts = [
            SignedPermutation::exchange(4, &[0], &[1], Sign::Minus),
            SignedPermutation::exchange(4, &[2], &[3], Sign::Minus),
            SignedPermutation::exchange(4, &[0, 1], &[2, 3], Sign::Plus),
        ];
        Self::spanned(4, parts.into_iter().flatten().collect())
    }

    /// The Christoffel symbol of a metric, `Gamma^a_bc`: symmetric in its last two slots of three.
    pub fn christoffel() -> Self {
        Self::spanned(3, SignedPermutation::exchange(3, &[1], &[2], Sign::Plus).into_iter().collect())
    }

    /// The group spanned by both, on the larger number of slots.
    #[must_use]
    pub fn and(&self, other: &Self) -> Self {
        let slots = self.slots.max(other.slots);
        let both = self.generators.iter().chain(&other.generators);
        Self::spanned(slots, both.filter_map(|generator| generator.embedded(0, slots)).collect())
    }

    /// The same symmetry for a kernel with `slots` slots, of which it takes those from `offset` on: a
    /// derivative's slot put before those of a tensor, say. Nothing if it does not fit.
    pub fn embedded(&self, offset: usize, slots: usize) -> Option<Self> {
        let fits = offset.checked_add(self.slots).is_some_and(|end| end <= slots && slots <= MOST_SLOTS);
        let moved = || self.generators.iter().filter_map(|generator| generator.embedded(offset, slots));
        fits.then(|| Self::spanned(slots, moved().collect()))
    }

    /// How many slots there are, at most `MOST_SLOTS`.
    pub fn slots(&self) -> usize {
        self.slots
    }

    /// The generators, sorted.
    pub fn generators(&self) -> &[SignedPermutation] {
        &self.generators
    }

    /// How many permutations the group has, signs not counted; nothing if that passes 128 bits.
    pub fn order(&self) -> Option<u128> {
        self.chain.order()
    }

    /// The sign with which the group contains a permutation, whose own sign is not looked at. Nothing if it is
    /// not contained. In a group that vanishes both signs are true, and one of them is given.
    pub fn sign_of(&self, permutation: &SignedPermutation) -> Option<Sign> {
        self.chain.sign_of(permutation)
    }

    /// Whether the group contains the identity with a minus, so that every such tensor is zero.
    pub fn vanishes(&self) -> bool {
        self.chain.vanishes()
    }

    /// The sign under exchange of two slots, all others staying: nothing if that is no symmetry.
    pub fn exchange_sign(&self, a: usize, b: usize) -> Option<Sign> {
        self.sign_of(&SignedPermutation::exchange(self.slots, &[a], &[b], Sign::Plus)?)
    }

    pub(crate) fn chain(&self) -> &Chain {
        &self.chain
    }
}

impl PartialEq for SlotSymmetry {
    fn eq(&self, other: &Self) -> bool {
        self.cmp(other) == Ordering::Equal
    }
}

impl Eq for SlotSymmetry {}

impl PartialOrd for SlotSymmetry {
    fn partial_cmp(&self, other: &Self) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

impl Ord for SlotSymmetry {
    fn cmp(&self, other: &Self) -> Ordering {
        if std::ptr::eq(self, other) {
            return Ordering::Equal;
        }
        self.slots.cmp(&other.slots).then_with(|| self.generators.cmp(&other.generators))
    }
}

impl Hash for SlotSymmetry {
    fn hash<H: Hasher>(&self, state: &mut H) {
        self.slots.hash(state);
        self.generators.hash(state);
    }
}

#[cfg(test)]
mod tests;
