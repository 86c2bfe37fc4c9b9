//! Sides, or terms of one side, differ in their free letters.

use compact_str::CompactString;
use indexwise_grammar::span::Span;

use crate::balance::{Compared, Event, Odd};
use crate::changes::Change;
use crate::conventions::built_in::class_of;
use crate::finding::{Finding, Related, Severity};
use crate::ledger::{Judged, shown, side_title};

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
    let finding = Finding {
        rule: RULE.name,
        severity: severity(judged, &mends),
        span,
        message: plain_message(judged, &mends).unwrap_or_else(|| disagreement.message(judged, &odd, span)),
        related: disagreement.related(judged, span),
        fixes: fixes(judged, &mends, clear_winner(&mends)),
        ledger: Some(judged.view(&odd)),
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
    let holders = |letter: &CompactString| {
        let held = rows.iter().filter(|row| !row.any && row.free.iter().any(|(free, _)| free == letter)).count();
        i32::try_from(held).unwrap_or(0)
    };
    let mut out = Vec::new();
    for from in odd {
        for place in index_places(judged, from) {
            let script = judged.sketch.place(place).map(|place| place.script);
            let beside = |letter: &CompactString| {
                judged.sketch.places.iter().any(|other| Some(other.script) == script && other.letter == *letter)
            };
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
                out.push((Change::Insert(number, letter.clone()), holders(letter) - if alike { 2 } else { 6 }));
            }
        }
    }
    out
}

/// Where free letters differ: the compared terms of the gravest disagreement.
struct Disagreement {
    terms: Vec<(Compared, CompactString)>,
}

impl Disagreement {
    fn of(judged: &Judged<'_>, odd: &[CompactString]) -> Self {
        let mut terms = Vec::new();
        for letter in odd {
            for event in judged.events(letter) {
                if let Event::Terms(compared) = event
                    && compared.iter().any(|term| term.free.is_none())
                {
                    terms.extend(compared.into_iter().map(|term| (term, letter.clone())));
                    break;
                }
            }
        }
        Self { terms }
    }

    /// A place of an odd letter that stands in the minority of the terms.
    fn odd_place(&self, judged: &Judged<'_>) -> Option<Span> {
        let free =
            |letter: &CompactString| self.terms.iter().filter(|(term, l)| l == letter && term.free.is_some()).count();
        let all = |letter: &CompactString| self.terms.iter().filter(|(_, l)| l == letter).count();
        let rarest =
            self.terms.iter().map(|(_, letter)| letter).min_by_key(|letter| free(letter) * 100 / all(letter).max(1))?;
        let holder = self.terms.iter().filter(|(_, letter)| letter == rarest).find_map(|(term, _)| term.free)?;
        Some(judged.span(holder))
    }

    fn message(&self, judged: &Judged<'_>, odd: &[CompactString], span: Span) -> String {
        if let Some(tie) = self.tie(judged, odd, span) {
            return tie;
        }
        let clauses: Vec<String> = odd.iter().filter_map(|letter| self.clause(judged, letter)).take(3).collect();
        if clauses.is_empty() { "the terms differ in their free indices".to_owned() } else { clauses.join("; ") }
    }

    /// Of two letters each is free where the other is not: "l is free (down) in the right side, but k in the left side".
    fn tie(&self, judged: &Judged<'_>, odd: &[CompactString], span: Span) -> Option<String> {
        let [one, two] = odd else { return None };
        let free = |letter: &CompactString| -> Vec<&Compared> {
            self.terms.iter().filter(|(term, l)| l == letter && term.free.is_some()).map(|(term, _)| term).collect()
        };
        let (first, second) = (free(one), free(two));
        let all = self.terms.iter().filter(|(_, letter)| letter == one).count();
        let apart = first.iter().all(|term| second.iter().all(|other| other.span != term.span));
        if !apart || first.len() + second.len() != all || first.is_empty() || second.is_empty() {
            return None;
        }
        let blamed_first = first.iter().filter_map(|term| term.free).any(|place| judged.span(place) == span);
        let (blamed, theirs, other, others) =
            if blamed_first { (one, first, two, second) } else { (two, second, one, first) };
        let words = |letter: &CompactString, terms: &[&Compared]| {
            let place = terms.iter().find_map(|term| term.free).unwrap_or_default();
            let level = judged.level(place);
            let level = if level.is_empty() { String::new() } else { format!(" ({level})") };
            let names = gather(terms.iter().map(|term| self.name(judged, term, judged.sketch.sides.len())));
            let names = if names.len() > 2 { "the others".to_owned() } else { listed(&names) };
            (format!("{}{level}", shown(letter)), names)
        };
        let ((blamed, here), (other, there)) = (words(blamed, &theirs), words(other, &others));
        Some(format!("{blamed} is free in {here}, but {other} in {there}"))
    }

