//! Functions: elementary ones of scalars, and determinants and traces of matrices.

use indexwise_algebra::expression::{Expression, Filling, Function, Index};
use indexwise_algebra::geometry::Level;
use indexwise_grammar::tree::{Atom, Factor, Sum};

use super::kernels::half;
use super::{Lowering, Refusal, scripts};

impl Lowering<'_, '_, '_> {
    /// A function with its argument, and how many of the following factors that is.
    pub(super) fn call(
        &mut self,
        name: &str,
        factor: &Factor,
        rest: &[Factor],
    ) -> Result<(Expression, usize), Refusal> {
        let Some(argument) = rest.first() else { return Err(format!("{name} has no argument")) };
        let function = match name {
            "exp" => Function::Exp,
            "log" | "ln" => Function::Log,
            "sin" => Function::Sin,
            "cos" => Function::Cos,
            "sqrt" => {
                let (of, taken) = self.argument(argument, rest)?;
                return Ok((Expression::Power(Box::new(of), half()), taken));
            }
            "det" => return Ok((self.determinant(argument)?, 1)),
            _ => return Err(format!("the function {name} is not evaluated")),
        };
        let (of, taken) = self.argument(argument, rest)?;
        let value = Expression::Function(function, Box::new(of));
        match scripts::power(factor)? {
            None if factor.scripts.is_empty() => Ok((value, taken)),
            None => Err(format!("the scripts of {name} are not understood")),
            Some(power) => Ok((Expression::Power(Box::new(value), power), taken)),
        }
    }

    /// The argument of a function: a bracket, or the next factor with what belongs to it.
    fn argument(&mut self, argument: &Factor, rest: &[Factor]) -> Result<(Expression, usize), Refusal> {
        match &argument.atom {
            Atom::Group(_) if argument.scripts.is_empty() => Ok((self.atom(argument)?, 1)),
            _ => self.one(rest),
        }
    }

    /// `\det g_{ij}`, `\det(A_{ij} + h_{ij})`: of an expression with two free indices.
    fn determinant(&mut self, argument: &Factor) -> Result<Expression, Refusal> {
        let sum = match &argument.atom {
            Atom::Group(group) => match group.parts.as_slice() {
                [part] if part.sides.len() == 1 => part.sides.first().cloned(),
                _ => None,
            },
            _ => Some(Sum::of_factor(argument.clone())),
        };
        let sum = sum.ok_or("the argument of a determinant is not understood")?;
        let of = self.side(&sum)?;
        let labels = free_labels(&of);
        match labels.as_slice() {
            [row, column] => Ok(Expression::Det(Box::new(of), [label(row)?, label(column)?])),
            _ => Err("a determinant of something without two indices".to_owned()),
        }
    }
}

fn label(index: &Index) -> Result<u16, Refusal> {
    match index.filling {
        Filling::Label(label) => Ok(label),
        Filling::Member(_) => Err("a component of a matrix".to_owned()),
    }
}

/// The indices of an expression whose labels stand once in its first term.
fn free_labels(expression: &Expression) -> Vec<Index> {
    let mut all = Vec::new();
    indices(expression, &mut all);
    let once = |index: &Index| all.iter().filter(|other: &&Index| other.filling == index.filling).count() == 1;
    all.iter().filter(|index| once(index) && index.level != Level::Up || once(index)).copied().collect()
}

fn indices(expression: &Expression, out: &mut Vec<Index>) {
    match expression {
        Expression::Field { slots, .. } | Expression::Defined { slots, .. } | Expression::Curvature { slots, .. } => {
            out.extend(slots);
        }
        Expression::Epsilon { slots, .. } => out.extend(slots),
        Expression::Delta(slots) | Expression::Metric { slots, .. } => out.extend(slots),
        Expression::Christoffel { slots, .. } => out.extend(slots),
        Expression::Coordinate(index) | Expression::Partial(index, _) | Expression::Covariant { index, .. } => {
            out.push(*index);
        }
        _ => {}
    }
    match expression {
        Expression::Sum(terms) => terms.first().into_iter().for_each(|term| indices(term, out)),
        Expression::Power(..) | Expression::Magnitude(_) | Expression::Function(..) | Expression::Det(..) => {}
        other => other.parts().into_iter().for_each(|part| indices(part, out)),
    }
}
