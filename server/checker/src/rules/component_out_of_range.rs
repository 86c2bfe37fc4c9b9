//! A component that the range of its slot does not hold.

use crate::finding::{Finding, Severity};
use crate::ledger::shown;
use crate::terms::Flattened;
use crate::terms::uses::{Filling, Use, UsedSlot};

use super::{Check, Rule};

pub(super) const RULE: Rule = Rule {
    name: "component-out-of-range",
    severity: Severity::Error,
    summary: "A component is no value of the range that is declared for its slot.",
    page: include_str!("component_out_of_range.md"),
    on: true,
    check: Check::Terms(check),
};

fn check(terms: &Flattened<'_>) -> Vec<Finding> {
    let mut out = Vec::new();
    for made in terms.uses.iter().filter(|made| !made.unread && !made.power) {
        let mut found: Vec<Finding> =
            made.own_slots().enumerate().filter_map(|(at, slot)| finding(terms, made, at, slot)).collect();
        // The digits of one number share its place.
        found.dedup_by_key(|finding| finding.span);
        out.extend(found);
    }
    out
}

fn finding(terms: &Flattened<'_>, made: &Use, at: usize, slot: &UsedSlot) -> Option<Finding> {
    let Filling::Component(name) = &slot.filling else { return None };
    let number: u32 = name.parse().ok()?;
    let (letter, family) = terms.family_of_slot(made, at)?;
    let (first, last) = family.numbers()?;
    let held = family.holds_number(number)? || terms.whole_holds(&letter, number);
    // Below the range it is the time beside space, or the number of an order.
    if held || number < first || made.stacked && terms.any_slot_holds(made, number) {
        return None;
    }
    let message = format!(
        "{number} is out of range: the slot takes an index such as {0}, and {0} runs from {first} to {last}",
        shown(&letter)
    );
    Some(Finding::plain(RULE.name, RULE.severity, slot.span, message))
}
