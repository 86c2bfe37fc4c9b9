//! Flattening: a term of the tree to products of pieces.
//!
//! One walk over the factors of a term. Derivatives wait until something comes that they can act on; a sum in
//! brackets multiplies what there is so far by its terms. How far a derivative reaches beyond the next factor is
//! not written (`\partial_k A B`), so the product remembers that it is unclear.

use compact_str::CompactString;
use indexwise_algebra::rational::Rational;
use indexwise_grammar::conventions::Kind;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{
    Atom, Bracket, Factor, Fraction, FractionKind, Group, Item, ItemKind, Joint, Level, Product as ProductSign, Script,
    SignKind, Sum, Term,
};

use crate::conventions::built_in::is_derivative;

use super::uses::{Filling, Mark, Origin, Use, UsedSlot, use_of};
use super::{Eyes, Side};

/// Products beyond which a side is not multiplied out.
const PRODUCTS: usize = 64;
/// Pieces beyond which a product is left out.
const PIECES: usize = 24;

/// A product of pieces.
#[derive(Clone, Debug, Default)]
pub struct Product {
    /// The number of its term in the side.
    pub term: usize,
    /// The term's place.
    pub span: Span,
    /// The numbers in it, with the sign; nothing if they are not exact or not plain.
    pub coefficient: Option<Rational>,
    /// Its pieces in the order written.
    pub pieces: Vec<Piece>,
    /// Brackets over slots, each `[..]` or `(..)`, as pairs of piece and slot.
    pub brackets: Vec<Bracketed>,
    /// Whether more than the next factor may stand under a derivative.
    pub reach_unclear: bool,
}

/// Slots that are symmetrised or antisymmetrised together.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Bracketed {
    /// `[..]` rather than `(..)`.
    pub antisymmetric: bool,
    /// Numbers of piece and slot.
    pub slots: Vec<(usize, usize)>,
}

/// A kernel with the derivatives that act on it, or something that is not looked into.
#[derive(Clone, Debug, Default)]
pub struct Piece {
    /// What it is.
    pub made: Use,
    /// The derivatives before it, outermost first, by their kernels; their slots come first in `made.slots`.
    pub operators: Vec<CompactString>,
    /// Whether it is no kernel but a part that is not looked into.
    pub opaque: bool,
    /// Whether it stands below a fraction line.
    pub below: bool,
}

/// The terms of a side.
pub fn side(sum: &Sum, eyes: &Eyes<'_>) -> Side {
    let mut out = Side { span: sum.span, complete: true, ..Side::default() };
    out.zero = matches!(sum.terms.as_slice(), [term] if matches!(term.factors.as_slice(), [Factor { atom: Atom::Number(number), .. }] if number == "0"));
    for (number, term) in sum.terms.iter().enumerate() {
        match products(term, number, eyes) {
            Some(products) => out.products.extend(products),
            None => out.complete = false,
        }
    }
    out
}

/// A term multiplied out; nothing if it holds what cannot be flattened. Products that are too long are left out.
fn products(term: &Term, number: usize, eyes: &Eyes<'_>) -> Option<Vec<Product>> {
    Some(drafted(term, number, eyes)?.into_iter().flatten().collect())
}

/// A term multiplied out, every product of it; else nothing.
pub(crate) fn all_products(term: &Term, eyes: &Eyes<'_>) -> Option<Vec<Product>> {
    drafted(term, 0, eyes)?.into_iter().collect()
}

fn drafted(term: &Term, number: usize, eyes: &Eyes<'_>) -> Option<Vec<Option<Product>>> {
    let mut walk = Walk { eyes, done: vec![Draft::default()], waiting: Vec::new(), flip: false, below: 0 };
    walk.factors(&term.factors)?;
    walk.settle_waiting();
    let sign = signed(term)?;
    Some(walk.done.into_iter().map(|draft| draft.finish(number, term.span, sign)).collect())
}

/// The sign of a term; nothing for `\pm`.
fn signed(term: &Term) -> Option<Rational> {
    match term.sign.map_or(SignKind::Plus, |sign| sign.kind) {
        SignKind::Plus => Some(Rational::ONE),
        SignKind::Minus => Some(-Rational::ONE),
        SignKind::PlusMinus | SignKind::MinusPlus => None,
    }
}

