//! The note host: prose at the margin, mathematics indented by two or more spaces or a tab.
//!
//! One pass over the lines. A formula is a run of indented lines in which every line after the first begins with a
//! relation or a sign; any other indented line starts the next formula. Labels and reasons stay in the body.
//!
//! Under the word `conventions` at the margin the indented lines are sentences, blank lines or not, up to the next
//! line at the margin. A margin line that starts with `indexwise:` says its sentences itself.

use super::directives::{MARK, push_sentences};
use super::{Directive, Region, Scan, Setting};
use crate::macros::cursor::{after_line_end, line_end};
use crate::span::Span;

/// Signs and relations that continue the formula above when a line begins with one.
const CONTINUES: &[&str] = &[
    "=",
    ":=",
    "+",
    "-",
    "\u{2212}",
    "±",
    "∓",
    "<",
    ">",
    "~",
    "!=",
    "≡",
    "≤",
    "≥",
    "≠",
    "≈",
    "≃",
    "≅",
    "∼",
    "∝",
    "≪",
    "≫",
    "→",
    "⇒",
    "⟹",
    "⇔",
    "⟺",
    "\\equiv",
    "\\le",
    "\\ge",
    "\\ne",
    "\\approx",
    "\\sim",
    "\\propto",
    "\\ll",
    "\\gg",
    "\\pm",
    "\\mp",
    "\\to",
    "\\implies",
    "\\Rightarrow",
    "\\iff",
];

/// What indented lines belong to.
enum Block {
    /// No formula is open.
    None,
    /// A formula, which ends at the last line added.
    Formula(Span),
    /// Sentences under `conventions`.
    Conventions(Directive),
}

/// Finds formulas and conventions.
pub(super) fn scan(text: &str) -> Scan {
    let mut scan = Scan::default();
    let mut block = Block::None;
    let mut at = text.len() - text.trim_start_matches('\u{FEFF}').len();
    while at < text.len() {
        let end = line_end(text.as_bytes(), at);
        let line = text.get(at..end).unwrap_or_default();
        let said = line.trim();
        let start = at + (line.len() - line.trim_start().len());
        let span = Span::new(start, start + said.len());
        block = if said.is_empty() {
            blank(&mut scan, block)
        } else if line.starts_with("  ") || line.starts_with('\t') || line.starts_with(" \t") {
            indented(&mut scan, text, block, span)
        } else {
            margin(&mut scan, text, block, span)
        };
        at = after_line_end(text.as_bytes(), end);
    }
    close(&mut scan, block);
    scan
}

/// A blank line ends a formula, but not the conventions.
fn blank(scan: &mut Scan, block: Block) -> Block {
    if matches!(block, Block::Conventions(_)) {
        return block;
    }
    close(scan, block);
    Block::None
}

fn indented(scan: &mut Scan, text: &str, block: Block, span: Span) -> Block {
    match block {
        Block::Conventions(mut directive) => {
            push_sentences(text, span, &mut directive.sentences);
            directive.span = directive.span.join(span);
            Block::Conventions(directive)
        }
        Block::Formula(above) if continues(span.of(text)) => Block::Formula(above.join(span)),
        block => {
            close(scan, block);
            Block::Formula(span)
        }
    }
}

fn margin(scan: &mut Scan, text: &str, block: Block, span: Span) -> Block {
    close(scan, block);
    let said = span.of(text);
    if said.trim_end_matches(':').eq_ignore_ascii_case("conventions") {
        return Block::Conventions(Directive { span, sentences: Vec::new() });
    }
    if said.starts_with(MARK) {
        let mut sentences = Vec::new();
        push_sentences(text, Span::new(span.start as usize + MARK.len(), span.end as usize), &mut sentences);
        scan.directives.push(Directive { span, sentences });
    }
    Block::None
}

fn close(scan: &mut Scan, block: Block) {
    match block {
        Block::None => {}
        Block::Formula(span) => {
            let region = Region { span, body: span, setting: Setting::Display, heading: None, holes: Vec::new() };
            scan.regions.push(region);
        }
        Block::Conventions(directive) => scan.directives.push(directive),
    }
}

/// Whether a line goes on with the formula above it.
fn continues(line: &str) -> bool {
    CONTINUES.iter().filter_map(|sign| line.strip_prefix(sign).map(|rest| (sign, rest))).any(|(sign, rest)| {
        // `\let..` does not begin with `\le`.
        !(sign.starts_with('\\') && rest.starts_with(|next: char| next.is_ascii_alphabetic()))
    })
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::indexing_slicing)]
    use super::*;

    fn formulas(text: &str) -> Vec<&str> {
        scan(text).regions.iter().map(|region| region.body.of(text)).collect()
    }

    fn sentences(text: &str) -> Vec<Vec<&str>> {
        let said = |directive: &Directive| directive.sentences.iter().map(|(_, span)| span.of(text)).collect();
        scan(text).directives.iter().map(said).collect()
    }

    #[test]
    fn prose_at_the_margin_is_not_mathematics() {
        assert_eq!(formulas("Shell notes, u_i = v_i\n u_i = w_i\n\nand so on"), Vec::<&str>::new());
        assert_eq!(formulas(""), Vec::<&str>::new());
        assert_eq!(formulas("   \n\t\n"), Vec::<&str>::new());
    }

    #[test]
    fn conventions_are_not_formulas() {
        let text = "conventions\n  i j run from 1 to 3\n\n  g_ij is the metric; h is small\nProse\n  a_i = b_i\n";
        assert_eq!(sentences(text), [["i j run from 1 to 3", "g_ij is the metric", "h is small"]]);
        assert_eq!(formulas(text), ["a_i = b_i"]);
        assert_eq!(scan(text).directives[0].span.start, 0);
    }

    #[test]
    fn a_word_in_prose_opens_no_conventions() {
        let text = "conventions of the shell\n  a_i = b_i\n";
        assert!(scan(text).directives.is_empty());
        assert_eq!(formulas(text), ["a_i = b_i"]);
    }

    #[test]
    fn a_margin_line_may_be_a_directive() {
        assert_eq!(sentences("indexwise: skip this; h is small\r\n  a_i = b_i\r\n"), [["skip this", "h is small"]]);
    }

    #[test]
    fn lines_that_begin_with_a_relation_continue() {
        let text = "The trace:\n\n  (trace)  G^i_ik = 1/2 g^ij ∂_k g_ij\n\
                    \x20          = ∂_k log sqrt g   [det]\n           + 0\n";
        assert_eq!(
            formulas(text),
            ["(trace)  G^i_ik = 1/2 g^ij ∂_k g_ij\n           = ∂_k log sqrt g   [det]\n           + 0"]
        );
    }

    #[test]
    fn other_lines_and_blank_lines_separate() {
        assert_eq!(formulas("  a_i = b_i\n  c_i = d_i\n\n  = e_i"), ["a_i = b_i", "c_i = d_i", "= e_i"]);
        assert_eq!(formulas("\ta = b\r\n\t= c\r\nend\r\n"), ["a = b\r\n\t= c"]);
        assert_eq!(formulas("  a = b\n  \\left( c \\right)"), ["a = b", "\\left( c \\right)"]);
    }
}
