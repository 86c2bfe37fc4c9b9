//! What is out of order in a statement under a fixed choice: the common ground of the balance rules and of the
//! trial of fixes.

use compact_str::CompactString;
use indexwise_grammar::tree::Level;

use crate::balance::{self, Choice, Event, Odd, judge, same_level};
use crate::conventions::built_in::is_symbol_kernel;
use crate::conventions::prices::{LevelHabit, Prices};
use crate::sketch::{Shape, Sketch, Unit};

/// One thing out of order.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(crate) enum Fault {
    /// A letter is out of balance.
    Odd(CompactString, Odd),
    /// A pair on one level.
    PairLevel(CompactString, u32, u32),
    /// A free letter on two levels.
    FreeLevel(CompactString),
}

impl Fault {
    /// The letter, if it is out of balance.
    pub(crate) fn letter(&self) -> Option<&CompactString> {
        match self {
            Self::Odd(letter, _) => Some(letter),
            _ => None,
        }
    }
}

/// Letters out of balance.
pub(crate) fn odd_letters(sketch: &Sketch, choice: &Choice) -> Vec<(CompactString, Odd)> {
    sketch
        .letter_numbers()
        .zip(&sketch.letters)
        .map(|(number, letter)| (letter.clone(), judge(sketch, choice, number)))
        .filter(|(_, odd)| *odd != Odd::Balanced)
        .collect()
}

/// Everything out of order.
pub(crate) fn faults(sketch: &Sketch, choice: &Choice, prices: &Prices<'_>) -> Vec<Fault> {
    faults_of(sketch, choice, prices, |_, _| true)
}

/// The faults of a statement that is in balance: those of levels. Most letters need no look.
pub(crate) fn level_faults(sketch: &Sketch, choice: &Choice, prices: &Prices<'_>) -> Vec<Fault> {
    faults_of(sketch, choice, prices, |number, letter| {
        let level = |wanted: Level| {
            let mine = sketch.places.iter().filter(|place| place.number == number && place.level == wanted);
            mine.filter(|place| choice.index.get(place.unit as usize) == Some(&true)).count()
        };
        let (up, down) = (level(Level::Up), level(Level::Down));
        let pair = up > 1 || down > 1;
        let free = up > 0 && down > 0 && prices.free_levels_in_force(letter);
        (pair || free) && prices.level_habit(letter) == LevelHabit::InForce
    })
}

fn faults_of(sketch: &Sketch, choice: &Choice, prices: &Prices<'_>, asked: impl Fn(u16, &str) -> bool) -> Vec<Fault> {
    let mut out = Vec::new();
    for (number, letter) in sketch.letter_numbers().zip(&sketch.letters) {
        if !asked(number, letter) {
            continue;
        }
        let (odd, events) = balance::events(sketch, choice, number);
        if odd != Odd::Balanced {
            out.push(Fault::Odd(letter.clone(), odd));
        }
        out.extend(pair_faults(sketch, letter, &events, prices));
        out.extend(free_fault(sketch, letter, &events, prices));
    }
    out
}

/// Pairs of a letter on one level where levels are in force.
pub(super) fn pair_faults(sketch: &Sketch, letter: &str, events: &[Event], prices: &Prices<'_>) -> Vec<Fault> {
    if prices.level_habit(letter) != LevelHabit::InForce {
        return Vec::new();
    }
    let exempt = |place: u32| {
        let unit = sketch.place(place).and_then(|place| sketch.units.get(place.unit as usize));
        unit.is_none_or(|unit| prices.kernel_ignores_levels(unit))
    };
    let strange = |one: u32, two: u32| {
        let unit = |place: u32| sketch.place(place).and_then(|place| sketch.units.get(place.unit as usize));
        let particles = |one: &Unit, two: &Unit| {
            one.shape == Shape::Particle && two.shape == Shape::Particle && one.kernel == two.kernel
        };
        matches!(
            (unit(one), unit(two)),
            (Some(one), Some(two)) if prices.both_strange(one, two) || particles(one, two)
        )
    };
    events
        .iter()
        .filter(|event| !matches!(event, Event::Pair(one, two) if strange(*one, *two) || component(sketch, *one, *two)))
        .filter_map(|event| match event {
            Event::Pair(one, two) if same_level(sketch, *one, *two).is_some() && !exempt(*one) && !exempt(*two) => {
                Some(Fault::PairLevel(letter.into(), *one, *two))
            }
            _ => None,
        })
        .collect()
}

/// A free letter up in one term and down in another where that is against the habit.
pub(super) fn free_fault(sketch: &Sketch, letter: &str, events: &[Event], prices: &Prices<'_>) -> Option<Fault> {
    if !prices.free_levels_in_force(letter) {
        return None;
    }
    if same_kernel_sides(sketch) {
        return None;
    }
    let differs = events.iter().any(|event| match event {
        Event::Terms(terms) => {
            let symbol = |place: &u32| {
                let unit = sketch.place(*place).and_then(|place| sketch.units.get(place.unit as usize));
                unit.is_none_or(|unit| is_symbol_kernel(&unit.kernel_letter) || unit.shape == Shape::Bracketed)
            };
            let free = terms.iter().filter_map(|term| term.free).filter(|place| !symbol(place));
            let mut levels = free.filter_map(|place| sketch.place(place));
            let first = levels.next().map(|place| place.level);
            levels.any(|place| Some(place.level) != first)
        }
        _ => false,
    });
    differs.then(|| Fault::FreeLevel(letter.into()))
}

/// `\eta_{\mu\nu} = \eta^{\mu\nu}`: a statement about the components of one kernel.
fn same_kernel_sides(sketch: &Sketch) -> bool {
    let first = sketch.units.first().map(|unit| &unit.kernel);
    sketch.units.iter().all(|unit| Some(&unit.kernel) == first) && sketch.quantities.is_empty()
}

/// `R_{\tau\tau}`, `\Gamma^0_{ii}`: one letter twice in a script of its own names a component, or a sum over equal ones.
fn component(sketch: &Sketch, one: u32, two: u32) -> bool {
    let (Some(one), Some(two)) = (sketch.place(one), sketch.place(two)) else { return false };
    one.script == two.script && one.company == 2
}
