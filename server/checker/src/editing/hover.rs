//! What is known of the letter, the sign or the name under the cursor, in a few lines of Markdown.
//!
//! An index tells its role, its level, its partner, its range and why it is taken for an index; a summed one is written
//! out. A kernel tells what it is declared to be; a relation its verdict with the counterexample; a macro, a label and a
//! rule what they stand for. What a finding says at the place is not said again: the editor shows it beside.

mod index;
mod kernel;
mod named;
#[cfg(test)]
mod tests;

use indexwise_grammar::conventions::Sentence;
use indexwise_grammar::span::Span;

use crate::paper::{DocumentAnalysis, View};
use crate::rules;

use super::under::{Under, under};

/// Text about a place.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Hover {
    /// The place that it is about.
    pub span: Span,
    /// Markdown without HTML.
    pub markdown: String,
}

/// What is known of what stands at a byte offset; of relations only with the analysis of the document.
pub fn hover(view: &View, document: usize, offset: u32, analysis: Option<&DocumentAnalysis>) -> Option<Hover> {
    if let Some(found) = analysis.and_then(|analysis| named::relation(analysis, offset)) {
        return Some(found);
    }
    if let Some(found) = rule(view, document, offset) {
        return Some(found);
    }
    match under(view, document, offset)? {
        Under::Label(own) => named::label(view, document, &own),
        Under::Macro(span, own) => Some(named::author_macro(view, document, span, &own)),
        Under::Index(held) => index::index(view, document, &held),
        Under::Kernel(part, kernel) => Some(kernel::kernel(view, document, part.span, &kernel)),
        Under::Other(part) => index::no_index(view, document, &part),
    }
}

/// The page of a rule that a directive names.
fn rule(view: &View, document: usize, offset: u32) -> Option<Hover> {
    let named = view.declared(document)?.sentences.iter().find_map(|(sentence, _)| match sentence {
        Sentence::Allow { rule, .. } if rule.span.start <= offset && offset <= rule.span.end => Some(rule),
        _ => None,
    })?;
    let page = rules::find(&named.text)?.page;
    Some(Hover { span: named.span, markdown: page.trim_end().to_owned() })
}

/// A text as code within a line.
fn code(text: &str) -> String {
    let flat = text.split_whitespace().collect::<Vec<_>>().join(" ");
    let ticks = "`".repeat(if flat.contains("``") {
        3
    } else if flat.contains('`') {
        2
    } else {
        1
    });
    let blank = if ticks.len() > 1 { " " } else { "" };
    format!("{ticks}{blank}{flat}{blank}{ticks}")
}

/// A text as code in lines of its own, cut after so many lines and signs.
fn block(text: &str, language: &str) -> String {
    const LINES: usize = 12;
    const SIGNS: usize = 800;
    let cut: String = text.trim().chars().take(SIGNS).collect();
    let lines: Vec<&str> = cut.lines().take(LINES).collect();
    let whole = cut.len() == text.trim().len() && cut.lines().count() <= LINES;
    let more = if whole { "" } else { "\n..." };
    let fence = if text.contains("```") { "~~~~" } else { "```" };
    format!("{fence}{language}\n{}{more}\n{fence}", lines.join("\n"))
}

/// The line of an offset, from 1.
fn line_of(text: &str, offset: u32) -> usize {
    1 + text.get(..offset as usize).unwrap_or_default().matches('\n').count()
}

/// `once`, `twice`, `3 times`.
fn times(count: usize) -> String {
    match count {
        1 => "once".to_owned(),
        2 => "twice".to_owned(),
        _ => format!("{count} times"),
    }
}
