//! What is gathered while the tree of a statement is walked.

use compact_str::CompactString;

use super::{Sketch, Switch, Unit};

/// Gathers the sketch while the tree is walked.
#[derive(Default)]
pub(super) struct Builder {
    pub sketch: Sketch,
    /// Letters that name one of several things.
    pub named: Vec<CompactString>,
    /// Kernels with letters that count there: the k of `x^{k+1}`.
    pub counters: Vec<(CompactString, CompactString)>,
}

impl Builder {
    /// The number of a unit, new or known.
    pub fn unit(&mut self, unit: Unit) -> u32 {
        let known = self.sketch.units.iter().position(|other| *other == unit);
        let at = known.unwrap_or_else(|| {
            self.sketch.units.push(unit);
            self.sketch.units.len() - 1
        });
        u32::try_from(at).unwrap_or(u32::MAX)
    }

    /// A new switch.
    pub fn switch(&mut self, switch: Switch) -> u32 {
        self.sketch.switches.push(switch);
        u32::try_from(self.sketch.switches.len() - 1).unwrap_or(u32::MAX)
    }
}
