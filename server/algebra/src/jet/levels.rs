//! How the tables of a ring are made: products and derivatives of monomials are found once, then translated to
//! every level. A level holds with a monomial all its divisors, so that no product is lost.

use std::collections::BTreeMap;

use super::order::{Order, Variable};

/// Exponents of the base variables, then of the small ones.
pub(super) type Monomial = Vec<u8>;

/// Places of two factors on a level, or a place and a factor.
pub(crate) type Pair = (u32, u32);

/// What is known of one order.
#[derive(Debug)]
pub(super) struct Level {
    /// The monomials, as places in the list of the ring, ascending.
    pub members: Vec<u32>,
    /// The place on this level of each monomial of the ring.
    pub places: Vec<Option<u32>>,
    /// For each monomial, the pairs that multiply to it.
    pub products: Vec<Vec<Pair>>,
    /// How many pairs there are.
    pub pairs: u64,
    /// For each variable, if it may be differentiated by: for each monomial of the lower level the place here
    /// of the monomial that becomes it, and the exponent that comes down.
    pub derivatives: Vec<Option<Vec<Pair>>>,
}

/// What levels are made from.
pub(super) struct Tables {
    /// Sorted by base degree, small degree, exponents.
    monomials: Vec<Monomial>,
    /// The place of each monomial in that list.
    known: BTreeMap<Monomial, u32>,
    /// For each monomial, the pairs that multiply to it.
    products: Vec<Vec<Pair>>,
    /// How many of the exponents are those of base variables.
    variables: usize,
}

impl Tables {
    /// Of all monomials of a ring, in any order; each once, and with each its divisors.
    pub fn new(mut monomials: Vec<Monomial>, variables: usize) -> Self {
        monomials.sort_by_cached_key(|monomial| {
            let order = order_of(monomial, variables);
            (order.base, order.small, monomial.clone())
        });
        let known: BTreeMap<Monomial, u32> = monomials.iter().cloned().zip(0..).collect();
        let products = monomials.iter().map(|monomial| factorings(monomial, &known)).collect();
        Self { monomials, known, products, variables }
    }

    /// The monomials in the order that places count.
    pub fn into_monomials(self) -> Vec<Monomial> {
        self.monomials
    }

    /// The level of an order.
    pub fn level(&self, order: Order) -> Level {
        let members = self.members(order);
        let mut places = vec![None; self.monomials.len()];
        for (member, place) in members.iter().zip(0..) {
            if let Some(entry) = places.get_mut(*member as usize) {
                *entry = Some(place);
            }
        }
        let products: Vec<_> = members.iter().map(|member| self.products_on(&places, *member)).collect();
        let pairs = products.iter().map(|pairs| pairs.len() as u64).sum();
        let count = self.monomials.first().map_or(0, Vec::len);
        let derivatives = (0..count).map(|number| self.derivative(order, &places, number)).collect();
        Level { members, places, products, pairs, derivatives }
    }

    /// The monomials of an order, as places in the whole list.
    fn members(&self, order: Order) -> Vec<u32> {
        let within = |monomial: &Monomial| order.covers(order_of(monomial, self.variables));
        self.monomials.iter().zip(0..).filter(|(monomial, _)| within(monomial)).map(|(_, place)| place).collect()
    }

    fn products_on(&self, places: &[Option<u32>], member: u32) -> Vec<Pair> {
        let pairs = self.products.get(member as usize).map_or(&[][..], Vec::as_slice);
        pairs.iter().filter_map(|(left, right)| look_up(places, *left).zip(look_up(places, *right))).collect()
    }

    fn derivative(&self, order: Order, places: &[Option<u32>], number: usize) -> Option<Vec<Pair>> {
        let small = number.checked_sub(self.variables).map(Variable::Small);
        let lower = order.lowered(small.unwrap_or(Variable::Base(number)))?;
        let source = |member: &u32| {
            let mut monomial = self.monomials.get(*member as usize)?.clone();
            let exponent = monomial.get_mut(number)?;
            *exponent += 1;
            let factor = u32::from(*exponent);
            Some((look_up(places, *self.known.get(&monomial)?)?, factor))
        };
        Some(self.members(lower).iter().filter_map(source).collect())
    }
}

fn look_up(places: &[Option<u32>], member: u32) -> Option<u32> {
    places.get(member as usize).copied().flatten()
}

/// The degrees of a monomial.
pub(super) fn order_of(monomial: &[u8], variables: usize) -> Order {
    let sum = |exponents: &[u8]| exponents.iter().map(|exponent| usize::from(*exponent)).sum();
    monomial
        .split_at_checked(variables)
        .map_or(Order::default(), |(base, small)| Order { base: sum(base), small: sum(small) })
}

/// All ways to write a monomial as a product of two: each exponent is split in every way.
fn factorings(monomial: &[u8], known: &BTreeMap<Monomial, u32>) -> Vec<Pair> {
    let mut found: Vec<(Monomial, Monomial)> = vec![(Vec::new(), Vec::new())];
    for exponent in monomial {
        let longer = |(left, right): (Monomial, Monomial)| {
            (0..=*exponent).map(move |part| ([&left[..], &[part]].concat(), [&right[..], &[exponent - part]].concat()))
        };
        found = found.into_iter().flat_map(longer).collect();
    }
    found.iter().filter_map(|(left, right)| known.get(left).copied().zip(known.get(right).copied())).collect()
}
