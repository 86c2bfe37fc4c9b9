//! The conventions language: what an author declares, one sentence at a time.
//!
//! `read_sentence` turns one sentence into plain data; what it means together with others is the checker's business.
//! The language is small and closed: `FORMS` lists every form of sentence with an example, and what fits none of
//! them is an `Unreadable` that knows the place where reading stopped and the nearest form. Tensors in sentences
//! (`\tilde g_{ij}`, `Gamma^i_jk`) are read by the reader of formulas, so that they look as they do in the text.

mod definition;
mod forms;
mod grammar;
mod reading;
mod sentence;
mod words;

#[cfg(test)]
mod tests;

use compact_str::CompactString;

use crate::span::Span;
use crate::tree::{Atom, Factor, ItemKind, Level, Statement};

pub use forms::{FORMS, Form};
pub use reading::{Unreadable, read_sentence, read_sentences};

/// A sentence, read.
#[derive(Clone, Debug, PartialEq)]
pub enum Sentence {
    /// `i j k run from 1 to 3`: an index family.
    Family {
        /// Its letters.
        letters: Vec<Name>,
        /// What they run over.
        range: Range,
    },
    /// `n is the dimension`, `D is the dimension of a b c`.
    Dimension {
        /// The letter that stands for the dimension in formulas.
        letter: Name,
        /// Letters of the families whose dimension it is; none: of every family without a range of its own.
        of: Vec<Name>,
    },
    /// `i j k are cartesian`: levels do not matter.
    Cartesian(Vec<Name>),
    /// `i j k are the spatial part of \mu \nu`.
    Spatial {
        /// The letters of the part.
        letters: Vec<Name>,
        /// Letters of the family that it is part of.
        of: Vec<Name>,
    },
    /// `A B are frame indices raised by \eta`.
    Frame {
        /// Its letters.
        letters: Vec<Name>,
        /// The kernel of the metric that moves them, if one is named.
        raised_by: Option<Name>,
    },
    /// `g_{ij} is the metric`, `\eta_{ab} is the metric, constant, signature - + + +`.
    Metric {
        /// The metric with its two slots.
        tensor: Tensor,
        /// Whether its components are said to be constant.
        constant: bool,
        /// The signs of the signature in order, `true` for `+`; empty if not said.
        signature: Vec<bool>,
    },
    /// `\tilde g raises \tilde A`: which metric moves which kernels' indices.
    Raises {
        /// The kernel of the metric.
        metric: Name,
        /// The kernels.
        kernels: Vec<Name>,
    },
    /// `x^i are the coordinates`.
    Coordinates(Tensor),
    /// `t r \theta \phi are the coordinates`, `r is a coordinate`: names of components, not letters to sum.
    CoordinateNames(Vec<Name>),
    /// `B is a label`: no index wherever it stands in a script.
    Labels(Vec<Name>),
    /// `\Gamma^i_{jk} is the Christoffel symbol of g`.
    Christoffel {
        /// The symbol with its three slots.
        tensor: Tensor,
        /// The kernel of the metric; nothing: the metric in force.
        of: Option<Name>,
    },
    /// `D is the covariant derivative of \gamma`.
    CovariantDerivative {
        /// The kernel of the derivative.
        kernel: Name,
        /// The kernel of the metric; nothing: the metric in force.
        of: Option<Name>,
    },
    /// `T_{ij} is symmetric`, `S_{ijk} is antisymmetric in i j`.
    Symmetry {
        /// The tensors.
        tensors: Vec<Tensor>,
        /// Whether an exchange changes the sign.
        antisymmetric: bool,
        /// Letters of the slots; none: all of them.
        slots: Vec<Name>,
    },
    /// `h_{ij} is traceless`.
    Traceless(Vec<Tensor>),
    /// `R_{ijkl} is the Riemann tensor of g`.
    Curvature {
        /// The tensor with its slots; none for the scalar.
        tensor: Tensor,
        /// Which.
        kind: Curvature,
        /// The kernel of the metric; nothing: the metric in force.
        of: Option<Name>,
    },
    /// `\phi is a scalar`, `A B are matrices`, `h is small`.
    Kind {
        /// What is spoken of.
        tensors: Vec<Tensor>,
        /// What it is.
        kind: Kind,
    },
    /// `R^i_{jkl} := ...`: a definition, `=` with the left side new.
    Definition(Box<Statement>),
    /// `skip this`.
    Skip,
    /// `allow RULE here`, `allow RULE in this file`.
    Allow {
        /// The rule as written.
        rule: Name,
        /// Only the next formula.
        here: bool,
    },
    /// `check this`, `check this step by step`, `check this using (eq:gamma), (eq:compat)`.
    Check {
        /// Labels without their brackets.
        using: Vec<Name>,
    },
    /// `derivations are checked`.
    DerivationsAreChecked,
}

