//! Two sentences of one scope contradict one another.

use indexwise_grammar::span::Span;

use crate::finding::{Finding, Severity};
use crate::ledger::shown;

use super::{Check, Rule};

pub(super) const RULE: Rule = Rule {
    name: "convention-clash",
    severity: Severity::Error,
    summary: "A sentence contradicts an earlier one of the same document.",
    page: include_str!("convention_clash.md"),
    on: true,
    check: Check::Document,
};

/// The finding for the later sentence; `words` follow the name.
pub(crate) fn convention_clash(span: Span, name: &str, words: &str) -> Finding {
    Finding::plain(RULE.name, RULE.severity, span, format!("{} {words}", shown(name)))
}
