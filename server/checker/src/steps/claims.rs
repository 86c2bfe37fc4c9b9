//! Which relations of a statement claim something, which define, and what each claim is in the algebra's terms.
//!
//! A relation of a chain after the first is a claim; the first one too, unless its left side is a kernel standing
//! alone that this relation may define: one that is neither defined before nor known by declaration or custom. `:=`
//! always defines. A side that is 0 makes a condition, unless the formula itself is to be checked. Definitions are
//! taken in the order of the text, so that a claim sees those before it.

use compact_str::CompactString;
use indexwise_algebra::expression::Expression;
use indexwise_algebra::rational::Rational;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{Atom, Claim, Factor, Statement, Sum};

use crate::terms::{Eyes, plain_number};

use super::lowering::{Lowering, Way};
use super::world::Surroundings;

/// What is asked of a statement.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Asked {
    /// Only its definitions are taken.
    Nothing,
    /// Every claim of a chain, as in every note; what is not shown is counted and not told.
    Quietly,
    /// Every claim of a chain.
    Chains,
    /// Every relation: the author asks for this formula.
    All,
}

/// A claim of a statement.
#[derive(Clone, Debug)]
pub struct Step {
    /// The number of its relation.
    pub relation: usize,
    /// The relation sign.
    pub sign: Span,
    /// The sides that it joins.
    pub sides: (Span, Span),
    /// What it claims to be equal, in each way in which it may be read; or why that is not known.
    pub claims: Result<Vec<(Expression, Expression)>, String>,
    /// The ways of reading after the first, in the same order.
    pub others: Vec<Way>,
    /// The letters of the labels.
    pub letters: Vec<CompactString>,
    /// How many indices are antisymmetrised at once, at most.
    pub antisymmetrised: usize,
    /// From which order on terms in small fields are left out, where a side says so.
    pub neglected: Option<usize>,
}

/// The claims of a statement; its definitions go into the surroundings.
pub fn steps_of(
    statement: &Statement,
    eyes: &Eyes<'_>,
    surroundings: &mut Surroundings<'_>,
    asked: Asked,
) -> Vec<Step> {
    let mut steps = Vec::new();
    for (number, relation) in statement.relations.iter().enumerate() {
        let (Some(left), Some(right)) = (statement.sides.get(number), statement.sides.get(number + 1)) else {
            continue;
        };
        let defines = match relation.claim() {
            Claim::Definition => define(left, right, eyes, surroundings, true),
            Claim::DefinitionOfRight => define(right, left, eyes, surroundings, true),
            Claim::Equality if number == 0 => {
                let sets = asked != Asked::All && sets_a_value(left, right);
                define(left, right, eyes, surroundings, sets)
            }
            Claim::Equality => false,
            Claim::Other => true,
        };
        let condition = (is_zero(left) || is_zero(right)) && asked != Asked::All;
        if relation.claim() == Claim::Other {
            loosen(statement, eyes, surroundings);
        }
        if defines || condition || asked == Asked::Nothing {
            continue;
        }
        let mut step = Step {
            relation: number,
            sign: relation.span,
            sides: (left.span, right.span),
            claims: Ok(Vec::new()),
            others: Vec::new(),
            letters: Vec::new(),
            antisymmetrised: 0,
            neglected: None,
        };
        lower(&mut step, left, right, eyes, surroundings);
        steps.push(step);
        if number == 0 {
            define_again(left, right, eyes, surroundings);
        }
    }
    steps
}

/// `k = -1`: a letter is set to a number, perhaps again; nobody claims that the numbers are equal.
fn sets_a_value(left: &Sum, right: &Sum) -> bool {
    let letter = |factor: &Factor| matches!(factor.atom, Atom::Kernel(_)) && factor.scripts.is_empty();
    lone_factor(left).is_some_and(letter) && plain_number(right).is_some()
}

