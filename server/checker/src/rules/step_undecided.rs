//! A claimed step could not be decided.

use indexwise_grammar::span::Span;

use crate::finding::{Finding, Severity};

use super::{Check, Rule};

pub(super) const RULE: Rule = Rule {
    name: "step-undecided",
    severity: Severity::Hint,
    summary: "A claimed step could not be decided.",
    page: include_str!("step_undecided.md"),
    on: true,
    check: Check::Document,
};

/// The finding for a step; its message says all that there is to say.
pub(crate) fn step_undecided(span: Span, message: String) -> Finding {
    Finding::plain(RULE.name, RULE.severity, span, message)
}