/// A product on its way.
#[derive(Clone, Default)]
struct Draft {
    coefficient: Option<Rational>,
    inexact: bool,
    pieces: Vec<Piece>,
    /// How many pieces stand after the first derivative.
    after_derivative: usize,
}

struct Walk<'a, 'e> {
    eyes: &'a Eyes<'e>,
    /// The products so far.
    done: Vec<Draft>,
    /// Derivatives that wait for something to act on: kernel, slot and where they stand.
    waiting: Vec<Use>,
    flip: bool,
    below: usize,
}

impl Walk<'_, '_> {
    fn factors(&mut self, factors: &[Factor]) -> Option<()> {
        let mut at = 0;
        while let Some(factor) = factors.get(at) {
            at += 1;
            self.eyes.look()?;
            if !is_plain_product(factor.joint) {
                return None;
            }
            if factor.joint == Joint::Slash {
                self.below = 1;
            }
            let flip = self.flip;
            self.flip ^= self.below > 0;
            let below = self.below > 0;
            let done = self.factor(factor, factors.get(at), below);
            self.flip = flip;
            self.below = self.below.saturating_sub(1);
            at += done?;
        }
        Some(())
    }

    /// Takes a factor in; the answer is how many of the following factors were its arguments.
    fn factor(&mut self, factor: &Factor, next: Option<&Factor>, below: bool) -> Option<usize> {
        match &factor.atom {
            _ if !factor.marks.is_empty() && !matches!(factor.atom, Atom::Kernel(_)) => {
                self.opaque(factor, Vec::new(), below);
            }
            Atom::Number(number) if factor.scripts.is_empty() && !below => self.number(number),
            Atom::Number(_) => self.inexact(),
            Atom::Kernel(kernel) => {
                let made = use_of(factor, kernel, self.eyes, self.flip);
                let name = made.letter.clone();
                if is_derivative(&name) && !made.power && !made.unread && made.slots.len() == 1 {
                    self.waiting.push(made);
                    return Some(0);
                }
                if is_derivative(&name) {
                    // `\partial_{ij}`, `\nabla^2`: not looked into.
                    return None;
                }
                let varies = name == "\\delta" || self.eyes.meanings.is_kind(&made.kernel, Kind::Variation);
                if varies && made.slots.is_empty() && next.is_some() {
                    // `A_a \delta A_b` is not `A_b \delta A_a`: it belongs to what it varies.
                    return None;
                }
                let argument = next.filter(|next| is_argument(next));
                let opaque = made.unread || made.power || !factor.marks.is_empty();
                self.piece(Piece::of(made, opaque, below));
                return Some(usize::from(argument.is_some()));
            }
            Atom::Fraction(fraction) => self.fraction(fraction, factor)?,
            Atom::Group(group) => self.group(group, factor, below)?,
            Atom::Wrapped(sum) if factor.scripts.is_empty() && !below => self.sum(sum, factor)?,
            Atom::Root(_) => self.opaque(factor, Vec::new(), below),
            Atom::Function(_) => {
                self.opaque(factor, Vec::new(), below);
                return Some(usize::from(next.is_some()));
            }
            // What the author braces to zero or strikes out, words, ellipses, sums with a sign, matrices.
            _ => return None,
        }
        Some(0)
    }

    fn number(&mut self, text: &str) {
        let number = exact(text);
        for draft in &mut self.done {
            match (draft.coefficient, number) {
                (known, Some(number)) => {
                    draft.coefficient = known.unwrap_or(Rational::ONE).checked_mul(number);
                    draft.inexact |= draft.coefficient.is_none();
                }
                _ => draft.inexact = true,
            }
        }
    }

    fn inexact(&mut self) {
        self.done.iter_mut().for_each(|draft| draft.inexact = true);
    }

    /// Puts a piece under the derivatives that wait.
    fn piece(&mut self, mut piece: Piece) {
        let waiting = std::mem::take(&mut self.waiting);
        piece.put_under(&waiting);
        for draft in &mut self.done {
            draft.after_derivative += usize::from(draft.after_derivative > 0 || !waiting.is_empty());
            draft.pieces.push(piece.clone());
        }
    }

