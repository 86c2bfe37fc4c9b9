//! The same free letter is up in one term and down in another.

use crate::balance::Event;
use crate::changes::Change;
use crate::finding::{Finding, Related, Severity};
use crate::ledger::{Judged, shown};

use super::faults::Fault;
use super::mending::{clear_winner, fixes, level_letters, mends};
use super::{Check, Report, Rule};

pub(super) const RULE: Rule = Rule {
    name: "free-index-levels",
    severity: Severity::Error,
    summary: "The same free letter is up in one term and down in another.",
    page: include_str!("free_index_levels.md"),
    on: true,
    check: Check::Balance(check),
};

fn check(judged: &Judged<'_>) -> Option<Report> {
    let letter = level_letters(judged).into_iter().find_map(|fault| match fault {
        Fault::FreeLevel(letter) => Some(letter),
        _ => None,
    })?;
    let places: Vec<u32> = judged
        .events(&letter)
        .into_iter()
        .filter_map(|event| match event {
            Event::Terms(terms) => Some(terms.into_iter().filter_map(|term| term.free).collect::<Vec<_>>()),
            _ => None,
        })
        .find(|places| {
            places.windows(2).any(|pair| matches!(pair, [one, two] if judged.level(*one) != judged.level(*two)))
        })?;
    let up = places.iter().filter(|place| judged.level(**place) == "up").count();
    let odd_level = if up * 2 > places.len() { "down" } else { "up" };
    let tie = up * 2 == places.len();
    let blamed = places.iter().rev().find(|place| tie || judged.level(**place) == odd_level).copied()?;
    let other = places.iter().find(|place| judged.level(**place) != judged.level(blamed)).copied()?;
    let mut changes = Vec::new();
    for place in [blamed, other] {
        let support = if tie { 0 } else { i32::from(place == blamed) };
        if let Some(script) = judged.sketch.place(place).map(|place| place.script) {
            changes.push((Change::FlipScript(script), support));
        }
        changes.push((Change::FlipLetter(place), support));
    }
    let mends = mends(judged, changes);
    let finding = Finding {
        rule: RULE.name,
        severity: RULE.severity,
        span: judged.span(blamed),
        message: format!(
            "{} is free {} here, but {} elsewhere",
            shown(&letter),
            judged.level(blamed),
            judged.level(other)
        ),
        related: vec![Related {
            span: judged.span(other),
            message: format!("{} is free {} here", shown(&letter), judged.level(other)),
        }],
        fixes: fixes(judged, &mends, clear_winner(&mends)),
        ledger: Some(judged.view(&[letter])),
        verdict: None,
    };
    let mended = mends.into_iter().next().map(|mend| (mend.sketch, mend.choice));
    Some(Report { finding, mended })
}
