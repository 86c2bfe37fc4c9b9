//! What would make a step hold: single edits of its sides, tried by evaluation.
//!
//! Each edit is made twice, on the tree, which is lowered and judged, and on the text, which is what a person gets
//! (`repairs/edits.rs`). One point in one dimension discards nearly all; those that are left are judged as any step
//! is, with the steps beside them that share the edited side, and their text is read again. What becomes true by
//! becoming empty, both sides alike or a term 0, is not offered.

mod coefficients;
mod edits;
mod missing;

use indexwise_algebra::expression::Expression;
use indexwise_algebra::rational::Rational;
use indexwise_grammar::tree::{Factor, Statement, Sum, Term, walk};
use indexwise_grammar::write::{Dialect, write_statement, write_sum};

use crate::finding::{Edit, Fix};
use crate::terms::Eyes;

use super::claims::{is_zero, pair};
use super::lowering::{Lowering, Reach};
use super::world::Surroundings;
use edits::{Change, Kind, Page};

/// Factors of a step beyond which no edits are tried.
const FACTORS: usize = 80;
/// Edits of one step that are tried.
const CANDIDATES: usize = 400;
/// Edits of one step that are judged in full.
const SURVIVORS: usize = 16;
/// Edits that are offered.
const OFFERED: usize = 3;

/// Where the text of a formula comes from and goes to.
pub struct Source<'p> {
    /// The document.
    pub text: &'p str,
    /// How formulas are written in it.
    pub dialect: Dialect,
    /// The statement as it is read after edits of the text, if that can be told.
    pub reread: &'p dyn Fn(&[Edit]) -> Option<Statement>,
}

/// How closely a claim is looked at.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Look {
    /// At one point, in one dimension.
    Once,
    /// As at any step.
    InFull,
}

/// A step to be mended.
pub(super) struct Broken<'a> {
    /// Its statement.
    pub statement: &'a Statement,
    /// The number of its relation.
    pub relation: usize,
    /// Other relations of the statement that are claims, and whether each holds.
    pub others: &'a [(usize, bool)],
}

/// Says whether two expressions are equal.
pub(super) type Holds<'h> = dyn Fn(&Surroundings<'_>, &Expression, &Expression, Look) -> bool + 'h;

/// The fixes of a step, the most local first, at most three.
pub(super) fn repairs(
    broken: &Broken<'_>,
    eyes: &Eyes<'_>,
    source: &Source<'_>,
    surroundings: &Surroundings<'_>,
    holds: &Holds<'_>,
) -> Vec<Fix> {
    let eyes = &eyes.knowing(&missing::SUMMED);
    let page = Page { text: source.text, dialect: source.dialect, eyes };
    let mut search = Search { broken, eyes, source, surroundings: surroundings.clone(), holds };
    let mut kept: Vec<Change<(usize, Sum)>> = Vec::new();
    // How many other steps an edit mends: one that mends two is surely the slip.
    let mut others: Vec<usize> = Vec::new();
    let mut judged = 0;
    for change in search.candidates(&page) {
        if judged == SURVIVORS || kept.len() > 2 * OFFERED {
            break;
        }
        if search.passes(&change, Look::Once) {
            judged += 1;
            if search.is_sound(&change) && search.passes(&change, Look::InFull) {
                let mended = search.others_mended(&change);
                let at = others.iter().position(|other| *other < mended).unwrap_or(kept.len());
                others.insert(at, mended);
                kept.insert(at, change);
            }
        }
    }
    best(kept)
}

/// One of each kind first, then what is left, in the order of locality.
fn best(kept: Vec<Change<(usize, Sum)>>) -> Vec<Fix> {
    let first = |number: usize, kind: Kind| !kept.iter().take(number).any(|other| other.kind == kind);
    let mut order: Vec<usize> = (0..kept.len()).collect();
    order.sort_by_key(|number| kept.get(*number).is_some_and(|change| !first(*number, change.kind)));
    order.truncate(OFFERED);
    order.sort_unstable();
    let chosen = order.into_iter().filter_map(|number| kept.get(number));
    let fix = |change: &Change<(usize, Sum)>| Fix {
        title: change.title.clone(),
        edits: change.edits.clone(),
        bulk: Err("a step can be mended in more than one way"),
    };
    chosen.map(fix).collect()
}

struct Search<'s, 'a> {
    broken: &'s Broken<'s>,
    eyes: &'s Eyes<'s>,
    source: &'s Source<'s>,
    surroundings: Surroundings<'a>,
    holds: &'s Holds<'s>,
}

impl Search<'_, '_> {
    /// The edits to be tried, the most local first, the right side before the left.
    fn candidates(&self, page: &Page<'_>) -> Vec<Change<(usize, Sum)>> {
        let mut found = Vec::new();
        let mut factors = 0;
        for side in [self.broken.relation + 1, self.broken.relation] {
            let Some(sum) = self.broken.statement.sides.get(side).filter(|_| self.may_be_edited(side)) else {
                continue;
            };
            walk(sum, &mut |_| factors += 1);
            if factors > FACTORS {
                return Vec::new();
            }
            let changes = edits::of_sum(sum, page).into_iter().chain(missing::of_side(sum, page));
            found.extend(changes.map(|change| change.within(|sum| (side, sum))));
        }
        found.sort_by_key(|change| change.kind);
        found.truncate(CANDIDATES);
        found
    }

