//! The documents of a paper as they stand after reading and counting: what a view holds and hands out.
//!
//! Sketches are shared with the memory of earlier versions (`memory.rs`), so that their places are those of the text
//! that the formula was read in; `Statement` knows how far it has moved since.

use std::borrow::Cow;
use std::sync::Arc;

use indexwise_grammar::Document;
use indexwise_grammar::hosts::Host;
use indexwise_grammar::macros::Macros;
use indexwise_grammar::span::Span;

use crate::conventions::declared::Declared;
use crate::conventions::prices::Prices;
use crate::reading::{self, Reading};
use crate::sketch::Sketch;

/// A document as read, with what is in force in it. Its formulas are without their statements: the sketches are
/// all that is needed of them.
pub(super) struct Read {
    pub text: Arc<str>,
    pub host: Host,
    pub document: Document,
    pub macros: Macros,
    pub declared: Declared,
}

/// A document with the statements that have scripts, but for those that the author says to skip.
pub(super) struct Sketched {
    pub read: Read,
    pub statements: Vec<Statement>,
}

/// A statement.
#[derive(Clone)]
pub(super) struct Statement {
    /// The number of its formula.
    pub formula: usize,
    /// Its sketch, in the text that it was read in.
    pub kept: Arc<Sketch>,
    /// How far it stands from where it stood then, in bytes.
    pub moved: i32,
    /// Its cheapest reading under the evidence of the paper.
    pub reading: Arc<Reading>,
    /// Where the memory keeps it: the number of the kept formula, and of the statement in it.
    pub place: (u32, u32),
}

impl Statement {
    /// Where it stands.
    pub fn span(&self) -> Span {
        self.kept.span.moved(self.moved)
    }

    /// Its sketch where it stands.
    pub fn sketch(&self) -> Cow<'_, Sketch> {
        if self.moved == 0 {
            return Cow::Borrowed(&self.kept);
        }
        let mut sketch = Sketch::clone(&self.kept);
        sketch.move_spans(|span| span.moved(self.moved));
        Cow::Owned(sketch)
    }

    /// The cheapest reading under other evidence than the paper's own.
    pub fn read(&self, prices: &Prices<'_>) -> Reading {
        reading::read(&self.kept, self.kept.units.iter().map(|unit| prices.score(unit)).collect())
    }
}
