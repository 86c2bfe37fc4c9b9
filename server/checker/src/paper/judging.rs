//! One document judged: every statement read at its cheapest, the rules asked, the symbols gathered.

use std::borrow::Cow;
use std::ops::Range;

use compact_str::CompactString;
use indexwise_grammar::conventions::{Name, Sentence};
use indexwise_grammar::hosts::Host;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{self, Formula};
use indexwise_grammar::write::Dialect;
use indexwise_grammar::{read_formula, read_note_formula, read_region};
use rustc_hash::FxHashSet;

use crate::conventions::inquiries::Inquiries;
use crate::conventions::prices::Prices;
use crate::finding::{Edit, Finding};
use crate::ledger::Judged;
use crate::reading::{self, Reading};
use crate::rules;
use crate::sketch::Sketch;
use crate::steps::{Asked, Granted, LabelledGiven, Source, StepJudge, Verdicts};
use crate::symbols::Gatherer;
use crate::terms::symmetries::Customs;
use crate::terms::{self, Eyes, Flattened};

use super::directed::{directed, skipped, target};
use super::memory::{Basis, Remembered};
use super::{Cancel, DocumentAnalysis, Read, Settings, Sketched, Statement, Statistics, StepMode, Trouble};

/// A document on its way through the rules.
struct Judge<'d> {
    document: &'d Sketched,
    prices: Prices<'d>,
    customs: Customs,
    trees: Trees,
    indexed: Vec<bool>,
    findings: Vec<(usize, Finding)>,
    symbols: Option<Gatherer>,
    /// Judges steps, if any is asked for in the document.
    steps: Option<StepJudge<'d>>,
    /// Whether every chain is a claim, and whether nobody has asked for it.
    chains: bool,
    quietly: bool,
    /// Formulas that the author asks for by themselves.
    asked: FxHashSet<usize>,
    /// Labels that are taken as given for a formula.
    using: Vec<(usize, Name)>,
    /// The labels of all formulas of the paper.
    labels: &'d FxHashSet<CompactString>,
    /// Findings about the conventions.
    about: Vec<Finding>,
    /// Verdicts that are known.
    verdicts: &'d Verdicts,
    cancel: &'d Cancel,
    /// What is kept of an earlier version.
    remembered: Option<&'d mut Remembered>,
}

/// A document with all that its judgement rests on.
pub(super) struct Judging<'d> {
    pub document: &'d Sketched,
    pub prices: Prices<'d>,
    pub customs: Customs,
    pub settings: &'d Settings,
    /// The labels of all formulas of the paper.
    pub labels: &'d FxHashSet<CompactString>,
    /// Verdicts that are known.
    pub verdicts: &'d Verdicts,
    pub cancel: &'d Cancel,
}

