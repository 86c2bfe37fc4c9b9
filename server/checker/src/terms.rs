//! Terms as algebra sees them: a coefficient and pieces with slots, each letter free, summed or a component.
//!
//! From the tree of a statement and its reading, products are flattened: derivatives are put on what they act on,
//! brackets are multiplied out up to a budget, and each kernel becomes a piece with its slots in order. What is not
//! understood (a function, a root, a sum that is differentiated) is a piece of its own with the letters that are
//! free in it; a term that holds words, ellipses, sums with a sign or unread parts is left out altogether. Nothing
//! here judges; `symmetries.rs` says what the pieces are symmetric in, and the rules draw the conclusions.

mod asking;
mod flattened;
mod monomials;
mod product;
pub mod symmetries;
pub mod uses;

use std::cell::Cell;

use compact_str::CompactString;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::Statement;
use rustc_hash::{FxHashMap, FxHashSet};

use crate::balance::Choice;
use crate::conventions::built_in::{CLASSES, class_of};
use crate::conventions::inferred::{LevelHabit, Prices};
use crate::conventions::meanings::Meanings;
use crate::sketch::Sketch;

pub use asking::asks_for_terms;
pub use flattened::Flattened;
pub(crate) use monomials::{Contracted, contracted};
pub use monomials::{Monomials, Zero};
pub use product::{Bracketed, Piece, Product};
pub(crate) use product::{all_products, exact, plain_number};

/// What the reading of a statement knows of its letters, and what the document knows of its kernels.
pub struct Eyes<'a> {
    /// Declarations in force.
    pub meanings: &'a Meanings,
    /// What the trade's usual kernels are taken for here.
    pub customs: symmetries::Customs,
    /// Whether a letter at a place is read as an index.
    index: FxHashMap<(u32, CompactString), bool>,
    /// Whether a letter is read as an index anywhere in the statement.
    anywhere: FxHashMap<CompactString, bool>,
    /// Letters for which levels do not matter.
    cartesian: FxHashSet<CompactString>,
    /// Factors that may still be looked at: parts that are not looked into are walked again for their free letters.
    left: Cell<u32>,
}

/// Factors of one statement beyond which it is left out.
const FACTORS: u32 = 20_000;

impl<'a> Eyes<'a> {
    /// The eyes of a reading.
    pub fn new(sketch: &Sketch, choice: &Choice, prices: &Prices<'a>, customs: symmetries::Customs) -> Self {
        let flat = |letter: &&CompactString| prices.level_habit(letter) == LevelHabit::Cartesian;
        let mut eyes = Self {
            meanings: &prices.declared.meanings,
            customs,
            index: FxHashMap::default(),
            anywhere: FxHashMap::default(),
            cartesian: sketch.letters.iter().filter(flat).cloned().collect(),
            left: Cell::new(FACTORS),
        };
        for place in &sketch.places {
            let read = choice.index.get(place.unit as usize).copied().unwrap_or(false);
            eyes.index.insert((place.span.start, place.letter.clone()), read);
            *eyes.anywhere.entry(place.letter.clone()).or_default() |= read;
        }
        eyes
    }

    /// Eyes that take these letters for indices too, where the statement does not have them.
    pub fn knowing(&self, letters: &[&str]) -> Self {
        let mut anywhere = self.anywhere.clone();
        for letter in letters {
            anywhere.entry(CompactString::new(letter)).or_insert(true);
        }
        let (index, cartesian, left) = (self.index.clone(), self.cartesian.clone(), Cell::new(FACTORS));
        Self { meanings: self.meanings, customs: self.customs, index, anywhere, cartesian, left }
    }

    /// Whether the letter at a place is an index. Places that a macro made share a span; there the letter decides.
    pub fn is_index(&self, letter: &CompactString, span: Span) -> bool {
        let here = self.index.get(&(span.start, letter.clone())).copied();
        here.unwrap_or_else(|| self.anywhere.get(letter).copied().unwrap_or(false))
    }

    /// Whether a letter of a script at a place was read at all, as an index or not.
    pub(crate) fn has_read(&self, letter: &CompactString, span: Span) -> bool {
        self.index.contains_key(&(span.start, letter.clone()))
    }

    /// Whether levels do not matter for a letter.
    pub fn is_cartesian(&self, letter: &CompactString) -> bool {
        self.cartesian.contains(letter)
    }

    /// A number for the letters that may take one another's place: those of a declared family, else of a class.
    pub fn family_of(&self, letter: &str) -> u16 {
        let declared = self.meanings.family_number(letter).and_then(|number| u16::try_from(number).ok());
        declared.map_or(class_of(letter) as u16, |number| number.saturating_add(CLASSES.len() as u16))
    }

    /// Counts a factor; nothing if there were too many.
    fn look(&self) -> Option<()> {
        self.left.set(self.left.get().checked_sub(1)?);
        Some(())
    }
}

/// The terms of every side of a statement; a term that cannot be flattened is left out, and the side says so.
pub fn sides(statement: &Statement, eyes: &Eyes<'_>) -> Vec<Side> {
    statement.sides.iter().map(|side| product::side(side, eyes)).collect()
}

/// A side with its terms multiplied out.
#[derive(Clone, Debug, Default)]
pub struct Side {
    /// Its place.
    pub span: Span,
    /// Its products; several may come from one term.
    pub products: Vec<Product>,
    /// Whether every term of it is there.
    pub complete: bool,
    /// Whether it is zero.
    pub zero: bool,
}
