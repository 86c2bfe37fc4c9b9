//! A paper is a root document with its parts and styles; `check` is the one pipeline.

mod asking;
mod directed;
mod implying;
mod judging;
mod memory;
mod reads;
mod scanned;
mod sentences;
#[cfg(test)]
mod tests;
mod trying;
mod view;

use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};

use indexwise_grammar::hosts::Host;
use indexwise_grammar::span::Span;

pub use crate::conventions::declared::SharedConventions;
use crate::finding::{Finding, JudgedStep, Severity};
use crate::reading;
use crate::sketch::Sketch;
use crate::symbols::SymbolTable;

pub(crate) use asking::{Asked, Unasked};
pub use implying::Implications;
pub use memory::Memory;
use reads::{Read, Sketched, Statement};
pub use scanned::Scanned;
pub use sentences::problems;
pub use view::View;

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
    /// Scans of documents that were made before, by the numbers of the documents; there may be fewer or none.
    pub scans: Vec<Option<Scanned>>,
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
    View::of(paper, cancel).judge(settings, cancel)
}

/// How every statement of the first document is read, in words: its units with their scores and the letters out of
/// balance. For people who tune the inference.
pub fn readings(paper: &Paper) -> Vec<(Span, String)> {
    let view = View::of(paper, &Cancel::default());
    let (Some(document), Some(prices)) = (view.documents.first(), view.prices(0)) else { return Vec::new() };
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
    let habits = (Span::default(), format!("    habits {}\n", prices.file.summary()));
    std::iter::once(habits)
        .chain(document.statements.iter().map(|statement| (statement.span(), words(&statement.kept))))
        .collect()
}
