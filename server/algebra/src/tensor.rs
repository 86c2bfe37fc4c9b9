//! Tensors: dense arrays of jets with slots, each slot with its own range.
//!
//! A slot has a length (the dimension of its index family) and no level: what is up or down is known to whoever
//! asks. Indices are zero-based. All components of an array are known to the same order, and an array of plain
//! numbers is one of order 0.
//!
//! Permutations act on slots: slot `s` of `permuted(&order)` is slot `order[s]` of the source, as in NumPy's
//! `transpose`.
//!
//! Traps: data is kept by monomial first, then by component in row-major order, for the sake of `product.rs`;
//! `get` gathers a component. Products of many arrays belong to `contraction`, which plans them; `outer` is for
//! two.

mod product;
mod strides;

use std::borrow::Cow;
use std::sync::Arc;

pub(crate) use product::{Shape, product};
pub(crate) use strides::{Walk, places, strides};

use crate::jet::{Jet, Order, Ring, Variable, all_zero};
use crate::number::{Number, at};
use crate::trouble::{Budget, Outcome, Trouble};

/// The most numbers of one array, components times coefficients: 32 MB of residues.
pub const NUMBERS_BUDGET: usize = 1 << 22;

/// The most slots of one array.
pub const SLOTS_BUDGET: usize = 32;

/// A dense array of jets.
///
/// Invariant: every length is positive, the order is covered by the highest of the ring, and there are as many
/// numbers as the product of all lengths times the monomials up to the order, at most `NUMBERS_BUDGET`.
#[derive(Clone, Debug)]
pub struct Tensor<N> {
    ring: Arc<Ring>,
    order: Order,
    lengths: Vec<usize>,
    /// For each monomial a block, in it the components in row-major order.
    data: Vec<N>,
}

impl<N: Number> Tensor<N> {
    /// Zeros, known to an order.
    pub fn zero(ring: &Arc<Ring>, order: Order, lengths: &[usize]) -> Outcome<Self> {
        if !ring.top().covers(order) {
            return Err(Trouble::Order);
        }
        let size = size(lengths, ring.width(order))?;
        Ok(Self { ring: ring.clone(), order, lengths: lengths.to_vec(), data: vec![N::ZERO; size] })
    }

    /// An array by its components, in row-major order; known to the order that all of them are known to.
    /// `Shape` if their number does not fit, or if there are none.
    pub fn from_jets(lengths: &[usize], jets: &[Jet<N>]) -> Outcome<Self> {
        let first = jets.first().ok_or(Trouble::Shape)?;
        let order = jets.iter().fold(first.order(), |order, jet| order.least(jet.order()));
        let mut tensor = Self::zero(first.ring(), order, lengths)?;
        let size = tensor.size();
        if jets.len() != size || jets.iter().any(|jet| !jet.ring().fits(first.ring())) {
            return Err(Trouble::Shape);
        }
        for (place, jet) in jets.iter().enumerate() {
            let numbers = jet.truncated(order)?;
            let entries = tensor.data.iter_mut().skip(place).step_by(size);
            entries.zip(numbers.coefficients()).for_each(|(entry, number)| *entry = *number);
        }
        Ok(tensor)
    }

    /// An array of constants by a function of the component, known to the highest order.
    pub fn from_numbers(ring: &Arc<Ring>, lengths: &[usize], value: impl Fn(&[usize]) -> N) -> Outcome<Self> {
        let mut tensor = Self::zero(ring, ring.top(), lengths)?;
        let size = tensor.size();
        for (place, entry) in tensor.data.iter_mut().take(size).enumerate() {
            *entry = value(&strides::component(lengths, place));
        }
        Ok(tensor)
    }

    /// The array without slots.
    pub fn scalar(jet: &Jet<N>) -> Self {
        let data = jet.coefficients().to_vec();
        Self { ring: jet.ring().clone(), order: jet.order(), lengths: Vec::new(), data }
    }

    /// The component of an array without slots; `Shape` if there are slots.
    pub fn to_jet(&self) -> Outcome<Jet<N>> {
        self.get(&[]).ok_or(Trouble::Shape)
    }

    /// The ring of the components.
    pub const fn ring(&self) -> &Arc<Ring> {
        &self.ring
    }

    /// The order that all components are known to.
    pub const fn order(&self) -> Order {
        self.order
    }

    /// The range of each slot.
    pub fn lengths(&self) -> &[usize] {
        &self.lengths
    }

