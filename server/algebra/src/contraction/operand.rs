//! What a contraction multiplies two at a time: numbers, and slots that say how they are read.
//!
//! The one idea: an operand is a view. To take a diagonal or to exchange slots moves no number, it changes the steps
//! of slots; numbers are moved where a product wants them in another order than they stand in, and of the ways to
//! write a product the one is taken that moves the fewest (`Arrangement`).

use std::borrow::Cow;
use std::sync::Arc;

use super::Label;
use crate::jet::{Order, Ring};
use crate::number::Number;
use crate::tensor::{Shape, Tensor, gathered, product, size, strides, summed};
use crate::trouble::{Outcome, Trouble};

/// A slot of an operand: its label, its range, and how far apart two neighbours stand.
#[derive(Clone, Copy, Debug)]
struct Slot {
    label: Label,
    length: usize,
    step: usize,
}

/// Numbers with labelled slots, no label on two of them.
pub(super) struct Operand<'a, N: Number> {
    /// For each monomial a block.
    data: Cow<'a, [N]>,
    /// How many numbers a block has.
    size: usize,
    slots: Vec<Slot>,
}

impl<'a, N: Number> Operand<'a, N> {
    /// A factor, known to an order; slots that carry the same label are their diagonal. `Shape` for slots without
    /// label and for a label with two ranges, `Order` if less is known.
    pub fn of(tensor: &'a Tensor<N>, labels: &[Label], order: Order) -> Outcome<Self> {
        if labels.len() != tensor.lengths().len() {
            return Err(Trouble::Shape);
        }
        if !tensor.order().covers(order) {
            return Err(Trouble::Order);
        }
        let mut slots: Vec<Slot> = Vec::with_capacity(labels.len());
        for ((label, length), step) in labels.iter().zip(tensor.lengths()).zip(strides(tensor.lengths())) {
            match slots.iter_mut().find(|slot| slot.label == *label) {
                Some(slot) if slot.length != *length => return Err(Trouble::Shape),
                Some(slot) => slot.step += step,
                None => slots.push(Slot { label: *label, length: *length, step }),
            }
        }
        Ok(Self { data: tensor.known_to(order), size: tensor.size(), slots })
    }

    /// The sum over all labels but those that are kept.
    pub fn summed(self, kept: &[Label]) -> Self {
        let (own, gone): (Vec<Slot>, Vec<_>) = self.slots.iter().partition(|slot| kept.contains(&slot.label));
        if gone.is_empty() {
            return self;
        }
        let (lengths, steps) = unzipped(own.iter().copied());
        let (gone_lengths, gone_steps) = unzipped(gone.iter().copied());
        let data = summed(&self.data, self.size, (&lengths, &steps), (&gone_lengths, &gone_steps));
        Self::new(data, own.iter().map(|slot| (slot.label, slot.length)))
    }

