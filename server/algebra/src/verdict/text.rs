//! Reasons in words, as they follow "undecided: " and "differs, not shown: ". No final stop.

use std::fmt;

use super::{Reason, UNKNOWNS_BUDGET, Unshown};
use crate::contraction::{FACTORS_BUDGET, LABELS_BUDGET};
use crate::evaluation::{DEPTH_BUDGET, TERMS_BUDGET};
use crate::jet::{MONOMIALS_BUDGET, VARIABLES_BUDGET};
use crate::tensor::{NUMBERS_BUDGET, SLOTS_BUDGET};
use crate::trouble::Budget;

impl fmt::Display for Reason {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Self::NoDimension => "there is no dimension to try it in",
            Self::Undefined => "a denominator is 0 or a root does not exist at every point tried",
            Self::Budget(budget) => return budgeted(*budget, f),
            Self::Stopped => "there was no time",
            Self::Function => "a function of a sum or a product has no exact value here",
            Self::Functions => {
                "the sides contain functions whose values may be related in ways that are not known here"
            }
            Self::Signs => "the sign of a sum under a root or an absolute value is not known here",
            Self::Uncertain => "the sides agree at every point tried, but are too complicated for that to tell",
            Self::Shape => "the sides or their terms do not fit together",
            Self::GivenUnmet(label) => return write!(f, "no fields were found for which {label} holds"),
        })
    }
}

fn budgeted(budget: Budget, f: &mut fmt::Formatter<'_>) -> fmt::Result {
    let (what, most) = match budget {
        Budget::Monomials => ("terms of the Taylor polynomial of a field", MONOMIALS_BUDGET),
        Budget::Variables => ("variables", VARIABLES_BUDGET),
        Budget::Slots => ("indices of one array", SLOTS_BUDGET),
        Budget::Numbers => ("numbers in one array", NUMBERS_BUDGET),
        Budget::Factors => ("factors in one product", FACTORS_BUDGET),
        Budget::Labels => ("letters in one product", LABELS_BUDGET),
        Budget::Depth => ("levels of nesting", DEPTH_BUDGET),
        Budget::Terms => ("terms in the argument of a function", TERMS_BUDGET),
        Budget::Unknowns => ("coefficients to solve a given for", UNKNOWNS_BUDGET),
        Budget::Multiplications => return f.write_str("one product takes too many multiplications"),
        Budget::Total => return f.write_str("it takes too many multiplications"),
    };
    write!(f, "it takes more than {most} {what}")
}

impl fmt::Display for Unshown {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Unknown(names) => write!(f, "it is not said what {} is", names.join(", ")),
            Self::Givens(labels) => write!(f, "it may still follow from {}", labels.join(", ")),
            Self::NoWitness => f.write_str("no small rational witness was found"),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn reasons_name_their_budgets_and_fields() {
        assert_eq!(Reason::Budget(Budget::Factors).to_string(), "it takes more than 64 factors in one product");
        let unknown = Unshown::Unknown(vec!["J".to_owned(), "q".to_owned()]);
        assert_eq!(unknown.to_string(), "it is not said what J, q is");
    }
}
