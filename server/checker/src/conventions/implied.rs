//! What documents imply, as sentences of the conventions language: a start for the author's own conventions.
//!
//! Only what they show is said: the letters that they use as indices, the levels they keep, the metric they
//! move indices with, symmetries that a formula states. Ranges are not shown by formulas, so that families run over
//! a dimension without a number. Whether a sentence leaves all findings as they are, the caller tries.

use compact_str::CompactString;
use indexwise_algebra::rational::Rational;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::Level;
use indexwise_grammar::unicode_sign;

use crate::terms::symmetries::exchanges;
use crate::terms::uses::{Use, UsedSlot};
use crate::terms::{Eyes, Product, Side};

use super::built_in::{CLASSES, LetterClass, bare_letter, class_of};
use super::prices::{LevelHabit, Prices};

/// A sentence that documents imply, with the reason for it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Implied {
    /// The sentence, in the spelling of LaTeX.
    pub sentence: String,
    /// Why, as a phrase for a comment.
    pub reason: String,
    /// The formula that states it, if one does: the path of its document as the paper has it, and its line from 1.
    pub place: Option<(String, usize)>,
}

impl Implied {
    fn of(sentence: String, reason: String) -> Self {
        Self { sentence, reason, place: None }
    }
}

/// Letters of a class from which a family is made.
const LETTERS: usize = 2;

/// Letters for a dimension, the usual ones first.
const DIMENSIONS: [&str; 6] = ["n", "N", "m", "M", "d", "D"];

/// The families that the habits of documents imply, and whether levels matter in them; `known` are letters that the
/// author speaks of already. Each family has a letter of its own for its dimension, since nothing says that they are
/// equal.
pub fn families(prices: &Prices<'_>, known: &impl Fn(&str) -> bool) -> Vec<Implied> {
    let letters_of = |class: LetterClass| letters(prices, class, known);
    let all: Vec<CompactString> = CLASSES.iter().flat_map(|class| prices.index_letters(*class)).collect();
    let mut dimensions = DIMENSIONS.iter().filter(|letter| all.iter().all(|other| other != *letter) && !known(letter));
    let mut out = Vec::new();
    for class in CLASSES.into_iter().filter(|class| *class != LetterClass::Other) {
        let letters = letters_of(class);
        let Some(first) = letters.first().filter(|_| letters.len() >= LETTERS) else { continue };
        if !prices.is_index_notation(first) {
            continue;
        }
        let list = letters.join(" ");
        if let Some(dimension) = dimensions.next() {
            let reason = "they stand as indices in formulas that balance; give them their range".to_owned();
            out.push(Implied::of(format!("{list} range over {dimension} dimensions"), reason));
        }
        if prices.level_habit(first) == LevelHabit::Cartesian {
            let reason = "their pairs stand on one level".to_owned();
            out.push(Implied::of(format!("{list} are cartesian"), reason));
        }
    }
    out
}

/// Index letters of a class in the order of their alphabet, without those that are known.
fn letters(prices: &Prices<'_>, class: LetterClass, known: &impl Fn(&str) -> bool) -> Vec<CompactString> {
    let plain = |letter: &CompactString| letter.len() == 1 || letter.starts_with('\\') && !letter.contains(' ');
    let mut letters = prices.index_letters(class);
    letters.retain(|letter| plain(letter) && bare_letter(letter) == letter && !known(letter));
    letters.sort_by_key(|letter| unicode_sign(letter).unwrap_or(letter).to_owned());
    letters
}