/// Judges a document; `missing` are findings about parts that could not be had, `remembered` is what is kept of an
/// earlier version.
pub(super) fn judge_document(
    judging: Judging<'_>,
    missing: Vec<Finding>,
    remembered: Option<&mut Remembered>,
) -> DocumentAnalysis {
    let Judging { document, prices, customs, settings, labels, verdicts, cancel } = judging;
    let formulas = &document.read.document.formulas;
    let mut judge = Judge {
        document,
        prices,
        customs,
        trees: Trees::default(),
        indexed: vec![false; formulas.len()],
        findings: Vec::new(),
        symbols: settings.symbols.then(Gatherer::default),
        steps: None,
        chains: false,
        quietly: false,
        asked: FxHashSet::default(),
        using: Vec::new(),
        labels,
        about: Vec::new(),
        verdicts,
        cancel,
        remembered,
    };
    judge.prepare_steps(settings.steps);
    let skipped = skipped(&document.read.declared, formulas);
    let mut plain = 0;
    for statement in document.statements.iter().take_while(|_| !cancel.is_cancelled()) {
        judge.steps_without_letters(plain..statement.formula, &skipped);
        plain = plain.max(statement.formula);
        judge.statement(statement);
    }
    judge.steps_without_letters(plain..formulas.len(), &skipped);
    if prices.declared.meanings.has_numbered_ranges() || settings.symbols {
        judge.statements_without_letters();
    }
    for (number, formula) in formulas.iter().enumerate().filter(|_| settings.reports_unread()) {
        judge.findings.extend(formula.unread.iter().map(|part| (number, rules::unread(part))));
    }
    let unknown = judge.unknown_labels();
    let Judge { indexed, findings, symbols, steps, customs, about, .. } = judge;
    let statistics = Statistics {
        formulas: formulas.len(),
        indexed: indexed.iter().filter(|flag| **flag).count(),
        unread: formulas.iter().zip(&indexed).filter(|(formula, flag)| **flag && !formula.unread.is_empty()).count(),
        unknown_macros: formulas.iter().zip(&indexed).filter(|(f, flag)| **flag && !f.unknown.is_empty()).count(),
        steps: steps.as_ref().map(|steps| steps.counts).unwrap_or_default(),
    };
    let mut steps = steps.map(|steps| steps.judged).unwrap_or_default();
    steps.sort_by_key(|step| step.span.start);
    let read = &document.read;
    let mut missing = missing;
    missing.extend(unknown);
    missing.extend(about);
    let findings = directed(&read.declared, read.host, formulas, findings, missing);
    let symbols = symbols.map(|symbols| symbols.finish(&prices.declared.meanings, customs));
    DocumentAnalysis { statistics, findings, symbols, steps }
}

impl<'d> Judge<'d> {
    /// Steps are judged where the author asks for them, and in notes.
    fn prepare_steps(&mut self, mode: StepMode) {
        let read = &self.document.read;
        let declared = &read.declared;
        for (sentence, span) in &declared.sentences {
            if let Sentence::Check { using } = sentence
                && let Some(formula) = target(*span, &read.document.formulas)
            {
                self.asked.insert(formula);
                self.using.extend(using.iter().map(|name| (formula, name.clone())));
            }
        }
        let said = declared.meanings.derivations_are_checked;
        self.quietly = mode == StepMode::Asked && !said;
        self.chains = match mode {
            StepMode::Off => return self.asked.clear(),
            StepMode::All => true,
            StepMode::Asked => read.host == Host::Note || said,
        };
        if self.chains || !self.asked.is_empty() {
            self.steps = Some(StepJudge::new(&self.prices.declared.meanings, &read.text, self.verdicts, self.cancel));
            self.declared_definitions();
            self.conditions();
        }
    }

    /// Definitions among the conventions are read as any statement and come before all of them.
    fn declared_definitions(&mut self) {
        let Some(steps) = &mut self.steps else { return };
        for (sentence, span) in &self.document.read.declared.sentences {
            let Sentence::Definition(statement) = sentence else { continue };
            let sketch = Sketch::of(statement);
            let reading = reading::read(&sketch, sketch.units.iter().map(|unit| self.prices.score(unit)).collect());
            let eyes = Eyes::new(&sketch, &reading.choice, &self.prices, self.customs);
            if let Err(name) = steps.declared(statement, &eyes) {
                self.about.push(rules::defined_by_itself(*span, &name));
            }
        }
    }

    /// The steps of statements without a letter in their scripts, which have no sketch; between the others in the order
    /// of formulas, for they may define something.
    fn steps_without_letters(&mut self, formulas: Range<usize>, skipped: &FxHashSet<usize>) {
        let (read, sketched) = (&self.document.read, &self.document.statements);
        if self.steps.is_none() {
            return;
        }
        for number in formulas.filter(|number| !skipped.contains(number)) {
            let Some(formula) = read.document.formulas.get(number) else { return };
            // Statements are in the order of their formulas.
            let first = sketched.partition_point(|other| other.formula < number);
            let beside = sketched.get(first..).unwrap_or_default().iter().take_while(|other| other.formula == number);
            let spans: Vec<Span> = beside.map(|other| other.span()).collect();
            for statement in self.trees.statements(read, number).to_vec() {
                let sketch = Sketch::of(&statement);
                if spans.contains(&statement.span) || sketch.unjudged.is_some() {
                    continue;
                }
                let (sketch, reading) = (Cow::Owned(sketch), Reading::default());
                let (prices, faults) = (self.prices, Vec::new());
                self.steps(number, &Judged { text: &read.text, formula, sketch, reading, prices, faults });
            }
        }
    }

