//! Both ends of a contraction on one level.

use indexwise_grammar::tree::Level;

use crate::balance::{Event, same_level};
use crate::changes::Change;
use crate::conventions::built_in::{LetterClass, class_of};
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
    let deliberate = all_below(judged);
    let severity = if deliberate { Severity::Hint } else { RULE.severity };
    let bulk = if deliberate { Err("it is only a hint") } else { bulk };
    let blamed = match mends.first().map(|mend| &mend.change) {
        Some(Change::FlipScript(script)) if mends.len() == 1 => *script,
        _ => judged.span(second),
    };
    let finding = Finding {
        rule: RULE.name,
        severity,
        span: blamed,
        message: format!("both ends of the sum over {} stand {}", shown(&letter), judged.level(first)),
        related: vec![Related { span: judged.span(first), message: "the other end".to_owned() }],
        fixes: fixes(judged, &mends, bulk),
        ledger: Some(judged.view(&[letter])),
        verdict: None,
    };
    let mended = mends.into_iter().next().map(|mend| (mend.sketch, mend.choice));
    Some(Report { finding, mended })
}

/// Several sums over late Latin letters, all of them below and none with one end up: the author writes Cartesian
/// components here.
fn all_below(judged: &Judged<'_>) -> bool {
    let mut below = 0;
    for letter in &judged.sketch.letters {
        for event in judged.events(letter) {
            if let Event::Pair(one, two) = event {
                let late = class_of(letter) == LetterClass::LatinLate;
                if !late || same_level(&judged.sketch, one, two) != Some(Level::Down) {
                    return false;
                }
                below += 1;
            }
        }
    }
    below > 1
}
