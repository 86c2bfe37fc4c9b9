//! A claimed step holds in certain dimensions only.

use indexwise_grammar::span::Span;

use crate::finding::{Finding, Severity};

use super::{Check, Rule};

pub(super) const RULE: Rule = Rule {
    name: "step-needs-dimension",
    severity: Severity::Warning,
    summary: "A claimed step holds in certain dimensions only.",
    page: include_str!("step_needs_dimension.md"),
    on: true,
    check: Check::Document,
};

/// The finding for a step; its message says all that there is to say.
pub(crate) fn step_needs_dimension(span: Span, message: String) -> Finding {
    Finding::plain(RULE.name, RULE.severity, span, message)
}