    /// How many components there are.
    pub fn size(&self) -> usize {
        self.lengths.iter().product()
    }

    /// A component; nothing out of bounds.
    pub fn get(&self, component: &[usize]) -> Option<Jet<N>> {
        self.at(strides::place(&self.lengths, component)?)
    }

    /// The value of a component at the point; nothing out of bounds.
    pub fn value(&self, component: &[usize]) -> Option<N> {
        self.data.get(strides::place(&self.lengths, component)?).copied()
    }

    /// A component by its place in row-major order; nothing beyond the last.
    pub(crate) fn at(&self, place: usize) -> Option<Jet<N>> {
        if place >= self.size() {
            return None;
        }
        let numbers = self.data.iter().skip(place).step_by(self.size()).copied().collect();
        Jet::new(&self.ring, self.order, numbers).ok()
    }

    /// For each monomial up to the order the coefficients of all components, in row-major order.
    pub(crate) fn numbers(&self) -> &[N] {
        &self.data
    }

    /// The values of all components at the point, in row-major order.
    pub fn values(&self) -> &[N] {
        self.data.get(..self.size()).unwrap_or_default()
    }

    /// What is known up to a lower order; `Order` if it is not lower.
    pub fn truncated(&self, order: Order) -> Outcome<Self> {
        if !self.order.covers(order) {
            return Err(Trouble::Order);
        }
        Ok(self.with(order, self.lengths.clone(), self.known_to(order).into_owned()))
    }

    /// The sum of two arrays with the same slots.
    pub fn plus(&self, other: &Self) -> Outcome<Self> {
        self.combined(other, |a, b| a + b)
    }

    /// The difference of two arrays with the same slots.
    pub fn minus(&self, other: &Self) -> Outcome<Self> {
        self.combined(other, |a, b| a - b)
    }

    /// The multiple by a number.
    pub fn scaled(&self, factor: N) -> Self {
        let data = self.data.iter().map(|number| *number * factor).collect();
        self.with(self.order, self.lengths.clone(), data)
    }

    /// The multiple by a jet.
    pub fn times(&self, factor: &Jet<N>) -> Outcome<Self> {
        Self::scalar(factor).outer(self)
    }

    /// The product without a sum; the slots of the other array follow the own ones.
    pub fn outer(&self, other: &Self) -> Outcome<Self> {
        let order = self.common(other)?;
        let lengths = [&self.lengths[..], &other.lengths].concat();
        size(&lengths, self.ring.width(order))?;
        let shape = Shape { batch: 1, rows: self.size(), inner: 1, columns: other.size() };
        let data = product(self.ring.products(order), shape, &self.known_to(order), &other.known_to(order));
        Ok(self.with(order, lengths, data))
    }

    /// The slots in another order: slot `s` of the result is slot `order[s]`. `Shape` if that is no permutation.
    pub fn permuted(&self, order: &[usize]) -> Outcome<Self> {
        let mut sorted = order.to_vec();
        sorted.sort_unstable();
        if !sorted.into_iter().eq(0..self.lengths.len()) {
            return Err(Trouble::Shape);
        }
        let own = strides(&self.lengths);
        let pick = |from: &[usize]| order.iter().filter_map(|slot| from.get(*slot).copied()).collect::<Vec<_>>();
        Ok(self.viewed(0, &pick(&self.lengths), &pick(&own)))
    }

    /// Two slots exchanged; `Shape` if one does not exist.
    pub fn swapped(&self, a: usize, b: usize) -> Outcome<Self> {
        if a.max(b) >= self.lengths.len() {
            return Err(Trouble::Shape);
        }
        let exchange = |slot: usize| {
            if slot == a {
                b
            } else if slot == b {
                a
            } else {
                slot
            }
        };
        self.permuted(&(0..self.lengths.len()).map(exchange).collect::<Vec<_>>())
    }

    /// The sum over two slots of the same length that run together; the others keep their order.
    pub fn trace(&self, a: usize, b: usize) -> Outcome<Self> {
        let own = strides(&self.lengths);
        let slot = |slot: usize| self.lengths.get(slot).copied().zip(own.get(slot).copied()).ok_or(Trouble::Shape);
        let ((length, step), (other, other_step)) = (slot(a)?, slot(b)?);
        if a == b || length != other {
            return Err(Trouble::Shape);
        }
        let rest = |from: &[usize]| -> Vec<usize> {
            from.iter().enumerate().filter(|(slot, _)| *slot != a && *slot != b).map(|(_, item)| *item).collect()
        };
        let lengths = rest(&self.lengths);
        let data = summed(&self.data, self.size(), (&lengths, &rest(&own)), (&[length], &[step + other_step]));
        Ok(self.with(self.order, lengths, data))
    }

