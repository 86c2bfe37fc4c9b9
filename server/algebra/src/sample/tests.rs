//! The laws of random fields: symmetries hold and nothing more does, and a seed fixes the draw.

#![allow(clippy::unwrap_used)]

use super::*;
use crate::field::{FIRST, Residue};
use crate::laws::law;
use crate::matrix::determinant;
use crate::number::Exact;

law!(symmetries_hold_with_their_signs, symmetries_hold);
law!(contradictory_symmetries_leave_nothing, contradictions);
law!(a_cycle_of_three_slots_is_a_symmetry_too, cycles);
law!(metrics_are_symmetric_with_the_sign_and_root_asked_for, metrics);
law!(small_fields_have_no_square, small_fields);
law!(a_seed_fixes_the_field, seeds);

fn ring() -> Arc<Ring> {
    Ring::new(2, 1).unwrap()
}

fn draw<N: Number>(lengths: &[usize], symmetries: &[SlotSymmetry], seed: u64) -> Tensor<N> {
    let ring = ring();
    tensor(&ring, ring.top(), lengths, symmetries, &mut Draws::from_seed(seed)).unwrap()
}

/// How many different jets there are up to sign, zero not counted.
fn distinct<N: Number>(tensor: &Tensor<N>) -> usize {
    let mut seen: Vec<Jet<N>> = Vec::new();
    for place in 0..tensor.size() {
        let mut rest = place;
        let mut component = vec![0; tensor.lengths().len()];
        for (index, length) in component.iter_mut().zip(tensor.lengths()).rev() {
            (*index, rest) = (rest % length, rest / length);
        }
        let jet = tensor.get(&component).unwrap();
        let known = |other: &Jet<N>| jet.agrees(other).unwrap() || jet.agrees(&other.scaled(-N::ONE)).unwrap();
        if !jet.vanishes().unwrap() && !seen.iter().any(known) {
            seen.push(jet);
        }
    }
    seen.len()
}

fn symmetries_hold<N: Number>() {
    let even = draw::<N>(&[3, 2, 3], &[SlotSymmetry::exchange(3, 0, 2, false)], 1);
    assert!(even.swapped(0, 2).unwrap().agrees(&even).unwrap());
    let odd = draw::<N>(&[4, 4], &[SlotSymmetry::exchange(2, 0, 1, true)], 2);
    assert!(odd.plus(&odd.swapped(0, 1).unwrap()).unwrap().vanishes().unwrap());
    assert!(!odd.vanishes().unwrap());
    // The symmetries of a curvature tensor that are signed permutations: pairs odd, exchange of pairs even.
    let pairs = SlotSymmetry { slots: vec![2, 3, 0, 1], negative: false };
    let curvature = [SlotSymmetry::exchange(4, 0, 1, true), SlotSymmetry::exchange(4, 2, 3, true), pairs];
    let tensor = draw::<N>(&[3; 4], &curvature, 3);
    for symmetry in &curvature {
        let sign = if symmetry.negative { -N::ONE } else { N::ONE };
        assert!(tensor.permuted(&symmetry.slots).unwrap().scaled(sign).agrees(&tensor).unwrap());
    }
    // A symmetric 3 x 3 matrix of pairs has 6 entries.
    assert!(distinct(&tensor) <= 6);
    assert!(!tensor.vanishes().unwrap());
}

#[test]
fn as_many_components_are_drawn_as_the_symmetries_leave_free() {
    type Number = Residue<FIRST>;
    let odd = |a, b| SlotSymmetry::exchange(3, a, b, true);
    assert_eq!(distinct(&draw::<Number>(&[4; 3], &[odd(0, 1), odd(1, 2)], 1)), 4);
    let even = |a, b| SlotSymmetry::exchange(3, a, b, false);
    assert_eq!(distinct(&draw::<Number>(&[4; 3], &[even(0, 1), even(1, 2)], 1)), 20);
    assert_eq!(distinct(&draw::<Number>(&[4; 2], &[], 1)), 16);
}

