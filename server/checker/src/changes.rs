//! Changes of a statement, tried before they are offered.
//!
//! A change is made on the sketch, judged there like any statement, and only then written as edits of the text. So
//! a fix that is offered removes its finding and adds none.

use std::borrow::Cow;

use compact_str::CompactString;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::Level;

use crate::balance::Choice;
use crate::conventions::built_in::{LetterClass, bare_letter, class_of};
use crate::finding::Edit;
use crate::ledger::{Judged, shown};
use crate::sketch::{Op, Place, Sketch};

/// A change of a statement.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Change {
    /// Another letter at these places.
    Rename(Vec<u32>, CompactString),
    /// A new letter after a place, in the same script.
    Insert(u32, CompactString),
    /// A letter less.
    Drop(u32),
    /// A whole script to the other level.
    FlipScript(Span),
    /// One letter out of a script of several to the other level.
    FlipLetter(u32),
}

impl Change {
    /// The statement after the change.
    pub fn apply(&self, sketch: &Sketch, choice: &Choice) -> (Sketch, Choice) {
        let (mut sketch, mut choice) = (sketch.clone(), choice.clone());
        match self {
            Self::Rename(places, to) => {
                for place in places {
                    rename(&mut sketch, &mut choice, *place, to);
                }
            }
            Self::Insert(after, letter) => insert(&mut sketch, &mut choice, *after, letter),
            Self::Drop(place) => drop_place(&mut sketch, *place),
            Self::FlipScript(script) => {
                sketch.places.iter_mut().filter(|place| place.script == *script).for_each(flip);
            }
            Self::FlipLetter(number) => {
                if let Some(place) = sketch.places.get_mut(*number as usize) {
                    flip(place);
                }
            }
        }
        sketch.settle();
        (sketch, choice)
    }

    /// What the change does, as an imperative sentence.
    pub fn title(&self, judged: &Judged<'_>) -> String {
        let letter = |place: &u32| judged.sketch.place(*place).map(|place| shown(&place.letter)).unwrap_or_default();
        match self {
            Self::Rename(places, to) if places.len() == 1 => {
                let place = places.first().copied().unwrap_or_default();
                let script = judged.sketch.place(place).map(|place| place.span).unwrap_or_default();
                format!("Write {} for {} in {}", shown(to), letter(&place), carrier(judged, place, script))
            }
            Self::Rename(places, to) => {
                let from = places.first().map(letter).unwrap_or_default();
                format!("Write {} for the dummy {from} in its {} places", shown(to), places.len())
            }
            Self::Insert(after, new) => {
                format!(
                    "Insert {} after {} in {}",
                    shown(new),
                    letter(after),
                    carrier(judged, *after, judged.span(*after))
                )
            }
            Self::Drop(place) => {
                format!("Take {} out of {}", letter(place), carrier(judged, *place, judged.span(*place)))
            }
            Self::FlipScript(script) => {
                let first = judged.sketch.places.iter().position(|place| place.script == *script);
                let unit = first.and_then(|at| judged.unit(u32::try_from(at).unwrap_or(u32::MAX)));
                let kernel = unit.map(|unit| unit.kernel.as_str()).filter(|kernel| !kernel.is_empty());
                format!("Move {} of {} to the other level", script.of(judged.text), kernel.unwrap_or("the bracket"))
            }
            Self::FlipLetter(place) => {
                let to = judged.sketch.place(*place).map_or("up", |place| place.written.flipped().word());
                format!("Move {} {to} in {}", letter(place), carrier(judged, *place, judged.span(*place)))
            }
        }
    }

