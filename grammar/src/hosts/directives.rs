//! Sentences of the conventions language in whatever comment form a host has, and where each stands.
//!
//! A line holds one or more sentences separated by `;`. Traps: `T_{ab;c}` and `\;` hold a semicolon that separates
//! nothing, so only one outside of braces, not after a backslash and before space or the line's end counts.

use super::Directive;
use crate::macros::cursor::{after_line_end, line_end};
use crate::span::Span;

/// The word that makes a comment a directive.
pub(super) const MARK: &str = "indexwise:";

/// Adds the sentences of the text in a span, line by line.
pub(super) fn push_sentences(text: &str, span: Span, sentences: &mut Vec<(String, Span)>) {
    let written = span.of(text);
    let (mut from, mut depth, mut previous) = (0, 0_i32, ' ');
    for (at, letter) in written.char_indices() {
        let next = written.as_bytes().get(at + 1);
        let ends = match letter {
            '\n' | '\r' => true,
            ';' => depth <= 0 && previous != '\\' && next.is_none_or(u8::is_ascii_whitespace),
            _ => false,
        };
        if ends {
            push_sentence(text, span.start as usize + from, span.start as usize + at, sentences);
            from = at + 1;
        }
        depth = match letter {
            '{' => depth + 1,
            '}' => depth - 1,
            '\n' | '\r' => 0,
            _ => depth,
        };
        previous = letter;
    }
    push_sentence(text, span.start as usize + from, span.end as usize, sentences);
}

fn push_sentence(text: &str, start: usize, end: usize, sentences: &mut Vec<(String, Span)>) {
    let written = text.get(start..end).unwrap_or_default();
    let sentence = written.trim();
    if !sentence.is_empty() {
        let start = start + (written.len() - written.trim_start().len());
        sentences.push((sentence.to_owned(), Span::new(start, start + sentence.len())));
    }
}

/// The directive in the comment line whose first `%` stands at `at`, with the lines that continue it.
pub(super) fn in_comment(text: &str, at: usize) -> Option<Directive> {
    let bytes = text.as_bytes();
    let before = bytes.get(..at)?.iter().rev().find(|byte| !matches!(byte, b' ' | b'\t'));
    if before.is_some_and(|byte| !matches!(byte, b'\n' | b'\r')) {
        return None;
    }
    let mut end = line_end(bytes, at);
    let line = text.get(at..end)?;
    let said = line.trim_start_matches('%').trim_start_matches([' ', '\t']).strip_prefix(MARK)?;
    let mut sentences = Vec::new();
    push_sentences(text, Span::new(end - said.len(), end), &mut sentences);
    while end < bytes.len() {
        let start = after_line_end(bytes, end);
        let next = line_end(bytes, start);
        let Some(said) = text.get(start..next)?.trim_start_matches([' ', '\t']).strip_prefix("%   ") else { break };
        push_sentences(text, Span::new(next - said.len(), next), &mut sentences);
        end = next;
    }
    Some(Directive { span: Span::new(at, end), sentences })
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::indexing_slicing)]
    use super::*;

    fn sentences(text: &str) -> Vec<String> {
        let mut found = Vec::new();
        push_sentences(text, Span::new(0, text.len()), &mut found);
        assert!(found.iter().all(|(sentence, span)| span.of(text) == sentence));
        found.into_iter().map(|(sentence, _)| sentence).collect()
    }

    #[test]
    fn semicolons_in_formulas_separate_nothing() {
        assert_eq!(sentences("T_{ab; c} is symmetric in a\\; b"), ["T_{ab; c} is symmetric in a\\; b"]);
        assert_eq!(sentences("u_i;j is small"), ["u_i;j is small"]);
        assert_eq!(sentences(" ; ;"), Vec::<String>::new());
    }

    #[test]
    fn sentences_are_separated_by_semicolons_and_lines() {
        assert_eq!(
            sentences("a b are matrices; m is constant;\r\n  n is small"),
            ["a b are matrices", "m is constant", "n is small"]
        );
    }

    #[test]
    fn a_comment_after_text_is_no_directive() {
        let text = "x % indexwise: skip this";
        assert_eq!(in_comment(text, 2), None);
        assert_eq!(in_comment("% index wise: skip this", 0), None);
    }

    #[test]
    fn a_block_goes_on_in_deeper_comment_lines() {
        let text = "  % indexwise: i j run from 1 to 3\n  %   g_{ij} is the metric; h is small\n  % not this\n";
        let directive = in_comment(text, 2).unwrap();
        let said: Vec<_> = directive.sentences.iter().map(|(_, span)| span.of(text)).collect();
        assert_eq!(said, ["i j run from 1 to 3", "g_{ij} is the metric", "h is small"]);
        assert!(directive.span.of(text).ends_with("h is small"));
    }
}
