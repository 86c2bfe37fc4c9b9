//! A claimed step does not hold.

use indexwise_grammar::span::Span;

use crate::finding::{Finding, Severity};

use super::{Check, Rule};

pub(super) const RULE: Rule = Rule {
    name: "step-fails",
    severity: Severity::Error,
    summary: "A claimed step does not hold, and numbers show it.",
    page: include_str!("step_fails.md"),
    on: true,
    check: Check::Document,
};

/// The finding for a step; its message says all that there is to say.
pub(crate) fn step_fails(span: Span, message: String) -> Finding {
    Finding::plain(RULE.name, RULE.severity, span, message)
}
