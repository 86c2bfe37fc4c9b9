//! An included file is missing, cyclic or outside the project.

use crate::finding::{Finding, Severity};
use crate::paper::Trouble;

use super::{Check, Rule};

pub(super) const RULE: Rule = Rule {
    name: "missing-part",
    severity: Severity::Warning,
    summary: "An included file is missing, includes itself or lies outside the project.",
    page: include_str!("missing_part.md"),
    on: true,
    check: Check::Document,
};

/// The finding for a part that could not be had.
pub(crate) fn missing_part(trouble: &Trouble) -> Finding {
    Finding {
        rule: RULE.name,
        severity: RULE.severity,
        span: trouble.span,
        message: trouble.message.clone(),
        related: Vec::new(),
        fixes: Vec::new(),
        ledger: None,
    }
}
