//! A paper is a root document with its parts and styles; `check` is the one pipeline.

use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};

use indexwise_grammar::hosts::Host;
use indexwise_grammar::span::Span;

use crate::finding::Finding;

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
}

/// Checks a paper.
pub fn check(paper: &Paper, _settings: &Settings, _cancel: &Cancel) -> Analysis {
    Analysis { documents: paper.documents.iter().map(|_| DocumentAnalysis::default()).collect() }
}
