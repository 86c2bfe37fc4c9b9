//! Products as monomials of the algebra: kernels and letters get numbers, slots get labels and levels.
//!
//! One table of names serves a whole statement, so that the normal forms of its terms can be compared. Traps: only
//! kernels of known meaning commute for certain; others keep their order by a rank in their name. An index under a
//! partial derivative does not move between levels, and neither do capitals, which name spinors and gauge groups.

use std::cell::RefCell;
use std::sync::Arc;

use compact_str::{CompactString, format_compact};
use indexwise_algebra::normal_form::{
    Bracket, Budget, Factor, Label, Level, Monomial, Outcome, Parity, Place, Slot, Sum, Term, Unfinished, Vanishing,
    exchange, normal_form, normal_sum, vanishing_bracket, vanishing_pair,
};
use indexwise_algebra::rational::Rational;
use indexwise_algebra::symmetry::{Sign, SignedPermutation, SlotSymmetry};
use indexwise_grammar::conventions::Kind;
use indexwise_grammar::tree;

use crate::conventions::built_in::{LetterClass, class_of, is_metric_by_custom};
use crate::conventions::meanings::Role;

use super::product::{Bracketed, Piece, Product};
use super::symmetries::{exchanges, is_known};
use super::uses::{Filling, Origin, UsedSlot};
use super::{Eyes, Side};

/// Steps for the normal forms of one statement; what is not done by then is not reported.
const STEPS: u64 = 2_000_000;

/// The names of one statement, and what its normal forms may still cost.
pub struct Monomials<'e, 'a> {
    eyes: &'e Eyes<'a>,
    kernels: RefCell<Vec<CompactString>>,
    letters: RefCell<Vec<CompactString>>,
    budget: RefCell<Budget>,
    order: Order,
}

/// Which kernels keep their order in a product.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Order {
    /// Those of unknown meaning: they may be matrices or operators.
    OfUnknown,
    /// Those that are declared not to commute, or by custom do not: fields are taken for numbers.
    OfOperators,
}

/// Why a product is zero.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Zero {
    /// Pieces that are symmetric and pieces that are antisymmetric in two letters.
    Pair {
        /// The letters.
        letters: (CompactString, CompactString),
        /// Numbers of the symmetric pieces.
        symmetric: Vec<usize>,
        /// Numbers of the antisymmetric pieces.
        antisymmetric: Vec<usize>,
    },
    /// A piece is antisymmetric in the two slots that one letter joins.
    Trace {
        /// The letter.
        letter: CompactString,
        /// The number of the piece.
        piece: usize,
    },
    /// The symmetries together leave nothing.
    Together,
}

impl<'e, 'a> Monomials<'e, 'a> {
    /// An empty table.
    pub fn new(eyes: &'e Eyes<'a>) -> Self {
        let budget = RefCell::new(Budget::new(STEPS));
        Self { eyes, kernels: RefCell::default(), letters: RefCell::default(), budget, order: Order::OfUnknown }
    }

    /// An empty table for products of components, which are numbers unless something speaks against it.
    pub(crate) fn of_components(eyes: &'e Eyes<'a>) -> Self {
        Self { order: Order::OfOperators, ..Self::new(eyes) }
    }

    /// Why a product is zero by a contraction, if it is.
    pub fn contraction_zero(&self, product: &Product) -> Option<Zero> {
        let monomial = self.monomial(product)?;
        if product.brackets.is_empty() {
            return match vanishing_pair(&monomial) {
                Some(reason) => self.reason(product, reason),
                None => self.zero_together(product, &monomial),
            };
        }
        // A bracket that is zero by itself is another finding.
        if product.brackets.iter().any(|bracket| self.bracket_zero(product, bracket)) {
            return None;
        }
        self.sum([product]).is_some_and(|sum| sum.is_zero()).then_some(Zero::Together)
    }

    fn zero_together(&self, product: &Product, monomial: &Monomial) -> Option<Zero> {
        let contracted = product.letters().any(|letter| product.count(letter) == 2);
        let zero = normal_form(monomial, &mut self.budget.borrow_mut()) == Outcome::Zero;
        (zero && contracted && !product.reach_unclear).then_some(Zero::Together)
    }

