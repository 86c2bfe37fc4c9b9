//! An included file is missing, cyclic or outside the project.

use indexwise_grammar::span::Span;

use crate::finding::{Finding, Severity};

use super::{Check, Rule};

pub(super) const RULE: Rule = Rule {
    name: "missing-part",
    severity: Severity::Warning,
    summary: "An included file is missing, includes itself or lies outside the project.",
    page: include_str!("missing_part.md"),
    on: true,
    check: Check::Document,
};

/// The finding for a part that could not be had. A preamble that is missing is a hint: nothing of the text is.
pub(crate) fn missing_part(span: Span, message: &str, preamble: bool) -> Finding {
    let severity = if preamble { Severity::Hint } else { RULE.severity };
    Finding::plain(RULE.name, severity, span, message.to_owned())
}
