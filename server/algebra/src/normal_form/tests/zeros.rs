//! Reasons why monomials and brackets are zero.

use super::*;
use crate::draws::Draws;
use crate::rational::Rational;

fn dummies(reason: Option<Vanishing>) -> Option<(char, char, Vec<usize>, Vec<usize>)> {
    let letter = |label| match label {
        Label::Dummy { number, .. } => char::from_u32(number).unwrap(),
        other => panic!("{other:?}"),
    };
    match reason {
        Some(Vanishing::Contraction { first, second, symmetric, antisymmetric }) => {
            Some((letter(first), letter(second), symmetric, antisymmetric))
        }
        _ => None,
    }
}

#[test]
fn the_symmetric_and_the_antisymmetric_factor_are_named() {
    let (s, f, u) = (Kernel::symmetric(1, 2), Kernel::antisymmetric(2, 2), Kernel::new(3, SlotSymmetry::none(1)));
    let (gamma, r) = (Kernel::new(4, SlotSymmetry::christoffel()), Kernel::riemann());
    let reason = |factors: &[(&Kernel, &str)]| dummies(vanishing_pair(&monomial(factors)));
    assert_eq!(reason(&[(&s, "ij"), (&f, "ij")]), Some(('i', 'j', vec![0], vec![1])));
    assert_eq!(reason(&[(&f, "ij"), (&s, "ji")]), Some(('i', 'j', vec![1], vec![0])));
    assert_eq!(reason(&[(&u, "a"), (&f, "ij"), (&gamma, "aji")]), Some(('i', 'j', vec![2], vec![1])));
    assert_eq!(reason(&[(&f, "ij"), (&u, "i"), (&u, "j")]), Some(('i', 'j', vec![1, 2], vec![0])));
    assert_eq!(reason(&[(&r, "aibj"), (&f, "ij")]), None);
    assert_eq!(reason(&[(&r, "ijab"), (&s, "ij")]), Some(('i', 'j', vec![1], vec![0])));
    let odd = Kernel::odd(5, 1);
    assert_eq!(reason(&[(&s, "ij"), (&odd, "i"), (&odd, "j")]), Some(('i', 'j', vec![0], vec![1, 2])));
    assert_eq!(reason(&[(&s, "ij"), (&s, "ij")]), None);
    assert_eq!(reason(&[(&s, "ij"), (&f, "ik"), (&u, "j"), (&u, "k")]), None);
}

#[test]
fn traces_and_components_have_reasons_of_their_own() {
    let (s, f) = (Kernel::symmetric(1, 2), Kernel::antisymmetric(2, 3));
    let reason = |factors: &[(&Kernel, &str)]| vanishing_pair(&monomial(factors));
    let trace = |label| Some(Vanishing::Trace { label, factor: 1 });
    let dummy = Label::Dummy { family: 0, number: u32::from('i'), movable: true };
    assert_eq!(reason(&[(&s, "ab"), (&f, "ici")]), trace(dummy));
    let twice = Some(Vanishing::Components { label: Label::Component(1), factor: 0 });
    assert_eq!(reason(&[(&f, "1a1")]), twice);
    assert_eq!(reason(&[(&s, "11"), (&s, "ii"), (&f, "12a")]), None);
    let both = SlotSymmetry::symmetric(2, &[0, 1]).unwrap().and(&SlotSymmetry::antisymmetric(2, &[0, 1]).unwrap());
    assert_eq!(reason(&[(&Kernel::new(9, both), "ab")]), Some(Vanishing::Kernel { factor: 0 }));
}

#[test]
fn dummies_of_different_kinds_are_no_reason() {
    let (s, f) = (Kernel::symmetric(1, 2), Kernel::antisymmetric(2, 2));
    let contracted = |first: (u16, Level), second: (u16, Level)| {
        let slot = |number, (family, level)| Slot { label: Label::Dummy { family, number, movable: false }, level };
        let other = |(family, level)| (family, if level == Level::Up { Level::Down } else { Level::Up });
        let factors = vec![
            s.holding(vec![slot(0, first), slot(1, second)]),
            f.holding(vec![slot(0, other(first)), slot(1, other(second))]),
        ];
        let monomial = Monomial::new(factors).unwrap();
        (vanishing_pair(&monomial).is_some(), form(&monomial).is_none())
    };
    assert_eq!(contracted((0, Level::Up), (0, Level::Up)), (true, true));
    assert_eq!(contracted((0, Level::Up), (0, Level::Down)), (false, false));
    assert_eq!(contracted((0, Level::Up), (1, Level::Up)), (false, false));
}

#[test]
fn a_reason_is_always_true() {
    let mut draws = Draws::from_seed(51);
    let (mut reasons, mut zeros) = (0, 0);
    for _ in 0..1500 {
        let monomial = laws::draw_monomial(&mut draws, 4);
        let zero = form(&monomial).is_none();
        let reason = vanishing_pair(&monomial);
        assert!(zero || reason.is_none(), "{monomial:?} {reason:?}");
        reasons += usize::from(reason.is_some());
        zeros += usize::from(zero);
    }
    // Not every zero is so simple, but most are.
    assert!(reasons > 50 && reasons * 10 > zeros * 6, "{reasons} of {zeros}");
}

#[test]
fn a_bracket_against_a_symmetry_is_zero_and_names_the_slots() {
    let (s, r) = (Kernel::symmetric(1, 3), Kernel::riemann());
    let u = Kernel::new(2, SlotSymmetry::none(1));
    let reason = |factors: &[(&Kernel, &str)], antisymmetric, places: &[(usize, usize)]| {
        let slots = places.iter().map(|&(factor, slot)| Place { factor, slot }).collect();
        let bracket = Bracket { antisymmetric, slots };
        let found = vanishing_bracket(&monomial(factors), &bracket);
        let term = Term::new(Rational::ONE, monomial(factors), vec![bracket]).unwrap();
        let zero = normal_sum(&[term], &mut Budget::default()).unwrap().is_zero();
        assert!(zero || found.is_none());
        found.map(|(one, other)| ((one.factor, one.slot), (other.factor, other.slot)))
    };
    assert_eq!(reason(&[(&u, "a"), (&s, "bcd")], true, &[(0, 0), (1, 0), (1, 2)]), Some(((1, 0), (1, 2))));
    assert_eq!(reason(&[(&u, "a"), (&s, "bcd")], true, &[(0, 0), (1, 1)]), None);
    assert_eq!(reason(&[(&r, "abcd")], false, &[(0, 0), (0, 1)]), Some(((0, 0), (0, 1))));
    assert_eq!(reason(&[(&r, "abcd")], false, &[(0, 0), (0, 2)]), None);
    assert_eq!(reason(&[(&u, "a"), (&u, "b")], true, &[(0, 0), (1, 0)]), Some(((0, 0), (1, 0))));
}
