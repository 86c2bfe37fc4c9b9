//! The statement at a place of a document, with its tree and its reading: what a question of an editor begins with.
//!
//! The paper is read and its habits are counted as for a check, so that a question sees what the check saw.

use indexwise_grammar::tree::{self, Formula};

use crate::conventions::inferred::Prices;
use crate::reading::Reading;
use crate::sketch::Sketch;
use crate::terms::Eyes;
use crate::terms::symmetries::Customs;

use super::directed::skipped;
use super::judging::{Trees, is_without_sum};
use super::{Cancel, Paper, Sketched, Statement, gather, read_paper, total};

/// A statement that somebody asks about.
pub(crate) struct Asked<'a> {
    /// The formula that it stands in, without its statements.
    pub formula: &'a Formula,
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

/// Hands the statement at a byte offset of a document of the paper to a function.
pub(crate) fn statement_at<T>(
    paper: &Paper,
    (document, offset): (usize, u32),
    cancel: &Cancel,
    take: impl FnOnce(&Asked<'_>) -> T,
) -> Result<T, Unasked> {
    let read = read_paper(paper);
    let sketched: Vec<Sketched<'_>> = read.iter().map(Sketched::of).collect();
    let own = sketched.get(document).ok_or(Unasked::NoFormula)?;
    let (number, formula) = formula_at(&own.read.document.formulas, offset).ok_or(Unasked::NoFormula)?;
    if let Some(part) = formula.unread.iter().find(|part| part.span.start <= offset && offset < part.span.end) {
        return Err(Unasked::Unread(part.reason));
    }
    if skipped(&own.read.declared, &own.read.document.formulas).contains(&number) {
        return Err(Unasked::Skipped);
    }
    if is_without_sum(own.read, number) {
        return Err(Unasked::WithoutSum);
    }
    let statement = statement_of(own, number, offset).ok_or(Unasked::NoScripts)?;
    let evidence = gather(&sketched, cancel);
    let all = total(&evidence);
    let file = evidence.get(document).ok_or(Unasked::NoFormula)?;
    let prices = Prices { file, paper: &all, declared: &own.read.declared, macros: &own.read.macros };
    let reading = statement.read(&own.scores(&prices));
    let customs = Customs::of(own.read.text, &prices);
    let eyes = Eyes::new(statement.sketch, &reading.choice, &prices, customs);
    let answer = Trees::default().statement(own.read, number, statement.sketch.span, |tree| {
        let (sketch, reading, prices, eyes) = (statement.sketch, &reading, &prices, &eyes);
        Some(take(&Asked { formula, tree, sketch, reading, prices, eyes }))
    });
    answer.ok_or(Unasked::NoScripts)
}

/// The formula that holds an offset, its end included where no other begins.
fn formula_at(formulas: &[Formula], offset: u32) -> Option<(usize, &Formula)> {
    let holds = |formula: &Formula| formula.span.start <= offset && offset < formula.span.end;
    let inside = formulas.iter().enumerate().find(|(_, formula)| holds(formula));
    inside.or_else(|| formulas.iter().enumerate().find(|(_, formula)| formula.span.end == offset))
}

/// The statement that holds an offset; at its end too, where a cursor may stand.
fn statement_of<'s, 'p>(document: &'s Sketched<'p>, formula: usize, offset: u32) -> Option<&'s Statement<'p>> {
    let own = || document.statements.iter().filter(|statement| statement.formula == formula);
    let holds =
        |statement: &&Statement<'_>| statement.sketch.span.start <= offset && offset < statement.sketch.span.end;
    own().find(holds).or_else(|| own().find(|statement| statement.sketch.span.end == offset))
}
