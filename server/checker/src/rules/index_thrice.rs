//! A letter stands more than twice in one product.

use compact_str::CompactString;

use crate::balance::{Event, Odd};
use crate::changes::{Change, fresh_letters};
use crate::conventions::built_in::class_of;
use crate::finding::{Finding, Related, Severity};
use crate::ledger::{Judged, shown};

use super::mending::{clear_winner, fixes, mends, odd_by};
use super::{Check, Report, Rule};

pub(super) const RULE: Rule = Rule {
    name: "index-thrice",
    severity: Severity::Error,
    summary: "A letter stands more than twice in one product, and no sum sign binds it.",
    page: include_str!("index_thrice.md"),
    on: true,
    check: Check::Balance(check),
};

fn check(judged: &Judged<'_>) -> Option<Report> {
    let letter = odd_by(judged, Odd::Thrice).into_iter().next()?;
    let places = judged.events(&letter).into_iter().find_map(|event| match event {
        Event::Thrice(places) => Some(places),
        _ => None,
    })?;
    let mends = mends(judged, candidates(judged, &letter, &places));
    let blamed = mends.first().and_then(|mend| match &mend.change {
        Change::Rename(places, _) => places.first().copied(),
        _ => None,
    });
    let blamed = blamed.or_else(|| places.get(2).copied())?;
    // Free once elsewhere: it numbers quantities, one formula for each.
    let written_out = judged.sketch.reach.is_some();
    let numbered = free_elsewhere(judged, &letter) && (written_out || !has_trace(judged, &places));
    let severity = if numbered { Severity::Hint } else { RULE.severity };
    let bulk = if numbered { Err("it is only a hint") } else { clear_winner(&mends) };
    let related = places.iter().filter(|place| **place != blamed);
    let finding = Finding {
        rule: RULE.name,
        severity,
        span: judged.span(blamed),
        message: format!("{} stands {} times in one product", shown(&letter), places.len()),
        related: related.map(|place| Related { span: judged.span(*place), message: "also here".to_owned() }).collect(),
        fixes: fixes(judged, &mends, bulk),
        ledger: Some(judged.view(&[letter])),
        verdict: None,
    };
    let mended = mends.into_iter().next().map(|mend| (mend.sketch, mend.choice));
    Some(Report { finding, mended })
}

/// Whether two of the places stand in one script, as in `\sigma_{kk}`: a sum however the rest is meant.
fn has_trace(judged: &Judged<'_>, places: &[u32]) -> bool {
    let mut scripts: Vec<_> = places.iter().filter_map(|place| judged.sketch.place(*place)).map(|p| p.script).collect();
    scripts.sort_unstable();
    scripts.windows(2).any(|pair| pair.first() == pair.last())
}

/// Whether the letter is free in a term of another side.
pub(super) fn free_elsewhere(judged: &Judged<'_>, letter: &CompactString) -> bool {
    judged
        .rows()
        .iter()
        .any(|row| row.free.iter().any(|(free, place)| free == letter && !is_odd(judged, row.side, *place, letter)))
}

/// Whether a place stands on a side in which the letter is out of balance by itself.
fn is_odd(judged: &Judged<'_>, side: usize, place: u32, letter: &CompactString) -> bool {
    let at = judged.span(place);
    let inside = judged.sketch.sides.get(side).is_some_and(|side| side.span.holds(at));
    inside
        && judged.events(letter).iter().any(|event| match event {
            Event::Thrice(places) | Event::Captured(places, _) => places.contains(&place),
            _ => false,
        })
}

/// One of the places takes a letter that is missing elsewhere; or, of four places, two take a fresh letter.
fn candidates(judged: &Judged<'_>, letter: &CompactString, places: &[u32]) -> Vec<(Change, i32)> {
    let mut out = Vec::new();
    let missing: Vec<CompactString> = odd_by(judged, Odd::Mismatch);
    let known = &judged.sketch.letters;
    let script = |place: &u32| judged.sketch.place(*place).map(|place| place.script);
    for place in places {
        // Two in one script are rarely meant beside a third.
        let trace = places.iter().any(|other| other != place && script(other) == script(place));
        for to in &missing {
            out.push((Change::Rename(vec![*place], to.clone()), 3 + i32::from(trace)));
        }
        for to in known.iter().filter(|to| *to != letter && class_of(to) == class_of(letter)) {
            out.push((Change::Rename(vec![*place], to.clone()), 1 + i32::from(trace)));
        }
    }
    if let (3, Some(fresh)) = (places.len(), fresh_letters(judged, letter).into_iter().next()) {
        // Two in one script are a trace that wants a letter of its own.
        for pair in [[0, 1], [1, 2], [0, 2]] {
            let pair: Vec<u32> = pair.iter().filter_map(|at| places.get(*at).copied()).collect();
            if pair.first().map(script) == pair.last().map(script) {
                out.push((Change::Rename(pair, fresh.clone()), 2));
            }
        }
    }
    if let (4, Some(fresh)) = (places.len(), fresh_letters(judged, letter).into_iter().next()) {
        let pairs = [[2, 3], [1, 3], [1, 2]];
        for (n, pair) in pairs.iter().enumerate() {
            let pair: Vec<u32> = pair.iter().filter_map(|at| places.get(*at).copied()).collect();
            out.push((Change::Rename(pair, fresh.clone()), if n == 0 { 1 } else { 0 }));
        }
    }
    out
}
