//! Why an exact computation has no result: the outcomes that every other module of this crate shares.
//!
//! None of them is a bug or the end of a session. `ZeroDivisor` and `NoRoot` belong to a point and go away at
//! another one, `Overflow` goes away with smaller numbers, the others belong to the question that was asked.

/// The value, or why there is none.
pub type Outcome<T> = Result<T, Trouble>;

/// Why there is no value.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Trouble {
    /// A divisor, or what stands for one (a determinant, the argument of a logarithm), is 0 at the point.
    ZeroDivisor,
    /// A radicand has no root among the numbers, or a sign that does not exist was asked for.
    NoRoot,
    /// A fraction does not fit into the integers that it is made of.
    Overflow,
    /// More derivatives were asked for than the Taylor polynomials hold.
    Order,
    /// The arguments do not fit together: number of slots, their ranges, labels, or rings that differ.
    Shape,
    /// A function of an argument at which it has no exact value.
    Function,
    /// Whoever asked wants no answer any more: time is up.
    Stopped,
    /// A coefficient such as `1/(n - 2)` does not exist in this dimension.
    Dimension,
    /// The question is too large; which budget it would pass.
    Budget(Budget),
}

/// What a budget counts.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Budget {
    /// Monomials of a ring of Taylor polynomials (`jet::MONOMIALS_BUDGET`).
    Monomials,
    /// Variables of a ring of Taylor polynomials (`jet::VARIABLES_BUDGET`).
    Variables,
    /// Slots of one array (`tensor::SLOTS_BUDGET`).
    Slots,
    /// Numbers of one array, components times coefficients (`tensor::NUMBERS_BUDGET`).
    Numbers,
    /// Multiplications of numbers in one contraction or one characteristic polynomial
    /// (`contraction::MULTIPLICATIONS_BUDGET`, or the caller's).
    Multiplications,
    /// Multiplications of numbers for one claim (`verdict::Limits`).
    Total,
    /// How deep an expression is nested (`evaluation::DEPTH_BUDGET`).
    Depth,
    /// Terms of the argument of a function that is expanded (`evaluation::TERMS_BUDGET`).
    Terms,
    /// Coefficients that a given is solved for (`verdict::UNKNOWNS_BUDGET`).
    Unknowns,
    /// Factors of one contraction (`contraction::FACTORS_BUDGET`).
    Factors,
    /// Distinct labels of one contraction (`contraction::LABELS_BUDGET`).
    Labels,
}

impl Trouble {
    /// Whether another draw of the fields may do better.
    pub const fn is_bad_luck(self) -> bool {
        matches!(self, Self::ZeroDivisor | Self::NoRoot | Self::Overflow)
    }
}
