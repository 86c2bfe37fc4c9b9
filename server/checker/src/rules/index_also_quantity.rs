//! A letter is an index and a quantity in one formula.

use crate::finding::{Finding, Related, Severity};
use crate::ledger::{Judged, shown};

use super::{Check, Rule};

pub(super) const RULE: Rule = Rule {
    name: "index-also-quantity",
    severity: Severity::Hint,
    summary: "A letter is an index and a quantity in one formula.",
    page: include_str!("index_also_quantity.md"),
    on: true,
    check: Check::Beside(check),
};

fn check(judged: &Judged<'_>) -> Vec<Finding> {
    let mut out: Vec<Finding> = Vec::new();
    let mut seen: Vec<&str> = Vec::new();
    for (number, place) in (0_u32..).zip(&judged.sketch.places) {
        let letter = place.letter.as_str();
        // The differential, the imaginary unit and Euler's number stand beside indices of their letters by custom.
        if matches!(letter, "d" | "D" | "i" | "e") || seen.contains(&letter) || !judged.is_index(number) {
            continue;
        }
        seen.push(letter);
        if let Some((_, span)) = judged.sketch.quantities.iter().find(|(name, _)| name == letter) {
            out.push(Finding {
                rule: RULE.name,
                severity: RULE.severity,
                span: *span,
                message: format!("{0} is a quantity here and an index in the same formula", shown(letter)),
                related: vec![Related { span: place.span, message: format!("{} is an index here", shown(letter)) }],
                fixes: Vec::new(),
                ledger: None,
                verdict: None,
            });
        }
    }
    out
}