    /// Derivatives with nothing behind them are operators: pieces by themselves.
    fn settle_waiting(&mut self) {
        for made in std::mem::take(&mut self.waiting) {
            let piece = Piece { made, opaque: true, ..Piece::default() };
            self.done.iter_mut().for_each(|draft| draft.pieces.push(piece.clone()));
        }
    }

    fn fraction(&mut self, fraction: &Fraction, factor: &Factor) -> Option<()> {
        if !factor.scripts.is_empty() {
            return None;
        }
        if !matches!(fraction.kind, FractionKind::Quotient | FractionKind::Derivative(_)) {
            return None;
        }
        if let (Some(over), Some(under)) = (plain_number(&fraction.over), plain_number(&fraction.under)) {
            let quotient = over.checked_div(under);
            for draft in &mut self.done {
                let product = quotient.and_then(|q| draft.coefficient.unwrap_or(Rational::ONE).checked_mul(q));
                draft.inexact |= product.is_none();
                draft.coefficient = product;
            }
            return Some(());
        }
        if let Some(derivatives) = self.derivatives(fraction) {
            self.waiting.extend(derivatives);
            return self.factors(acted_on(fraction));
        }
        // Numbers and scalars below a line change nothing of the symmetry, but of the value.
        let mut letters = free_letters(&fraction.over, self.eyes, self.flip);
        letters.extend(free_letters(&fraction.under, self.eyes, !self.flip));
        if letters.is_empty() || plain_number(&fraction.under).is_none() {
            self.opaque(factor, letters, false);
            return Some(());
        }
        self.inexact();
        self.sum(&fraction.over, factor)
    }

    /// The derivatives of `\frac{\partial^2 f}{\partial x^i \partial x^j}`: as if `\partial_i \partial_j` stood there.
    fn derivatives(&self, fraction: &Fraction) -> Option<Vec<Use>> {
        let [under] = fraction.under.terms.as_slice() else { return None };
        let partial = |factor: &Factor| matches!(&factor.atom, Atom::Kernel(kernel) if kernel.letter == "\\partial");
        let spelled = match fraction.kind {
            FractionKind::Quotient => true,
            FractionKind::Derivative("\\pdv") => false,
            _ => return None,
        };
        let over = fraction.over.terms.first().and_then(|term| term.factors.first());
        if fraction.over.terms.len() > 1 || under.sign.is_some() || spelled && !over.is_some_and(partial) {
            return None;
        }
        let mut found = Vec::new();
        for pair in under.factors.chunks(if spelled { 2 } else { 1 }) {
            let variable = match pair {
                [sign, variable] if partial(sign) && sign.scripts.is_empty() => variable,
                [variable] if !spelled => variable,
                _ => return None,
            };
            let Atom::Kernel(kernel) = &variable.atom else { return None };
            let made = use_of(variable, kernel, self.eyes, !self.flip);
            if made.slots.len() != 1 || made.unread || made.power {
                return None;
            }
            found.push(Use { kernel: "\\partial".into(), letter: "\\partial".into(), ..made });
        }
        Some(found)
    }

    fn group(&mut self, group: &Group, factor: &Factor, below: bool) -> Option<()> {
        let [part] = group.parts.as_slice() else { return None };
        let [sum] = part.sides.as_slice() else { return None };
        let plain = matches!(group.bracket, Bracket::Round | Bracket::Square | Bracket::Curly);
        if plain && factor.scripts.is_empty() && !below {
            return self.sum(sum, factor);
        }
        // A power closes its indices; what else stands on a bracket is not known.
        let scalar = group.bracket == Bracket::Bars || factor.scripts.iter().all(is_number_above);
        scalar.then(|| self.opaque(factor, Vec::new(), below))
    }

