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

/// A letter that is set again means the later thing from there on.
fn define_again(left: &Sum, right: &Sum, eyes: &Eyes<'_>, surroundings: &mut Surroundings<'_>) {
    let lone = lone_factor(left).and_then(|factor| Lowering::new(surroundings, eyes, Way::Near).lone_kernel(factor));
    if lone.is_some_and(|(kernel, slots)| surroundings.is_defined(&kernel, slots.len())) {
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

/// Both sides, in each way in which they may be read.
fn lower(step: &mut Step, left: &Sum, right: &Sum, eyes: &Eyes<'_>, surroundings: &mut Surroundings<'_>) {
    let mut near = Lowering::new(surroundings, eyes, Way::Near);
    let sides = pair(&mut near, left, right);
    step.letters = near.letters().to_vec();
    step.antisymmetrised = near.antisymmetrised;
    step.others = near.others.clone();
    step.claims = sides.and_then(|sides| {
        let mut all = vec![sides];
        for way in &step.others {
            all.push(pair(&mut Lowering::new(surroundings, eyes, *way), left, right)?);
        }
        Ok(all)
    });
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
        _ => Ok((lowering.side(left)?, lowering.side(right)?)),
    }
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
    match lowering.survey([left, right]).and_then(|()| lowering.side(right)) {
        Ok(body) if lowering.uses(&body, &kernel, slots.len()) => return said,
        Ok(body) => surroundings.define(&kernel, slots, body),
        // What cannot be lowered defines nothing that could be used: the kernel stays a field of unknown meaning.
        Err(_) => {}
    }
    true
}
