//! An included file is missing, cyclic or outside the project.

use crate::finding::{Finding, Severity};
use crate::paper::Trouble;

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
pub(crate) fn missing_part(trouble: &Trouble, text: &str) -> Finding {
    let preamble =
        trouble.preamble || text.find("\\begin{document}").is_some_and(|begin| (trouble.span.start as usize) < begin);
    Finding {
        rule: RULE.name,
        severity: if preamble { Severity::Hint } else { RULE.severity },
        span: trouble.span,
        message: trouble.message.clone(),
        related: Vec::new(),
        fixes: Vec::new(),
        ledger: None,
    }
}
