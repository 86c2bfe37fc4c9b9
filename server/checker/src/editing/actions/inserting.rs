//! A labelled equation put in at the cursor, with its dummies renamed where they would meet letters that stand there.
//!
//! At an empty formula the whole statement is put in, elsewhere its last side: that is what is used in place of the
//! first; but not a bare number. Its free letters are kept, since only the author knows what they are to be. The text is the author's own with
//! the letters changed; where it holds layout, or comes from a file of another kind, it is written from the tree.

mod spot;

use compact_str::CompactString;
use indexwise_grammar::hosts::Host;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{Atom, Formula, Statement, walk};
use indexwise_grammar::write::{Dialect, write_statement, write_sum};

use crate::balance::{self, Event};
use crate::changes::Change;
use crate::editing::letters::fresh_letters;
use crate::finding::{Edit, edited};
use crate::ledger::Judged;
use crate::paper::View;

use super::{Action, ActionKind};
use spot::Spot;

/// Labelled equations that are offered at a place, the nearest before it first; a command may ask for all.
const OFFERED: usize = 4;

/// Labelled equations that are tried at a place before no more are offered.
const TRIED: usize = 16;

/// What an equation's own text may not hold to be put into another one.
const LAYOUT: [&str; 9] = ["&", "\\\\", "%", "\\label", "\\nonumber", "\\notag", "\\tag", "\n", "\\begin"];

/// Every labelled equation of the document with the edits that put it in at a place, in the order of the text. Those
/// that could not be read at that place are left out; that one has other free letters is for the author to see.
pub fn insertions(view: &View, document: usize, offset: u32) -> Vec<(String, Vec<Edit>)> {
    let Some(spot) = Spot::of(view, document, offset) else { return Vec::new() };
    let labelled = labelled(view, document, spot.number);
    let put = |(label, number): (CompactString, usize)| {
        let edit = put(&spot, view, document, number)?;
        let after = view.reread(document, spot.number, std::slice::from_ref(&edit))?;
        let sound = after.formula.unread.len() <= spot.formula.unread.len();
        sound.then(|| (label.to_string(), vec![edit]))
    };
    labelled.into_iter().filter_map(put).collect()
}

/// The nearest labelled equations that fit at a place where a term may begin.
pub(super) fn offered(view: &View, document: usize, at: u32) -> Vec<Action> {
    let Some(spot) = Spot::of(view, document, at).filter(Spot::has_room) else { return Vec::new() };
    let mut labelled = labelled(view, document, spot.number);
    // Those before the cursor from the nearest on, then those after it.
    labelled.sort_by_key(|(_, number)| (*number > spot.number, number.abs_diff(spot.number)));
    let fits = |(label, number): (CompactString, usize)| {
        let edits = vec![put(&spot, view, document, number)?];
        let title = format!("Insert ({label}) here with fresh dummies");
        let action = Action { title, kind: ActionKind::Insert, edits, preferred: false };
        view.reads_as_well(document, spot.number, &action.edits).then_some(action)
    };
    labelled.into_iter().take(TRIED).filter_map(fits).take(OFFERED).collect()
}

/// The labels of other formulas with the numbers of these.
fn labelled(view: &View, document: usize, but: usize) -> Vec<(CompactString, usize)> {
    let others = view.formulas(document).iter().enumerate().filter(|(number, _)| *number != but);
    others.flat_map(|(number, formula)| formula.labels.iter().map(move |(label, _)| (label.clone(), number))).collect()
}

