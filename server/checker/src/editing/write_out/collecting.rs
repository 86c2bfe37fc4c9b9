//! Every choice of values written and compared: what vanishes is put aside, what coincides becomes one term.
//!
//! The text of a choice is the author's tree with values in it. Its value is the normal form of the products that the
//! term flattens to, with the values as components; normal forms divided by their leading coefficient are equal exactly
//! for terms that coincide up to a number. Where the products do not show every letter that takes a value (one stands
//! inside of something that is not looked into), nothing is compared and every choice stays a term of its own.

use compact_str::CompactString;
use indexwise_algebra::normal_form::Sum;
use indexwise_algebra::rational::Rational;
use indexwise_grammar::conventions::Kind;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{Atom, Factor, ItemKind, Level, Term, each_item_mut};

use crate::conventions::built_in::is_derivative;
use crate::conventions::meanings::Role;
use crate::paper::Asked;
use crate::terms::symmetries::is_known;
use crate::terms::uses::{Filling, Origin, UsedSlot};
use crate::terms::{Eyes, Monomials, Piece, Product, all_products};

use super::place::{Located, factors_of, items_of, letter_of};
use super::scaling::{names_of, times, without_deltas};
use super::{Because, Summed, Vanished, forms_of_term};

/// What is left of the choices.
#[derive(Debug, Default)]
pub(super) struct Collected {
    pub terms: Vec<Term>,
    pub vanished: Vec<Vanished>,
    /// Whether every choice could be compared.
    pub complete: bool,
    /// Kernels that were taken to commute with themselves.
    pub commuting: Vec<CompactString>,
}

/// Choices that coincide up to a number.
struct Group {
    /// Their normal form with the leading coefficient 1; nothing if it is not known.
    form: Option<Sum>,
    /// The leading coefficient of the first.
    first: Rational,
    /// The sum of all, in units of the first.
    total: Option<Rational>,
    /// The choices by their numbers, as written.
    members: Vec<(usize, Term)>,
}

/// What a choice is worth.
enum Value {
    Unknown,
    Zero(Because),
    /// A normal form with the leading coefficient 1, and what it was.
    Form(Sum, Rational),
}

/// Writes and compares all choices. The caller has bounded their number.
pub(super) fn collect(asked: &Asked<'_>, located: &Located<'_>, letters: &[Summed]) -> Collected {
    let products = comparable(asked, located);
    let scribe = Scribe { eyes: asked.eyes, located, deltas: deltas(asked.eyes, located) };
    let monomials = Monomials::of_components(asked.eyes);
    let mut groups: Vec<Group> = Vec::new();
    let mut vanished: Vec<(usize, Vanished)> = Vec::new();
    let mut complete = true;
    for (number, choice) in choices(letters).into_iter().enumerate() {
        let value = products.as_deref().map(|products| scribe.value(&monomials, products, &choice));
        let written = scribe.written(&choice);
        match value.unwrap_or(Value::Unknown) {
            Value::Zero(because) => {
                vanished.push((number, Vanished { term: forms_of_term(&scribe.filled(&choice)), because }));
            }
            Value::Form(form, lead) => join(&mut groups, (number, written), form, lead),
            Value::Unknown => {
                complete = false;
                let total = Some(Rational::ONE);
                groups.push(Group { form: None, first: Rational::ONE, total, members: vec![(number, written)] });
            }
        }
    }
    let met = groups.iter().any(|group| group.members.len() > 1);
    let commuting = products.filter(|_| met).map(|products| commuting(asked.eyes, &products)).unwrap_or_default();
    let mut out = Collected { complete, commuting, ..Collected::default() };
    groups.into_iter().for_each(|group| group.settle(&mut out.terms, &mut vanished));
    vanished.sort_by_key(|(number, _)| *number);
    out.vanished = vanished.into_iter().map(|(_, vanished)| vanished).collect();
    out
}

