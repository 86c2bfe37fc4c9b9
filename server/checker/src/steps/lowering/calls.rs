//! Functions: elementary ones of scalars, and determinants and traces of matrices.

use indexwise_algebra::expression::{Expression, Filling, Function, Index};
use indexwise_grammar::tree::{Atom, Factor, Sum};

use super::kernels::half;
use super::{Lowering, Refusal, Way, scripts};

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
                self.no_matrix(std::slice::from_ref(&of), "a root of a matrix is not evaluated")?;
                return Ok((Expression::Power(Box::new(of), half()), taken));
            }
            "tr" | "Tr" | "trace" | "Trace" | "adj" => return self.of_matrix(name, factor, rest),
            "det" if self.begins_with_matrix(rest) => return self.of_matrix(name, factor, rest),
            "det" => return Ok((self.determinant(argument)?, 1)),
            _ => return Err(format!("the function {name} is not evaluated")),
        };
        let (of, taken) = self.argument(argument, rest)?;
        self.no_matrix(std::slice::from_ref(&of), "a function of a matrix is not evaluated")?;
        let value = Expression::Function(function, Box::new(of));
        match scripts::power(factor)? {
            None if factor.scripts.is_empty() => Ok((value, taken)),
            None => Err(format!("the scripts of {name} are not understood")),
            Some(power) => Ok((Expression::Power(Box::new(value), power), taken)),
        }
    }

    /// Trace, determinant or adjugate of a matrix without indices. A power after the brackets may belong to the matrix or
    /// to the value: both are tried.
    fn of_matrix(&mut self, name: &str, factor: &Factor, rest: &[Factor]) -> Result<(Expression, usize), Refusal> {
        if !self.begins_with_matrix(rest) {
            return Err(format!("the argument of {name} is no matrix"));
        }
        let outer = scripts::power(factor)?;
        if outer.is_none() && !factor.scripts.is_empty() {
            return Err(format!("the scripts of {name} are not understood"));
        }
        let bracket = rest.first().filter(|first| matches!(first.atom, Atom::Group(_)));
        let behind = match bracket {
            Some(bracket) if bracket.scripts.len() == 1 => scripts::power(bracket)?,
            _ => None,
        };
        if behind.is_some() {
            self.may_be(Way::Wide);
        }
        let behind = behind.filter(|_| !self.way.is_wide());
        let (of, taken) = match bracket.filter(|_| behind.is_some()) {
            Some(bracket) => (self.atom(&Factor { scripts: Vec::new(), ..bracket.clone() })?, 1),
            None if name == "adj" => self.first_matrix(rest)?,
            None => self.matrix_argument(rest)?,
        };
        if !self.is_matrix(&of) {
            return Err(format!("the argument of {name} is no matrix"));
        }
        let value = match name {
            "det" => self.determinant_of(of)?,
            "adj" => self.adjugate_of(of)?,
            _ => self.trace(of)?,
        };
        let value = match outer.or(behind) {
            None => value,
            Some(_) if name == "adj" => return Err("a power of an adjugate needs brackets".to_owned()),
            Some(power) => Expression::Power(Box::new(value), power),
        };
        Ok((value, taken))
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
