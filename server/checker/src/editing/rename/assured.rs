//! Whether a paper reads as before after edits that rename something.
//!
//! The paper is read again as a whole, since a letter votes on the habits of its document. Statement by statement the
//! same letters have to be indices, the same places have to mean the same index, and nothing may be out of balance that
//! was in balance.

use std::sync::Arc;

use compact_str::CompactString;
use indexwise_grammar::span::Span;

use crate::balance::Odd;
use crate::finding::{Edit, edited};
use crate::paper::{Cancel, View};

use crate::editing::indices::{Index, indices};
use crate::editing::kernels::{KernelName, in_sentences, uses};

use super::Edits;

/// What is renamed.
pub(super) enum Expected<'a> {
    /// An index in one document.
    Index { document: usize, from: &'a CompactString, to: &'a CompactString },
    /// A kernel everywhere.
    Kernel { from: &'a KernelName, to: &'a KernelName },
}

/// A statement, as far as it has to stay what it is.
#[derive(Debug, PartialEq)]
struct Kept {
    /// Letters of places, each with whether it is an index.
    letters: Vec<(CompactString, bool)>,
    /// The scopes that count.
    scopes: Vec<bool>,
    /// Places that are one index, without its letter.
    indices: Vec<Index>,
    odd: Vec<(CompactString, Odd)>,
}

/// Whether the paper with these edits reads as it does now, but for the new name.
pub(super) fn reads_as_before(view: &View, edits: &Edits, expected: &Expected<'_>) -> bool {
    let mut paper = view.paper().clone();
    for (document, own) in edits {
        let (Some(source), Some(text)) = (paper.documents.get_mut(*document), edited(view.text(*document), own)) else {
            return false;
        };
        source.text = Arc::from(text.as_str());
    }
    let after = View::of(&paper, &Cancel::default());
    (0..view.len()).all(|number| {
        let own = edits.iter().find(|(document, _)| *document == number).map_or(&[][..], |(_, own)| own);
        is_kept(view, &after, number, own, expected)
    })
}

fn is_kept(before: &View, after: &View, document: usize, edits: &[Edit], expected: &Expected<'_>) -> bool {
    match expected {
        Expected::Index { document: own, from, to } => {
            let renamed = (*own == document).then_some((*from, *to));
            same(&kept(before, document, edits, renamed), &kept(after, document, &[], None), renamed)
        }
        Expected::Kernel { from, to } => {
            let count = |view: &View, kernel: &KernelName| {
                (uses(view, document, kernel).len(), in_sentences(view, document, kernel).len())
            };
            same(&kept(before, document, &[], None), &kept(after, document, &[], None), None)
                && count(before, from) == count(after, to)
        }
    }
}

/// The statements of a document; the letters at the places of edits renamed.
fn kept(view: &View, document: usize, edits: &[Edit], renamed: Option<(&CompactString, &CompactString)>) -> Vec<Kept> {
    let text = view.text(document);
    let mut out = Vec::new();
    view.each_statement(document, Span::new(0, text.len()), |asked| {
        let (sketch, choice) = (asked.sketch, &asked.reading.choice);
        let letters = sketch.places.iter().map(|place| {
            let moved = edits.iter().any(|edit| edit.span == place.span);
            let letter = match renamed {
                Some((from, to)) if moved && place.letter == *from => to.clone(),
                _ => place.letter.clone(),
            };
            (letter, choice.index.get(place.unit as usize) == Some(&true))
        });
        let nameless = |index: Index| Index { letter: CompactString::default(), signs: Vec::new(), ..index };
        let mut indices: Vec<Index> = indices(sketch, choice).into_iter().map(nameless).collect();
        indices.sort_by(|one, two| one.places.cmp(&two.places));
        out.push(Kept {
            letters: letters.collect(),
            scopes: choice.on.clone(),
            indices,
            odd: asked.reading.odd.clone(),
        });
    });
    out
}

/// Whether statements are the same; fewer may be out of balance.
fn same(before: &[Kept], after: &[Kept], renamed: Option<(&CompactString, &CompactString)>) -> bool {
    let known = |kept: &Kept, letter: &CompactString| {
        let was = |one: &CompactString| kept.odd.iter().any(|(odd, _)| odd == one);
        was(letter) || renamed.is_some_and(|(from, to)| to == letter && was(from))
    };
    before.len() == after.len()
        && before.iter().zip(after).all(|(one, two)| {
            one.letters == two.letters
                && one.scopes == two.scopes
                && one.indices == two.indices
                && two.odd.iter().all(|(letter, _)| known(one, letter))
        })
}
