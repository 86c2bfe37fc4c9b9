//! The symbol table of a document: every kernel with its slots and symmetries, and letters with several meanings.
//!
//! It is gathered from the trees of all statements under their readings, so that a label is no slot and an index no
//! quantity; formulas that the author skips are left out. `roles.rs` says what a factor uses its letters as,
//! `words.rs` puts symmetries into words. Only who asks for the table pays for it. Traps: statements come in any
//! order, so that the first use is the least span; a derivative, a differential and a word are no kernels.

mod roles;
#[cfg(test)]
mod tests;
mod words;

use std::collections::hash_map::Entry;

use compact_str::CompactString;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{Statement, walk};
use rustc_hash::FxHashMap;

use crate::conventions::built_in::is_metric_by_custom;
use crate::conventions::meanings::{Meanings, Role};
use crate::terms::symmetries::{Customs, exchanges};
use crate::terms::uses::Use;
use crate::terms::{Eyes, Piece};

use roles::Roles;
use words::in_words;

/// The symbols of one document.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct SymbolTable {
    /// Kernels by first use.
    pub kernels: Vec<Symbol>,
    /// Letters that mean more than one thing, by first use.
    pub letters: Vec<DoubleUse>,
}

impl SymbolTable {
    /// Whether there is nothing in it.
    pub fn is_empty(&self) -> bool {
        self.kernels.is_empty() && self.letters.is_empty()
    }
}

/// A kernel with so many slots.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Symbol {
    /// In LaTeX, with decorations and labels.
    pub kernel: CompactString,
    /// How many slots of its own it has; derivatives do not count.
    pub slots: usize,
    /// How often it is used so.
    pub uses: usize,
    /// Its first use.
    pub first: Span,
    /// What it is symmetric in, in words; slots count from 1, in the order of the first use.
    pub symmetries: Vec<String>,
    /// Whether the author declares it with so many slots.
    pub declared: bool,
}

/// A letter with several meanings: an index that is something else, too, or a kernel with slots in different numbers.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct DoubleUse {
    /// In LaTeX.
    pub letter: CompactString,
    /// What it is used as, by first use; at least two.
    pub parts: Vec<Part>,
}

/// What a letter is used as.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Part {
    /// What.
    pub role: LetterRole,
    /// How often.
    pub uses: usize,
    /// The first use.
    pub first: Span,
}

/// What a letter may be used as.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum LetterRole {
    /// An index.
    Index,
    /// A kernel with this number of slots; without any it is a quantity.
    Kernel(usize),
    /// A script that names something.
    Label,
    /// A script that names a value of an index.
    Component,
}

impl LetterRole {
    /// In words: `index`, `quantity`, `2 slots`.
    pub fn words(self) -> String {
        match self {
            Self::Index => "index".to_owned(),
            Self::Kernel(0) => "quantity".to_owned(),
            Self::Kernel(1) => "1 slot".to_owned(),
            Self::Kernel(slots) => format!("{slots} slots"),
            Self::Label => "label".to_owned(),
            Self::Component => "component".to_owned(),
        }
    }
}

/// Gathers symbols statement by statement.
#[derive(Debug, Default)]
pub(crate) struct Gatherer {
    kernels: FxHashMap<(CompactString, usize), Symbol>,
    /// Kernels without slots where a statement only names them.
    named: FxHashMap<(CompactString, usize), Symbol>,
    letters: FxHashMap<CompactString, FxHashMap<LetterRole, Part>>,
}

impl Gatherer {
    /// Takes the symbols of a statement of `text`.
    pub(crate) fn take(&mut self, statement: &Statement, text: &str, eyes: &Eyes<'_>) {
        let mut roles = Roles::new(statement, text, eyes);
        for side in &statement.sides {
            walk(side, &mut |factor| roles.take(factor));
        }
        let (kernels, letters) = roles.finish();
        for (made, named) in kernels {
            let into = if named { &mut self.named } else { &mut self.kernels };
            count(into, &made, eyes);
        }
        for (letter, role, span) in letters {
            self.letter(letter, role, span);
        }
    }

    /// The table of a document that declares `meanings`.
    pub(crate) fn finish(mut self, meanings: &Meanings, customs: Customs) -> SymbolTable {
        self.settle_named();
        let mut kernels: Vec<Symbol> = self.kernels.into_values().collect();
        // Uses that one macro made share their place.
        kernels.sort_by(|a, b| (a.first, &a.kernel, a.slots).cmp(&(b.first, &b.kernel, b.slots)));
        let letter = |(letter, parts): (CompactString, FxHashMap<LetterRole, Part>)| {
            let mut parts: Vec<Part> = parts.into_values().collect();
            parts.sort_by_key(|part| (part.first, part.role));
            DoubleUse { letter, parts }
        };
        let mut letters: Vec<DoubleUse> = self
            .letters
            .into_iter()
            .filter(|(_, parts)| parts.len() > 1)
            .map(letter)
            .filter(|one| means_several_things(one, meanings, customs))
            .collect();
        letters.sort_by(|a, b| {
            let first = |one: &DoubleUse| one.parts.first().map(|part| part.first);
            (first(a), &a.letter).cmp(&(first(b), &b.letter))
        });
        SymbolTable { kernels, letters }
    }

