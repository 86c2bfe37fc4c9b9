//! A contraction written out over the range of its letters, with what vanishes or coincides by symmetry collected.
//!
//! Which sums: with the cursor on a summed letter that letter's sum, elsewhere in a term all sums of the term. A term
//! is the innermost product that holds the place and closes a sum; sums that brackets inside it close stay as they are.
//! The one idea: every choice of values is written by putting values into the author's own tree, so that the text looks
//! like the author's, and is compared through the products that the tree is flattened to, where each value is a
//! component (`terms`). Symmetry is what is declared, or custom for the usual kernels; of all others nothing is assumed.
//!
//! Traps: factors are taken to commute unless they are declared not to, or are matrices, spinors or basis vectors by
//! custom. A derivative acts on the factor right after it. A value 2 above a letter is written `x^2`, as in print. That a
//! kernel is antisymmetric in more slots than there are values is seen only where all of them have values.

mod collecting;
pub(super) mod place;
mod ranges;
mod scaling;
#[cfg(test)]
mod tests;

use std::fmt;

use compact_str::CompactString;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{Atom, Item, ItemKind, Script, Sum, Term, each_script_mut};
use indexwise_grammar::write::{Dialect, write_sum, write_term};

use crate::ledger::shown;
use crate::paper::{Asked, Unasked, View};

use collecting::{Collected, collect};
use place::{Located, factors_of, items_of, locate};
pub(in crate::editing) use ranges::range_of;

/// The most terms that a contraction is written out to, before any are collected: four letters over four values.
pub const TERMS_BUDGET: usize = 256;
/// The most factors and letters in all terms together, before any are collected.
pub const SIZE_BUDGET: usize = 65_536;

/// A contraction, written out.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct WrittenOut {
    /// The place of the term, without its sign.
    pub span: Span,
    /// The term as it stands, with its sign.
    pub term: Forms,
    /// The letters whose sums are written out, in the order of their first place in the term.
    pub letters: Vec<Summed>,
    /// How many choices of values there are: what `terms` and `vanished` come from.
    pub choices: usize,
    /// The whole sum; `0` if nothing is left.
    pub sum: Forms,
    /// Its terms in the order in which their first choice of values comes, each with its coefficient.
    pub terms: Vec<Forms>,
    /// What is left out, in the same order.
    pub vanished: Vec<Vanished>,
    /// Whether vanishing and coinciding terms were looked for; not where the term holds what is not understood.
    pub collected: bool,
    /// Kernels without a declaration that stand more than once and were taken to commute, in LaTeX.
    pub commuting: Vec<CompactString>,
}

/// A formula in the three ways of writing.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Forms {
    /// For a LaTeX or Markdown document, without delimiters.
    pub latex: String,
    /// For people who read a terminal.
    pub unicode: String,
    /// For a plain note.
    pub note: String,
}

/// A summed letter with its values.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Summed {
    /// In LaTeX.
    pub letter: CompactString,
    /// Numbers, or names in LaTeX; at least one.
    pub values: Vec<CompactString>,
    /// Where the values are taken from.
    pub source: RangeSource,
}

impl Summed {
    /// Whether the range is the author's.
    pub const fn range_declared(&self) -> bool {
        matches!(self.source, RangeSource::Family | RangeSource::Coordinates)
    }
}

/// Where a range is taken from.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum RangeSource {
    /// The letter's family is declared with it, or that of a slot that it fills.
    Family,
    /// The names of the coordinates are declared.
    Coordinates,
    /// Nothing is declared: custom.
    Custom,
    /// The declared range ends with a letter, whose value nobody knows: custom.
    Open(CompactString),
}

/// A term that is left out.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Vanished {
    /// The term, without a coefficient.
    pub term: Forms,
    /// Why.
    pub because: Because,
}

/// Why a term is left out.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Because {
    /// This factor of it is zero by the symmetry of its kernel, or because it is Kronecker's delta.
    Factor(Forms),
    /// The symmetries of the term together leave nothing.
    Symmetry,
    /// It cancels against other terms.
    Cancels,
}

/// Why nothing is written out.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Refusal {
    /// No formula stands there.
    NoFormula,
    /// A formula stands there, but no summed index.
    NoSum,
    /// The letter is summed by a sum sign.
    SumSign(CompactString),
    /// The letter stands more than twice in a product.
    Thrice(CompactString),
    /// The author says to skip the formula.
    Skipped,
    /// Words say that no sum is meant.
    WithoutSum,
    /// The formula is not read there, and why.
    Unread(&'static str),
    /// A command stands there that is defined nowhere.
    Unknown(CompactString),
    /// The sum has so many terms; nothing if they are more than can be counted.
    TooMany(Option<usize>),
    /// The terms are too long.
    TooLong,
}

impl fmt::Display for Refusal {
    fn fmt(&self, out: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::NoFormula => write!(out, "no formula stands there"),
            Self::NoSum => write!(out, "no summed index stands there"),
            Self::SumSign(letter) => {
                write!(out, "{} is summed by a sum sign; only sums by repeated letters are written out", shown(letter))
            }
            Self::Thrice(letter) => write!(out, "{} stands more than twice in the product", shown(letter)),
            Self::Skipped => write!(out, "the author says to skip this formula"),
            Self::WithoutSum => write!(out, "the text says that no sum is meant"),
            Self::Unread(reason) => write!(out, "the formula is not read there: {reason}"),
            Self::Unknown(command) => write!(out, "the formula is not understood: {command} is defined nowhere"),
            Self::TooMany(Some(terms)) => {
                write!(out, "the sum has {terms} terms, more than the budget of {TERMS_BUDGET}")
            }
            Self::TooMany(None) => write!(out, "the sum has more terms than the budget of {TERMS_BUDGET}"),
            Self::TooLong => write!(out, "the sum is longer than the budget of {SIZE_BUDGET} factors and letters"),
        }
    }
}

