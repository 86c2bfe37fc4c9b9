//! What is wrong with the sentences of one scope, as findings: unreadable ones, clashes, names that mean nothing.

use indexwise_grammar::hosts::Host;
use indexwise_grammar::span::Span;

use crate::conventions::clashes::{clashes, unknown_names};
use crate::conventions::declared::{Declared, SharedConventions};
use crate::conventions::meanings::Meanings;
use crate::finding::Finding;
use crate::rules;

/// What is wrong with a document's own sentences. Examples are spelt as in the host.
pub(super) fn problems_of(declared: &Declared, host: Host) -> Vec<Finding> {
    let unreadable = declared.unreadable.iter().map(|sentence| rules::convention_unreadable(sentence, host));
    let mut found: Vec<Finding> = unreadable.collect();
    found.extend(clashes(&declared.sentences).iter().map(rules::convention_clash));
    found.extend(unknown_names(&declared.sentences, &declared.meanings).iter().map(rules::unknown_name));
    found
}

/// What is wrong with conventions that several papers share, in the order of the sentences. It is said here once,
/// so that it need not be said in every paper. Where a file writes a sentence with escapes, places inside of it are not
/// known and the finding stands at the whole.
pub fn problems(shared: &SharedConventions) -> Vec<Finding> {
    let mut found = problems_of(&Declared::shared(shared, &Meanings::default()), Host::Latex);
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