    /// What the document states about fields without claiming it as a step.
    fn conditions(&mut self) {
        let Some(steps) = &mut self.steps else { return };
        for place in self.document.statements.iter().filter(|place| !self.asked.contains(&place.formula)) {
            let eyes = Eyes::new(&place.sketch(), &place.reading.choice, &self.prices, self.customs);
            self.trees.statement(&self.document.read, place.formula, place.span(), |statement| {
                steps.condition(statement, &eyes);
            });
        }
    }

    /// The steps of a statement that balances.
    fn steps(&mut self, number: usize, judged: &Judged<'_>) {
        let Some(steps) = &mut self.steps else { return };
        let asked = match (self.asked.contains(&number), self.chains) {
            (true, _) => Asked::All,
            (false, true) if self.quietly => Asked::Quietly,
            (false, true) => Asked::Chains,
            (false, false) => Asked::Nothing,
        };
        let eyes = Eyes::new(&judged.sketch, &judged.reading.choice, &self.prices, self.customs);
        if judged.formula.passed_over {
            return;
        }
        let mut givens = Vec::new();
        let labels: Vec<&Name> =
            self.using.iter().filter(|(formula, _)| *formula == number).map(|(_, name)| name).collect();
        // A label that is not there is a finding of its own; without it nothing can be said of the step.
        if labels.iter().any(|name| !self.labels.contains(&name.text)) {
            return;
        }
        for name in labels {
            givens.extend(given(self.document, &self.prices, self.customs, &mut self.trees, steps, &name.text));
        }
        let mut reasoned = Vec::new();
        for (words, span) in &judged.formula.reasons {
            let mut own = Vec::new();
            // A reason that is no label is for the reader.
            for label in words_of(words).filter(|word| self.labels.contains(*word)) {
                own.extend(given(self.document, &self.prices, self.customs, &mut self.trees, steps, label));
            }
            reasoned.push((*span, own));
        }
        let read = &self.document.read;
        let place =
            self.trees.statements(read, number).iter().position(|statement| statement.span == judged.sketch.span);
        let reread = |edits: &[Edit]| statement_after(read, number, place?, edits);
        let dialect = if read.host == Host::Note { Dialect::Note } else { Dialect::Latex };
        let source = Source { text: judged.text, dialect, reread: &reread };
        let mut found = self.trees.statement(read, number, judged.sketch.span, |statement| {
            steps.statement(statement, &source, &eyes, asked, &Granted { all: &givens, reasoned: &reasoned })
        });
        for finding in found.iter_mut().filter(|finding| finding.rule == "step-not-shown") {
            for label in labels_before(&read.document.formulas, number) {
                let givens = given(self.document, &self.prices, self.customs, &mut self.trees, steps, label);
                match steps.holds_with(finding.span, &givens, judged.text) {
                    None => break,
                    Some(false) => {}
                    Some(true) => {
                        finding.message.push_str(&format!("; it holds with ({label})"));
                        break;
                    }
                }
            }
        }
        if steps.all_hold {
            // What holds for all fields, or by what is given, shares its symmetries by that.
            let span = judged.sketch.span;
            let inside = |at: Span| span.start <= at.start && at.end <= span.end;
            self.findings.retain(|(_, finding)| finding.rule != "symmetry-not-shared" || !inside(finding.span));
        }
        self.findings.extend(found.into_iter().map(|finding| (number, finding)));
    }

