//! What looks like a matrix without indices before it is lowered, and how far a function of matrices reaches.
//!
//! The one idea: `\operatorname{tr} A B` takes one matrix or all that follow up to the next function, and what is
//! a matrix is seen from the declarations alone, so that nothing is lowered only to be thrown away.

use indexwise_algebra::expression::Expression;
use indexwise_grammar::tree::{Atom, Bracket, Factor, Joint, Kernel, Level, Sum};

use crate::conventions::built_in::is_derivative;
use crate::terms::uses::{Use, use_of};

use super::super::super::standing::slot_letters;
use super::super::{Lowering, Refusal, Way};
use super::acts;

/// Brackets within brackets that are looked into for matrices.
const NESTED: usize = 16;

impl Lowering<'_, '_, '_> {
    /// How many of the factors after a matrix are what it depends on: `A(t)`. A bracket after a matrix that holds
    /// neither matrices nor their functions nor indices may be an argument as well, `A(0)`, and is refused.
    pub(in super::super) fn arguments_of_matrix(&self, rest: &[Factor]) -> Result<usize, Refusal> {
        let Some(next) = rest.first() else { return Ok(0) };
        if self.is_argument(&Use::default(), next) {
            return Ok(1);
        }
        let Atom::Group(group) = &next.atom else { return Ok(0) };
        let is_function = |factor: &Factor| matches!(factor.atom, Atom::Function(_));
        let sums = || group.parts.iter().flat_map(|part| &part.sides);
        let functions = sums().flat_map(|sum| &sum.terms).flat_map(|term| &term.factors).any(is_function);
        let factor = functions || group.bracket != Bracket::Round || next.joint != Joint::Beside;
        let is_factor = |sum| self.has_matrix(sum) || !slot_letters(sum, self.eyes).is_empty();
        if factor || sums().any(is_factor) {
            return Ok(0);
        }
        Err("what a matrix takes in brackets is not understood".to_owned())
    }

    /// Whether the argument of a function begins with a matrix, by its looks.
    pub(in super::super) fn begins_with_matrix(&self, rest: &[Factor]) -> bool {
        self.looks_like_matrix(rest, NESTED)
    }

    /// Whether the first of these factors that is no number, with what acts on it, looks like a matrix; of functions
    /// the adjugate alone does.
    fn looks_like_matrix(&self, factors: &[Factor], depth: usize) -> bool {
        let Some(depth) = depth.checked_sub(1) else { return false };
        let mut rest = factors.iter();
        let Some(factor) =
            rest.find(|factor| !matches!(factor.atom, Atom::Number(_) | Atom::Fraction(_)) && !self.operates(factor))
        else {
            return false;
        };
        match &factor.atom {
            Atom::Kernel(kernel) => self.is_bare(factor, kernel),
            Atom::Function(name) => name == "adj",
            Atom::Group(group) if group.bracket != Bracket::Bars && !has_indices(factor) => {
                group.parts.first().and_then(|part| part.sides.first()).is_some_and(|sum| self.holds_matrix(sum, depth))
            }
            _ => false,
        }
    }

    /// Whether a sum looks like a matrix.
    pub(in super::super) fn has_matrix(&self, sum: &Sum) -> bool {
        self.holds_matrix(sum, NESTED)
    }

    /// By its last term: the first may be a number.
    fn holds_matrix(&self, sum: &Sum, depth: usize) -> bool {
        let factors = sum.terms.last().map(|term| term.factors.as_slice()).unwrap_or_default();
        // What a function takes is no factor; a derivative sign alone is found out one factor later.
        let mut function = false;
        factors.iter().any(|factor| {
            let is_function = matches!(factor.atom, Atom::Function(_));
            let free = !std::mem::replace(&mut function, is_function) || is_function;
            free && self.looks_like_matrix(std::slice::from_ref(factor), depth)
        })
    }

    /// A variation or a derivative sign.
    fn operates(&self, factor: &Factor) -> bool {
        matches!(&factor.atom, Atom::Kernel(kernel) if kernel.letter == "\\delta" && factor.scripts.is_empty()
            || is_derivative(&kernel.letter))
    }

    /// A kernel that is declared a matrix, without indices.
    fn is_bare(&self, factor: &Factor, kernel: &Kernel) -> bool {
        let Ok((_, rest)) = acts(factor) else { return false };
        let made = use_of(&rest, kernel, self.eyes, false);
        made.own_slots().count() == 0 && self.is_matrix_kernel(&made.kernel)
    }

    /// The matrix that a function is of, and how many factors that is: a bracket, or the next matrix; where functions
    /// reach far, the matrices after it too.
    pub(in super::super) fn matrix_argument(&mut self, rest: &[Factor]) -> Result<(Expression, usize), Refusal> {
        let closed = rest.first().is_some_and(|first| matches!(first.atom, Atom::Group(_)));
        let (value, mut at) = self.first_matrix(rest)?;
        if closed && rest.first().is_some_and(|first| first.scripts.is_empty()) {
            return Ok((value, at));
        }
        let mut values = vec![value];
        let joined = |factor: &Factor| factor.joint == Joint::Beside;
        while let Some(next) = rest.get(at..)
            && next.first().is_some_and(joined)
            && !matches!(next.first().map(|factor| &factor.atom), Some(Atom::Number(_) | Atom::Fraction(_)))
            && self.looks_like_matrix(next, NESTED)
        {
            self.may_be(Way::Wide);
            if !self.way.is_wide() {
                break;
            }
            let (value, taken) = self.one(next)?;
            values.push(value);
            at += taken;
        }
        let mut values = self.joined(values)?;
        Ok((if values.len() == 1 { values.remove(0) } else { Expression::Product(values) }, at))
    }

    /// The numbers before a matrix, and the matrix.
    pub(in super::super) fn first_matrix(&mut self, rest: &[Factor]) -> Result<(Expression, usize), Refusal> {
        let mut values = Vec::new();
        let mut at = 0;
        while let Some(next) = rest.get(at..)
            && !next.is_empty()
        {
            let (value, taken) = self.one(next)?;
            at += taken;
            let found = self.is_matrix(&value);
            values.push(value);
            if found {
                let only = values.len() == 1;
                let value = if only { values.pop() } else { None };
                return Ok((value.unwrap_or(Expression::Product(values)), at));
            }
        }
        Err("the argument of a function of matrices is no matrix".to_owned())
    }
}

/// Whether something stands below a bracket.
fn has_indices(factor: &Factor) -> bool {
    factor.scripts.iter().any(|script| script.level == Level::Down)
}
