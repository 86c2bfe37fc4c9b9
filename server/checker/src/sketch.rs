//! The sketch of a statement: every letter that stands in a script, and how products and sums hold them.
//!
//! A sketch is what remains of a statement when everything that cannot matter for the balance of indices is gone.
//! It does not say yet what is an index: each letter belongs to a unit (one kernel with one letter in one kind of
//! script), and a unit is read as an index or not; scopes that may or may not count are switches. `reading.rs`
//! chooses; `balance.rs` judges a choice. A sketch depends on the formula's own tree alone.

mod build;
mod builder;
mod doubts;
mod draft;
mod habits;
mod scripts;

use compact_str::CompactString;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{Level, RelationKind, Statement};

use crate::conventions::built_in::LetterClass;

pub(crate) use scripts::is_exponential;

/// A statement reduced to what matters for its balance.
#[derive(Clone, Debug, Default)]
pub struct Sketch {
    /// The statement's place.
    pub span: Span,
    /// Its sides.
    pub sides: Vec<Side>,
    /// How their letters are held together.
    pub code: Vec<Op>,
    /// The terms of all sums.
    pub terms: Vec<Term>,
    /// Letters that sum signs bind.
    pub bound: Vec<Bound>,
    /// Between the sides.
    pub relations: Vec<RelationKind>,
    /// Letters in scripts.
    pub places: Vec<Place>,
    /// The different letters among them, in the order of their first place.
    pub letters: Vec<CompactString>,
    /// What they may be read as, together.
    pub units: Vec<Unit>,
    /// Scopes that may count or not.
    pub switches: Vec<Switch>,
    /// The switch that lets sum signs reach over the following terms, if there is a sum sign.
    pub reach: Option<u32>,
    /// Commands that nobody knows, outside scripts: their arguments are taken as factors, on trust.
    pub unknown: Vec<CompactString>,
    /// Letters and words that stand as quantities, with their places.
    pub quantities: Vec<(CompactString, Span)>,
    /// Letters that the statement lists as coordinates: `x^\alpha = (s, \theta)`.
    pub coordinates: Vec<CompactString>,
    /// Scripts that hold a whole factor behind a letter.
    pub swallowed: Vec<Swallowed>,
    /// Every use of a kernel with letters in its scripts: its name and how many letters and numbers stand above and
    /// below.
    pub forms: Vec<(CompactString, u8, u8)>,
    /// Stacked kernels: upper and lower scripts one above the other, with the kernel's name.
    pub stacked: Vec<Stacked>,
    /// Why the statement is not judged, if it is not.
    pub unjudged: Option<&'static str>,
}

/// A side of a statement.
#[derive(Clone, Copy, Debug)]
pub struct Side {
    /// Its place.
    pub span: Span,
    /// Its terms: a run of `Op::Term`s in the code.
    pub code: Run,
    /// How many terms.
    pub terms: u32,
    /// Whether it matches anything: zero, words, a list.
    pub any: bool,
    /// Whether it is zero.
    pub zero: bool,
}

/// A stretch of the code.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Run {
    /// The first instruction.
    pub start: u32,
    /// One past the last.
    pub end: u32,
}

/// A term of a side or of a sum in brackets.
#[derive(Clone, Copy, Debug)]
pub struct Term {
    /// Its place.
    pub span: Span,
    /// The letters that stand in it, a bit for each (see `Sketch::bit`).
    pub letters: u64,
    /// Whether it matches anything.
    pub any: bool,
    /// Matches anything while this switch is on: a list of components, a map's value.
    pub loose: Option<u32>,
    /// Whether a command stands in it that nobody knows and that may print indices of its own.
    pub opaque: bool,
    /// Whether it is a bare number.
    pub number: bool,
    /// Whether it is written without indices in a vector notation, so that it may stand for one with a free index.
    pub shorthand: bool,
}