    /// Labels that a directive names and no formula of the paper has.
    fn unknown_labels(&self) -> Vec<Finding> {
        let unknown = self.using.iter().filter(|(_, name)| !self.labels.contains(&name.text));
        unknown
            .map(|(_, name)| rules::unknown_label(name.span, format!("no formula has the label {}", name.text)))
            .collect()
    }

    fn statement(&mut self, statement: &Statement) {
        let (number, reading) = (statement.formula, &statement.reading);
        let read = &self.document.read;
        let Some(formula) = read.document.formulas.get(number) else { return };
        let any_index =
            statement.kept.places.iter().any(|place| reading.choice.index.get(place.unit as usize) == Some(&true));
        if let Some(flag) = self.indexed.get_mut(number) {
            *flag |= any_index;
        }
        if let Some(symbols) = &mut self.symbols {
            let eyes = Eyes::new(&statement.sketch(), &reading.choice, &self.prices, self.customs);
            self.trees.statement(read, number, statement.span(), |tree| symbols.take(tree, &read.text, &eyes));
        }
        let next = read.document.formulas.get(number + 1).map(|next| next.span.start);
        let basis = || Basis::of(statement, self.customs, &read.text, formula.span, next);
        let basis = self.remembered.is_some().then(basis);
        let known = basis.as_ref().and_then(|basis| self.remembered.as_ref()?.recall(statement, basis));
        let (found, balanced) = match known {
            Some(known) => (known.findings, known.balanced),
            None => {
                // What was asked before is no part of this judgement.
                let _ = self.prices.inquiries.map(Inquiries::take);
                let judged = self.judged(statement, formula);
                let questions = self.prices.inquiries.map(Inquiries::take);
                if let (Some(remembered), Some(basis), Some(questions)) = (&mut self.remembered, basis, questions) {
                    remembered.remember(statement, basis, questions, (&judged.0, judged.1));
                }
                judged
            }
        };
        self.findings.extend(found.into_iter().map(|finding| (number, finding)));
        if balanced && self.steps.is_some() {
            let (text, sketch, reading) = (&*read.text, statement.sketch(), Reading::clone(reading));
            let (prices, faults) = (self.prices, Vec::new());
            self.steps(number, &Judged { text, formula, sketch, reading, prices, faults });
        }
    }

    /// What the rules find in a statement, and whether it balances.
    fn judged(&mut self, statement: &Statement, formula: &Formula) -> (Vec<Finding>, bool) {
        let read = &self.document.read;
        if is_without_sum(read, statement.formula) {
            return (Vec::new(), false);
        }
        let (prices, customs, trees) = (self.prices, self.customs, &mut self.trees);
        let in_terms = |judged: &Judged<'_>| {
            let take = |tree: &tree::Statement| found_in_terms(tree, judged, customs);
            trees.statement(read, statement.formula, judged.sketch.span, take)
        };
        let (text, sketch, reading) = (&*read.text, statement.sketch(), Reading::clone(&statement.reading));
        found_in((text, formula), sketch, reading, prices, in_terms)
    }

    /// Statements without a letter in their scripts have no sketch, but components and symbols.
    fn statements_without_letters(&mut self) {
        let read = &self.document.read;
        let skipped = skipped(&read.declared, &read.document.formulas);
        let mut known =
            self.document.statements.iter().map(|statement| (statement.formula, statement.span())).peekable();
        for (number, formula) in read.document.formulas.iter().enumerate() {
            let mut sketched = FxHashSet::default();
            while let Some((_, span)) = known.next_if(|(formula, _)| *formula <= number) {
                sketched.insert(span);
            }
            if skipped.contains(&number) {
                continue;
            }
            let statements = self.trees.statements(read, number).to_vec();
            for statement in statements.iter().filter(|statement| !sketched.contains(&statement.span)) {
                let sketch = Cow::Owned(Sketch::of(statement));
                let (reading, faults) = (Reading::default(), Vec::new());
                let judged = Judged { text: &read.text, formula, sketch, reading, prices: self.prices, faults };
                let eyes = Eyes::new(&judged.sketch, &judged.reading.choice, &self.prices, self.customs);
                let found = rules::check_terms(&Flattened::new(statement, &judged, &eyes));
                self.findings.extend(found.into_iter().map(|finding| (number, finding)));
                if let Some(symbols) = &mut self.symbols {
                    symbols.take(statement, &read.text, &eyes);
                }
            }
        }
    }
}

