//! Products of many tensors with labelled slots, summed over every label that is not free: planned, then
//! evaluated.
//!
//! The rule is that of NumPy's `einsum`: a label may stand any number of times, on one factor or on several; the
//! sum runs over all labels that are not asked for. The one idea: the factors are multiplied two at a time, a
//! label being summed as soon as no factor left needs it, so that the cost is that of the worst pair and not of
//! the product of all ranges. In which order is the plan (`plan.rs`): the cheapest of all for few factors, a
//! greedy choice for many. The cost is known before anything is multiplied.
//!
//! Levels are none of this module's business, nor are signs: it sums.
//!
//! Source: Pfeifer, Haegeman and Verstraete, "Faster identification of optimal contraction sequences for tensor
//! networks" (2014), on the search over subsets (from memory).

mod operand;
mod plan;

use operand::Operand;
pub use plan::{Cost, EXACT_FACTORS, FACTORS_BUDGET, LABELS_BUDGET, Label, Plan};

use crate::number::Number;
use crate::tensor::Tensor;
use crate::trouble::{Budget, Outcome, Trouble};

/// The most multiplications of numbers of a contraction whose caller sets no other budget.
pub const MULTIPLICATIONS_BUDGET: u64 = 200_000_000;

/// A factor: an array, and the label of each of its slots.
pub type Factor<'a, N> = (&'a Tensor<N>, &'a [Label]);

/// The sum over all labels that are not in `free`, whose slots the result has in that order, within
/// `MULTIPLICATIONS_BUDGET`. See `planned` and `evaluated`.
pub fn contract<N: Number>(factors: &[Factor<N>], free: &[Label]) -> Outcome<Tensor<N>> {
    evaluated(factors, &planned(factors, free)?, MULTIPLICATIONS_BUDGET)
}

/// How the factors are best multiplied, and what it costs.
///
/// `Shape` if there are no factors, if a label has two ranges, is free twice or is free and stands nowhere, or if
/// rings differ; a budget for too many factors or labels.
pub fn planned<N: Number>(factors: &[Factor<N>], free: &[Label]) -> Outcome<Plan> {
    let (first, _) = factors.first().ok_or(Trouble::Shape)?;
    let order = factors.iter().try_fold(first.order(), |order, (tensor, _)| Ok(order.least(first.common(tensor)?)))?;
    let slots: Vec<_> = factors.iter().map(|(tensor, labels)| (tensor.lengths(), *labels)).collect();
    Plan::new(&slots, free, order, first.ring())
}

/// The contraction, as planned for these very factors.
///
/// A budget if the plan costs more than `budget` multiplications or an array on the way passes
/// `tensor::NUMBERS_BUDGET`; `Overflow` if a number does not fit.
pub fn evaluated<N: Number>(factors: &[Factor<N>], plan: &Plan, budget: u64) -> Outcome<Tensor<N>> {
    if plan.cost().multiplications > budget {
        return Err(Trouble::Budget(Budget::Multiplications));
    }
    let order = plan.order();
    let mut operands: Vec<Option<Operand<N>>> = Vec::with_capacity(2 * factors.len());
    for (number, (tensor, labels)) in factors.iter().enumerate() {
        operands.push(Some(Operand::of(tensor, labels, order)?.summed(plan.kept(number)?)));
    }
    let (first, _) = factors.first().ok_or(Trouble::Shape)?;
    for (step, (left, right)) in plan.steps().iter().enumerate() {
        let mut take = |number: usize| operands.get_mut(number).and_then(Option::take).ok_or(Trouble::Shape);
        let (left, right) = (take(*left)?, take(*right)?);
        let kept = plan.kept(factors.len() + step)?;
        let wanted = (step + 1 == plan.steps().len()).then_some(plan.free());
        operands.push(Some(left.multiplied(&right, kept, wanted, (first.ring(), order))?));
    }
    let (lengths, data) = operands.pop().flatten().ok_or(Trouble::Shape)?.finished(plan.free())?;
    first.with(order, lengths, data).sound()
}

#[cfg(test)]
mod tests;
