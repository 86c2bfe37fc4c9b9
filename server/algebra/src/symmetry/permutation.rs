//! Signed permutations of slots. `symmetry.rs` says how they act and how two compose.

use std::ops::{Mul, MulAssign};

/// The most slots of one kernel. A stabiliser chain takes time like the fifth power of the slots at worst.
pub const MOST_SLOTS: usize = 32;

/// A sign, as a factor.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Sign {
    /// Times 1.
    #[default]
    Plus,
    /// Times -1.
    Minus,
}

impl Mul for Sign {
    type Output = Self;

    fn mul(self, other: Self) -> Self {
        if self == other { Self::Plus } else { Self::Minus }
    }
}

impl MulAssign for Sign {
    fn mul_assign(&mut self, other: Self) {
        *self = *self * other;
    }
}

/// A permutation of the slots `0..slots()` with a sign. It acts on slots: rearranging labels by it puts the label
/// of slot `image(q)` into slot `q`.
///
/// Invariant: the images are a permutation, and there are at most `MOST_SLOTS`.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct SignedPermutation {
    images: Vec<u16>,
    sign: Sign,
}

impl SignedPermutation {
    /// Nothing moves; slots beyond `MOST_SLOTS` are cut off.
    pub fn identity(slots: usize) -> Self {
        Self { images: (0..).take(slots.min(MOST_SLOTS)).collect(), sign: Sign::Plus }
    }

    /// The permutation that takes slot `q` to `images[q]`; nothing if that is no permutation or is too long.
    pub fn new(images: &[usize], sign: Sign) -> Option<Self> {
        let mut sorted = images.to_vec();
        sorted.sort_unstable();
        let permutes = sorted.iter().copied().eq(0..images.len()) && images.len() <= MOST_SLOTS;
        let images: Result<Vec<u16>, _> = images.iter().map(|&image| u16::try_from(image)).collect();
        Some(Self { images: images.ok().filter(|_| permutes)?, sign })
    }

    /// The exchange of slots with slots, in pairs; the others stay. Nothing if the lists differ in length, or if
    /// a slot is missing or named twice.
    pub fn exchange(slots: usize, first: &[usize], second: &[usize], sign: Sign) -> Option<Self> {
        if first.len() != second.len() || slots > MOST_SLOTS {
            return None;
        }
        let mut named: Vec<usize> = first.iter().chain(second).copied().collect();
        named.sort_unstable();
        named.dedup();
        if named.len() != first.len() * 2 {
            return None;
        }
        let mut images: Vec<usize> = (0..slots).collect();
        for (&a, &b) in first.iter().zip(second) {
            *images.get_mut(a)? = b;
            *images.get_mut(b)? = a;
        }
        Self::new(&images, sign)
    }

    /// How many slots there are.
    pub fn slots(&self) -> usize {
        self.images.len()
    }

    /// Where a slot goes; slots beyond the last stay.
    pub fn image(&self, slot: usize) -> usize {
        self.images.get(slot).map_or(slot, |&image| usize::from(image))
    }

    /// The sign.
    pub fn sign(&self) -> Sign {
        self.sign
    }

    /// Whether no slot moves, with either sign.
    pub fn is_identity(&self) -> bool {
        (0..self.slots()).all(|slot| self.image(slot) == slot)
    }

    /// First the other, then this one: `q` goes to `self.image(first.image(q))`; the signs multiply.
    #[must_use]
    pub fn after(&self, first: &Self) -> Self {
        let slots = self.slots().max(first.slots());
        let composed = |slot: u16| self.image(first.image(usize::from(slot)));
        // Images of at most `MOST_SLOTS` slots fit.
        let images = (0..).take(slots).map(|slot| u16::try_from(composed(slot)).unwrap_or(slot)).collect();
        Self { images, sign: self.sign * first.sign }
    }

    /// The permutation that undoes this one.
    #[must_use]
    pub fn inverse(&self) -> Self {
        let mut images = self.images.clone();
        for (slot, &image) in (0..).zip(&self.images) {
            if let Some(back) = images.get_mut(usize::from(image)) {
                *back = slot;
            }
        }
        Self { images, sign: self.sign }
    }

    /// The same permutation of the slots from `offset` on, among `slots`; nothing if it does not fit.
    pub fn embedded(&self, offset: usize, slots: usize) -> Option<Self> {
        let end = offset.checked_add(self.slots())?;
        if end > slots {
            return None;
        }
        let inner = (0..self.slots()).map(|slot| offset + self.image(slot));
        Self::new(&(0..offset).chain(inner).chain(end..slots).collect::<Vec<_>>(), self.sign)
    }

    /// The labels rearranged: what stood in slot `image(q)` stands in slot `q`.
    pub fn rearranged<T: Clone>(&self, labels: &[T]) -> Vec<T> {
        (0..labels.len()).filter_map(|slot| labels.get(self.image(slot)).cloned()).collect()
    }
}