    /// A letter that is only named counts as a kernel unless it is an index somewhere.
    fn settle_named(&mut self) {
        let is_index = |letter: &CompactString| {
            self.letters.get(letter).is_some_and(|parts| parts.contains_key(&LetterRole::Index))
        };
        // Each key is put in once, so that the order does not matter.
        for (key, named) in self.named.drain().filter(|((kernel, _), _)| !is_index(kernel)) {
            match self.kernels.entry(key) {
                Entry::Vacant(entry) => drop(entry.insert(named)),
                Entry::Occupied(mut entry) => {
                    let known = entry.get_mut();
                    known.uses += named.uses;
                    known.first = known.first.min(named.first);
                }
            }
        }
    }

    fn letter(&mut self, letter: CompactString, role: LetterRole, span: Span) {
        let parts = self.letters.entry(letter).or_default();
        let part = parts.entry(role).or_insert(Part { role, uses: 0, first: span });
        part.uses += 1;
        part.first = part.first.min(span);
    }
}

/// The kernels and letters of a statement, in the order of its tree.
#[derive(Debug, Default)]
pub(crate) struct Told {
    /// Every use of a kernel; derivatives, differentials and words are none.
    pub uses: Vec<Use>,
    /// Letters, what they are used as, and where.
    pub letters: Vec<(CompactString, LetterRole, Span)>,
}

/// What a statement of `text` uses its letters as.
pub(crate) fn told(statement: &Statement, text: &str, eyes: &Eyes<'_>) -> Told {
    let mut roles = Roles::new(statement, text, eyes);
    for side in &statement.sides {
        walk(side, &mut |factor| roles.take(factor));
    }
    let (kernels, letters) = roles.finish();
    Told { uses: kernels.into_iter().map(|(made, _)| made).collect(), letters }
}

/// Counts a use of a kernel.
fn count(kernels: &mut FxHashMap<(CompactString, usize), Symbol>, made: &Use, eyes: &Eyes<'_>) {
    let slots = made.own_slots().count();
    let known = kernels.entry((made.kernel.clone(), slots)).or_insert_with(|| Symbol {
        kernel: made.kernel.clone(),
        slots,
        uses: 0,
        first: made.span,
        symmetries: symmetries(made, eyes),
        declared: eyes.meanings.known(&made.kernel, slots).is_some(),
    });
    known.uses += 1;
    if made.span < known.first {
        known.first = made.span;
        known.symmetries = symmetries(made, eyes);
    }
}

/// What a use is symmetric in. Of stacked scripts the order of the slots is taken as written.
pub(crate) fn symmetries(made: &Use, eyes: &Eyes<'_>) -> Vec<String> {
    let bare = Use { slots: made.own_slots().cloned().collect(), stacked: false, ..made.clone() };
    let piece = Piece { made: bare, ..Piece::default() };
    in_words(&exchanges(&piece, eyes.meanings, eyes.customs))
}

/// Whether the parts that a letter plays are worth telling. That one label or component is also a quantity is the
/// trade's habit (`p_r` at the radius `r`).
fn means_several_things(letter: &DoubleUse, meanings: &Meanings, customs: Customs) -> bool {
    let is_index = letter.parts.iter().any(|part| part.role == LetterRole::Index);
    is_index || has_several_forms(letter, meanings, customs)
}

/// Whether a letter stands for kernels with slots in different numbers that are not one thing by custom or by what
/// the author declares: a vector and its length, a metric and its determinant, curvature and its contractions.
fn has_several_forms(letter: &DoubleUse, meanings: &Meanings, customs: Customs) -> bool {
    let counts: Vec<usize> = letter
        .parts
        .iter()
        .filter_map(|part| match part.role {
            LetterRole::Kernel(slots) => Some(slots),
            _ => None,
        })
        .collect();
    let name = letter.letter.as_str();
    let all = |allowed: &[usize]| counts.iter().all(|count| allowed.contains(count));
    let is_metric = is_metric_by_custom(name)
        || meanings.known(name, 2).is_some_and(|known| matches!(known.role, Some(Role::Metric { .. })));
    let is_curvature = customs.curved && name == "R"
        || meanings.known(name, 4).is_some_and(|known| matches!(known.role, Some(Role::Curvature(_))));
    let one_thing = all(&[0, 1])
        || is_metric && all(&[0, 2])
        || is_curvature && all(&[0, 2, 4])
        || counts.iter().all(|count| meanings.known(name, *count).is_some());
    counts.len() > 1 && !one_thing
}