    /// The part where the index of a slot has a value, without that slot; nothing out of bounds.
    pub fn fixed(&self, slot: usize, index: usize) -> Option<Self> {
        let (mut lengths, mut steps) = (self.lengths.clone(), strides(&self.lengths));
        if slot >= lengths.len() || index >= lengths.remove(slot) {
            return None;
        }
        let from = index * steps.remove(slot);
        Some(self.viewed(from, &lengths, &steps))
    }

    /// The part where the index of a slot runs over so many values from a first one on; nothing out of bounds.
    pub fn ranged(&self, slot: usize, first: usize, count: usize) -> Option<Self> {
        let mut lengths = self.lengths.clone();
        let steps = strides(&self.lengths);
        let length = lengths.get_mut(slot)?;
        if count == 0 || first.checked_add(count)? > *length {
            return None;
        }
        *length = count;
        let from = first * steps.get(slot)?;
        Some(self.viewed(from, &lengths, &steps))
    }

    /// The mean over all permutations of some slots: `(1/k!)` times their sum.
    pub fn symmetrised(&self, slots: &[usize]) -> Outcome<Self> {
        self.averaged(slots, N::ONE)
    }

    /// The mean over all permutations of some slots, odd ones counted negative: `(1/k!)` times their sum.
    pub fn antisymmetrised(&self, slots: &[usize]) -> Outcome<Self> {
        self.averaged(slots, -N::ONE)
    }

    /// The partial derivative of all components; one order less is known of it.
    pub fn derivative(&self, variable: Variable) -> Outcome<Self> {
        let (order, table) = self.ring.derivative(self.order, variable)?;
        let mut data = Vec::with_capacity(table.len() * self.size());
        for (place, factor) in table {
            let factor = N::from_integer((*factor).into());
            data.extend(self.block(*place as usize).iter().map(|number| *number * factor));
        }
        Ok(self.with(order, self.lengths.clone(), data))
    }

    /// All partial derivatives by the base variables, in a new last slot.
    pub fn gradient(&self) -> Outcome<Self> {
        self.gradient_by(0, self.ring.variables())
    }

    /// The partial derivatives by so many base variables from a first one on, in a new last slot.
    pub fn gradient_by(&self, first: usize, variables: usize) -> Outcome<Self> {
        let parts = (first..first.saturating_add(variables)).map(|number| self.derivative(Variable::Base(number)));
        let parts = parts.collect::<Outcome<Vec<_>>>()?;
        let order = parts.first().ok_or(Trouble::Shape)?.order;
        let lengths = [&self.lengths[..], &[variables]].concat();
        size(&lengths, self.ring.width(order))?;
        let numbers = self.size() * self.ring.width(order);
        let data: Vec<N> = (0..numbers).flat_map(|place| parts.iter().map(move |part| at(&part.data, place))).collect();
        Ok(self.with(order, lengths, data))
    }

    /// Whether every known coefficient of every component is 0; `Overflow` if one did not fit.
    pub fn vanishes(&self) -> Outcome<bool> {
        all_zero(&self.data)
    }

    /// Whether the two are equal up to the order that both are known to; `Overflow` if a number did not fit.
    pub fn agrees(&self, other: &Self) -> Outcome<bool> {
        self.minus(other)?.vanishes()
    }

    /// The first component, in row-major order, whose values at the point differ; `Overflow` if one did not fit.
    pub fn differs_at(&self, other: &Self) -> Outcome<Option<Vec<usize>>> {
        let difference = self.minus(other)?;
        all_zero(difference.values())?;
        let place = difference.values().iter().position(|number| !number.is_zero());
        Ok(place.map(|place| strides::component(&self.lengths, place)))
    }

    /// The array itself if all its numbers fit, else `Overflow`.
    pub fn sound(self) -> Outcome<Self> {
        if self.data.iter().all(|number| number.is_sound()) { Ok(self) } else { Err(Trouble::Overflow) }
    }

    /// The order that both are known to; `Shape` for arrays over different rings.
    pub(crate) fn common(&self, other: &Self) -> Outcome<Order> {
        if self.ring.fits(&other.ring) { Ok(self.order.least(other.order)) } else { Err(Trouble::Shape) }
    }

