//! Expressions evaluated at a point: a tree of names becomes an array of jets.
//!
//! Every node gives an array with labelled slots, labels ascending. The one idea: a product is not multiplied out
//! but gathered, nested products and all, and contracted by the plan of `contraction`; everything else is slot by
//! slot what it is by definition. What names stand for is drawn or computed once for a point and kept
//! (`evaluation/point.rs`), with as many derivatives as the claim needs (`evaluation/needs.rs`).
//!
//! Levels: a slot that stands on another level than its own is moved by the metric of its family; `Inert` slots
//! stay. A label that is summed stands once up and once down, or somewhere inert, or in a family without a metric.
//! A slot may be filled by an index of another family whose members are among its own (a spatial part of the
//! coordinates): it is moved as what it is and then restricted.
//!
//! Trap: the number 0 has every shape: as a term it is passed over, and a definition may be 0 in all components.
//!
//! # Example
//!
//! ```
//! use indexwise_algebra::evaluation::{Meter, Setting, evaluate};
//! use indexwise_algebra::expression::{Expression, Family, Filling, Index, Size, World};
//! use indexwise_algebra::field::{FIRST, Residue};
//! use indexwise_algebra::geometry::Level;
//! use indexwise_algebra::trouble::Trouble;
//!
//! # fn main() -> Result<(), Trouble> {
//! let plain = Family { size: Size::Dimension(0), coordinates: Some(0), metric: None };
//! let world = World { families: vec![plain], dimensions: vec![3], ..World::default() };
//! let index = Index { filling: Filling::Label(1), level: Level::Inert, family: 0 };
//! let trace = Expression::Delta([index, index]);
//! let setting = Setting::new(&[&trace], &world, 3)?;
//! let meter = Meter::new(1_000_000, 1_000_000, None);
//! let value = evaluate(&trace, &setting.point::<Residue<FIRST>>(7, &meter)?)?;
//! assert_eq!(value.tensor.to_jet()?.value(), Residue::new(3));
//! # Ok(())
//! # }
//! ```

mod definitions;
mod derivatives;
pub(crate) mod families;
mod functions;
mod meter;
pub(crate) mod needs;
mod point;
pub(crate) mod sampled;
mod setting;
mod slots;

pub use functions::TERMS_BUDGET;
pub use meter::Meter;
pub use needs::DEPTH_BUDGET;
pub use point::Point;
pub(crate) use point::ring_for;
pub use setting::Setting;
pub use slots::Slot;

use crate::contraction::Label;
use crate::expression::{Curvature, Expression, Index};
use crate::geometry::Level;
use crate::jet::Jet;
use crate::matrix;
use crate::number::Number;
use crate::rational::Rational;
use crate::symbols;
use crate::tensor::Tensor;
use crate::trouble::{Budget, Outcome, Trouble};
use point::Source;
use slots::{Labelled, natural};

/// From this label on dummies of nested products are renamed; expressions come with smaller ones.
pub const FRESH_LABELS: Label = 1 << 15;

/// An array with labelled slots, labels ascending.
#[derive(Clone, Debug)]
pub struct Value<N> {
    /// The components.
    pub tensor: Tensor<N>,
    /// What each slot is.
    pub slots: Vec<Slot>,
}

/// The value of an expression; see the head for `Shape`. Other troubles are those of the arithmetic.
pub fn evaluate<N: Number>(expression: &Expression, point: &Point<N>) -> Outcome<Value<N>> {
    let value = node(expression, point)?;
    // What takes no multiplications takes time as well.
    point.meter.spend(value.tensor.numbers().len() as u64)?;
    Ok(value)
}

