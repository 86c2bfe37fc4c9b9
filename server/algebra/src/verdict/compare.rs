//! A claim in one dimension: both sides at random points, modulo two primes.

use std::sync::Arc;

use super::givens::Givens;
use super::signs::Signs;
use super::{Claim, Limits, Reason, degree};
use crate::draws::Draws;
use crate::evaluation::families::Families;
use crate::evaluation::needs::Needs;
use crate::evaluation::sampled::{MetricDraw, Sampled};
use crate::evaluation::{Meter, Point, Value, evaluate, is_nothing, ring_for};
use crate::expression::Expression;
use crate::field::{Complex, FIRST, Residue, SECOND};
use crate::jet::{Ring, Variable};
use crate::number::Number;
use crate::tensor::Tensor;
use crate::trouble::{Budget, Outcome, Trouble};

/// Both primes lie above `2^60`.
const PRIME_BITS: u32 = 60;

/// The bits that are asked for beyond signs, where so many draws give them.
const LEAST_BITS: u32 = 60;

/// The most draws for the sake of a weak bound.
const MOST_DRAWS: usize = 60;

/// What one dimension gives.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Compared {
    /// Equal so often, with a chance of error of at most `2^-error_bits`.
    Equal { draws: usize, error_bits: u32 },
    /// Not equal, once.
    Unequal,
    /// Not defined at any point drawn.
    Undefined,
}

/// A claim in one dimension.
pub(super) struct Dimension<'a> {
    pub claim: &'a Claim,
    pub needs: &'a Needs,
    pub dimension: usize,
    pub families: Families,
    pub meter: &'a Meter<'a>,
    pub limits: &'a Limits<'a>,
    /// What is imposed on draws.
    pub givens: &'a Givens,
}

/// How many points were equal, and how many were drawn for that.
#[derive(Clone, Copy, Default)]
struct Passed {
    points: usize,
    drawn: usize,
}

impl<'a> Dimension<'a> {
    pub fn new(
        claim: &'a Claim,
        needs: &'a Needs,
        dimension: usize,
        meter: &'a Meter<'a>,
        limits: &'a Limits<'a>,
        givens: &'a Givens,
    ) -> Self {
        let families = Families::new(&claim.world, dimension);
        Self { claim, needs, dimension, families, meter, limits, givens }
    }

    /// What the draws give.
    pub fn compared(&self) -> Result<Compared, Reason> {
        let ring = ring_for(&self.families, self.needs)?;
        let outcome = if self.is_complex() {
            self.modulo_both::<Complex<FIRST>, Complex<SECOND>>(&ring)
        } else {
            self.modulo_both::<Residue<FIRST>, Residue<SECOND>>(&ring)
        };
        match outcome {
            Err(Trouble::Dimension) => Ok(Compared::Undefined),
            other => Ok(other?),
        }
    }

    /// Both primes; if roots exist modulo one of them alone (that of 2 does), all draws are made there.
    fn modulo_both<A: Number, B: Number>(&self, ring: &Arc<Ring>) -> Outcome<Compared> {
        let signs = Signs::of(self.claim, self.needs);
        let wanted = self.limits.draws.max(signs.draws.div_ceil(2));
        let Some(mut first) = self.passed::<A>(ring, 0, wanted)? else { return Ok(Compared::Unequal) };
        let missing = if first.points == 0 { wanted } else { 0 };
        let Some(mut second) = self.passed::<B>(ring, 1, wanted + missing)? else { return Ok(Compared::Unequal) };
        if second.points == 0 && first.points > 0 {
            let Some(more) = self.passed::<A>(ring, 2, wanted)? else { return Ok(Compared::Unequal) };
            second = more;
        }
        if first.points + second.points == 0 {
            return Ok(Compared::Undefined);
        }
        first.points += second.points;
        first.drawn += second.drawn;
        // A bound that is weak, as under givens that are solved for, is mended by drawing more.
        let each = self.error_bits(first) / u32::try_from(first.points).unwrap_or(u32::MAX);
        if let Some(needed) = LEAST_BITS.checked_div(each).map(|needed| needed as usize + 1)
            && (first.points..=MOST_DRAWS).contains(&needed)
        {
            let Some(more) = self.passed::<B>(ring, 3, needed - first.points)? else { return Ok(Compared::Unequal) };
            first.points += more.points;
            first.drawn += more.drawn;
        }
        let error_bits = signs.bound(first.points, self.error_bits(first));
        Ok(Compared::Equal { draws: first.points, error_bits })
    }

    /// Draws until so many points are defined; nothing if the sides differ at one.
    fn passed<N: Number>(&self, ring: &Arc<Ring>, series: u64, wanted: usize) -> Outcome<Option<Passed>> {
        let mut passed = Passed::default();
        let most = wanted.saturating_mul(self.limits.redraws);
        while passed.points < wanted && passed.drawn < most {
            let seed = self.seed(series, passed.drawn);
            passed.drawn += 1;
            match self.agrees::<N>(ring, seed) {
                Ok(true) => passed.points += 1,
                Ok(false) => return Ok(None),
                // A point that was found shows that there are such; without any, one draw's worth is enough.
                Err(trouble) if trouble.is_bad_luck() => {
                    if passed.points == 0 && passed.drawn >= self.limits.redraws {
                        break;
                    }
                }
                // What has been asked for is there; more would only be more certain.
                Err(Trouble::Budget(Budget::Total)) if passed.points >= self.limits.draws => break,
                Err(trouble) => return Err(trouble),
            }
        }
        Ok(Some(passed))
    }

