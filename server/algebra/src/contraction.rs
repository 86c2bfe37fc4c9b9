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

mod plan;

pub use plan::{Cost, EXACT_FACTORS, FACTORS_BUDGET, LABELS_BUDGET, Label, Plan};

use crate::jet::Order;
use crate::number::Number;
use crate::tensor::{Shape, Tensor, product, size, strides};
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
    let mut operands: Vec<Option<Operand<N>>> = Vec::with_capacity(2 * factors.len());
    for (number, (tensor, labels)) in factors.iter().enumerate() {
        let kept = plan.kept(number).ok_or(Trouble::Shape)?;
        operands.push(Some(Operand::of(tensor, labels, plan.order())?.without_repeats()?.summed(&kept)?));
    }
    for (step, (left, right)) in plan.steps().iter().enumerate() {
        let mut take = |number: usize| operands.get_mut(number).and_then(Option::take).ok_or(Trouble::Shape);
        let (left, right) = (take(*left)?, take(*right)?);
        let kept = plan.kept(factors.len() + step).ok_or(Trouble::Shape)?;
        operands.push(Some(left.multiplied(&right, &kept)?));
    }
    let last = operands.pop().flatten().ok_or(Trouble::Shape)?;
    last.arranged(plan.free())?.tensor.sound()
}

/// An array with a label on each slot.
struct Operand<N> {
    tensor: Tensor<N>,
    labels: Vec<Label>,
}

impl<N: Number> Operand<N> {
    fn of(tensor: &Tensor<N>, labels: &[Label], order: Order) -> Outcome<Self> {
        if labels.len() != tensor.lengths().len() {
            return Err(Trouble::Shape);
        }
        Ok(Self { tensor: tensor.truncated(order)?, labels: labels.to_vec() })
    }

    /// The diagonal over slots that carry the same label.
    fn without_repeats(self) -> Outcome<Self> {
        let mut distinct = self.labels.clone();
        distinct.sort_unstable();
        distinct.dedup();
        if distinct.len() == self.labels.len() { Ok(self) } else { self.arranged(&distinct) }
    }

    /// The sum over all labels but those that are kept.
    fn summed(self, kept: &[Label]) -> Outcome<Self> {
        let (mut order, gone): (Vec<_>, Vec<_>) = self.labels.iter().partition(|label| kept.contains(label));
        if gone.is_empty() {
            return Ok(self);
        }
        let count = gone.len();
        order.extend(gone);
        let Self { mut tensor, mut labels } = self.arranged(&order)?;
        tensor.sum_last(count);
        labels.truncate(labels.len() - count);
        Ok(Self { tensor, labels })
    }

    /// The slots in the order of these labels, each of which stands on a slot, and on several as their diagonal.
    /// `Shape` for a label that is not there or that has two ranges.
    fn arranged(&self, order: &[Label]) -> Outcome<Self> {
        if self.labels == order {
            return Ok(Self { tensor: self.tensor.clone(), labels: order.to_vec() });
        }
        let own = strides(self.tensor.lengths());
        let slot = |label: &Label| {
            let mut found = None;
            for ((other, length), step) in self.labels.iter().zip(self.tensor.lengths()).zip(&own) {
                match found {
                    _ if other != label => {}
                    None => found = Some((*length, *step)),
                    Some((known, _)) if known != *length => return Err(Trouble::Shape),
                    Some((_, steps)) => found = Some((*length, steps + step)),
                }
            }
            found.ok_or(Trouble::Shape)
        };
        let (lengths, steps): (Vec<_>, Vec<_>) =
            order.iter().map(slot).collect::<Outcome<Vec<_>>>()?.into_iter().unzip();
        Ok(Self { tensor: self.tensor.viewed(&lengths, &steps), labels: order.to_vec() })
    }

    /// The product, summed over the common labels that are not kept. Each label of one side alone is kept.
    fn multiplied(&self, other: &Self, kept: &[Label]) -> Outcome<Self> {
        let (common, rows): (Vec<Label>, Vec<_>) = self.labels.iter().partition(|label| other.labels.contains(label));
        let (batch, inner): (Vec<_>, Vec<_>) = common.into_iter().partition(|label| kept.contains(label));
        let columns: Vec<Label> = other.labels.iter().filter(|label| !self.labels.contains(label)).copied().collect();
        let left = self.arranged(&[&batch[..], &rows, &inner].concat())?.tensor;
        let right = other.arranged(&[&batch[..], &inner, &columns].concat())?.tensor;
        let (batch_lengths, left_rest) = split(left.lengths(), batch.len())?;
        let (row_lengths, inner_lengths) = split(left_rest, rows.len())?;
        let (_, column_lengths) = split(right.lengths(), batch.len() + inner.len())?;
        let count = |lengths: &[usize]| lengths.iter().product();
        let shape = Shape {
            batch: count(batch_lengths),
            rows: count(row_lengths),
            inner: count(inner_lengths),
            columns: count(column_lengths),
        };
        let order = left.common(&right)?;
        let lengths = [batch_lengths, row_lengths, column_lengths].concat();
        size(&lengths, left.ring().width(order))?;
        let data = product(left.ring().products(order), shape, &left.known_to(order), &right.known_to(order));
        Ok(Self { tensor: left.with(order, lengths, data), labels: [batch, rows, columns].concat() })
    }
}

fn split(lengths: &[usize], at: usize) -> Outcome<(&[usize], &[usize])> {
    lengths.split_at_checked(at).ok_or(Trouble::Shape)
}

#[cfg(test)]
mod tests;
