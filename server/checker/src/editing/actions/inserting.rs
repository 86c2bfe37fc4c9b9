//! A labelled equation put in at the cursor, with its dummies renamed where they would meet letters that stand there.
//!
//! At an empty formula the whole statement is put in, elsewhere its last side: that is what is used in place of the
//! first. Its free letters are kept, since only the author knows what they are to be. The text is the author's own with
//! the letters changed; where it holds layout, or comes from a file of another kind, it is written from the tree.

use compact_str::CompactString;
use indexwise_grammar::hosts::Host;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::{Formula, ItemKind, Statement, Sum, walk};
use indexwise_grammar::write::{Dialect, write_statement, write_sum};

use crate::balance::{self, Event};
use crate::changes::Change;
use crate::editing::letters::fresh_letters;
use crate::finding::Edit;
use crate::ledger::Judged;
use crate::paper::{View, edited};

use super::{Action, ActionKind};

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
        let edit = spot.put(view, document, number)?;
        let after = view.reread(document, spot.number, std::slice::from_ref(&edit))?;
        let sound = after.formula.unread.len() <= spot.formula.unread.len();
        sound.then(|| (label.to_string(), vec![edit]))
    };
    labelled.into_iter().filter_map(put).collect()
}

/// The nearest labelled equations that fit at a place where a term may begin.
pub(super) fn offered(view: &View, document: usize, at: u32) -> Vec<Action> {
    let Some(spot) = Spot::of(view, document, at).filter(Spot::may_begin_term) else { return Vec::new() };
    let mut labelled = labelled(view, document, spot.number);
    // Those before the cursor from the nearest on, then those after it.
    labelled.sort_by_key(|(_, number)| (*number > spot.number, number.abs_diff(spot.number)));
    let fits = |(label, number): (CompactString, usize)| {
        let edits = vec![spot.put(view, document, number)?];
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

/// The place where something is to be put in.
struct Spot<'v> {
    number: usize,
    at: usize,
    text: &'v str,
    body: Span,
    formula: Formula,
    /// Letters that stand in the statement there, in scripts or not.
    letters: Vec<CompactString>,
}

impl<'v> Spot<'v> {
    fn of(view: &'v View, document: usize, offset: u32) -> Option<Self> {
        let number = view.formula_number(document, offset)?;
        let body = view.scan(document)?.regions.get(number)?.body;
        let formula = view.tree(document, number)?;
        let text = view.text(document);
        let inside = body.start <= offset && offset <= body.end && text.is_char_boundary(offset as usize);
        let letters = letters_at(&formula, offset);
        let spot = Self { number, at: offset as usize, text, body, formula, letters };
        (inside && !spot.is_in_script() && !spot.is_in_word()).then_some(spot)
    }

    fn before(&self) -> &'v str {
        self.text.get(self.body.start as usize..self.at).unwrap_or_default().trim_end()
    }

    fn after(&self) -> &'v str {
        self.text.get(self.at..self.body.end as usize).unwrap_or_default().trim_start()
    }

    fn is_empty(&self) -> bool {
        self.before().is_empty() && self.after().is_empty()
    }

    /// Whether the place lies in a script or right after its sign.
    fn is_in_script(&self) -> bool {
        let at = self.at as u32;
        let mut inside = self.before().ends_with(['_', '^', '\\']);
        let sides = self.formula.statements.iter().flat_map(|statement| &statement.sides);
        for side in sides {
            walk(side, &mut |factor| {
                inside |= factor.scripts.iter().any(|script| script.span.start < at && at < script.span.end);
            });
        }
        inside
    }

    /// Whether the place lies inside of a command, a word or a number.
    fn is_in_word(&self) -> bool {
        let before = self.text.get(..self.at).unwrap_or_default();
        let command = before.trim_end_matches(|letter: char| letter.is_ascii_alphabetic()).ends_with('\\');
        let next = self.text.get(self.at..).and_then(|after| after.chars().next());
        let joined = |letter: Option<char>| letter.is_some_and(char::is_alphanumeric);
        joined(next) && (command || joined(before.chars().next_back()))
    }

    /// Whether a term may begin here: at the start, or after a relation, a sign or an opening bracket.
    fn may_begin_term(&self) -> bool {
        let before = self.before();
        let begins = before.is_empty() || before.ends_with(['=', '+', '-', '(', '[', '&', '<', '>']);
        begins || ["\\equiv", "\\approx", "\\sim", "\\\\"].iter().any(|sign| before.ends_with(sign))
    }

    /// The edit that puts in what a formula says.
    fn put(&self, view: &View, document: usize, number: usize) -> Option<Edit> {
        let source = view.tree(document, number)?;
        let statement = source.statements.iter().find(|statement| statement.sides.len() > 1)?;
        let side = statement.sides.last()?;
        let whole = self.is_empty().then_some(statement);
        let span = whole.map_or(side.span, |statement| statement.span);
        let text = renamed(view, document, &source, statement, span, &self.letters)?;
        let text = if whole.is_some() || !self.wants_brackets(side, &text) { text } else { format!("({text})") };
        let mut edit = Edit::pasted(self.text, Span::new(self.at, self.at), &text);
        self.space_out(&mut edit.text);
        Some(edit)
    }

    /// Whether what stands around would take a part of a sum only.
    fn wants_brackets(&self, side: &Sum, text: &str) -> bool {
        let (before, after) = (self.before(), self.after());
        let sum = side.terms.len() > 1;
        let signed = text.starts_with(['-', '+', '\\']) && side.terms.first().is_some_and(|term| term.sign.is_some());
        let opens = self.may_begin_term();
        let closes = after.is_empty()
            || after.starts_with(['=', '+', '-', ')', ']', '}', ',', '.', ';', '&', '<', '>'])
            || ["\\\\", "\\label", "\\end", "\\qquad", "\\quad", "\\equiv", "\\right"]
                .iter()
                .any(|end| after.starts_with(end));
        let after_sign = before.ends_with(['+', '-']);
        (sum || signed) && (!opens || !closes || signed && after_sign || before.ends_with('-'))
    }

    /// Blanks where the text would stand close to its neighbours.
    fn space_out(&self, text: &mut String) {
        let close = |letter: Option<char>| letter.is_some_and(|letter| !letter.is_whitespace());
        let before = self.text.get(self.body.start as usize..self.at).unwrap_or_default().chars().next_back();
        let after = self.text.get(self.at..self.body.end as usize).unwrap_or_default().chars().next();
        if close(before) && before.is_some_and(|letter| !"([{".contains(letter)) && !text.starts_with(' ') {
            text.insert(0, ' ');
        }
        if close(after) && after.is_some_and(|letter| !")]},.;".contains(letter)) && !text.ends_with(' ') {
            text.push(' ');
        }
    }
}

/// The letters of the statement at an offset; of all statements where none holds it.
fn letters_at(formula: &Formula, offset: u32) -> Vec<CompactString> {
    let holds = |statement: &&Statement| statement.span.start <= offset && offset <= statement.span.end;
    let near: Vec<&Statement> = formula.statements.iter().filter(holds).collect();
    let statements = if near.is_empty() { formula.statements.iter().collect() } else { near };
    let mut letters: Vec<CompactString> = Vec::new();
    for side in statements.into_iter().flat_map(|statement| &statement.sides) {
        walk(side, &mut |factor| {
            for item in factor.scripts.iter().flat_map(|script| &script.items) {
                if let ItemKind::Letter(letter) = &item.kind
                    && !letters.contains(letter)
                {
                    letters.push(letter.clone());
                }
            }
        });
    }
    letters
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
