//! The tables that all jets of a computation share: monomials, and which of them multiply to which.
//!
//! A monomial is `x^a e^b` in base variables `x` (coordinates) and small variables `e` (parameters of
//! variations, sizes of small fields), each with its own bound on the degree. The one idea: monomials are
//! sorted by base degree, then small degree, then exponents, and for each pair of orders up to the highest a
//! `Level` lists its monomials and its products once, so that arithmetic is a walk over pairs of places.
//!
//! Trap: places count the monomials of a level, and a place means another monomial on another level once there
//! are small variables; `restriction` translates.

use std::sync::Arc;

use super::levels::{Level, Monomial, Pair, Tables, order_of};
pub use super::order::{Order, Variable};
use crate::trouble::{Budget, Outcome, Trouble};

/// The most monomials of a ring. Four variables to order 8 have 495; products are then 12 870 pairs.
pub const MONOMIALS_BUDGET: usize = 500;

/// The highest degree, so that an exponent is a byte.
const DEGREE_BUDGET: usize = u8::MAX as usize;

/// The most variables of a ring, base and small ones together.
pub const VARIABLES_BUDGET: usize = 64;

/// A ring of truncated polynomials: how many variables of each kind, and the highest order.
#[derive(Debug)]
pub struct Ring {
    variables: usize,
    smalls: usize,
    top: Order,
    /// Sorted by base degree, small degree, exponents.
    monomials: Vec<Monomial>,
    /// By base order, then small order.
    levels: Vec<Level>,
}

impl Ring {
    /// The ring in `variables` coordinates up to a total degree.
    pub fn new(variables: usize, degree: usize) -> Outcome<Arc<Self>> {
        Self::with_small(variables, 0, Order::of_base(degree))
    }

    /// The ring in `variables` coordinates and `smalls` small variables up to an order.
    ///
    /// A budget for more variables than `VARIABLES_BUDGET`, more monomials than `MONOMIALS_BUDGET`, and for a degree
    /// above 255.
    pub fn with_small(variables: usize, smalls: usize, top: Order) -> Outcome<Arc<Self>> {
        if variables.saturating_add(smalls) > VARIABLES_BUDGET {
            return Err(Trouble::Budget(Budget::Variables));
        }
        let count = count(variables, top.base).zip(count(smalls, top.small)).and_then(|(a, b)| a.checked_mul(b));
        if count.is_none_or(|count| count > MONOMIALS_BUDGET) || top.base.max(top.small) > DEGREE_BUDGET {
            return Err(Trouble::Budget(Budget::Monomials));
        }
        let mut monomials: Vec<Monomial> = Vec::new();
        for base in exponents(variables, top.base) {
            monomials.extend(exponents(smalls, top.small).into_iter().map(|small| [&base[..], &small].concat()));
        }
        let tables = Tables::new(monomials, variables);
        let orders = (0..=top.base).flat_map(|base| (0..=top.small).map(move |small| Order { base, small }));
        let levels = orders.map(|order| tables.level(order)).collect();
        Ok(Arc::new(Self { variables, smalls, top, monomials: tables.into_monomials(), levels }))
    }

    /// How many coordinates there are.
    pub const fn variables(&self) -> usize {
        self.variables
    }

    /// How many small variables there are.
    pub const fn smalls(&self) -> usize {
        self.smalls
    }

    /// The highest order.
    pub const fn top(&self) -> Order {
        self.top
    }

    /// How many monomials there are up to an order; 0 above the highest.
    pub fn width(&self, order: Order) -> usize {
        self.level(order).map_or(0, |level| level.members.len())
    }

    /// How many multiplications of numbers a product of two jets of an order takes.
    pub fn pairs(&self, order: Order) -> u64 {
        self.level(order).map_or(0, |level| level.pairs)
    }

    /// The exponents of each monomial up to an order, base variables first, in the order of coefficients.
    pub fn monomials(&self, order: Order) -> impl Iterator<Item = &[u8]> {
        let members = self.level(order).map_or(&[][..], |level| &level.members);
        members.iter().filter_map(|place| self.monomials.get(*place as usize)).map(Vec::as_slice)
    }

    /// The degrees of a monomial.
    pub fn degrees(&self, monomial: &[u8]) -> Order {
        order_of(monomial, self.variables)
    }

    /// Where a monomial stands among those up to an order.
    pub fn place(&self, order: Order, exponents: &[u8]) -> Option<usize> {
        self.monomials(order).position(|monomial| monomial == exponents)
    }

    /// Whether jets of the two rings go together.
    pub fn fits(&self, other: &Self) -> bool {
        (self.variables, self.smalls, self.top) == (other.variables, other.smalls, other.top)
    }

    /// For each monomial up to an order, the pairs of places that multiply to it.
    pub(crate) fn products(&self, order: Order) -> &[Vec<Pair>] {
        self.level(order).map_or(&[], |level| &level.products)
    }

    /// The order of a derivative, and for each of its monomials where it comes from, with a factor.
    /// `Order` if the variable is not known to first order, `Shape` if there is none such.
    pub(crate) fn derivative(&self, order: Order, variable: Variable) -> Outcome<(Order, &[Pair])> {
        let number = self.number(variable).ok_or(Trouble::Shape)?;
        let table = self.level(order).and_then(|level| level.derivatives.get(number)?.as_deref());
        Ok((order.lowered(variable).ok_or(Trouble::Order)?, table.ok_or(Trouble::Order)?))
    }

    /// The places on the level of `from` of the monomials up to the order `to`.
    pub(crate) fn restriction(&self, from: Order, to: Order) -> Vec<usize> {
        let (Some(from), Some(to)) = (self.level(from), self.level(to)) else { return Vec::new() };
        let place = |member: &u32| from.places.get(*member as usize).copied().flatten();
        to.members.iter().filter_map(place).map(|place| place as usize).collect()
    }

    /// The number of a variable among the exponents of a monomial.
    pub(crate) fn number(&self, variable: Variable) -> Option<usize> {
        match variable {
            Variable::Base(number) => (number < self.variables).then_some(number),
            Variable::Small(number) => (number < self.smalls).then_some(self.variables + number),
        }
    }

    fn level(&self, order: Order) -> Option<&Level> {
        self.top.covers(order).then(|| self.levels.get(order.base * (self.top.small + 1) + order.small)).flatten()
    }
}

/// The number of monomials in `variables` variables up to a degree, `(variables + degree)! / variables! degree!`.
fn count(variables: usize, degree: usize) -> Option<usize> {
    (1..=degree).try_fold(1_usize, |count, step| Some(count.checked_mul(variables.checked_add(step)?)? / step))
}

/// All exponents of so many variables up to a total degree.
fn exponents(variables: usize, degree: usize) -> Vec<Monomial> {
    let mut found = vec![(Monomial::new(), degree)];
    for _ in 0..variables {
        let longer = |(monomial, left): (Monomial, usize)| {
            (0..=left).map(move |exponent| ([&monomial[..], &[exponent as u8]].concat(), left - exponent))
        };
        found = found.into_iter().flat_map(longer).collect();
    }
    found.into_iter().map(|(monomial, _)| monomial).collect()
}
