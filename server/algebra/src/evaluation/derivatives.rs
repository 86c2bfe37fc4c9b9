//! Derivatives: partial, covariant, and along a parameter.
//!
//! A covariant derivative of a component, `\nabla_a V^0`, is the component of the covariant derivative: members and
//! indices of a part of the coordinates are put in only after differentiating, as far as the operand is a single
//! tensor or its derivative.

use std::slice;

use super::point::Point;
use super::slots::Slot;
use super::{FRESH_LABELS, Value, evaluate};
use crate::contraction::Label;
use crate::expression::{Expression, Filling, Index};
use crate::geometry::Level;
use crate::jet::Variable;
use crate::number::Number;
use crate::tensor::Tensor;
use crate::trouble::{Outcome, Trouble};

impl<N: Number> Point<'_, N> {
    /// The partial derivative, its slot after those of the operand.
    pub(super) fn partial(&self, index: &Index, of: &Expression) -> Outcome<Value<N>> {
        let Value { tensor, slots } = evaluate(of, self)?;
        let (first, size) =
            (self.families.first(index.family).ok_or(Trouble::Shape)?, self.families.size(index.family)?);
        let derivative = match index.filling {
            // One component alone, which needs no others.
            Filling::Member(member) if index.level != Level::Up && member < size => {
                return Ok(Value { tensor: tensor.derivative(Variable::Base(first + member))?, slots });
            }
            _ => tensor.gradient_by(first, size)?,
        };
        self.derived(derivative, slots, index)
    }

    /// An array whose last slot is a derivative's, that slot filled.
    fn derived(&self, derivative: Tensor<N>, mut slots: Vec<Slot>, index: &Index) -> Outcome<Value<N>> {
        let place = slots.len();
        let raised = index.level == Level::Up && self.families.metric(index.family).is_some();
        let derivative =
            if raised { self.moved_slot(&derivative, place, index.family, Level::Up)? } else { derivative };
        match index.filling {
            Filling::Member(member) => {
                Ok(Value { tensor: derivative.fixed(place, member).ok_or(Trouble::Dimension)?, slots })
            }
            Filling::Label(label) => {
                slots.push(Slot { label, level: index.level, family: index.family });
                self.multiplied(vec![(derivative, slots)])
            }
        }
    }

    /// The covariant derivative.
    pub(super) fn covariant(&self, metric: usize, index: &Index, of: &Expression) -> Outcome<Value<N>> {
        let family = self.metric_family(metric)?;
        let mut opened = Opened { put_in: Vec::new(), next: FRESH_LABELS };
        let whole = opened.opened(of, family, self)?;
        let Value { tensor, slots } = evaluate(whole.as_ref().unwrap_or(of), self)?;
        let space = self.charged(metric, 4)?;
        let acts = |slot: &Slot| slot.family == family || self.families.metric(slot.family) == Some(metric);
        let levels: Vec<Level> = slots.iter().map(|slot| if acts(slot) { slot.level } else { Level::Inert }).collect();
        let connection = space.christoffel()?;
        self.meter.spend(
            (tensor.size() as u64)
                .saturating_mul((space.dimension() as u64).saturating_pow(2))
                .saturating_mul(slots.len() as u64)
                .saturating_mul(self.ring.pairs(tensor.order().least(connection.order()))),
        )?;
        let mut derivative = space.covariant(&tensor, &levels)?;
        if index.level == Level::Up {
            derivative = self.moved_slot(&derivative, slots.len(), family, Level::Up)?;
        }
        let (mut indices, mut families) = (Vec::new(), Vec::new());
        for slot in slots {
            let was = opened.was(slot.label);
            families.push(slot.family);
            indices.push(was.unwrap_or(Index {
                filling: Filling::Label(slot.label),
                level: slot.level,
                family: slot.family,
            }));
        }
        self.labelled(&derivative, &[&families[..], &[family]].concat(), &[&indices[..], &[*index]].concat())
    }

    /// The derivative by a parameter at 0.
    pub(super) fn varied(&self, parameter: usize, of: &Expression) -> Outcome<Value<N>> {
        let place = self.needs.parameters.iter().position(|own| *own == parameter).ok_or(Trouble::Shape)?;
        let value = evaluate(of, self)?;
        let variable = Variable::Small(place + usize::from(self.needs.sized));
        Ok(Value { tensor: value.tensor.derivative(variable)?, ..value })
    }
}

/// Which labels stand for what while a tensor is differentiated as a whole.
struct Opened {
    put_in: Vec<(Label, Index)>,
    next: Label,
}

impl Opened {
    /// A single tensor, or a covariant derivative of one, with labels for members; nothing if it stays as it is.
    fn opened<N: Number>(&mut self, of: &Expression, family: usize, point: &Point<N>) -> Outcome<Option<Expression>> {
        let mut whole = of.clone();
        let mut node = &mut whole;
        let mut changed = false;
        loop {
            let (slots, inner): (&mut [Index], _) = match node {
                Expression::Field { slots, .. } | Expression::Defined { slots, .. } => (slots, None),
                Expression::Curvature { slots, .. } => (slots, None),
                Expression::Covariant { index, of, .. } => (slice::from_mut(index), Some(of)),
                _ => break,
            };
            for slot in slots {
                changed |= self.open(slot, family, point)?;
            }
            match inner {
                Some(inner) => node = inner,
                None => break,
            }
        }
        Ok(changed.then_some(whole))
    }

    fn open<N: Number>(&mut self, slot: &mut Index, family: usize, point: &Point<N>) -> Outcome<bool> {
        let part = slot.family != family && point.families.range(slot.family, family).is_ok();
        let member = matches!(slot.filling, Filling::Member(_)) && slot.family == family;
        if !(part || member) || slot.level == Level::Inert {
            return Ok(false);
        }
        self.put_in.push((self.next, *slot));
        *slot = Index { filling: Filling::Label(self.next), level: slot.level, family };
        self.next = self.next.checked_add(1).ok_or(Trouble::Shape)?;
        Ok(true)
    }

    /// What the slot with a label was before it was opened.
    fn was(&self, label: Label) -> Option<Index> {
        self.put_in.iter().find(|(own, _)| *own == label).map(|(_, index)| *index)
    }
}
