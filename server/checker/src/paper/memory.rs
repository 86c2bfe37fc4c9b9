//! What is kept of a paper from one version to the next, so that an edit costs what it changed.
//!
//! The unit of reuse is the formula, known by its own text: with the same macros in force it has the same tree and the
//! same sketches, wherever it stands (`kept.rs`). Statements vote again only if their reading changed, votes are taken
//! back and not counted anew (`counting.rs`), and a judgement holds as long as the questions that it rests on have the
//! same answers (`judgements.rs`). A check without a memory takes the same road with an empty one, so that both
//! see the same.
//!
//! Invariant: what a memory gives for a paper equals what an empty one gives, to the byte.

mod counting;
mod judgements;
mod kept;

use std::sync::Arc;

use indexwise_grammar::hosts::{Host, Scan, scan};
use indexwise_grammar::macros::{Definition, Macro, Macros};
use indexwise_grammar::{Document, macros_of};

use crate::conventions::declared::{Declared, SharedConventions};
use crate::conventions::inferred::Evidence;
use crate::conventions::meanings::Meanings;
use crate::steps::Verdicts;

use super::directed::skipped;
use super::reads::{Read, Sketched, Statement};
use super::{Cancel, Paper};

pub(super) use counting::Counts;
pub(super) use judgements::{Basis, Known};
use kept::Formulas;

/// Rounds of counting: each reads with the counts of the round before. Two settle nearly all readings of the
/// documents; a third changed none that mattered.
const ROUNDS: usize = 2;

/// What is kept of one paper. It fits any paper: what does not fit is read anew.
#[derive(Default)]
pub struct Memory {
    documents: Vec<Remembered>,
    /// Verdicts about steps; whoever judges steps elsewhere may share them.
    pub verdicts: Verdicts,
}

/// What is kept of one document.
#[derive(Default)]
pub(super) struct Remembered {
    path: String,
    host: Option<Host>,
    inherited: Macros,
    definitions: Vec<(Arc<Macro>, bool)>,
    meanings: Meanings,
    formulas: Formulas,
    counts: Counts,
    /// What judgements rest on.
    pub known: Known,
}

impl Memory {
    /// Reads the documents of a paper and counts their habits.
    pub(super) fn read(
        &mut self,
        paper: &Paper,
        cancel: &Cancel,
    ) -> (Vec<Sketched>, Vec<Arc<Evidence>>, Arc<Evidence>) {
        // Whether counts that other documents read with have gone in one piece.
        let mut lost = self.documents.len() != paper.documents.len();
        self.documents.resize_with(paper.documents.len(), Remembered::default);
        let shared = shared_macros(paper);
        let project = shared_meanings(&paper.shared);
        let mut out: Vec<Sketched> = Vec::with_capacity(paper.documents.len());
        for (number, (source, remembered)) in paper.documents.iter().zip(&mut self.documents).enumerate() {
            let scan = paper.scan(number, source, &shared);
            let macros = macros_of(&scan, &shared);
            let outer = out.first().map_or(&project, |root| &root.read.declared.meanings);
            let declared = Declared::read(&scan.directives, source.host, &macros, outer);
            if remembered.path != source.path || remembered.host != Some(source.host) {
                *remembered =
                    Remembered { path: source.path.clone(), host: Some(source.host), ..Remembered::default() };
                lost = true;
            }
            lost |= remembered.keep_what_holds(&shared, &scan, &declared.meanings);
            let text = source.text.clone();
            let mut read =
                Read { text, host: source.host, document: Document { scan, formulas: Vec::new() }, macros, declared };
            let places = remembered.formulas.read(&mut read);
            out.push(remembered.statements(read, &places));
        }
        let (evidence, all) = self.count(&mut out, lost, cancel);
        if cancel.is_cancelled() {
            *self = Self::default();
        }
        (out, evidence, all)
    }

    /// No judgement holds any more.
    pub(super) fn forget_judgements(&mut self) {
        self.documents.iter_mut().for_each(|remembered| remembered.known.forget());
    }

    /// What is kept of a document.
    pub(super) fn of_document(&mut self, number: usize) -> Option<&mut Remembered> {
        self.documents.get_mut(number)
    }
}

impl Remembered {
    /// Forgets what rests on macros and meanings that are others now; and everything, if too much of what is numbered is
    /// of formulas that are gone. Whether the counts are forgotten too.
    fn keep_what_holds(&mut self, inherited: &Macros, scan: &Scan, meanings: &Meanings) -> bool {
        let same = |(definition, known): (&Definition, &(Arc<Macro>, bool))| {
            definition.meaning == known.0 && definition.provide == known.1
        };
        let definitions = scan.definitions.len() == self.definitions.len()
            && scan.definitions.iter().zip(&self.definitions).all(same);
        let lost = !definitions || self.inherited != *inherited || self.formulas.is_littered();
        if lost {
            self.inherited = inherited.clone();
            self.definitions =
                scan.definitions.iter().map(|definition| (definition.meaning.clone(), definition.provide)).collect();
            (self.formulas, self.counts, self.known) = Default::default();
        }
        if self.meanings != *meanings {
            self.meanings = meanings.clone();
            self.counts.forget_scores();
            self.known.forget();
        }
        lost
    }

    /// The statements of a document whose formulas are kept at these numbers; skipped ones do not count.
    fn statements(&mut self, read: Read, places: &[u32]) -> Sketched {
        let skipped = skipped(&read.declared, &read.document.formulas);
        let mut statements = Vec::new();
        for (formula, place) in places.iter().enumerate().filter(|(formula, _)| !skipped.contains(formula)) {
            let Some(span) = read.document.formulas.get(formula).map(|formula| formula.span) else { continue };
            self.formulas.count(*place, span.start, |kept, sketch, moved| {
                let reading = Arc::default();
                statements.push(Statement { formula, kept: sketch.clone(), moved, reading, place: (*place, kept) });
            });
        }
        Sketched { read, statements }
    }
}

/// Macros of styles and of every part are known in all documents, as TeX would mostly have it.
fn shared_macros(paper: &Paper) -> Macros {
    let mut shared = Macros::default();
    for style in &paper.styles {
        let scan = scan(&style.text, style.host, &shared);
        shared = macros_of(&scan, &shared).inherited();
    }
    if paper.documents.len() > 1 {
        for (number, source) in paper.documents.iter().enumerate() {
            let scan = paper.scan(number, source, &shared);
            if !scan.definitions.is_empty() {
                shared = macros_of(&scan, &shared).inherited();
            }
        }
    }
    shared
}

/// What the conventions around a paper declare, the nearer ones over the outer ones.
fn shared_meanings(shared: &[SharedConventions]) -> Meanings {
    shared.iter().fold(Meanings::default(), |outer, conventions| Declared::shared(conventions, &outer).meanings)
}
