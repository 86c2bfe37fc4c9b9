//! How likely a wrong claim is to hold at a random point: a bound on the degrees of both sides.
//!
//! Each side is a quotient of polynomials in the coefficients that are drawn. By the lemma of Schwartz and Zippel a
//! polynomial of degree `d` that is not 0 vanishes at a random point modulo `p` with a chance of at most `d/p`
//! (Schwartz 1980, Zippel 1979; from memory). The bound is generous: sums are brought over the product of all
//! denominators, and each root multiplies the degree by its order, as the norm does.

use crate::evaluation::families::Families;
use crate::evaluation::needs::Needs;
use crate::expression::{Curvature, Expression, MetricValues, World};

/// A bound on the degrees of numerator and denominator, the same for all components.
#[derive(Clone, Copy, Debug, Default)]
struct Degree {
    upper: u64,
    lower: u64,
}

impl Degree {
    const fn new(upper: u64, lower: u64) -> Self {
        Self { upper, lower }
    }

    const fn times(self, other: Self) -> Self {
        Self::new(self.upper.saturating_add(other.upper), self.lower.saturating_add(other.lower))
    }

    fn plus(self, other: Self) -> Self {
        let upper = self.upper.saturating_add(other.lower).max(other.upper.saturating_add(self.lower));
        Self::new(upper, self.lower.saturating_add(other.lower))
    }

    const fn over(self, other: Self) -> Self {
        self.times(Self::new(other.lower, other.upper))
    }

    /// The quotient rule.
    const fn derived(self) -> Self {
        Self::new(self.upper.saturating_add(self.lower), self.lower.saturating_mul(2))
    }

    const fn scaled(self, factor: u64) -> Self {
        Self::new(self.upper.saturating_mul(factor), self.lower.saturating_mul(factor))
    }

    /// The determinant and the inverse of a matrix of such entries over their common denominator.
    const fn determinant(self, rows: u64) -> Self {
        self.scaled(rows)
    }

    const fn inverse(self, rows: u64) -> Self {
        let numerator = self.lower.saturating_add(self.upper.saturating_mul(rows.saturating_sub(1)));
        Self::new(numerator, self.upper.saturating_mul(rows))
    }
}

/// The world in one dimension, and what has been found of its definitions.
struct Bounds<'a> {
    world: &'a World,
    families: &'a Families,
    definitions: Vec<Degree>,
    /// The product of the orders of all roots.
    roots: u64,
}

/// A bound on the degree of the polynomial that vanishes where the two sides agree.
pub(super) fn bound(
    (left, right): (&Expression, &Expression),
    world: &World,
    needs: &Needs,
    families: &Families,
) -> u64 {
    let mut bounds = Bounds { world, families, definitions: Vec::new(), roots: 1 };
    for (definition, need) in world.definitions.iter().zip(&needs.definitions) {
        // What is not used is not known to be shallow.
        let degree = need.map_or(Degree::default(), |_| bounds.of(&definition.body));
        bounds.definitions.push(degree);
    }
    let (left, right) = (bounds.of(left), bounds.of(right));
    let mut difference = left.plus(right);
    if needs.sized {
        // Each order in the size of small fields is a derivative more.
        difference = (0..world.order_compared()).fold(difference, |degree, _| degree.derived());
    }
    difference.upper.saturating_mul(bounds.roots).max(1)
}