    /// "k is free on the left (down), but not on the right".
    fn clause(&self, judged: &Judged<'_>, letter: &CompactString) -> Option<String> {
        let mine = || self.terms.iter().filter(|(_, l)| l == letter).map(|(term, _)| term);
        let sides = judged.sketch.sides.len();
        let name = |term: &Compared| self.name(judged, term, sides);
        let level = mine().find_map(|term| term.free).map_or("", |place| judged.level(place));
        let level = if level.is_empty() { String::new() } else { format!(" ({level})") };
        let held = gather(mine().filter(|term| term.free.is_some()).map(name));
        let lacking = gather(mine().filter(|term| term.free.is_none()).map(name));
        if held.is_empty() || lacking.is_empty() {
            return None;
        }
        let both = if held.len() <= lacking.len() && held.len() < 3 {
            format!(
                "in {}, but not in {}",
                listed(&held),
                if lacking.len() > 2 { "the others".to_owned() } else { listed(&lacking) }
            )
        } else if lacking.len() < 3 {
            format!("everywhere but in {}", listed(&lacking))
        } else {
            "in some terms, but not in others".to_owned()
        };
        Some(format!("{} is free{level} {both}", shown(letter)))
    }

    /// The name of a compared term: its side where the whole side agrees.
    fn name(&self, judged: &Judged<'_>, term: &Compared, sides: usize) -> String {
        let Some(side) = term.side.map(|side| side as usize) else {
            return format!("{} in brackets", excerpt(term.span.of(judged.text)));
        };
        let title = if sides == 1 {
            "the expression".to_owned()
        } else {
            format!("the {}", side_title(sides, side)).replace("the side", "side")
        };
        let terms = judged.sketch.sides.get(side).map_or(0, |side| side.terms);
        if terms < 2 { title } else { format!("{} of {title}", excerpt(term.span.of(judged.text))) }
    }

    fn related(&self, judged: &Judged<'_>, span: Span) -> Vec<Related> {
        let mut out: Vec<Related> = Vec::new();
        for (term, letter) in &self.terms {
            let Some(place) = term.free else { continue };
            let at = judged.span(place);
            if at != span && !out.iter().any(|related| related.span == at) && out.len() < 6 {
                out.push(Related { span: at, message: free_here(letter, judged.level(place)) });
            }
        }
        out
    }
}

fn free_here(letter: &str, level: &str) -> String {
    let level = if level.is_empty() { String::new() } else { format!(" ({level})") };
    format!("{} is free here{level}", shown(letter))
}

fn gather(names: impl Iterator<Item = String>) -> Vec<String> {
    let mut out: Vec<String> = Vec::new();
    for name in names {
        if !out.contains(&name) {
            out.push(name);
        }
    }
    out
}

fn listed(names: &[String]) -> String {
    names.join(" and ")
}

/// A term in the author's words, cut short.
pub(super) fn excerpt(text: &str) -> String {
    const LENGTH: usize = 32;
    let text = text.split_whitespace().collect::<Vec<_>>().join(" ");
    if text.chars().count() <= LENGTH {
        return text;
    }
    text.chars().take(LENGTH - 1).collect::<String>() + "…"
}
