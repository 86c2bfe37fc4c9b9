//! Two sentences of one scope contradict one another.

use indexwise_grammar::span::Span;

use crate::conventions::clashes::Clash;
use crate::finding::{Finding, Related, Severity};
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

/// The finding: it stands at the later sentence and points at the earlier one.
pub(crate) fn convention_clash(clash: &Clash) -> Finding {
    let related = vec![Related { span: clash.earlier, message: "said here".to_owned() }];
    let message = format!("{} {}", shown(&clash.name), clash.words);
    Finding { related, ..Finding::plain(RULE.name, RULE.severity, clash.span, message) }
}

/// The finding for a definition that uses what it defines.
pub(crate) fn defined_by_itself(span: Span, name: &str) -> Finding {
    Finding::plain(RULE.name, RULE.severity, span, format!("{} is defined by itself", shown(name)))
}
