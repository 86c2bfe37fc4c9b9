//! Functions: elementary ones of scalars, and determinants and traces of matrices.

use indexwise_algebra::expression::{Expression, Filling, Function, Index};
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
        let labels = of.free_slots();
        match labels.as_slice() {
            [row, column] => Ok(Expression::Det(Box::new(of), [label(row)?, label(column)?])),
            _ => Err("the argument of a determinant has not two indices".to_owned()),
        }
    }
}

fn label(index: &Index) -> Result<u16, Refusal> {
    match index.filling {
        Filling::Label(label) => Ok(label),
        Filling::Member(_) => Err("a component of a matrix is not evaluated".to_owned()),
    }
}