/// How letters are held together, as a list of instructions: what holds others says where they end. One flat list
/// for a statement, since the count walks it many times.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Op {
    /// A letter in a script.
    Place(u32),
    /// A sum in brackets; its terms follow.
    Sum(u32),
    /// A term, by its number; its factors follow.
    Term(u32, u32),
    /// A square: closes the free indices inside while the switch is on.
    Square(u32, u32),
    /// Another power: a free index inside is not judged.
    Power(u32),
    /// The argument of a function: its dummies are local to it.
    Scope(u32),
    /// An argument: counts only while the switch is on; else a term that lacks a letter may have it from here.
    Argument(u32, u32),
    /// Counts only while the switch is on.
    Switch(u32, u32),
    /// A sum sign: these letters (of `Sketch::bound`) are bound in the rest of the product.
    Bind(u32, u32),
}

impl Op {
    /// Where what it holds ends, if it holds anything.
    pub(crate) fn end_mut(&mut self) -> Option<&mut u32> {
        match self {
            Self::Place(_) | Self::Bind(..) => None,
            Self::Sum(end) | Self::Power(end) | Self::Scope(end) => Some(end),
            Self::Term(_, end) | Self::Square(_, end) | Self::Argument(_, end) | Self::Switch(_, end) => Some(end),
        }
    }
}

/// A letter that a sum sign binds.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Bound {
    /// The letter.
    pub letter: CompactString,
    /// Binds only while this switch is on.
    pub switch: Option<u32>,
    /// Where it stands at the sum sign.
    pub span: Span,
}

/// A letter in a script.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Place {
    /// The letter in LaTeX spelling with its primes.
    pub letter: CompactString,
    /// Its number among the letters of the sketch.
    pub number: u16,
    /// The level that counts (below a fraction line it is flipped).
    pub level: Level,
    /// The level as written.
    pub written: Level,
    /// The letter.
    pub span: Span,
    /// The script it stands in.
    pub script: Span,
    /// How many letters share the script.
    pub company: u16,
    /// The use of a kernel that it belongs to, as a number of `Sketch::forms`.
    pub form: u16,
    /// What it is read with.
    pub unit: u32,
}

/// A kernel with one letter in one kind of script: read alike throughout the statement.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
pub struct Unit {
    /// The kernel's name with decorations; empty for a bracket.
    pub kernel: CompactString,
    /// The kernel's bare letter.
    pub kernel_letter: CompactString,
    /// The letter.
    pub letter: CompactString,
    /// Its class.
    pub class: LetterClass,
    /// Whether it usually names a coordinate.
    pub coordinate: bool,
    /// The level as written.
    pub level: Level,
    /// The kind of script.
    pub shape: Shape,
    /// Whether it stands above and the same letter stands below in the statement too.
    pub mirrored: bool,
    /// Whether the letter counts on this kernel elsewhere in the statement: `x^k` beside `x^{k+1}`.
    pub counter: bool,
    /// Whether the kernel is a vector written without indices (bold, an arrow), so that its script is no component.
    pub vector: bool,
    /// What notation alone says, in tenths of a unit of price: positive for an index.
    pub bias: i32,
}

/// The kind of script that a letter stands in.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Shape {
    /// The only letter on its kernel.
    Lone,
    /// One of several letters or numbers on its kernel.
    Several,
    /// Below a point with an upper index, `x^i_a`: a particle's name or a frame's index.
    Particle,
    /// On a bracket.
    OnGroup,
    /// Alone in brackets of its own, `e_{(a)}`: a frame's index or the name of an order.
    Bracketed,
}

/// A scope that may count or not.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Switch {
    /// Whether it counts in the likelier reading.
    pub on: bool,
    /// What the other reading costs, in tenths.
    pub price: i32,
    /// Whether an argument that does not count may give its letters to a term that lacks them.
    pub lends: bool,
}

impl Switch {
    /// A switch that only counts or does not.
    pub const fn new(on: bool, price: i32) -> Self {
        Self { on, price, lends: false }
    }
}

/// A script that seems to have swallowed a factor: `\nabla_{\mu T^{\mu i}}`.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Swallowed {
    /// The whole script with its braces.
    pub script: Span,
    /// Where the swallowed part begins.
    pub from: Span,
    /// The letters that the script would hold without it.
    pub kept: Span,
}

