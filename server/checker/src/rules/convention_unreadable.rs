//! A sentence of a directive or of the conventions fits no form.

use indexwise_grammar::span::Span;

use crate::conventions::declared::{FORMS, nearest_form};
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
    let message = match nearest_form(text) {
        Some(form) => format!("this sentence has no known form; the nearest is \"{form}\""),
        None => format!("this sentence has no known form; the forms are \"{}\"", FORMS.join("\", \"")),
    };
    Finding::plain(RULE.name, RULE.severity, span, message)
}