    fn reason(&self, product: &Product, reason: Vanishing) -> Option<Zero> {
        let name = |label: Label| match label {
            Label::Dummy { number, .. } => self.letters.borrow().get(number as usize).cloned(),
            _ => None,
        };
        match reason {
            Vanishing::Contraction { first, second, symmetric, antisymmetric } => {
                // Equal factors, of which one may stand under the derivative of the other.
                let apart = symmetric.len() == 1 && antisymmetric.len() == 1;
                if product.reach_unclear && !apart {
                    return None;
                }
                Some(Zero::Pair { letters: (name(first)?, name(second)?), symmetric, antisymmetric })
            }
            Vanishing::Trace { label, factor } => Some(Zero::Trace { letter: name(label)?, piece: factor }),
            Vanishing::Kernel { .. } | Vanishing::Components { .. } => None,
        }
    }

    /// Whether a bracket of a product holds slots of the opposite symmetry.
    pub fn bracket_zero(&self, product: &Product, bracket: &Bracketed) -> bool {
        let Some(monomial) = self.monomial(product) else { return false };
        vanishing_bracket(&monomial, &as_bracket(bracket)).is_some()
    }

    /// The product without its deltas and metrics that are contracted with another slot: `\delta_{ij} A_j` is `A_i`. A
    /// metric stays where the slot stands under a partial derivative.
    fn without_metrics(&self, product: &Product) -> Product {
        let mut left = product.clone();
        while let Some(shorter) = self.without_a_metric(&left) {
            left = shorter;
        }
        left
    }

    fn without_a_metric(&self, product: &Product) -> Option<Product> {
        if !product.brackets.is_empty() || product.pieces.len() < 2 {
            return None;
        }
        let metrics = product.pieces.iter().enumerate().filter(|(_, piece)| self.is_metric(piece));
        metrics.flat_map(|(at, metric)| contracted(product, at, metric)).find(|one| !one.held).map(|one| one.product)
    }

    fn is_metric(&self, piece: &Piece) -> bool {
        let own = piece.made.slots.len() == 2 && piece.made.own_slots().count() == 2;
        let known = self.eyes.meanings.known(&piece.made.kernel, 2);
        let custom =
            is_metric_by_custom(&piece.made.kernel) && (piece.made.letter == "\\delta" || !self.eyes.customs.all_below);
        let role = known.map_or(custom, |known| matches!(known.role, Some(Role::Metric { .. })));
        own && role && !piece.opaque
    }

