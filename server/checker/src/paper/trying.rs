//! What an editor's changes are tried on: formulas with their statements, and what a formula would be after edits.
//!
//! A change that an editor offers is made on the text, and the formula is read and judged again before it is offered.
//! In a long document only that formula is looked at, with the habits of the document as it is: a change that sways the
//! habits of a long document is not seen here.

use std::borrow::Cow;

use indexwise_grammar::conventions::Sentence;
use indexwise_grammar::hosts::{Region, scan};
use indexwise_grammar::read_region;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{Formula, Statement};

use crate::conventions::declared::Declared;
use crate::conventions::prices::Prices;
use crate::finding::{Edit, Finding, Severity, edited};
use crate::ledger::Judged;
use crate::reading::{self, Reading};
use crate::sketch::Sketch;
use crate::steps::Verdicts;
use crate::terms::symmetries::Customs;

use super::directed::{skipped, target};
use super::judging::{found_in, found_in_terms, is_without_sum};
use super::{Cancel, Settings, StepMode, View};

/// Bytes of a document up to which a change is tried on the whole of it. A longer one has so many statements that one
/// hardly sways its habits, and is too long to be read for every thing that is offered.
const SHORT: usize = 40_000;

/// A formula that is not in the document: its statements, and the text that their places lie in.
pub(crate) struct Reread {
    /// The whole text.
    pub text: String,
    /// The formula.
    pub formula: Formula,
}

impl View {
    /// A formula of a document, read again with its statements.
    pub(crate) fn tree(&self, document: usize, number: usize) -> Option<Formula> {
        let read = &self.documents.get(document)?.read;
        let region = read.document.scan.regions.get(number)?;
        Some(read_region(region, &read.text, read.host, &read.macros))
    }

    /// The number of the formula that holds an offset; its ends count where no other formula stands.
    pub(crate) fn formula_number(&self, document: usize, offset: u32) -> Option<usize> {
        let formulas = self.formulas(document);
        let at = formulas.partition_point(|formula| formula.span.end <= offset);
        let inside = formulas.get(at).filter(|formula| formula.span.start <= offset);
        inside.map(|_| at).or_else(|| {
            let before = at.checked_sub(1)?;
            formulas.get(before).filter(|formula| formula.span.end == offset).map(|_| before)
        })
    }

    /// The sketches of the statements with scripts, each with the number of its formula; not those that are skipped. Their
    /// places may be those of an earlier version of the text.
    pub(crate) fn sketches(&self, document: usize) -> impl Iterator<Item = (usize, &Sketch)> {
        let statements = self.documents.get(document).map_or(&[][..], |own| &own.statements);
        statements.iter().map(|statement| (statement.formula, &*statement.kept))
    }

    /// How a statement is read that is not in the document, with the habits of the document.
    pub(crate) fn reading_of(&self, document: usize, statement: &Statement) -> Option<(Sketch, Reading)> {
        let prices = self.prices(document)?;
        let sketch = Sketch::of(statement);
        let reading = reading::read(&sketch, sketch.units.iter().map(|unit| prices.score(unit)).collect());
        Some((sketch, reading))
    }

    /// A formula after edits within its body, which are in order and apart. Nothing for a formula that holds what is no
    /// mathematics, since the places of that move.
    pub(crate) fn reread(&self, document: usize, number: usize, edits: &[Edit]) -> Option<Reread> {
        let read = &self.documents.get(document)?.read;
        let region = read.document.scan.regions.get(number).filter(|region| region.holes.is_empty())?;
        if !edits.iter().all(|edit| region.body.holds(edit.span)) {
            return None;
        }
        let text = edited(&read.text, edits)?;
        let grown = |place: u32| (place as usize + text.len()).checked_sub(read.text.len());
        let span = Span::new(region.span.start as usize, grown(region.span.end)?);
        let body = Span::new(region.body.start as usize, grown(region.body.end)?);
        let region = Region { span, body, ..region.clone() };
        let formula = read_region(&region, &text, read.host, &read.macros);
        Some(Reread { text, formula })
    }

    /// Whether a formula after edits reads as well as before: nothing more unread or unknown, and no more errors or
    /// warnings of any rule about statements. Of a short document the same is asked as a whole, since there one statement
    /// sways the habits.
    pub(crate) fn reads_as_well(&self, document: usize, number: usize, edits: &[Edit]) -> bool {
        let (Some(before), Some(after)) = (self.tree(document, number), self.reread(document, number, edits)) else {
            return false;
        };
        let odd = |formula: &Formula| {
            (formula.unread.len(), formula.unknown.len(), formula.labels.len(), formula.passed_over)
        };
        let (old, new) = (odd(&before), odd(&after.formula));
        if new.0 > old.0 || new.1 > old.1 || new.2 != old.2 || new.3 && !old.3 {
            return false;
        }
        let known = self.grave(document, number, &before, self.text(document));
        let found = self.grave(document, number, &after.formula, &after.text);
        no_more(known, &found) && (after.text.len() > SHORT || self.whole_reads_as_well(document, after.text))
    }

    /// Whether a formula after edits has no error or warning of a rule that found none there before. True where that
    /// cannot be told.
    pub(crate) fn has_no_other_fault(&self, document: usize, number: usize, edits: &[Edit]) -> bool {
        let (Some(before), Some(after)) = (self.tree(document, number), self.reread(document, number, edits)) else {
            return true;
        };
        let known = self.grave(document, number, &before, self.text(document));
        self.grave(document, number, &after.formula, &after.text).iter().all(|rule| known.contains(rule))
    }

