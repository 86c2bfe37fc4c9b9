//! Reports: one format each, all from the same findings.

pub mod json;
pub mod lines;
pub mod places;
pub mod text;

use std::io::{self, Write};
use std::time::Duration;

use indexwise_checker::finding::{Finding, JudgedStep, Severity};
use indexwise_checker::paper::Statistics;
use indexwise_checker::symbols::SymbolTable;
use indexwise_grammar::hosts::Host;

use crate::arguments::ReportKind;
use crate::files::Text;
use text::Palette;

/// What there is to report of one file.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct FileReport {
    /// As the user gave it.
    pub path: String,
    /// What kind of file it is; nothing: a configuration file, which holds no formulas.
    pub host: Option<Host>,
    /// Counts.
    pub statistics: Statistics,
    /// In the order of their places.
    pub findings: Vec<Finding>,
    /// The symbols, if they are asked for.
    pub symbols: Option<SymbolTable>,
    /// Every step that was judged, in the order of their places.
    pub steps: Vec<JudgedStep>,
    /// The text that the findings and the symbols speak of; empty if there are none.
    pub text: Text,
}

/// How a report is to look.
#[derive(Clone, Copy, Debug)]
pub struct Look {
    /// The format.
    pub kind: ReportKind,
    /// Colours, or none.
    pub palette: Palette,
}

/// Writes the report on all files.
pub fn write(files: &[FileReport], look: Look, elapsed: Duration, out: &mut dyn Write) -> io::Result<()> {
    match look.kind {
        ReportKind::Text => text::write(files, look.palette, elapsed, out),
        ReportKind::Lines => lines::write(files, out),
        ReportKind::Json => json::write(files, out),
        ReportKind::JsonLines => json::write_lines(files, out),
    }
}

/// Counts of a whole report.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Totals {
    /// Documents; configuration files are not counted.
    pub files: usize,
    /// Regions of mathematics.
    pub formulas: usize,
    /// Those with indices.
    pub indexed: usize,
    /// Those of them that could not be read whole.
    pub unread: usize,
    /// Claimed steps that hold, that fail, and that are not decided.
    pub steps: [usize; 3],
    /// Findings that are errors.
    pub errors: usize,
    /// Findings that are warnings.
    pub warnings: usize,
    /// Findings that are hints.
    pub hints: usize,
}

impl Totals {
    /// Counts.
    pub fn of(files: &[FileReport]) -> Self {
        let mut totals = Self::default();
        for file in files {
            totals.files += usize::from(file.host.is_some());
            totals.formulas += file.statistics.formulas;
            totals.indexed += file.statistics.indexed;
            totals.unread += file.statistics.unread;
            let steps = file.statistics.steps;
            for (total, own) in totals.steps.iter_mut().zip([steps.holds, steps.fails, steps.undecided]) {
                *total += own;
            }
            for finding in &file.findings {
                match finding.severity {
                    Severity::Error => totals.errors += 1,
                    Severity::Warning => totals.warnings += 1,
                    Severity::Hint => totals.hints += 1,
                }
            }
        }
        totals
    }
}

#[cfg(test)]
pub mod samples {
    //! A file with a finding made by hand, for the tests of the reports.
    use super::*;
    use indexwise_checker::finding::{Edit, Fix, Ledger, LedgerIndex, LedgerRow, Related};
    use indexwise_grammar::span::Span;

    /// The first place of a piece of text.
    pub fn span(text: &str, piece: &str) -> Span {
        let start = text.find(piece).unwrap_or_default();
        Span::new(start, start + piece.len())
    }

    fn index(letter: &str, level: &'static str, odd: bool) -> LedgerIndex {
        LedgerIndex { letter: letter.into(), level, odd }
    }

    /// A file whose text is given, with one finding that blames `m`.
    pub fn file(path: &str, text: &str, marked: bool) -> FileReport {
        let statement = span(text, "\\Gamma^i_{ik} = \\frac12 g^{ij} \\partial_m g_{ij}");
        let blamed = Span::new(statement.start as usize + 40, statement.start as usize + 41);
        let row = |title: &str, free: LedgerIndex, summed: Vec<LedgerIndex>| LedgerRow {
            title: title.into(),
            span: statement,
            free: vec![free],
            summed,
        };
        let ledger = Ledger {
            statement,
            rows: vec![
                row("left side", index("k", "down", true), vec![index("i", "", false)]),
                row("right side", index("m", "down", true), vec![index("i", "", false), index("j", "", false)]),
            ],
        };
        let finding = Finding {
            rule: "free-index-mismatch",
            severity: Severity::Error,
            span: blamed,
            message: "k is free on the left (down) but the right has m".into(),
            related: vec![Related { span: span(text, "k}"), message: "k stands here".into() }],
            fixes: vec![Fix {
                title: "Write k for m in \\partial_m".into(),
                edits: vec![Edit { span: blamed, text: "k".into() }],
                bulk: Ok(()),
            }],
            ledger: Some(ledger),
            verdict: None,
        };
        FileReport {
            path: path.into(),
            host: Some(Host::Latex),
            statistics: Statistics { formulas: 1, indexed: 1, ..Statistics::default() },
            findings: vec![finding],
            symbols: None,
            steps: Vec::new(),
            text: Text { text: text.into(), marked },
        }
    }

    /// A document for it.
    pub const SHELL: &str = r"The trace:
\begin{equation}\label{eq:trace}
  \Gamma^i_{ik} = \frac12 g^{ij} \partial_m g_{ij}
\end{equation}
";
}
