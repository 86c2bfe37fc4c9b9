//! The ledger of a statement: for every term its free and its summed indices.
//!
//! Rules, messages and the ledger view all read this; nothing recomputes it.

use std::borrow::Cow;

use compact_str::CompactString;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::Formula;

use crate::balance::{self, Choice, Event, term_state};
pub use crate::conventions::built_in::shown;
use crate::conventions::prices::Prices;
use crate::finding::{Ledger, LedgerIndex, LedgerRow};
use crate::reading::Reading;
use crate::rules::faults::Fault;
use crate::sketch::{Sketch, Unit};

/// A statement with its reading and everything a rule may ask.
#[derive(Clone, Debug)]
pub struct Judged<'a> {
    /// The text of the document.
    pub text: &'a str,
    /// The formula that the statement stands in.
    pub formula: &'a Formula,
    /// The statement.
    pub sketch: Cow<'a, Sketch>,
    /// How it is read.
    pub reading: Reading,
    /// The evidence.
    pub prices: Prices<'a>,
    /// Everything out of order in the statement.
    pub(crate) faults: Vec<Fault>,
}

/// A term with its indices.
#[derive(Clone, Debug)]
pub struct TermRow {
    /// The number of its side.
    pub side: usize,
    /// The number of the term in its side.
    pub term: usize,
    /// Its place.
    pub span: Span,
    /// Whether it matches anything.
    pub any: bool,
    /// Free letters with their places.
    pub free: Vec<(CompactString, u32)>,
    /// Summed letters.
    pub summed: Vec<CompactString>,
}

impl Judged<'_> {
    /// The unit of a place.
    pub fn unit(&self, place: u32) -> Option<&Unit> {
        self.sketch.place(place).and_then(|place| self.sketch.units.get(place.unit as usize))
    }

    /// Whether a place is read as an index.
    pub fn is_index(&self, place: u32) -> bool {
        let unit = self.sketch.place(place).map_or(usize::MAX, |place| place.unit as usize);
        self.reading.choice.index.get(unit).copied().unwrap_or(false)
    }

    /// What the count of a letter met.
    pub fn events(&self, letter: &str) -> Vec<Event> {
        let number = self.sketch.number_of(letter);
        number.map(|number| balance::events(&self.sketch, &self.reading.choice, number).1).unwrap_or_default()
    }

    /// The terms of all sides.
    pub fn rows(&self) -> Vec<TermRow> {
        rows(&self.sketch, &self.reading.choice)
    }

    /// The place of a letter as it stands in the text.
    pub fn span(&self, place: u32) -> Span {
        self.sketch.place(place).map(|place| place.span).unwrap_or_default()
    }

    /// The level of a place in words, empty where levels do not matter.
    pub fn level(&self, place: u32) -> &'static str {
        let Some(place) = self.sketch.place(place) else { return "" };
        if self.prices.speaks_of_levels(&place.letter) { place.level.word() } else { "" }
    }

    /// The ledger as people see it; `odd` are the letters that the finding is about.
    pub fn view(&self, odd: &[CompactString]) -> Ledger {
        let rows = self.rows();
        let sides = self.sketch.sides.len();
        let mut out = Vec::new();
        for side in 0..sides {
            let mine: Vec<&TermRow> = rows.iter().filter(|row| row.side == side && !row.any).collect();
            let names = |row: &TermRow| row.free.iter().map(|(letter, _)| letter.clone()).collect::<Vec<_>>();
            let alike =
                mine.windows(2).all(|pair| matches!(pair, [one, two] if same_letters(&names(one), &names(two))));
            if alike {
                let Some(first) = mine.first() else { continue };
                let mut row = self.row(side_title(sides, side), first, odd);
                for other in mine.iter().skip(1) {
                    let more = self.row(String::new(), other, odd).summed;
                    row.summed.extend(more.into_iter().filter(|index| !row.summed.contains(index)).collect::<Vec<_>>());
                }
                out.push(row);
            } else {
                for term in mine {
                    let title = format!("{}, term {}", side_title(sides, side), term.term + 1);
                    out.push(self.row(title, term, odd));
                }
            }
        }
        Ledger { statement: self.sketch.span, rows: out }
    }

    fn row(&self, title: String, term: &TermRow, odd: &[CompactString]) -> LedgerRow {
        let index = |letter: &CompactString, level: &'static str| LedgerIndex {
            letter: shown(letter),
            level,
            odd: odd.contains(letter),
        };
        LedgerRow {
            title,
            span: term.span,
            free: term.free.iter().map(|(letter, place)| index(letter, self.level(*place))).collect(),
            summed: term.summed.iter().map(|letter| index(letter, "")).collect(),
        }
    }
}

fn same_letters(one: &[CompactString], two: &[CompactString]) -> bool {
    one.len() == two.len() && one.iter().all(|letter| two.contains(letter))
}

/// The terms of all sides of a sketch under a choice.
pub fn rows(sketch: &Sketch, choice: &Choice) -> Vec<TermRow> {
    let mut out = Vec::new();
    for (side, held) in sketch.sides.iter().enumerate() {
        for (term, (node, inside)) in sketch.side_terms(held).enumerate() {
            let any = node.any || node.shorthand;
            let mut row = TermRow { side, term, span: node.span, any, free: Vec::new(), summed: Vec::new() };
            for (number, letter) in sketch.letter_numbers().zip(&sketch.letters) {
                let state = term_state(sketch, choice, (node, inside), number);
                if let Some(place) = state.free {
                    row.free.push((letter.clone(), place));
                } else if state.summed {
                    row.summed.push(letter.clone());
                }
            }
            out.push(row);
        }
    }
    out
}

/// "left side", "right side", or the number of the side in a chain.
pub fn side_title(sides: usize, side: usize) -> String {
    match (sides, side) {
        (1, _) => "expression".to_owned(),
        (2, 0) => "left side".to_owned(),
        (2, _) => "right side".to_owned(),
        _ => format!("side {}", side + 1),
    }
}
