//! A paper is a root document with its parts and styles; `check` is the one pipeline.

mod asking;
mod directed;
mod implying;
mod judging;
mod sentences;
#[cfg(test)]
mod tests;

use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};

use indexwise_grammar::hosts::{self, Host};
use indexwise_grammar::macros::Macros;
use indexwise_grammar::span::Span;
use indexwise_grammar::{Document, macros_of, read_each};
use rustc_hash::FxHashMap;

use crate::conventions::declared::Declared;
pub use crate::conventions::declared::SharedConventions;
use crate::conventions::inferred::{Evidence, Prices};
use crate::conventions::meanings::Meanings;
use crate::finding::{Finding, JudgedStep, Severity};
use crate::reading::{self, Reading};
use crate::sketch::{Sketch, Unit};
use crate::symbols::SymbolTable;

pub(crate) use asking::{Asked, Unasked, statement_at};
use directed::skipped;
pub use implying::Implications;
use judging::{judge_document, missing_part};
pub use sentences::problems;

/// One text of a paper.
#[derive(Clone, Debug)]
pub struct Source {
    /// The path as it is shown to people; also the key by which parts are told apart.
    pub path: String,
    /// The text without a byte-order mark.
    pub text: Arc<str>,
    /// What kind of file it is.
    pub host: Host,
}

/// Something wrong with how the paper hangs together: a part missing, cyclic or outside the project.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Trouble {
    /// Which document asks for the part, as an index into `Paper::documents`.
    pub document: usize,
    /// The asking command.
    pub span: Span,
    /// One sentence: which path and why.
    pub message: String,
    /// Whether only macros are missing by it: the main file that a part names.
    pub preamble: bool,
}

/// Documents that are read together: they share macros, conventions and counts.
#[derive(Clone, Debug, Default)]
pub struct Paper {
    /// The root first, then its parts in the order in which they are asked for, each once.
    pub documents: Vec<Source>,
    /// Local styles (`.sty`), in the order in which they are asked for; macros only.
    pub styles: Vec<Source>,
    /// Parts that could not be had.
    pub troubles: Vec<Trouble>,
    /// Conventions that stand outside the paper, the outer scope first, so that a later one is nearer.
    pub shared: Vec<SharedConventions>,
}

/// What the caller wants.
#[derive(Clone, Debug, Default)]
pub struct Settings {
    /// Only these rules, if any is named.
    pub only: Vec<String>,
    /// Not these rules.
    pub without: Vec<String>,
    /// Whether `unread`, which is off by default, is reported.
    pub unread: bool,
    /// Whether the symbol table is gathered.
    pub symbols: bool,
    /// Which steps are judged.
    pub steps: StepMode,
    /// Rules with a severity of their own instead of their usual one; nothing: off. The last entry of a rule counts.
    /// A rule that `only` names is on whatever stands here, and one that `without` names is off.
    pub levels: Vec<(String, Option<Severity>)>,
}

impl Settings {
    /// What is said of a rule's level, if anything is.
    fn level(&self, rule: &str) -> Option<Option<Severity>> {
        self.levels.iter().rev().find(|(name, _)| name == rule).map(|(_, level)| *level)
    }

    /// Whether parts that could not be read are reported.
    fn reports_unread(&self) -> bool {
        self.unread || matches!(self.level("unread"), Some(Some(_)))
    }

    /// Leaves of the findings those that are asked for, each with the severity that is.
    pub fn settle(&self, findings: &mut Vec<Finding>) {
        let named = |names: &[String], rule: &str| names.iter().any(|name| name == rule);
        findings.retain_mut(|finding| {
            let only = named(&self.only, finding.rule);
            if named(&self.without, finding.rule) || !(only || self.only.is_empty()) {
                return false;
            }
            match self.level(finding.rule) {
                Some(Some(severity)) => finding.severity = severity,
                Some(None) => return only,
                None => {}
            }
            true
        });
    }
}

/// Asked from time to time: a set flag ends a check early, with what is known by then.
#[derive(Clone, Debug, Default)]
pub struct Cancel(Arc<AtomicBool>);

impl Cancel {
    /// Asks the check to end.
    pub fn cancel(&self) {
        self.0.store(true, Ordering::Relaxed);
    }

    /// Whether the check should end.
    pub fn is_cancelled(&self) -> bool {
        self.0.load(Ordering::Relaxed)
    }
}

