//! Both ends of a contraction on one level.

use crate::changes::Change;
use crate::finding::{Finding, Related, Severity};
use crate::ledger::{Judged, shown};

use super::faults::Fault;
use super::mending::{clear_winner, fixes, level_letters, mends};
use super::{Check, Report, Rule};

pub(super) const RULE: Rule = Rule {
    name: "dummy-levels",
    severity: Severity::Warning,
    summary: "Both ends of a contraction stand on one level where levels are in force.",
    page: include_str!("dummy_levels.md"),
    on: true,
    check: Check::Balance(check),
};

fn check(judged: &Judged<'_>) -> Option<Report> {
    let (letter, first, second) = level_letters(judged).into_iter().find_map(|fault| match fault {
        Fault::PairLevel(letter, first, second) => Some((letter, first, second)),
        _ => None,
    })?;
    let mut changes = Vec::new();
    for place in [second, first] {
        if let Some(script) = judged.sketch.place(place).map(|place| place.script) {
            changes.push((Change::FlipScript(script), 0));
        }
        changes.push((Change::FlipLetter(place), 0));
    }
    let mends = mends(judged, changes);
    // Of two ends neither is surer than the other, unless only one of them mends.
    let bulk = clear_winner(&mends).map_err(|_| "either end could move, and nothing tells which");
    let blamed = match mends.first().map(|mend| &mend.change) {
        Some(Change::FlipScript(script)) if mends.len() == 1 => *script,
        _ => judged.span(second),
    };
    let finding = Finding {
        rule: RULE.name,
        severity: RULE.severity,
        span: blamed,
        message: format!("both ends of the sum over {} stand {}", shown(&letter), judged.level(first)),
        related: vec![Related { span: judged.span(first), message: "the other end".to_owned() }],
        fixes: fixes(judged, &mends, bulk),
        ledger: Some(judged.view(&[letter])),
    };
    let mended = mends.into_iter().next().map(|mend| (mend.sketch, mend.choice));
    Some(Report { finding, mended })
}
