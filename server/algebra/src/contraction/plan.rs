//! In which order factors are multiplied, two at a time, and what that costs.
//!
//! A set of labels is a number with one bit for each. The product of some factors keeps the labels that are free
//! or that a factor outside has too; multiplying two products visits all labels of both once. For up to
//! `EXACT_FACTORS` factors the cheapest plan is found over all subsets; beyond, the pair whose product shrinks
//! the whole most is multiplied next.

use crate::jet::{Order, Ring};
use crate::tensor::{NUMBERS_BUDGET, size};
use crate::trouble::{Budget, Outcome, Trouble};

/// Names an index; slots with equal labels run together.
pub type Label = u16;

/// The most factors for which all plans are compared: 3^8 pairs of subsets.
pub const EXACT_FACTORS: usize = 8;

/// The most factors of one contraction.
pub const FACTORS_BUDGET: usize = 64;

/// The most distinct labels of one contraction, one for each bit of a set.
pub const LABELS_BUDGET: usize = 128;

/// A set of labels, by their place in the list of all.
type Labels = u128;

/// What an evaluation takes.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Cost {
    /// Multiplications of numbers, at most: zeros are passed over.
    pub multiplications: u64,
    /// Numbers of the largest array on the way.
    pub numbers: usize,
}

/// A plan: which operands are multiplied, in order. Operands are numbered: the factors, then the products.
#[derive(Clone, Debug)]
pub struct Plan {
    steps: Vec<(usize, usize)>,
    /// For each operand the labels that it keeps.
    kept: Vec<Vec<Label>>,
    free: Vec<Label>,
    order: Order,
    cost: Cost,
}

impl Plan {
    /// The plan for factors, given by the ranges and labels of their slots, all known to `order` of a ring.
    pub(super) fn new(factors: &[(&[usize], &[Label])], free: &[Label], order: Order, ring: &Ring) -> Outcome<Self> {
        let network = Network::new(factors, free)?;
        let steps = if factors.len() <= EXACT_FACTORS { network.cheapest() } else { network.greedy() };
        let (cost, kept) = network.followed(&steps, ring.pairs(order), ring.width(order))?;
        let kept = kept.into_iter().map(|labels| network.names(labels)).collect();
        Ok(Self { steps, kept, free: free.to_vec(), order, cost })
    }

    /// What the evaluation takes.
    pub const fn cost(&self) -> Cost {
        self.cost
    }

    /// The operands that each step multiplies: factors from 0 on, then the results of the steps.
    pub fn steps(&self) -> &[(usize, usize)] {
        &self.steps
    }

    /// The labels of the result.
    pub fn free(&self) -> &[Label] {
        &self.free
    }

    /// The order that the result is known to.
    pub const fn order(&self) -> Order {
        self.order
    }

    /// The labels that an operand keeps; `Shape` if the plan knows no such operand.
    pub(super) fn kept(&self, operand: usize) -> Outcome<&[Label]> {
        self.kept.get(operand).map(Vec::as_slice).ok_or(Trouble::Shape)
    }
}

/// The factors as sets of labels.
struct Network {
    /// All labels, ascending, with their ranges.
    labels: Vec<(Label, usize)>,
    factors: Vec<Labels>,
    free: Labels,
}

impl Network {
    fn new(factors: &[(&[usize], &[Label])], free: &[Label]) -> Outcome<Self> {
        if factors.len() > FACTORS_BUDGET {
            return Err(Trouble::Budget(Budget::Factors));
        }
        if factors.is_empty() || factors.iter().any(|(lengths, labels)| lengths.len() != labels.len()) {
            return Err(Trouble::Shape);
        }
        let slots = factors.iter().flat_map(|(lengths, labels)| labels.iter().copied().zip(lengths.iter().copied()));
        let mut labels: Vec<(Label, usize)> = slots.collect();
        labels.sort_unstable();
        labels.dedup();
        if labels.windows(2).any(|pair| matches!(pair, [(a, _), (b, _)] if a == b)) {
            return Err(Trouble::Shape);
        }
        if labels.len() > LABELS_BUDGET {
            return Err(Trouble::Budget(Budget::Labels));
        }
        let set = |names: &[Label]| -> Outcome<Labels> {
            names.iter().try_fold(0, |set, name| {
                let place = labels.binary_search_by_key(name, |(label, _)| *label).map_err(|_| Trouble::Shape)?;
                Ok(set | 1 << place)
            })
        };
        let asked = set(free)?;
        if asked.count_ones() as usize != free.len() {
            return Err(Trouble::Shape);
        }
        let factors = factors.iter().map(|(_, labels)| set(labels)).collect::<Outcome<_>>()?;
        Ok(Self { factors, free: asked, labels })
    }

    /// The product of the ranges of some labels, saturating.
    fn range(&self, set: Labels) -> u64 {
        self.chosen(set).fold(1, |range: u64, (_, length)| range.saturating_mul(*length as u64))
    }

    fn names(&self, set: Labels) -> Vec<Label> {
        self.chosen(set).map(|(label, _)| *label).collect()
    }

    /// The members of a set, one for each bit.
    fn chosen(&self, mut set: Labels) -> impl Iterator<Item = &(Label, usize)> {
        std::iter::from_fn(move || {
            let place = set.trailing_zeros() as usize;
            set &= set.wrapping_sub(1);
            self.labels.get(place)
        })
    }

    /// What the product of a subset of the factors keeps.
    fn kept(&self, subset: usize) -> Labels {
        let union = |inside: bool| {
            let members =
                self.factors.iter().enumerate().filter(move |(place, _)| (subset >> place & 1 == 1) == inside);
            members.fold(0, |set, (_, labels)| set | labels)
        };
        union(true) & (self.free | union(false))
    }

