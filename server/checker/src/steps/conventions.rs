//! Definitions among the conventions, and which signs of the curvature and of the epsilon tensor they choose.
//!
//! `R^i{}_{jkl} := ..` is compared with the curvature tensor in either sign: if it is one of them, all that follows
//! from the curvature tensor takes that sign too; and so is `\epsilon_{ijk} := ..` with the epsilon tensor. Else it is a definition as any other, and what is built in knows
//! nothing of it. The same is asked the other way round of a step that fails: whether it holds with other signs.

use compact_str::CompactString;
use indexwise_algebra::expression::{Curvature, Expression, World};
use indexwise_algebra::geometry::Signs;
use indexwise_algebra::verdict::{self, Claim, Limits, Verdict};
use indexwise_grammar::tree::Statement;

use crate::terms::Eyes;

use super::claims::{Asked, lone_factor, pair, steps_of};
use super::lowering::{Lowering, Way};
use super::world::Surroundings;

/// Multiplications for the comparison of a definition with a curvature.
const WORK: u64 = 30_000_000;
/// The dimension of the comparison: the smallest in which no sign is lost.
const DIMENSION: usize = 3;

/// Takes a definition of the conventions.
///
/// # Errors
/// The name, if it is defined by itself.
pub(super) fn take(
    statement: &Statement,
    eyes: &Eyes<'_>,
    surroundings: &mut Surroundings<'_>,
) -> Result<(), CompactString> {
    if let Some(signs) = signs_of(statement, eyes, surroundings) {
        surroundings.world.signs = signs;
        surroundings.signs_are_declared = true;
        return Ok(());
    }
    let before = surroundings.world.definitions.len();
    steps_of(statement, eyes, surroundings, Asked::Nothing);
    let is_new = surroundings.world.definitions.len() > before;
    let Some((name, slots)) = surroundings
        .world
        .definitions
        .last()
        .filter(|_| is_new)
        .map(|definition| (CompactString::new(&definition.name), definition.free.len()))
    else {
        return Ok(());
    };
    if is_cyclic(&surroundings.world, &name, slots) {
        surroundings.forget_last_definition(&name, slots);
        return Err(name);
    }
    Ok(())
}

/// Whether the last definition comes back to its own name through those before it.
fn is_cyclic(world: &World, name: &str, slots: usize) -> bool {
    let mut pending: Vec<&Expression> = world.definitions.last().map(|last| &last.body).into_iter().collect();
    let mut seen = vec![false; world.definitions.len()];
    while let Some(part) = pending.pop() {
        match part {
            Expression::Field { field, slots: own }
                if own.len() == slots && world.fields.get(*field).is_some_and(|field| field.name == name) =>
            {
                return true;
            }
            Expression::Defined { definition, .. } => {
                if let (Some(definition), Some(seen)) = (world.definitions.get(*definition), seen.get_mut(*definition))
                    && !std::mem::replace(seen, true)
                {
                    pending.push(&definition.body);
                }
            }
            _ => {}
        }
        pending.extend(part.parts());
    }
    false
}

/// The signs that a definition of the curvature, of the Ricci tensor or of the epsilon tensor chooses, if it is one.
fn signs_of(statement: &Statement, eyes: &Eyes<'_>, surroundings: &Surroundings<'_>) -> Option<Signs> {
    let [left, right] = statement.sides.as_slice() else { return None };
    lone_factor(left)?;
    // What is registered on the way must not stay: the definition may be one of a metric.
    let mut trial = surroundings.clone();
    let (new, body) = pair(&mut Lowering::new(&mut trial, eyes, Way::Near), left, right).ok()?;
    let now = trial.world.signs;
    let (other, dimension) = match &new {
        Expression::Curvature { kind: Curvature::Riemann, .. } => {
            (Signs { riemann_reversed: !now.riemann_reversed, ..now }, DIMENSION)
        }
        Expression::Curvature { kind: Curvature::Ricci, .. } => {
            (Signs { ricci_reversed: !now.ricci_reversed, ..now }, DIMENSION)
        }
        Expression::Epsilon { metric: Some(_), slots } => {
            (Signs { epsilon_reversed: !now.epsilon_reversed, ..now }, slots.len())
        }
        _ => return None,
    };
    let fits = |signs: &Signs| {
        let world = World { signs: *signs, dimensions: vec![dimension], givens: Vec::new(), ..trial.world.clone() };
        let claim = Claim { left: new.clone(), right: body.clone(), world };
        let limits = Limits { total: WORK, trials: 0, ..Limits::seeded(1) };
        matches!(verdict::judge(&claim, &limits), Verdict::Holds { .. })
    };
    [now, other].into_iter().find(fits)
}