    /// A side that a definition or a condition shares is left alone: an edit there would reach further than this step.
    fn may_be_edited(&self, side: usize) -> bool {
        let count = self.broken.statement.relations.len();
        let beside = [side.checked_sub(1), Some(side)].into_iter().flatten().filter(|number| *number < count);
        beside.into_iter().all(|number| {
            number == self.broken.relation || self.broken.others.iter().any(|(other, _)| *other == number)
        })
    }

    /// Whether the step holds after an edit, and so do those that held before and share the side.
    fn passes(&mut self, change: &Change<(usize, Sum)>, look: Look) -> bool {
        let (side, sum) = &change.of;
        let relation = self.broken.relation;
        let broken = self.broken;
        let shared = broken.others.iter().filter(|(_, held)| *held && look == Look::InFull).map(|(number, _)| *number);
        let shared = shared.filter(|number| number == side || number + 1 == *side);
        std::iter::once(relation).chain(shared).all(|number| {
            let side_of = |at: usize| if at == *side { Some(sum) } else { broken.statement.sides.get(at) };
            let (Some(left), Some(right)) = (side_of(number), side_of(number + 1)) else { return false };
            self.equal(left, right, look)
        })
    }

    /// How many other steps that failed and share the edited side hold after an edit.
    fn others_mended(&mut self, change: &Change<(usize, Sum)>) -> usize {
        let (side, sum) = &change.of;
        let broken = self.broken;
        let failed = broken.others.iter().filter(|(number, held)| !*held && *number != broken.relation);
        let beside = failed.map(|(number, _)| *number).filter(|number| number == side || number + 1 == *side);
        let mended = beside.filter(|number| {
            let side_of = |at: usize| if at == *side { Some(sum) } else { broken.statement.sides.get(at) };
            side_of(*number).zip(side_of(number + 1)).is_some_and(|(left, right)| self.equal(left, right, Look::InFull))
        });
        mended.count()
    }

    /// Whether two sides are equal, however far derivatives reach.
    fn equal(&mut self, left: &Sum, right: &Sum, look: Look) -> bool {
        for reach in [Reach::Near, Reach::Far] {
            let mut lowering = Lowering::new(&mut self.surroundings, self.eyes, reach);
            let Ok((one, two)) = pair(&mut lowering, left, right) else { return false };
            let mattered = lowering.reach_mattered;
            if !(self.holds)(&self.surroundings, &one, &two, look) {
                return false;
            }
            if !mattered {
                break;
            }
        }
        true
    }

    /// Whether a new term is another but for a simple number: then that one would have another number instead.
    fn is_alike(&mut self, new: &Sum, other: &Term) -> bool {
        let other = Sum::of(vec![other.clone()]);
        let mut lowering = Lowering::new(&mut self.surroundings, self.eyes, Reach::Near);
        let Ok((one, two)) = pair(&mut lowering, new, &other) else { return false };
        coefficients::ratios().flat_map(|ratio| [Some(ratio), Rational::ZERO.checked_sub(ratio)]).flatten().any(
            |ratio| {
                let scaled = Expression::Product(vec![Expression::Number(ratio), two.clone()]);
                (self.holds)(&self.surroundings, &one, &scaled, Look::Once)
            },
        )
    }

    /// Whether an edit says something, and its text says the same as its tree.
    fn is_sound(&mut self, change: &Change<(usize, Sum)>) -> bool {
        let (side, sum) = &change.of;
        let other = if *side == self.broken.relation { side + 1 } else { self.broken.relation };
        let written = |sum: &Sum| write_sum(sum, Dialect::Latex).text;
        let sides = &self.broken.statement.sides;
        if sides.get(other).is_some_and(|other| written(other) == written(sum)) {
            return false;
        }
        let before = sides.get(*side).map(|side| side.terms.as_slice()).unwrap_or_default();
        let changed: Vec<Sum> = sum
            .terms
            .iter()
            .enumerate()
            .filter(|(number, term)| before.get(*number) != Some(term))
            .map(|(_, term)| Sum::of(vec![term.clone()]))
            .collect();
        let zero = Sum::of_factor(Factor::number(0));
        if changed.iter().any(|term| self.equal(term, &zero, Look::Once)) {
            return false;
        }
        // Nor both sides together, unless one of them is written as 0.
        if !sides.get(other).is_some_and(is_zero) && self.equal(sum, &zero, Look::Once) {
            return false;
        }
        if change.kind == Kind::NewTerm
            && changed.iter().any(|term| before.iter().any(|other| self.is_alike(term, other)))
        {
            return false;
        }
        let mut edited = self.broken.statement.clone();
        edited.sides.splice(*side..=*side, [sum.clone()]);
        let written = |statement: &Statement| write_statement(statement, Dialect::Latex).text;
        (self.source.reread)(&change.edits).is_some_and(|again| written(&again) == written(&edited))
    }
}
