//! The typed expression that is evaluated, and the world that its names stand in.
//!
//! An expression is a tree over fields, metrics and derivatives with labelled slots. Labels are scoped by products: in
//! a product, and in a single factor, a label that stands twice is summed; every node has the labels that are left as
//! its free ones. So a dummy inside never meets the same label outside, and nobody renames anything. A definition is
//! a body with free labels in order; it is evaluated once and then stands for a tensor.
//!
//! Nothing is evaluated here (`evaluation.rs`), and nothing is decided (`verdict.rs`).

use std::slice;

use crate::contraction::Label;
use crate::geometry::{Level, Signs};
use crate::rational::Rational;
use crate::sample::SlotSymmetry;

/// What fills a slot.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Filling {
    /// A label, free or summed.
    Label(Label),
    /// A member of the slot's family, from 0.
    Member(usize),
}

/// A slot in use.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub struct Index {
    /// What fills it.
    pub filling: Filling,
    /// Its level; `Inert` where levels do not matter.
    pub level: Level,
    /// Its family, as an index into `World::families`.
    pub family: usize,
}

/// An expression.
#[derive(Clone, Debug, PartialEq)]
pub enum Expression {
    /// An exact number.
    Number(Rational),
    /// The imaginary unit.
    Imaginary,
    /// The dimension of a family, as a number.
    Dimension(usize),
    /// A field with as many slots as it has.
    Field {
        /// An index into `World::fields`.
        field: usize,
        /// Its slots. On another level than the field's own they are moved by the metric of their family.
        slots: Vec<Index>,
    },
    /// A definition, with its free labels in the order of `Definition::free`.
    Defined {
        /// An index into `World::definitions`.
        definition: usize,
        /// Its slots.
        slots: Vec<Index>,
    },
    /// The coordinate `x^i` of a family that has coordinates.
    Coordinate(Index),
    /// Kronecker's delta.
    Delta([Index; 2]),
    /// A metric, its inverse or, on mixed levels, the delta.
    Metric {
        /// An index into `World::metrics`.
        metric: usize,
        /// Its slots.
        slots: [Index; 2],
    },
    /// The determinant of a metric.
    Determinant(usize),
    /// The epsilon with as many slots as its family has members; of a metric it is a tensor, else a symbol.
    Epsilon {
        /// The metric of the tensor.
        metric: Option<usize>,
        /// Its slots.
        slots: Vec<Index>,
    },
    /// The Christoffel symbol of a metric: the first slot is the one that may be up.
    Christoffel {
        /// An index into `World::metrics`.
        metric: usize,
        /// Its slots.
        slots: [Index; 3],
    },
    /// A tensor of curvature.
    Curvature {
        /// An index into `World::metrics`.
        metric: usize,
        /// Which.
        kind: Curvature,
        /// Its slots: four, two or none. On another level than the natural one they are moved.
        slots: Vec<Index>,
    },
    /// A sum; none of its terms is missing a free label of another.
    Sum(Vec<Self>),
    /// A product.
    Product(Vec<Self>),
    /// A scalar divided into something.
    Quotient(Box<Self>, Box<Self>),
    /// A rational power of a scalar.
    Power(Box<Self>, Rational),
    /// `|a|` of a scalar.
    Magnitude(Box<Self>),
    /// A function of a scalar.
    Function(Function, Box<Self>),
    /// A partial derivative.
    Partial(Index, Box<Self>),
    /// A covariant derivative: it sees the free slots of what it acts on, with their levels.
    Covariant {
        /// An index into `World::metrics`.
        metric: usize,
        /// The slot of the derivative.
        index: Index,
        /// What it acts on.
        of: Box<Self>,
    },
    /// The change to first order in a parameter: a variation, or a derivative along a parameter. Fields that vary have
    /// an independent random change.
    Vary {
        /// An index into `World::parameters`.
        parameter: usize,
        /// What is varied.
        of: Box<Self>,
    },
    /// The determinant of an expression with two free labels, row and column.
    Det(Box<Self>, [Label; 2]),
    /// The inverse of an expression with two free labels, row and column, as a matrix with the given slots.
    Inverse(Box<Self>, [Label; 2], [Index; 2]),
    /// The adjugate of an expression with two free labels, as a matrix with the given slots.
    Adjugate(Box<Self>, [Label; 2], [Index; 2]),
}

/// Tensors of curvature, with the signs of `World::signs`.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Curvature {
    /// `R^i_{jkl}`, natural level up, down, down, down.
    Riemann,
    /// `R_{ij}`.
    Ricci,
    /// `R`.
    Scalar,
    /// `G_{ij}`.
    Einstein,
    /// `C^i_{jkl}`.
    Weyl,
}

/// Elementary functions.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Function {
    /// The exponential.
    Exp,
    /// The natural logarithm.
    Log,
    /// The sine.
    Sin,
    /// The cosine.
    Cos,
}

