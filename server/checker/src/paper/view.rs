//! A paper that is read and counted: what a check and all questions of an editor look at.
//!
//! A view is immutable; an editor makes one for each version of its texts and asks it as often as it likes.

use std::sync::Arc;

use compact_str::CompactString;
use indexwise_grammar::hosts::{Host, Scan};
use indexwise_grammar::tree::Formula;
use rustc_hash::FxHashSet;

use crate::conventions::declared::Declared;
use crate::conventions::inferred::Evidence;
use crate::conventions::prices::Prices;
use crate::steps::Verdicts;
use crate::terms::symmetries::Customs;

use super::judging::{Judging, judge_document, missing_part};
use super::memory::{Memory, Remembered};
use super::reads::Sketched;
use super::{Analysis, Cancel, DocumentAnalysis, Paper, Settings, StepMode};

/// A paper, read; its documents by their numbers, the root first.
pub struct View {
    pub(super) documents: Vec<Sketched>,
    /// The habits of each document.
    evidence: Vec<Arc<Evidence>>,
    /// The habits of all together.
    all: Arc<Evidence>,
    customs: Vec<Customs>,
    /// The labels of all formulas.
    labels: FxHashSet<CompactString>,
    paper: Paper,
}

impl View {
    /// Reads a paper and counts its habits.
    pub fn of(paper: &Paper, cancel: &Cancel) -> Self {
        Self::again(paper, &mut Memory::default(), cancel)
    }

    /// The same, from what is kept of an earlier version. If it is cancelled, the view is not worth a look.
    pub fn again(paper: &Paper, memory: &mut Memory, cancel: &Cancel) -> Self {
        let (documents, evidence, all) = memory.read(paper, cancel);
        let formulas = documents.iter().flat_map(|one| &one.read.document.formulas);
        let labels = formulas.flat_map(|formula| formula.labels.iter().map(|(label, _)| label.clone())).collect();
        let mut view = Self { documents, evidence, all, customs: Vec::new(), labels, paper: paper.clone() };
        // Nobody asks for them any more.
        view.paper.scans.clear();
        let customs = (0..view.len()).filter_map(|number| Some(Customs::of(view.text(number), &view.prices(number)?)));
        view.customs = customs.collect();
        view
    }

    /// Asks all rules. One analysis for each document, in their order. A cancelled one is not worth a look.
    pub fn judge(&self, settings: &Settings, cancel: &Cancel) -> Analysis {
        self.judge_knowing(settings, &Verdicts::default(), cancel)
    }

    /// The same, where verdicts about steps may be known from an earlier version; those that are reached are added.
    pub fn judge_knowing(&self, settings: &Settings, verdicts: &Verdicts, cancel: &Cancel) -> Analysis {
        let analysis =
            self.judge_each(cancel, |number| self.judge_document(number, settings, None, (verdicts, cancel)));
        if settings.steps != StepMode::Off && !cancel.is_cancelled() {
            verdicts.turn();
        }
        analysis
    }

    /// The same, with what is kept of the judgements about an earlier version; the memory must be the one that this
    /// view was made from last.
    pub fn judge_again(&self, settings: &Settings, memory: &mut Memory, cancel: &Cancel) -> Analysis {
        let verdicts = memory.verdicts.clone();
        let analysis = self.judge_each(cancel, |number| {
            self.judge_document(number, settings, memory.of_document(number), (&verdicts, cancel))
        });
        if cancel.is_cancelled() {
            memory.forget_judgements();
        } else if settings.steps != StepMode::Off {
            verdicts.turn();
        }
        analysis
    }

    fn judge_each(&self, cancel: &Cancel, mut judge: impl FnMut(usize) -> Option<DocumentAnalysis>) -> Analysis {
        let mut judged = |number| if cancel.is_cancelled() { None } else { judge(number) };
        Analysis { documents: (0..self.documents.len()).map(|number| judged(number).unwrap_or_default()).collect() }
    }

    pub(super) fn judge_document(
        &self,
        number: usize,
        settings: &Settings,
        mut remembered: Option<&mut Remembered>,
        (verdicts, cancel): (&Verdicts, &Cancel),
    ) -> Option<DocumentAnalysis> {
        let document = self.documents.get(number)?;
        let begin = document.read.text.find("\\begin{document}");
        let troubles = self.paper.troubles.iter().filter(|trouble| trouble.document == number);
        let missing = troubles.map(|trouble| missing_part(trouble, begin)).collect();
        let prices = self.prices(number)?;
        let inquiries = remembered.as_mut().map(|remembered| {
            remembered.known.ask_again(&prices);
            remembered.known.lend()
        });
        let prices = Prices { inquiries: inquiries.as_ref(), ..prices };
        let customs = *self.customs.get(number)?;
        let judging = Judging { document, prices, customs, settings, labels: &self.labels, verdicts, cancel };
        let mut analysis = judge_document(judging, missing, remembered.as_deref_mut());
        if let Some((remembered, inquiries)) = remembered.zip(inquiries) {
            remembered.known.take_back(inquiries);
        }
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

    /// The evidence that a document is read with.
    pub(crate) fn prices(&self, document: usize) -> Option<Prices<'_>> {
        let read = &self.documents.get(document)?.read;
        let file = self.evidence.get(document)?;
        let (declared, macros) = (&read.declared, &read.macros);
        Some(Prices { file, paper: &self.all, declared, macros, inquiries: None })
    }

    /// What the usual kernels are taken for in a document.
    pub(super) fn customs(&self, document: usize) -> Option<Customs> {
        self.customs.get(document).copied()
    }
}