impl From<Unasked> for Refusal {
    fn from(reason: Unasked) -> Self {
        match reason {
            Unasked::NoFormula => Self::NoFormula,
            Unasked::NoScripts => Self::NoSum,
            Unasked::Skipped => Self::Skipped,
            Unasked::WithoutSum => Self::WithoutSum,
            Unasked::Unread(reason) => Self::Unread(reason),
        }
    }
}

/// Writes out the contraction at a byte offset of a document of the paper, by its number.
pub fn write_out(view: &View, document: usize, offset: u32) -> Result<WrittenOut, Refusal> {
    view.statement_at(document, offset, |asked| written_out(asked, offset))?
}

/// Reasons for which a statement is not judged that do not matter to its sums.
const NO_OBSTACLE: [&str; 2] = ["nothing to compare", "the author asks whether it holds"];

fn written_out(asked: &Asked<'_>, offset: u32) -> Result<WrittenOut, Refusal> {
    if let Some(reason) = asked.sketch.unjudged.filter(|reason| !NO_OBSTACLE.contains(reason)) {
        return Err(Refusal::Unread(reason));
    }
    let located = locate(asked, offset)?;
    understood(located.term, asked)?;
    let letters: Vec<Summed> = located.letters.iter().map(|letter| range_of(letter, located.term, asked)).collect();
    let choices = affordable(located.term, &letters)?;
    let collected = collect(asked, &located, &letters);
    Ok(dressed(&located, letters, choices, collected))
}

/// Whether all of a term is read and known.
fn understood(term: &Term, asked: &Asked<'_>) -> Result<(), Refusal> {
    for factor in factors_of(term) {
        match &factor.atom {
            Atom::Unread(reason) => return Err(Refusal::Unread(reason)),
            Atom::Matrix => return Err(Refusal::Unread("a matrix or a list of cases is not looked into")),
            Atom::Dots => return Err(Refusal::Unread("an ellipsis stands for more")),
            Atom::Unknown(command, _) if !asked.prices.trusts(std::slice::from_ref(command)) => {
                return Err(Refusal::Unknown(command.clone()));
            }
            _ => {}
        }
    }
    let complete = [Dialect::Latex, Dialect::Note].into_iter().all(|dialect| write_term(term, dialect).complete);
    if complete { Ok(()) } else { Err(Refusal::Unread("something in the term cannot be written again")) }
}

/// How many choices of values there are, if they are within the budgets.
fn affordable(term: &Term, letters: &[Summed]) -> Result<usize, Refusal> {
    let choices = letters.iter().try_fold(1_usize, |product, letter| product.checked_mul(letter.values.len()));
    let choices = choices.filter(|choices| *choices <= TERMS_BUDGET).ok_or(Refusal::TooMany(choices))?;
    let size = factors_of(term).len().saturating_add(items_of(term).len());
    if size.saturating_mul(choices) > SIZE_BUDGET { Err(Refusal::TooLong) } else { Ok(choices) }
}

/// The answer, with everything written in the three ways.
fn dressed(located: &Located<'_>, letters: Vec<Summed>, choices: usize, collected: Collected) -> WrittenOut {
    let mut terms: Vec<Term> = collected.terms;
    terms.iter_mut().for_each(closed_up);
    if let Some(first) = terms.first_mut() {
        scaling::without_plus(first);
    }
    let sum = if terms.is_empty() { scaling::zero() } else { Sum::of(terms.clone()) };
    WrittenOut {
        span: located.term.span,
        term: forms_of_term(located.term),
        letters,
        choices,
        sum: forms(|dialect| write_sum(&sum, dialect).text),
        terms: terms.iter().map(forms_of_term).collect(),
        vanished: collected.vanished,
        collected: collected.complete,
        commuting: collected.commuting,
    }
}

fn forms_of_term(term: &Term) -> Forms {
    let mut term = term.clone();
    scaling::without_plus(&mut term);
    closed_up(&mut term);
    forms(|dialect| write_term(&term, dialect).text)
}

/// `g^{12}` for `g^{1 2}`: digits side by side in a script are read as so many values.
fn closed_up(term: &mut Term) {
    let digit = |item: &Item| match &item.kind {
        ItemKind::Number(number) if number.len() == 1 => Some(number.clone()),
        _ => None,
    };
    each_script_mut(term, &mut |script: &mut Script| {
        let mut items: Vec<Item> = Vec::with_capacity(script.items.len());
        let mut joins = false;
        for item in script.items.drain(..) {
            let own = digit(&item);
            match (items.last_mut().map(|last| &mut last.kind), &own) {
                (Some(ItemKind::Number(before)), Some(own)) if joins => before.push_str(own),
                _ => items.push(item),
            }
            joins = own.is_some();
        }
        script.items = items;
    });
}

fn forms(write: impl Fn(Dialect) -> String) -> Forms {
    Forms { latex: write(Dialect::Latex), unicode: write(Dialect::Unicode), note: write(Dialect::Note) }
}
