//! What may be typed next: indices, kernels, sentences of the conventions, rules, labels.
//!
//! The text is half typed as a rule, so that the view may not even see the formula: what is being typed is cut out, the
//! rest is scanned and read again (`probe`), and the answer is what is missing there. Outside of formulas and directives
//! there is nothing, but for labels in a reference.

mod kernels;
mod labels;
mod owed;
mod probe;
mod scripts;
mod sentences;
#[cfg(test)]
mod tests;
mod typed;

use indexwise_grammar::span::Span;

use crate::paper::View;

/// Something that may be typed.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Suggestion {
    /// As shown in a list.
    pub label: String,
    /// What it is, in a few words.
    pub detail: String,
    /// More about it, in plain words.
    pub documentation: Option<String>,
    /// What is replaced: it ends at the cursor, or goes on to the end of a script.
    pub replaces: Span,
    /// What is put there.
    pub text: String,
    /// What sort of thing it is.
    pub kind: SuggestionKind,
    /// Its place in the list, from 0.
    pub rank: usize,
}

/// What sort of thing may be typed.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum SuggestionKind {
    /// An index that the term still owes, or several together.
    Owed,
    /// A letter that the statement does not use.
    Fresh,
    /// A declared kernel with its slots.
    Kernel,
    /// A rule.
    Rule,
    /// A label.
    Label,
    /// A sentence of the conventions, or the rest of one.
    Sentence,
}

/// What may be typed at a place, the likeliest first.
pub fn complete(view: &View, document: usize, offset: u32) -> Vec<Suggestion> {
    if !view.text(document).is_char_boundary(offset as usize) || view.scan(document).is_none() {
        return Vec::new();
    }
    let found = sentences::sentences(view, document, offset)
        .or_else(|| labels::referred(view, document, offset))
        .or_else(|| scripts::indices(view, document, offset))
        .or_else(|| kernels::kernels(view, document, offset));
    let mut found = found.unwrap_or_default();
    found.iter_mut().enumerate().for_each(|(rank, suggestion)| suggestion.rank = rank);
    found
}

/// The text of a document before an offset.
fn before(view: &View, document: usize, offset: u32) -> &str {
    view.text(document).get(..offset as usize).unwrap_or_default()
}