impl Bounds<'_> {
    fn of(&mut self, expression: &Expression) -> Degree {
        match expression {
            Expression::Number(_) | Expression::Imaginary | Expression::Dimension(_) | Expression::Delta(_) => {
                Degree::default()
            }
            Expression::Field { field, slots } => {
                let own = Degree::new(1, 0);
                let traceless = self.world.fields.get(*field).is_some_and(|field| field.traceless);
                let moved = slots.iter().fold(own, |degree, index| degree.times(self.moving(index.family)));
                if traceless {
                    moved.times(self.moving(slots.first().map_or(0, |index| index.family)).scaled(2))
                } else {
                    moved
                }
            }
            Expression::Coordinate(index) => Degree::new(1, 0).times(self.moving(index.family)),
            Expression::Defined { definition, slots } => {
                let own = self.group(*definition);
                slots.iter().fold(own, |degree, index| degree.times(self.moving(index.family)))
            }
            Expression::Metric { metric, .. } => self.metric(*metric).plus(self.inverse_metric(*metric)),
            Expression::Determinant(metric) => self.metric(*metric).determinant(self.rows(*metric)),
            Expression::Epsilon { metric, .. } => metric.map_or(Degree::default(), |metric| {
                self.roots = self.roots.saturating_mul(2);
                self.metric(metric)
                    .determinant(self.rows(metric))
                    .times(self.inverse_metric(metric).scaled(self.rows(metric)))
            }),
            Expression::Christoffel { metric, .. } => self.connection(*metric),
            Expression::Curvature { metric, kind, slots } => {
                let connection = self.connection(*metric);
                let riemann = connection.derived().plus(connection.scaled(2));
                let traced = riemann.times(self.inverse_metric(*metric)).times(self.metric(*metric));
                let own = match kind {
                    Curvature::Riemann | Curvature::Ricci => riemann,
                    Curvature::Scalar => traced,
                    Curvature::Einstein => riemann.plus(traced),
                    Curvature::Weyl => riemann.plus(traced.scaled(2)),
                };
                slots.iter().fold(own, |degree, index| degree.times(self.moving(index.family)))
            }
            Expression::Sum(terms) => terms.iter().map(|term| self.of(term)).reduce(Degree::plus).unwrap_or_default(),
            Expression::Product(factors) => {
                factors.iter().fold(Degree::default(), |degree, factor| degree.times(self.of(factor)))
            }
            Expression::Quotient(over, under) => self.of(over).over(self.of(under)),
            Expression::Power(of, exponent) => {
                let order = u64::try_from(exponent.denominator()).unwrap_or(u64::MAX);
                self.roots = self.roots.saturating_mul(order);
                let size = u64::try_from(exponent.numerator().unsigned_abs()).unwrap_or(u64::MAX);
                let power = self.of(of).scaled(size);
                if exponent.numerator() < 0 { Degree::default().over(power) } else { power }
            }
            Expression::Magnitude(of) => self.of(of),
            Expression::Function(_, of) => Degree::new(2, 2).times(self.of(of)),
            Expression::Partial(index, of) => self.of(of).derived().times(self.moving(index.family)),
            Expression::Covariant { metric, of, .. } => {
                let of = self.of(of);
                of.derived().plus(of.times(self.connection(*metric))).times(self.inverse_metric(*metric))
            }
            Expression::Vary { of, .. } => self.of(of).derived(),
            Expression::Det(of, _) => self.of(of).determinant(self.largest()),
            Expression::Inverse(of, ..) => self.of(of).inverse(self.largest()),
            Expression::Adjugate(of, ..) => self.of(of).determinant(self.largest()),
        }
    }

    /// The number of rows of a matrix is not known here: that of the largest family.
    fn largest(&self) -> u64 {
        (0..self.world.families.len()).filter_map(|family| self.families.size(family).ok()).max().unwrap_or(1) as u64
    }

    fn group(&self, definition: usize) -> Degree {
        let members = Families::group(self.world, definition);
        let degree = |member: &usize| self.definitions.get(*member).copied().unwrap_or_default();
        members.iter().map(degree).reduce(Degree::plus).unwrap_or_default()
    }

    fn metric(&self, metric: usize) -> Degree {
        match self.world.metrics.get(metric).map(|metric| &metric.values) {
            Some(MetricValues::Defined(definition)) => self.group(*definition),
            // Its values are products of two drawn matrices.
            _ => Degree::new(2, 0),
        }
    }

    fn rows(&self, metric: usize) -> u64 {
        let family = self.world.metrics.get(metric).map_or(0, |metric| metric.family);
        self.families.size(family).unwrap_or(1) as u64
    }

    fn inverse_metric(&self, metric: usize) -> Degree {
        self.metric(metric).inverse(self.rows(metric))
    }

    fn connection(&self, metric: usize) -> Degree {
        self.inverse_metric(metric).times(self.metric(metric).derived())
    }

    /// What bringing one slot of a family to the other level may add.
    fn moving(&self, family: usize) -> Degree {
        self.families
            .metric(family)
            .map_or(Degree::default(), |metric| self.inverse_metric(metric).plus(self.metric(metric)))
    }
}