/// A kernel with scripts on both levels, each with letters.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Stacked {
    /// The kernel's name and numbers of letters above and below.
    pub kernel: (CompactString, u8, u8),
    /// Its place with scripts.
    pub span: Span,
    /// The later script.
    pub second: Span,
    /// Whether the scripts are staggered.
    pub staggered: bool,
}

impl Sketch {
    /// The sketch of a statement.
    pub fn of(statement: &Statement) -> Self {
        build::sketch(statement)
    }

    /// Takes every place to where it stands in another text.
    pub fn move_spans(&mut self, to: impl Fn(Span) -> Span) {
        let spans = std::iter::once(&mut self.span)
            .chain(self.sides.iter_mut().map(|side| &mut side.span))
            .chain(self.terms.iter_mut().map(|term| &mut term.span))
            .chain(self.places.iter_mut().flat_map(|place| [&mut place.span, &mut place.script]))
            .chain(self.bound.iter_mut().map(|bound| &mut bound.span))
            .chain(self.quantities.iter_mut().map(|(_, span)| span))
            .chain(self.swallowed.iter_mut().flat_map(|it| [&mut it.script, &mut it.from, &mut it.kept]))
            .chain(self.stacked.iter_mut().flat_map(|it| [&mut it.span, &mut it.second]));
        spans.for_each(|span| *span = to(*span));
    }

    /// The bit of a letter in `TermNode::letters`; letters from the 64th on share one.
    pub const fn bit(letter: u16) -> u64 {
        1 << if letter < 63 { letter } else { 63 }
    }

    /// The numbers of all letters.
    pub fn letter_numbers(&self) -> impl Iterator<Item = u16> + use<> {
        0..u16::try_from(self.letters.len()).unwrap_or(u16::MAX)
    }

    /// The number of a letter.
    pub fn number_of(&self, letter: &str) -> Option<u16> {
        self.letters.iter().position(|other| other == letter).and_then(|at| u16::try_from(at).ok())
    }

    /// Numbers the letters and notes where they stand; after every change of the places.
    pub fn settle(&mut self) {
        self.letters.clear();
        for place in &mut self.places {
            let known = self.letters.iter().position(|letter| *letter == place.letter);
            let at = known.unwrap_or_else(|| {
                self.letters.push(place.letter.clone());
                self.letters.len() - 1
            });
            place.number = u16::try_from(at).unwrap_or(u16::MAX);
        }
        for at in 0..self.code.len() {
            if let Some(Op::Term(term, end)) = self.code.get(at).copied() {
                let inside = self.code.get(at..end as usize).unwrap_or_default();
                let letters = inside.iter().fold(0, |letters, op| match op {
                    Op::Place(place) => letters | self.place(*place).map_or(0, |place| Self::bit(place.number)),
                    _ => letters,
                });
                if let Some(term) = self.terms.get_mut(term as usize) {
                    term.letters = letters;
                }
            }
        }
    }

    /// The terms of a side, each with its factors.
    pub fn side_terms(&self, side: &Side) -> impl Iterator<Item = (&Term, Run)> {
        let mut at = side.code.start;
        std::iter::from_fn(move || {
            let Some(Op::Term(number, end)) = self.code.get(at as usize).copied().filter(|_| at < side.code.end) else {
                return None;
            };
            let inside = Run { start: at + 1, end };
            at = end;
            self.terms.get(number as usize).map(|term| (term, inside))
        })
    }

    /// Puts an instruction after another.
    pub(crate) fn insert_after(&mut self, at: usize, op: Op) {
        let Ok(behind) = u32::try_from(at + 1) else { return };
        self.code.insert(at + 1, op);
        let ends = self.code.iter_mut().enumerate().filter(|(n, _)| *n != at + 1);
        ends.filter_map(|(_, op)| op.end_mut()).filter(|end| **end >= behind).for_each(|end| *end += 1);
        for side in &mut self.sides {
            side.code.start += u32::from(side.code.start >= behind);
            side.code.end += u32::from(side.code.end >= behind);
        }
    }

    /// The place of a number.
    pub fn place(&self, number: u32) -> Option<&Place> {
        self.places.get(number as usize)
    }
}