/// Puts a choice to those that it coincides with.
fn join(groups: &mut Vec<Group>, member: (usize, Term), form: Sum, lead: Rational) {
    match groups.iter_mut().find(|group| group.form.as_ref() == Some(&form)) {
        Some(group) => {
            let share = lead.checked_div(group.first);
            group.total = group.total.and_then(|total| total.checked_add(share?));
            group.members.push(member);
        }
        None => {
            groups.push(Group { form: Some(form), first: lead, total: Some(Rational::ONE), members: vec![member] });
        }
    }
}

impl Group {
    /// One term with the coefficient of all, or none if they cancel. Where the coefficient cannot be written, as many
    /// terms as there are choices.
    fn settle(self, terms: &mut Vec<Term>, vanished: &mut Vec<(usize, Vanished)>) {
        if self.total == Some(Rational::ZERO) {
            let cancels = |(number, term): (usize, Term)| {
                (number, Vanished { term: forms_of_term(&term), because: Because::Cancels })
            };
            return vanished.extend(self.members.into_iter().map(cancels));
        }
        let whole = self.members.first().zip(self.total).and_then(|((_, first), total)| times(first, total));
        match whole {
            Some(whole) => terms.push(whole),
            None => terms.extend(self.members.into_iter().map(|(_, term)| term)),
        }
    }
}

/// A letter with one of its values.
type Valued<'l> = (&'l CompactString, &'l CompactString);

/// All choices of values; those of the last letter change fastest.
fn choices(letters: &[Summed]) -> Vec<Vec<Valued<'_>>> {
    let mut out: Vec<Vec<Valued<'_>>> = vec![Vec::new()];
    for letter in letters {
        let mut longer = Vec::with_capacity(out.len().saturating_mul(letter.values.len()));
        for choice in &out {
            for value in &letter.values {
                longer.push([choice.as_slice(), &[(&letter.letter, value)]].concat());
            }
        }
        out = longer;
    }
    out
}

/// Puts values into a term.
struct Scribe<'a, 't> {
    eyes: &'a Eyes<'a>,
    located: &'a Located<'t>,
    /// The numbers of the factors that are deltas of two values.
    deltas: Vec<usize>,
}

