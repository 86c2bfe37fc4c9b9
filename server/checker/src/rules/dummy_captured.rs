//! A dummy of an inner factor meets the same letter outside.

use indexwise_grammar::span::Span;
use indexwise_grammar::tree::Level;

use crate::balance::{Event, Odd};
use crate::changes::{Change, fresh_letters};
use crate::finding::{Finding, Related, Severity};
use crate::ledger::{Judged, shown};

use super::index_thrice::free_elsewhere;
use super::mending::{clear_winner, fixes, index_places, mends, odd_by};
use super::{Check, Report, Rule};

pub(super) const RULE: Rule = Rule {
    name: "dummy-captured",
    severity: Severity::Warning,
    summary: "A dummy of an inner factor meets the same letter outside it.",
    page: include_str!("dummy_captured.md"),
    on: true,
    check: Check::Balance(check),
};

fn check(judged: &Judged<'_>) -> Option<Report> {
    let letter = odd_by(judged, Odd::Captured).into_iter().next()?;
    let (outside, inner) = judged.events(&letter).into_iter().find_map(|event| match event {
        Event::Captured(outside, inner) => Some((outside, inner)),
        _ => None,
    })?;
    let scope = term_of(judged, inner)?;
    let pair: Vec<u32> = index_places(judged, &letter)
        .into_iter()
        .filter(|place| scope.holds(judged.span(*place)) && !outside.contains(place))
        .collect();
    let changes = fresh_letters(judged, &letter)
        .into_iter()
        .take(2)
        .enumerate()
        .map(|(n, fresh)| (Change::Rename(pair.clone(), fresh), if n == 0 { 1 } else { 0 }))
        .collect();
    let mends = mends(judged, changes);
    // Free elsewhere, it may number quantities; a pair of one up and one down is a sum however the rest is meant.
    let numbered = free_elsewhere(judged, &letter) && !is_staggered(judged, &pair);
    let related = outside
        .iter()
        .map(|place| Related { span: judged.span(*place), message: format!("{} stands outside here", shown(&letter)) });
    let finding = Finding {
        rule: RULE.name,
        severity: if numbered { Severity::Hint } else { RULE.severity },
        span: judged.span(inner),
        message: format!("{0} is summed inside, and {0} stands outside in the same product", shown(&letter)),
        related: related.collect(),
        fixes: fixes(judged, &mends, if numbered { Err("it is only a hint") } else { clear_winner(&mends) }),
        ledger: Some(judged.view(std::slice::from_ref(&letter))),
        verdict: None,
    };
    let mended = mends.into_iter().next().map(|mend| (mend.sketch, mend.choice));
    Some(Report { finding, mended })
}

/// Whether a pair is one above and one below.
fn is_staggered(judged: &Judged<'_>, pair: &[u32]) -> bool {
    let levels: Vec<Level> = pair.iter().filter_map(|place| judged.sketch.place(*place)).map(|p| p.level).collect();
    levels.contains(&Level::Up) && levels.contains(&Level::Down)
}

/// The term of a side that a place stands in.
fn term_of(judged: &Judged<'_>, place: u32) -> Option<Span> {
    let at = judged.span(place);
    let sketch = &judged.sketch;
    let mut spans = sketch.sides.iter().flat_map(|side| sketch.side_terms(side)).map(|(term, _)| term.span);
    spans.find(|span| span.holds(at))
}