/// The metric that documents move indices with: `g` or `\eta` with two slots, where levels are kept.
pub fn metric(prices: &Prices<'_>, known: &impl Fn(&str) -> bool) -> Option<Implied> {
    let leading = CLASSES.iter().filter_map(|class| prices.index_letters(*class).into_iter().next());
    let leading = leading.into_iter().find(|letter| prices.level_habit(letter) == LevelHabit::InForce)?;
    let letters = letters(prices, class_of(&leading), &|_| false);
    let [one, two, ..] = letters.as_slice() else { return None };
    let uses = |kernel: &str| prices.uses(&(kernel.into(), 0, 2)) + prices.uses(&(kernel.into(), 2, 0));
    let used = ["\\eta", "g"].into_iter().filter(|kernel| uses(kernel) > 0 && !known(kernel));
    let kernel = used.max_by_key(|kernel| uses(kernel))?;
    let reason = format!("{kernel} stands with two indices {} times in formulas that balance", uses(kernel));
    Some(Implied::of(format!("{kernel}_{{{one} {two}}} is the metric"), reason))
}

/// The symmetry that the equality of two sides states: `T_{ij} = T_{ji}`, `F_{ij} = -F_{ji}`. Nothing of a kernel of
/// which the author or custom says more.
pub fn symmetry(one: &Side, two: &Side, eyes: &Eyes<'_>) -> Option<Stated> {
    let ([first], [second]) = (one.products.as_slice(), two.products.as_slice()) else { return None };
    let (own, other) = (plain(first, eyes)?, plain(second, eyes)?);
    if own.kernel != other.kernel || own.slots.len() != other.slots.len() || !one.complete || !two.complete {
        return None;
    }
    let letters: Vec<&CompactString> = own.slots.iter().map(UsedSlot::letter).collect::<Option<_>>()?;
    if letters.iter().enumerate().any(|(at, letter)| letters.iter().take(at).any(|other| other == letter)) {
        return None;
    }
    let moved: Vec<(&UsedSlot, &UsedSlot)> =
        own.slots.iter().zip(&other.slots).filter(|(one, two)| one.filling != two.filling).collect();
    let [(a, b), (c, d)] = moved.as_slice() else { return None };
    if a.filling != d.filling || b.filling != c.filling || a.level != c.level {
        return None;
    }
    let word = match (first.coefficient?, second.coefficient?) {
        (one, _) if one == Rational::ZERO => return None,
        (one, two) if one == two => "symmetric",
        (one, two) if one == -two => "antisymmetric",
        _ => return None,
    };
    let slots = if letters.len() > 2 { format!(" in {} {}", a.letter()?, c.letter()?) } else { String::new() };
    let at = |slot: &UsedSlot| own.slots.iter().position(|other| other.span == slot.span && other == slot);
    Some(Stated {
        key: format!("{} {} {word} {:?} {:?}", own.kernel, letters.len(), at(a), at(c)),
        sentence: format!("{} is {word}{slots}", written(own)?),
        span: one.span,
    })
}

/// A symmetry that a formula states.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Stated {
    /// The same for the same symmetry with other letters.
    pub key: String,
    /// The sentence.
    pub sentence: String,
    /// Where it is stated.
    pub span: Span,
}

/// The use of a product that is one kernel with indices, of which nothing is known.
fn plain<'p>(product: &'p Product, eyes: &Eyes<'_>) -> Option<&'p Use> {
    let [piece] = product.pieces.as_slice() else { return None };
    let own = piece.made.own_slots().count();
    let known = eyes.meanings.known(&piece.made.kernel, own).is_some()
        || !exchanges(piece, eyes.meanings, eyes.customs).is_empty();
    let alone = own == piece.made.slots.len() && !piece.opaque && !piece.below && product.brackets.is_empty();
    (alone && !known).then_some(&piece.made)
}

/// A use in LaTeX, slots in their order.
fn written(made: &Use) -> Option<String> {
    let mut out = made.kernel.to_string();
    let mut before = None;
    for slot in &made.slots {
        let sign = if slot.level == Level::Up { '^' } else { '_' };
        if before != Some(slot.level) {
            out.push_str(if before.is_some() { "}{}" } else { "" });
            out.push(sign);
            out.push('{');
        } else {
            out.push(' ');
        }
        before = Some(slot.level);
        out.push_str(slot.letter()?);
    }
    out.push('}');
    Some(out)
}
