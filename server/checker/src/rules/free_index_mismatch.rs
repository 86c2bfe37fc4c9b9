//! Sides, or terms of one side, differ in their free letters.

use compact_str::CompactString;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::Level;

use crate::balance::Odd;
use crate::changes::Change;
use crate::conventions::built_in::class_of;
use crate::finding::{Finding, Severity};
use crate::ledger::{Judged, shown};
use crate::sketch::Place;

use super::disagreement::Disagreement;
use super::faults::odd_letters;
use super::mending::{Mend, clear_winner, fixes, index_places, mends, odd_by};
use super::{Check, Report, Rule};

pub(super) const RULE: Rule = Rule {
    name: "free-index-mismatch",
    severity: Severity::Error,
    summary: "Sides, or terms of one side, differ in their free letters.",
    page: include_str!("free_index_mismatch.md"),
    on: true,
    check: Check::Balance(check),
};

fn check(judged: &Judged<'_>) -> Option<Report> {
    let odd = odd_by(judged, Odd::Mismatch);
    let first = odd.first()?;
    let mends = mends(judged, candidates(judged, &odd));
    let disagreement = Disagreement::of(judged, &odd);
    let span = blamed(judged, &mends, &disagreement)
        .unwrap_or_else(|| index_places(judged, first).first().map_or(judged.sketch.span, |place| judged.span(*place)));
    let severity = severity(judged, &mends);
    let bulk = if severity == Severity::Hint { Err("it is only a hint") } else { clear_winner(&mends) };
    let finding = Finding {
        rule: RULE.name,
        severity,
        span,
        message: plain_message(judged, &mends).unwrap_or_else(|| disagreement.message(judged, &odd, span)),
        related: disagreement.related(judged, span),
        fixes: fixes(judged, &mends, bulk),
        ledger: Some(judged.view(&odd)),
        verdict: None,
    };
    let mended = mends.into_iter().next().map(|mend| (mend.sketch, mend.choice));
    Some(Report { finding, mended })
}

/// Where one renamed letter would mend all: "l stands where the other terms have j".
fn plain_message(judged: &Judged<'_>, mends: &[Mend]) -> Option<String> {
    clear_winner(mends).ok()?;
    let Mend { change: Change::Rename(places, to), sketch, choice, .. } = mends.first()? else { return None };
    let place = judged.sketch.place(*places.first()?)?;
    let others = judged.rows().iter().filter(|row| row.free.iter().any(|(letter, _)| letter == to)).count();
    let level = judged.level(*places.first()?);
    let level = if level.is_empty() { String::new() } else { format!(" ({level})") };
    let whole = others > 1 && odd_letters(sketch, choice).is_empty();
    whole.then(|| format!("{} stands free{level} where the other terms have {}", shown(&place.letter), shown(to)))
}

/// An error where one change restores the balance. A statement that no single change can balance is more often
/// written in a shorthand that is not known here than wrong in two places: a hint. So is a number or a letter without
/// indices for the components of one kernel (`g^{ij} = a^{-2}`).
fn severity(judged: &Judged<'_>, mends: &[Mend]) -> Severity {
    let mendable = mends.iter().any(|mend| {
        let left = odd_letters(&mend.sketch, &mend.choice);
        let alike = match &mend.change {
            Change::Rename(places, to) => {
                let from = places.first().and_then(|place| judged.sketch.place(*place)).map(|place| &place.letter);
                from.is_some_and(|from| class_of(from) == class_of(to) && primes(from) == primes(to))
            }
            _ => true,
        };
        alike && left.iter().all(|(_, odd)| *odd != Odd::Mismatch)
    });
    if mendable && !names_components(judged) { RULE.severity } else { Severity::Hint }
}

/// Primes, accents and numbers on a letter: another chart's index is not a slip of the pen.
fn primes(letter: &str) -> (usize, bool) {
    (letter.matches(['\'', '_']).count(), letter.contains(' '))
}

/// One side is a single kernel with all its indices free on one level, the others carry none at all.
fn names_components(judged: &Judged<'_>) -> bool {
    let mut units = judged.sketch.places.iter().map(|place| (place.script, place.level));
    let Some((script, _)) = units.next() else { return false };
    let one_script = units.all(|(other, _)| other == script);
    one_script && judged.sketch.places.len() > 1 && judged.rows().iter().all(|row| row.summed.is_empty())
}