/// What a check found.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Analysis {
    /// One for each document of the paper, in the same order.
    pub documents: Vec<DocumentAnalysis>,
}

/// What a check found in one document.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct DocumentAnalysis {
    /// Counts.
    pub statistics: Statistics,
    /// Findings in the order of their places.
    pub findings: Vec<Finding>,
    /// The symbols, if they are asked for.
    pub symbols: Option<SymbolTable>,
    /// Every step that was judged, in the order of their places.
    pub steps: Vec<JudgedStep>,
}

/// Counts of one document.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Statistics {
    /// Regions of mathematics.
    pub formulas: usize,
    /// Those in which at least one script is an index.
    pub indexed: usize,
    /// Indexed ones with a part that could not be read.
    pub unread: usize,
    /// Indexed ones with a macro that is defined nowhere.
    pub unknown_macros: usize,
    /// Claimed steps by their verdicts.
    pub steps: Steps,
}

/// Claimed steps of one document, by their verdicts.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Steps {
    /// Those that hold, in every dimension that was tried.
    pub holds: usize,
    /// Those that fail, or hold in certain dimensions only.
    pub fails: usize,
    /// Those that are not shown or not decided.
    pub undecided: usize,
}

/// Which steps are judged.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum StepMode {
    /// Those that the author asks for: by `check this`, by `derivations are checked`, and in notes.
    #[default]
    Asked,
    /// Every chain of every document.
    All,
    /// None.
    Off,
}

/// Checks a paper: reads every document, counts the habits of each, takes the cheapest reading of every statement
/// and runs the rules. Deterministic; the order of documents is that of the paper.
pub fn check(paper: &Paper, settings: &Settings, cancel: &Cancel) -> Analysis {
    let read = read_paper(paper);
    let sketched: Vec<Sketched<'_>> = read.iter().map(Sketched::of).collect();
    let evidence = gather(&sketched, cancel);
    let all = total(&evidence);
    let formulas = read.iter().flat_map(|one| &one.document.formulas);
    let labels = formulas.flat_map(|formula| formula.labels.iter().map(|(label, _)| label.clone())).collect();
    let documents = sketched.iter().zip(&evidence).enumerate().map(|(number, (document, own))| {
        if cancel.is_cancelled() {
            return DocumentAnalysis::default();
        }
        let prices =
            Prices { file: own, paper: &all, declared: &document.read.declared, macros: &document.read.macros };
        let begin = document.read.text.find("\\begin{document}");
        let troubles = paper.troubles.iter().filter(|trouble| trouble.document == number);
        let missing = troubles.map(|trouble| missing_part(trouble, begin)).collect();
        let mut analysis = judge_document(document, prices, settings, missing, &labels);
        settings.settle(&mut analysis.findings);
        analysis.findings.sort_by(|a, b| (a.span, a.rule, &a.message).cmp(&(b.span, b.rule, &b.message)));
        analysis
    });
    Analysis { documents: documents.collect() }
}

/// How every statement of the first document is read, in words: its units with their scores and the letters out of
/// balance. For people who tune the inference.
pub fn readings(paper: &Paper) -> Vec<(Span, String)> {
    let read = read_paper(paper);
    let sketched: Vec<Sketched<'_>> = read.iter().map(Sketched::of).collect();
    let evidence = gather(&sketched, &Cancel::default());
    let all = total(&evidence);
    let (Some(document), Some(own)) = (sketched.first(), evidence.first()) else { return Vec::new() };
    let prices = Prices { file: own, paper: &all, declared: &document.read.declared, macros: &document.read.macros };
    let words = |sketch: &Sketch| {
        let reading = reading::read(sketch, sketch.units.iter().map(|unit| prices.score(unit)).collect());
        let units = sketch.units.iter().zip(&reading.choice.index).map(|(unit, index)| {
            let score = prices.score(unit);
            format!(
                "    {} {} {:?} {:?} score {score} index {index}\n",
                unit.kernel, unit.letter, unit.level, unit.shape
            )
        });
        let trusted = prices.trusts(&sketch.unknown);
        let gate: Vec<bool> = reading.odd.iter().map(|(letter, _)| prices.is_index_notation(letter)).collect();
        let odd = format!("    odd {:?} gates {gate:?} cost {}", reading.odd, reading.cost);
        let switches = format!("    switches {:?} now {:?}", sketch.switches, reading.choice.on);
        format!("{}{odd} trusted {trusted} {:?}\n{switches}\n", units.collect::<String>(), sketch.unjudged)
    };
    let habits = (Span::default(), format!("    habits {}\n", own.summary()));
    std::iter::once(habits)
        .chain(document.statements.iter().map(|statement| (statement.sketch.span, words(statement.sketch))))
        .collect()
}