    /// A sum that multiplies: each product so far by each of its terms. Under a derivative it is a piece of its own.
    fn sum(&mut self, sum: &Sum, factor: &Factor) -> Option<()> {
        if let [term] = sum.terms.as_slice()
            && term.sign.is_none()
            && (self.waiting.is_empty() || term.factors.len() == 1)
        {
            return self.factors(&term.factors);
        }
        if !self.waiting.is_empty() || self.done.len() * sum.terms.len() > PRODUCTS {
            let letters = free_letters(sum, self.eyes, self.flip);
            self.opaque(factor, letters, false);
            return Some(());
        }
        let before = std::mem::take(&mut self.done);
        let mut all = Vec::new();
        for term in &sum.terms {
            self.done.clone_from(&before);
            let sign = signed(term)?;
            for draft in &mut self.done {
                draft.coefficient = draft.coefficient.unwrap_or(Rational::ONE).checked_mul(sign);
            }
            self.factors(&term.factors)?;
            self.settle_waiting();
            all.append(&mut self.done);
        }
        self.done = all;
        Some(())
    }

    /// A part that is not looked into, with the letters that are free in it as slots.
    fn opaque(&mut self, factor: &Factor, slots: Vec<UsedSlot>, below: bool) {
        let marks = (0..slots.len()).map(Mark::Slot).collect();
        let made = Use { kernel: "".into(), span: factor.span, slots, marks, ..Use::default() };
        self.piece(Piece { made, opaque: true, below, ..Piece::default() });
    }
}

impl Piece {
    /// A kernel by itself. Partial derivatives after a comma are put before it, as if written with `\partial`.
    fn of(mut made: Use, opaque: bool, below: bool) -> Self {
        let covariant = made.slots.iter().any(|slot| slot.origin == Origin::Covariant);
        let own = made.own_slots().count();
        let count = made.slots.len();
        if covariant || own == count {
            return Self { made, opaque, below, ..Self::default() };
        }
        let derivatives = count - own;
        // Slots of derivatives may stand between others, where both scripts have a comma.
        let mut order: Vec<usize> = (0..count).collect();
        order.sort_by_key(|at| made.slots.get(*at).map(|slot| slot.origin == Origin::Own));
        let place = |at: usize| order.iter().position(|other| *other == at).unwrap_or(at);
        made.marks = made.marks.iter().map(|mark| mark.moved(place)).collect();
        made.slots = order.iter().filter_map(|at| made.slots.get(*at).cloned()).collect();
        let operators = vec![CompactString::const_new("\\partial"); derivatives];
        Self { made, operators, opaque, below }
    }

    /// Puts the piece under derivatives, outermost first.
    fn put_under(&mut self, derivatives: &[Use]) {
        if derivatives.is_empty() {
            return;
        }
        let mut slots = Vec::new();
        let mut marks = Vec::new();
        let mut operators = Vec::new();
        for derivative in derivatives {
            let origin = if derivative.letter == "\\partial" { Origin::Partial } else { Origin::Covariant };
            let before = slots.len();
            marks.extend(derivative.marks.iter().map(|mark| mark.moved(|at| at + before)));
            slots.extend(derivative.slots.iter().cloned().map(|slot| UsedSlot { origin, ..slot }));
            operators.push(derivative.kernel.clone());
            self.made.span = self.made.span.join(derivative.span);
        }
        let shift = slots.len();
        slots.append(&mut self.made.slots);
        marks.extend(self.made.marks.iter().map(|mark| mark.moved(|at| at + shift)));
        operators.append(&mut self.operators);
        self.operators = operators;
        self.made.slots = slots;
        self.made.marks = marks;
    }
}

impl Draft {
    fn finish(self, term: usize, span: Span, sign: Rational) -> Option<Product> {
        if self.pieces.len() > PIECES {
            return None;
        }
        let coefficient = self.coefficient.unwrap_or(Rational::ONE).checked_mul(sign);
        let brackets = brackets(&self.pieces)?;
        Some(Product {
            term,
            span,
            coefficient: coefficient.filter(|_| !self.inexact),
            brackets,
            reach_unclear: self.after_derivative > 1,
            pieces: self.pieces,
        })
    }
}

/// A bracket that is not closed yet.
struct OpenBracket {
    held: Bracketed,
    level: Level,
    /// Whether a bar has been opened in it.
    barred: bool,
}

