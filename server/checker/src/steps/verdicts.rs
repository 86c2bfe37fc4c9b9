//! Verdicts that were reached, so that no claim is judged twice: not in one document, and not again for the next version
//! of a document that somebody is typing.
//!
//! A verdict is a function of its claim and of the limits, and is known by a hash of exactly these, 128 bits of their
//! text. One that ended because time was up, or because nobody waits for it any more, is not kept. What a version of
//! a paper does not ask for is forgotten once it is judged to its end.

use std::cell::Cell;
use std::fmt::{self, Write};
use std::hash::{DefaultHasher, Hasher};
use std::sync::{Arc, Mutex, PoisonError};
use std::time::{Duration, Instant};

use indexwise_algebra::verdict::{self, Claim, Limits, Verdict};
use rustc_hash::FxHashMap;

use crate::paper::Cancel;

/// Time for the steps of one document. Beyond it the rest is undecided, and says so; it is the one thing in a report
/// that a slow machine can change.
const DOCUMENT_TIME: Duration = Duration::from_secs(60);

/// Verdicts, shared by whoever holds a copy of this handle.
#[derive(Clone, Default)]
pub struct Verdicts(Arc<Mutex<Kept>>);

#[derive(Default)]
struct Kept {
    /// Asked for by the version that is judged, and by the one before.
    lately: FxHashMap<u128, Reached>,
    before: FxHashMap<u128, Reached>,
}

#[derive(Clone)]
struct Reached {
    verdict: Verdict,
    /// Multiplications that it took.
    work: u64,
}

/// Judges the claims of one document.
pub(super) struct Court {
    verdicts: Verdicts,
    cancel: Cancel,
    /// When the first claim was judged.
    begun: Cell<Option<Instant>>,
}

impl Court {
    /// For a document.
    pub fn new(verdicts: &Verdicts, cancel: &Cancel) -> Self {
        Self { verdicts: verdicts.clone(), cancel: cancel.clone(), begun: Cell::new(None) }
    }

    /// Whether the time for the document is up, or nobody waits for the answer.
    pub fn is_over(&self) -> bool {
        let begun = self.begun.get().unwrap_or_else(|| {
            let now = Instant::now();
            self.begun.set(Some(now));
            now
        });
        self.cancel.is_cancelled() || begun.elapsed() > DOCUMENT_TIME
    }

    /// The verdict on a claim within limits; what holds by its form is not drawn if `by_form`.
    pub fn judge(&self, claim: &Claim, limits: &Limits<'_>, by_form: bool) -> Verdict {
        let key = key(claim, limits, by_form);
        let known = self.verdicts.recall(key);
        let reached = known.unwrap_or_else(|| {
            let (spent, stop) = (Cell::new(0), || self.is_over());
            let own = Limits { stop: Some(&stop), spent: Some(&spent), ..*limits };
            let by_form = if by_form { verdict::holds_by_form(claim) } else { None };
            let verdict = by_form.unwrap_or_else(|| verdict::judge(claim, &own));
            let reached = Reached { verdict, work: spent.get() };
            if !self.is_over() {
                self.verdicts.keep(key, reached.clone());
            }
            reached
        });
        if let Some(spent) = limits.spent {
            spent.set(spent.get().saturating_add(reached.work));
        }
        reached.verdict
    }
}

impl Verdicts {
    /// Ends with a version of a paper: what it did not ask for is forgotten.
    pub(crate) fn turn(&self) {
        let mut kept = self.0.lock().unwrap_or_else(PoisonError::into_inner);
        kept.before = std::mem::take(&mut kept.lately);
    }

    fn recall(&self, key: u128) -> Option<Reached> {
        let mut kept = self.0.lock().unwrap_or_else(PoisonError::into_inner);
        if let Some(reached) = kept.before.remove(&key) {
            kept.lately.insert(key, reached);
        }
        kept.lately.get(&key).cloned()
    }

    fn keep(&self, key: u128, reached: Reached) {
        self.0.lock().unwrap_or_else(PoisonError::into_inner).lately.insert(key, reached);
    }
}

/// A hash of all that a verdict depends on. The worlds of the algebra hold lists only, so that equal claims have equal
/// texts.
fn key(claim: &Claim, limits: &Limits<'_>, by_form: bool) -> u128 {
    let mut text = Hashed([DefaultHasher::new(), DefaultHasher::new()]);
    text.0[1].write_u8(1);
    let Limits { seed, draws, redraws, step, total, trials, .. } = limits;
    // Writing into a hasher does not fail.
    let _ = write!(text, "{seed} {draws} {redraws} {step} {total} {trials} {by_form} {claim:?}");
    let [one, two] = text.0.map(|hasher| u128::from(hasher.finish()));
    one << 64 | two
}

/// Takes a text without keeping it.
struct Hashed([DefaultHasher; 2]);

impl Write for Hashed {
    fn write_str(&mut self, text: &str) -> fmt::Result {
        self.0.iter_mut().for_each(|hasher| hasher.write(text.as_bytes()));
        Ok(())
    }
}

#[cfg(test)]
mod tests {
    use indexwise_algebra::expression::{Expression, World};
    use indexwise_algebra::rational::Rational;

    use super::*;

    fn claim(left: i64, right: i64) -> Claim {
        let number = |value: i64| Expression::Number(Rational::from_integer(value));
        Claim { left: number(left), right: number(right), world: World { dimensions: vec![2], ..World::default() } }
    }

    fn judged(court: &Court, claim: &Claim, seed: u64) -> (Verdict, u64) {
        let spent = Cell::new(0);
        let verdict = court.judge(claim, &Limits { spent: Some(&spent), ..Limits::seeded(seed) }, false);
        (verdict, spent.get())
    }

    fn count(verdicts: &Verdicts) -> usize {
        verdicts.0.lock().unwrap_or_else(PoisonError::into_inner).lately.len()
    }

    #[test]
    fn what_is_known_is_what_was_reached_with_its_work() {
        let verdicts = Verdicts::default();
        let court = Court::new(&verdicts, &Cancel::default());
        for claim in [claim(2, 2), claim(2, 3)] {
            let first = judged(&court, &claim, 1);
            assert_eq!(judged(&court, &claim, 1), first);
            assert_eq!(matches!(first.0, Verdict::Holds { .. }), claim.left == claim.right);
        }
        assert_eq!(count(&verdicts), 2);
        // Another seed is another question.
        judged(&court, &claim(2, 2), 2);
        assert_eq!(count(&verdicts), 3);
    }

    #[test]
    fn what_nobody_asks_for_is_forgotten() {
        let verdicts = Verdicts::default();
        let court = Court::new(&verdicts, &Cancel::default());
        judged(&court, &claim(2, 2), 1);
        judged(&court, &claim(2, 3), 1);
        verdicts.turn();
        judged(&court, &claim(2, 2), 1);
        verdicts.turn();
        judged(&court, &claim(2, 2), 1);
        verdicts.turn();
        let kept = verdicts.0.lock().unwrap_or_else(PoisonError::into_inner);
        assert_eq!((kept.lately.len(), kept.before.len()), (0, 1));
    }

    #[test]
    fn what_was_cut_short_is_not_kept() {
        let (verdicts, cancel) = (Verdicts::default(), Cancel::default());
        cancel.cancel();
        judged(&Court::new(&verdicts, &cancel), &claim(2, 3), 1);
        assert_eq!(count(&verdicts), 0);
    }
}
