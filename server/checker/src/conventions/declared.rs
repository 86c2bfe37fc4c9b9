//! What the author says: the sentences of directives and conventions.
//!
//! The language is small and closed. A sentence is read by one chumsky parser, an alternative for each form in
//! `FORMS`; what fits no form is a finding that shows the nearest one. New sentences of the conventions language
//! are new variants of `Sentence` and new alternatives here.

use chumsky::prelude::*;
use compact_str::CompactString;
use indexwise_grammar::hosts::Directive;
use indexwise_grammar::span::Span;

use crate::finding::Finding;
use crate::paper::SharedConventions;
use crate::rules;
use crate::sketch::Unit;

use super::built_in::bare_letter;

/// A sentence, read.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Sentence {
    /// `skip this`: the formula after the sentence is not judged.
    Skip,
    /// `allow RULE here` or `allow RULE in this file`.
    Allow {
        /// The name of the rule as written.
        rule: String,
        /// Only the formula after the sentence.
        here: bool,
    },
    /// `B is a label`, `r is a coordinate`: letters that are no indices.
    NotIndex(Vec<CompactString>),
}

/// The forms of a sentence, as they are shown to people.
pub const FORMS: &[&str] =
    &["skip this", "allow RULE here", "allow RULE in this file", "X is a label", "X is a coordinate"];

/// What a document declares.
#[derive(Clone, Debug, Default)]
pub struct Declared {
    /// Sentences with their places.
    pub sentences: Vec<(Sentence, Span)>,
    /// Sentences that could not be read: place and text.
    pub unreadable: Vec<(Span, String)>,
    /// Letters that are no indices, those of the root among them.
    pub not_index: Vec<CompactString>,
}

impl Declared {
    /// Reads the directives of a document, on top of what its root declares.
    pub fn read(directives: &[Directive], root: Option<&Self>) -> Self {
        let mut declared =
            Self { not_index: root.map(|root| root.not_index.clone()).unwrap_or_default(), ..Self::default() };
        for (text, span) in directives.iter().flat_map(|directive| &directive.sentences) {
            match read_sentence(text) {
                Some(sentence) => {
                    if let Sentence::NotIndex(letters) = &sentence {
                        declared.not_index.extend(letters.iter().cloned());
                    }
                    declared.sentences.push((sentence, *span));
                }
                None => declared.unreadable.push((*span, text.clone())),
            }
        }
        declared
    }

    /// Whether the author says that this letter is no index.
    pub fn is_not_index(&self, unit: &Unit) -> bool {
        !self.not_index.is_empty()
            && self.not_index.iter().any(|letter| *letter == unit.letter || letter == bare_letter(&unit.letter))
    }
}

/// Reads one sentence; nothing if it fits no form.
pub fn read_sentence(text: &str) -> Option<Sentence> {
    parser().parse(text.trim().trim_end_matches('.')).into_output()
}

/// What is wrong with conventions that several papers share, in the order of the sentences. It is said here once,
/// so that it need not be said in every paper.
pub fn problems(shared: &SharedConventions) -> Vec<Finding> {
    let unreadable = shared.sentences.iter().filter(|(text, _)| read_sentence(text).is_none());
    unreadable.map(|(text, span)| rules::convention_unreadable(*span, text)).collect()
}

/// The form that a sentence that cannot be read is nearest to: the one that shares most words, the first in a tie;
/// nothing if none shares a word.
pub fn nearest_form(text: &str) -> Option<&'static str> {
    let words: Vec<String> = text.split_whitespace().map(str::to_lowercase).collect();
    let shared = |form: &str| form.split(' ').filter(|word| words.iter().any(|other| close(other, word))).count();
    FORMS.iter().copied().rev().max_by_key(|form| shared(form)).filter(|form| shared(form) > 0)
}

/// Whether two words differ in one letter at most.
fn close(one: &str, two: &str) -> bool {
    let same_ends = one.chars().zip(two.chars()).filter(|(a, b)| a == b).count();
    one == two || (one.len().abs_diff(two.len()) <= 1 && two.len() > 3 && same_ends + 1 >= two.len().min(one.len()))
}

fn parser<'a>() -> impl Parser<'a, &'a str, Sentence> {
    let blank = one_of(" \t").repeated().at_least(1);
    let word = |text: &'static str| just(text).then(blank.or(end()));
    let skip = word("skip").then(word("this")).to(Sentence::Skip);
    let name = any().filter(|c: &char| c.is_ascii_alphanumeric() || *c == '-').repeated().at_least(1).to_slice();
    let here = word("here").to(true).or(word("in").then(word("this")).then(word("file")).to(false));
    let allow = word("allow")
        .ignore_then(name.then_ignore(blank))
        .then(here)
        .map(|(rule, here): (&str, bool)| Sentence::Allow { rule: rule.to_owned(), here });
    let letter = any().filter(|c: &char| !c.is_whitespace() && *c != ',').repeated().at_least(1).to_slice();
    let separator = one_of(" \t,").repeated().at_least(1);
    let verb = word("is").or(word("are"));
    let kind = choice((word("label"), word("labels"), word("coordinate"), word("coordinates")));
    let tail = verb.then(word("a").or_not()).then(kind);
    let letters = tail
        .not()
        .ignore_then(letter)
        .then_ignore(separator)
        .repeated()
        .at_least(1)
        .collect::<Vec<&str>>()
        .then_ignore(tail)
        .map(|letters| Sentence::NotIndex(letters.into_iter().map(in_latex).collect()));
    choice((skip, allow, letters)).then_ignore(end())
}

/// A letter as the reader spells it: a Greek sign or, in a note, a Greek name becomes its command.
fn in_latex(letter: &str) -> CompactString {
    indexwise_grammar::latex_letter(letter).into()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_form_is_read() {
        assert_eq!(read_sentence("skip this"), Some(Sentence::Skip));
        let allow = |here| Some(Sentence::Allow { rule: "dummy-levels".to_owned(), here });
        assert_eq!(read_sentence("allow dummy-levels here."), allow(true));
        assert_eq!(read_sentence("allow dummy-levels in this file"), allow(false));
        assert_eq!(read_sentence("B is a label"), Some(Sentence::NotIndex(vec!["B".into()])));
        assert_eq!(
            read_sentence("\\theta, r are coordinates"),
            Some(Sentence::NotIndex(vec!["\\theta".into(), "r".into()]))
        );
    }

    #[test]
    fn shared_sentences_that_fit_no_form_are_reported_where_they_stand() {
        let text = "B is a label; B is a lable";
        let sentence = |from: usize, to: usize| (text[from..to].to_owned(), Span::new(from, to));
        let sentences = vec![sentence(0, 12), sentence(14, 26)];
        let shared = SharedConventions { path: "indexwise.toml".to_owned(), text: text.into(), sentences };
        let found = problems(&shared);
        let told: Vec<_> = found.iter().map(|finding| (finding.rule, finding.span.of(text))).collect();
        assert_eq!(told, [("convention-unreadable", "B is a lable")]);
    }

    #[test]
    fn what_fits_no_form_is_not_read() {
        for text in ["", "skip that", "allow dummy-levels", "B is a lable", "is a label", "allow one two here"] {
            assert_eq!(read_sentence(text), None, "{text}");
        }
        assert_eq!(nearest_form("B is a lable"), Some("X is a label"));
        assert_eq!(nearest_form("allow dummy-levels"), Some("allow RULE here"));
        assert_eq!(nearest_form("skip these"), Some("skip this"));
        assert_eq!(nearest_form("i j run from 1 to 3"), None);
    }
}