fn node<N: Number>(expression: &Expression, point: &Point<N>) -> Outcome<Value<N>> {
    match expression {
        Expression::Number(number) => Ok(point.number(number_of(*number)?)),
        Expression::Imaginary => Ok(point.number(N::imaginary_unit().ok_or(Trouble::NoRoot)?)),
        Expression::Dimension(family) => Ok(point.number(integer(point.families.size(*family)?))),
        Expression::Field { field, slots } => {
            let own = point.world.fields.get(*field).ok_or(Trouble::Shape)?;
            point.filled(Source::Field(*field), &natural(own.slots.iter().copied()), slots)
        }
        Expression::Defined { definition, slots } => point.defined(*definition, slots),
        Expression::Coordinate(index) => {
            point.filled(Source::Coordinate(index.family), &natural([(index.family, Level::Up)]), &[*index])
        }
        Expression::Delta(slots) => point.delta(slots),
        Expression::Metric { metric, slots } => point.metric(*metric, slots),
        Expression::Determinant(metric) => Ok(point.scalar(point.space(*metric)?.determinant())),
        Expression::Epsilon { metric, slots } => point.epsilon(*metric, slots),
        Expression::Christoffel { metric, slots } => {
            let family = point.metric_family(*metric)?;
            let own = [Level::Up, Level::Down, Level::Down].map(|level| (family, level));
            point.filled(Source::Christoffel(*metric), &natural(own), slots)
        }
        Expression::Curvature { metric, kind, slots } => point.curved(*metric, *kind, slots),
        Expression::Sum(terms) => sum(terms, point),
        Expression::Product(factors) => product(factors, point),
        Expression::Quotient(over, under) => {
            let divisor = scalar(under, point)?.inverse()?;
            let over = evaluate(over, point)?;
            Ok(Value { tensor: over.tensor.times(&divisor)?, ..over })
        }
        Expression::Power(of, exponent) => {
            let (upper, lower) = exponent_of(*exponent)?;
            Ok(point.scalar(&scalar(of, point)?.power(upper, lower)?))
        }
        Expression::Magnitude(of) => Ok(point.scalar(&scalar(of, point)?.magnitude()?)),
        Expression::Function(function, of) => point.function(*function, of),
        Expression::Partial(index, of) => point.partial(index, of),
        Expression::Covariant { metric, index, of } => point.covariant(*metric, index, of),
        Expression::Vary { parameter, of } => point.varied(*parameter, of),
        Expression::Det(of, labels) => {
            let (matrix, _) = point.matrix(of, *labels)?;
            Ok(point.scalar(&matrix::determinant(&matrix)?))
        }
        Expression::Inverse(of, labels, slots) => {
            let (matrix, families) = point.matrix(of, *labels)?;
            point.labelled(&matrix::inverse(&matrix)?, &families, slots)
        }
        Expression::Adjugate(of, labels, slots) => {
            let (matrix, families) = point.matrix(of, *labels)?;
            point.labelled(&matrix::adjugate(&matrix)?, &families, slots)
        }
    }
}

/// Whether an expression is the number 0, whatever slots are expected of it.
pub fn is_nothing(expression: &Expression) -> bool {
    *expression == Expression::Number(Rational::ZERO)
}

/// The value of an expression without free labels.
pub(crate) fn scalar<N: Number>(expression: &Expression, point: &Point<N>) -> Outcome<Jet<N>> {
    evaluate(expression, point)?.tensor.to_jet()
}

/// The terms one after another; all have the same slots.
fn sum<N: Number>(terms: &[Expression], point: &Point<N>) -> Outcome<Value<N>> {
    let mut total: Option<Value<N>> = None;
    for term in terms.iter().filter(|term| !is_nothing(term)) {
        let value = evaluate(term, point)?;
        total = Some(match total {
            None => value,
            Some(total) if total.slots == value.slots => Value { tensor: total.tensor.plus(&value.tensor)?, ..total },
            Some(_) => return Err(Trouble::Shape),
        });
    }
    Ok(total.unwrap_or_else(|| point.number(N::ZERO)))
}

fn product<N: Number>(factors: &[Expression], point: &Point<N>) -> Outcome<Value<N>> {
    let mut gathered = Gathered { factors: Vec::new(), number: N::ONE, fresh: FRESH_LABELS };
    gathered.gather(factors, point)?;
    let Gathered { factors, number, .. } = gathered;
    if factors.is_empty() {
        return Ok(point.number(number));
    }
    let value = point.multiplied(factors)?;
    if number == N::ONE { Ok(value) } else { Ok(Value { tensor: value.tensor.scaled(number), ..value }) }
}

