//! A sentence of a directive or of the conventions fits no form.

use indexwise_grammar::span::Span;

use crate::conventions::declared::nearest_form;
use crate::finding::{Finding, Severity};

use super::{Check, Rule};

pub(super) const RULE: Rule = Rule {
    name: "convention-unreadable",
    severity: Severity::Error,
    summary: "A sentence of a directive or of the conventions fits no known form.",
    page: include_str!("convention_unreadable.md"),
    on: true,
    check: Check::Document,
};

/// The finding for a sentence.
pub(crate) fn convention_unreadable(span: Span, text: &str) -> Finding {
    Finding {
        rule: RULE.name,
        severity: RULE.severity,
        span,
        message: format!("this sentence has no known form; the nearest is \"{}\"", nearest_form(text)),
        related: Vec::new(),
        fixes: Vec::new(),
        ledger: None,
    }
}