/// A letter, a kernel or another name in a sentence.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Name {
    /// As the reader of formulas spells it: `\mu`, `\tilde g`, `i'`.
    pub text: CompactString,
    /// Where it stands.
    pub span: Span,
}

/// A kernel with or without slots, as it is written in formulas.
#[derive(Clone, Debug, PartialEq)]
pub struct Tensor {
    /// Kernel and scripts; the atom is a kernel.
    pub factor: Factor,
    /// Where it stands.
    pub span: Span,
}

impl Tensor {
    /// Its kernel as the reader of formulas spells it: `\tilde g`, `\Gamma`.
    pub fn name(&self) -> &str {
        match &self.factor.atom {
            Atom::Kernel(kernel) => &kernel.name,
            _ => "",
        }
    }

    /// The letters of its scripts in the order written; numbers, labels and marks are no slots.
    pub fn slots(&self) -> Vec<Slot> {
        let items = self.factor.scripts.iter().flat_map(|script| script.items.iter().map(|item| (script.level, item)));
        let slot = |(level, item): (Level, &crate::tree::Item)| match &item.kind {
            ItemKind::Letter(letter) => Some(Slot { letter: letter.clone(), level, span: item.span }),
            _ => None,
        };
        items.filter_map(slot).collect()
    }

    /// Whether it carries no slots; a label (`h_{\rm TT}`) is none.
    pub fn is_bare(&self) -> bool {
        self.slots().is_empty()
    }
}

/// A slot of a tensor in a sentence.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Slot {
    /// Its letter.
    pub letter: CompactString,
    /// Its level.
    pub level: Level,
    /// The letter.
    pub span: Span,
}

/// What an index family runs over.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Range {
    /// `from 1 to 3`, `from 0 to n-1`: both ends are members.
    Between(u32, Bound),
    /// `over 4 dimensions`, `over n dimensions`: a range whose members have no names.
    Size(Bound),
    /// `over t r \theta \phi`: the members by name.
    Members(Vec<Name>),
}

/// The end of a range, or its size.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Bound {
    /// A number.
    Number(u32),
    /// A letter less a number: `n`, `n-1`.
    Letter(Name, u32),
}

/// Tensors of curvature.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Curvature {
    /// Four slots.
    Riemann,
    /// Two slots.
    Ricci,
    /// No slots.
    Scalar,
    /// Two slots.
    Einstein,
    /// Four slots, without traces.
    Weyl,
}

/// What a kernel is.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Kind {
    /// A field without slots.
    Scalar,
    /// One slot; nothing else is known of it.
    Vector,
    /// Slots as written; nothing else is known of it.
    Tensor,
    /// Does not depend on position.
    Constant,
    /// Written without indices; det, tr, inverse, transpose apply.
    Matrix,
    /// Of first order: products of small kernels are dropped.
    Small,
    /// Its factors keep their order.
    NonCommuting,
    /// A variation: a derivation that commutes with partial derivatives.
    Variation,
    /// A derivation along a parameter (a dot, a prime).
    ParameterDerivative,
    /// The epsilon as a tensor.
    EpsilonTensor,
    /// The epsilon as a symbol of constants 0, 1, -1.
    EpsilonSymbol,
}
