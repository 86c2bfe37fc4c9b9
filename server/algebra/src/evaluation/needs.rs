//! How much a claim needs to know of each field, metric and definition: the order of its Taylor polynomial.
//!
//! A value is compared at the point, to order 0; each derivative on the way down to a field asks for an order
//! more. What nothing asks for is never drawn. The one idea: orders only grow, so that walking the definitions
//! that are asked for again and again ends as soon as nothing grows; definitions that lean on each other with
//! derivatives between would grow for ever, and are cut off by the number of rounds.

use std::collections::BTreeSet;

use super::families::Families;
use crate::expression::{Expression, Index, MetricValues, World};
use crate::geometry::Level;
use crate::jet::Order;
use crate::trouble::{Budget, Outcome, Trouble};

/// How deep expressions may be nested; evaluation calls itself this often at most.
pub const DEPTH_BUDGET: usize = 64;

/// What is asked of the things in a world; nothing for what is not asked for at all.
#[derive(Clone, Debug)]
pub(crate) struct Needs {
    pub fields: Vec<Option<Order>>,
    pub metrics: Vec<Option<Order>>,
    pub definitions: Vec<Option<Order>>,
    /// The parameters in use, ascending.
    pub parameters: Vec<usize>,
    /// Whether a field is small, so that there is a variable for the common size.
    pub sized: bool,
    /// The highest order that anything asks for.
    pub top: Order,
}

impl Needs {
    /// What these expressions ask for, each to be known to a base order. `Shape` for what the world does not have and
    /// for definitions in a circle.
    pub fn of<'a>(expressions: impl IntoIterator<Item = (&'a Expression, usize)>, world: &'a World) -> Outcome<Self> {
        let mut needs = Self {
            fields: vec![None; world.fields.len()],
            metrics: vec![None; world.metrics.len()],
            definitions: vec![None; world.definitions.len()],
            parameters: Vec::new(),
            sized: false,
            top: Order::default(),
        };
        let mut walk = Walk { needs: &mut needs, world, parameters: BTreeSet::new() };
        for (expression, base) in expressions {
            walk.through(expression, Order::of_base(base))?;
        }
        walk.until_nothing_grows()?;
        let parameters = walk.parameters.into_iter().collect();
        needs.parameters = parameters;
        needs.sized = world.fields.iter().zip(&needs.fields).any(|(field, need)| field.small && need.is_some());
        if needs.sized {
            // The size itself takes an order, even where sides are compared without it.
            needs.more_small_orders(world.order_compared().max(1));
        }
        Ok(needs)
    }

    fn more_small_orders(&mut self, more: usize) {
        let all = self.fields.iter_mut().chain(&mut self.metrics).chain(&mut self.definitions).flatten();
        all.chain([&mut self.top]).for_each(|order| order.small += more);
    }
}

/// The deepest nesting of an expression, or the budget for it.
pub(crate) fn within_depth(expression: &Expression) -> Outcome<()> {
    let mut pending = vec![(expression, 0)];
    while let Some((expression, depth)) = pending.pop() {
        if depth > DEPTH_BUDGET {
            return Err(Trouble::Budget(Budget::Depth));
        }
        pending.extend(expression.parts().into_iter().map(|part| (part, depth + 1)));
    }
    Ok(())
}

struct Walk<'a, 'b> {
    needs: &'b mut Needs,
    world: &'a World,
    parameters: BTreeSet<usize>,
}