/// What stands alone on the left of a statement that goes on with an approximation has no exact definition.
fn loosen(statement: &Statement, eyes: &Eyes<'_>, surroundings: &mut Surroundings<'_>) {
    let Some(factor) = statement.sides.first().and_then(lone_factor) else { return };
    if let Some((kernel, slots)) = Lowering::new(surroundings, eyes, Way::Near).lone_kernel(factor) {
        surroundings.forget(&kernel, slots.len());
    }
}

/// A letter that is set again means the later thing from there on; with its indices on other levels it is not set but
/// raised or lowered.
fn define_again(left: &Sum, right: &Sum, eyes: &Eyes<'_>, surroundings: &mut Surroundings<'_>) {
    let lone = lone_factor(left).and_then(|factor| Lowering::new(surroundings, eyes, Way::Near).lone_kernel(factor));
    let Some((kernel, slots)) = lone else { return };
    let Some(known) = surroundings.definition(&kernel, slots.len()) else { return };
    let free = surroundings.world.definitions.get(known).map(|known| known.free.as_slice()).unwrap_or_default();
    if free.iter().zip(&slots).all(|(one, other)| one.level == other.level) {
        define(left, right, eyes, surroundings, true);
    }
}

/// Every equality of a statement, with derivatives that reach the next factor; those that cannot be lowered are left out.
pub fn relations_of(
    statement: &Statement,
    eyes: &Eyes<'_>,
    surroundings: &mut Surroundings<'_>,
) -> Vec<(Expression, Expression)> {
    let mut out = Vec::new();
    for (number, relation) in statement.relations.iter().enumerate() {
        let (Some(left), Some(right)) = (statement.sides.get(number), statement.sides.get(number + 1)) else {
            continue;
        };
        if relation.claim() == Claim::Equality {
            out.extend(pair(&mut Lowering::new(surroundings, eyes, Way::Near), left, right));
        }
    }
    out
}

/// Both sides, in each way in which they can be read.
fn lower(step: &mut Step, left: &Sum, right: &Sum, eyes: &Eyes<'_>, surroundings: &mut Surroundings<'_>) {
    let readings = readings(left, right, eyes, surroundings);
    step.letters = readings.letters;
    step.antisymmetrised = readings.antisymmetrised;
    step.neglected = readings.neglected;
    step.others = readings.others;
    step.claims = readings.claims;
}

/// To first order it does not matter whether indices are moved by a metric or by what it differs little from.
const FIRST_NEGLECTED: usize = 2;

/// Two sides in each way in which they can be read.
#[derive(Debug)]
pub(super) struct Readings {
    /// The sides in the likeliest way and in the others, or why there is none.
    pub claims: Result<Vec<(Expression, Expression)>, String>,
    /// The other ways, in the order of the claims after the first.
    pub others: Vec<Way>,
    /// The letters of the labels.
    pub letters: Vec<CompactString>,
    /// How many indices are antisymmetrised at once, at most.
    pub antisymmetrised: usize,
    /// From which order on terms in small fields are left out.
    pub neglected: Option<usize>,
}

