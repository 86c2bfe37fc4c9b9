//! Which letters a term still owes: those that are free in what it is compared with, and partners for its own letters.
//!
//! The sums around the place are looked at from the inside out. In the first that has another term with indices, that
//! term says which letters are wanted; for a side it is the left side, or any other. The reading is the plain one, each
//! letter by its score: a statement that is not whole balances in no reading, and its indices would be excused as labels.

use compact_str::CompactString;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{Level, Statement, Sum, Term};

use crate::balance::Choice;
use crate::conventions::inferred::Prices;
use crate::editing::spots::sums_in;
use crate::ledger::{TermRow, rows};
use crate::sketch::Sketch;

/// A letter that may be wanted.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) struct Wanted {
    pub letter: CompactString,
    /// The level that it is wanted on.
    pub level: Level,
    /// Whether it closes a pair of the term, rather than being free.
    pub closes: bool,
}

/// The letters that the term at a place owes, when it holds these letters beside those in the tree.
pub(super) fn owed(
    statement: &Statement,
    at: u32,
    typed: &[CompactString],
    level: Level,
    prices: &Prices<'_>,
) -> Vec<Wanted> {
    let sums = sums_around(statement, at);
    let innermost = sums.iter().rev().find_map(|(sum, number)| {
        let term = sum.terms.get(*number)?;
        let siblings = sum.terms.iter().enumerate().filter(|(other, _)| other != number).map(|(_, term)| term);
        let expected = siblings.filter_map(|term| free_of(term, prices)).find(|free| !free.is_empty());
        expected.map(|expected| (term, expected))
    });
    let other_side = || {
        let (side, number) = sums.first()?;
        let term = side.terms.get(*number)?;
        let others = statement.sides.iter().filter(|other| !std::ptr::eq(*other, *side));
        let expected = others.flat_map(|other| &other.terms).filter_map(|term| free_of(term, prices));
        Some((term, expected.into_iter().find(|free| !free.is_empty()).unwrap_or_default()))
    };
    // The left side is the author's word; beside it another term of the same side.
    let on_left = sums.first().zip(statement.sides.first()).is_some_and(|((side, _), left)| std::ptr::eq(*side, left));
    let inner = innermost.filter(|(term, _)| on_left || !is_outer(sums.first(), term));
    let Some((term, expected)) = inner.or_else(other_side).or_else(|| alone(&sums)) else { return Vec::new() };
    missing(term, expected, typed, level, prices)
}

fn is_outer(side: Option<&(&Sum, usize)>, term: &Term) -> bool {
    side.and_then(|(sum, number)| sum.terms.get(*number)).is_some_and(|own| std::ptr::eq(own, term))
}

/// The term alone, with which nothing is compared.
fn alone<'t>(sums: &[(&'t Sum, usize)]) -> Option<(&'t Term, Vec<(CompactString, Level)>)> {
    let (sum, number) = sums.first()?;
    Some((sum.terms.get(*number)?, Vec::new()))
}

/// What is expected and not there, then partners of what is there and not expected.
fn missing(
    term: &Term,
    expected: Vec<(CompactString, Level)>,
    typed: &[CompactString],
    level: Level,
    prices: &Prices<'_>,
) -> Vec<Wanted> {
    let row = row_of(term, prices);
    let mut free = free_in(&row);
    let mut summed: Vec<CompactString> = row.map(|(row, _)| row.summed).unwrap_or_default();
    for letter in typed {
        match free.iter().position(|(other, _)| other == letter) {
            Some(at) => summed.push(free.remove(at).0),
            None => free.push((letter.clone(), level)),
        }
    }
    let has = |letter: &CompactString| summed.contains(letter) || free.iter().any(|(other, _)| other == letter);
    let lacking = expected.iter().filter(|(letter, _)| !has(letter));
    let mut out: Vec<Wanted> =
        lacking.map(|(letter, level)| Wanted { letter: letter.clone(), level: *level, closes: false }).collect();
    let open = free.iter().filter(|(letter, _)| expected.iter().all(|(other, _)| other != letter));
    let open = open.filter(|(letter, _)| !typed.contains(letter));
    out.extend(open.map(|(letter, own)| Wanted { letter: letter.clone(), level: own.flipped(), closes: true }));
    out
}

/// The sums that hold a place, the side first, each with the number of the term at the place.
fn sums_around(statement: &Statement, at: u32) -> Vec<(&Sum, usize)> {
    let mut out: Vec<(&Sum, usize)> = Vec::new();
    let touches = |span: Span| span.start <= at && at <= span.end;
    let sides = statement.sides.iter().filter(|side| !side.terms.is_empty() && side.span.start <= at);
    let mut next = sides.max_by_key(|side| side.span.start);
    while let Some(sum) = next {
        let begun = sum.terms.iter().rposition(|term| term.span.start <= at);
        let Some(number) = begun else { break };
        out.push((sum, number));
        let factors = sum.terms.get(number).map(|term| term.factors.as_slice()).unwrap_or_default();
        let inner = factors.iter().filter(|factor| touches(factor.span)).flat_map(sums_in);
        next = inner.map(|(sum, _)| sum).find(|inner| !inner.terms.is_empty() && touches(inner.span));
    }
    out
}

/// The free letters of a term with their levels; nothing for what matches anything.
fn free_of(term: &Term, prices: &Prices<'_>) -> Option<Vec<(CompactString, Level)>> {
    let row = row_of(term, prices);
    if row.as_ref().is_some_and(|(row, _)| row.any) {
        return None;
    }
    Some(free_in(&row))
}

fn free_in(row: &Option<(TermRow, Sketch)>) -> Vec<(CompactString, Level)> {
    let Some((row, sketch)) = row else { return Vec::new() };
    let level = |place: u32| sketch.place(place).map_or(Level::Down, |place| place.level);
    row.free.iter().map(|(letter, place)| (letter.clone(), level(*place))).collect()
}

/// The ledger of a term by itself, each letter read by its score.
fn row_of(term: &Term, prices: &Prices<'_>) -> Option<(TermRow, Sketch)> {
    let side = Sum { span: term.span, terms: vec![Term { sign: None, ..term.clone() }] };
    let statement = Statement { span: term.span, sides: vec![side], relations: Vec::new() };
    let sketch = Sketch::of(&statement);
    let choice = plain_choice(&sketch, prices);
    let row = rows(&sketch, &choice).into_iter().next()?;
    Some((row, sketch))
}

/// Every letter read by its own score.
pub(super) fn plain_choice(sketch: &Sketch, prices: &Prices<'_>) -> Choice {
    Choice {
        index: sketch.units.iter().map(|unit| prices.score(unit) > 0).collect(),
        on: sketch.switches.iter().map(|switch| switch.on).collect(),
    }
}