/// The words of a reason, as labels are written.
fn words_of(reason: &str) -> impl Iterator<Item = &str> {
    reason.split(|sign: char| !sign.is_alphanumeric() && !"-_:.".contains(sign)).filter(|word| !word.is_empty())
}

/// What the rules find in a statement of a formula, and whether it balances; `in_terms` looks at the terms of one that
/// does.
pub(super) fn found_in<'j>(
    (text, formula): (&'j str, &'j Formula),
    sketch: Cow<'j, Sketch>,
    mut reading: Reading,
    prices: Prices<'j>,
    in_terms: impl FnOnce(&Judged<'_>) -> Vec<Finding>,
) -> (Vec<Finding>, bool) {
    if sketch.unjudged.is_some() || !prices.trusts(&sketch.unknown) {
        return (Vec::new(), false);
    }
    reading.odd.retain(|(letter, _)| prices.is_index_notation(letter));
    let search = if reading.odd.is_empty() { rules::faults::level_faults } else { rules::faults::faults };
    let mut faults = search(&sketch, &reading.choice, &prices);
    faults.retain(|fault| fault.letter().is_none_or(|letter| prices.is_index_notation(letter)));
    let judged = Judged { text, formula, sketch, reading, prices, faults };
    let mut found = rules::check_statement(&judged);
    let balanced = judged.reading.odd.is_empty() && found.iter().all(|finding| finding.ledger.is_none());
    if balanced && terms::asks_for_terms(&judged.sketch, &judged) {
        found.extend(in_terms(&judged));
    }
    (found, balanced)
}

/// What the rules about terms find in a statement that balances.
pub(super) fn found_in_terms(tree: &tree::Statement, judged: &Judged<'_>, customs: Customs) -> Vec<Finding> {
    let eyes = Eyes::new(&judged.sketch, &judged.reading.choice, &judged.prices, customs);
    rules::check_terms(&Flattened::new(tree, judged, &eyes))
}

/// Labelled formulas that are tried as given for a step that is not shown.
const LABELS_TRIED: usize = 8;

/// The labels of the formulas before one, the nearest first: what comes later may rest on it.
fn labels_before(formulas: &[Formula], number: usize) -> impl Iterator<Item = &CompactString> {
    let before = formulas.get(..number).unwrap_or_default().iter().rev();
    before.flat_map(|formula| formula.labels.iter().map(|(label, _)| label)).take(LABELS_TRIED)
}

/// The statements of a label, as something given.
fn given(
    document: &Sketched,
    prices: &Prices<'_>,
    customs: Customs,
    trees: &mut Trees,
    steps: &mut StepJudge<'_>,
    label: &str,
) -> Vec<LabelledGiven> {
    let mut givens = Vec::new();
    let places = document.statements.iter().filter(|other| {
        let formula = document.read.document.formulas.get(other.formula);
        formula.is_some_and(|formula| formula.labels.iter().any(|(known, _)| known == label))
    });
    for place in places {
        let eyes = Eyes::new(&place.sketch(), &place.reading.choice, prices, customs);
        givens.extend(
            trees.statement(&document.read, place.formula, place.span(), |statement| {
                steps.given(label, statement, &eyes)
            }),
        );
    }
    givens
}

/// The tree of the formula that was read again last: only few statements are looked at by their terms, so that trees
/// are not kept.
#[derive(Default)]
pub(super) struct Trees {
    formula: Option<(usize, Formula)>,
}

