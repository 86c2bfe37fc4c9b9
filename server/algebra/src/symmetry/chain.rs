//! The stabiliser chain of a group of signed permutations, with every slot a base point in order.
//!
//! Level `b` belongs to the subgroup that fixes the slots before `b`. It has generators, and for every slot `p`
//! to which that subgroup takes `b` one element that does it. An element of the group is then a product of one
//! such element for each level, in exactly one way, up to the sign.
//!
//! Source: the Schreier-Sims method; Sims (1970); Butler, "Fundamental Algorithms for Permutation Groups" (1991),
//! and Holt, Eick and O'Brien, "Handbook of Computational Group Theory" (2005), section 4.4.2 (from memory). A
//! sign needs nothing more: what sifts down to the identity with a minus shows that the group vanishes.

use super::permutation::{Sign, SignedPermutation};

/// The subgroup that fixes the slots before `base`.
#[derive(Clone, Debug)]
pub(crate) struct Level {
    base: usize,
    generators: Vec<SignedPermutation>,
    /// At place `p` the element that takes `base` to `p`, if there is one.
    transversal: Vec<Option<SignedPermutation>>,
}

impl Level {
    fn new(base: usize, slots: usize, generators: &[SignedPermutation]) -> Self {
        let fixes = |generator: &&SignedPermutation| (0..base).all(|slot| generator.image(slot) == slot);
        let generators = generators.iter().filter(fixes).cloned().collect();
        let mut level = Self { base, generators, transversal: vec![None; slots] };
        level.reach();
        level
    }

    /// Finds the transversal anew.
    fn reach(&mut self) {
        let slots = self.transversal.len();
        self.transversal.fill(None);
        let mut pending = vec![SignedPermutation::identity(slots)];
        while let Some(element) = pending.pop() {
            let Some(place) = self.transversal.get_mut(element.image(self.base)) else { continue };
            if place.is_none() {
                pending.extend(self.generators.iter().rev().map(|generator| generator.after(&element)));
                *place = Some(element);
            }
        }
    }

    /// What generates the subgroup.
    pub(crate) fn generators(&self) -> &[SignedPermutation] {
        &self.generators
    }

    /// Every slot that `base` can go to, ascending, with the element that takes it there.
    pub(crate) fn orbit(&self) -> impl Iterator<Item = (usize, &SignedPermutation)> {
        self.transversal.iter().enumerate().filter_map(|(slot, element)| Some((slot, element.as_ref()?)))
    }

    fn element_to(&self, slot: usize) -> Option<&SignedPermutation> {
        self.transversal.get(slot)?.as_ref()
    }
}

/// The levels of a group, one for each slot.
#[derive(Clone, Debug)]
pub(crate) struct Chain {
    levels: Vec<Level>,
    vanishes: bool,
}

impl Chain {
    /// The chain of the group that the generators span; all of them have `slots` slots.
    pub(crate) fn new(slots: usize, generators: &[SignedPermutation]) -> Self {
        let levels = (0..slots).map(|base| Level::new(base, slots, generators)).collect();
        let vanishes = generators.iter().any(|generator| generator.is_identity() && generator.sign() == Sign::Minus);
        let mut chain = Self { levels, vanishes };
        // Invariant: the levels from `done` on are a chain of the group that the generators at `done` span. Each
        // addition makes the group of some level larger, and so the loop ends.
        let mut done = slots;
        while let Some(index) = done.checked_sub(1) {
            done = match chain.unaccounted(index) {
                None => index,
                Some((depth, element)) => {
                    chain.add(index + 1, depth, &element);
                    depth + 1
                }
            };
        }
        chain
    }

    /// The first Schreier generator of a level that the levels below it do not contain, sifted, with the level at
    /// which it fell out.
    fn unaccounted(&mut self, index: usize) -> Option<(usize, SignedPermutation)> {
        let level = self.levels.get(index)?;
        let mut vanishes = self.vanishes;
        let found = level.orbit().find_map(|(_, element)| {
            level.generators.iter().find_map(|generator| {
                let product = generator.after(element);
                let back = level.element_to(product.image(index))?.inverse();
                let sifted = self.sifted(index + 1, back.after(&product));
                vanishes |= sifted.0.is_none() && sifted.1.sign() == Sign::Minus;
                Some((sifted.0?, sifted.1))
            })
        });
        self.vanishes = vanishes;
        found
    }

    /// Divides an element by elements of the levels from `from` on, as far as that goes: the level at which it is
    /// no longer in the orbit, if any, and what is left.
    fn sifted(&self, from: usize, mut element: SignedPermutation) -> (Option<usize>, SignedPermutation) {
        for level in self.levels.iter().skip(from) {
            let slot = element.image(level.base);
            match level.element_to(slot) {
                None => return (Some(level.base), element),
                Some(_) if slot == level.base => {}
                Some(divisor) => element = divisor.inverse().after(&element),
            }
        }
        (None, element)
    }

    fn add(&mut self, from: usize, to: usize, element: &SignedPermutation) {
        for level in self.levels.iter_mut().take(to + 1).skip(from) {
            level.generators.push(element.clone());
            level.reach();
        }
    }

    /// The levels, by base point.
    pub(crate) fn levels(&self) -> &[Level] {
        &self.levels
    }

    /// See `SlotSymmetry::order`.
    pub(crate) fn order(&self) -> Option<u128> {
        let sizes = self.levels.iter().map(|level| level.orbit().count() as u128);
        sizes.into_iter().try_fold(1_u128, u128::checked_mul)
    }

    /// See `SlotSymmetry::sign_of`.
    pub(crate) fn sign_of(&self, permutation: &SignedPermutation) -> Option<Sign> {
        if permutation.slots() > self.levels.len() {
            return None;
        }
        let (fell_out, rest) = self.sifted(0, permutation.clone());
        // What was divided off and what is left multiply to the permutation with its own sign.
        fell_out.is_none().then_some(rest.sign() * permutation.sign())
    }

    /// See `SlotSymmetry::vanishes`.
    pub(crate) fn vanishes(&self) -> bool {
        self.vanishes
    }
}