/// What the names of an expression stand for.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct World {
    /// Index families.
    pub families: Vec<Family>,
    /// Metrics.
    pub metrics: Vec<Metric>,
    /// Fields.
    pub fields: Vec<Field>,
    /// Definitions; a body refers to earlier ones only.
    pub definitions: Vec<Definition>,
    /// Names of parameters of variations and of derivatives along curves.
    pub parameters: Vec<String>,
    /// Signs of the curvature and of the epsilon tensors.
    pub signs: Signs,
    /// Which dimensions are tried; one, where it is fixed.
    pub dimensions: Vec<usize>,
    /// What is known besides, imposed on every draw.
    pub givens: Vec<Given>,
    /// From which order on terms in small fields are left out; from the second on if nothing is said.
    pub neglected: Option<usize>,
}

impl World {
    /// The order in small fields up to which sides are compared.
    pub fn order_compared(&self) -> usize {
        self.neglected.map_or(1, |order| order.saturating_sub(1))
    }
}

/// An index family.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Family {
    /// How many members it has.
    pub size: Size,
    /// The base variable that is its first coordinate; nothing for a family that has no coordinates.
    pub coordinates: Option<usize>,
    /// The metric that moves its indices.
    pub metric: Option<usize>,
}

/// A number of members.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Size {
    /// As many.
    Fixed(usize),
    /// The dimension that is tried, less a number.
    Dimension(usize),
}

/// A metric of a family.
#[derive(Clone, Debug, PartialEq)]
pub struct Metric {
    /// As it is called.
    pub name: String,
    /// Its family, as an index into `World::families`.
    pub family: usize,
    /// What it is.
    pub values: MetricValues,
    /// How many signs of its signature are negative.
    pub minus: usize,
    /// Whether it changes with a parameter of variation.
    pub varies: bool,
}

/// The components of a metric.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum MetricValues {
    /// Arbitrary functions.
    Arbitrary,
    /// Arbitrary constants.
    Constant,
    /// Diagonal, `1` and `-1`.
    Flat,
    /// Those of a definition with two slots, both down.
    Defined(usize),
}

/// A field.
#[derive(Clone, Debug, PartialEq)]
pub struct Field {
    /// As it is called.
    pub name: String,
    /// Family and own level of each slot.
    pub slots: Vec<(usize, Level)>,
    /// Signed exchanges of its slots.
    pub symmetries: Vec<SlotSymmetry>,
    /// Whether its trace by the metric of its family vanishes in its first two slots.
    pub traceless: bool,
    /// Whether it does not depend on position.
    pub constant: bool,
    /// Whether it is of first order in a common small parameter.
    pub small: bool,
    /// Whether it changes with the parameters of variation.
    pub varies: bool,
    /// Whether the author says what it is; if not, that a claim fails proves nothing.
    pub known: bool,
}

/// A definition.
#[derive(Clone, Debug, PartialEq)]
pub struct Definition {
    /// As it is called.
    pub name: String,
    /// The slots of the left side in order; members are components that this body alone defines.
    pub free: Vec<Index>,
    /// The right side.
    pub body: Expression,
}

/// Something that is known besides the claim.
#[derive(Clone, Debug, PartialEq)]
pub struct Given {
    /// As it is called in the text.
    pub label: String,
    /// The left side.
    pub left: Expression,
    /// The right side; none for 0.
    pub right: Option<Expression>,
}

impl Expression {
    /// Zero.
    pub fn zero() -> Self {
        Self::Number(Rational::ZERO)
    }

    /// The negative.
    #[must_use]
    pub fn negated(self) -> Self {
        Self::Product(vec![Self::Number(-Rational::ONE), self])
    }

    /// The slots of the node itself, without those of its parts.
    pub fn slots(&self) -> &[Index] {
        match self {
            Self::Field { slots, .. }
            | Self::Defined { slots, .. }
            | Self::Epsilon { slots, .. }
            | Self::Curvature { slots, .. } => slots,
            Self::Delta(slots) | Self::Metric { slots, .. } => slots,
            Self::Christoffel { slots, .. } => slots,
            Self::Coordinate(index) | Self::Partial(index, _) | Self::Covariant { index, .. } => slice::from_ref(index),
            _ => &[],
        }
    }

    /// The slots whose labels stand once in it, where a sum counts by its first term and a scalar's argument not at
    /// all: its free ones, if its terms fit together.
    pub fn free_slots(&self) -> Vec<Index> {
        let mut all: Vec<Index> = Vec::new();
        let mut pending = vec![self];
        while let Some(part) = pending.pop() {
            all.extend(part.slots());
            match part {
                Self::Sum(terms) => pending.extend(terms.first()),
                Self::Power(..) | Self::Magnitude(_) | Self::Function(..) | Self::Det(..) => {}
                Self::Inverse(_, _, slots) | Self::Adjugate(_, _, slots) => all.extend(slots),
                // The last part is taken first, so that slots come in the order written.
                other => pending.extend(other.parts().into_iter().rev()),
            }
        }
        let once = |index: &Index| all.iter().filter(|other| other.filling == index.filling).count() == 1;
        all.iter().filter(|index| matches!(index.filling, Filling::Label(_)) && once(index)).copied().collect()
    }

