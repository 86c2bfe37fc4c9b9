//! Laws of signed permutations and of the groups that they span.

#![allow(clippy::unwrap_used)]

use std::collections::BTreeMap;

use super::*;
use crate::draws::Draws;

/// How many samples a law is tried on.
const TRIES: usize = 200;

fn draw_permutation(draws: &mut Draws, slots: usize) -> SignedPermutation {
    let mut images: Vec<usize> = (0..slots).collect();
    for place in (1..slots).rev() {
        images.swap(place, draws.below(place as u64 + 1) as usize);
    }
    SignedPermutation::new(&images, if draws.below(2) == 0 { Sign::Plus } else { Sign::Minus }).unwrap()
}

#[test]
fn signed_permutations_are_a_group_that_acts_on_words() {
    let mut draws = Draws::from_seed(11);
    for _ in 0..TRIES {
        let slots = 1 + draws.below(7) as usize;
        let [a, b, c] = [0; 3].map(|_| draw_permutation(&mut draws, slots));
        let identity = SignedPermutation::identity(slots);
        assert_eq!(a.after(&b).after(&c), a.after(&b.after(&c)));
        assert_eq!(a.after(&identity), a);
        assert_eq!(identity.after(&a), a);
        assert_eq!(a.after(&a.inverse()), identity);
        assert_eq!(a.inverse().after(&a), identity);
        let word: Vec<usize> = (10..10 + slots).collect();
        assert_eq!(b.rearranged(&a.rearranged(&word)), a.after(&b).rearranged(&word));
    }
}

#[test]
fn what_is_no_permutation_is_refused() {
    assert_eq!(SignedPermutation::new(&[0, 0], Sign::Plus), None);
    assert_eq!(SignedPermutation::new(&[1, 2], Sign::Plus), None);
    assert_eq!(SignedPermutation::exchange(3, &[0], &[3], Sign::Plus), None);
    assert_eq!(SignedPermutation::exchange(3, &[0], &[0], Sign::Plus), None);
    assert_eq!(SignedPermutation::exchange(3, &[0, 1], &[2], Sign::Plus), None);
    assert_eq!(SlotSymmetry::symmetric(3, &[1, 3]), None);
    assert_eq!(SlotSymmetry::symmetric(3, &[3]), None);
    assert_eq!(SlotSymmetry::symmetric(3, &[1, 1]), None);
    assert_eq!(SlotSymmetry::riemann().embedded(2, 5), None);
    assert_eq!(SlotSymmetry::new(MOST_SLOTS + 1, &[]), None);
}

#[test]
fn orders_are_those_of_the_textbook() {
    let mut factorial = 1;
    for slots in 1..=9 {
        factorial *= slots as u128;
        let all: Vec<usize> = (0..slots).collect();
        assert_eq!(SlotSymmetry::symmetric(slots, &all).unwrap().order(), Some(factorial));
        assert_eq!(SlotSymmetry::antisymmetric(slots, &all).unwrap().order(), Some(factorial));
    }
    assert_eq!(SlotSymmetry::none(4).order(), Some(1));
    assert_eq!(SlotSymmetry::riemann().order(), Some(8));
    assert_eq!(SlotSymmetry::christoffel().order(), Some(2));
    // Two derivatives before a Riemann tensor; the dihedral, cyclic and alternating groups.
    let derivatives = SlotSymmetry::symmetric(6, &[0, 1]).unwrap();
    assert_eq!(derivatives.and(&SlotSymmetry::riemann().embedded(2, 6).unwrap()).order(), Some(16));
    let of = |images: &[&[usize]]| {
        let generators: Vec<_> =
            images.iter().map(|images| SignedPermutation::new(images, Sign::Plus).unwrap()).collect();
        SlotSymmetry::new(images[0].len(), &generators).unwrap().order().unwrap()
    };
    assert_eq!(of(&[&[1, 2, 3, 4, 0]]), 5);
    assert_eq!(of(&[&[1, 2, 3, 4, 0], &[0, 4, 3, 2, 1]]), 10);
    assert_eq!(of(&[&[1, 2, 3, 4, 0], &[1, 2, 0, 3, 4]]), 60);
}

#[test]
fn the_largest_symmetric_kernel_is_within_reach() {
    let all: Vec<usize> = (0..MOST_SLOTS).collect();
    let symmetry = SlotSymmetry::antisymmetric(MOST_SLOTS, &all).unwrap();
    assert_eq!(symmetry.order(), (1..=MOST_SLOTS as u128).try_fold(1, u128::checked_mul));
    assert_eq!(symmetry.exchange_sign(3, 17), Some(Sign::Minus));
}

/// All elements with their signs, by closure: the reference that knows nothing of chains. `None` stands for both
/// signs.
fn closure(slots: usize, generators: &[SignedPermutation]) -> BTreeMap<Vec<usize>, Option<Sign>> {
    let images = |element: &SignedPermutation| (0..slots).map(|slot| element.image(slot)).collect::<Vec<_>>();
    let mut seen = std::collections::BTreeSet::new();
    let mut pending = vec![SignedPermutation::identity(slots)];
    while let Some(element) = pending.pop() {
        if seen.insert((images(&element), element.sign())) {
            pending.extend(generators.iter().map(|generator| generator.after(&element)));
        }
    }
    let mut elements = BTreeMap::new();
    for (images, sign) in seen {
        elements.entry(images).and_modify(|known| *known = None).or_insert(Some(sign));
    }
    elements
}

#[test]
fn membership_signs_and_orders_agree_with_the_closure() {
    let mut draws = Draws::from_seed(12);
    let mut vanishing = 0;
    for _ in 0..TRIES {
        let slots = 1 + draws.below(5) as usize;
        let generators: Vec<_> = (0..draws.below(4)).map(|_| draw_permutation(&mut draws, slots)).collect();
        let symmetry = SlotSymmetry::new(slots, &generators).unwrap();
        let elements = closure(slots, &generators);
        assert_eq!(symmetry.order(), Some(elements.len() as u128));
        assert_eq!(symmetry.vanishes(), elements.values().any(Option::is_none), "{generators:?}");
        vanishing += usize::from(symmetry.vanishes());
        for _ in 0..10 {
            let candidate = draw_permutation(&mut draws, slots);
            let images: Vec<usize> = (0..slots).map(|slot| candidate.image(slot)).collect();
            match (symmetry.sign_of(&candidate), elements.get(&images)) {
                (None, None) => {}
                (Some(_), Some(None)) => {}
                (Some(sign), Some(Some(expected))) => assert_eq!(sign, *expected),
                (found, expected) => unreachable!("{candidate:?}: {found:?}, {expected:?}"),
            }
        }
    }
    assert!((10..TRIES - 10).contains(&vanishing), "{vanishing}");
}