    /// The cheapest plan, by dynamic programming over subsets.
    fn cheapest(&self) -> Vec<(usize, usize)> {
        let all = (1_usize << self.factors.len()) - 1;
        let kept: Vec<Labels> = (0..=all).map(|subset| self.kept(subset)).collect();
        let of = |subset: usize| kept.get(subset).copied().unwrap_or_default();
        // The cost of the cheapest way to a subset, and the part that is multiplied with the rest there.
        let mut best: Vec<(u64, usize)> = vec![(0, 0); all + 1];
        for subset in 1..=all {
            if subset.is_power_of_two() {
                continue;
            }
            // Where all costs saturate, any split will do: what follows the plan refuses it.
            let mut found = (u64::MAX, usize::MAX);
            let mut part = (subset - 1) & subset;
            // Each split once, the part being the larger number.
            while part > subset ^ part {
                let rest = subset ^ part;
                let cost = |side: usize| best.get(side).map_or(u64::MAX, |(cost, _)| *cost);
                let parts = cost(part).saturating_add(cost(rest));
                // What the parts cost alone rules most splits out.
                if parts <= found.0 {
                    found = found.min((parts.saturating_add(self.range(of(part) | of(rest))), part));
                }
                part = (part - 1) & subset;
            }
            best.iter_mut().skip(subset).take(1).for_each(|entry| *entry = found);
        }
        self.unfolded(all, &best)
    }

    /// The steps that lead to a subset, parts before what needs them.
    fn unfolded(&self, all: usize, best: &[(u64, usize)]) -> Vec<(usize, usize)> {
        // Splits from the whole down; read backwards, each part is made before it is used.
        let mut splits = Vec::new();
        let mut pending = vec![all];
        while let Some(subset) = pending.pop() {
            let Some((_, part)) = best.get(subset).filter(|(_, part)| *part > 0) else { continue };
            splits.push((subset, *part));
            pending.extend([*part, subset ^ part]);
        }
        splits.reverse();
        let number = |subset: usize| {
            let made = splits.iter().position(|(whole, _)| *whole == subset).map(|step| self.factors.len() + step);
            made.unwrap_or(subset.trailing_zeros() as usize)
        };
        splits.iter().map(|(subset, part)| (number(*part), number(subset ^ part))).collect()
    }

    /// Always the pair whose product has the fewest components more than the two had, the cheaper one of such.
    fn greedy(&self) -> Vec<(usize, usize)> {
        let mut steps = Vec::new();
        let mut living: Vec<(usize, Labels)> = self.factors.iter().copied().enumerate().collect();
        while let Some((place, other, kept)) = self.best_pair(&living) {
            // The later one first, so that the earlier one keeps its place.
            let ((right, _), (left, _)) = (living.remove(other), living.remove(place));
            living.push((self.factors.len() + steps.len(), kept));
            steps.push((left, right));
        }
        steps
    }

    /// The places of the two operands to multiply next, and what their product keeps; nothing for the last one.
    fn best_pair(&self, living: &[(usize, Labels)]) -> Option<(usize, usize, Labels)> {
        let pairs = (0..living.len()).flat_map(|place| (place + 1..living.len()).map(move |other| (place, other)));
        let priced = pairs.filter_map(|(place, other)| {
            let (left, right) = (living.get(place)?.1, living.get(other)?.1);
            let outside = living.iter().enumerate().filter(|(third, _)| *third != place && *third != other);
            let needed = outside.fold(self.free, |set, (_, (_, labels))| set | labels);
            let kept = (left | right) & needed;
            let range = |set| i128::from(self.range(set));
            let growth = range(kept) - range(left) - range(right);
            Some(((growth, self.range(left | right)), (place, other, kept)))
        });
        priced.min_by_key(|(price, _)| *price).map(|(_, pair)| pair)
    }

    /// What a plan costs and what each operand keeps, `pairs` multiplications for a product of two jets of so
    /// many coefficients (`width`).
    fn followed(&self, steps: &[(usize, usize)], pairs: u64, width: usize) -> Outcome<(Cost, Vec<Labels>)> {
        let single = |place: usize| if self.factors.len() > 1 { self.alone(place) } else { self.free };
        let mut kept: Vec<Labels> = (0..self.factors.len()).map(single).collect();
        let mut used = vec![false; self.factors.len() + steps.len()];
        let mut cost = Cost::default();
        for (left, right) in steps {
            let labels = |operand: usize| kept.get(operand).copied().ok_or(Trouble::Shape);
            let union = labels(*left)? | labels(*right)?;
            for operand in [*left, *right] {
                used.iter_mut().skip(operand).take(1).for_each(|used| *used = true);
            }
            let living = kept.iter().zip(&used).filter(|(_, used)| !**used);
            let needed = living.fold(self.free, |set, (labels, _)| set | labels);
            cost.multiplications = cost.multiplications.saturating_add(self.range(union).saturating_mul(pairs));
            cost.numbers = cost.numbers.max(self.numbers(union & needed, width)?);
            kept.push(union & needed);
        }
        Ok((cost, kept))
    }

    /// What a factor keeps once the labels are summed that it alone has.
    fn alone(&self, place: usize) -> Labels {
        let others = self.factors.iter().enumerate().filter(|(other, _)| *other != place);
        let needed = others.fold(self.free, |set, (_, labels)| set | labels);
        self.factors.get(place).copied().unwrap_or_default() & needed
    }

    fn numbers(&self, set: Labels, width: usize) -> Outcome<usize> {
        let range = usize::try_from(self.range(set)).unwrap_or(usize::MAX);
        size(&[range.min(NUMBERS_BUDGET + 1)], width)
    }
}
