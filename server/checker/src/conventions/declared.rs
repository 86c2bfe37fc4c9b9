//! What the author says in one document: its sentences, read, on top of what its project and its root declare.
//!
//! The grammar reads the sentences (`indexwise_grammar::conventions`), `meanings.rs` says what they mean together,
//! `clashes.rs` what contradicts itself. Directives (`skip this`, `allow ...`) stay sentences with their places, since
//! they speak of the formula after them.

use std::sync::Arc;

use indexwise_grammar::conventions::{Sentence, Unreadable, read_sentences};
use indexwise_grammar::hosts::{Directive, Host};
use indexwise_grammar::macros::Macros;
use indexwise_grammar::span::Span;

use crate::sketch::Unit;

use super::meanings::Meanings;

/// What a document declares.
#[derive(Clone, Debug, Default)]
pub struct Declared {
    /// Its own sentences with their places.
    pub sentences: Vec<(Sentence, Span)>,
    /// Its own sentences that could not be read.
    pub unreadable: Vec<Unreadable>,
    /// What holds in it: its own declarations over those of the scopes around it.
    pub meanings: Meanings,
}

/// Conventions that several papers share: those of a configuration file.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct SharedConventions {
    /// The path of the file as it is shown to people.
    pub path: String,
    /// The text of the file without a byte-order mark.
    pub text: Arc<str>,
    /// The sentences in order. A span lies on `text`; it covers the sentence to the letter unless the file writes it
    /// with escapes: then it covers what holds them all, and `span.of(text)` differs from the sentence.
    pub sentences: Vec<(String, Span)>,
}

impl Declared {
    /// Reads the directives of a document whose surroundings declare `outer`.
    pub fn read(directives: &[Directive], host: Host, macros: &Macros, outer: &Meanings) -> Self {
        let sentences = directives.iter().flat_map(|directive| &directive.sentences);
        Self::of(sentences, host, macros, outer)
    }

    /// Reads sentences of whatever place; each with the span of its text.
    pub fn of<'s>(
        sentences: impl IntoIterator<Item = &'s (String, Span)>,
        host: Host,
        macros: &Macros,
        outer: &Meanings,
    ) -> Self {
        let mut declared = Self::default();
        let written: Vec<&(String, Span)> = sentences.into_iter().collect();
        let read =
            read_sentences(written.iter().map(|(text, span)| (text.as_str(), span.start as usize)), host, macros);
        for (result, (_, span)) in read.into_iter().zip(written) {
            match result {
                Ok(sentence) => declared.sentences.push((sentence, *span)),
                Err(unreadable) => declared.unreadable.push(unreadable),
            }
        }
        declared.meanings = outer.with(declared.sentences.iter().map(|(sentence, _)| sentence));
        declared
    }

    /// Reads conventions that stand outside of a paper, in the spelling of notes as well as in that of LaTeX.
    pub fn shared(shared: &SharedConventions, outer: &Meanings) -> Self {
        Self::of(&shared.sentences, Host::Note, &Macros::default(), outer)
    }

    /// Whether the author says that this letter is no index.
    pub fn is_not_index(&self, unit: &Unit) -> bool {
        self.meanings.is_not_index(&unit.letter)
    }
}
