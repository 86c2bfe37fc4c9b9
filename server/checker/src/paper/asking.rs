//! The statement at a place of a document, with its tree and its reading: what a question of an editor begins with.
//!
//! The view was read and counted as for a check, so that a question sees what the check saw.

use std::borrow::Cow;
use std::sync::Arc;

use indexwise_grammar::read_regions;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{self, Formula};

use rustc_hash::FxHashSet;

use crate::conventions::inferred::Prices;
use crate::ledger::Judged;
use crate::reading::{self, Reading};
use crate::sketch::Sketch;
use crate::terms::Eyes;
use crate::terms::symmetries::Customs;

use super::directed::skipped;
use super::judging::{Trees, is_without_sum};
use super::{Sketched, Statement, View};

/// Formulas that are read together where many are looked at.
const FORMULAS_AT_ONCE: usize = 64;

/// A statement that somebody asks about.
pub(crate) struct Asked<'a> {
    /// The formula that it stands in, without its statements.
    pub formula: &'a Formula,
    /// The number of that formula in its document.
    pub number: usize,
    /// Its tree.
    pub tree: &'a tree::Statement,
    /// Its sketch.
    pub sketch: &'a Sketch,
    /// How it is read.
    pub reading: &'a Reading,
    /// The evidence.
    pub prices: &'a Prices<'a>,
    /// What its letters and kernels mean.
    pub eyes: &'a Eyes<'a>,
}

