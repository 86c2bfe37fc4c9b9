//! Laws of normal forms. Monomials are written as kernels with letters: a letter that stands twice is a movable
//! dummy, one that stands once is free, a digit is a component.

#![allow(clippy::unwrap_used, clippy::panic, clippy::indexing_slicing)]

mod counts;
mod laws;
mod sums;
mod zeros;

use std::sync::Arc;

use super::*;
use crate::symmetry::SlotSymmetry;

/// A tensor that monomials are made of.
#[derive(Clone, Debug)]
struct Kernel {
    number: u32,
    symmetry: Arc<SlotSymmetry>,
    parity: Parity,
}

impl Kernel {
    fn new(number: u32, symmetry: SlotSymmetry) -> Self {
        Self { number, symmetry: Arc::new(symmetry), parity: Parity::Commuting }
    }

    fn odd(number: u32, slots: usize) -> Self {
        Self { parity: Parity::Anticommuting, ..Self::new(number, SlotSymmetry::none(slots)) }
    }

    fn symmetric(number: u32, slots: usize) -> Self {
        let all: Vec<usize> = (0..slots).collect();
        Self::new(number, SlotSymmetry::symmetric(slots, &all).unwrap())
    }

    fn antisymmetric(number: u32, slots: usize) -> Self {
        let all: Vec<usize> = (0..slots).collect();
        Self::new(number, SlotSymmetry::antisymmetric(slots, &all).unwrap())
    }

    fn riemann() -> Self {
        Self::new(0, SlotSymmetry::riemann())
    }

    fn holding(&self, slots: Vec<Slot>) -> Factor {
        Factor { kernel: self.number, slots, parity: self.parity, symmetry: Arc::clone(&self.symmetry) }
    }
}

fn label(letter: char, all: &str) -> Label {
    let number = u32::from(letter);
    match letter.to_digit(10) {
        Some(digit) => Label::Component(digit),
        None if all.matches(letter).count() == 2 => Label::Dummy { family: 0, number, movable: true },
        None => Label::Free(number),
    }
}

fn monomial(factors: &[(&Kernel, &str)]) -> Monomial {
    let all: String = factors.iter().map(|(_, letters)| *letters).collect();
    let slot = |letter| Slot { label: label(letter, &all), level: Level::Neutral };
    let factor = |(kernel, letters): &(&Kernel, &str)| kernel.holding(letters.chars().map(slot).collect());
    Monomial::new(factors.iter().map(factor).collect()).unwrap()
}

/// The form with its sign; nothing if the monomial is zero.
#[track_caller]
fn form(monomial: &Monomial) -> Option<(Sign, Canonical)> {
    match normal_form(monomial, &mut Budget::default()) {
        Outcome::Zero => None,
        Outcome::Form { sign, form } => Some((sign, form)),
        Outcome::OverBudget => panic!("over budget: {monomial:?}"),
    }
}

/// The form written back with letters, for expectations: `+0:aabb` and the like.
fn shown(monomial: &Monomial) -> String {
    let Some((sign, form)) = form(monomial) else { return "0".into() };
    let mut text = String::from(if sign == Sign::Plus { "+" } else { "-" });
    for factor in form.monomial().factors() {
        text.push_str(&format!("{}:", factor.kernel));
        for slot in &factor.slots {
            text.push(match slot.label {
                Label::Free(number) => char::from_u32(number).unwrap(),
                Label::Component(number) => char::from_digit(number, 10).unwrap(),
                Label::Dummy { number, .. } => char::from_u32(u32::from('A') + number).unwrap(),
            });
        }
        text.push(' ');
    }
    text.trim_end().to_owned()
}

#[test]
fn plain_monomials_come_out_as_expected() {
    let (s, f) = (Kernel::symmetric(1, 2), Kernel::antisymmetric(2, 2));
    let (u, t) = (Kernel::new(3, SlotSymmetry::none(1)), Kernel::new(4, SlotSymmetry::none(2)));
    let r = Kernel::riemann();
    assert_eq!(shown(&monomial(&[(&s, "ba")])), "+1:ab");
    assert_eq!(shown(&monomial(&[(&f, "ba")])), "-2:ab");
    assert_eq!(shown(&monomial(&[(&t, "ba")])), "+4:ba");
    assert_eq!(shown(&monomial(&[(&f, "a1")])), "+2:a1");
    assert_eq!(shown(&monomial(&[(&f, "21")])), "-2:12");
    assert_eq!(shown(&monomial(&[(&f, "11")])), "0");
    assert_eq!(shown(&monomial(&[(&f, "aa")])), "0");
    assert_eq!(shown(&monomial(&[(&s, "ij"), (&f, "ij")])), "0");
    assert_eq!(shown(&monomial(&[(&f, "ij"), (&u, "i"), (&u, "j")])), "0");
    assert_eq!(shown(&monomial(&[(&t, "ij"), (&u, "j"), (&u, "i")])), "+3:A 3:B 4:AB");
    assert_eq!(shown(&monomial(&[(&r, "dcab")])), "-0:abcd");
    assert_eq!(shown(&monomial(&[(&r, "iaib")])), shown(&monomial(&[(&r, "bkak")])));
    assert_eq!(shown(&monomial(&[(&r, "iiab")])), "0");
}