    /// The normal form of a sum of products; nothing if a coefficient is not exact or the budget is used up.
    pub fn sum<'p>(&self, products: impl IntoIterator<Item = &'p Product>) -> Option<Sum> {
        let terms: Option<Vec<Term>> = products.into_iter().map(|product| self.term(product)).collect();
        self.within(normal_sum(&terms?, &mut self.budget.borrow_mut()))
    }

    /// How a sum changes when two free letters are exchanged; nothing if that could not be found out.
    pub fn exchange(&self, sum: &Sum, one: &str, two: &str) -> Option<Option<Sign>> {
        let (one, two) = (self.letter(one), self.letter(two));
        self.within(exchange(sum, one, two, &mut self.budget.borrow_mut()))
    }

    fn within<T>(&self, result: Result<T, Unfinished>) -> Option<T> {
        result.ok()
    }

    fn term(&self, product: &Product) -> Option<Term> {
        let product = &self.without_metrics(product);
        let brackets = product.brackets.iter().map(as_bracket).collect();
        Term::new(product.coefficient?, self.monomial(product)?, brackets)
    }

    /// Whether two products are the same up to a number: the quotient of the second by the first, if it is known.
    pub fn quotient(&self, one: &Product, two: &Product) -> Option<Rational> {
        if one.pieces.is_empty() || two.pieces.is_empty() {
            return None;
        }
        let (first, second) = (self.sum([one])?, self.sum([two])?);
        let lead = |sum: &Sum| sum.terms().next().map(|(_, coefficient)| coefficient);
        let quotient = lead(&second)?.checked_div(lead(&first)?)?;
        let difference = self.within(second.plus(&first, -quotient))?;
        difference.is_zero().then_some(quotient)
    }

    fn monomial(&self, product: &Product) -> Option<Monomial> {
        let ordered = product.pieces.iter().filter(|piece| self.keeps_order(piece)).count();
        let mut rank = 0;
        let mut factors = Vec::with_capacity(product.pieces.len());
        for piece in &product.pieces {
            let keeps = self.keeps_order(piece);
            rank += usize::from(keeps);
            let slots = piece.made.slots.iter().map(|slot| self.slot(product, slot)).collect::<Option<_>>()?;
            let key = piece.key(if !keeps || ordered < 2 { 0 } else { rank });
            let kernel = number(&self.kernels, &key);
            factors.push(Factor { kernel, slots, parity: Parity::Commuting, symmetry: self.symmetry(piece)? });
        }
        Monomial::new(factors).ok()
    }

    fn keeps_order(&self, piece: &Piece) -> bool {
        match self.order {
            Order::OfUnknown => !is_known(piece, self.eyes.meanings, self.eyes.customs),
            Order::OfOperators => {
                let meanings = self.eyes.meanings;
                let declared = meanings.is_kind(&piece.made.kernel, Kind::NonCommuting)
                    || meanings.is_kind(&piece.made.letter, Kind::NonCommuting);
                declared || !meanings.declares(&piece.made.kernel) && is_operator_by_custom(piece)
            }
        }
    }

    fn symmetry(&self, piece: &Piece) -> Option<Arc<SlotSymmetry>> {
        let generators: Option<Vec<SignedPermutation>> = exchanges(piece, self.eyes.meanings, self.eyes.customs)
            .into_iter()
            .map(|one| SignedPermutation::new(&one.images, if one.negative { Sign::Minus } else { Sign::Plus }))
            .collect();
        SlotSymmetry::new(piece.made.slots.len(), &generators?).map(Arc::new)
    }

    fn slot(&self, product: &Product, slot: &UsedSlot) -> Option<Slot> {
        let level = |letter: Option<&CompactString>| match slot.level {
            _ if letter.is_some_and(|letter| self.eyes.is_cartesian(letter)) => Level::Neutral,
            tree::Level::Up => Level::Up,
            tree::Level::Down => Level::Down,
        };
        match &slot.filling {
            Filling::Component(name) => Some(Slot { label: Label::Component(self.letter(name)), level: level(None) }),
            Filling::Index(letter) => {
                let number = self.letter(letter);
                let label = match product.count(letter) {
                    1 => Label::Free(number),
                    2 => Label::Dummy { family: self.eyes.family_of(letter), number, movable: moves(product, letter) },
                    _ => return None,
                };
                Some(Slot { label, level: level(Some(letter)) })
            }
        }
    }

    fn letter(&self, letter: &str) -> u32 {
        number(&self.letters, letter)
    }
}

/// A product that is shorter by a metric.
pub(crate) struct Contracted {
    /// The product without the metric, whose other index stands in the slot that it was contracted with.
    pub product: Product,
    /// The summed letter that is gone.
    pub letter: CompactString,
    /// The slot as it is now.
    pub slot: UsedSlot,
    /// Whether the slot is held in place by a partial derivative, so that this is no identity.
    pub held: bool,
}

/// The product without the metric at a place, for each way to contract it.
pub(crate) fn contracted(product: &Product, at: usize, metric: &Piece) -> Vec<Contracted> {
    let mut out = Vec::new();
    let [one, two] = metric.made.slots.as_slice() else { return out };
    for (joined, other) in [(one, two), (two, one)] {
        let Some(letter) = joined.letter().filter(|letter| product.count(letter) == 2) else { continue };
        // A connection with its first index lowered is another kernel.
        let others = product.pieces.iter().enumerate().filter(|(number, _)| *number != at);
        for (number, piece) in others.filter(|(_, piece)| piece.made.letter != "\\Gamma") {
            let slot = piece.made.slots.iter().position(|slot| slot.letter() == Some(letter));
            let Some((slot, filled)) = slot.and_then(|slot| Some((slot, piece.made.slots.get(slot)?))) else {
                continue;
            };
            let partial = piece.made.slots.iter().any(|slot| slot.origin == Origin::Partial);
            let held = partial && filled.origin == Origin::Own && metric.made.letter != "\\delta";
            let mut shorter = product.clone();
            let now = UsedSlot { filling: other.filling.clone(), level: other.level, ..filled.clone() };
            if let Some(place) = shorter.pieces.get_mut(number).and_then(|piece| piece.made.slots.get_mut(slot)) {
                *place = now.clone();
            }
            shorter.pieces.remove(at);
            out.push(Contracted { product: shorter, letter: letter.clone(), slot: now, held });
        }
    }
    out
}

