//! What the search for normal forms may cost: a count of elementary steps, never a clock, so that the outcome is
//! the same on every machine.

/// Steps for one statement's normal forms. A product of five Riemann tensors takes some 150 thousand; a bracket
/// over seven labels of a kernel without symmetry, 5040 terms, some 18 million.
pub const NORMAL_FORM_BUDGET: u64 = 20_000_000;

/// The steps that are left. One step is about one look at a pair of slots.
#[derive(Clone, Debug)]
pub struct Budget {
    left: u64,
}

/// Why there is no answer.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Unfinished {
    /// The budget was used up.
    OverBudget,
    /// A coefficient does not fit into a fraction of 128-bit integers.
    CoefficientTooLarge,
}

impl Budget {
    /// A budget of so many steps.
    pub const fn new(steps: u64) -> Self {
        Self { left: steps }
    }

    /// The steps that are left.
    pub const fn left(&self) -> u64 {
        self.left
    }

    /// Takes steps off; once too little is left, nothing is.
    pub(super) fn spend(&mut self, steps: usize) -> Result<(), Unfinished> {
        let left = self.left.checked_sub(steps as u64);
        self.left = left.unwrap_or_default();
        left.map(|_| ()).ok_or(Unfinished::OverBudget)
    }
}

impl Default for Budget {
    fn default() -> Self {
        Self::new(NORMAL_FORM_BUDGET)
    }
}
