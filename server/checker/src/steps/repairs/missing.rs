//! One more term: the correction that a covariant derivative has for one slot, or a term that stands there with two of
//! its letters exchanged, as what is antisymmetrised or symmetrised has it.

use compact_str::CompactString;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{Atom, Factor, ItemKind, Level, SignKind, Sum, Term, each_item_mut, substitute_letter};
use indexwise_grammar::write::write_term;

use crate::conventions::built_in::is_derivative;

use super::edits::{Change, Kind, PLACES, Page};

/// Letters that a new sum may take: whichever of them is free.
pub(super) const SUMMED: [&str; 12] =
    ["m", "n", "l", "p", "q", "r", "\\lambda", "\\sigma", "\\rho", "\\kappa", "a", "b"];

/// A side with one more term at its end.
pub(super) fn of_side(side: &Sum, page: &Page<'_>) -> Vec<Change<Sum>> {
    let mut terms: Vec<Term> = side.terms.iter().flat_map(|term| corrections(term, page)).collect();
    terms.extend(side.terms.iter().flat_map(|term| exchanged(term, page)));
    terms.into_iter().filter_map(|term| appended(side, term, page)).collect()
}

fn appended(side: &Sum, term: Term, page: &Page<'_>) -> Option<Change<Sum>> {
    let last = side.terms.last()?;
    let written = write_term(&term, page.dialect);
    if !written.complete {
        return None;
    }
    let text = written.text.trim();
    let sign = text.get(..1).filter(|sign| matches!(*sign, "+" | "-"))?;
    let by = format!(" {sign} {}", text.get(1..)?.trim_start());
    let end = Span { start: last.span.end, end: last.span.end };
    let mut copy = side.clone();
    copy.terms.push(term);
    let title = format!("Add{by}");
    Some(Change { of: copy, edits: vec![page.edit(end, &by)], title, kind: Kind::NewTerm })
}

/// What the derivatives of a term would be corrected by, slot by slot; for a covariant one, what it holds already,
/// taken away.
fn corrections(term: &Term, page: &Page<'_>) -> Vec<Term> {
    let mut found = Vec::new();
    let pairs = term.factors.iter().zip(term.factors.iter().skip(1));
    for (at, (factor, of)) in pairs.enumerate() {
        let Some((by, covariant)) = derivative(factor, page) else { continue };
        let slots = letters(of, page);
        if slots.len() > PLACES {
            continue;
        }
        for (level, letter) in &slots {
            let Some(fresh) = fresh(term, letter, page) else { continue };
            let item = |letter: &CompactString| ItemKind::Letter(letter.clone());
            let (first, last) = if *level == Level::Up { (letter, &fresh) } else { (&fresh, letter) };
            let mut symbol = Factor::kernel(
                "\\Gamma",
                &[(Level::Up, item(first)), (Level::Down, item(&by)), (Level::Down, item(last))],
            );
            // Its slots are known: custom sets them one above the other.
            symbol.scripts.iter_mut().for_each(|script| script.staggered = false);
            let mut moved = Term::of(vec![of.clone()]);
            if substitute_letter(&mut moved, letter, &item(&fresh)) != 1 {
                continue;
            }
            let mut copy = term.clone();
            copy.factors.splice(at..at + 2, [symbol].into_iter().chain(moved.factors));
            let sign = if (*level == Level::Up) == covariant { SignKind::Minus } else { SignKind::Plus };
            found.push(with_sign(copy, sign));
        }
    }
    found
}

/// The term with a sign multiplied onto it, which is written even if it is a plus.
fn with_sign(term: Term, sign: SignKind) -> Term {
    let signed = if term.sign.is_none() { term.signed(SignKind::Plus) } else { term };
    if sign == SignKind::Minus { signed.signed(SignKind::Minus) } else { signed }
}

/// The index of a derivative with one, and whether it is a covariant one.
fn derivative(factor: &Factor, page: &Page<'_>) -> Option<(CompactString, bool)> {
    let Atom::Kernel(kernel) = &factor.atom else { return None };
    let slots = letters(factor, page);
    match slots.as_slice() {
        [(Level::Down, letter)] if is_derivative(&kernel.letter) => {
            Some((letter.clone(), kernel.letter != "\\partial"))
        }
        _ => None,
    }
}

/// The indices of a factor.
fn letters(factor: &Factor, page: &Page<'_>) -> Vec<(Level, CompactString)> {
    let mut found = Vec::new();
    for script in &factor.scripts {
        for item in &script.items {
            if let ItemKind::Letter(letter) = &item.kind
                && page.eyes.is_index(letter, item.span)
            {
                found.push((script.level, letter.clone()));
            }
        }
    }
    found
}

/// A letter that the term does not use, of the family of another.
fn fresh(term: &Term, like: &str, page: &Page<'_>) -> Option<CompactString> {
    let mut used: Vec<CompactString> = Vec::new();
    each_item_mut(&mut term.clone(), &mut |item| {
        if let ItemKind::Letter(letter) = &item.kind {
            used.push(letter.clone());
        }
    });
    let family = page.eyes.family_of(like);
    let free = |letter: &&&str| page.eyes.family_of(letter) == family && !used.iter().any(|one| one == **letter);
    SUMMED.iter().find(free).map(|letter| CompactString::new(letter))
}

/// A term again, with two of its letters exchanged that stand on one level, in either sign.
fn exchanged(term: &Term, page: &Page<'_>) -> Vec<Term> {
    let all: Vec<(Level, CompactString)> = term.factors.iter().flat_map(|factor| letters(factor, page)).collect();
    if all.len() > PLACES {
        return Vec::new();
    }
    let once = |letter: &CompactString| all.iter().filter(|(_, other)| other == letter).count() == 1;
    let free: Vec<&(Level, CompactString)> = all.iter().filter(|(_, letter)| once(letter)).collect();
    let mut found = Vec::new();
    for (number, (level, one)) in free.iter().enumerate() {
        for (other, two) in free.get(number + 1..).unwrap_or_default() {
            if level != other {
                continue;
            }
            let mut copy = term.clone();
            each_item_mut(&mut copy, &mut |item| {
                if let ItemKind::Letter(letter) = &mut item.kind {
                    if letter == one {
                        letter.clone_from(two);
                    } else if letter == two {
                        letter.clone_from(one);
                    }
                }
            });
            found.push(with_sign(copy.clone(), SignKind::Minus));
            found.push(with_sign(copy, SignKind::Plus));
        }
    }
    found
}
