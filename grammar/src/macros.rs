//! The author's macros: definitions, and the table of those in force at a place.
//!
//! A definition keeps its body as text; expansion (see `expansion.rs`) runs under a budget and gives every
//! token the span of the place in the document that produced it.

mod definition;
pub(crate) mod expansion;

use rustc_hash::FxHashMap;
use std::sync::Arc;

use crate::span::Span;

pub use definition::read_definition;

/// One parameter of a macro, in the order of its call.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Parameter {
    /// `{..}` or one token.
    Mandatory,
    /// `[..]`, with the text that stands for it when it is absent.
    Optional(String),
    /// A star that may follow the name.
    Star,
    /// Everything up to this delimiter text (`\def\a#1.{..}`).
    Until(String),
}

/// A macro of the author's.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Macro {
    /// The name without the backslash.
    pub name: String,
    /// Parameters in call order; `#1` in the body is the first.
    pub parameters: Vec<Parameter>,
    /// The body as written, `#1` .. `#9` for the parameters.
    pub body: String,
    /// `\DeclareMathOperator`: the body is the printed name of an operator.
    pub operator: bool,
}

/// A definition at its place in a file.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Definition {
    /// The whole defining command.
    pub span: Span,
    /// What it defines; nothing for `\let` to an unknown name.
    pub meaning: Arc<Macro>,
    /// `\providecommand`: only if the name is free.
    pub provide: bool,
}

/// The macros in force: a name has one meaning from each place on.
#[derive(Clone, Debug, Default)]
pub struct Macros {
    meanings: FxHashMap<String, Vec<(u32, Arc<Macro>)>>,
}

impl Macros {
    /// Adds a meaning that holds from byte `from` of the file on (0: from its start).
    pub fn define(&mut self, meaning: Arc<Macro>, from: u32, provide: bool) {
        let meanings = self.meanings.entry(meaning.name.clone()).or_default();
        if !(provide && !meanings.is_empty()) {
            meanings.push((from, meaning));
        }
    }

    /// The meaning of a name (without backslash) at a byte of the file.
    pub fn at(&self, name: &str, place: u32) -> Option<&Arc<Macro>> {
        self.meanings.get(name)?.iter().rev().find(|(from, _)| *from <= place).map(|(_, meaning)| meaning)
    }

    /// Whether no macro is defined.
    pub fn is_empty(&self) -> bool {
        self.meanings.is_empty()
    }

    /// The same meanings, all in force from the start of another file: what a part or a root's text inherits.
    pub fn inherited(&self) -> Self {
        let last = |all: &Vec<(u32, Arc<Macro>)>| all.last().map(|(_, m)| vec![(0, m.clone())]).unwrap_or_default();
        Self { meanings: self.meanings.iter().map(|(name, all)| (name.clone(), last(all))).collect() }
    }
}
