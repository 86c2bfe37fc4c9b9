//! The mends that a finding brings with it.

use crate::finding::{Finding, Fix};

use super::{Action, ActionKind};

/// The mends of a finding, the best first; the only one that may be made in bulk is preferred.
pub(super) fn mends(number: usize, finding: &Finding) -> Vec<Action> {
    let sure = |fix: &Fix| fix.bulk.is_ok();
    let unique = finding.fixes.iter().filter(|fix| sure(fix)).count() == 1;
    let action = |fix: &Fix| Action {
        title: fix.title.clone(),
        kind: ActionKind::Fix { finding: number },
        edits: fix.edits.clone(),
        preferred: unique && sure(fix),
    };
    finding.fixes.iter().map(action).collect()
}
