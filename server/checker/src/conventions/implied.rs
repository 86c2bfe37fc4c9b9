//! What a document implies, as sentences of the conventions language: a start for the author's own conventions.
//!
//! Only what the document shows is said: the letters that it uses as indices, the levels it keeps, the metric it
//! moves indices with, symmetries that a formula states. Ranges are not shown by formulas, so that families run over
//! a dimension without a number. Whether a sentence leaves all findings as they are, the caller tries.

use compact_str::CompactString;
use indexwise_algebra::rational::Rational;
use indexwise_grammar::tree::Level;

use crate::terms::uses::{Use, UsedSlot};
use crate::terms::{Product, Side};

use super::built_in::{CLASSES, LetterClass};
use super::inferred::{LevelHabit, Prices};

/// A sentence that a document implies, with the reason for it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Implied {
    /// The sentence.
    pub sentence: String,
    /// Why, as a phrase for a comment.
    pub reason: String,
}

/// Letters of a class from which a family is made.
const LETTERS: usize = 2;

/// The families that the habits of a document imply, and whether levels matter in them.
pub fn families(prices: &Prices<'_>) -> Vec<Implied> {
    let mut out = Vec::new();
    for class in CLASSES {
        let letters: Vec<CompactString> = prices
            .index_letters(class)
            .into_iter()
            .filter(|letter| letter.len() == 1 || letter.starts_with('\\'))
            .collect();
        let Some(first) = letters.first().filter(|_| letters.len() >= LETTERS && class != LetterClass::Other) else {
            continue;
        };
        let list = letters.join(" ");
        let reason = "letters that stand as indices in formulas that balance; give them their range".to_owned();
        out.push(Implied { sentence: format!("{list} range over n dimensions"), reason });
        if prices.level_habit(first) == LevelHabit::Cartesian {
            let reason = "their pairs stand on one level".to_owned();
            out.push(Implied { sentence: format!("{list} are cartesian"), reason });
        }
    }
    out
}

/// The metric that a document moves indices with: `g` or `\eta` with two slots, where levels are kept.
pub fn metric(prices: &Prices<'_>) -> Option<Implied> {
    let letters = CLASSES.iter().flat_map(|class| prices.index_letters(*class).into_iter().take(1));
    let leading = letters.into_iter().find(|letter| prices.level_habit(letter) == LevelHabit::InForce)?;
    let class = super::built_in::class_of(&leading);
    let mut two = prices.index_letters(class).into_iter().take(2);
    let (one, two) = (two.next()?, two.next()?);
    let uses = |kernel: &str| prices.uses(&(kernel.into(), 0, 2)) + prices.uses(&(kernel.into(), 2, 0));
    let kernel = ["g", "\\eta"].into_iter().filter(|kernel| uses(kernel) > 0).max_by_key(|kernel| uses(kernel))?;
    let reason = format!("it stands with two indices in {} formulas", uses(kernel));
    Some(Implied { sentence: format!("{kernel}_{{{one} {two}}} is the metric"), reason })
}

/// The symmetry that a relation between two sides states: `T_{ij} = T_{ji}`, `F_{ij} = -F_{ji}`.
pub fn symmetry(one: &Side, two: &Side) -> Option<Implied> {
    let ([first], [second]) = (one.products.as_slice(), two.products.as_slice()) else { return None };
    let (own, other) = (plain(first)?, plain(second)?);
    if own.kernel != other.kernel || own.slots.len() != other.slots.len() || !one.complete || !two.complete {
        return None;
    }
    let moved: Vec<(&UsedSlot, &UsedSlot)> =
        own.slots.iter().zip(&other.slots).filter(|(one, two)| one.filling != two.filling).collect();
    let [(a, b), (c, d)] = moved.as_slice() else { return None };
    if a.filling != d.filling || b.filling != c.filling || a.level != c.level {
        return None;
    }
    let word = match (first.coefficient?, second.coefficient?) {
        (one, two) if one == two => "symmetric",
        (one, two) if one == -two && one != Rational::ZERO => "antisymmetric",
        _ => return None,
    };
    let sentence = format!("{} is {word} in {} {}", written(own)?, a.letter()?, c.letter()?);
    Some(Implied { sentence, reason: "a formula states it".to_owned() })
}

/// The use of a product that is one kernel with indices.
fn plain(product: &Product) -> Option<&Use> {
    let [piece] = product.pieces.as_slice() else { return None };
    let own = piece.made.own_slots().count() == piece.made.slots.len();
    (own && !piece.opaque && product.brackets.is_empty()).then_some(&piece.made)
}

/// A use in LaTeX, slots in their order.
fn written(made: &Use) -> Option<String> {
    let mut out = made.kernel.to_string();
    let mut before = None;
    for slot in &made.slots {
        let sign = if slot.level == Level::Up { '^' } else { '_' };
        if before != Some(slot.level) {
            out.push_str(if before.is_some() { "}{}" } else { "" });
            out.push_str(&format!("{sign}{{"));
        } else {
            out.push(' ');
        }
        before = Some(slot.level);
        out.push_str(slot.letter()?);
    }
    out.push('}');
    Some(out)
}