/// Kernels whose factors keep their order by custom: matrices and spinors with their usual letters, bold basis vectors,
/// operators with hats.
fn is_operator_by_custom(piece: &Piece) -> bool {
    let matrix = matches!(piece.made.letter.as_str(), "\\gamma" | "\\sigma" | "\\tau" | "\\alpha" | "\\Gamma");
    let spinor = matches!(piece.made.letter.as_str(), "\\psi" | "\\Psi" | "\\chi");
    let dressed = ["\\hat ", "\\widehat ", "\\mathbf ", "\\bm ", "\\boldsymbol ", "\\vec "];
    let dressed = dressed.iter().any(|mark| piece.made.kernel.contains(mark));
    spinor || dressed || matrix && piece.made.own_slots().count() == 1
}

/// Whether the ends of a sum may change their levels: not where something with slots stands under a partial
/// derivative, and not for capitals. It is asked of the whole product, so that it is the same for terms that are
/// compared.
fn moves(product: &Product, letter: &CompactString) -> bool {
    let held = |piece: &Piece| {
        let partial = piece.made.slots.iter().any(|slot| slot.origin == Origin::Partial);
        partial && piece.made.own_slots().next().is_some()
    };
    !product.pieces.iter().any(held) && class_of(letter) != LetterClass::Capital
}

/// The number of a name in a table, which grows.
fn number(table: &RefCell<Vec<CompactString>>, name: &str) -> u32 {
    let mut table = table.borrow_mut();
    let at = table.iter().position(|known| known == name).unwrap_or_else(|| {
        table.push(name.into());
        table.len() - 1
    });
    u32::try_from(at).unwrap_or(u32::MAX)
}

fn as_bracket(bracket: &Bracketed) -> Bracket {
    let slots = bracket.slots.iter().map(|(factor, slot)| Place { factor: *factor, slot: *slot }).collect();
    Bracket { antisymmetric: bracket.antisymmetric, slots }
}

impl Piece {
    /// What makes it another kernel: its derivatives, its name, its slots, its rank among kernels that may not
    /// commute. A part that is not looked into is like no other.
    fn key(&self, rank: usize) -> CompactString {
        if self.opaque {
            return format_compact!("?{}", self.made.span.start);
        }
        let kinds: String = self
            .made
            .slots
            .iter()
            .map(|slot| match slot.origin {
                Origin::Own => 'o',
                Origin::Partial => 'p',
                Origin::Covariant => 'c',
            })
            .collect();
        let below = if self.below { "/" } else { "" };
        format_compact!("{below}{} {} {kinds} {rank}", self.operators.join(" "), self.made.kernel)
    }
}

impl Product {
    /// The index letters in it, as often as they stand.
    pub fn letters(&self) -> impl Iterator<Item = &CompactString> {
        self.pieces.iter().flat_map(|piece| &piece.made.slots).filter_map(UsedSlot::letter)
    }

    /// How often an index letter stands in it.
    pub fn count(&self, letter: &CompactString) -> usize {
        self.letters().filter(|other| *other == letter).count()
    }

    /// Whether another product is made of the same kernels.
    pub fn has_kernels_of(&self, other: &Self) -> bool {
        let keys = |product: &Self| {
            let mut keys: Vec<CompactString> = product.pieces.iter().map(|piece| piece.key(0)).collect();
            keys.sort();
            keys
        };
        self.pieces.len() == other.pieces.len() && keys(self) == keys(other)
    }
}

impl Side {
    /// The letters that are free in its first product.
    pub fn free_letters(&self) -> Vec<CompactString> {
        let Some(first) = self.products.first() else { return Vec::new() };
        first.letters().filter(|letter| first.count(letter) == 1).cloned().collect()
    }
}