/// The edit that puts in what a formula says.
fn put(spot: &Spot<'_>, view: &View, document: usize, number: usize) -> Option<Edit> {
    let source = view.tree(document, number)?;
    let statement = source.statements.iter().find(|statement| statement.sides.len() > 1)?;
    let side = statement.sides.last()?;
    let whole = spot.is_empty().then_some(statement);
    let mut kernels = 0;
    walk(side, &mut |factor| kernels += usize::from(matches!(factor.atom, Atom::Kernel(_))));
    if whole.is_none() && kernels == 0 {
        return None;
    }
    let span = whole.map_or(side.span, |statement| statement.span);
    let text = renamed(view, document, &source, statement, span, &spot.letters)?;
    let text = if whole.is_some() || !spot.wants_brackets(side, &text) { text } else { format!("({text})") };
    let mut edit = Edit::pasted(spot.text, Span::new(spot.at, spot.at), &text);
    spot.space_out(&mut edit.text);
    Some(edit)
}

/// A part of a statement as text for the same host, with those of its dummies renamed that stand among `letters`.
fn renamed(
    view: &View,
    document: usize,
    formula: &Formula,
    statement: &Statement,
    span: Span,
    letters: &[CompactString],
) -> Option<String> {
    let (sketch, reading) = view.reading_of(document, statement)?;
    if !reading.odd.is_empty() || !formula.unread.is_empty() {
        return None;
    }
    let (text, prices) = (view.text(document), view.prices(document)?);
    let sketch = std::borrow::Cow::Owned(sketch);
    let judged = Judged { text, formula, sketch, reading, prices, faults: Vec::new() };
    let mut taken = letters.to_vec();
    let mut edits: Vec<Edit> = Vec::new();
    for (letter, places) in dummies(&judged, span).into_iter().filter(|(letter, _)| letters.contains(letter)) {
        let fresh = fresh_letters(&judged, &letter, &taken).into_iter().next()?;
        edits.extend(Change::Rename(places, fresh.clone()).edits(&judged)?);
        taken.push(fresh);
    }
    edits.sort();
    edits.dedup();
    let own = own_text(text, span, &edits)?;
    if !LAYOUT.iter().any(|sign| own.contains(sign)) {
        return Some(own.trim().trim_end_matches([',', '.', ';']).trim_end().to_owned());
    }
    if !edits.is_empty() {
        // What is written from the tree has to be read with the new letters first.
        let after = view.reread(document, view.formula_number(document, span.start)?, &edits)?;
        let at = formula.statements.iter().position(|other| other.span == statement.span)?;
        return written(view.host(document), after.formula.statements.get(at)?, span == statement.span);
    }
    written(view.host(document), statement, span == statement.span)
}

/// The dummies of a part of a statement with their places there.
fn dummies(judged: &Judged<'_>, span: Span) -> Vec<(CompactString, Vec<u32>)> {
    let sketch = &judged.sketch;
    let mut out = Vec::new();
    for (number, letter) in sketch.letter_numbers().zip(&sketch.letters) {
        let (_, events) = balance::events(sketch, &judged.reading.choice, number);
        let pairs = events.iter().filter_map(|event| match event {
            Event::Pair(one, two) => Some([*one, *two]),
            _ => None,
        });
        let places: Vec<u32> = pairs.flatten().filter(|place| span.holds(judged.span(*place))).collect();
        if !places.is_empty() {
            out.push((letter.clone(), places));
        }
    }
    out
}

/// A stretch of the text with the edits in it made.
fn own_text(text: &str, span: Span, edits: &[Edit]) -> Option<String> {
    let inside = edits.iter().filter(|edit| span.holds(edit.span));
    let moved = |edit: &Edit| {
        let (start, end) = (edit.span.start - span.start, edit.span.end - span.start);
        Edit { span: Span { start, end }, text: edit.text.clone() }
    };
    edited(span.of(text), &inside.map(moved).collect::<Vec<_>>())
}

/// A statement, or its last side, from the tree.
fn written(host: Host, statement: &Statement, whole: bool) -> Option<String> {
    let dialect = if host == Host::Note { Dialect::Note } else { Dialect::Latex };
    let written = if whole { write_statement(statement, dialect) } else { write_sum(statement.sides.last()?, dialect) };
    written.complete.then_some(written.text)
}
