//! Upper and lower indices stand one above the other on a kernel that the author staggers elsewhere.

use crate::finding::{Finding, Severity};
use crate::ledger::{Judged, shown};

use super::{Check, Rule};

pub(super) const RULE: Rule = Rule {
    name: "slot-order-unclear",
    severity: Severity::Hint,
    summary: "Indices are stacked on a kernel that is staggered elsewhere, so that the order of its slots is unclear.",
    page: include_str!("slot_order_unclear.md"),
    on: true,
    check: Check::Beside(check),
};

/// Kernels whose stacked form is the usual one: they are symmetric in the slots, or have a fixed order.
const STACKED_BY_CUSTOM: &[&str] = &["\\Gamma", "\\delta", "\\Lambda", "\\partial"];
/// Staggered uses from which a stacked one stands out.
const STAGGERED_USES: u32 = 3;

fn check(judged: &Judged<'_>) -> Vec<Finding> {
    let unclear = judged.sketch.stacked.iter().filter(|stacked| {
        let [staggered, flat] = judged.prices.staggering(&stacked.kernel);
        !stacked.staggered
            && !STACKED_BY_CUSTOM.contains(&stacked.kernel.0.as_str())
            && staggered >= STAGGERED_USES
            && staggered > 2 * flat
    });
    unclear
        .map(|stacked| {
            let kernel = shown(&stacked.kernel.0);
            let message = format!("the order of the slots of {kernel} is unclear here: elsewhere they are staggered");
            Finding::plain(RULE.name, RULE.severity, stacked.second, message)
        })
        .collect()
}
