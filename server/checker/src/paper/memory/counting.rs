//! Rounds of counting: every statement is read with the counts of the round before, and votes.
//!
//! Only what changed is done again: units are scored again if counts moved, statements are read again if a score of
//! theirs changed, and vote again if their reading did.

use std::sync::Arc;

use crate::conventions::inferred::Evidence;
use crate::conventions::prices::Prices;
use crate::reading::{self, Reading};

use super::super::Cancel;
use super::super::reads::Sketched;
use super::kept::{Formulas, Kept, Units};
use super::{Memory, ROUNDS, Remembered};

/// Counts and scores of a document, round by round.
#[derive(Default)]
pub(crate) struct Counts {
    /// The scores of all units, in the order of their numbers.
    scores: [Vec<i32>; ROUNDS + 1],
    evidence: [Arc<Evidence>; ROUNDS],
}

impl Counts {
    /// Scores rest on declarations too.
    pub fn forget_scores(&mut self) {
        self.scores = Default::default();
    }

    /// Scores units: all of them, or only those that are new. For each unit whether its score is another one now.
    fn score(&mut self, round: usize, units: &Units, prices: &Prices<'_>, all: bool) -> Vec<bool> {
        let Some(scores) = self.scores.get_mut(round) else { return Vec::new() };
        let mut changed = vec![false; units.list.len()];
        let known = scores.len();
        for (at, (unit, changed)) in units.list.iter().zip(&mut changed).enumerate().skip(if all { 0 } else { known }) {
            let now = prices.score(unit);
            match scores.get_mut(at) {
                Some(score) => *changed = std::mem::replace(score, now) != now,
                None => {
                    *changed = true;
                    scores.push(now);
                }
            }
        }
        changed
    }
}

impl Memory {
    /// Counts, and puts into every statement its reading; `lost` if counts were forgotten without being taken back. The
    /// counts of each document, and of all together.
    pub(super) fn count(
        &mut self,
        documents: &mut [Sketched],
        lost: bool,
        cancel: &Cancel,
    ) -> (Vec<Arc<Evidence>>, Arc<Evidence>) {
        let nothing = Arc::new(Evidence::default());
        let mut before = vec![nothing.clone(); self.documents.len()];
        let mut all_before = nothing;
        // Whether the counts of the round before are others than those of that round in the last version.
        let mut moved = lost;
        for round in 0..=ROUNDS {
            let mut stirred = false;
            for ((remembered, document), file) in self.documents.iter_mut().zip(documents.iter()).zip(&before) {
                let read = &document.read;
                let (declared, macros) = (&read.declared, &read.macros);
                let prices = Prices { file, paper: &all_before, declared, macros, inquiries: None };
                stirred |= remembered.round(round, &prices, moved, cancel);
            }
            moved = stirred || lost;
            if round < ROUNDS {
                before = self.documents.iter().filter_map(|one| one.counts.evidence.get(round).cloned()).collect();
                all_before = total(&before);
            }
        }
        for (remembered, document) in self.documents.iter_mut().zip(documents) {
            remembered.formulas.drop_gone();
            for statement in &mut document.statements {
                let kept = remembered.formulas.statement(statement.place);
                if let Some(reading) = kept.and_then(|kept| kept.readings.last()?.clone()) {
                    statement.reading = reading;
                }
            }
        }
        (before, all_before)
    }
}

impl Remembered {
    /// One round; whether any vote changed.
    fn round(&mut self, round: usize, prices: &Prices<'_>, moved: bool, cancel: &Cancel) -> bool {
        let Self { formulas: Formulas { kept, units, .. }, counts, .. } = self;
        let changed = counts.score(round, units, prices, moved || counts.scores.get(round).is_some_and(Vec::is_empty));
        let scores = counts.scores.get(round).map(Vec::as_slice).unwrap_or_default();
        let mut evidence = counts.evidence.get_mut(round);
        let mut stirred = false;
        let live = kept.iter_mut().flatten().filter(|kept| kept.times > 0 || kept.times_before > 0);
        for kept in live.take_while(|_| !cancel.is_cancelled()) {
            let (times, before) = (kept.times, kept.times_before);
            for (sketch, units, slot) in slots(kept, round) {
                let stale = slot.is_none() || units.iter().any(|unit| changed.get(*unit as usize) == Some(&true));
                let old = slot.clone();
                if times == 0 {
                    // Nobody keeps the reading of what is skipped or gone up to date.
                    *slot = None;
                } else if stale {
                    let own = units.iter().map(|unit| scores.get(*unit as usize).copied().unwrap_or(0));
                    let new = reading::read(sketch, own.collect());
                    if slot.as_deref() != Some(&new) {
                        *slot = Some(Arc::new(new));
                    }
                }
                let same = match (&old, &*slot) {
                    (Some(old), Some(new)) => Arc::ptr_eq(old, new),
                    (None, None) => true,
                    _ => false,
                };
                if same && times == before {
                    continue;
                }
                if let Some(evidence) = evidence.as_mut().map(|evidence| Arc::make_mut(evidence)) {
                    stirred = true;
                    if let Some(old) = old {
                        evidence.take_back(sketch, &old, before);
                    }
                    if let Some(new) = slot {
                        evidence.vote(sketch, new, times);
                    }
                }
            }
        }
        stirred
    }
}

type Slot<'k> = (&'k crate::sketch::Sketch, &'k [u32], &'k mut Option<Arc<Reading>>);

/// The statements of a formula with their readings in a round.
fn slots(kept: &mut Kept, round: usize) -> impl Iterator<Item = Slot<'_>> {
    kept.statements.iter_mut().filter_map(move |statement| {
        let slot = statement.readings.get_mut(round)?;
        Some((&*statement.sketch, &*statement.units, slot))
    })
}

/// The counts of several documents together.
fn total(evidence: &[Arc<Evidence>]) -> Arc<Evidence> {
    if let [own] = evidence {
        return own.clone();
    }
    let mut all = Evidence::default();
    evidence.iter().for_each(|own| all.add(own));
    Arc::new(all)
}
