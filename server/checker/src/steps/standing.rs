//! What a difference between two sides stands on: whether it shows a mistake, or that the text says more than it.
//!
//! Equal for arbitrary fields is what a step claims. A law, a gauge or a normalisation is written the same way and is
//! false for arbitrary fields, as it has to be. Some signs tell them apart, and each of them turns an error into a
//! hint: a field that stands on one side only; a condition that the text states about a field; a relation that opens
//! its statement, which may be a law, unless it has no fields and derives geometry from geometry, or is an identity
//! where the metric is constant (`report.rs` asks the algebra for that); words around it that say where it holds
//! (`words.rs`). Givens the algebra knows of. Trap: a side that is multiplied by zero still counts its fields.

use compact_str::CompactString;
use indexwise_algebra::expression::{Expression, World};
use indexwise_grammar::tree::{Atom, Factor, Statement, Sum};
use rustc_hash::FxHashSet;

use crate::terms::Eyes;
use crate::terms::uses::{Use, use_of};

use super::claims::{Asked, is_zero};

/// Parts of a side that are looked at.
const PARTS: usize = 10_000;

/// What a side is made of, definitions included.
#[derive(Clone, Debug, Default)]
struct Content {
    /// Names of fields, in the order in which they stand.
    fields: Vec<String>,
    /// Names of fields, metrics and definitions.
    names: FxHashSet<String>,
    metric: bool,
    derived: bool,
}

impl Content {
    fn of(side: &Expression, world: &World) -> Self {
        let mut content = Self::default();
        let mut pending = vec![side];
        for _ in 0..PARTS {
            let Some(part) = pending.pop() else { break };
            content.take(part, world);
            if let Expression::Defined { definition, .. } = part
                && let Some(definition) = world.definitions.get(*definition)
            {
                pending.push(&definition.body);
            }
            pending.extend(part.parts());
        }
        content
    }

    fn take(&mut self, part: &Expression, world: &World) {
        match part {
            Expression::Field { field, .. } => {
                let Some(field) = world.fields.get(*field) else { return };
                if self.names.insert(field.name.clone()) {
                    self.fields.push(field.name.clone());
                }
            }
            Expression::Defined { definition, .. } => {
                self.names.extend(world.definitions.get(*definition).map(|definition| definition.name.clone()));
            }
            Expression::Metric { metric, .. } | Expression::Determinant(metric) => self.metric(*metric, world),
            Expression::Epsilon { metric: Some(metric), .. } => self.metric(*metric, world),
            Expression::Christoffel { metric, .. } => {
                self.metric(*metric, world);
                self.derived = true;
            }
            Expression::Curvature { metric, .. } => self.metric(*metric, world),
            Expression::Partial(..) | Expression::Covariant { .. } => self.derived = true,
            _ => {}
        }
    }

    fn metric(&mut self, metric: usize, world: &World) {
        self.metric = true;
        self.names.extend(world.metrics.get(metric).map(|metric| metric.name.clone()));
    }
}

/// Why a difference between two sides shows no mistake.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) struct Doubt {
    /// In words that a list of names goes on with.
    pub why: &'static str,
    /// The names.
    pub names: Vec<String>,
    /// Whether the relation opens its statement and nothing else is against it: an identity is no law.
    pub may_be_law: bool,
    /// Whether derivatives stand in the step: a law for a field, not an identity of algebra.
    pub derived: bool,
}

/// Why a difference between two sides shows no mistake; nothing if it does.
pub(super) fn doubt(
    sides: (&Expression, &Expression),
    world: &World,
    conditioned: &FxHashSet<CompactString>,
    opens: bool,
    asked: Asked,
) -> Option<Doubt> {
    let (left, right) = (Content::of(sides.0, world), Content::of(sides.1, world));
    let derived = left.derived || right.derived;
    let doubt = |why, names| Some(Doubt { why, names, may_be_law: false, derived });
    let held: Vec<String> =
        left.fields.iter().chain(&right.fields).filter(|name| conditioned.contains(name.as_str())).cloned().collect();
    let held = once_each(held);
    if !held.is_empty() {
        return doubt("the text states a condition on", held);
    }
    if asked == Asked::All {
        return None;
    }
    let lonely = |one: &Content, other: &Content| {
        one.fields.iter().filter(|name| !other.names.contains(*name)).cloned().collect::<Vec<_>>()
    };
    let lone = once_each([lonely(&left, &right), lonely(&right, &left)].concat());
    if !lone.is_empty() {
        return doubt("no definition links the sides by", lone);
    }
    let fieldless = left.fields.is_empty() && right.fields.is_empty();
    let derives = derived || !left.metric && !right.metric;
    if opens && !(fieldless && derives) {
        let named = once_each([left.fields, right.fields].concat());
        return Some(Doubt { why: "it may be a law for", names: named, may_be_law: true, derived });
    }
    None
}

fn once_each(names: Vec<String>) -> Vec<String> {
    let mut seen = FxHashSet::default();
    names.into_iter().filter(|name| seen.insert(name.clone())).collect()
}

/// The kernels that a statement puts under a condition: those of its relations with a side that is 0.
pub(super) fn conditioned(statement: &Statement, eyes: &Eyes<'_>) -> Vec<CompactString> {
    let zero = |at: usize| statement.sides.get(at).is_some_and(is_zero);
    let held = statement.sides.iter().enumerate().filter(|(at, _)| zero(at + 1) || *at > 0 && zero(at - 1));
    held.flat_map(|(_, side)| kernels(side, eyes)).collect()
}

/// The kernels of a side.
pub(super) fn kernels(side: &Sum, eyes: &Eyes<'_>) -> Vec<CompactString> {
    uses(side, eyes).into_iter().map(|made| made.kernel).collect()
}

/// The letters in the slots of a side.
pub(super) fn slot_letters(side: &Sum, eyes: &Eyes<'_>) -> Vec<CompactString> {
    uses(side, eyes).iter().flat_map(|made| &made.slots).filter_map(|slot| slot.letter().cloned()).collect()
}

/// The kernels of a side with their slots.
fn uses(side: &Sum, eyes: &Eyes<'_>) -> Vec<Use> {
    let mut out = Vec::new();
    let mut pending = vec![side];
    for _ in 0..PARTS {
        let Some(sum) = pending.pop() else { break };
        for factor in sum.terms.iter().flat_map(|term| &term.factors) {
            if let Atom::Kernel(kernel) = &factor.atom {
                out.push(use_of(factor, kernel, eyes, false));
            }
            pending.extend(inside(factor));
        }
    }
    out
}

/// The sums that a factor holds.
fn inside(factor: &Factor) -> Vec<&Sum> {
    match &factor.atom {
        Atom::Fraction(fraction) => vec![&fraction.over, &fraction.under],
        Atom::Group(group) => group.parts.iter().flat_map(|part| &part.sides).collect(),
        Atom::Root(root) => vec![&root.body],
        Atom::Wrapped(sum) | Atom::Labelled(sum) => vec![sum],
        _ => Vec::new(),
    }
}
