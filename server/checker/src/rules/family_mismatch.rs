//! A kernel, or a contraction with it, joins indices of different ranges.

use compact_str::CompactString;

use crate::conventions::built_in::is_metric_by_custom;
use crate::conventions::meanings::Family;
use crate::finding::{Finding, Severity};
use crate::ledger::shown;
use crate::terms::Flattened;
use crate::terms::uses::{Use, UsedSlot};

use super::{Check, Rule};

pub(super) const RULE: Rule = Rule {
    name: "family-mismatch",
    severity: Severity::Error,
    summary: "A contraction or a kernel joins indices of different declared ranges.",
    page: include_str!("family_mismatch.md"),
    on: true,
    check: Check::Terms(check),
};

fn check(terms: &Flattened<'_>) -> Vec<Finding> {
    terms.uses.iter().filter(|made| !made.unread).filter_map(|made| finding(terms, made)).collect()
}

fn finding(terms: &Flattened<'_>, made: &Use) -> Option<Finding> {
    let used: Vec<(&UsedSlot, &CompactString)> =
        made.own_slots().filter_map(|slot| slot.letter().map(|letter| (slot, letter))).collect();
    if used.len() != made.own_slots().count() || used.is_empty() {
        return None;
    }
    let declared = declared_letters(terms, made);
    if declared.is_empty() {
        return joins_by_custom(terms, made, &used);
    }
    // Stacked scripts have no common order, and frames are written either way: the families count, not their order.
    let mut left: Vec<&CompactString> = declared.iter().collect();
    let mut odd = Vec::new();
    for (slot, letter) in &used {
        match left.iter().position(|other| fits(terms, made, other, letter)) {
            Some(at) => {
                left.remove(at);
            }
            None => odd.push((*slot, *letter)),
        }
    }
    let ((slot, letter), other) = (odd.first()?, left.first()?);
    if odd.len() == used.len() && is_another(terms, made, letter, used.len()) {
        return None;
    }
    let message = format!(
        "{} is declared with {} in this slot, but {} runs over another range",
        shown(&made.kernel),
        shown(other),
        shown(letter)
    );
    Some(Finding::plain(RULE.name, RULE.severity, slot.span, message))
}

/// Whether a kernel whose letters are all of other ranges is another one of the same name: a form `\omega_{\mu\nu}`
/// beside a connection `\omega^a{}_b`.
fn is_another(terms: &Flattened<'_>, made: &Use, letter: &str, slots: usize) -> bool {
    slots > 1 || terms.judged.prices.lone_uses(&made.kernel, letter) >= OTHER_USES
}

/// Statements with a letter of another range from which it is another kernel.
const OTHER_USES: u32 = 2;

/// The letters that a kernel with so many slots is declared with, if all of them belong to families.
fn declared_letters(terms: &Flattened<'_>, made: &Use) -> Vec<CompactString> {
    let known = terms.eyes.meanings.known(&made.kernel, made.own_slots().count());
    let letters: Vec<CompactString> =
        known.map(|known| known.slots.iter().map(|slot| slot.letter.clone()).collect()).unwrap_or_default();
    let all = letters.iter().all(|letter| terms.eyes.meanings.family(letter).is_some());
    if all { letters } else { Vec::new() }
}

/// A metric joins indices of one range, declared or not; the spatial part counts as the whole.
fn joins_by_custom(terms: &Flattened<'_>, made: &Use, used: &[(&UsedSlot, &CompactString)]) -> Option<Finding> {
    let [(_, one), (slot, two)] = used else { return None };
    let surface = |one: &Family, two: &Family| one.lies_in(two) || two.lies_in(one);
    let meanings = terms.eyes.meanings;
    let nested = meanings.family(one).zip(meanings.family(two)).is_some_and(|(one, two)| surface(one, two));
    if !is_metric_by_custom(&made.kernel) || nested || fits(terms, made, one, two) {
        return None;
    }
    let message =
        format!("{} joins {} and {}, which run over different ranges", shown(&made.kernel), shown(one), shown(two));
    Some(Finding::plain(RULE.name, RULE.severity, slot.span, message))
}

/// Whether a letter may stand where another is declared: its family is unknown, the same, of the same size, one is the
/// spatial part of the other, or its values lie in the declared range. A connection has components out of its surface.
fn fits(terms: &Flattened<'_>, made: &Use, declared: &str, letter: &str) -> bool {
    let meanings = terms.eyes.meanings;
    let (Some(one), Some(two)) = (meanings.family(declared), meanings.family(letter)) else { return true };
    let connection = made.letter == "\\Gamma" && one.lies_in(two);
    !one.differs_from(two) || one.is_part_of(two) || two.is_part_of(one) || two.lies_in(one) || connection
}