impl Trees {
    /// Hands the tree of a statement of a formula to a function; nothing comes of a statement that is not there.
    pub(super) fn statement<T: Default>(
        &mut self,
        read: &Read,
        number: usize,
        span: Span,
        take: impl FnOnce(&tree::Statement) -> T,
    ) -> T {
        self.statements(read, number).iter().find(|statement| statement.span == span).map(take).unwrap_or_default()
    }

    fn statements(&mut self, read: &Read, number: usize) -> &[tree::Statement] {
        if self.formula.as_ref().is_none_or(|(known, _)| *known != number) {
            let region = read.document.scan.regions.get(number);
            let tree = region.map(|region| read_region(region, &read.text, read.host, &read.macros));
            self.formula = tree.map(|tree| (number, tree));
        }
        self.formula.as_ref().map(|(_, tree)| tree.statements.as_slice()).unwrap_or_default()
    }
}

/// A statement of a formula as it is read after edits of the text within it, which are in order and apart. Where the
/// formula holds what is no mathematics, this is not told.
fn statement_after(read: &Read, number: usize, place: usize, edits: &[Edit]) -> Option<tree::Statement> {
    let region = read.document.scan.regions.get(number).filter(|region| region.holes.is_empty())?;
    let body = region.body;
    let (mut text, mut at) = (String::new(), body.start);
    for edit in edits {
        text.push_str(read.text.get(at as usize..edit.span.start as usize)?);
        text.push_str(&edit.text);
        at = edit.span.end;
    }
    text.push_str(read.text.get(at as usize..body.end as usize)?);
    let formula = match read.host {
        Host::Note => read_note_formula(&text),
        _ => read_formula(&text, &read.macros),
    };
    let whole = formula.unread.is_empty() && formula.unknown.is_empty() && !formula.passed_over;
    formula.statements.into_iter().nth(place).filter(|_| whole)
}

/// The finding for a part that could not be had; in a preamble only macros are missing by it.
pub(super) fn missing_part(trouble: &Trouble, begin: Option<usize>) -> Finding {
    let preamble = trouble.preamble || begin.is_some_and(|begin| (trouble.span.start as usize) < begin);
    rules::missing_part(trouble.span, &trouble.message, preamble)
}

/// Whether words in a formula or right after it say that no sum is meant.
pub(super) fn is_without_sum(read: &Read, number: usize) -> bool {
    let formulas = &read.document.formulas;
    let Some(formula) = formulas.get(number) else { return false };
    let next = formulas.get(number + 1).map(|next| next.span.start).filter(|start| *start >= formula.span.end);
    let after = Span { start: formula.span.end, end: next.unwrap_or(u32::MAX) };
    formula.no_sum || says_no_sum(&read.text, after, read.host)
}

/// Whether the words right after a formula say that no sum is meant: those before the next formula, up to a blank
/// line or the end of a sentence; in a note, on the formula's line.
fn says_no_sum(text: &str, after: Span, host: Host) -> bool {
    const WORDS: usize = 40;
    let end = (after.end as usize).min(text.len());
    let after = text.get(after.start as usize..end).unwrap_or_default();
    let words: String = after.chars().take(WORDS).collect::<String>().to_lowercase();
    let mut lines = words.split('\n');
    let first = lines.next().unwrap_or_default();
    let more = lines.take_while(|line| host != Host::Note && !line.trim().is_empty());
    let words = std::iter::once(first).chain(more).collect::<Vec<_>>().join(" ");
    let sentence = words.split_once(". ").map_or(words.as_str(), |(sentence, _)| sentence);
    ["no sum", "not summed", "without sum"].iter().any(|phrase| {
        sentence.match_indices(phrase).any(|(at, phrase)| {
            let rest = sentence.get(at + phrase.len()..).unwrap_or_default();
            let rest = rest.strip_prefix("mation").unwrap_or(rest);
            !rest.starts_with(char::is_alphabetic) && !rest.starts_with(" of ")
        })
    })
}