    /// Whether a document with another text has no more errors or warnings of any rule; steps are not judged.
    fn whole_reads_as_well(&self, document: usize, text: String) -> bool {
        let Some(after) = self.with_text(document, text) else { return false };
        let settings = Settings { steps: StepMode::Off, ..Settings::default() };
        let grave = |view: &Self| {
            let found = view
                .judge_document(document, &settings, None, (&Verdicts::default(), &Cancel::default()))
                .unwrap_or_default()
                .findings;
            let grave = found.into_iter().filter(|finding| finding.severity != Severity::Hint);
            grave.map(|finding| finding.rule).collect::<Vec<_>>()
        };
        no_more(grave(self), &grave(&after))
    }

    /// The paper with another text of one document.
    fn with_text(&self, document: usize, text: String) -> Option<Self> {
        let mut paper = self.paper().clone();
        paper.documents.get_mut(document)?.text = text.into();
        Some(Self::of(&paper, &Cancel::default()))
    }

    /// The rules of the errors and warnings in a formula's statements, which need not be those of the document.
    fn grave(&self, document: usize, number: usize, formula: &Formula, text: &str) -> Vec<&'static str> {
        let (Some(own), Some(prices)) = (self.documents.get(document), self.prices(document)) else {
            return Vec::new();
        };
        let skips = skipped(&own.read.declared, &own.read.document.formulas).contains(&number);
        if skips || is_without_sum(&own.read, number) || formula.no_sum {
            return Vec::new();
        }
        let customs = Customs::of(text, &prices);
        let found = formula.statements.iter().flat_map(|statement| judged(statement, formula, text, prices, customs));
        found.filter(|finding| finding.severity != Severity::Hint).map(|finding| finding.rule).collect()
    }

    /// The formula that a directive at a place of a changed text speaks of, by its number, and whether the scan sees
    /// the sentence there.
    pub(crate) fn target_after(&self, document: usize, edit: &Edit, sentence: &str) -> Option<usize> {
        let read = &self.documents.get(document)?.read;
        let text = edited(&read.text, std::slice::from_ref(edit))?;
        let scan = scan(&text, read.host, &read.macros);
        if scan.regions.len() != read.document.scan.regions.len() {
            return None;
        }
        let near = |span: &Span| (edit.span.start..=edit.span.start + edit.text.len() as u32).contains(&span.start);
        let sentences = scan.directives.iter().flat_map(|directive| &directive.sentences);
        let (_, span) = sentences.into_iter().find(|(said, span)| said == sentence && near(span))?;
        let spans = scan.regions.iter().map(|region| Formula { span: region.span, ..Formula::default() });
        target(*span, &spans.collect::<Vec<_>>())
    }

    /// The places of `check this` sentences that speak of a formula, with the labels that they name.
    pub(crate) fn checks_of(&self, document: usize, number: usize) -> Vec<(Span, usize)> {
        let Some(declared) = self.declared(document) else { return Vec::new() };
        let checks = declared.sentences.iter().filter_map(|(sentence, span)| match sentence {
            Sentence::Check { using } => Some((*span, using.len())),
            _ => None,
        });
        checks.filter(|(span, _)| target(*span, self.formulas(document)) == Some(number)).collect()
    }

    /// Whether a finding about a statement is gone once a sentence is declared, and nothing graver comes.
    pub(crate) fn is_gone_with(&self, document: usize, finding: &Finding, declaration: &Edit) -> bool {
        let text = edited(self.text(document), std::slice::from_ref(declaration));
        let Some(view) = text.and_then(|text| self.with_text(document, text)) else { return false };
        let settings = Settings { steps: StepMode::Off, ..Settings::default() };
        let counts = |view: &Self| {
            let found = view
                .judge_document(document, &settings, None, (&Verdicts::default(), &Cancel::default()))
                .unwrap_or_default()
                .findings;
            let own = found.iter().filter(|other| other.rule == finding.rule).count();
            (own, found.iter().filter(|other| other.severity != Severity::Hint).count())
        };
        let (before, after) = (counts(self), counts(&view));
        after.0 < before.0 && after.1 <= before.1
    }

    /// What a document declares after an edit; nothing if more sentences cannot be read than before.
    pub(crate) fn declared_after(&self, document: usize, edit: &Edit) -> Option<Declared> {
        let read = &self.documents.get(document)?.read;
        let text = edited(&read.text, std::slice::from_ref(edit))?;
        let scan = scan(&text, read.host, &read.macros);
        let declared = Declared::read(&scan.directives, read.host, &read.macros, &read.declared.meanings);
        let sound = declared.unreadable.len() <= read.declared.unreadable.len()
            && declared.sentences.len() == read.declared.sentences.len() + 1
            && scan.regions.len() == read.document.scan.regions.len();
        sound.then_some(declared)
    }
}

/// Whether each of the second stands among the first, as often.
fn no_more(mut known: Vec<&'static str>, found: &[&'static str]) -> bool {
    found.iter().all(|rule| {
        let at = known.iter().position(|other| other == rule);
        at.map(|at| known.swap_remove(at)).is_some()
    })
}

/// What is found in one statement, as a check would find it; steps are not judged.
fn judged(statement: &Statement, formula: &Formula, text: &str, prices: Prices<'_>, customs: Customs) -> Vec<Finding> {
    let sketch = Sketch::of(statement);
    let reading = reading::read(&sketch, sketch.units.iter().map(|unit| prices.score(unit)).collect());
    let in_terms = |judged: &Judged<'_>| found_in_terms(statement, judged, customs);
    found_in((text, formula), Cow::Owned(sketch), reading, prices, in_terms).0
}