    /// The product, summed over the common labels that are not kept; each label of one side alone is kept. The slots
    /// stand in the order that is wanted, if that costs nothing.
    pub fn multiplied(
        &self,
        other: &Self,
        kept: &[Label],
        wanted: Option<&[Label]>,
        (ring, order): (&Arc<Ring>, Order),
    ) -> Outcome<Operand<'static, N>> {
        let (own, others) = (self.parted(other, kept), other.parted(self, kept));
        let ways = [(self, other, &own, &others), (other, self, &others, &own)];
        let ways = ways.into_iter().flat_map(|(left, right, a, b)| {
            [a, b].map(|common| Arrangement { left, right, common, rows: &a.alone, columns: &b.alone })
        });
        let Some(way) = ways.min_by_key(|way| way.moved(wanted)) else { return Err(Trouble::Shape) };
        let slots = way.result().map(|label| Ok((label, self.slot(label).or_else(|_| other.slot(label))?.length)));
        let slots = slots.collect::<Outcome<Vec<_>>>()?;
        let lengths: Vec<usize> = slots.iter().map(|(_, length)| *length).collect();
        size(&lengths, ring.width(order))?;
        let (left, right) = (way.left.arranged(way.left())?, way.right.arranged(way.right())?);
        Ok(Operand::new(product(ring.products(order), way.shape()?, &left, &right), slots.into_iter()))
    }

    /// The lengths of the slots in this order, and the numbers. `Shape` for a label that is not there.
    pub fn finished(self, order: &[Label]) -> Outcome<(Vec<usize>, Vec<N>)> {
        let lengths = order.iter().map(|label| Ok(self.slot(*label)?.length)).collect::<Outcome<_>>()?;
        if self.stands(order.iter().copied()) {
            return Ok((lengths, self.data.into_owned()));
        }
        let data = self.arranged(order.iter().copied())?.into_owned();
        Ok((lengths, data))
    }

    /// Numbers that stand in the row-major order of their slots.
    fn new(data: Vec<N>, slots: impl DoubleEndedIterator<Item = (Label, usize)>) -> Operand<'static, N> {
        let mut size = 1;
        let slot = |(label, length)| {
            let step = size;
            size *= length;
            Slot { label, length, step }
        };
        let mut slots: Vec<Slot> = slots.rev().map(slot).collect();
        slots.reverse();
        Operand { data: Cow::Owned(data), size, slots }
    }

    fn slot(&self, label: Label) -> Outcome<&Slot> {
        self.slots.iter().find(|slot| slot.label == label).ok_or(Trouble::Shape)
    }

    /// The own labels by what becomes of them in a product.
    fn parted(&self, other: &Self, kept: &[Label]) -> Parted {
        let mut parted = Parted::default();
        for Slot { label, .. } in &self.slots {
            let part = match (other.slot(*label).is_ok(), kept.contains(label)) {
                (true, true) => &mut parted.batch,
                (true, false) => &mut parted.inner,
                (false, _) => &mut parted.alone,
            };
            part.push(*label);
        }
        parted
    }

    /// Whether the numbers stand in the row-major order of these labels already.
    fn stands(&self, order: impl DoubleEndedIterator<Item = Label>) -> bool {
        let mut next = 1;
        let follows = |label| {
            let Ok(slot) = self.slot(label) else { return false };
            let follows = slot.length == 1 || slot.step == next;
            next *= slot.length;
            follows
        };
        order.rev().all(follows) && next == self.size
    }

    /// The numbers in the row-major order of these labels.
    fn arranged(&self, order: impl DoubleEndedIterator<Item = Label> + Clone) -> Outcome<Cow<'_, [N]>> {
        if self.stands(order.clone()) {
            return Ok(Cow::Borrowed(&self.data));
        }
        let slots = order.map(|label| self.slot(label).copied()).collect::<Outcome<Vec<_>>>()?;
        let (lengths, steps) = unzipped(slots.into_iter());
        Ok(Cow::Owned(gathered(&self.data, self.size, 0, (&lengths, &steps))))
    }
}

/// Lengths and steps.
fn unzipped(slots: impl Iterator<Item = Slot>) -> (Vec<usize>, Vec<usize>) {
    slots.map(|slot| (slot.length, slot.step)).unzip()
}

/// The labels of an operand of a product, each part in the order of its slots.
#[derive(Default)]
struct Parted {
    /// Common, and kept.
    batch: Vec<Label>,
    /// Common, and summed.
    inner: Vec<Label>,
    alone: Vec<Label>,
}

/// A way to write a product as a batch of matrix products: who is left, and in which order the common labels stand.
struct Arrangement<'a, N: Number> {
    left: &'a Operand<'a, N>,
    right: &'a Operand<'a, N>,
    common: &'a Parted,
    rows: &'a [Label],
    columns: &'a [Label],
}

impl<N: Number> Arrangement<'_, N> {
    fn left(&self) -> impl DoubleEndedIterator<Item = Label> + Clone {
        self.common.batch.iter().chain(self.rows).chain(&self.common.inner).copied()
    }

    fn right(&self) -> impl DoubleEndedIterator<Item = Label> + Clone {
        self.common.batch.iter().chain(&self.common.inner).chain(self.columns).copied()
    }

    fn result(&self) -> impl DoubleEndedIterator<Item = Label> + Clone {
        self.common.batch.iter().chain(self.rows).chain(self.columns).copied()
    }

    fn shape(&self) -> Outcome<Shape> {
        let count = |operand: &Operand<N>, labels: &[Label]| {
            labels.iter().try_fold(1, |count, label| Ok(count * operand.slot(*label)?.length))
        };
        Ok(Shape {
            batch: count(self.left, &self.common.batch)?,
            rows: count(self.left, self.rows)?,
            inner: count(self.left, &self.common.inner)?,
            columns: count(self.right, self.columns)?,
        })
    }

    /// How many numbers of a block have to be moved, those of the result too if an order is wanted of it.
    fn moved(&self, wanted: Option<&[Label]>) -> usize {
        let moved = |stands: bool, size: usize| if stands { 0 } else { size };
        let Ok(Shape { batch, rows, inner, columns }) = self.shape() else { return usize::MAX };
        let result = wanted.is_none_or(|wanted| self.result().eq(wanted.iter().copied()));
        moved(self.left.stands(self.left()), batch * rows * inner)
            + moved(self.right.stands(self.right()), batch * inner * columns)
            + moved(result, batch * rows * columns)
    }
}
