//! An `allow` that silences nothing.

use indexwise_grammar::span::Span;

use crate::finding::{Finding, Severity};

use super::{Check, Rule};

pub(super) const RULE: Rule = Rule {
    name: "idle-allow",
    severity: Severity::Hint,
    summary: "An allow silences nothing, or names no rule.",
    page: include_str!("idle_allow.md"),
    on: true,
    check: Check::Document,
};

/// The finding for an `allow`.
pub(crate) fn idle_allow(span: Span, rule: &str) -> Finding {
    let known = super::find(rule).is_some();
    let message =
        if known { format!("nothing here needs allow {rule}") } else { format!("there is no rule named {rule}") };
    Finding::plain(RULE.name, RULE.severity, span, message)
}
