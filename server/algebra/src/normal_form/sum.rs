//! Sums of monomials in normal form, with brackets over indices.
//!
//! A bracket is an average over the permutations of the labels in some slots, perhaps of several factors. The one
//! idea: while brackets are open, the labels in their slots are replaced by free tokens; then a bracket permutes
//! *labels*, which normal forms do not disturb, and the average over `n!` permutations is taken one label more at
//! a time, like terms being collected in between. At last the labels take the places of their tokens.

use std::collections::btree_map::Entry;
use std::collections::{BTreeMap, BTreeSet};

use super::budget::{Budget, Unfinished};
use super::monomial::{Canonical, Factor, Label, Monomial, Slot};
use super::{Outcome, normal_form};
use crate::rational::Rational;
use crate::symmetry::Sign;

/// A slot of a factor, both counted from 0.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Place {
    /// Which factor of the monomial.
    pub factor: usize,
    /// Which slot of the factor.
    pub slot: usize,
}

/// The average over all permutations of the labels in some slots, with the sign of the permutation if the bracket
/// is antisymmetric: `T_[ab] = 1/2 (T_ab - T_ba)`. Labels move with their levels.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Bracket {
    /// Whether odd permutations count negative.
    pub antisymmetric: bool,
    /// The slots; what stands between bars is left out.
    pub slots: Vec<Place>,
}

/// A term of a sum: a coefficient times a monomial under brackets.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Term {
    coefficient: Rational,
    monomial: Monomial,
    brackets: Vec<Bracket>,
}

impl Term {
    /// The term; brackets that share slots apply in the order given, so that an inner one comes first. Nothing if
    /// a bracket names a slot twice or one that the monomial does not have.
    pub fn new(coefficient: Rational, monomial: Monomial, brackets: Vec<Bracket>) -> Option<Self> {
        let exists = |place: &Place| slot_at(&monomial, *place).is_some();
        let sound = brackets.iter().all(|bracket| {
            let distinct: BTreeSet<&Place> = bracket.slots.iter().collect();
            distinct.len() == bracket.slots.len() && bracket.slots.iter().all(exists)
        });
        sound.then_some(Self { coefficient, monomial, brackets })
    }
}

/// A sum in normal form: equal sums are equal values. Terms are sorted, unlike, and not zero.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Sum {
    terms: BTreeMap<Canonical, Rational>,
}

impl Sum {
    /// The terms in order.
    pub fn terms(&self) -> impl ExactSizeIterator<Item = (&Canonical, Rational)> {
        self.terms.iter().map(|(form, &coefficient)| (form, coefficient))
    }

    /// Whether there are no terms.
    pub fn is_zero(&self) -> bool {
        self.terms.is_empty()
    }

    /// This sum plus `times` the other.
    pub fn plus(&self, other: &Self, times: Rational) -> Result<Self, Unfinished> {
        let mut sum = self.clone();
        sum.absorb(other.clone(), times)?;
        Ok(sum)
    }

    fn absorb(&mut self, other: Self, times: Rational) -> Result<(), Unfinished> {
        for (form, coefficient) in other.terms {
            self.add(form, coefficient.checked_mul(times).ok_or(Unfinished::CoefficientTooLarge)?)?;
        }
        Ok(())
    }

    fn add(&mut self, form: Canonical, coefficient: Rational) -> Result<(), Unfinished> {
        if coefficient == Rational::ZERO {
            return Ok(());
        }
        match self.terms.entry(form) {
            Entry::Vacant(place) => {
                place.insert(coefficient);
            }
            Entry::Occupied(mut place) => {
                let total = place.get().checked_add(coefficient).ok_or(Unfinished::CoefficientTooLarge)?;
                if total == Rational::ZERO {
                    place.remove();
                } else {
                    place.insert(total);
                }
            }
        }
        Ok(())
    }

    /// Adds the normal form of a monomial.
    fn add_monomial(
        &mut self,
        monomial: &Monomial,
        coefficient: Rational,
        budget: &mut Budget,
    ) -> Result<(), Unfinished> {
        match normal_form(monomial, budget) {
            Outcome::Zero => Ok(()),
            Outcome::OverBudget => Err(Unfinished::OverBudget),
            Outcome::Form { sign: Sign::Plus, form } => self.add(form, coefficient),
            Outcome::Form { sign: Sign::Minus, form } => self.add(form, -coefficient),
        }
    }

    /// The sum with other contents in the slots, in normal form again.
    fn refilled(&self, content: impl Fn(&Slot) -> Slot, budget: &mut Budget) -> Result<Self, Unfinished> {
        let mut sum = Self::default();
        for (form, &coefficient) in &self.terms {
            sum.add_monomial(&form.monomial().refilled(&content), coefficient, budget)?;
        }
        Ok(sum)
    }
}

/// The normal form of a sum: brackets expanded, like terms collected, zeros dropped.
pub fn normal_sum(terms: &[Term], budget: &mut Budget) -> Result<Sum, Unfinished> {
    let mut sum = Sum::default();
    for term in terms {
        if term.brackets.is_empty() {
            sum.add_monomial(&term.monomial, term.coefficient, budget)?;
        } else {
            sum.absorb(expanded(term, budget)?, term.coefficient)?;
        }
    }
    Ok(sum)
}

