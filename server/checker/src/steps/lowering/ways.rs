//! What is not written in a formula, and the ways in which it may be read.
//!
//! A side is lowered in the likeliest way, and notes which other ways there are; the caller tries those too, and a step
//! that holds in one of them only is told as such.

use indexwise_algebra::expression::{Expression, Filling, Index};
use indexwise_algebra::geometry::Level;

use super::Lowering;

/// How what is not written is read.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Way {
    /// A derivative acts on the next factor, stacked indices come as they are written, and `\delta g^{ij}` is the change
    /// of the inverse.
    Near,
    /// A derivative acts on all factors after it.
    Far,
    /// Of stacked indices the lower ones come first where the upper ones are written first, and the other way round.
    Turned,
    /// `\delta g^{ij}` is the change of the metric, raised.
    Raised,
    /// A function of matrices without brackets takes all factors after it.
    Wide,
    /// As `Far` and `Wide`.
    FarAndWide,
}

impl Way {
    /// Whether functions of matrices take all factors after them.
    pub(super) const fn is_wide(self) -> bool {
        matches!(self, Self::Wide | Self::FarAndWide)
    }

    /// What a step depends on that holds in one way only, and what helps.
    pub const fn words(self) -> &'static str {
        match self {
            Self::Near | Self::Far => "how far a derivative reaches: put brackets",
            Self::Wide | Self::FarAndWide => "how far a function or a derivative reaches: put brackets",
            Self::Turned => "which of stacked indices comes first: put one after the other, as in T^a{}_b",
            Self::Raised => {
                "whether \\delta g^{ab} is the change of the inverse metric or that of the metric, raised: name one of them"
            }
        }
    }
}

impl Lowering<'_, '_, '_> {
    /// Notes that something could be read in another way.
    pub(super) fn may_be(&mut self, way: Way) {
        if !self.others.contains(&way) {
            self.others.push(way);
        }
    }

    /// A change to first order; that of an inverse metric may be meant as that of the metric, raised.
    pub(super) fn varied(&mut self, parameter: usize, of: Expression) -> Expression {
        if let Expression::Metric { metric, slots } = &of
            && slots.iter().all(|index| index.level == Level::Up)
        {
            self.may_be(Way::Raised);
            if self.way == Way::Raised {
                let lower = slots.map(|slot| {
                    let filling = Filling::Label(self.fresh());
                    Index { filling, level: Level::Down, ..slot }
                });
                let change = Expression::Metric { metric: *metric, slots: lower };
                let raised = slots.iter().zip(lower).map(|(slot, lower)| Expression::Metric {
                    metric: *metric,
                    slots: [*slot, Index { level: Level::Up, ..lower }],
                });
                let mut parts: Vec<Expression> = raised.collect();
                parts.push(Expression::Vary { parameter, of: Box::new(change) });
                return Expression::Product(parts);
            }
        }
        Expression::Vary { parameter, of: Box::new(of) }
    }
}