impl<'a> Walk<'a, '_> {
    fn until_nothing_grows(&mut self) -> Outcome<()> {
        let mut walked: Vec<Option<Order>> = vec![None; self.world.definitions.len()];
        for _ in 0..=self.world.definitions.len() + 1 {
            let before = self.needs.definitions.clone();
            if before == walked {
                return Ok(());
            }
            for ((definition, order), earlier) in self.world.definitions.iter().zip(&before).zip(&walked) {
                if let Some(order) = order.filter(|_| order != earlier) {
                    self.through(&definition.body, order)?;
                }
            }
            walked = before;
        }
        Err(Trouble::Shape)
    }

    fn through(&mut self, expression: &'a Expression, order: Order) -> Outcome<()> {
        within_depth(expression)?;
        let mut pending = vec![(expression, order)];
        while let Some((expression, order)) = pending.pop() {
            self.grow_top(order);
            let inner = self.own(expression, order)?;
            pending.extend(expression.parts().into_iter().map(|part| (part, inner)));
        }
        Ok(())
    }

    /// What a node itself asks for; the order that it asks of its parts.
    fn own(&mut self, expression: &Expression, order: Order) -> Outcome<Order> {
        let once = Order { base: order.base + 1, ..order };
        let twice = Order { base: order.base + 2, ..order };
        match expression {
            Expression::Field { field, slots } => self.field(*field, slots, order)?,
            Expression::Defined { definition, slots } => self.defined(*definition, slots, order)?,
            Expression::Metric { metric, .. } | Expression::Epsilon { metric: Some(metric), .. } => {
                self.metric(*metric, order)?;
            }
            Expression::Determinant(metric) => self.metric(*metric, order)?,
            Expression::Christoffel { metric, .. } => self.metric(*metric, once)?,
            Expression::Curvature { metric, .. } => self.metric(*metric, twice)?,
            Expression::Coordinate(index) => self.moved(index, index.family, Level::Up, order)?,
            Expression::Partial(index, _) => {
                self.moved(index, index.family, Level::Down, order)?;
                return Ok(once);
            }
            Expression::Covariant { metric, .. } => {
                self.metric(*metric, once)?;
                return Ok(once);
            }
            Expression::Vary { parameter, .. } => {
                self.parameters.insert(*parameter);
                return Ok(Order { small: order.small + 1, ..order });
            }
            _ => {}
        }
        Ok(order)
    }

    fn field(&mut self, field: usize, slots: &[Index], order: Order) -> Outcome<()> {
        let own = self.world.fields.get(field).ok_or(Trouble::Shape)?;
        if own.slots.len() != slots.len() {
            return Err(Trouble::Shape);
        }
        raise(&mut self.needs.fields, field, order);
        if let Some((family, level)) = own.slots.first().filter(|_| own.traceless)
            && *level != Level::Inert
            && let Some(metric) = self.metric_of(*family)
        {
            self.metric(metric, order)?;
        }
        own.slots.iter().zip(slots).try_for_each(|((family, level), index)| self.moved(index, *family, *level, order))
    }

    fn defined(&mut self, definition: usize, slots: &[Index], order: Order) -> Outcome<()> {
        let own = self.world.definitions.get(definition).ok_or(Trouble::Shape)?;
        if own.free.len() != slots.len() {
            return Err(Trouble::Shape);
        }
        let group = Families::group(self.world, definition);
        group.iter().for_each(|member| raise(&mut self.needs.definitions, *member, order));
        own.free.iter().zip(slots).try_for_each(|(own, index)| self.moved(index, own.family, own.level, order))
    }

    fn metric(&mut self, metric: usize, order: Order) -> Outcome<()> {
        self.grow_top(order);
        let own = self.world.metrics.get(metric).ok_or(Trouble::Shape)?;
        raise(&mut self.needs.metrics, metric, order);
        if let MetricValues::Defined(definition) = own.values {
            let group = Families::group(self.world, definition);
            group.iter().for_each(|member| raise(&mut self.needs.definitions, *member, order));
        }
        Ok(())
    }

    /// A slot on another level than its own asks for the metric of its family.
    fn moved(&mut self, index: &Index, family: usize, natural: Level, order: Order) -> Outcome<()> {
        let stays = index.level == natural || index.level == Level::Inert || natural == Level::Inert;
        match self.metric_of(family) {
            Some(metric) if !stays => self.metric(metric, order),
            _ => Ok(()),
        }
    }

    fn metric_of(&self, family: usize) -> Option<usize> {
        self.world.families.get(family).and_then(|family| family.metric)
    }

    fn grow_top(&mut self, order: Order) {
        let top = &mut self.needs.top;
        *top = Order { base: top.base.max(order.base), small: top.small.max(order.small) };
    }
}

/// The higher of an order and what is asked already.
fn raise(needs: &mut [Option<Order>], place: usize, order: Order) {
    if let Some(need) = needs.get_mut(place) {
        let before = need.unwrap_or_default();
        *need = Some(Order { base: before.base.max(order.base), small: before.small.max(order.small) });
    }
}
