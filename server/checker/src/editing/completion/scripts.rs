//! Indices in a script that is being typed: all that the term owes on this level together, then one by one, then fresh
//! letters.

use std::borrow::Cow;

use compact_str::CompactString;
use indexwise_grammar::hosts::Host;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::Level;

use crate::conventions::built_in::CLASSES;
use crate::conventions::prices::{LevelHabit, Prices};
use crate::editing::letters::fresh_letters;
use crate::ledger::{Judged, shown};
use crate::paper::View;
use crate::reading::Reading;
use crate::sketch::Sketch;

use super::owed::{Wanted, owed, plain_choice};
use super::probe::Probe;
use super::typed::{TypedScript, script_at};
use super::{Suggestion, SuggestionKind};

/// Fresh letters that are suggested.
const FRESH: usize = 4;

/// Indices for the script at a place; nothing where none is being typed in a formula.
pub(super) fn indices(view: &View, document: usize, offset: u32) -> Option<Vec<Suggestion>> {
    let (text, host) = (view.text(document), view.host(document));
    let script = script_at(text, offset as usize, host)?;
    let probe = Probe::without(view, document, script.span)?;
    let (statement, prices) = (probe.statement()?, view.prices(document)?);
    let wanted = owed(statement, probe.at, &script.letters, script.level, &prices);
    let (right, wrong) = by_level(wanted, script.level, &prices);
    let unicode = uses_unicode(text, statement.span);
    let page = Page { script: &script, host, unicode, text };
    let mut out: Vec<Suggestion> = Vec::new();
    if right.len() > 1 {
        let letters: Vec<&CompactString> = right.iter().map(|wanted| &wanted.letter).collect();
        out.push(page.suggestion(&letters, "all that the term owes on this level".to_owned(), SuggestionKind::Owed));
    }
    for wanted in right.iter().chain(&wrong) {
        out.push(page.suggestion(&[&wanted.letter], said(wanted, script.level, &prices), SuggestionKind::Owed));
    }
    let sketch = Sketch::of(statement);
    let reading = Reading { choice: plain_choice(&sketch, &prices), ..Reading::default() };
    let formula = &probe.formula;
    let judged = Judged { text: &probe.text, formula, sketch: Cow::Owned(sketch), reading, prices, faults: Vec::new() };
    let like = like(&judged, &right, &wrong, &script);
    let fresh = fresh_letters(&judged, &like, &script.letters).into_iter().take(FRESH);
    out.extend(fresh.map(|letter| page.suggestion(&[&letter], "a fresh dummy".to_owned(), SuggestionKind::Fresh)));
    Some(out)
}

/// Those that are wanted on this level, and those that are wanted on the other; the latter not where levels are kept.
fn by_level(wanted: Vec<Wanted>, level: Level, prices: &Prices<'_>) -> (Vec<Wanted>, Vec<Wanted>) {
    let fits = |wanted: &Wanted| {
        let flat = prices.level_habit(&wanted.letter) == LevelHabit::Cartesian;
        // Where nobody writes pairs on two levels, a partner stands where its letter does.
        wanted.level == level || flat || wanted.closes && !prices.speaks_of_levels(&wanted.letter)
    };
    let (mut right, mut wrong): (Vec<Wanted>, Vec<Wanted>) = wanted.into_iter().partition(fits);
    wrong.retain(|wanted| prices.level_habit(&wanted.letter) != LevelHabit::InForce);
    if right.is_empty() && !wrong.iter().any(|wanted| prices.speaks_of_levels(&wanted.letter)) {
        right = std::mem::take(&mut wrong);
    }
    (right, wrong)
}

fn said(wanted: &Wanted, level: Level, prices: &Prices<'_>) -> String {
    let elsewhere = wanted.level != level && prices.speaks_of_levels(&wanted.letter);
    match (wanted.closes, elsewhere) {
        (false, false) => "a free index that the term owes".to_owned(),
        (false, true) => format!("a free index that the term owes {}", wanted.level.word()),
        (true, false) => "closes a pair of the term".to_owned(),
        (true, true) => format!("closes a pair of the term, {}", wanted.level.word()),
    }
}