    /// The change as edits of the text; nothing where the text there is not the letter itself (a macro's doing).
    pub fn edits(&self, judged: &Judged<'_>) -> Option<Vec<Edit>> {
        let text = judged.text;
        match self {
            Self::Rename(places, to) => {
                let mut edits = Vec::new();
                for number in places {
                    let place = judged.sketch.place(*number)?;
                    typed(text, place)?;
                    edits.push(Edit { span: place.span, text: spelled(to, place, text) });
                }
                edits.sort();
                edits.dedup();
                Some(edits)
            }
            Self::Insert(after, letter) => {
                let place = judged.sketch.place(*after)?;
                let own = typed(text, place)?;
                let at = Span { start: place.span.end, end: place.span.end };
                let braced = text.get(..place.script.end as usize)?.ends_with('}');
                if braced {
                    let space = if own.starts_with('\\') && !letter.starts_with('\\') { " " } else { "" };
                    let follow = follows(letter, at, text);
                    return Some(vec![Edit { span: at, text: format!("{space}{letter}{follow}") }]);
                }
                let space = if own.starts_with('\\') && !letter.starts_with('\\') { " " } else { "" };
                Some(vec![Edit { span: place.span, text: format!("{{{own}{space}{letter}}}") }])
            }
            Self::Drop(number) => {
                let place = judged.sketch.place(*number).filter(|place| place.company > 1)?;
                typed(text, place)?;
                Some(vec![Edit { span: place.span, text: String::new() }])
            }
            Self::FlipScript(script) => {
                let sign = Span { start: script.start, end: script.start + 1 };
                let to = match sign.of(text) {
                    "_" => "^",
                    "^" => "_",
                    _ => return None,
                };
                Some(vec![Edit { span: sign, text: to.to_owned() }])
            }
            Self::FlipLetter(number) => flip_letter(judged, *number),
        }
    }
}

/// What the author typed at a place, if it is the letter.
fn typed<'t>(text: &'t str, place: &Place) -> Option<&'t str> {
    is_typed(text, place.span, &place.letter).then(|| place.span.of(text))
}

/// Whether the author typed a letter at a place; if not, a macro wrote it.
pub(crate) fn is_typed(text: &str, span: Span, letter: &str) -> bool {
    let own = span.of(text);
    indexwise_grammar::latex_letter(own.trim()) == letter || own.replace(' ', "") == letter.replace(' ', "")
}

/// The spelling of a letter where another stood: as the author writes it (a Unicode sign for a Unicode sign, a name
/// without backslash for such a name), with a blank where it would run into what follows.
fn spelled(letter: &str, place: &Place, text: &str) -> String {
    let own = place.span.of(text);
    let plain = if own.starts_with('\\') || own.is_ascii() && own.chars().count() == 1 {
        letter.to_owned()
    } else if own.is_ascii() {
        letter.trim_start_matches('\\').to_owned()
    } else {
        shown(letter)
    };
    let at = Span { start: place.span.end, end: place.span.end };
    let follow = follows(&plain, at, text);
    plain + follow
}

/// A blank where a command would run into the letter after it.
fn follows(letter: &str, at: Span, text: &str) -> &'static str {
    let next = text.get(at.end as usize..).and_then(|rest| rest.chars().next());
    let runs_on = letter.starts_with('\\') && next.is_some_and(|next| next.is_ascii_alphabetic());
    if runs_on { " " } else { "" }
}

/// Takes one letter out of a script of several and sets it on the other level behind it; only at the script's end,
/// where no slot changes its order.
fn flip_letter(judged: &Judged<'_>, number: u32) -> Option<Vec<Edit>> {
    let (text, place) = (judged.text, judged.sketch.place(number)?);
    let own = typed(text, place)?.to_owned();
    if place.company == 1 {
        return Change::FlipScript(place.script).edits(judged);
    }
    let rest = text.get(place.span.end as usize..place.script.end as usize)?;
    let sign = if place.written == Level::Up { '_' } else { '^' };
    let after = text.get(place.script.end as usize..).and_then(|rest| rest.chars().next());
    if rest.trim() != "}" || after == Some(sign) {
        return None;
    }
    let end = Span { start: place.script.end, end: place.script.end };
    let moved = format!("{{}}{sign}{{{own}}}");
    Some(vec![Edit { span: place.span, text: String::new() }, Edit { span: end, text: moved }])
}

/// The kernel with the script, as typed, for a title.
fn carrier(judged: &Judged<'_>, number: u32, fallback: Span) -> String {
    let Some(place) = judged.sketch.place(number) else { return fallback.of(judged.text).to_owned() };
    let kernel = judged.unit(number).map(|unit| unit.kernel.to_string()).unwrap_or_default();
    let script = place.script.of(judged.text);
    // A script that a macro writes has no text of its own: the place is the whole call.
    if kernel.is_empty() || !script.starts_with(['_', '^']) {
        return script.to_owned();
    }
    let before = judged.text.get(..place.script.start as usize).unwrap_or_default();
    let joined = format!("{}{script}", typed_kernel(&kernel, before));
    if joined.chars().count() > 40 { script.to_owned() } else { joined }
}

