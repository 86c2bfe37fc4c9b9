//! Claims that hold by form: both sides have one normal form under the renaming of dummies, the order of factors, the
//! symmetries of slots and the exchange of partial derivatives. That is algebra; nothing is drawn, and nothing can go
//! wrong by chance.
//!
//! Sides are multiplied out into products of fields and tensors of geometry, derivatives of one such factor included;
//! what is more, as the derivative of a product, has no form here and is sampled. A scalar that is no such factor, as
//! a root, is taken as one whole: equal where it is written alike.
//!
//! Traps: levels stay where they are, `A^i B_i` and `A_i B^i` are two forms. A raised partial derivative does not
//! commute with another one, since the metric stands between them.

use super::{Claim, Verdict};
use crate::evaluation::needs::within_depth;
use crate::expression::{Curvature, Expression, Filling, Index, World};
use crate::geometry::Level;
use crate::normal_form::{self, Budget, Factor, Label, Monomial, Parity, Slot, Term, normal_sum};
use crate::rational::Rational;
use crate::symmetry::{Sign, SignedPermutation, SlotSymmetry};

/// Steps of the normal forms of one claim.
const BUDGET: u64 = 200_000;
/// Products of one side.
const PRODUCTS: usize = 200;
/// Nodes of both sides that are looked at, and factors of one product.
const NODES: usize = 2_000;
const FACTORS: usize = 32;
/// From here on dummies get numbers of their own, so that a nested one meets no other.
const CLOSED: u32 = 1 << 20;

/// The verdict on a claim whose sides have one normal form, in all dimensions of its world, without a draw; nothing
/// otherwise, which says nothing.
pub fn holds_by_form(claim: &Claim) -> Option<Verdict> {
    [&claim.left, &claim.right].into_iter().try_for_each(within_depth).ok()?;
    let mut forms = Forms { world: &claim.world, kernels: Vec::new(), closed: CLOSED, left: NODES };
    let left = forms.expanded(&claim.left)?;
    let right = forms.expanded(&claim.right)?;
    let sides = left.into_iter().chain(right.into_iter().map(|(number, factors)| (-number, factors)));
    let terms: Option<Vec<Term>> = sides.map(|(number, factors)| term(number, factors)).collect();
    let sum = normal_sum(&terms?, &mut Budget::new(BUDGET)).ok()?;
    let dimensions = super::dimensions(&claim.world);
    let holds = sum.is_zero() && !dimensions.is_empty();
    holds.then_some(Verdict::Holds { dimensions, undefined: Vec::new(), draws: 0, error_bits: u32::MAX })
}

/// A factor of a product, its slots with the numbers of their labels.
#[derive(Clone, Debug)]
struct Part {
    kernel: u32,
    slots: Vec<(Entry, Index)>,
    symmetry: SlotSymmetry,
    /// How many of its first slots are partial derivatives.
    partials: usize,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Entry {
    Label(u32),
    Member(u32),
}

/// A number times a product.
type Product = (Rational, Vec<Part>);

struct Forms<'a> {
    world: &'a World,
    /// What kernels are called, by their numbers: derivatives, then the expression without its slots.
    kernels: Vec<(String, Option<&'a Expression>)>,
    closed: u32,
    left: usize,
}

impl<'a> Forms<'a> {
    /// A side multiplied out. The depth of expressions is bounded by whoever makes them; nodes are counted.
    fn expanded(&mut self, expression: &'a Expression) -> Option<Vec<Product>> {
        self.left = self.left.checked_sub(1)?;
        let mut products = match expression {
            Expression::Number(number) => vec![(*number, Vec::new())],
            Expression::Sum(terms) => {
                let mut all = Vec::new();
                for term in terms {
                    all.extend(self.expanded(term)?);
                }
                all
            }
            Expression::Product(factors) => {
                let mut all = vec![(Rational::ONE, Vec::new())];
                for factor in factors {
                    let own = self.expanded(factor)?;
                    all = multiplied(&all, &own)?;
                }
                all
            }
            Expression::Quotient(over, under) => match &**under {
                Expression::Number(number) => {
                    let share = number.inverse()?;
                    let scaled = |(own, parts): Product| Some((own.checked_mul(share)?, parts));
                    self.expanded(over)?.into_iter().map(scaled).collect::<Option<_>>()?
                }
                under => {
                    let whole = self.whole("over ", under);
                    multiplied(&self.expanded(over)?, &[(Rational::ONE, vec![whole])])?
                }
            },
            Expression::Partial(index, of) => self.derived(*index, of, "d ")?,
            Expression::Covariant { metric, index, of } => self.derived(*index, of, &format!("D{metric} "))?,
            Expression::Power(..)
            | Expression::Magnitude(_)
            | Expression::Function(..)
            | Expression::Determinant(_) => {
                vec![(Rational::ONE, vec![self.whole("", expression)])]
            }
            other => vec![(Rational::ONE, vec![self.part(other)?])],
        };
        if products.len() > PRODUCTS {
            return None;
        }
        products.iter_mut().for_each(|(_, parts)| self.close(parts));
        Some(products)
    }

