//! A letter stands once on one side and twice, on one level, on the other: an unsummed repeat.

use compact_str::CompactString;

use crate::balance::{Event, Odd, same_level};
use crate::finding::{Finding, Related, Severity};
use crate::ledger::{Judged, shown};
use crate::sketch::Shape;

use super::mending::odd_by;
use super::{Check, Report, Rule};

pub(super) const RULE: Rule = Rule {
    name: "unsummed-repeat",
    severity: Severity::Hint,
    summary: "A letter stands once on one side and twice on one level on the other: say \"no sum\" or write the sum.",
    page: include_str!("unsummed_repeat.md"),
    on: true,
    check: Check::Balance(check),
};

/// The same where the statement is excused: one of the letters may be read as a name, so that it is in balance.
pub(super) fn excused(judged: &Judged<'_>) -> Vec<Finding> {
    let mut out = Vec::new();
    for number in &judged.reading.excused {
        let Some(letter) = judged.sketch.letters.get(*number as usize) else { continue };
        let mut likely = judged.clone();
        likely.reading.choice = judged.reading.likely.clone();
        let usual = matches!(letter.as_str(), "i" | "j" | "k" | "l");
        let alone = likely.rows().iter().all(|row| row.summed.iter().all(|summed| summed == letter));
        if let Some((first, second)) = repeat(&likely, letter).filter(|_| usual && alone) {
            out.push(finding(&likely, letter, first, second));
        }
    }
    out
}

fn check(judged: &Judged<'_>) -> Option<Report> {
    let odd = odd_by(judged, Odd::Mismatch);
    // Another letter out of balance means another slip: then this is no habit.
    let [letter] = odd.as_slice() else { return None };
    if judged.rows().iter().any(|row| row.summed.iter().any(|summed| summed != letter)) {
        return None;
    }
    let (first, second) = repeat(judged, letter)?;
    Some(Report { finding: finding(judged, letter, first, second), mended: None })
}

fn finding(judged: &Judged<'_>, letter: &CompactString, first: u32, second: u32) -> Finding {
    Finding {
        rule: RULE.name,
        severity: RULE.severity,
        span: judged.span(second),
        message: format!(
            "{0} stands twice here and once elsewhere: if no sum over {0} is meant, say so",
            shown(letter)
        ),
        related: vec![Related { span: judged.span(first), message: "the first of the two".to_owned() }],
        fixes: Vec::new(),
        ledger: Some(judged.view(std::slice::from_ref(letter))),
        verdict: None,
    }
}

/// The pair of a term that lacks the free letter, if every such term has one, on one level, each on a kernel of its
/// own that carries nothing else.
fn repeat(judged: &Judged<'_>, letter: &CompactString) -> Option<(u32, u32)> {
    let events = judged.events(letter);
    let lone = |place: u32| judged.unit(place).is_some_and(|unit| unit.shape != Shape::Several);
    let pairs: Vec<(u32, u32)> = events
        .iter()
        .filter_map(|event| match event {
            Event::Pair(one, two) => Some((*one, *two)),
            _ => None,
        })
        .filter(|(one, two)| same_level(&judged.sketch, *one, *two).is_some() && lone(*one) && lone(*two))
        .collect();
    let lacking = events.iter().find_map(|event| match event {
        Event::Terms(terms) if terms.iter().any(|term| term.free.is_none()) => {
            Some(terms.iter().filter(|term| term.free.is_none()).map(|term| term.span).collect::<Vec<_>>())
        }
        _ => None,
    })?;
    let all = lacking.iter().all(|span| pairs.iter().any(|(one, _)| span.holds(judged.span(*one))));
    pairs.first().copied().filter(|_| all)
}
