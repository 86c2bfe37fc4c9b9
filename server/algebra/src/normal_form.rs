//! The normal form of a product of tensors: one monomial for all those that the symmetries of the slots, the
//! renaming of dummies and the order of the factors make of it, and the sign between.
//!
//! The one idea: rearranging slots by their symmetries is a group `S`, renaming dummies and exchanging their ends
//! is a group `D`, and the monomials equal to a given one are its double coset `S w D`. The normal form is the
//! least word of the double coset, found slot by slot along the stabiliser chain of `S` (`search.rs`): only
//! arrangements whose slots so far are least are pursued. If a word is reached with both signs, the monomial is
//! zero.
//!
//! Sources: Butler, "Effective computation with group homomorphisms" and "Fundamental Algorithms for Permutation
//! Groups" (1982, 1991), on canonical representatives of double cosets; Portugal, "Algorithmic simplification of
//! tensor expressions" (1999), and Manssur, Portugal and Svaiter, "Group-theoretic approach for symbolic tensor
//! manipulation" (2002), on their use for dummies; McKay, "Practical graph isomorphism" (1981), for the colours
//! (`colours.rs`) that tell arrangements apart early (all from memory).
//!
//! Traps:
//! - Nothing is known here but slot symmetries: neither the cyclic identity of the Riemann tensor, nor the metric
//!   as a factor, nor that antisymmetrisation over more slots than dimensions is zero.
//! - Equal normal forms mean equal values. Different ones mean that the monomials differ for some fields in some
//!   dimension; in a low dimension they may still agree.
//! - The ends of a movable dummy have no level in a normal form; who writes it out gives them levels.

mod budget;
mod colours;
mod content;
mod group;
mod monomial;
mod search;
mod state;
mod sum;
mod vanishing;

pub use budget::{Budget, NORMAL_FORM_BUDGET, Unfinished};
pub use monomial::{Canonical, Factor, Label, Level, MONOMIAL_SLOTS, Malformed, Monomial, Parity, Slot};
pub use sum::{Bracket, Place, Sum, Term, exchange, normal_sum};
pub use vanishing::{Vanishing, vanishing_bracket, vanishing_pair};

use crate::symmetry::Sign;

/// What `normal_form` finds.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Outcome {
    /// The monomial equals its own negative.
    Zero,
    /// The monomial is `sign` times the form.
    Form {
        /// The sign between the monomial and its form.
        sign: Sign,
        /// Equal for two monomials exactly when they agree up to sign.
        form: Canonical,
    },
    /// The budget was used up before the end; nothing is known.
    OverBudget,
}

/// The normal form of a monomial. What it costs is taken from the budget.
pub fn normal_form(monomial: &Monomial, budget: &mut Budget) -> Outcome {
    search::normal_form(monomial, budget).unwrap_or(Outcome::OverBudget)
}

#[cfg(test)]
mod tests;