    /// A derivative of a sum of single factors with numbers.
    fn derived(&mut self, index: Index, of: &'a Expression, sign: &str) -> Option<Vec<Product>> {
        let mut found = Vec::new();
        for (number, parts) in self.expanded(of)? {
            let [part] = <[Part; 1]>::try_from(parts).ok()?;
            let (name, whole) = self.kernels.get(part.kernel as usize)?.clone();
            if whole.is_some() {
                return None;
            }
            let count = part.slots.len() + 1;
            let mut symmetry = part.symmetry.embedded(1, count)?;
            let is_partial = sign == "d ";
            let plain = |index: &Index| index.level != Level::Up;
            let next = part.slots.first().filter(|(_, next)| part.partials > 0 && plain(next));
            if is_partial && plain(&index) && next.is_some() {
                let exchange = SignedPermutation::exchange(count, &[0], &[1], Sign::Plus)?;
                symmetry = symmetry.and(&SlotSymmetry::new(count, &[exchange])?);
            }
            let kernel = self.kernel(format!("{sign}{name}"), None);
            let slots = std::iter::once((entry(index), index)).chain(part.slots).collect();
            let partials = if is_partial { part.partials + 1 } else { 0 };
            found.push((number, vec![Part { kernel, slots, symmetry, partials }]));
        }
        Some(found)
    }

    /// A field or a tensor of geometry.
    fn part(&mut self, expression: &'a Expression) -> Option<Part> {
        let count = expression.slots().len();
        let (name, symmetry) = match expression {
            Expression::Field { field, .. } => {
                (format!("field {field}"), of_field(&self.world.fields.get(*field)?.symmetries, count)?)
            }
            Expression::Defined { definition, .. } => (format!("defined {definition}"), SlotSymmetry::none(count)),
            Expression::Delta(_) => ("delta".to_owned(), SlotSymmetry::symmetric(2, &[0, 1])?),
            Expression::Metric { metric, .. } => (format!("metric {metric}"), SlotSymmetry::symmetric(2, &[0, 1])?),
            Expression::Epsilon { metric, .. } => {
                let all: Vec<usize> = (0..count).collect();
                (format!("epsilon {metric:?}"), SlotSymmetry::antisymmetric(count, &all)?)
            }
            Expression::Christoffel { metric, .. } => (format!("connection {metric}"), SlotSymmetry::christoffel()),
            Expression::Curvature { metric, kind, .. } => {
                let symmetry = match kind {
                    Curvature::Riemann | Curvature::Weyl => SlotSymmetry::riemann(),
                    Curvature::Ricci | Curvature::Einstein => SlotSymmetry::symmetric(2, &[0, 1])?,
                    Curvature::Scalar => SlotSymmetry::none(0),
                };
                (format!("curvature {metric} {kind:?}"), symmetry)
            }
            _ => return None,
        };
        let slots = expression.slots().iter().map(|index| (entry(*index), *index)).collect();
        Some(Part { kernel: self.kernel(name, None), slots, symmetry, partials: 0 })
    }

