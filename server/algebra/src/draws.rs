//! Pseudo-random numbers that depend on a seed alone, so that whatever was drawn can be drawn again.
//!
//! They are for sampling and for tests, not for secrets. Source: Steele, Lea and Flood, "Fast splittable
//! pseudorandom number generators" (2014), the generator known as SplitMix64; its constants from memory.

/// An endless sequence of numbers.
#[derive(Clone, Debug)]
pub struct Draws(u64);

impl Draws {
    /// The sequence of a seed.
    pub const fn from_seed(seed: u64) -> Self {
        Self(seed)
    }

    /// 64 bits, all values about equally likely.
    pub fn bits(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9E37_79B9_7F4A_7C15);
        let mut mixed = self.0;
        mixed = (mixed ^ (mixed >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
        mixed = (mixed ^ (mixed >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
        mixed ^ (mixed >> 31)
    }

    /// A number `0 <= x < bound`; 0 for the bound 0. Small numbers are more likely by at most `bound / 2^64`.
    pub fn below(&mut self, bound: u64) -> u64 {
        self.bits().checked_rem(bound).unwrap_or_default()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_seed_fixes_the_sequence_and_seeds_differ() {
        let sequence = |seed| {
            let mut draws = Draws::from_seed(seed);
            std::array::from_fn::<u64, 8, _>(|_| draws.bits())
        };
        assert_eq!(sequence(1), sequence(1));
        assert_ne!(sequence(1), sequence(2));
    }

    #[test]
    fn all_numbers_below_a_bound_are_drawn_and_no_other() {
        let mut draws = Draws::from_seed(3);
        let mut counts = [0; 7];
        for _ in 0..7000 {
            counts[draws.below(7) as usize] += 1;
        }
        assert!(counts.iter().all(|count| (800..1200).contains(count)), "{counts:?}");
        assert_eq!(draws.below(0), 0);
    }
}
