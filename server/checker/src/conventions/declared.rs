//! What the author says in one document: its sentences, read, on top of what its project and its root declare.
//!
//! The grammar reads the sentences (`indexwise_grammar::conventions`), `meanings.rs` says what they mean together,
//! `clashes.rs` what contradicts itself. Directives (`skip this`, `allow ...`) stay sentences with their places, since
//! they speak of the formula after them.

use indexwise_grammar::conventions::{Sentence, Unreadable, read_sentences};
use indexwise_grammar::hosts::{Directive, Host};
use indexwise_grammar::macros::Macros;
use indexwise_grammar::span::Span;

use crate::finding::Finding;
use crate::paper::SharedConventions;
use crate::rules::convention_unreadable;
use crate::sketch::Unit;

use super::clashes::{clashes, unknown_names};
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

/// What is wrong with conventions that several papers share, in the order of the sentences. It is said here once,
/// so that it need not be said in every paper. Where a file writes a sentence with escapes, places inside of it are not
/// known and the finding stands at the whole.
pub fn problems(shared: &SharedConventions) -> Vec<Finding> {
    let mut found = Declared::shared(shared, &Meanings::default()).problems(Host::Latex);
    for (text, span) in shared.sentences.iter().filter(|(text, span)| span.of(&shared.text) != text) {
        let shifted = Span { end: span.start.saturating_add(u32::try_from(text.len()).unwrap_or(u32::MAX)), ..*span };
        for finding in &mut found {
            if (shifted.start..=shifted.end).contains(&finding.span.start) {
                finding.span = *span;
                finding.related.retain(|related| !(shifted.start..=shifted.end).contains(&related.span.start));
            }
        }
    }
    found
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

    /// What is wrong with its own sentences: unreadable ones, clashes, names that mean nothing. Examples are spelt as in
    /// the host.
    pub fn problems(&self, host: Host) -> Vec<Finding> {
        let mut found: Vec<Finding> = self.unreadable.iter().map(|one| convention_unreadable(one, host)).collect();
        found.extend(clashes(&self.sentences));
        found.extend(unknown_names(&self.sentences, &self.meanings));
        found
    }

    /// Whether the author says that this letter is no index.
    pub fn is_not_index(&self, unit: &Unit) -> bool {
        self.meanings.is_not_index(&unit.letter)
    }
}
