//! A directive names a label that is not there.

use indexwise_grammar::span::Span;

use crate::finding::{Finding, Severity};

use super::{Check, Rule};

pub(super) const RULE: Rule = Rule {
    name: "unknown-label",
    severity: Severity::Error,
    summary: "A directive names a label that no formula of the paper has.",
    page: include_str!("unknown_label.md"),
    on: true,
    check: Check::Document,
};

/// The finding for a label.
pub(crate) fn unknown_label(span: Span, message: String) -> Finding {
    Finding::plain(RULE.name, RULE.severity, span, message)
}
