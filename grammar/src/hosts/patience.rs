//! How much a host looks ahead in vain before it stops trying, so that a scan stays linear in the text.

use super::body::Outcome;

/// Things that look ahead and may fail so many times in a text.
const FAILURES: u32 = 10_000;

/// What has failed so far.
#[derive(Default)]
pub(super) struct Patience {
    /// Up to here a search that honours `\text{..}` has failed once.
    lost_until: usize,
    failures: u32,
}

impl Patience {
    /// The end of the formula that opens at `start`: `search` honours `\text{..}` if it is given true. Where that
    /// fails, it looks once more with false, and no formula before the place it reached tries the first again.
    pub(super) fn find_end(&mut self, start: usize, mut search: impl FnMut(bool) -> Outcome) -> Outcome {
        if start < self.lost_until {
            return search(false);
        }
        match search(true) {
            Outcome::Lost(place) => {
                self.lost_until = place;
                search(false)
            }
            found => found,
        }
    }

    /// What was looked at up to a place was no formula.
    pub(super) fn lose(&mut self, until: usize) {
        self.lost_until = self.lost_until.max(until);
    }

    /// Whether too much has failed.
    pub(super) fn is_spent(&self) -> bool {
        self.failures >= FAILURES
    }

    /// Counts what was found, or not.
    pub(super) fn count<T>(&mut self, found: Option<T>) -> Option<T> {
        self.failures += u32::from(found.is_none());
        found
    }
}
