//! A part of a formula that could not be read.

use indexwise_grammar::tree::Unread;

use crate::finding::{Finding, Severity};

use super::{Check, Rule};

pub(super) const RULE: Rule = Rule {
    name: "unread",
    severity: Severity::Hint,
    summary: "A part of a formula could not be read, so that it is not judged.",
    page: include_str!("unread.md"),
    on: false,
    check: Check::Document,
};

/// The finding for an unread part.
pub(crate) fn unread(part: &Unread) -> Finding {
    Finding::plain(RULE.name, RULE.severity, part.span, format!("not read: {}", part.reason))
}
