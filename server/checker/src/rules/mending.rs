//! Tries changes of a statement and keeps those that mend it.

use compact_str::CompactString;

use crate::balance::{Choice, Odd};
use crate::changes::Change;
use crate::finding::Fix;
use crate::ledger::Judged;
use crate::sketch::Sketch;

use super::faults::{Fault, faults};

/// Changes tried for one finding.
const CHANGES_TRIED: usize = 600;
/// Fixes offered for one finding.
const FIXES_OFFERED: usize = 4;

/// A change that was tried and mends.
#[derive(Debug)]
pub(super) struct Mend {
    /// The change.
    pub change: Change,
    /// The statement after it.
    pub sketch: Sketch,
    /// The choice after it.
    pub choice: Choice,
    /// Faults that remain.
    pub left: usize,
    /// How many terms of the statement speak for it.
    pub support: i32,
}

/// The changes that take faults away and add none, those that leave least first, then those with most support.
pub(super) fn mends(judged: &Judged<'_>, changes: Vec<(Change, i32)>) -> Vec<Mend> {
    let before = &judged.faults;
    let mut out: Vec<Mend> = changes
        .into_iter()
        .take(CHANGES_TRIED)
        .filter_map(|(change, support)| {
            let (sketch, choice) = change.apply(&judged.sketch, &judged.reading.choice);
            let after = faults(&sketch, &choice, &judged.prices);
            let better = after.len() < before.len() && after.iter().all(|fault| before.contains(fault));
            better.then_some(Mend { change, sketch, choice, left: after.len(), support })
        })
        .collect();
    out.sort_by_key(|mend| (mend.left, -mend.support));
    let least = out.first().map(|mend| mend.left);
    out.retain(|mend| Some(mend.left) == least);
    out
}

/// The mends as fixes, best first. `bulk` says whether the first may be applied unseen.
pub(super) fn fixes(judged: &Judged<'_>, mends: &[Mend], bulk: Result<(), &'static str>) -> Vec<Fix> {
    let mut out: Vec<Fix> = Vec::new();
    for (n, mend) in mends.iter().enumerate() {
        let Some(edits) = mend.change.edits(judged) else { continue };
        let title = mend.change.title(judged);
        if out.iter().any(|fix| fix.edits == edits || fix.title == title) {
            continue;
        }
        let bulk = match (&mend.change, n) {
            (_, 1..) => Err("another change comes first"),
            (Change::Insert(..), _) => Err("which slot the missing index takes is the author's choice"),
            (Change::Drop(_), _) => Err("the index may belong somewhere else"),
            _ => bulk,
        };
        out.push(Fix { title, edits, bulk });
        if out.len() == FIXES_OFFERED {
            break;
        }
    }
    out
}

/// Whether the first of the mends is the one that a majority speaks for.
pub(super) fn clear_winner(mends: &[Mend]) -> Result<(), &'static str> {
    match mends {
        [] => Err("no single change balances the statement"),
        [only] if only.support > 0 => Ok(()),
        [first, second, ..] if first.support > 0 && first.support > second.support => Ok(()),
        _ => Err("more than one change would balance the statement"),
    }
}

/// Places of a letter that are read as indices.
pub(super) fn index_places(judged: &Judged<'_>, letter: &str) -> Vec<u32> {
    (0_u32..)
        .zip(&judged.sketch.places)
        .filter(|(number, place)| place.letter == letter && judged.is_index(*number))
        .map(|(number, _)| number)
        .collect()
}

/// Letters out of balance in one way.
pub(super) fn odd_by(judged: &Judged<'_>, kind: Odd) -> Vec<CompactString> {
    judged.reading.odd.iter().filter(|(_, odd)| *odd == kind).map(|(letter, _)| letter.clone()).collect()
}

/// Whether a letter has a fault of its level.
pub(super) fn level_letters(judged: &Judged<'_>) -> Vec<Fault> {
    judged.faults.iter().filter(|fault| !matches!(fault, Fault::Odd(..))).cloned().collect()
}