/// A kernel as the author typed it, where it stands right before its script.
fn typed_kernel<'t>(kernel: &'t str, before: &'t str) -> Cow<'t, str> {
    let symbol = shown(kernel);
    let name = kernel.trim_start_matches('\\');
    if before.ends_with(kernel) {
        return Cow::Borrowed(kernel);
    }
    if before.ends_with(&symbol) {
        return Cow::Owned(symbol);
    }
    if before.ends_with(name) {
        return Cow::Borrowed(name);
    }
    let command = before.trim_end_matches(|letter: char| letter.is_ascii_alphabetic());
    let own = before.get(command.len().saturating_sub(1)..).filter(|own| own.len() > 1 && own.starts_with('\\'));
    let script = command.strip_suffix('\\').is_some_and(|outside| outside.ends_with(['_', '^']));
    Cow::Borrowed(own.filter(|_| !script).unwrap_or(kernel))
}

fn flip(place: &mut Place) {
    place.level = place.level.flipped();
    place.written = place.written.flipped();
}

fn rename(sketch: &mut Sketch, choice: &mut Choice, number: u32, to: &CompactString) {
    let unit = sketch.place(number).map(|place| place.unit).and_then(|unit| sketch.units.get(unit as usize).cloned());
    let (Some(mut unit), Ok(new)) = (unit, u32::try_from(sketch.units.len())) else { return };
    unit.letter = to.clone();
    sketch.units.push(unit);
    choice.index.push(true);
    if let Some(place) = sketch.places.get_mut(number as usize) {
        place.letter = to.clone();
        place.unit = new;
    }
}

fn insert(sketch: &mut Sketch, choice: &mut Choice, after: u32, letter: &CompactString) {
    let (Some(place), Ok(new)) = (sketch.place(after).cloned(), u32::try_from(sketch.places.len())) else { return };
    sketch.places.push(place);
    rename(sketch, choice, new, letter);
    if let Some(at) = sketch.code.iter().position(|op| *op == Op::Place(after)) {
        sketch.insert_after(at, Op::Place(new));
    }
}

/// A letter that is gone: its instruction binds nothing.
fn drop_place(sketch: &mut Sketch, place: u32) {
    if let Some(op) = sketch.code.iter_mut().find(|op| **op == Op::Place(place)) {
        *op = Op::Bind(0, 0);
    }
}

/// Letters of the same kind that the statement does not use: those that the file uses as indices, then usual ones.
pub fn fresh_letters(judged: &Judged<'_>, like: &str) -> Vec<CompactString> {
    const GREEK: &[&str] =
        &["\\mu", "\\nu", "\\rho", "\\sigma", "\\lambda", "\\kappa", "\\alpha", "\\beta", "\\gamma", "\\tau"];
    const EARLY: &[&str] = &["a", "b", "c", "d", "e", "f"];
    const LATE: &[&str] = &["i", "j", "k", "l", "m", "n", "p", "q", "r", "s"];
    const CAPITAL: &[&str] = &["A", "B", "C", "D", "I", "J", "K", "L", "M", "N"];
    let family = match class_of(like) {
        LetterClass::Greek => GREEK,
        LetterClass::LatinEarly => EARLY,
        LetterClass::Capital => CAPITAL,
        LetterClass::LatinLate | LetterClass::Other => LATE,
    };
    let sketch = &judged.sketch;
    let used = |letter: &str| {
        sketch.places.iter().any(|place| place.letter == letter)
            || sketch.quantities.iter().any(|(name, _)| name == letter)
    };
    let plain = |letter: &CompactString| letter == bare_letter(letter);
    let mut letters: Vec<CompactString> = judged
        .prices
        .index_letters(class_of(like))
        .into_iter()
        .filter(|letter| plain(letter) && !used(letter))
        .collect();
    for letter in family.iter().map(|letter| CompactString::from(*letter)) {
        if !used(&letter) && !letters.contains(&letter) {
            letters.push(letter);
        }
    }
    letters
}