    /// The blocks up to an order not above the own one.
    pub(crate) fn known_to(&self, order: Order) -> Cow<'_, [N]> {
        if order == self.order {
            return Cow::Borrowed(&self.data);
        }
        let places = self.ring.restriction(self.order, order);
        Cow::Owned(places.into_iter().flat_map(|place| self.block(place)).copied().collect())
    }

    /// An array with slots of these lengths, which begins at a place of each block of this one and whose neighbours
    /// stand so far apart there. The caller answers for places in bounds.
    fn viewed(&self, from: usize, lengths: &[usize], steps: &[usize]) -> Self {
        let data = gathered(&self.data, self.size(), from, (lengths, steps));
        self.with(self.order, lengths.to_vec(), data)
    }

    /// An array over the same ring; the caller answers for the invariant.
    pub(crate) fn with(&self, order: Order, lengths: Vec<usize>, data: Vec<N>) -> Self {
        Self { ring: self.ring.clone(), order, lengths, data }
    }

    fn block(&self, place: usize) -> &[N] {
        self.data.chunks_exact(self.size().max(1)).nth(place).unwrap_or_default()
    }

    fn combined(&self, other: &Self, operation: fn(N, N) -> N) -> Outcome<Self> {
        let order = self.common(other)?;
        if self.lengths != other.lengths {
            return Err(Trouble::Shape);
        }
        let (a, b) = (self.known_to(order), other.known_to(order));
        let data = a.iter().zip(b.iter()).map(|(a, b)| operation(*a, *b)).collect();
        Ok(self.with(order, self.lengths.clone(), data))
    }

    /// The mean over permutations of slots, a transposition counting `sign`. Slot after slot: every permutation
    /// of `k` slots is one of the first `k - 1` after an exchange of the last with one of the others, or none.
    fn averaged(&self, slots: &[usize], sign: N) -> Outcome<Self> {
        let mut mean = self.clone();
        for (earlier, slot) in slots.iter().enumerate() {
            let before = mean.clone();
            for other in slots.iter().take(earlier) {
                // A slot named twice would be exchanged with itself.
                if other == slot {
                    return Err(Trouble::Shape);
                }
                mean = mean.plus(&before.swapped(*other, *slot)?.scaled(sign))?;
            }
            let share = N::from_integer(i64::try_from(earlier + 1).map_err(|_| Trouble::Shape)?);
            mean = mean.scaled(share.inverse().ok_or(Trouble::ZeroDivisor)?);
        }
        Ok(mean)
    }
}

/// Slots by their lengths and by how far apart two neighbours stand in a block.
pub(crate) type View<'a> = (&'a [usize], &'a [usize]);

/// From blocks of a size those components that a view shows of each, beginning at a place.
pub(crate) fn gathered<N: Number>(data: &[N], size: usize, from: usize, (lengths, steps): View) -> Vec<N> {
    let blocks = data.chunks_exact(size.max(1));
    let mut result = Vec::with_capacity(blocks.len() * lengths.iter().product::<usize>());
    let walk = Walk::new(lengths, steps);
    blocks.for_each(|block| walk.gather(block, from, &mut result));
    result
}

/// The same, summed over all components of another view.
pub(crate) fn summed<N: Number>(data: &[N], size: usize, (lengths, steps): View, gone: View) -> Vec<N> {
    let blocks = data.chunks_exact(size.max(1));
    let own = lengths.iter().product::<usize>().max(1);
    let mut result = vec![N::ZERO; blocks.len() * own];
    let (walk, others) = (Walk::new(lengths, steps), places(gone.0, gone.1));
    for (block, sums) in blocks.zip(result.chunks_mut(own)) {
        others.iter().for_each(|from| walk.add(block, *from, sums));
    }
    result
}

/// How many numbers an array has; `Shape` if a slot has no range, a budget if they or the slots are too many.
pub(crate) fn size(lengths: &[usize], width: usize) -> Outcome<usize> {
    if lengths.len() > SLOTS_BUDGET {
        return Err(Trouble::Budget(Budget::Slots));
    }
    if lengths.contains(&0) {
        return Err(Trouble::Shape);
    }
    let size = lengths.iter().try_fold(width, |size, length| size.checked_mul(*length));
    size.filter(|size| *size <= NUMBERS_BUDGET).ok_or(Trouble::Budget(Budget::Numbers))
}

#[cfg(test)]
mod tests;
