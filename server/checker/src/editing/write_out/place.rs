//! The term at a place and the sums that it closes.
//!
//! Which letters are summed the count of the balance says (`balance::events`); which term closes a sum is read off the
//! tree: the innermost one that holds both places of the pair. Trap: all that one macro call yields stands at one
//! place, so that items are matched by letter and place together and a term by being the same node.

use compact_str::CompactString;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{Atom, Factor, Item, ItemKind, Statement, Sum, Term};

use crate::balance::{self, Event, Odd};
use crate::paper::Asked;

use super::{Refusal, understood};

/// A term with the letters whose sums are to be written out.
#[derive(Debug)]
pub(in crate::editing) struct Located<'t> {
    pub term: &'t Term,
    /// In the order of their first place.
    pub letters: Vec<CompactString>,
    /// For a letter, where an inner term has a sum of its own with it.
    pub inner: Vec<(CompactString, Span)>,
}

impl Located<'_> {
    /// Whether a letter at a place takes part in the sums that are written out.
    pub fn takes(&self, letter: &CompactString, span: Span) -> bool {
        let elsewhere = |(other, inner): &(CompactString, Span)| other == letter && inner.holds(span);
        self.letters.contains(letter) && !self.inner.iter().any(elsewhere)
    }
}

/// Two places of a summed letter.
struct Pair<'s> {
    letter: &'s CompactString,
    places: [Span; 2],
}

impl Pair<'_> {
    fn is_at(&self, item: &Item) -> bool {
        matches!(&item.kind, ItemKind::Letter(letter) if letter == self.letter) && self.places.contains(&item.span)
    }

    /// Whether a term holds both places.
    fn is_in(&self, term: &Term) -> bool {
        items_of(term).into_iter().filter(|item| self.is_at(item)).count() > 1
    }

    /// The innermost term that holds both.
    fn owner<'t>(&self, outer: &'t Term) -> Option<&'t Term> {
        let mut owner = Some(outer).filter(|term| self.is_in(term))?;
        while let Some(inner) = inner_terms(owner).into_iter().find(|term| self.is_in(term)) {
            owner = inner;
        }
        Some(owner)
    }
}

/// Finds the term and the letters that a place asks for.
pub(in crate::editing) fn locate<'a>(asked: &Asked<'a>, offset: u32) -> Result<Located<'a>, Refusal> {
    let path = terms_at(asked.tree, offset);
    let (Some(outermost), Some(innermost)) = (path.first(), path.last()) else { return Err(Refusal::NoSum) };
    let under_cursor = letters_at(asked, innermost, offset);
    let pairs = pairs(asked);
    let owned: Vec<(&Pair<'_>, &Term)> = pairs.iter().filter_map(|pair| Some((pair, pair.owner(outermost)?))).collect();
    let depth = |owner: &Term| path.iter().position(|term| std::ptr::eq(*term, owner));
    let on_path = |wanted: &dyn Fn(&CompactString) -> bool| {
        let found = owned.iter().filter(|(pair, _)| wanted(pair.letter)).filter_map(|(_, owner)| depth(owner));
        found.max().and_then(|depth| path.get(depth).copied())
    };
    let dummy = on_path(&|letter| under_cursor.contains(letter));
    let Some(term) = dummy.or_else(|| on_path(&|_| true)) else { return Err(refusal(asked, outermost, &under_cursor)) };
    let closes =
        |letter: &CompactString| owned.iter().any(|(pair, owner)| pair.letter == letter && std::ptr::eq(*owner, term));
    let mut letters: Vec<CompactString> = Vec::new();
    for letter in items_of(term).into_iter().filter_map(letter_of) {
        let wanted = dummy.is_none() || under_cursor.contains(letter);
        if wanted && !letters.contains(letter) && closes(letter) {
            letters.push(letter.clone());
        }
    }
    let inner = owned.iter().filter(|(_, owner)| !std::ptr::eq(*owner, term) && term.span != owner.span);
    let inner = inner.map(|(pair, owner)| (pair.letter.clone(), owner.span)).filter(|(_, span)| term.span.holds(*span));
    Ok(Located { term, letters, inner: inner.collect() })
}

/// Why no sum stands at a place with these letters.
fn refusal(asked: &Asked<'_>, term: &Term, letters: &[CompactString]) -> Refusal {
    for letter in letters {
        if asked.sketch.bound.iter().any(|bound| bound.letter == *letter) {
            return Refusal::SumSign(letter.clone());
        }
        if asked.reading.odd.iter().any(|(other, odd)| other == letter && *odd == Odd::Thrice) {
            return Refusal::Thrice(letter.clone());
        }
    }
    // The count passes over a term with a part that matches anything.
    understood(term, asked).err().unwrap_or(Refusal::NoSum)
}

