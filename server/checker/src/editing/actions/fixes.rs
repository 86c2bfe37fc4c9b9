//! The mends that a finding brings with it.
//!
//! A rule tries its mends on the statement, by its own measure; here another rule may find fault with them, and then they
//! are not offered.

use crate::finding::{Finding, Fix};
use crate::paper::View;

use super::{Action, ActionKind};

/// The mends of a finding, the best first; the only one that may be made in bulk is preferred.
pub(super) fn mends(view: &View, document: usize, number: usize, finding: &Finding) -> Vec<Action> {
    let sure = |fix: &Fix| fix.bulk.is_ok();
    let unique = finding.fixes.iter().filter(|fix| sure(fix)).count() == 1;
    let action = |fix: &Fix| Action {
        title: fix.title.clone(),
        kind: ActionKind::Fix { finding: number },
        edits: fix.edits.clone(),
        preferred: unique && sure(fix),
    };
    let at = view.formula_number(document, finding.span.start);
    let formula = at.and_then(|at| view.formulas(document).get(at));
    let sound = |fix: &&Fix| {
        let own = formula.is_some_and(|formula| fix.edits.iter().all(|edit| formula.span.holds(edit.span)));
        !own || at.is_none_or(|at| view.has_no_other_fault(document, at, &fix.edits))
    };
    finding.fixes.iter().filter(sound).map(action).collect()
}
