//! What a verdict rests on because nobody declares it: which metric is meant, its signature, the signs of the curvature,
//! what an epsilon is. Only what stands in the step counts, definitions followed.

use compact_str::CompactString;
use indexwise_algebra::expression::{Curvature, Expression, MetricValues, World};
use indexwise_algebra::geometry::Level;

use crate::ledger::shown;

use super::world::Surroundings;

/// Parts of a step that are looked at.
const PARTS: usize = 10_000;

/// The parts of a step that defaults are about.
#[derive(Default)]
struct Uses {
    /// Metrics in use, by their numbers.
    metrics: Vec<usize>,
    riemann: bool,
    ricci: bool,
    /// The slots of an epsilon tensor and of an epsilon symbol.
    tensor: Option<usize>,
    symbol: Option<usize>,
    /// The determinant of a metric, or its sign, matters.
    sign: bool,
}

impl Uses {
    fn of(sides: [&Expression; 2], world: &World) -> Self {
        let mut uses = Self::default();
        let mut pending = sides.to_vec();
        let mut seen = vec![false; world.definitions.len()];
        for _ in 0..PARTS {
            let Some(part) = pending.pop() else { break };
            uses.take(part, world);
            if let Expression::Defined { definition, .. } = part
                && let (Some(definition), Some(seen)) = (world.definitions.get(*definition), seen.get_mut(*definition))
                && !std::mem::replace(seen, true)
            {
                pending.push(&definition.body);
            }
            pending.extend(part.parts());
        }
        uses.metrics.sort_unstable();
        uses.metrics.dedup();
        uses
    }

    fn take(&mut self, part: &Expression, world: &World) {
        match part {
            Expression::Metric { metric, .. }
            | Expression::Christoffel { metric, .. }
            | Expression::Covariant { metric, .. } => self.metrics.push(*metric),
            Expression::Determinant(metric) => {
                self.metrics.push(*metric);
                self.sign = true;
            }
            Expression::Curvature { metric, kind, .. } => {
                self.metrics.push(*metric);
                self.riemann = true;
                self.ricci |= !matches!(kind, Curvature::Riemann | Curvature::Weyl);
            }
            Expression::Epsilon { metric: Some(metric), slots } => {
                self.metrics.push(*metric);
                self.tensor = Some(slots.len());
                self.sign = true;
            }
            Expression::Epsilon { metric: None, slots } => self.symbol = Some(slots.len()),
            Expression::Field { field, slots } => {
                let own = world.fields.get(*field).map(|field| field.slots.as_slice()).unwrap_or_default();
                let moved = slots.iter().zip(own).filter(|(index, (_, level))| index.level != *level);
                let families = moved.filter(|(index, _)| index.level != Level::Inert).map(|(index, _)| index.family);
                self.metrics.extend(families.filter_map(|family| world.families.get(family)?.metric));
            }
            _ => {}
        }
    }
}

impl Surroundings<'_> {
    /// What two sides rest on that nobody declares, as sentences without a full stop.
    pub fn defaults(&self, sides: [&Expression; 2]) -> Vec<String> {
        let uses = Uses::of(sides, &self.world);
        let mut found = Vec::new();
        for number in &uses.metrics {
            let Some(metric) = self.world.metrics.get(*number) else { continue };
            let name = CompactString::new(&metric.name);
            if self.meanings.known(&name, 2).is_none_or(|known| known.role.is_none()) {
                let kind = if metric.values == MetricValues::Flat { ", constant" } else { "" };
                found.push(format!("{} is the metric{kind}", shown(&name)));
            }
            if uses.sign && self.open_signatures.contains(number) {
                let signs = if metric.minus == 0 { "no negative sign" } else { "one negative sign" };
                found.push(format!("{} has {signs}", shown(&name)));
            }
        }
        if uses.riemann && !self.signs_are_declared {
            found.push("R^i_{jkl} = \u{2202}_k \u{393}^i_{jl} - \u{2202}_l \u{393}^i_{jk} + \u{2026}".to_owned());
        }
        if uses.ricci && !self.signs_are_declared {
            found.push("R_{jl} = R^i_{jil}".to_owned());
        }
        let numbered = |slots: usize| (1..=slots).map(|slot| slot.to_string()).collect::<String>();
        if let Some(slots) = uses.tensor.filter(|_| !self.signs_are_declared) {
            found.push(format!("\u{3b5}_{{{}}} = \u{221a}|g|", numbered(slots)));
        }
        found.extend(uses.symbol.map(|slots| format!("\u{3b5}_{{{}}} = 1", numbered(slots))));
        found
    }
}