/// The pairs of a statement, letter by letter.
fn pairs<'s>(asked: &Asked<'s>) -> Vec<Pair<'s>> {
    let sketch = asked.sketch;
    let mut out = Vec::new();
    for (number, letter) in sketch.letter_numbers().zip(&sketch.letters) {
        for event in balance::events(sketch, &asked.reading.choice, number).1 {
            let Event::Pair(one, two) = event else { continue };
            if let (Some(one), Some(two)) = (sketch.place(one), sketch.place(two)) {
                out.push(Pair { letter, places: [one.span, two.span] });
            }
        }
    }
    out
}

/// The index letters that stand at an offset.
fn letters_at(asked: &Asked<'_>, term: &Term, offset: u32) -> Vec<CompactString> {
    let here = |item: &&Item| item.span.start <= offset && offset < item.span.end;
    let index = |item: &Item| letter_of(item).filter(|letter| asked.eyes.is_index(letter, item.span)).cloned();
    items_of(term).into_iter().filter(here).filter_map(index).collect()
}

pub(super) fn letter_of(item: &Item) -> Option<&CompactString> {
    match &item.kind {
        ItemKind::Letter(letter) => Some(letter),
        _ => None,
    }
}

/// The terms that hold an offset, the outermost first. Right after a term counts as in it where nothing else begins.
fn terms_at(statement: &Statement, offset: u32) -> Vec<&Term> {
    let found = terms_around(statement, offset);
    if found.is_empty() && offset > 0 { terms_around(statement, offset - 1) } else { found }
}

fn terms_around(statement: &Statement, offset: u32) -> Vec<&Term> {
    let holds = |term: &&Term| {
        let start = term.sign.map_or(term.span.start, |sign| sign.span.start.min(term.span.start));
        start <= offset && offset < term.span.end
    };
    let mut path: Vec<&Term> = Vec::new();
    let mut open: Vec<&Term> = statement.sides.iter().flat_map(|side| &side.terms).collect();
    while let Some(term) = open.into_iter().find(holds) {
        path.push(term);
        open = inner_terms(term);
    }
    path
}

/// The terms of the sums that a term's factors hold: in brackets, fractions, roots, exponents.
fn inner_terms(term: &Term) -> Vec<&Term> {
    let mut out = Vec::new();
    let mut open: Vec<&Factor> = term.factors.iter().rev().collect();
    while let Some(factor) = open.pop() {
        out.extend(sums_of(factor).into_iter().flat_map(|sum| &sum.terms));
        open.extend(in_scripts(factor));
    }
    out
}

/// All factors of a term, those inside other factors and in scripts too.
pub(super) fn factors_of(term: &Term) -> Vec<&Factor> {
    let mut out = Vec::new();
    let mut open: Vec<&Factor> = term.factors.iter().rev().collect();
    while let Some(factor) = open.pop() {
        out.push(factor);
        open.extend(in_scripts(factor));
        let inner = sums_of(factor).into_iter().flat_map(|sum| &sum.terms).flat_map(|term| &term.factors);
        let at = open.len();
        open.extend(inner);
        if let Some(added) = open.get_mut(at..) {
            added.reverse();
        }
    }
    out
}

/// All items of scripts in a term, in the order of the factors that carry them.
pub(super) fn items_of(term: &Term) -> Vec<&Item> {
    factors_of(term).into_iter().flat_map(|factor| &factor.scripts).flat_map(|script| &script.items).collect()
}

/// The sums that an atom holds.
fn sums_of(factor: &Factor) -> Vec<&Sum> {
    match &factor.atom {
        Atom::Group(group) => group.parts.iter().flat_map(|part| &part.sides).collect(),
        Atom::Fraction(fraction) => fraction.order.iter().chain([&fraction.over, &fraction.under]).collect(),
        Atom::Root(root) => root.degree.iter().chain([&root.body]).collect(),
        Atom::Order(Some(sum)) | Atom::Wrapped(sum) | Atom::Labelled(sum) | Atom::Struck(sum) => vec![sum],
        Atom::Unknown(_, sums) => sums.iter().collect(),
        _ => Vec::new(),
    }
}

/// The factors that stand as items of a factor's scripts.
fn in_scripts(factor: &Factor) -> impl Iterator<Item = &Factor> {
    factor.scripts.iter().flat_map(|script| &script.items).filter_map(|item| match &item.kind {
        ItemKind::Factor(inner) => Some(&**inner),
        _ => None,
    })
}
