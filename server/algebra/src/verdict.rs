//! Whether two expressions are equal for every choice of the fields in them.
//!
//! Both sides are evaluated at random points: in each dimension that is tried, modulo two primes, twice in each. If
//! all components are equal every time the claim holds, but for a chance of error that is reckoned
//! (`verdict/degree.rs`). If they differ once it does not hold, and a counterexample over the rationals is looked
//! for, simplified and evaluated again (`verdict/witness.rs`). Points where a denominator is 0 or a radicand has no
//! root are drawn again: "holds" means where denominators do not vanish and radicands have the sign that is needed.
//!
//! What is not known about the names of a claim is never counted against it: a claim that does not come out is a
//! failure only if every field in it is known and nothing else is given.

mod compare;
mod degree;
mod form;
mod functions;
mod givens;
mod killing;
mod signature;
mod signs;
mod text;
mod witness;

use std::cell::Cell;

use crate::evaluation::Meter;
use crate::evaluation::needs::{Needs, within_depth};
use crate::expression::{Expression, World};
use crate::rational::Rational;
use crate::trouble::{Budget, Trouble};
use compare::{Compared, Dimension};
use givens::Givens;

pub use form::holds_by_form;
pub use givens::UNKNOWNS_BUDGET;

/// In how many of the dimensions in which a claim fails a counterexample is looked for, the smallest first.
const DIMENSIONS_SEARCHED: usize = 2;

/// Two expressions that are said to be equal, with the same free labels.
#[derive(Clone, Debug, PartialEq)]
pub struct Claim {
    /// The left side.
    pub left: Expression,
    /// The right side.
    pub right: Expression,
    /// What the names stand for.
    pub world: World,
}

/// How much is spent on a verdict.
#[derive(Clone, Copy)]
pub struct Limits<'a> {
    /// From which all draws follow; a hash of the claim's own text, so that a verdict can be had again.
    pub seed: u64,
    /// Draws modulo each prime in each dimension.
    pub draws: usize,
    /// How often a point is drawn again where a denominator is 0 or a root does not exist, for each draw.
    pub redraws: usize,
    /// Multiplications of numbers in one contraction.
    pub step: u64,
    /// Multiplications of numbers for the whole verdict.
    pub total: u64,
    /// Evaluations in the search for a counterexample.
    pub trials: usize,
    /// Asked now and then whether to end early.
    pub stop: Option<&'a dyn Fn() -> bool>,
    /// Where the multiplications that were made are added up, if that is wanted.
    pub spent: Option<&'a Cell<u64>>,
}

impl Limits<'_> {
    /// Adds up what a meter has counted.
    fn note(&self, meter: &Meter) {
        if let Some(spent) = self.spent {
            spent.set(spent.get().saturating_add(self.total.saturating_sub(meter.left())));
        }
    }

    /// The usual limits with a seed.
    pub const fn seeded(seed: u64) -> Self {
        Self {
            seed,
            draws: 2,
            redraws: 64,
            step: 50_000_000,
            total: 1_000_000_000,
            trials: 400,
            stop: None,
            spent: None,
        }
    }
}

/// What has been found about a claim.
#[derive(Clone, Debug, PartialEq)]
pub enum Verdict {
    /// Equal in all components at every point drawn.
    Holds {
        /// The dimensions in which it was tried and is defined; those that no budget lasts for are left out.
        dimensions: Vec<usize>,
        /// The dimensions in which a denominator is 0, or a root does not exist, everywhere.
        undefined: Vec<usize>,
        /// How many points there were in all; 0 for what holds by form.
        draws: usize,
        /// The chance that a wrong claim passes in one of the dimensions is at most `2^-error_bits`.
        error_bits: u32,
    },
    /// Not equal: a proof.
    Fails(Counterexample),
    /// Not equal at a random point, which proves nothing yet.
    Differs {
        /// The dimensions in which it was.
        dimensions: Vec<usize>,
        /// Why it proves nothing.
        reason: Unshown,
    },
    /// Equal in some of the dimensions tried, not in others.
    NeedsDimension {
        /// Where it holds.
        holds: Vec<usize>,
        /// Where it does not.
        fails: Vec<usize>,
        /// Where it is not defined.
        undefined: Vec<usize>,
        /// A proof that it fails, if all is known and there is a simple one.
        counterexample: Option<Counterexample>,
    },
    /// No answer.
    Undecided(Reason),
}

