//! How far a jet is known, and the variables it is known in.

/// Up to which degrees a jet is known, inclusive: in the base variables together, in the small ones together.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
pub struct Order {
    /// In the base variables.
    pub base: usize,
    /// In the small variables.
    pub small: usize,
}

impl Order {
    /// Up to this degree in the base variables, and 0 in the small ones.
    pub const fn of_base(base: usize) -> Self {
        Self { base, small: 0 }
    }

    /// What two jets of these orders know in common.
    pub fn least(self, other: Self) -> Self {
        Self { base: self.base.min(other.base), small: self.small.min(other.small) }
    }

    /// The highest total degree, above which powers of what has no constant term vanish.
    pub const fn total(self) -> usize {
        self.base + self.small
    }

    /// The order of a derivative, if there is one.
    pub(crate) fn lowered(self, variable: Variable) -> Option<Self> {
        match variable {
            Variable::Base(_) => Some(Self { base: self.base.checked_sub(1)?, ..self }),
            Variable::Small(_) => Some(Self { small: self.small.checked_sub(1)?, ..self }),
        }
    }

    /// Whether a jet of this order knows all that one of the other order does.
    pub const fn covers(self, other: Self) -> bool {
        self.base >= other.base && self.small >= other.small
    }
}

/// A variable of a ring, zero-based.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Variable {
    /// A coordinate.
    Base(usize),
    /// A parameter of a variation, or a size.
    Small(usize),
}