/// The factors of nested products as one list, plain numbers apart.
struct Gathered<N: Number> {
    factors: Vec<Labelled<N>>,
    number: N,
    /// The next label that nobody has.
    fresh: Label,
}

impl<N: Number> Gathered<N> {
    fn gather(&mut self, factors: &[Expression], point: &Point<N>) -> Outcome<()> {
        for factor in factors {
            match factor {
                Expression::Number(number) => self.number = self.number * number_of::<N>(*number)?,
                Expression::Product(inner) => {
                    let from = self.factors.len();
                    self.gather(inner, point)?;
                    self.close(from)?;
                    self.settle(from, point)?;
                }
                _ => {
                    let value = evaluate(factor, point)?;
                    self.factors.push((value.tensor, value.slots));
                }
            }
        }
        Ok(())
    }

    /// Multiplies a nested product out if it has no free labels: a number is no help to a plan.
    fn settle(&mut self, from: usize, point: &Point<N>) -> Outcome<()> {
        let inner = self.factors.get(from..).unwrap_or_default();
        let mut labels: Vec<Label> = inner.iter().flat_map(|(_, slots)| slots).map(|slot| slot.label).collect();
        labels.sort_unstable();
        if inner.len() > 1 && labels.chunk_by(|a, b| a == b).all(|same| same.len() == 2) {
            let value = point.multiplied(self.factors.split_off(from))?;
            self.factors.push((value.tensor, value.slots));
        }
        Ok(())
    }

    /// Gives the dummies of a nested product, whose factors begin at a place, labels of their own.
    fn close(&mut self, from: usize) -> Outcome<()> {
        let inner = self.factors.get_mut(from..).unwrap_or_default();
        let mut labels: Vec<Label> = inner.iter().flat_map(|(_, slots)| slots).map(|slot| slot.label).collect();
        labels.sort_unstable();
        for same in labels.chunk_by(|a, b| a == b).filter(|same| same.len() > 1) {
            let Some(label) = same.first().filter(|label| **label < FRESH_LABELS) else { continue };
            let own = inner.iter_mut().flat_map(|(_, slots)| slots).filter(|slot| slot.label == *label);
            own.for_each(|slot| slot.label = self.fresh);
            self.fresh = self.fresh.checked_add(1).ok_or(Trouble::Budget(Budget::Labels))?;
        }
        Ok(())
    }
}

