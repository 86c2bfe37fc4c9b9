//! What is fixed before a point is drawn: which expressions, in which world and dimension.

use std::sync::Arc;

use super::families::Families;
use super::meter::Meter;
use super::needs::Needs;
use super::point::{Point, ring_for};
use super::sampled::{MetricDraw, Sampled};
use crate::expression::{Expression, World};
use crate::jet::Ring;
use crate::number::Number;
use crate::trouble::Outcome;

/// Some expressions in one dimension of a world.
#[derive(Clone, Debug)]
pub struct Setting<'a> {
    world: &'a World,
    families: Families,
    needs: Needs,
    ring: Arc<Ring>,
}

impl<'a> Setting<'a> {
    /// What it takes to evaluate these expressions. `Shape` for names that the world does not have and definitions
    /// in a circle, a budget for too many derivatives or too deep expressions.
    pub fn new(expressions: &[&'a Expression], world: &'a World, dimension: usize) -> Outcome<Self> {
        let needs = Needs::of(expressions.iter().map(|expression| (*expression, 0)), world)?;
        let families = Families::new(world, dimension);
        let ring = ring_for(&families, &needs)?;
        Ok(Self { world, families, needs, ring })
    }

    /// The point of a seed. `ZeroDivisor` if no invertible metric is found, `Dimension` if a family has no members.
    pub fn point<N: Number>(&'a self, seed: u64, meter: &'a Meter<'a>) -> Outcome<Point<'a, N>> {
        let Self { world, families, needs, ring } = self;
        let sampled = Sampled::draw(world, families, needs, ring, seed, MetricDraw::Congruent)?;
        let point = Point::new(world, families.clone(), needs, ring, sampled, meter);
        point.prepare();
        Ok(point)
    }
}