/// Why a difference proves nothing.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Unshown {
    /// The meaning of these fields is not known.
    Unknown(Vec<String>),
    /// It may hold by these givens, which a random point obeys only in part.
    Givens(Vec<String>),
    /// No small rational witness was found.
    NoWitness,
}

/// Why there is no answer.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Reason {
    /// No dimension is to be tried.
    NoDimension,
    /// A denominator is 0, or a root does not exist, at every point drawn, in every dimension.
    Undefined,
    /// A budget.
    Budget(Budget),
    /// Whoever asked wanted no answer any more.
    Stopped,
    /// A function of a sum or a product that has no exact value here.
    Function,
    /// The sides differ, and contain functions between whose values there may be relations that are not known here.
    Functions,
    /// The sides differ where a sum under a root or an absolute value has a sign that it may never have.
    Signs,
    /// Equal at every point drawn, but degrees are so high that this says nothing.
    Uncertain,
    /// The sides, or terms of them, do not fit together.
    Shape,
    /// No point was found that obeys the given of this label: it is of a kind that cannot be imposed, contradicts
    /// another, or leaves nothing but 0.
    GivenUnmet(String),
}

/// A point over the rationals at which the sides differ.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Counterexample {
    /// The dimension.
    pub dimension: usize,
    /// The fields that are not 0, component by component, and the coordinates of the point, if they matter.
    pub assignments: Vec<Assignment>,
    /// The same in full: every component that is not 0, with its Taylor coefficients.
    pub entries: Vec<Entry>,
    /// The variables of the coefficients in their order: coordinates about the point, from `x_1` on, then parameters.
    pub variables: Vec<String>,
    /// Which component differs: the members that the free labels take, zero-based.
    pub component: Vec<(crate::contraction::Label, usize)>,
    /// The order in the small fields of the terms that differ; 0 without such fields.
    pub order: usize,
    /// The left side there.
    pub left: Rational,
    /// The right side there.
    pub right: Rational,
}

/// What a component of a field is.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Assignment {
    /// The field or metric.
    pub name: String,
    /// Its component on its own levels, zero-based.
    pub component: Vec<usize>,
    /// A polynomial in the coordinates about the point, as `1 + 2 x_1 - x_2 x_3`; coordinates count from 1.
    pub value: String,
}

/// A component of a field as numbers.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Entry {
    /// The field or metric, or `x` for the coordinates of the point.
    pub name: String,
    /// The levels of its slots as it is drawn.
    pub levels: Vec<crate::geometry::Level>,
    /// Its component on these levels, zero-based.
    pub component: Vec<usize>,
    /// Coefficients that are not 0, each with the exponents of the variables.
    pub terms: Vec<(Rational, Vec<u8>)>,
}

/// The verdict about a claim. It depends on the claim and the limits alone, unless it is stopped.
pub fn judge(claim: &Claim, limits: &Limits) -> Verdict {
    let meter = Meter::new(limits.step, limits.total, limits.stop);
    let judged = judged(claim, &meter, limits);
    limits.note(&meter);
    match judged {
        Ok(verdict) => verdict,
        Err(reason) => Verdict::Undecided(reason),
    }
}

fn judged(claim: &Claim, meter: &Meter, limits: &Limits) -> Result<Verdict, Reason> {
    let Claim { left, right, world } = claim;
    [left, right].into_iter().try_for_each(within_depth)?;
    let needs = Needs::of([(left, 0), (right, 0)], world)?;
    let found = Found::over(claim, &needs, &Givens::default(), meter, limits)?;
    let settled = found.fails.is_empty() && found.undefined.is_empty();
    if settled || world.givens.is_empty() {
        return found.verdict(&needs, claim, limits);
    }
    // What holds without its givens holds with them; only else are they looked at.
    let (givens, needs) = Givens::new(claim)?;
    let found = Found::over(claim, &needs, &givens, meter, limits)?;
    if found.holds.is_empty()
        && found.fails.is_empty()
        && let Some(label) = givens.unmet.take()
    {
        return Err(Reason::GivenUnmet(label));
    }
    found.verdict(&needs, claim, limits)
}

/// The dimensions to be tried, ascending, each once.
fn dimensions(world: &World) -> Vec<usize> {
    let mut dimensions = world.dimensions.clone();
    dimensions.sort_unstable();
    dimensions.dedup();
    dimensions
}

