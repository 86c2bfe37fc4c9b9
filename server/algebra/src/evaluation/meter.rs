//! How much an evaluation may cost: multiplications are counted before they are made, so that what is too large
//! ends with a reason and the same one on every machine. Whoever asked may also want no answer any more.

use std::cell::Cell;

use crate::trouble::{Budget, Outcome, Trouble};

/// What is left to spend.
pub struct Meter<'a> {
    step: u64,
    left: Cell<u64>,
    stop: Option<&'a dyn Fn() -> bool>,
}

impl<'a> Meter<'a> {
    /// So many multiplications of numbers for one contraction, and for all together; `stop` is asked now and then
    /// whether to end early.
    pub const fn new(step: u64, total: u64, stop: Option<&'a dyn Fn() -> bool>) -> Self {
        Self { step, left: Cell::new(total), stop }
    }

    /// Pays for multiplications that are about to be made. A budget if there is not enough left, `Stopped` if
    /// nobody wants them.
    pub fn spend(&self, multiplications: u64) -> Outcome<()> {
        if multiplications > self.step {
            return Err(Trouble::Budget(Budget::Multiplications));
        }
        let left = self.left.get().checked_sub(multiplications).ok_or(Trouble::Budget(Budget::Total))?;
        self.left.set(left);
        if self.stop.is_some_and(|stop| stop()) { Err(Trouble::Stopped) } else { Ok(()) }
    }

    /// How many multiplications are left.
    pub const fn left(&self) -> u64 {
        self.left.get()
    }

    /// The most of one contraction.
    pub(crate) const fn step(&self) -> u64 {
        self.step
    }
}