impl Scribe<'_, '_> {
    fn value_of<'l>(&self, letter: &CompactString, span: Span, choice: &[Valued<'l>]) -> Option<&'l CompactString> {
        let value = choice.iter().find(|(other, _)| *other == letter).map(|(_, value)| *value);
        value.filter(|_| self.located.takes(letter, span) && self.eyes.is_index(letter, span))
    }

    /// The term with values in it.
    fn filled(&self, choice: &[Valued<'_>]) -> Term {
        let mut term = self.located.term.clone();
        each_item_mut(&mut term, &mut |item| {
            let value = letter_of(item).and_then(|letter| self.value_of(letter, item.span, choice));
            if let Some(value) = value {
                item.kind = item_of(value);
            }
        });
        term
    }

    /// The same without deltas that are 1.
    fn written(&self, choice: &[Valued<'_>]) -> Term {
        let mut term = self.filled(choice);
        without_deltas(&mut term, &self.deltas);
        term
    }

    /// A product with values in it.
    fn product(&self, product: &Product, choice: &[Valued<'_>]) -> Product {
        let mut product = product.clone();
        for slot in product.pieces.iter_mut().flat_map(|piece| &mut piece.made.slots) {
            let Some(letter) = slot.letter().cloned() else { continue };
            if let Some(value) = self.value_of(&letter, slot.span, choice) {
                slot.filling = Filling::Component(value.clone());
                if self.eyes.is_cartesian(&letter) {
                    slot.level = Level::Down;
                }
            }
        }
        product
    }

    fn value(&self, monomials: &Monomials<'_, '_>, products: &[Product], choice: &[Valued<'_>]) -> Value {
        let mut left: Vec<Product> = Vec::with_capacity(products.len());
        let mut zero = None;
        for product in products {
            let filled = self.product(product, choice);
            match delta_zero(&filled, self.eyes) {
                Some(piece) => zero = zero.or_else(|| self.because(piece, choice)),
                None => left.push(without_ones(filled, self.eyes)),
            }
        }
        let Some(sum) = monomials.sum(&left) else { return Value::Unknown };
        let Some((_, lead)) = sum.terms().next() else {
            return Value::Zero(
                zero.or_else(|| self.zero_factor(monomials, &left, choice)).unwrap_or(Because::Symmetry),
            );
        };
        let form = lead.inverse().and_then(|inverse| Sum::default().plus(&sum, inverse).ok());
        form.map_or(Value::Unknown, |form| Value::Form(form, lead))
    }

    /// The first factor that is zero by itself.
    fn zero_factor(&self, monomials: &Monomials<'_, '_>, left: &[Product], choice: &[Valued<'_>]) -> Option<Because> {
        let alone = |piece: &Piece| Product {
            coefficient: Some(Rational::ONE),
            pieces: vec![piece.clone()],
            ..Product::default()
        };
        let zero = |piece: &&Piece| monomials.sum([&alone(piece)]).is_some_and(|sum| sum.is_zero());
        self.because(left.iter().flat_map(|product| &product.pieces).find(zero)?, choice)
    }

    /// The factor of a piece as it is written.
    fn because(&self, piece: &Piece, choice: &[Valued<'_>]) -> Option<Because> {
        let term = self.filled(choice);
        let own: Vec<&CompactString> = piece.made.own_slots().map(name_of).collect();
        let is_it = |factor: &&Factor| {
            let mut names = names_of(factor);
            let mut takes = |name: &&CompactString| {
                let at = names.iter().position(|other| other == name);
                at.map(|at| names.swap_remove(at)).is_some()
            };
            matches!(&factor.atom, Atom::Kernel(kernel) if kernel.letter == piece.made.letter)
                && piece.made.span.holds(factor.span)
                && own.iter().all(&mut takes)
        };
        let factor = factors_of(&term).into_iter().find(is_it)?.clone();
        Some(Because::Factor(forms_of_term(&Term::of(vec![factor]))))
    }
}

/// The products of a term, if they show every letter that takes a value.
fn comparable(asked: &Asked<'_>, located: &Located<'_>) -> Option<Vec<Product>> {
    if asked.formula.passed_over {
        return None;
    }
    let mut products = all_products(located.term, asked.eyes)?;
    if let [product] = products.as_mut_slice() {
        // A number that is not plain is the same in every choice.
        product.coefficient = product.coefficient.or(Some(Rational::ONE));
    }
    let lone = products.len() == 1;
    let opaque = |product: &Product| {
        let mut starts: Vec<u32> =
            product.pieces.iter().filter(|piece| piece.opaque).map(|piece| piece.made.span.start).collect();
        starts.sort_unstable();
        starts.windows(2).all(|pair| matches!(pair, [one, two] if one != two))
    };
    let taken: Vec<(&CompactString, Span)> = items_of(located.term)
        .into_iter()
        .filter_map(|item| Some((letter_of(item)?, item.span)))
        .filter(|(letter, span)| located.takes(letter, *span) && asked.eyes.is_index(letter, *span))
        .collect();
    let shown = taken.iter().all(|place| {
        let items = taken.iter().filter(|other| *other == place).count();
        shows(&products, *place, items, lone)
    });
    (shown && !products.is_empty() && products.iter().all(opaque)).then_some(products)
}

/// Whether the products have a slot for a letter at a place, which `items` items share (those of one macro call do).
fn shows(products: &[Product], (letter, span): (&CompactString, Span), items: usize, lone: bool) -> bool {
    let at = |slot: &UsedSlot| slot.letter() == Some(letter) && slot.span == span;
    let slots = |product: &Product| product.pieces.iter().flat_map(|piece| &piece.made.slots).filter(|s| at(s)).count();
    let inside = |piece: &Piece| {
        piece.opaque && piece.made.span.holds(span) && piece.made.slots.iter().any(|slot| slot.letter() == Some(letter))
    };
    if items > 1 {
        return lone && products.iter().all(|product| slots(product) == items);
    }
    products.iter().any(|product| slots(product) > 0 || product.pieces.iter().any(inside))
}

/// The factors of a term that are Kronecker's deltas and get two values, by their numbers.
fn deltas(eyes: &Eyes<'_>, located: &Located<'_>) -> Vec<usize> {
    let filled = |factor: &Factor| {
        let mut items = factor.scripts.iter().flat_map(|script| &script.items);
        items.all(|item| match &item.kind {
            ItemKind::Number(_) => true,
            ItemKind::Letter(letter) => located.takes(letter, item.span) && eyes.is_index(letter, item.span),
            _ => false,
        })
    };
    let delta = |factor: &Factor| {
        let kernel = matches!(&factor.atom, Atom::Kernel(kernel) if kernel.name == DELTA);
        kernel && factor.marks.is_empty() && means_delta(eyes) && filled(factor)
    };
    let factors = &located.term.factors;
    // What a derivative acts on cannot be taken from under it.
    let derived = |at: usize| {
        let before = at.checked_sub(1).and_then(|at| factors.get(at));
        before.is_some_and(|factor| matches!(&factor.atom, Atom::Kernel(kernel) if is_derivative(&kernel.letter)))
    };
    let numbered = factors.iter().enumerate();
    numbered.filter(|(at, factor)| delta(factor) && !derived(*at)).map(|(at, _)| at).collect()
}

const DELTA: &str = "\\delta";

/// Whether the kernel is Kronecker's delta here: by custom, unless it is declared to be something else.
fn means_delta(eyes: &Eyes<'_>) -> bool {
    let metric = |role: &Option<Role>| matches!(role, Some(Role::Metric { .. }));
    let known = eyes.meanings.known(DELTA, 2);
    known.is_none_or(|known| metric(&known.role)) && !eyes.meanings.is_kind(DELTA, Kind::Variation)
}

/// The two values of a delta.
fn delta_values<'p>(piece: &'p Piece, eyes: &Eyes<'_>) -> Option<(&'p CompactString, &'p CompactString)> {
    let [one, two] = piece.made.slots.as_slice() else { return None };
    let own = one.origin == Origin::Own && two.origin == Origin::Own;
    if piece.opaque || piece.below || !own || piece.made.kernel != DELTA || !means_delta(eyes) {
        return None;
    }
    match (&one.filling, &two.filling) {
        (Filling::Component(one), Filling::Component(two)) => Some((one, two)),
        _ => None,
    }
}

/// A delta of two different values.
fn delta_zero<'p>(product: &'p Product, eyes: &Eyes<'_>) -> Option<&'p Piece> {
    let differ = |piece: &&Piece| delta_values(piece, eyes).is_some_and(|(one, two)| one != two);
    product.pieces.iter().find(differ).filter(|_| product.brackets.is_empty())
}

/// A product without its deltas of equal values.
fn without_ones(mut product: Product, eyes: &Eyes<'_>) -> Product {
    if product.brackets.is_empty() {
        product.pieces.retain(|piece| delta_values(piece, eyes).is_none_or(|(one, two)| one != two));
    }
    product
}

/// Kernels of unknown meaning that stand in a product more than once.
fn commuting(eyes: &Eyes<'_>, products: &[Product]) -> Vec<CompactString> {
    let mut out: Vec<CompactString> = Vec::new();
    for product in products {
        for (at, piece) in product.pieces.iter().enumerate() {
            let alike = |other: &Piece| {
                other.made.kernel == piece.made.kernel && other.made.slots.len() == piece.made.slots.len()
            };
            let again = product.pieces.iter().skip(at + 1).any(alike);
            let known = piece.opaque || is_known(piece, eyes.meanings, eyes.customs);
            if again && !known && !out.contains(&piece.made.kernel) {
                out.push(piece.made.kernel.clone());
            }
        }
    }
    out
}

fn name_of(slot: &UsedSlot) -> &CompactString {
    match &slot.filling {
        Filling::Index(name) | Filling::Component(name) => name,
    }
}

/// A value as an item of a script.
fn item_of(value: &CompactString) -> ItemKind {
    let number = !value.is_empty() && value.bytes().all(|byte| byte.is_ascii_digit());
    if number { ItemKind::Number(value.clone()) } else { ItemKind::Letter(value.clone()) }
}
