//! A claimed step does not hold for arbitrary fields.

use indexwise_grammar::span::Span;

use crate::finding::{Finding, Severity};

use super::{Check, Rule};

pub(super) const RULE: Rule = Rule {
    name: "step-not-shown",
    severity: Severity::Hint,
    summary: "A claimed step does not hold for arbitrary fields, but it rests on kernels of unknown meaning or on givens.",
    page: include_str!("step_not_shown.md"),
    on: true,
    check: Check::Document,
};

/// The finding for a step; its message says all that there is to say.
pub(crate) fn step_not_shown(span: Span, message: String) -> Finding {
    Finding::plain(RULE.name, RULE.severity, span, message)
}
