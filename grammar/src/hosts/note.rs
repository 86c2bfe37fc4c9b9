//! The note host: prose at the margin, mathematics indented by two or more spaces or a tab.
//!
//! One pass over the lines. A formula is a run of indented lines in which every line after the first begins with a
//! relation or a sign; any other indented line starts the next formula. Labels and reasons stay in the body.
//!
//! Under the word `conventions` at the margin the indented lines are sentences, up to the next line at the margin;
//! a line that begins with a relation or a sign goes on with the sentence above. Blank lines may stand between them,
//! but after one a line that cannot be a sentence (it has a label, or an `=`) is a formula and ends the block. A line
//! that starts with `indexwise:`, at the margin or not, says its sentences itself.

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
    /// Sentences under `conventions`, and whether a blank line came last.
    Conventions(Directive, bool),
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
    if let Block::Conventions(directive, _) = block {
        return Block::Conventions(directive, true);
    }
    close(scan, block);
    Block::None
}

fn indented(scan: &mut Scan, text: &str, block: Block, span: Span) -> Block {
    let said = span.of(text);
    match block {
        Block::Conventions(mut directive, after_blank) if !after_blank || is_sentence(said) => {
            sentences(text, span, after_blank, &mut directive.sentences);
            directive.span = directive.span.join(span);
            Block::Conventions(directive, false)
        }
        block if said.starts_with(MARK) => {
            close(scan, block);
            scan.directives.push(marked(text, span));
            Block::None
        }
        Block::Formula(above) if continues(said) => Block::Formula(above.join(span)),
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
        return Block::Conventions(Directive { span, sentences: Vec::new() }, false);
    }
    if said.starts_with(MARK) {
        scan.directives.push(marked(text, span));
    }
    Block::None
}

/// Whether a line under `conventions` may be a sentence: those have no label before them, no mark, and no `=` but in
/// `:=`.
fn is_sentence(line: &str) -> bool {
    let equal = line.match_indices('=').any(|(at, _)| !line.get(..at).is_some_and(|before| before.ends_with(':')));
    !(equal || line.starts_with('(') || line.starts_with(MARK))
}

/// Adds the sentences of a line; one that begins with a relation or a sign goes on with the sentence above it.
fn sentences(text: &str, span: Span, after_blank: bool, out: &mut Vec<(String, Span)>) {
    let above = out.pop_if(|_| !after_blank && continues(span.of(text)));
    let first = out.len();
    push_sentences(text, span, out);
    match (above, out.get_mut(first)) {
        (Some((mut said, above)), Some(below)) => {
            // What lies between is put behind: to copy the whole for each line would take quadratic time.
            said.push_str(text.get(above.end as usize..below.1.end as usize).unwrap_or_default());
            *below = (said, above.join(below.1));
        }
        (Some(above), None) => out.push(above),
        (None, _) => {}
    }
}

/// A line that starts with the mark.
fn marked(text: &str, span: Span) -> Directive {
    let mut sentences = Vec::new();
    push_sentences(text, Span::new(span.start as usize + MARK.len(), span.end as usize), &mut sentences);
    Directive { span, sentences }
}

fn close(scan: &mut Scan, block: Block) {
    match block {
        Block::None => {}
        Block::Formula(span) => {
            let region = Region { span, body: span, setting: Setting::Display, heading: None, holes: Vec::new() };
            scan.regions.push(region);
        }
        Block::Conventions(directive, _) => scan.directives.push(directive),
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
    fn a_sentence_goes_on_in_a_line_that_begins_with_a_sign() {
        let text = "conventions\n  R_ij := ∂_k G^k_ij\n     - G^k_il G^l_jk; h is small\n  k is small\n\n  - 1\n";
        let definition = "R_ij := ∂_k G^k_ij\n     - G^k_il G^l_jk";
        assert_eq!(sentences(text), [[definition, "h is small", "k is small", "- 1"]]);
        let said = &scan(text).directives[0].sentences[0];
        assert_eq!(said.0, said.1.of(text));
    }

    #[test]
    fn a_formula_after_a_blank_line_ends_the_conventions() {
        let text = "conventions\n  i j run from 1 to 3\n\n  a_i = b_i\n  c_i = d_i\n";
        assert_eq!(
            (sentences(text), formulas(text)),
            (vec![vec!["i j run from 1 to 3"]], vec!["a_i = b_i", "c_i = d_i"])
        );
        let labelled = "conventions\n  h is small\n\n  (trace) R_ij := S_ij\n";
        assert_eq!((sentences(labelled), formulas(labelled)), (vec![vec!["h is small"]], vec!["(trace) R_ij := S_ij"]));
        // Without a blank line it is a sentence that cannot be read, and is reported as one.
        assert!(formulas("conventions\n  a_i = b_i\n").is_empty());
        assert_eq!(sentences("conventions\n  h is small\n\n  R_ij := S_ij"), [["h is small", "R_ij := S_ij"]]);
    }

    #[test]
    fn a_directive_may_stand_indented_before_its_formula() {
        let text = "Shell\n  indexwise: skip this\n  a_i = b_j\n  c = d\n  indexwise: h is small\n  + e";
        assert_eq!(sentences(text), [["skip this"], ["h is small"]]);
        assert_eq!(formulas(text), ["a_i = b_j", "c = d", "+ e"]);
        let under = "conventions\n  h is small\n\n  indexwise: skip this\n  a_i = b_j\n";
        assert_eq!(
            (sentences(under), formulas(under)),
            (vec![vec!["h is small"], vec!["skip this"]], vec!["a_i = b_j"])
        );
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
