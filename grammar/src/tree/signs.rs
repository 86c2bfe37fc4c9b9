//! The signs that stand between the parts of a formula: plus and minus, products, relations.
//!
//! Each keeps which sign it was, so that a formula can be evaluated and written again; the reader of balance
//! mostly asks for the coarse kind alone. Spellings are those of LaTeX, with the backslash where there is one.

use compact_str::CompactString;

use crate::span::Span;

/// The sign before a term.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub struct Sign {
    /// Which it is; for a run of signs, their product.
    pub kind: SignKind,
    /// The sign, or the whole run.
    pub span: Span,
}

/// Plus, minus or either.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
pub enum SignKind {
    /// `+`
    #[default]
    Plus,
    /// `-`
    Minus,
    /// `\pm`
    PlusMinus,
    /// `\mp`
    MinusPlus,
}

impl SignKind {
    /// The product of two signs. All `\pm` and `\mp` of a formula mean one choice, so that `\pm\mp` is a minus.
    pub const fn times(self, other: Self) -> Self {
        use SignKind::{Minus, MinusPlus, Plus, PlusMinus};
        match (self, other) {
            (Plus, sign) | (sign, Plus) => sign,
            (Minus, Minus) | (PlusMinus, PlusMinus) | (MinusPlus, MinusPlus) => Plus,
            (PlusMinus, MinusPlus) | (MinusPlus, PlusMinus) => Minus,
            (Minus, PlusMinus) | (PlusMinus, Minus) => MinusPlus,
            (Minus, MinusPlus) | (MinusPlus, Minus) => PlusMinus,
        }
    }

    /// The sign in LaTeX.
    pub const fn latex(self) -> &'static str {
        match self {
            Self::Plus => "+",
            Self::Minus => "-",
            Self::PlusMinus => "\\pm",
            Self::MinusPlus => "\\mp",
        }
    }
}

/// How a factor is joined to the one before.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
pub enum Joint {
    /// Side by side.
    #[default]
    Beside,
    /// A sign of multiplication: `\cdot`, `\times`, `\otimes`, ...
    Times(Product),
    /// A slash: the factor is below the line.
    Slash,
    /// A sign between sets or maps: `\cap`, `\circ`; its LaTeX spelling.
    Set(&'static str),
    /// A comma or a relation inside braces, where one value is asked for: no product.
    Apart,
}

/// A sign of multiplication.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Product {
    /// `\cdot` and kin.
    Dot,
    /// `\times`
    Cross,
    /// `\otimes`
    Tensor,
    /// `\wedge`
    Wedge,
    /// `*`
    Star,
    /// `:`, which contracts two pairs of slots.
    Colon,
    /// Any other, by its LaTeX spelling.
    Other(&'static str),
}

impl Product {
    /// The sign in LaTeX.
    pub const fn latex(self) -> &'static str {
        match self {
            Self::Dot => "\\cdot",
            Self::Cross => "\\times",
            Self::Tensor => "\\otimes",
            Self::Wedge => "\\wedge",
            Self::Star => "*",
            Self::Colon => ":",
            Self::Other(sign) => sign,
        }
    }
}

/// A sign inside a script that joins what stands around it.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Operator {
    /// A product or division sign.
    Joint(Joint),
    /// `\over`: all before it is above the line, all after it below.
    Over,
    /// A row, a cell, a wide blank: layout, or a list.
    Break,
}

/// A relation sign.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Relation {
    /// How it compares.
    pub kind: RelationKind,
    /// The sign in LaTeX: `=`, `:=`, `\equiv`, `\approx`. `\not` stands for any negated sign.
    pub sign: CompactString,
    /// Where it stands.
    pub span: Span,
}

/// What a relation asks of its sides.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum RelationKind {
    /// `=`, `\equiv`, `:=` and kin: the sides have the same free indices.
    Equal,
    /// `\sim`, `\approx`, ...: as equal, if both sides carry free indices.
    Loose,
    /// `<`, `\neq`, ...: as equal, if both sides carry two free indices or more, since mostly they compare numbers.
    Order,
    /// Arrows, membership: nothing is compared.
    Free,
}

/// What an author says by a relation.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Claim {
    /// `=`, `\equiv`: the sides have the same value.
    Equality,
    /// `:=`, `\coloneqq`: the left side is defined by the right one.
    Definition,
    /// `=:`, `\eqqcolon`: the right side is defined by the left one.
    DefinitionOfRight,
    /// Anything else: `\doteq` (in some chart, or nearly), `\stackrel{!}{=}` (demanded), `\stackrel{?}{=}` (asked),
    /// `\approx`, `<`, `\to`.
    Other,
}

impl Relation {
    /// What it claims.
    pub fn claim(&self) -> Claim {
        match self.sign.as_str() {
            "=" | "\\equiv" | "\\xlongequal" => Claim::Equality,
            ":=" | "\\coloneqq" | "\\coloneq" | "\\colonequals" | "\\Coloneqq" | "\\triangleq" | "\\defeq" => {
                Claim::Definition
            }
            "=:" | "\\eqqcolon" | "\\eqcolon" => Claim::DefinitionOfRight,
            "\\eqdef" => Claim::Definition,
            _ => Claim::Other,
        }
    }
}