/// What the dimensions have given.
struct Found {
    holds: Vec<usize>,
    fails: Vec<usize>,
    undefined: Vec<usize>,
    draws: usize,
    error_bits: u32,
}

impl Default for Found {
    fn default() -> Self {
        Self { holds: Vec::new(), fails: Vec::new(), undefined: Vec::new(), draws: 0, error_bits: u32::MAX }
    }
}

impl Found {
    /// What all dimensions give, under some givens.
    fn over(claim: &Claim, needs: &Needs, givens: &Givens, meter: &Meter, limits: &Limits) -> Result<Self, Reason> {
        let mut found = Self::default();
        for dimension in dimensions(&claim.world) {
            let compared = match Dimension::new(claim, needs, dimension, meter, limits, givens).compared() {
                // Higher dimensions are larger still; the lower ones stand.
                Err(Reason::Budget(_)) if !found.holds.is_empty() || !found.fails.is_empty() => break,
                other => other?,
            };
            match compared {
                Compared::Equal { error_bits: 0, .. } => return Err(Reason::Uncertain),
                Compared::Equal { draws, error_bits } => {
                    found.holds.push(dimension);
                    found.draws += draws;
                    found.error_bits = found.error_bits.min(error_bits);
                }
                Compared::Unequal => found.fails.push(dimension),
                Compared::Undefined => found.undefined.push(dimension),
            }
        }
        Ok(found)
    }

    fn verdict(self, needs: &Needs, claim: &Claim, limits: &Limits) -> Result<Verdict, Reason> {
        let Self { holds, fails, undefined, draws, error_bits } = self;
        if fails.is_empty() {
            return match (holds.is_empty(), undefined.is_empty()) {
                (true, true) => Err(Reason::NoDimension),
                (true, false) => Err(Reason::Undefined),
                _ => Ok(Verdict::Holds { dimensions: holds, undefined, draws, error_bits }),
            };
        }
        let shown = shown(&fails, needs, claim, limits)?;
        if !holds.is_empty() {
            return Ok(Verdict::NeedsDimension { holds, fails, undefined, counterexample: shown.ok() });
        }
        Ok(match shown {
            Ok(counterexample) => Verdict::Fails(counterexample),
            Err(reason) => Verdict::Differs { dimensions: fails, reason },
        })
    }
}

/// A proof that a claim fails in one of these dimensions, or why there is none.
fn shown(
    fails: &[usize],
    needs: &Needs,
    claim: &Claim,
    limits: &Limits,
) -> Result<Result<Counterexample, Unshown>, Reason> {
    let fields = claim.world.fields.iter().zip(&needs.fields);
    let unknown = fields.filter(|(field, need)| need.is_some() && !field.known).map(|(field, _)| field.name.clone());
    let mut unknown: Vec<String> = unknown.collect();
    unknown.sort_unstable();
    unknown.dedup();
    if !unknown.is_empty() {
        return Ok(Err(Unshown::Unknown(unknown)));
    }
    if !claim.world.givens.is_empty() {
        let givens = claim.world.givens.iter().map(|given| given.label.clone()).collect();
        return Ok(Err(Unshown::Givens(givens)));
    }
    let meter = Meter::new(limits.step, limits.total, limits.stop);
    let none = Givens::default();
    let search = |dimension: &usize| witness::witness(&Dimension::new(claim, needs, *dimension, &meter, limits, &none));
    let witness = fails.iter().take(DIMENSIONS_SEARCHED).find_map(search);
    limits.note(&meter);
    match witness {
        Some(counterexample) => Ok(Ok(counterexample)),
        None if functions::used(claim, needs).related => Err(Reason::Functions),
        None if signs::Signs::of(claim, needs).bits.is_some() => Err(Reason::Signs),
        None => Ok(Err(Unshown::NoWitness)),
    }
}

impl From<Trouble> for Reason {
    fn from(trouble: Trouble) -> Self {
        match trouble {
            Trouble::Budget(budget) => Self::Budget(budget),
            Trouble::Stopped => Self::Stopped,
            Trouble::Function => Self::Function,
            Trouble::ZeroDivisor | Trouble::NoRoot | Trouble::Dimension | Trouble::Overflow => Self::Undefined,
            Trouble::Order | Trouble::Shape => Self::Shape,
        }
    }
}

#[cfg(test)]
mod tests;