/// Rounds of counting: each reads with the counts of the round before. Two settle nearly all readings of the
/// documents; a third changed none that mattered.
const ROUNDS: usize = 2;

/// A document as read, with what is in force in it. Its formulas are without their statements: the sketches are
/// all that is needed of them.
struct Read<'p> {
    text: &'p str,
    host: Host,
    document: Document,
    /// The number of the formula, and the sketch of a statement with scripts.
    sketches: Vec<(usize, Sketch)>,
    macros: Macros,
    declared: Declared,
}

/// A document with the sketches of its statements. The same units come again and again, so that each is numbered
/// and its score is taken once a round.
struct Sketched<'p> {
    read: &'p Read<'p>,
    statements: Vec<Statement<'p>>,
    units: Vec<&'p Unit>,
}

/// A statement: the number of its formula, its sketch, and the numbers of its units in the document.
struct Statement<'p> {
    formula: usize,
    sketch: &'p Sketch,
    units: Vec<u32>,
}

impl Statement<'_> {
    fn read(&self, scores: &[i32]) -> Reading {
        let own = self.units.iter().map(|unit| scores.get(*unit as usize).copied().unwrap_or(0));
        reading::read(self.sketch, own.collect())
    }
}

impl<'p> Sketched<'p> {
    fn of(read: &'p Read<'p>) -> Self {
        let skipped = skipped(&read.declared, &read.document.formulas);
        let mut numbers: FxHashMap<&Unit, u32> = FxHashMap::default();
        let mut units: Vec<&Unit> = Vec::new();
        let mut number = |unit: &'p Unit| {
            *numbers.entry(unit).or_insert_with(|| {
                units.push(unit);
                u32::try_from(units.len() - 1).unwrap_or(u32::MAX)
            })
        };
        let kept = read.sketches.iter().filter(|(formula, _)| !skipped.contains(formula));
        let statement = |(formula, sketch): &'p (usize, Sketch)| Statement {
            formula: *formula,
            sketch,
            units: sketch.units.iter().map(&mut number).collect(),
        };
        let statements = kept.map(statement).collect();
        Self { read, statements, units }
    }

    fn scores(&self, prices: &Prices<'_>) -> Vec<i32> {
        self.units.iter().map(|unit| prices.score(unit)).collect()
    }
}

/// Reads all documents; macros of styles and of every part are known in all of them, as TeX would mostly have it.
fn read_paper(paper: &Paper) -> Vec<Read<'_>> {
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
    let mut out: Vec<Read<'_>> = Vec::new();
    for source in &paper.documents {
        let mut sketches = Vec::new();
        let document = read_each(&source.text, source.host, &shared, |number, formula| {
            let statements = std::mem::take(&mut formula.statements);
            let all = statements.iter().map(Sketch::of);
            sketches.extend(all.filter(|sketch| !sketch.places.is_empty()).map(|sketch| (number, sketch)));
        });
        let macros = macros_of(&document.scan, &shared);
        let outer = out.first().map_or(&project, |root| &root.declared.meanings);
        let declared = Declared::read(&document.scan.directives, source.host, &macros, outer);
        out.push(Read { text: &source.text, host: source.host, document, sketches, macros, declared });
    }
    out
}

/// What the conventions around a paper declare, the nearer ones over the outer ones.
fn shared_meanings(shared: &[SharedConventions]) -> Meanings {
    shared.iter().fold(Meanings::default(), |outer, conventions| Declared::shared(conventions, &outer).meanings)
}

/// Counts the habits of every document.
fn gather(documents: &[Sketched<'_>], cancel: &Cancel) -> Vec<Evidence> {
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
                votes.vote(statement.sketch, &statement.read(&scores));
            }
            next.push(votes);
        }
        evidence = next;
    }
    evidence
}

fn total(evidence: &[Evidence]) -> Evidence {
    let mut all = Evidence::default();
    evidence.iter().for_each(|own| all.add(own));
    all
}