impl<N: Number> Point<'_, N> {
    fn number(&self, number: N) -> Value<N> {
        self.scalar(&Jet::constant(&self.ring, number))
    }

    fn scalar(&self, jet: &Jet<N>) -> Value<N> {
        Value { tensor: Tensor::scalar(jet), slots: Vec::new() }
    }

    fn metric_family(&self, metric: usize) -> Outcome<usize> {
        Ok(self.world.metrics.get(metric).ok_or(Trouble::Shape)?.family)
    }

    fn delta(&self, slots: &[Index; 2]) -> Outcome<Value<N>> {
        let [a, b] = slots;
        let whole = self.families.larger(a.family, b.family);
        let unit = symbols::delta(&self.ring, self.families.size(whole)?)?;
        self.labelled(&unit, &[whole, whole], slots)
    }

    /// The metric, its inverse or, on mixed levels, the delta.
    fn metric(&self, metric: usize, slots: &[Index; 2]) -> Outcome<Value<N>> {
        let family = self.metric_family(metric)?;
        let families = [family, family];
        match slots.map(|index| index.level) {
            [Level::Up, Level::Up] => self.labelled(self.space(metric)?.inverse(), &families, slots),
            [Level::Up, Level::Down] | [Level::Down, Level::Up] => {
                self.labelled(&symbols::delta(&self.ring, self.families.size(family)?)?, &families, slots)
            }
            _ => self.labelled(self.space(metric)?.metric(), &families, slots),
        }
    }

    /// `Dimension` if the number of slots is not that of the dimension.
    fn epsilon(&self, metric: Option<usize>, slots: &[Index]) -> Outcome<Value<N>> {
        let family = match metric {
            Some(metric) => self.metric_family(metric)?,
            None => {
                let families = slots.iter().map(|index| index.family);
                families.reduce(|a, b| self.families.larger(a, b)).ok_or(Trouble::Shape)?
            }
        };
        let size = self.families.size(family)?;
        if size != slots.len() {
            return Err(Trouble::Dimension);
        }
        let families = vec![family; size];
        match metric {
            None => self.labelled(&symbols::epsilon(&self.ring, size)?, &families, slots),
            Some(metric) if slots.iter().all(|index| index.level == Level::Up) => {
                self.labelled(&self.space(metric)?.epsilon_up()?, &families, slots)
            }
            Some(metric) => {
                let own = natural(families.iter().map(|family| (*family, Level::Down)));
                self.filled(Source::Epsilon(metric), &own, slots)
            }
        }
    }

    fn curved(&self, metric: usize, kind: Curvature, slots: &[Index]) -> Outcome<Value<N>> {
        let family = self.metric_family(metric)?;
        let levels: &[Level] = match kind {
            Curvature::Riemann | Curvature::Weyl => &[Level::Up, Level::Down, Level::Down, Level::Down],
            Curvature::Ricci | Curvature::Einstein => &[Level::Down, Level::Down],
            Curvature::Scalar => &[],
        };
        self.filled(Source::Curvature(metric, kind), &natural(levels.iter().map(|level| (family, *level))), slots)
    }

    /// The value of an expression with two free labels as a matrix, and the families of what its inverse has in
    /// the first and the second slot.
    fn matrix(&self, of: &Expression, labels: [Label; 2]) -> Outcome<(Tensor<N>, [usize; 2])> {
        let Value { tensor, slots } = evaluate(of, self)?;
        let place = |label: Label| slots.iter().position(|slot| slot.label == label).ok_or(Trouble::Shape);
        let order = [place(labels[0])?, place(labels[1])?];
        let family = |place: usize| slots.get(place).map(|slot| slot.family).ok_or(Trouble::Shape);
        let families = [family(order[1])?, family(order[0])?];
        let matrix = tensor.permuted(&order)?;
        let rows = matrix.lengths().first().copied().unwrap_or_default();
        self.meter.spend((rows as u64).saturating_pow(4).saturating_mul(self.ring.pairs(matrix.order())))?;
        Ok((matrix, families))
    }
}

/// A fraction as a number of any kind; `ZeroDivisor` where its denominator is 0.
pub(crate) fn number_of<N: Number>(number: Rational) -> Outcome<N> {
    let upper = wide::<N>(number.numerator());
    let lower = wide::<N>(number.denominator()).inverse().ok_or(Trouble::ZeroDivisor)?;
    let quotient = upper * lower;
    if quotient.is_sound() { Ok(quotient) } else { Err(Trouble::Overflow) }
}

/// An integer of 128 bits, in digits to the base 2^32.
fn wide<N: Number>(number: i128) -> N {
    let size = number.unsigned_abs();
    let base = N::from_integer(1 << 32);
    let digits = (0..4).rev().map(|digit| integer::<N>((size >> (32 * digit)) as u32 as usize));
    let total = digits.fold(N::ZERO, |total, digit| total * base + digit);
    if number < 0 { -total } else { total }
}

fn integer<N: Number>(number: usize) -> N {
    N::from_integer(i64::try_from(number).unwrap_or(i64::MAX))
}

/// Numerator and denominator of an exponent; `Function` for one that is out of all proportion.
fn exponent_of(exponent: Rational) -> Outcome<(i64, u64)> {
    let upper = i64::try_from(exponent.numerator()).map_err(|_| Trouble::Function)?;
    let lower = u64::try_from(exponent.denominator()).map_err(|_| Trouble::Function)?;
    Ok((upper, lower))
}