/// The place to blame: where the best change is, if it is the clear one or stands in the minority.
fn blamed(judged: &Judged<'_>, mends: &[Mend], disagreement: &Disagreement) -> Option<Span> {
    let clear = clear_winner(mends).is_ok();
    let at = |mend: &Mend| match &mend.change {
        Change::Rename(places, _) => places.first().map(|place| judged.span(*place)),
        Change::Drop(place) => Some(judged.span(*place)),
        Change::Insert(after, _) => judged.sketch.place(*after).map(|place| place.script),
        _ => None,
    };
    if clear {
        return mends.first().and_then(at);
    }
    // In a tie the later place is blamed: one reads from left to right.
    let best = mends.first().map(|mend| (mend.left, mend.support));
    let tied = mends.iter().filter(|mend| Some((mend.left, mend.support)) == best).filter_map(at);
    tied.max_by_key(|span| span.start).or_else(|| disagreement.odd_place(judged))
}

/// Changes worth a trial, with the number of terms that speak for each: an odd letter becomes another odd one, an
/// index is put in or taken out.
fn candidates(judged: &Judged<'_>, odd: &[CompactString]) -> Vec<(Change, i32)> {
    let rows = judged.rows();
    let held = |letter: &CompactString| {
        let held = rows.iter().filter(|row| !row.any && row.free.iter().any(|(free, _)| free == letter)).count();
        i32::try_from(held).unwrap_or(0)
    };
    let held: Vec<(&CompactString, i32)> = odd.iter().map(|letter| (letter, held(letter))).collect();
    let holders = |letter: &CompactString| held.iter().find(|(odd, _)| *odd == letter).map_or(0, |(_, count)| *count);
    let mut out = Vec::new();
    for from in odd {
        for place in index_places(judged, from) {
            let beside = |letter: &CompactString| stands_beside(judged, place, letter);
            for to in odd.iter().filter(|to| *to != from && !beside(to)) {
                let alike = if class_of(to) == class_of(from) { 0 } else { -3 };
                out.push((Change::Rename(vec![place], to.clone()), holders(to) - holders(from) + alike));
            }
        }
    }
    out.extend(insertions(judged, odd, &holders));
    for letter in odd {
        let lacking = i32::try_from(rows.iter().filter(|row| !row.any).count()).unwrap_or(0) - holders(letter);
        for place in index_places(judged, letter) {
            if judged.sketch.place(place).is_some_and(|place| place.company > 1) {
                out.push((Change::Drop(place), lacking - holders(letter) - 1));
            }
        }
    }
    out
}

/// Whether a letter stands in the script of a place.
fn stands_beside(judged: &Judged<'_>, place: u32, letter: &CompactString) -> bool {
    let places = &judged.sketch.places;
    let at = place as usize;
    let Some(script) = places.get(at).map(|place| place.script) else { return false };
    let (before, after) = places.split_at(at);
    let same = |other: &&Place| other.script == script;
    before.iter().rev().take_while(same).chain(after.iter().take_while(same)).any(|other| other.letter == *letter)
}

/// A letter that most terms hold is put into a script of a term that lacks it.
fn insertions(
    judged: &Judged<'_>,
    odd: &[CompactString],
    holders: &impl Fn(&CompactString) -> i32,
) -> Vec<(Change, i32)> {
    let mut out = Vec::new();
    for letter in odd {
        let model =
            index_places(judged, letter).first().and_then(|place| judged.sketch.place(*place)).map(|place| place.level);
        for (number, place) in (0_u32..).zip(&judged.sketch.places) {
            let last_of_script =
                judged.sketch.places.get(number as usize + 1).is_none_or(|next| next.script != place.script);
            let other = place.letter != *letter;
            if other && last_of_script {
                let alike = class_of(&place.letter) == class_of(letter) && Some(place.level) == model;
                let support = holders(letter) - if alike { 2 } else { 6 } + usual_form(judged, place);
                out.push((Change::Insert(number, letter.clone()), support));
            }
        }
    }
    out
}

/// How much the document speaks for one letter more in a script: whether the kernel is ever seen so.
fn usual_form(judged: &Judged<'_>, place: &Place) -> i32 {
    let Some((kernel, up, down)) = judged.sketch.forms.get(place.form as usize) else { return 0 };
    let (more_up, more_down) =
        if place.written == Level::Up { (up.saturating_add(1), *down) } else { (*up, down.saturating_add(1)) };
    let before = judged.prices.uses(&(kernel.clone(), *up, *down));
    let after = judged.prices.uses(&(kernel.clone(), more_up, more_down));
    if after > before { 2 } else { 0 }
}