/// Two sides with derivatives and functions of matrices that reach the next factor, and in the other ways where they
/// matter. How far a function reaches is often plain from what the sides are: what gives a matrix on one of them alone
/// is no reading, and then another takes its place. With all other ways a refusal is one.
pub(super) fn readings(left: &Sum, right: &Sum, eyes: &Eyes<'_>, surroundings: &mut Surroundings<'_>) -> Readings {
    let mut near = Lowering::new(surroundings, eyes, Way::Near);
    let first = pair(&mut near, left, right);
    let (mut ways, moved) = (near.others.clone(), near.moved_among_metrics);
    let (letters, antisymmetrised) = (near.letters().to_vec(), near.antisymmetrised);
    // What a definition has left out is missing in what follows from it.
    let neglected = least(near.neglected, surroundings.neglected);
    let functions = ways.contains(&Way::Wide);
    if functions && ways.contains(&Way::Far) {
        ways.push(Way::FarAndWide);
    }
    let mut readings = Readings { claims: Ok(Vec::new()), others: Vec::new(), letters, antisymmetrised, neglected };
    if moved && neglected.is_some_and(|order| order > FIRST_NEGLECTED) {
        readings.claims = Err("indices are moved, but to this order it matters by which metric".to_owned());
        return readings;
    }
    let mut read = Vec::new();
    let mut refused = None;
    let others = ways.into_iter().map(|way| (way, pair(&mut Lowering::new(surroundings, eyes, way), left, right)));
    for (way, sides) in std::iter::once((Way::Near, first)).chain(others) {
        match sides {
            Ok(sides) => read.push((way, sides)),
            Err(reason) => {
                refused.get_or_insert(reason);
            }
        }
    }
    let (ways, claims): (Vec<Way>, Vec<_>) = read.into_iter().unzip();
    readings.others = ways.into_iter().skip(1).collect();
    readings.claims = match refused {
        Some(reason) if !functions || claims.is_empty() => Err(reason),
        _ => Ok(claims),
    };
    readings
}

/// Both sides; a side that is 0 takes the free labels of the other.
pub(super) fn pair(
    lowering: &mut Lowering<'_, '_, '_>,
    left: &Sum,
    right: &Sum,
) -> Result<(Expression, Expression), String> {
    lowering.survey([left, right])?;
    match (is_zero(left), is_zero(right)) {
        (true, _) => {
            let right = lowering.side(right)?;
            Ok((nothing_of(&right), right))
        }
        (_, true) => {
            let left = lowering.side(left)?;
            let zero = nothing_of(&left);
            Ok((left, zero))
        }
        _ => {
            let (left, right) = (lowering.side(left)?, lowering.side(right)?);
            lowering.fitted_sides(left, right)
        }
    }
}

/// The lower of two orders.
fn least(one: Option<usize>, two: Option<usize>) -> Option<usize> {
    one.into_iter().chain(two).min()
}

/// Zero with the free labels of an expression.
fn nothing_of(expression: &Expression) -> Expression {
    Expression::Product(vec![Expression::Number(Rational::ZERO), expression.clone()])
}

/// Whether a side is the number 0.
pub(super) fn is_zero(side: &Sum) -> bool {
    lone_factor(side).is_some_and(|factor| matches!(&factor.atom, Atom::Number(number) if number == "0"))
}

/// The factor that a side consists of.
pub(super) fn lone_factor(side: &Sum) -> Option<&Factor> {
    match side.terms.as_slice() {
        [term] if term.sign.is_none() => match term.factors.as_slice() {
            [factor] => Some(factor),
            _ => None,
        },
        _ => None,
    }
}

/// Takes a relation as a definition if it is one; `said` where its sign says so.
fn define(left: &Sum, right: &Sum, eyes: &Eyes<'_>, surroundings: &mut Surroundings<'_>, said: bool) -> bool {
    let Some(factor) = lone_factor(left) else { return said };
    let mut lowering = Lowering::new(surroundings, eyes, Way::Near);
    let Some((kernel, slots)) = lowering.lone_kernel(factor) else { return said };
    if !said && (lowering.is_meant(&kernel, &slots) || is_zero(right)) {
        return false;
    }
    lowering.defines = true;
    match lowering.survey([left, right]).and_then(|()| lowering.body(right, &slots)) {
        Ok(body) if lowering.uses(&body, &kernel, slots.len()) => return said,
        Ok(body) => {
            let neglected = lowering.neglected;
            surroundings.neglected = least(surroundings.neglected, neglected);
            surroundings.define(&kernel, slots.clone(), body);
            surroundings.define_metric(&kernel, &slots);
        }
        // What cannot be lowered defines nothing that could be used: the kernel stays a field of unknown meaning.
        Err(_) => {}
    }
    true
}
