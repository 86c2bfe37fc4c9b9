//! The balance of one letter in a statement, under one choice of readings.
//!
//! A letter is in balance if every term that is compared holds it once, as a free index, or none does, apart from
//! pairs closed within a product. Everything that the rules report about balance is an event of this count, so
//! that no rule counts again.

mod count;

use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{Level, RelationKind};

use crate::sketch::{Run, Side, Sketch, Term};

use count::Count;

/// Which units are read as indices and which switches are on.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Choice {
    /// One for each unit.
    pub index: Vec<bool>,
    /// One for each switch.
    pub on: Vec<bool>,
}

/// How a letter is out of balance; the later variant is the graver one.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, PartialOrd, Ord)]
pub enum Odd {
    /// It is in balance.
    #[default]
    Balanced,
    /// A dummy of an inner sum meets the same letter outside.
    Captured,
    /// Free in some terms or sides, not in others.
    Mismatch,
    /// More than twice in one product.
    Thrice,
}

/// What the count met.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Event {
    /// A closed pair.
    Pair(u32, u32),
    /// More than twice in one product: all the places.
    Thrice(Vec<u32>),
    /// Outside places, and one of the places of the inner pair.
    Captured(Vec<u32>, u32),
    /// The terms of one sum or of all sides: for each its free place, or none.
    Terms(Vec<Compared>),
    /// A place that a sum sign binds, and the sign: where its letters begin in `Sketch::bound`.
    Bound(u32, u32),
}

/// A term or side as compared with others.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Compared {
    /// Its place in the text.
    pub span: Span,
    /// The free place of the letter, if it is free there.
    pub free: Option<u32>,
    /// The side that it belongs to, if the sides of the statement are compared.
    pub side: Option<u32>,
    /// Whether it is a bare number.
    pub number: bool,
}

/// Judges one letter, by its number in the sketch.
pub fn judge(sketch: &Sketch, choice: &Choice, letter: u16) -> Odd {
    Count::new(sketch, choice, letter, None).statement()
}

/// Judges one letter and tells what the count met, in the order of the text.
pub fn events(sketch: &Sketch, choice: &Choice, letter: u16) -> (Odd, Vec<Event>) {
    let mut events = Vec::new();
    let odd = Count::new(sketch, choice, letter, Some(&mut events)).statement();
    (odd, events)
}

/// The state of one letter in one term.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct TermState {
    /// The free place, if the letter is free.
    pub free: Option<u32>,
    /// Whether a pair of it is summed.
    pub summed: bool,
}

/// The state of a letter in a term of a side.
pub fn term_state(sketch: &Sketch, choice: &Choice, (term, inside): (&Term, Run), letter: u16) -> TermState {
    let (free, closed) = Count::new(sketch, choice, letter, None).term(term, inside);
    TermState { free, summed: closed.is_some() }
}

/// For each side the number of the group of sides that it is compared with: a loose relation compares only sides
/// that both have a free index. Nothing where all sides are compared, the usual case.
fn compared_groups(sketch: &Sketch, choice: &Choice) -> Option<Vec<u32>> {
    // "all of these vanish": each stands for itself.
    let vanish = sketch.sides.len() > 2 && sketch.sides.iter().any(|side| side.zero);
    if !vanish && sketch.relations.iter().all(|kind| *kind == RelationKind::Equal) {
        return None;
    }
    let mut groups: Vec<u32> = Vec::with_capacity(sketch.sides.len());
    let mut group = 0;
    for (number, side) in sketch.sides.iter().enumerate() {
        let before = number.checked_sub(1).and_then(|n| sketch.sides.get(n));
        let relation = number.checked_sub(1).and_then(|n| sketch.relations.get(n));
        let joined = match relation {
            None => true,
            Some(RelationKind::Free) => false,
            Some(RelationKind::Equal) => !vanish,
            Some(kind) => {
                let asked = if *kind == RelationKind::Order { 2 } else { 1 };
                let free = |side| free_letters(sketch, choice, side) >= asked;
                free(side) && before.is_some_and(free)
            }
        };
        group += u32::from(!joined);
        groups.push(group);
    }
    Some(groups)
}

/// How many letters are free on a side.
fn free_letters(sketch: &Sketch, choice: &Choice, side: &Side) -> usize {
    let free = |letter: &u16| {
        let mut terms = sketch.side_terms(side);
        terms.any(|(term, inside)| Count::new(sketch, choice, *letter, None).term(term, inside).0.is_some())
    };
    sketch.letter_numbers().filter(free).count()
}

/// Whether two places stand on the same level.
pub fn same_level(sketch: &Sketch, first: u32, second: u32) -> Option<Level> {
    let (first, second) = (sketch.place(first)?, sketch.place(second)?);
    (first.level == second.level).then_some(first.level)
}