impl<'a> Asked<'a> {
    /// The statement as the rules see it, without its faults; `text` is that of its document.
    pub(crate) fn judged(&self, text: &'a str) -> Judged<'a> {
        let (sketch, reading) = (Cow::Borrowed(self.sketch), self.reading.clone());
        Judged { text, formula: self.formula, sketch, reading, prices: *self.prices, faults: Vec::new() }
    }
}

/// Why there is no statement to ask about.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Unasked {
    /// No formula stands there.
    NoFormula,
    /// A formula, but at that place no statement with scripts.
    NoScripts,
    /// The author says to skip it.
    Skipped,
    /// Words say that no sum is meant.
    WithoutSum,
    /// That part could not be read, and why.
    Unread(&'static str),
}

impl View {
    /// Hands the statement at a byte offset of a document to a function.
    pub(crate) fn statement_at<T>(
        &self,
        document: usize,
        offset: u32,
        take: impl FnOnce(&Asked<'_>) -> T,
    ) -> Result<T, Unasked> {
        let own = self.documents.get(document).ok_or(Unasked::NoFormula)?;
        let (number, formula) = formula_at(&own.read.document.formulas, offset).ok_or(Unasked::NoFormula)?;
        if let Some(part) = formula.unread.iter().find(|part| part.span.start <= offset && offset < part.span.end) {
            return Err(Unasked::Unread(part.reason));
        }
        if skipped(&own.read.declared, &own.read.document.formulas).contains(&number) {
            return Err(Unasked::Skipped);
        }
        if is_without_sum(&own.read, number) {
            return Err(Unasked::WithoutSum);
        }
        let statement = statement_of(own, number, offset).ok_or(Unasked::NoScripts)?;
        let mut looker = self.looker(document).ok_or(Unasked::NoFormula)?;
        looker.look(statement, |asked| Some(take(asked))).ok_or(Unasked::NoScripts)
    }

    /// Hands every statement with scripts of a document that touches a stretch of the text to a function, in order.
    /// Those that the author says to skip are left out.
    pub(crate) fn each_statement(&self, document: usize, within: Span, mut take: impl FnMut(&Asked<'_>)) {
        let Some((own, mut looker)) = self.documents.get(document).zip(self.looker(document)) else { return };
        let first = own.statements.partition_point(|statement| statement.sketch.span.end < within.start);
        let touching = own.statements.iter().skip(first);
        for statement in touching.take_while(|statement| statement.sketch.span.start <= within.end) {
            looker.look(statement, &mut take);
        }
    }

    /// The numbers of the formulas of a document that the author says to skip.
    pub(crate) fn skipped(&self, document: usize) -> FxHashSet<usize> {
        let own = self.documents.get(document).map(|own| &own.read);
        own.map(|read| skipped(&read.declared, &read.document.formulas)).unwrap_or_default()
    }

    /// Hands every statement of a document that touches a stretch of the text to a function, in order: those without
    /// scripts and those that the author says to skip among them, read by the same evidence.
    pub(crate) fn each_tree(&self, document: usize, within: Span, mut take: impl FnMut(&Asked<'_>)) {
        let Some((own, looker)) = self.documents.get(document).zip(self.looker(document)) else { return };
        let read = &own.read;
        let formulas = &read.document.formulas;
        let first = formulas.partition_point(|formula| formula.span.end < within.start);
        let end = formulas.partition_point(|formula| formula.span.start <= within.end).max(first);
        // There is one formula for each region.
        let regions = read.document.scan.regions.get(first..end).unwrap_or_default();
        for (chunk, regions) in regions.chunks(FORMULAS_AT_ONCE).enumerate() {
            let number = first + chunk * FORMULAS_AT_ONCE;
            for (number, formula) in (number..).zip(read_regions(regions, &read.text, read.host, &read.macros)) {
                let touching = |tree: &&tree::Statement| tree.span.start <= within.end && within.start <= tree.span.end;
                for tree in formula.statements.iter().filter(touching) {
                    looker.look_at_tree(number, tree, &mut take);
                }
            }
        }
    }

    fn looker(&self, document: usize) -> Option<Looker<'_>> {
        let prices = self.prices(document)?;
        let own = self.documents.get(document)?;
        let (scores, customs) = self.scored(document)?;
        Some(Looker { own, prices, scores, customs: *customs, trees: Trees::default() })
    }
}

/// Looks at statements of a document one after another.
struct Looker<'v> {
    own: &'v Sketched,
    prices: Prices<'v>,
    scores: &'v [i32],
    customs: Customs,
    trees: Trees,
}

impl Looker<'_> {
    fn look<T: Default>(&mut self, statement: &Statement, take: impl FnOnce(&Asked<'_>) -> T) -> T {
        let Some(formula) = self.own.read.document.formulas.get(statement.formula) else { return T::default() };
        let (sketch, prices) = (&*statement.sketch, &self.prices);
        let reading = &statement.read(self.scores);
        let eyes = &Eyes::new(sketch, &reading.choice, prices, self.customs);
        self.trees.statement(&self.own.read, statement.formula, sketch.span, |tree| {
            take(&Asked { formula, number: statement.formula, tree, sketch, reading, prices, eyes })
        })
    }
}

impl Looker<'_> {
    fn look_at_tree(&self, number: usize, tree: &tree::Statement, take: &mut impl FnMut(&Asked<'_>)) {
        let Some(formula) = self.own.read.document.formulas.get(number) else { return };
        let known = self.own.statements.partition_point(|statement| statement.formula < number);
        let mut known = self.own.statements.iter().skip(known).take_while(|statement| statement.formula == number);
        let prices = &self.prices;
        let (sketch, reading) = match known.find(|statement| statement.sketch.span == tree.span) {
            Some(statement) => (statement.sketch.clone(), statement.read(self.scores)),
            None => {
                let sketch = Sketch::of(tree);
                let scores = sketch.units.iter().map(|unit| prices.score(unit)).collect();
                let reading = reading::read(&sketch, scores);
                (Arc::new(sketch), reading)
            }
        };
        let eyes = &Eyes::new(&sketch, &reading.choice, prices, self.customs);
        take(&Asked { formula, number, tree, sketch: &sketch, reading: &reading, prices, eyes });
    }
}

/// The formula that holds an offset, its end included where no other begins.
fn formula_at(formulas: &[Formula], offset: u32) -> Option<(usize, &Formula)> {
    let holds = |formula: &Formula| formula.span.start <= offset && offset < formula.span.end;
    let inside = formulas.iter().enumerate().find(|(_, formula)| holds(formula));
    inside.or_else(|| formulas.iter().enumerate().find(|(_, formula)| formula.span.end == offset))
}

/// The statement that holds an offset; at its end too, where a cursor may stand.
fn statement_of(document: &Sketched, formula: usize, offset: u32) -> Option<&Statement> {
    let own = || document.statements.iter().filter(|statement| statement.formula == formula);
    let holds = |statement: &&Statement| statement.sketch.span.start <= offset && offset < statement.sketch.span.end;
    own().find(holds).or_else(|| own().find(|statement| statement.sketch.span.end == offset))
}