    fn agrees<N: Number>(&self, ring: &Arc<Ring>, seed: u64) -> Outcome<bool> {
        self.meter.spend(0)?;
        let world = &self.claim.world;
        let sampled = Sampled::<N>::draw(world, &self.families, self.needs, ring, seed, MetricDraw::Congruent)?;
        let imposed = self.givens.imposed(self, ring, sampled)?;
        let difference = self.difference(ring, imposed)?;
        Ok(difference.is_none_or(|difference| difference.place.is_none()))
    }

    /// The two sides at a point; nothing if both are the number 0.
    pub fn difference<N: Number>(&self, ring: &Arc<Ring>, sampled: Sampled<N>) -> Outcome<Option<Difference<N>>> {
        let Claim { left, right, world } = self.claim;
        let point = Point::new(world, self.families.clone(), self.needs, ring, sampled, self.meter);
        point.prepare();
        let Some((left, right)) = sides(left, right, &point)? else { return Ok(None) };
        let orders = if self.needs.sized { world.order_compared() } else { 0 };
        Difference::new(left, right, orders).map(Some)
    }

    /// Each draw errs with a chance of at most `degree/p`, divided by the share of points that are defined.
    fn error_bits(&self, passed: Passed) -> u32 {
        let degree = {
            let Claim { left, right, world } = self.claim;
            degree::bound((left, right), world, self.needs, &self.families)
        };
        let redrawn = (passed.drawn / passed.points.max(1)).max(1) as u64;
        let lost =
            u64::BITS - degree.leading_zeros() + self.givens.growth.get() + (u64::BITS - redrawn.leading_zeros() - 1);
        PRIME_BITS.saturating_sub(lost).saturating_mul(u32::try_from(passed.points).unwrap_or(1))
    }

    /// A seed for each draw, from that of the claim.
    pub fn seed(&self, series: u64, number: usize) -> u64 {
        let mix = |seed: u64, more: u64| Draws::from_seed(seed ^ more.wrapping_mul(0x9E37_79B9_7F4A_7C15)).bits();
        [self.dimension as u64, series, number as u64].into_iter().fold(self.limits.seed, mix)
    }

    /// Whether the imaginary unit stands in the claim or in a definition that it uses.
    fn is_complex(&self) -> bool {
        let mut pending = super::functions::expressions(self.claim, self.needs);
        while let Some(expression) = pending.pop() {
            if *expression == Expression::Imaginary {
                return true;
            }
            pending.extend(expression.parts());
        }
        false
    }
}

/// The values of two sides with the same slots; nothing if both are the number 0.
pub(super) fn sides<N: Number>(
    left: &Expression,
    right: &Expression,
    point: &Point<N>,
) -> Outcome<Option<(Value<N>, Value<N>)>> {
    let side = |side: &Expression| if is_nothing(side) { Ok(None) } else { evaluate(side, point).map(Some) };
    let (left, right) = match (side(left)?, side(right)?) {
        (None, None) => return Ok(None),
        (Some(left), None) => {
            let zero = left.tensor.scaled(N::ZERO);
            let slots = left.slots.clone();
            (left, Value { tensor: zero, slots })
        }
        (None, Some(right)) => {
            let zero = right.tensor.scaled(N::ZERO);
            (Value { tensor: zero, slots: right.slots.clone() }, right)
        }
        (Some(left), Some(right)) => (left, right),
    };
    if left.slots != right.slots {
        return Err(Trouble::Shape);
    }
    Ok(Some((left, right)))
}

/// Both sides at a point, to the order that is compared.
pub(super) struct Difference<N: Number> {
    /// What the slots are.
    pub slots: Vec<crate::evaluation::Slot>,
    /// The sides at the point; of a claim about small fields, first without them, then the coefficients of the powers of
    /// their common size, up to the order that is compared.
    sides: Vec<(Tensor<N>, Tensor<N>)>,
    /// Which of the sides, and which component, differ first.
    pub place: Option<(usize, Vec<usize>)>,
}

impl<N: Number> Difference<N> {
    fn new(left: Value<N>, right: Value<N>, orders: usize) -> Outcome<Self> {
        let slots = left.slots;
        let mut last = (left.tensor, right.tensor);
        let mut sides = Vec::with_capacity(orders + 1);
        for order in (1..).take(orders) {
            let size = Variable::Small(0);
            let share = N::from_integer(order).inverse().ok_or(Trouble::ZeroDivisor)?;
            let next = (last.0.derivative(size)?.scaled(share), last.1.derivative(size)?.scaled(share));
            sides.push(std::mem::replace(&mut last, next));
        }
        sides.push(last);
        let mut place = None;
        for (number, (left, right)) in sides.iter().enumerate() {
            if let Some(component) = left.differs_at(right)? {
                place = Some((number, component));
                break;
            }
        }
        Ok(Self { slots, sides, place })
    }

    /// The two numbers that differ.
    pub fn numbers(&self) -> Option<(N, N)> {
        let (number, component) = self.place.as_ref()?;
        let (left, right) = self.sides.get(*number)?;
        left.value(component).zip(right.value(component))
    }
}