/// A letter of the family that is meant: one that is wanted, one that stands in the statement, the file's most used; one
/// of a declared family, if there is one and that letter is of none.
fn like(judged: &Judged<'_>, right: &[Wanted], wrong: &[Wanted], script: &TypedScript) -> CompactString {
    let wanted = right.iter().chain(wrong).map(|wanted| &wanted.letter);
    let standing = judged.sketch.letter_numbers().zip(&judged.sketch.letters).filter(|(number, _)| {
        let mut places = (0..).zip(&judged.sketch.places).filter(|(_, place)| place.number == *number);
        places.any(|(at, _)| judged.is_index(at))
    });
    let known = wanted.chain(&script.letters).chain(standing.map(|(_, letter)| letter)).next().cloned();
    let of_file = || {
        // The first of several that are used as often.
        let leading = CLASSES.iter().rev().filter_map(|class| judged.prices.index_letters(*class).into_iter().next());
        let used = leading.max_by_key(|letter| judged.prices.index_votes(letter));
        let meanings = &judged.prices.declared.meanings;
        let declared = || meanings.families.first()?.letters.first().cloned();
        used.filter(|letter| meanings.families.is_empty() || meanings.family_number(letter).is_some()).or_else(declared)
    };
    known.or_else(of_file).unwrap_or_else(|| CompactString::const_new("i"))
}

/// Whether letters are typed as Unicode signs in a part of a text.
fn uses_unicode(text: &str, near: Span) -> bool {
    near.of(text).chars().any(|letter| ('α'..='ω').contains(&letter))
}

/// How letters are typed in a script.
struct Page<'t> {
    script: &'t TypedScript,
    host: Host,
    unicode: bool,
    text: &'t str,
}

impl Page<'_> {
    fn suggestion(&self, letters: &[&CompactString], detail: String, kind: SuggestionKind) -> Suggestion {
        let (replaces, text) = if self.host == Host::Note { self.in_note(letters) } else { self.in_latex(letters) };
        let label: Vec<String> = letters.iter().map(|letter| shown(letter)).collect();
        Suggestion { label: label.join(" "), detail, documentation: None, replaces, text, kind, rank: 0 }
    }

    fn spelt(&self, letter: &str) -> String {
        match (self.unicode, self.host) {
            (true, _) => shown(letter),
            (_, Host::Note) => letter.trim_start_matches('\\').to_owned(),
            _ => letter.to_owned(),
        }
    }

    /// Commands are kept apart from the letter after them.
    fn in_latex(&self, letters: &[&CompactString]) -> (Span, String) {
        let joined = letters.iter().fold(String::new(), |text, letter| joined(text, &self.spelt(letter)));
        if !self.script.braced {
            let many = letters.len() > 1;
            return (self.script.partial, if many { format!("{{{joined}}}") } else { joined });
        }
        let before = self.text.get(..self.script.partial.start as usize).unwrap_or_default();
        let after = self.text.get(self.script.partial.end as usize..).unwrap_or_default();
        let mut text = joined;
        if ends_in_command(before) && text.starts_with(char::is_alphabetic) {
            text.insert(0, ' ');
        }
        if ends_in_command(&text) && after.starts_with(char::is_alphabetic) {
            text.push(' ');
        }
        (self.script.partial, text)
    }

    /// A run of letters, or names in braces, with those that stand before the cursor.
    fn in_note(&self, letters: &[&CompactString]) -> (Span, String) {
        let spelt: Vec<String> = letters.iter().map(|letter| self.spelt(letter)).collect();
        let typed = self.script.content.of(self.text);
        let single = spelt.iter().all(|letter| letter.chars().count() == 1);
        if self.script.braced {
            let gap = if typed.is_empty() || typed.ends_with(' ') { "" } else { " " };
            let cursor = Span { start: self.script.content.end, ..self.script.content };
            return (cursor, format!("{gap}{}", spelt.join(" ")));
        }
        if single && typed.chars().count() == self.script.letters.len() {
            return (self.script.content, format!("{typed}{}", spelt.concat()));
        }
        let before = self.script.letters.iter().map(|letter| self.spelt(letter));
        let all: Vec<String> = before.chain(spelt).collect();
        let text = match all.as_slice() {
            [one] => one.clone(),
            _ => format!("{{{}}}", all.join(" ")),
        };
        (self.script.content, text)
    }
}

fn joined(mut text: String, letter: &str) -> String {
    if ends_in_command(&text) && letter.starts_with(char::is_alphabetic) {
        text.push(' ');
    }
    text + letter
}

fn ends_in_command(text: &str) -> bool {
    let outside = text.trim_end_matches(|letter: char| letter.is_ascii_alphabetic());
    outside.len() < text.len() && outside.ends_with('\\')
}