/// What the conventions of geometry are asked of in two sides, definitions followed.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub(super) struct Geometric {
    /// Curvature stands there.
    pub curvature: bool,
    /// The slots of an epsilon tensor that stands there.
    pub epsilon: Option<usize>,
    /// The determinant of a metric stands there, or a tensor that its sign turns.
    pub sign: bool,
}

impl Geometric {
    /// Of two sides.
    pub fn of(world: &World, sides: [&Expression; 2]) -> Self {
        let mut found = Self::default();
        let mut pending = sides.to_vec();
        let mut seen = vec![false; world.definitions.len()];
        while let Some(part) = pending.pop() {
            match part {
                Expression::Curvature { .. } => found.curvature = true,
                Expression::Epsilon { metric: Some(_), slots } => {
                    found.epsilon = Some(slots.len());
                    found.sign = true;
                }
                Expression::Determinant(_) => found.sign = true,
                Expression::Defined { definition, .. } => {
                    if let (Some(definition), Some(seen)) =
                        (world.definitions.get(*definition), seen.get_mut(*definition))
                        && !std::mem::replace(seen, true)
                    {
                        pending.push(&definition.body);
                    }
                }
                _ => {}
            }
            pending.extend(part.parts());
        }
        found
    }
}

/// The other usual signs of what stands in a step: which they are, and how each is declared.
pub(super) fn other_signs(now: Signs, of: Geometric) -> Vec<(Signs, String)> {
    let mut found = Vec::new();
    if of.curvature {
        let riemann = Signs { riemann_reversed: !now.riemann_reversed, ..now };
        let ricci = Signs { ricci_reversed: !now.ricci_reversed, ..now };
        let both = Signs { ricci_reversed: !now.ricci_reversed, ..riemann };
        let said = |reversed: bool, one: &str, other: &str| if reversed { one.to_owned() } else { other.to_owned() };
        found.push((riemann, said(riemann.riemann_reversed, RIEMANN_REVERSED, RIEMANN)));
        found.push((ricci, said(ricci.ricci_reversed, RICCI_REVERSED, RICCI)));
        found.push((both, BOTH.to_owned()));
    }
    if let Some(slots) = of.epsilon {
        let letters: String = ('i'..='z').take(slots).collect();
        let sign = if now.epsilon_reversed { "" } else { "-" };
        let declared = format!(
            "of the epsilon tensor, declared by \\epsilon_{{{letters}}} := {sign}\\sqrt{{|g|}} \\varepsilon_{{{letters}}} \
             with the symbol \\varepsilon"
        );
        found.push((Signs { epsilon_reversed: !now.epsilon_reversed, ..now }, declared));
    }
    found
}

/// Two sides with the epsilon tensor for the symbol or the other way round, and how that is said; nothing if there is
/// none at the top of a product or under a derivative.
pub(super) fn exchanged(left: &Expression, right: &Expression) -> Option<(Expression, Expression, String)> {
    let mut said = None;
    let (mut one, mut two) = (left.clone(), right.clone());
    let mut pending = vec![&mut one, &mut two];
    while let Some(part) = pending.pop() {
        if let Expression::Epsilon { metric: metric @ Some(_), .. } = part {
            *metric = None;
            said = Some("epsilon as a symbol, declared by \\epsilon is a symbol".to_owned());
        }
        pending.extend(part.parts_mut());
    }
    said.map(|said| (one, two, said))
}

const BOTH: &str = "of the curvature tensor and of the Ricci tensor, each declared by its definition";
const RIEMANN: &str = "of the curvature tensor, declared by R^i{}_{jkl} := \\partial_k \\Gamma^i_{jl} - \\partial_l \
                       \\Gamma^i_{jk} + \\Gamma^i_{km} \\Gamma^m_{jl} - \\Gamma^i_{lm} \\Gamma^m_{jk}";
const RIEMANN_REVERSED: &str = "of the curvature tensor, declared by R^i{}_{jkl} := \\partial_l \\Gamma^i_{jk} - \
                                \\partial_k \\Gamma^i_{jl} + \\Gamma^i_{lm} \\Gamma^m_{jk} - \\Gamma^i_{km} \
                                \\Gamma^m_{jl}";
const RICCI: &str = "of the Ricci tensor, declared by R_{jl} := R^i{}_{jil}";
const RICCI_REVERSED: &str = "of the Ricci tensor, declared by R_{jl} := R^i{}_{jli}";