fn contradictions<N: Number>() {
    let both = [SlotSymmetry::exchange(2, 0, 1, true), SlotSymmetry::exchange(2, 0, 1, false)];
    assert!(draw::<N>(&[3, 3], &both, 4).vanishes().unwrap());
    let opposite = SlotSymmetry { slots: vec![0], negative: true };
    assert!(draw::<N>(&[3], &[opposite], 4).vanishes().unwrap());
    // Even in one pair, odd in another pair with a slot in common: nothing is left.
    let mixed = [SlotSymmetry::exchange(3, 0, 1, false), SlotSymmetry::exchange(3, 1, 2, true)];
    assert!(draw::<N>(&[3; 3], &mixed, 4).vanishes().unwrap());
}

fn cycles<N: Number>() {
    let cycle = SlotSymmetry { slots: vec![1, 2, 0], negative: false };
    let tensor = draw::<N>(&[3; 3], &[cycle], 5);
    assert!(tensor.permuted(&[1, 2, 0]).unwrap().agrees(&tensor).unwrap());
    assert!(!tensor.swapped(0, 1).unwrap().agrees(&tensor).unwrap());
    // A direction is stated for the components, too: T_{i0 i1 i2} with the index of slot s moved to slots[s].
    assert!(tensor.get(&[0, 1, 2]).unwrap().agrees(&tensor.get(&[1, 2, 0]).unwrap()).unwrap());
}

fn metrics<N: Number>() {
    for dimension in 1..=4 {
        let ring = Ring::new(dimension, 1).unwrap();
        for minus in 0..=1 {
            let metric = metric::<N>(&ring, ring.top(), minus, &mut Draws::from_seed(6)).unwrap();
            assert!(metric.swapped(0, 1).unwrap().agrees(&metric).unwrap());
            let value = determinant(&metric).unwrap().value();
            let size = if minus == 1 { -value } else { value };
            assert_eq!(size.magnitude(), Some(size));
            assert!(size.root().is_some() && !size.is_zero());
        }
    }
}

fn small_fields<N: Number>() {
    let ring = Ring::with_small(1, 1, Order { base: 1, small: 1 }).unwrap();
    let field = small_tensor::<N>(&ring, ring.top(), &[2], &[], 0, &mut Draws::from_seed(7)).unwrap();
    assert!(field.outer(&field).unwrap().vanishes().unwrap());
    assert!(!field.vanishes().unwrap());
    let none = small_tensor::<N>(&ring, ring.top(), &[2], &[], 1, &mut Draws::from_seed(7));
    assert_eq!(none.unwrap_err(), Trouble::Shape);
}

fn seeds<N: Number>() {
    let (a, b, c) = (draw::<N>(&[3, 3], &[], 8), draw::<N>(&[3, 3], &[], 8), draw::<N>(&[3, 3], &[], 9));
    assert!(a.agrees(&b).unwrap() && !a.agrees(&c).unwrap());
    let point = |seed| coordinates::<N>(&ring(), &mut Draws::from_seed(seed)).unwrap();
    let values = |seed| point(seed).iter().map(Jet::value).collect::<Vec<_>>();
    assert_eq!(values(1), values(1));
    assert_ne!(values(1), values(2));
    assert!(point(1).iter().all(|x| x.minus(&Jet::constant(&ring(), x.value())).unwrap().value().is_zero()));
}

#[test]
fn symmetries_that_do_not_fit_are_refused() {
    let ring = ring();
    let refused = [
        (vec![2, 3], SlotSymmetry::exchange(2, 0, 1, false)),
        (vec![2, 2], SlotSymmetry { slots: vec![0, 0], negative: false }),
        (vec![2, 2], SlotSymmetry { slots: vec![0], negative: false }),
        (vec![2, 2], SlotSymmetry { slots: vec![0, 1, 2], negative: false }),
    ];
    for (lengths, symmetry) in refused {
        let drawn = tensor::<Exact>(&ring, ring.top(), &lengths, &[symmetry], &mut Draws::from_seed(1));
        assert_eq!(drawn.unwrap_err(), Trouble::Shape);
    }
}
