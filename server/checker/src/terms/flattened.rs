//! A statement as the rules about symmetry see it: its products, the uses of its kernels, and what can be asked.

use compact_str::CompactString;
use indexwise_algebra::rational::Rational;
use indexwise_algebra::symmetry::Sign;
use indexwise_grammar::tree::{Atom, Claim, Statement, walk};

use crate::conventions::built_in::{LetterClass, class_of};
use crate::conventions::meanings::{Family, Known, Role};
use crate::ledger::{Judged, shown};

use super::symmetries::is_known;
use super::uses::{Use, use_of};
use super::{Bracketed, Eyes, Monomials, Piece, Product, Side, Zero, sides};

/// A statement, flattened.
pub struct Flattened<'a> {
    /// The statement with its reading.
    pub judged: &'a Judged<'a>,
    /// What letters and kernels mean.
    pub eyes: &'a Eyes<'a>,
    /// Its sides.
    pub sides: Vec<Side>,
    /// Every kernel in it, inside of fractions, roots and arguments too.
    pub uses: Vec<Use>,
    statement: &'a Statement,
    monomials: Monomials<'a, 'a>,
}

impl<'a> Flattened<'a> {
    /// Flattens a statement.
    pub fn new(statement: &'a Statement, judged: &'a Judged<'a>, eyes: &'a Eyes<'a>) -> Self {
        let mut uses = Vec::new();
        for side in &statement.sides {
            walk(side, &mut |factor| {
                if let Atom::Kernel(kernel) = &factor.atom {
                    uses.push(use_of(factor, kernel, eyes, false));
                }
            });
        }
        // What was passed over may be a bracket, so that no product is sure.
        let sides = if judged.formula.passed_over { Vec::new() } else { sides(statement, eyes) };
        Self { judged, eyes, sides, uses, statement, monomials: Monomials::new(eyes) }
    }

    /// Why a product is zero by a contraction, if it is.
    pub fn contraction_zero(&self, product: &Product) -> Option<Zero> {
        self.monomials.contraction_zero(product)
    }

    /// Whether a bracket of a product holds slots of the opposite symmetry.
    pub fn bracket_zero(&self, product: &Product, bracket: &Bracketed) -> bool {
        self.monomials.bracket_zero(product, bracket)
    }

    /// The second product divided by the first, if they are the same up to a number.
    pub fn quotient(&self, one: &Product, two: &Product) -> Option<Rational> {
        self.monomials.quotient(one, two)
    }

    /// How a side changes when two of its free letters are exchanged: a sign, or neither. Nothing if that could not be
    /// found out.
    pub fn exchange(&self, side: &Side, one: &str, two: &str) -> Option<Option<Sign>> {
        let sum = self.monomials.sum(&side.products)?;
        if sum.is_zero() {
            return None;
        }
        self.monomials.exchange(&sum, one, two)
    }

    /// Whether the relation after a side claims that both sides are equal.
    pub fn is_equality(&self, side: usize) -> bool {
        self.statement.relations.get(side).is_some_and(|relation| relation.claim() == Claim::Equality)
    }

    /// Whether a side is there in full.
    pub fn is_complete(&self, side: &Side) -> bool {
        side.complete && !side.products.is_empty()
    }

    /// Whether all kernels of a side are arbitrary but for their symmetries, so that what the normal form does not show
    /// does not hold. A connection, a curvature or an epsilon obeys further identities.
    pub fn is_arbitrary(&self, side: &Side) -> bool {
        // The ends of a sum over capitals are held on their levels, though mostly they could move.
        let held = |product: &Product| {
            let capital = |letter: &&CompactString| class_of(letter) == LetterClass::Capital;
            product
                .letters()
                .filter(capital)
                .any(|letter| !self.eyes.is_cartesian(letter) && product.count(letter) == 2)
        };
        let arbitrary = |product: &Product| product.pieces.iter().all(|piece| self.is_arbitrary_piece(piece));
        side.products.iter().all(|product| arbitrary(product) && !held(product))
    }

    fn is_arbitrary_piece(&self, piece: &Piece) -> bool {
        let bound = |known: &Known| matches!(known.role, Some(Role::Christoffel | Role::Curvature(_)));
        let own = piece.made.own_slots().count();
        let known = self.eyes.meanings.known(&piece.made.kernel, own);
        // With two slots it may be the strain.
        let epsilon = own > 2 && matches!(piece.made.letter.as_str(), "\\epsilon" | "\\varepsilon");
        let partials = self.eyes.customs.partials_differ && piece.operators.len() > 1;
        let obeys_more = epsilon || partials || matches!(piece.made.letter.as_str(), "\\Gamma" | "R");
        is_known(piece, self.eyes.meanings, self.eyes.customs) && !known.is_some_and(bound) && !obeys_more
    }

    /// Whether the paper has a connection: it speaks of curvature, or declares a metric or a covariant derivative.
    pub fn has_connection(&self) -> bool {
        let meanings = self.eyes.meanings;
        self.eyes.customs.curved || !meanings.metrics().is_empty() || !meanings.derivatives.is_empty()
    }

    /// The declared family of a slot, with the letter that the kernel is declared with. Of a kernel that nobody declares
    /// a number may as well name a node or a mode.
    pub fn family_of_slot(&self, made: &Use, at: usize) -> Option<(CompactString, &'a Family)> {
        let known = self.eyes.meanings.known(&made.kernel, made.own_slots().count())?;
        let letter = &known.slots.get(at)?.letter;
        Some((letter.clone(), self.eyes.meanings.family(letter)?))
    }

    /// Whether a number is a value of any slot of a kernel: of stacked scripts the order is not written.
    pub fn any_slot_holds(&self, made: &Use, number: u32) -> bool {
        let slots = 0..made.own_slots().count();
        let mut families = slots.filter_map(|at| self.family_of_slot(made, at));
        families.any(|(_, family)| family.holds_number(number) == Some(true))
    }

    /// Whether a family that a letter's family is a part of, declared so or by its range, has a number among its values.
    pub fn whole_holds(&self, letter: &str, number: u32) -> bool {
        let Some(own) = self.eyes.meanings.family(letter) else { return false };
        let mut wholes = self.eyes.meanings.families.iter().filter(|whole| own.is_part_of(whole) || own.lies_in(whole));
        wholes.any(|whole| whole.holds_number(number) == Some(true))
    }

    /// A piece as people read it: its derivatives and its kernel.
    pub fn piece_name(&self, piece: &Piece) -> String {
        let operators: String = piece.operators.iter().map(|kernel| shown(kernel)).collect();
        format!("{operators}{}", shown(&piece.made.kernel))
    }

    /// Several pieces of a product as people read them.
    pub fn piece_names(&self, product: &Product, pieces: &[usize]) -> String {
        let names: Vec<String> =
            pieces.iter().filter_map(|at| product.pieces.get(*at)).map(|piece| self.piece_name(piece)).collect();
        names.join(" ")
    }
}
