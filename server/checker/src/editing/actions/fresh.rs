//! Fresh letters for the dummies of a term.

use compact_str::CompactString;
use indexwise_grammar::tree::Term;

use crate::changes::Change;
use crate::editing::letters::fresh_letters;
use crate::editing::write_out::place::{self, Located};
use crate::finding::Edit;
use crate::ledger::{Judged, shown};
use crate::paper::{Asked, View};

use super::{Action, ActionKind};

/// Sets of letters that are tried before nothing is offered: a letter may be read as a label here.
const TRIES: usize = 3;

/// Gives the dummies of the term at a place letters that the statement does not have; on a dummy, that one alone.
pub(super) fn fresh_dummies(view: &View, document: usize, at: u32) -> Option<Action> {
    let tried = view.statement_at(document, at, |asked| {
        let located = place::locate(asked, at).ok()?;
        let sets = (0..TRIES).filter_map(|skip| renamed(view, document, asked, &located, skip));
        sets.into_iter().find(|(edits, _)| view.reads_as_well(document, asked.number, edits))
    });
    let (edits, letters) = tried.ok()??;
    let names = |pick: fn(&(CompactString, CompactString)) -> &CompactString| {
        letters.iter().map(|pair| shown(pick(pair))).collect::<Vec<_>>().join(" ")
    };
    let word = if letters.len() == 1 { "dummy" } else { "dummies" };
    let title = format!("Write {} for the {word} {}", names(|pair| &pair.1), names(|pair| &pair.0));
    Some(Action { title, kind: ActionKind::Rewrite, edits, preferred: false })
}

type Renamed = (Vec<Edit>, Vec<(CompactString, CompactString)>);

/// The edits for one set of letters; the first `skip` fresh ones are left out.
fn renamed(view: &View, document: usize, asked: &Asked<'_>, located: &Located<'_>, skip: usize) -> Option<Renamed> {
    let judged = asked.judged(view.text(document));
    let mut taken: Vec<CompactString> = Vec::new();
    let (mut edits, mut letters) = (Vec::new(), Vec::new());
    for letter in &located.letters {
        let fresh = fresh_letters(&judged, letter, &taken).into_iter().nth(skip)?;
        let places = places_of(&judged, located.term, located, letter);
        if places.is_empty() {
            return None;
        }
        edits.extend(Change::Rename(places, fresh.clone()).edits(&judged)?);
        taken.push(fresh.clone());
        letters.push((letter.clone(), fresh));
    }
    edits.sort();
    edits.dedup();
    let apart = edits.is_sorted_by(|one, next| one.span.end <= next.span.start);
    (apart && !edits.is_empty()).then_some((edits, letters))
}

/// The places of a dummy in its term, by their numbers in the sketch.
fn places_of(judged: &Judged<'_>, term: &Term, located: &Located<'_>, letter: &CompactString) -> Vec<u32> {
    let places = judged.sketch.places.iter().enumerate();
    let own = places.filter(|(_, place)| {
        place.letter == *letter && term.span.holds(place.span) && located.takes(letter, place.span)
    });
    own.filter_map(|(number, _)| u32::try_from(number).ok()).filter(|number| judged.is_index(*number)).collect()
}