    /// The parts of which it is made, to be changed.
    pub fn parts_mut(&mut self) -> Vec<&mut Self> {
        match self {
            Self::Sum(parts) | Self::Product(parts) => parts.iter_mut().collect(),
            Self::Quotient(over, under) => vec![over, under],
            Self::Power(of, _) | Self::Magnitude(of) | Self::Function(_, of) | Self::Partial(_, of) => vec![of],
            Self::Covariant { of, .. } | Self::Vary { of, .. } => vec![of],
            Self::Det(of, _) | Self::Inverse(of, ..) | Self::Adjugate(of, ..) => vec![of],
            _ => Vec::new(),
        }
    }

    /// Puts a label in the place of another where it is free: not in the arguments of scalars, whose labels are their
    /// own. The caller sees to it that no product inside sums over either.
    pub fn rename_free(&mut self, from: Label, to: Label) {
        let mut pending = vec![self];
        while let Some(part) = pending.pop() {
            for index in part.slots_mut() {
                if index.filling == Filling::Label(from) {
                    index.filling = Filling::Label(to);
                }
            }
            match part {
                Self::Sum(parts) | Self::Product(parts) => pending.extend(parts),
                Self::Quotient(over, _) => pending.push(over),
                Self::Partial(_, of) | Self::Covariant { of, .. } | Self::Vary { of, .. } => pending.push(of),
                _ => {}
            }
        }
    }

    /// The slots of the node itself, those of an inverse or an adjugate among them.
    fn slots_mut(&mut self) -> &mut [Index] {
        match self {
            Self::Field { slots, .. }
            | Self::Defined { slots, .. }
            | Self::Epsilon { slots, .. }
            | Self::Curvature { slots, .. } => slots,
            Self::Delta(slots)
            | Self::Metric { slots, .. }
            | Self::Inverse(_, _, slots)
            | Self::Adjugate(_, _, slots) => slots,
            Self::Christoffel { slots, .. } => slots,
            Self::Coordinate(index) | Self::Partial(index, _) | Self::Covariant { index, .. } => slice::from_mut(index),
            _ => &mut [],
        }
    }

    /// The parts of which it is made.
    pub fn parts(&self) -> Vec<&Self> {
        match self {
            Self::Sum(parts) | Self::Product(parts) => parts.iter().collect(),
            Self::Quotient(over, under) => vec![over, under],
            Self::Power(of, _) | Self::Magnitude(of) | Self::Function(_, of) | Self::Partial(_, of) => vec![of],
            Self::Covariant { of, .. } | Self::Vary { of, .. } => vec![of],
            Self::Det(of, _) | Self::Inverse(of, ..) | Self::Adjugate(of, ..) => vec![of],
            _ => Vec::new(),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn index(label: Label) -> Index {
        Index { filling: Filling::Label(label), level: Level::Inert, family: 0 }
    }

    fn field(labels: &[Label]) -> Expression {
        Expression::Field { field: 0, slots: labels.iter().map(|label| index(*label)).collect() }
    }

    fn free(expression: &Expression) -> Vec<Filling> {
        expression.free_slots().into_iter().map(|index| index.filling).collect()
    }

    #[test]
    fn free_slots_are_those_that_stand_once_in_their_order() {
        let labels = |labels: &[Label]| labels.iter().map(|label| Filling::Label(*label)).collect::<Vec<_>>();
        let product = Expression::Product(vec![field(&[3, 1]), Expression::Partial(index(2), Box::new(field(&[1])))]);
        assert_eq!(free(&product), labels(&[3, 2]));
        assert_eq!(free(&Expression::Sum(vec![product, field(&[3, 2])])), labels(&[3, 2]));
        assert_eq!(free(&Expression::Power(Box::new(field(&[1])), Rational::ONE)), []);
        assert_eq!(free(&field(&[1, 1])), []);
        let inverse = Expression::Inverse(Box::new(field(&[1, 2])), [1, 2], [index(4), index(5)]);
        assert_eq!(free(&inverse), labels(&[4, 5]));
    }

    #[test]
    fn a_label_is_renamed_where_it_is_free() {
        let inverse = |row| Expression::Inverse(Box::new(field(&[1, 2])), [1, 2], [index(row), index(2)]);
        let determinant = Expression::Det(Box::new(field(&[1, 2])), [1, 2]);
        let whole = |row| {
            let derivative = Expression::Partial(index(row), Box::new(determinant.clone()));
            Expression::Sum(vec![Expression::Product(vec![determinant.clone(), inverse(row)]), derivative])
        };
        let mut renamed = whole(1);
        renamed.rename_free(1, 7);
        assert_eq!(renamed, whole(7));
    }
}