/// Brackets over the slots of all pieces, in the order written; nothing if they do not match.
fn brackets(pieces: &[Piece]) -> Option<Vec<Bracketed>> {
    let mut open: Vec<OpenBracket> = Vec::new();
    let mut out = Vec::new();
    for (number, piece) in pieces.iter().enumerate() {
        for mark in &piece.made.marks {
            match mark {
                // `[a|[b|c]d]`: which letters the outer bracket leaves out is not plain.
                Mark::Open(..) if open.last().is_some_and(|bracket| bracket.barred) => return None,
                Mark::Open(sign, level) => {
                    let held = Bracketed { antisymmetric: *sign == '[', slots: Vec::new() };
                    open.push(OpenBracket { held, level: *level, barred: false });
                }
                Mark::Bar => {
                    let bracket = open.last_mut()?;
                    bracket.barred = !bracket.barred;
                }
                Mark::Slot(slot) => {
                    let level = piece.made.slots.get(*slot).map(|slot| slot.level);
                    if let Some(bracket) = open.last_mut().filter(|one| !one.barred && Some(one.level) == level) {
                        bracket.held.slots.push((number, *slot));
                    }
                }
                Mark::Close => out.push(open.pop()?.held),
            }
        }
    }
    out.retain(|bracket| bracket.slots.len() > 1);
    open.is_empty().then_some(out)
}

/// `(..)^2`
fn is_number_above(script: &Script) -> bool {
    script.level == Level::Up && matches!(script.items.as_slice(), [Item { kind: ItemKind::Number(_), .. }])
}

/// Whether factors are multiplied in the ordinary way: a wedge or a cross is another product.
const fn is_plain_product(joint: Joint) -> bool {
    matches!(joint, Joint::Beside | Joint::Slash | Joint::Times(ProductSign::Dot | ProductSign::Star))
}

/// A bracket right after a kernel that holds several parts is an argument; one part may be a factor.
fn is_argument(next: &Factor) -> bool {
    matches!(&next.atom, Atom::Group(group) if next.joint == Joint::Beside && group.parts.len() > 1)
}

/// What a derivative written as a fraction acts on, if it stands above the line.
fn acted_on(fraction: &Fraction) -> &[Factor] {
    let skipped = usize::from(fraction.kind == FractionKind::Quotient);
    fraction.over.terms.first().and_then(|term| term.factors.get(skipped..)).unwrap_or_default()
}

/// A sum that is one plain number.
pub(crate) fn plain_number(sum: &Sum) -> Option<Rational> {
    let [term] = sum.terms.as_slice() else { return None };
    let [factor] = term.factors.as_slice() else { return None };
    let Atom::Number(text) = &factor.atom else { return None };
    let number = exact(text).filter(|_| factor.scripts.is_empty())?;
    signed(term)?.checked_mul(number)
}

/// A decimal number, exactly.
pub(crate) fn exact(text: &str) -> Option<Rational> {
    let (whole, part) = text.split_once('.').unwrap_or((text, ""));
    if part.len() > 9 || whole.len() > 12 {
        return None;
    }
    let digits: i128 = format!("{whole}{part}").parse().ok()?;
    Rational::new(digits, 10_i128.pow(u32::try_from(part.len()).ok()?))
}

/// The letters that stand once in the first term of a sum: free in the sum, if it balances.
fn free_letters(sum: &Sum, eyes: &Eyes<'_>, flip: bool) -> Vec<UsedSlot> {
    let Some(term) = sum.terms.first() else { return Vec::new() };
    let mut walk = Walk { eyes, done: vec![Draft::default()], waiting: Vec::new(), flip, below: 0 };
    if walk.factors(&term.factors).is_none() {
        return Vec::new();
    }
    walk.settle_waiting();
    let slots: Vec<UsedSlot> = walk
        .done
        .first()
        .map(|draft| draft.pieces.iter().flat_map(|piece| piece.made.slots.iter().cloned()).collect())
        .unwrap_or_default();
    let once = |slot: &UsedSlot| match &slot.filling {
        Filling::Index(letter) => slots.iter().filter(|other| other.letter() == Some(letter)).count() == 1,
        Filling::Component(_) => false,
    };
    slots.iter().filter(|slot| once(slot)).map(|slot| UsedSlot { origin: Origin::Own, ..slot.clone() }).collect()
}
