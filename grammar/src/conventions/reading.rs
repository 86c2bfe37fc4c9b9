//! The door of the conventions language: a text to a sentence, or to the reason why it is none.
//!
//! Sentences are read some at a time, so that the parsers are built once for many; words of all of them go to the
//! reader of formulas together.

use chumsky::Parser;

use crate::formula::{Draft, parse_all};
use crate::hosts::Host;
use crate::macros::Macros;
use crate::span::Span;
use crate::tree::Formula;

use super::Sentence;
use super::definition::{definition, is_definition};
use super::forms::{Form, nearest_form};
use super::grammar::{clause, shown, stop};
use super::sentence::{Trouble, sentence};
use super::words::{Cut, UNCLOSED, Word, draft};

/// Words of a sentence beyond which it is not read.
const WORD_BUDGET: usize = 400;
/// Sentences that are read together.
const SENTENCES_AT_ONCE: usize = 64;

/// A sentence that has no known form, or whose names are not what its form speaks of.
#[derive(Clone, Debug, PartialEq)]
pub struct Unreadable {
    /// The whole sentence, without blanks around it.
    pub span: Span,
    /// The word at which reading stopped: the furthest that any form reached. Empty at the end of the sentence.
    pub at: Span,
    /// Why, as a phrase for people.
    pub reason: String,
    /// The form that it is nearest to, if it is near to one.
    pub nearest: Option<&'static Form>,
}

/// Reads one sentence, which starts at byte `base` of its document; all places count from the document's start.
///
/// Macros are those in force at that place (`Macros::inherited` puts all in force everywhere). `Host::Note` is also
/// the host of sentences from a configuration file, since it takes LaTeX's spelling of letters beside its own.
pub fn read_sentence(text: &str, base: usize, host: Host, macros: &Macros) -> Result<Sentence, Unreadable> {
    let nothing = || Err(unreadable(text, base, Trouble { at: Span::new(base, base), reason: EMPTY.to_owned() }));
    read_sentences([(text, base)], host, macros).pop().unwrap_or_else(nothing)
}

/// As `read_sentence`, for many sentences of one document, each with the byte it starts at; results in their order.
pub fn read_sentences<'t>(
    sentences: impl IntoIterator<Item = (&'t str, usize)>,
    host: Host,
    macros: &Macros,
) -> Vec<Result<Sentence, Unreadable>> {
    let sentences: Vec<(&str, usize)> = sentences.into_iter().map(|(text, base)| trimmed(text, base)).collect();
    sentences.chunks(SENTENCES_AT_ONCE).flat_map(|some| read_some(some, host, macros)).collect()
}

const EMPTY: &str = "the sentence is empty";

/// A text without blanks around it, and the byte it starts at.
fn trimmed(text: &str, base: usize) -> (&str, usize) {
    let blanks = text.len() - text.trim_start().len();
    (text.trim(), base + blanks)
}

/// How a sentence is read.
enum Shape<'t> {
    Definition,
    Words(Cut<'t>),
    TooLong,
}

/// What the reader of formulas made of it.
enum Stage<'t> {
    Done(Result<Sentence, Trouble>),
    Words(Vec<Word<'t>>),
}

fn read_some(sentences: &[(&str, usize)], host: Host, macros: &Macros) -> Vec<Result<Sentence, Unreadable>> {
    let shapes: Vec<Shape<'_>> = sentences.iter().map(|(text, base)| shape(text, *base, macros)).collect();
    let pairs = || shapes.iter().zip(sentences);
    let drafts: Vec<_> = pairs().flat_map(|(shape, (text, base))| drafts(shape, text, *base, host, macros)).collect();
    let mut formulas = parse_all(&drafts).into_iter();
    let stages: Vec<Stage<'_>> =
        pairs().map(|(shape, (text, base))| stage(shape, text, *base, &mut formulas)).collect();
    let parser = clause();
    let mut out = Vec::with_capacity(sentences.len());
    for (stage, (text, base)) in stages.iter().zip(sentences) {
        let result = match stage {
            Stage::Done(result) => result.clone(),
            Stage::Words(words) => match parser.parse(words.as_slice()).into_result() {
                Ok(clause) => sentence(clause),
                Err(errors) => Err(stopped(words, &errors, base + text.len())),
            },
        };
        out.push(result.map_err(|trouble| unreadable(text, *base, trouble)));
    }
    out
}

fn shape<'t>(text: &'t str, base: usize, macros: &Macros) -> Shape<'t> {
    if is_definition(text) {
        return Shape::Definition;
    }
    // The full stop of a sentence belongs to no word.
    let cut = Cut::new(text.trim_end_matches('.'), base, macros);
    if cut.words.len() > WORD_BUDGET { Shape::TooLong } else { Shape::Words(cut) }
}

fn drafts(shape: &Shape<'_>, text: &str, base: usize, host: Host, macros: &Macros) -> Vec<(Span, bool, Draft)> {
    match shape {
        Shape::Definition => vec![draft(text, base, host, macros)],
        Shape::Words(cut) => cut.drafts(host, macros),
        Shape::TooLong => Vec::new(),
    }
}

fn stage<'t>(shape: &Shape<'t>, text: &str, base: usize, formulas: &mut impl Iterator<Item = Formula>) -> Stage<'t> {
    match shape {
        Shape::Definition => Stage::Done(definition(text, base, formulas.next().unwrap_or_default())),
        Shape::Words(cut) => Stage::Words(cut.read(formulas)),
        Shape::TooLong => {
            let reason = format!("the sentence is longer than the budget of {WORD_BUDGET} words");
            Stage::Done(Err(Trouble { at: Span::new(base, base + text.len()), reason }))
        }
    }
}

/// Where and why the grammar stopped, in places of the document.
fn stopped<'a>(words: &'a [Word<'a>], errors: &[chumsky::error::Rich<'a, Word<'a>>], end: usize) -> Trouble {
    let stop = stop(words, errors);
    let reason = if words.is_empty() { EMPTY.to_owned() } else { stop.reason };
    if let Some(word) = words.iter().find(|word| word.kernel == Err(UNCLOSED)) {
        return Trouble { at: word.span, reason: format!("{} {UNCLOSED}", shown(word.text)) };
    }
    match words.get(stop.at) {
        Some(word) => Trouble { at: word.span, reason },
        // Names up to the end: the verb is missed where the first word stands that is hardly a name.
        None if stop.no_verb => match words.iter().skip(1).find(|word| word.is_of_the_language()) {
            Some(word) => Trouble { at: word.span, reason: format!("expected a verb before {}", shown(word.text)) },
            None => Trouble { at: Span::new(end, end), reason },
        },
        None => Trouble { at: Span::new(end, end), reason },
    }
}

fn unreadable(text: &str, base: usize, trouble: Trouble) -> Unreadable {
    Unreadable {
        span: Span::new(base, base + text.len()),
        at: trouble.at,
        reason: trouble.reason,
        nearest: nearest_form(text),
    }
}
