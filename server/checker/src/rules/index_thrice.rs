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
    let related = places.iter().filter(|place| **place != blamed);
    let finding = Finding {
        rule: RULE.name,
        severity: RULE.severity,
        span: judged.span(blamed),
        message: format!("{} stands {} times in one product", shown(&letter), places.len()),
        related: related.map(|place| Related { span: judged.span(*place), message: "also here".to_owned() }).collect(),
        fixes: fixes(judged, &mends, clear_winner(&mends)),
        ledger: Some(judged.view(&[letter])),
    };
    let mended = mends.into_iter().next().map(|mend| (mend.sketch, mend.choice));
    Some(Report { finding, mended })
}

/// One of the places takes a letter that is missing elsewhere; or, of four places, two take a fresh letter.
fn candidates(judged: &Judged<'_>, letter: &CompactString, places: &[u32]) -> Vec<(Change, i32)> {
    let mut out = Vec::new();
    let missing: Vec<CompactString> = odd_by(judged, Odd::Mismatch);
    let known = &judged.sketch.letters;
    for place in places {
        for to in &missing {
            out.push((Change::Rename(vec![*place], to.clone()), 3));
        }
        for to in known.iter().filter(|to| *to != letter && class_of(to) == class_of(letter)) {
            out.push((Change::Rename(vec![*place], to.clone()), 1));
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
