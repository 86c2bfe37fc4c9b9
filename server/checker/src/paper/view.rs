//! A paper that is read and counted: what a check and all questions of an editor look at.
//!
//! A view is immutable; an editor makes one for each version of its texts and asks it as often as it likes.

use std::sync::OnceLock;

use compact_str::CompactString;
use indexwise_grammar::hosts::{Host, Scan};
use indexwise_grammar::tree::Formula;
use rustc_hash::FxHashSet;

use crate::conventions::declared::Declared;
use crate::conventions::inferred::{Evidence, Prices};
use crate::terms::symmetries::Customs;

use super::judging::{judge_document, missing_part};
use super::reads::{Sketched, gather, read_paper, total};
use super::{Analysis, Cancel, DocumentAnalysis, Paper, Settings};

/// A paper, read; its documents by their numbers, the root first.
pub struct View {
    pub(super) documents: Vec<Sketched>,
    /// The habits of each document.
    evidence: Vec<Evidence>,
    /// The habits of all together.
    all: Evidence,
    /// The labels of all formulas.
    labels: FxHashSet<CompactString>,
    paper: Paper,
    /// For each document the scores of its units and its customs, once a question asks for them.
    scored: Vec<OnceLock<(Vec<i32>, Customs)>>,
}

impl View {
    /// Reads a paper and counts its habits.
    pub fn of(paper: &Paper, cancel: &Cancel) -> Self {
        let documents = read_paper(paper);
        let evidence = gather(&documents, cancel);
        let all = total(&evidence);
        let formulas = documents.iter().flat_map(|one| &one.read.document.formulas);
        let labels = formulas.flat_map(|formula| formula.labels.iter().map(|(label, _)| label.clone())).collect();
        let scored = documents.iter().map(|_| OnceLock::new()).collect();
        Self { documents, evidence, all, labels, paper: paper.clone(), scored }
    }

    /// Asks all rules. One analysis for each document, in their order.
    pub fn judge(&self, settings: &Settings, cancel: &Cancel) -> Analysis {
        let judged = |number| {
            if cancel.is_cancelled() { None } else { self.judge_document(number, settings) }
        };
        Analysis { documents: (0..self.documents.len()).map(|number| judged(number).unwrap_or_default()).collect() }
    }

    pub(super) fn judge_document(&self, number: usize, settings: &Settings) -> Option<DocumentAnalysis> {
        let document = self.documents.get(number)?;
        let begin = document.read.text.find("\\begin{document}");
        let troubles = self.paper.troubles.iter().filter(|trouble| trouble.document == number);
        let missing = troubles.map(|trouble| missing_part(trouble, begin)).collect();
        let mut analysis = judge_document(document, self.prices(number)?, settings, missing, &self.labels);
        settings.settle(&mut analysis.findings);
        analysis.findings.sort_by(|a, b| (a.span, a.rule, &a.message).cmp(&(b.span, b.rule, &b.message)));
        Some(analysis)
    }

    /// The paper that was read.
    pub const fn paper(&self) -> &Paper {
        &self.paper
    }

    /// How many documents there are.
    pub fn len(&self) -> usize {
        self.documents.len()
    }

    /// Whether there is no document.
    pub fn is_empty(&self) -> bool {
        self.documents.is_empty()
    }

    /// The text of a document; empty for one that is not there.
    pub fn text(&self, document: usize) -> &str {
        self.documents.get(document).map_or("", |one| &one.read.text)
    }

    /// What kind of file a document is.
    pub fn host(&self, document: usize) -> Host {
        self.documents.get(document).map_or(Host::Latex, |one| one.read.host)
    }

    /// The formulas of a document in their order, without their statements.
    pub fn formulas(&self, document: usize) -> &[Formula] {
        self.documents.get(document).map_or(&[], |one| &one.read.document.formulas)
    }

    /// What the host scan found: definitions of macros, directives, parts.
    pub(crate) fn scan(&self, document: usize) -> Option<&Scan> {
        self.documents.get(document).map(|one| &one.read.document.scan)
    }

    /// What the author declares in a document, and around it.
    pub(crate) fn declared(&self, document: usize) -> Option<&Declared> {
        self.documents.get(document).map(|one| &one.read.declared)
    }

    /// The scores of a document's units, and its customs.
    pub(super) fn scored(&self, document: usize) -> Option<&(Vec<i32>, Customs)> {
        let (own, prices) = (self.documents.get(document)?, self.prices(document)?);
        let scored = || (own.scores(&prices), Customs::of(&own.read.text, &prices));
        self.scored.get(document).map(|cell| cell.get_or_init(scored))
    }

    /// The evidence that a document is read with.
    pub(crate) fn prices(&self, document: usize) -> Option<Prices<'_>> {
        let read = &self.documents.get(document)?.read;
        let file = self.evidence.get(document)?;
        Some(Prices { file, paper: &self.all, declared: &read.declared, macros: &read.macros })
    }
}
