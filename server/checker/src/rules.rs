//! The registry of rules: one slice, from which `explain`, the reports and the documentation derive.
//!
//! A rule is two files with one stem, `<rule>.rs` and `<rule>.md`. Rules about the balance of a statement run in
//! the order of the slice, which is their precedence: a later one is asked only about what remains when the
//! earlier finding is mended, so that one slip is one finding.

mod component_out_of_range;
mod convention_clash;
mod convention_unreadable;
mod derivative_of_non_tensor;
mod disagreement;
mod dummy_captured;
mod dummy_levels;
mod family_mismatch;
pub(crate) mod faults;
mod free_index_levels;
mod free_index_mismatch;
mod idle_allow;
mod index_also_quantity;
mod index_thrice;
mod like_terms;
mod mending;
mod metric_moved_through_partial;
mod missing_part;
mod script_swallows_factor;
mod silence;
mod slot_count;
mod slot_order_unclear;
mod step_fails;
mod step_needs_dimension;
mod step_not_shown;
mod step_undecided;
mod symmetry_not_shared;
mod unknown_label;
mod unread;
mod unsummed_repeat;
mod vanishing_bracket;
mod vanishing_contraction;

use std::borrow::Cow;

use crate::balance::Choice;
use crate::finding::{Finding, Severity};
use crate::ledger::Judged;
use crate::sketch::Sketch;
use crate::terms::Flattened;

pub(crate) use convention_clash::{convention_clash, defined_by_itself};
pub(crate) use convention_unreadable::{convention_unreadable, unknown_name};
pub(crate) use idle_allow::idle_allow;
pub(crate) use missing_part::missing_part;
pub(crate) use step_fails::step_fails;
pub(crate) use step_needs_dimension::step_needs_dimension;
pub(crate) use step_not_shown::step_not_shown;
pub(crate) use step_undecided::step_undecided;
pub(crate) use unknown_label::unknown_label;
pub(crate) use unread::unread;

/// What there is to know of a rule.
#[derive(Clone, Copy, Debug)]
pub struct Rule {
    /// Kebab-case, never reused.
    pub name: &'static str,
    /// Its usual severity.
    pub severity: Severity,
    /// One sentence: what it says.
    pub summary: &'static str,
    /// The page that `explain` prints: Markdown, with a wrong and a right example.
    pub page: &'static str,
    /// Whether it is reported unless switched off.
    pub on: bool,
    /// How it is found.
    pub(crate) check: Check,
}

/// How a rule is found.
#[derive(Clone, Copy, Debug)]
pub(crate) enum Check {
    /// In the balance of a statement, in the order of precedence.
    Balance(fn(&Judged<'_>) -> Option<Report>),
    /// In a statement, whatever else is found there.
    Beside(fn(&Judged<'_>) -> Vec<Finding>),
    /// In the terms of a statement that balances.
    Terms(fn(&Flattened<'_>) -> Vec<Finding>),
    /// By the pipeline, in a whole document.
    Document,
}

/// A finding about balance, with the statement as the best fix would leave it.
#[derive(Debug)]
pub(crate) struct Report {
    /// What is reported.
    pub finding: Finding,
    /// The statement after the best change, if one was found.
    pub mended: Option<(Sketch, Choice)>,
}

/// All rules, in the order of precedence.
pub const RULES: &[Rule] = &[
    unread::RULE,
    script_swallows_factor::RULE,
    index_thrice::RULE,
    unsummed_repeat::RULE,
    free_index_mismatch::RULE,
    dummy_captured::RULE,
    dummy_levels::RULE,
    free_index_levels::RULE,
    family_mismatch::RULE,
    slot_count::RULE,
    component_out_of_range::RULE,
    slot_order_unclear::RULE,
    index_also_quantity::RULE,
    vanishing_contraction::RULE,
    vanishing_bracket::RULE,
    symmetry_not_shared::RULE,
    derivative_of_non_tensor::RULE,
    metric_moved_through_partial::RULE,
    like_terms::RULE,
    step_fails::RULE,
    step_needs_dimension::RULE,
    step_not_shown::RULE,
    step_undecided::RULE,
    unknown_label::RULE,
    missing_part::RULE,
    convention_unreadable::RULE,
    convention_clash::RULE,
    idle_allow::RULE,
];

/// Findings about balance in one statement beyond which no more are looked for.
const FINDINGS_PER_STATEMENT: usize = 6;

/// The rule of a name.
pub fn find(name: &str) -> Option<&'static Rule> {
    RULES.iter().find(|rule| rule.name == name)
}

/// Everything that is wrong with a statement.
pub(crate) fn check_statement(judged: &Judged<'_>) -> Vec<Finding> {
    let broken = !judged.faults.is_empty() || !judged.sketch.swallowed.is_empty();
    let mut out = if broken { balance_findings(judged.clone()) } else { Vec::new() };
    if judged.reading.odd.is_empty() && !judged.reading.excused.is_empty() {
        out.extend(unsummed_repeat::excused(judged));
    }
    for rule in RULES {
        if let Check::Beside(check) = rule.check {
            out.extend(check(judged));
        }
    }
    out
}

/// What is wrong with the terms of a statement that balances.
pub(crate) fn check_terms(terms: &Flattened<'_>) -> Vec<Finding> {
    let mut out = Vec::new();
    for rule in RULES {
        if let Check::Terms(check) = rule.check {
            out.extend(check(terms));
        }
    }
    out
}

fn balance_findings(mut judged: Judged<'_>) -> Vec<Finding> {
    let mut out = Vec::new();
    while out.len() < FINDINGS_PER_STATEMENT && !(judged.faults.is_empty() && judged.sketch.swallowed.is_empty()) {
        let report = RULES.iter().find_map(|rule| match rule.check {
            Check::Balance(check) => check(&judged),
            _ => None,
        });
        let Some(report) = report else { break };
        let mismatch = report.finding.rule == free_index_mismatch::RULE.name;
        out.push(report.finding);
        let Some((sketch, choice)) = report.mended else { break };
        // A mismatch names all letters that differ; what one change leaves of it is no other slip.
        if mismatch && faults::odd_letters(&sketch, &choice).iter().any(|left| judged.reading.odd.contains(left)) {
            break;
        }
        judged.reading.odd = faults::odd_letters(&sketch, &choice);
        judged.faults = faults::faults(&sketch, &choice, &judged.prices);
        judged.sketch = Cow::Owned(sketch);
        judged.reading.choice = choice;
    }
    out
}
