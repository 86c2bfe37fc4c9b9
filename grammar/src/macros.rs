//! The author's macros: definitions, and the table of those in force at a place.
//!
//! A definition keeps its body as text; expansion (see `expansion.rs`) runs under a budget and gives every
//! token the span of the place in the document that produced it.

pub(crate) mod cursor;
mod definition;
pub(crate) mod expansion;

use rustc_hash::FxHashMap;
use std::sync::Arc;

use crate::span::Span;

pub(crate) use definition::{defines, defines_environment};
pub use definition::{read_definition, read_environment};

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
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Macros {
    meanings: FxHashMap<String, Vec<(u32, Arc<Macro>)>>,
}

impl Macros {
    /// Adds a meaning that holds from byte `from` of the file on (0: from its start).
    pub fn define(&mut self, meaning: Arc<Macro>, from: u32, provide: bool) {
        let meanings = self.meanings.entry(meaning.name.clone()).or_default();
        if !provide || meanings.is_empty() {
            meanings.push((from, meaning));
        }
    }

    /// The meaning of a name (without backslash) at a byte of the file.
    pub fn at(&self, name: &str, place: u32) -> Option<&Arc<Macro>> {
        // Invariant: meanings stand in the order of their places.
        let all = self.meanings.get(name)?;
        let known = all.partition_point(|(from, _)| *from <= place);
        known.checked_sub(1).and_then(|at| all.get(at)).map(|(_, meaning)| meaning)
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

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::indexing_slicing)]
    use super::*;

    fn strain(body: &str) -> Arc<Macro> {
        let (name, body) = ("strain".to_owned(), body.to_owned());
        Arc::new(Macro { name, parameters: Vec::new(), body, operator: false })
    }

    #[track_caller]
    fn means(macros: &Macros, place: u32, body: Option<&str>) {
        assert_eq!(macros.at("strain", place).map(|meaning| meaning.body.as_str()), body);
    }

    #[test]
    fn a_meaning_holds_from_its_place_on() {
        let mut macros = Macros::default();
        macros.define(strain("e"), 10, false);
        macros.define(strain("u"), 20, false);
        means(&macros, 9, None);
        means(&macros, 10, Some("e"));
        means(&macros, 25, Some("u"));
    }

    #[test]
    fn a_provided_meaning_yields_to_one_that_is_there() {
        let mut macros = Macros::default();
        macros.define(strain("e"), 0, true);
        macros.define(strain("u"), 5, true);
        means(&macros, 9, Some("e"));
    }

    #[test]
    fn another_file_inherits_the_last_meanings() {
        let mut macros = Macros::default();
        macros.define(strain("e"), 10, false);
        macros.define(strain("u"), 20, false);
        means(&macros.inherited(), 0, Some("u"));
        assert!(Macros::default().inherited().is_empty());
    }
}