/// How a sum changes if two free labels are exchanged: the same sum, its negative, or neither (nothing). Labels
/// that stand on different levels somewhere are not exchanged; a sum that is zero is the same.
pub fn exchange(sum: &Sum, a: u32, b: u32, budget: &mut Budget) -> Result<Option<Sign>, Unfinished> {
    let level = |form: &Canonical, label: u32| {
        form.monomial().slots().find(|slot| slot.label == Label::Free(label)).map(|slot| slot.level)
    };
    if sum.terms.keys().any(|form| level(form, a) != level(form, b)) {
        return Ok(None);
    }
    let exchanged = sum.refilled(|slot| Slot { label: swapped(slot.label, a, b), ..*slot }, budget)?;
    if exchanged == *sum {
        return Ok(Some(Sign::Plus));
    }
    Ok(exchanged.plus(sum, Rational::ONE)?.is_zero().then_some(Sign::Minus))
}

fn swapped(label: Label, a: u32, b: u32) -> Label {
    match label {
        Label::Free(number) if number == a => Label::Free(b),
        Label::Free(number) if number == b => Label::Free(a),
        other => other,
    }
}

fn slot_at(monomial: &Monomial, place: Place) -> Option<&Slot> {
    monomial.factors().get(place.factor)?.slots.get(place.slot)
}

/// What stands for a label while brackets are open: the free label `number`, on the level of the label.
#[derive(Clone, Copy)]
struct Token {
    number: u32,
    original: Slot,
}

impl Token {
    fn slot(self) -> Slot {
        Slot { label: Label::Free(self.number), level: self.original.level }
    }
}

/// A term without its coefficient.
fn expanded(term: &Term, budget: &mut Budget) -> Result<Sum, Unfinished> {
    let tokens = tokens(&term.monomial, &term.brackets);
    let mut sum = Sum::default();
    sum.add_monomial(&opened(&term.monomial, &tokens), Rational::ONE, budget)?;
    for bracket in &term.brackets {
        sum = averaged(sum, &together(bracket, &tokens), bracket.antisymmetric, budget)?;
    }
    let originals: BTreeMap<u32, Slot> = tokens.values().map(|token| (token.number, token.original)).collect();
    let close = |slot: &Slot| match slot.label {
        Label::Free(number) => originals.get(&number).copied().unwrap_or(*slot),
        _ => *slot,
    };
    sum.refilled(close, budget)
}

/// A token for every slot of a bracket, and for the other ends of the dummies there.
fn tokens(monomial: &Monomial, brackets: &[Bracket]) -> BTreeMap<Place, Token> {
    let places: BTreeSet<&Place> = brackets.iter().flat_map(|bracket| &bracket.slots).collect();
    let bracketed: Vec<Slot> = places.into_iter().filter_map(|&place| slot_at(monomial, place)).copied().collect();
    let used: BTreeSet<Label> = monomial.slots().map(|slot| slot.label).collect();
    let mut numbers = (0..u32::MAX).filter(|&number| !used.contains(&Label::Free(number)));
    // Dummies that are not opened are renumbered from 0 on, as many as there are; these stay clear of them.
    let names: BTreeMap<Label, u32> = bracketed.iter().map(|slot| slot.label).zip((0..=u32::MAX).rev()).collect();
    let mut tokens = BTreeMap::new();
    for (factor, content) in monomial.factors().iter().enumerate() {
        for (slot, original) in content.slots.iter().enumerate() {
            let Some(&name) = names.get(&original.label) else { continue };
            let Some(number) = numbers.next() else { continue };
            let label = match original.label {
                Label::Dummy { family, movable, .. } => Label::Dummy { family, number: name, movable },
                other => other,
            };
            tokens.insert(Place { factor, slot }, Token { number, original: Slot { label, ..*original } });
        }
    }
    tokens
}

fn opened(monomial: &Monomial, tokens: &BTreeMap<Place, Token>) -> Monomial {
    let open = |(factor, content): (usize, &Factor)| {
        let token = |slot: usize| tokens.get(&Place { factor, slot });
        let slots = content.slots.iter().enumerate();
        let slots = slots.map(|(slot, original)| token(slot).map_or(*original, |token| token.slot())).collect();
        Factor { slots, ..content.clone() }
    };
    Monomial::trusted(monomial.factors().iter().enumerate().map(open).collect())
}

/// The tokens of a bracket, those in the factor with most of them first: where the factor has the symmetry of the
/// bracket, they cost no terms.
fn together(bracket: &Bracket, tokens: &BTreeMap<Place, Token>) -> Vec<Token> {
    let mut places = bracket.slots.clone();
    let crowd = |place: &Place| bracket.slots.iter().filter(|other| other.factor == place.factor).count();
    places.sort_by_key(|place| (usize::MAX - crowd(place), *place));
    places.iter().filter_map(|place| tokens.get(place)).copied().collect()
}

/// The average over the permutations of `n` tokens, from that over the permutations of all but the last: the sum
/// over the exchanges of the last with each token, itself included, divided by `n`.
fn averaged(mut sum: Sum, tokens: &[Token], antisymmetric: bool, budget: &mut Budget) -> Result<Sum, Unfinished> {
    let sign = if antisymmetric { -Rational::ONE } else { Rational::ONE };
    for (place, last) in tokens.iter().enumerate().skip(1) {
        let mut total = sum.clone();
        for other in tokens.iter().take(place) {
            let exchange = |slot: &Slot| match slot.label {
                Label::Free(number) if number == last.number => other.slot(),
                Label::Free(number) if number == other.number => last.slot(),
                _ => *slot,
            };
            total.absorb(sum.refilled(exchange, budget)?, sign)?;
        }
        let share = Rational::new(1, place as i128 + 1).ok_or(Unfinished::CoefficientTooLarge)?;
        sum = Sum::default();
        sum.absorb(total, share)?;
    }
    Ok(sum)
}