    /// A scalar as one whole.
    fn whole(&mut self, name: &str, of: &'a Expression) -> Part {
        let kernel = self.kernel(name.to_owned(), Some(of));
        Part { kernel, slots: Vec::new(), symmetry: SlotSymmetry::none(0), partials: 0 }
    }

    fn kernel(&mut self, name: String, whole: Option<&'a Expression>) -> u32 {
        let at = self.kernels.iter().position(|known| *known == (name.clone(), whole)).unwrap_or_else(|| {
            self.kernels.push((name, whole));
            self.kernels.len() - 1
        });
        u32::try_from(at).unwrap_or(u32::MAX)
    }

    /// A label that stands twice is summed here, and gets a number that no other has.
    fn close(&mut self, parts: &mut [Part]) {
        let all: Vec<u32> = parts.iter().flat_map(|part| &part.slots).filter_map(|(entry, _)| open(*entry)).collect();
        for (at, label) in all.iter().enumerate() {
            if all.iter().take(at).any(|other| other == label) {
                self.closed += 1;
                let slots = parts.iter_mut().flat_map(|part| &mut part.slots);
                slots.filter(|(entry, _)| *entry == Entry::Label(*label)).for_each(|(entry, _)| {
                    *entry = Entry::Label(self.closed);
                });
            }
        }
    }
}

fn entry(index: Index) -> Entry {
    match index.filling {
        Filling::Label(label) => Entry::Label(u32::from(label)),
        Filling::Member(member) => Entry::Member(u32::try_from(member).unwrap_or(u32::MAX)),
    }
}

/// A label that is not summed yet.
fn open(entry: Entry) -> Option<u32> {
    match entry {
        Entry::Label(label) if label < CLOSED => Some(label),
        _ => None,
    }
}

fn multiplied(all: &[Product], own: &[Product]) -> Option<Vec<Product>> {
    if all.len().saturating_mul(own.len()) > PRODUCTS {
        return None;
    }
    let mut found = Vec::new();
    for (number, parts) in all {
        for (factor, more) in own {
            if parts.len() + more.len() > FACTORS {
                return None;
            }
            found.push((number.checked_mul(*factor)?, [&parts[..], more].concat()));
        }
    }
    Some(found)
}

/// The symmetry of a field from its exchanges.
fn of_field(exchanges: &[crate::sample::SlotSymmetry], count: usize) -> Option<SlotSymmetry> {
    let mut generators = Vec::new();
    for exchange in exchanges {
        let sign = if exchange.negative { Sign::Minus } else { Sign::Plus };
        generators.push(SignedPermutation::new(&exchange.slots, sign)?);
    }
    SlotSymmetry::new(count, &generators)
}

fn term(number: Rational, parts: Vec<Part>) -> Option<Term> {
    let all: Vec<(Entry, usize)> =
        parts.iter().flat_map(|part| &part.slots).map(|(entry, index)| (*entry, index.family)).collect();
    let mut factors = Vec::new();
    for part in parts {
        let mut slots = Vec::new();
        for (own, index) in part.slots {
            let same: Vec<usize> = all.iter().filter(|(other, _)| *other == own).map(|(_, family)| *family).collect();
            let family = u16::try_from(index.family).ok()?;
            let label = match own {
                Entry::Member(member) => Label::Component(member),
                Entry::Label(label) if label < CLOSED => Label::Free(label),
                Entry::Label(label) if same == [index.family; 2] => {
                    Label::Dummy { family, number: label, movable: false }
                }
                Entry::Label(_) => return None,
            };
            let level = match index.level {
                Level::Up => normal_form::Level::Up,
                Level::Down => normal_form::Level::Down,
                Level::Inert => normal_form::Level::Neutral,
            };
            slots.push(Slot { label, level });
        }
        let symmetry = part.symmetry.into();
        factors.push(Factor { kernel: part.kernel, slots, parity: Parity::Commuting, symmetry });
    }
    Term::new(number, Monomial::new(factors).ok()?, Vec::new())
}
