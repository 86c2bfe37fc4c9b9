//! Colours of the slots of an arrangement: numbers that no symmetry and no renaming changes.
//!
//! A slot begins with the colour of its content and of its orbit; then each slot takes into its colour those of
//! the slot at the other end of its dummy and of all other slots, by their orbit in common with it, until no more
//! slots are told apart. Arrangements that are equal up to the remaining symmetry get equal colours; the reverse
//! holds mostly, and nothing rests on it. Source: colour refinement, Weisfeiler and Leman (1968), as used by
//! McKay (1981) (from memory).
//!
//! The colours are hashes. Should two of them collide, arrangements are told apart later than they could be.

/// The colours of an arrangement.
pub(super) struct Colours {
    /// By slot.
    pub(super) of_slots: Vec<u64>,
    /// One number for all colours together.
    pub(super) summary: u64,
    /// How many steps it took to find them.
    pub(super) cost: usize,
}

/// Refines the colours that the contents give. `partners` names for each slot the other end of its dummy;
/// `orbitals` is as `Group::orbitals` gives it.
pub(super) fn refine(contents: &[u64], partners: &[Option<usize>], orbitals: &[u32]) -> Colours {
    let slots = contents.len();
    let rows = || orbitals.chunks(slots.max(1));
    let own_orbits = rows().enumerate().filter_map(|(slot, row)| row.get(slot));
    let mut colours: Vec<u64> =
        contents.iter().zip(own_orbits).map(|(&content, &orbit)| mixed(content, u64::from(orbit))).collect();
    let mut classes = distinct(&colours);
    let mut cost = slots;
    loop {
        let with_partner = colours.iter().zip(partners).map(|(&own, partner)| {
            let other = partner.and_then(|slot| colours.get(slot)).copied().unwrap_or_default();
            mixed(own, other)
        });
        let finer: Vec<u64> = with_partner
            .zip(rows())
            .map(|(own, row)| {
                let others = row.iter().zip(&colours).map(|(&orbit, &colour)| mixed(colour, u64::from(orbit)));
                mixed(own, others.fold(0, u64::wrapping_add))
            })
            .collect();
        colours = finer;
        cost += slots * slots;
        let finer_classes = distinct(&colours);
        if finer_classes <= classes {
            break;
        }
        classes = finer_classes;
    }
    let summary = colours.iter().fold(0, |sum: u64, &colour| sum.wrapping_add(mixed(colour, 1)));
    Colours { of_slots: colours, summary, cost }
}

fn distinct(colours: &[u64]) -> usize {
    let mut sorted = colours.to_vec();
    sorted.sort_unstable();
    sorted.dedup();
    sorted.len()
}

/// One number of two, the order mattering: the finisher of SplitMix64 (`draws.rs`).
pub(super) fn mixed(a: u64, b: u64) -> u64 {
    let mut mixed = a.wrapping_add(b.wrapping_add(1).wrapping_mul(0x9E37_79B9_7F4A_7C15));
    mixed = (mixed ^ (mixed >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
    mixed = (mixed ^ (mixed >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
    mixed ^ (mixed >> 31)
}
