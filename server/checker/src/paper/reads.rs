//! The documents of a paper as they are read: formulas, sketches and units; and the counts of their habits.

use std::sync::Arc;

use indexwise_grammar::hosts::{self, Host};
use indexwise_grammar::macros::Macros;
use indexwise_grammar::{Document, macros_of, read_each};
use rustc_hash::FxHashMap;

use crate::conventions::declared::{Declared, SharedConventions};
use crate::conventions::inferred::{Evidence, Prices};
use crate::conventions::meanings::Meanings;
use crate::reading::{self, Reading};
use crate::sketch::{Sketch, Unit};

use super::directed::skipped;
use super::{Cancel, Paper};

/// Rounds of counting: each reads with the counts of the round before. Two settle nearly all readings of the
/// documents; a third changed none that mattered.
const ROUNDS: usize = 2;

/// A document as read, with what is in force in it. Its formulas are without their statements: the sketches are
/// all that is needed of them.
pub(super) struct Read {
    pub text: Arc<str>,
    pub host: Host,
    pub document: Document,
    /// The number of the formula, and the sketch of a statement with scripts.
    sketches: Vec<(usize, Arc<Sketch>)>,
    pub macros: Macros,
    pub declared: Declared,
}

/// A document with the sketches of its statements. The same units come again and again, so that each is numbered
/// and its score is taken once a round.
pub(super) struct Sketched {
    pub read: Read,
    pub statements: Vec<Statement>,
    units: Vec<Unit>,
}

/// A statement: the number of its formula, its sketch, and the numbers of its units in the document.
pub(super) struct Statement {
    pub formula: usize,
    pub sketch: Arc<Sketch>,
    units: Vec<u32>,
}

impl Statement {
    /// The cheapest reading under the scores of the document's units.
    pub fn read(&self, scores: &[i32]) -> Reading {
        let own = self.units.iter().map(|unit| scores.get(*unit as usize).copied().unwrap_or(0));
        reading::read(&self.sketch, own.collect())
    }
}

impl Sketched {
    fn of(mut read: Read) -> Self {
        let skipped = skipped(&read.declared, &read.document.formulas);
        let mut numbers: FxHashMap<Unit, u32> = FxHashMap::default();
        let mut units: Vec<Unit> = Vec::new();
        let mut number = |unit: &Unit| {
            if let Some(number) = numbers.get(unit) {
                return *number;
            }
            let number = u32::try_from(units.len()).unwrap_or(u32::MAX);
            units.push(unit.clone());
            numbers.insert(unit.clone(), number);
            number
        };
        let mut sketches = std::mem::take(&mut read.sketches);
        sketches.retain(|(formula, _)| !skipped.contains(formula));
        let statement = |(formula, sketch): (usize, Arc<Sketch>)| {
            let units = sketch.units.iter().map(&mut number).collect();
            Statement { formula, sketch, units }
        };
        let statements = sketches.into_iter().map(statement).collect();
        Self { read, statements, units }
    }

    /// The scores of the document's units.
    pub fn scores(&self, prices: &Prices<'_>) -> Vec<i32> {
        self.units.iter().map(|unit| prices.score(unit)).collect()
    }
}

/// Reads all documents; macros of styles and of every part are known in all of them, as TeX would mostly have it.
pub(super) fn read_paper(paper: &Paper) -> Vec<Sketched> {
    let mut shared = Macros::default();
    for style in &paper.styles {
        let scan = hosts::scan(&style.text, style.host, &shared);
        shared = macros_of(&scan, &shared).inherited();
    }
    if paper.documents.len() > 1 {
        for source in &paper.documents {
            let scan = hosts::scan(&source.text, source.host, &shared);
            if !scan.definitions.is_empty() {
                shared = macros_of(&scan, &shared).inherited();
            }
        }
    }
    let project = shared_meanings(&paper.shared);
    let mut out: Vec<Sketched> = Vec::new();
    for source in &paper.documents {
        let mut sketches = Vec::new();
        let document = read_each(&source.text, source.host, &shared, |number, formula| {
            let statements = std::mem::take(&mut formula.statements);
            let all = statements.iter().map(Sketch::of);
            sketches.extend(all.filter(|sketch| !sketch.places.is_empty()).map(|sketch| (number, Arc::new(sketch))));
        });
        let macros = macros_of(&document.scan, &shared);
        let outer = out.first().map_or(&project, |root| &root.read.declared.meanings);
        let declared = Declared::read(&document.scan.directives, source.host, &macros, outer);
        let (text, host) = (source.text.clone(), source.host);
        out.push(Sketched::of(Read { text, host, document, sketches, macros, declared }));
    }
    out
}

/// What the conventions around a paper declare, the nearer ones over the outer ones.
fn shared_meanings(shared: &[SharedConventions]) -> Meanings {
    shared.iter().fold(Meanings::default(), |outer, conventions| Declared::shared(conventions, &outer).meanings)
}

/// Counts the habits of every document.
pub(super) fn gather(documents: &[Sketched], cancel: &Cancel) -> Vec<Evidence> {
    let mut evidence = vec![Evidence::default(); documents.len()];
    for _ in 0..ROUNDS {
        let all = total(&evidence);
        let mut next = Vec::with_capacity(documents.len());
        for (document, own) in documents.iter().zip(&evidence) {
            let prices =
                Prices { file: own, paper: &all, declared: &document.read.declared, macros: &document.read.macros };
            let mut votes = Evidence::default();
            let scores = document.scores(&prices);
            for statement in document.statements.iter().filter(|_| !cancel.is_cancelled()) {
                votes.vote(&statement.sketch, &statement.read(&scores));
            }
            next.push(votes);
        }
        evidence = next;
    }
    evidence
}

pub(super) fn total(evidence: &[Evidence]) -> Evidence {
    let mut all = Evidence::default();
    evidence.iter().for_each(|own| all.add(own));
    all
}
