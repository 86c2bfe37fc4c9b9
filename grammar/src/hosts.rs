//! Hosts: where the mathematics stands in a file.
//!
//! A scan is linear, never fails and knows no formula: it cuts the text into regions of mathematics and
//! notes what else the reader needs (macro definitions, parts, directives, headings). What stands in a
//! comment, in a listing or in a skipped branch is not a region.

mod body;
mod closer;
mod directives;
mod latex;
mod markdown;
mod note;
mod patience;
mod references;
mod vocabulary;
mod wrappers;

use crate::macros::{Definition, Macros};
use crate::span::Span;

/// The kind of file that mathematics stands in.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Host {
    /// A LaTeX document or a part of one.
    Latex,
    /// A Markdown page (CommonMark with `$` mathematics).
    Markdown,
    /// A plain note (`.inote`).
    Note,
}

/// How a region sets its mathematics.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Setting {
    /// In the line of text.
    Inline,
    /// On its own, one formula.
    Display,
    /// On its own, several rows with alignment marks (`align`, `gather`, `eqnarray`, ...).
    Rows,
}

/// One mathematical region of a host.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Region {
    /// With its delimiters.
    pub span: Span,
    /// Without its delimiters.
    pub body: Span,
    /// How it is set.
    pub setting: Setting,
    /// The heading it stands under, as an index into `Scan::headings`, if any.
    pub heading: Option<u32>,
    /// Parts of the body that are no mathematics, in order: definitions in it, and the marks of quoted lines.
    pub holes: Vec<Span>,
}

/// A file that this one asks for.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Reference {
    /// The command with its argument.
    pub span: Span,
    /// The path as written, without a suffix that the author left out; for `\import{dir}{file}` both joined.
    pub path: String,
    /// What is asked for.
    pub kind: ReferenceKind,
}

/// What a reference asks for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum ReferenceKind {
    /// `\input`, `\include`, `\subfile`, `\import` and kin: a part, `.tex` unless it has a suffix.
    Part,
    /// `\usepackage`, `\RequirePackage`: a style, `.sty`; only those that exist beside the document count.
    Style,
    /// The main file named by `\documentclass[main.tex]{subfiles}` or by a `% !TEX root = ...` comment.
    Root,
}

/// A directive or a block of conventions, in whatever comment form the host has.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Directive {
    /// The whole comment or block.
    pub span: Span,
    /// The sentences: text and the span of that very text in the file.
    pub sentences: Vec<(String, Span)>,
}

/// A heading of the document.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Heading {
    /// The heading with its command or marks.
    pub span: Span,
    /// 0 for a part or chapter, 1 for a section or `#`, 2 below it, and so on.
    pub level: u8,
}

/// What the host scan found, everything in the order of the text.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Scan {
    /// Regions of mathematics; they do not overlap.
    pub regions: Vec<Region>,
    /// The author's macro definitions.
    pub definitions: Vec<Definition>,
    /// Files asked for.
    pub references: Vec<Reference>,
    /// Directives and conventions.
    pub directives: Vec<Directive>,
    /// Headings.
    pub headings: Vec<Heading>,
    /// Whether `\documentclass` stands in the file (a root or a subfile).
    pub has_class: bool,
}

/// Scans a text. `macros` are those in force at its start (from the root's preamble and from styles).
pub fn scan(text: &str, host: Host, macros: &Macros) -> Scan {
    match host {
        Host::Latex => latex::scan(text, macros),
        Host::Markdown => markdown::scan(text, macros),
        Host::Note => note::scan(text),
    }
}

/// The sentences of the conventions language in a part of a text, with their places; one ends at `;` or with its line.
pub fn sentences(text: &str, span: Span) -> Vec<(String, Span)> {
    let mut found = Vec::new();
    directives::push_sentences(text, span, &mut found);
    found
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::indexing_slicing)]
    use super::*;

    /// Pieces that open, close and confuse, for all hosts at once.
    const PIECES: &str = "$ $$ \\( \\) \\[ \\] \\begin{align} \\end{align} \\text{ { } % é 𝔸 \\def\\be{\\[} \\be | \
        \\fi \\newcommand{\\q}[1]{$#1$} \\q{ \\iffalse \\else \\url{ ` ``` math > - # <!-- --> <code> </code> ($ \
        \\verb| \\begin{tikzpicture} \\end{tikzpicture} \\item indexwise: ; \\ensuremath{ \\begin{document} \\section{ \
        \\input{ \\let \\a = conventions \\begin{verbatim} \\end{verbatim} \\begin{e} \\end{e} \\ [ ] |-|-| u_i \
        \\usepackage{ \\newenvironment{e}{\\begin{align}}{\\end{align}} 5 indexwise \\documentclass{a}";

    const GAPS: &[&str] = &["", "", " ", "\n", "\n\n", "\r\n", "\r", "    ", "\t", "\n  ", "% "];

    /// Spans stand in the text on character boundaries and in order.
    #[track_caller]
    fn in_order(text: &str, spans: impl Iterator<Item = Span>) {
        let mut last = 0;
        for span in spans {
            assert!(span.start >= last && span.start <= span.end, "{text:?}");
            assert!(text.get(span.range()).is_some(), "{text:?}");
            last = span.start;
        }
    }

    #[test]
    fn any_soup_of_pieces_keeps_the_laws_of_a_scan() {
        let pieces: Vec<&str> = PIECES.split_ascii_whitespace().collect();
        let mut seed = 1_u64;
        let mut next = |bound: usize| {
            seed = seed.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
            (seed >> 33) as usize % bound
        };
        for round in 0..2000 {
            let mut text = String::new();
            for _ in 0..=round % 60 {
                text.push_str(pieces[next(pieces.len())]);
                text.push_str(GAPS[next(GAPS.len())]);
            }
            for host in [Host::Latex, Host::Markdown, Host::Note] {
                let scan = scan(&text, host, &Macros::default());
                in_order(&text, scan.definitions.iter().map(|found| found.span));
                in_order(&text, scan.references.iter().map(|found| found.span));
                in_order(&text, scan.headings.iter().map(|found| found.span));
                in_order(&text, scan.regions.iter().flat_map(|found| [found.span, found.body]));
                for pair in scan.regions.windows(2) {
                    assert!(pair[0].span.end <= pair[1].span.start, "{host:?} {text:?}");
                }
                for region in &scan.regions {
                    assert!(region.span.holds(region.body), "{host:?} {text:?}");
                    assert!(region.holes.iter().all(|hole| region.body.holds(*hole)), "{host:?} {text:?}");
                    in_order(&text, region.holes.iter().copied());
                }
                in_order(&text, scan.directives.iter().map(|found| found.span));
                for directive in &scan.directives {
                    assert!(directive.sentences.iter().all(|(said, span)| span.of(&text) == said), "{text:?}");
                }
            }
        }
    }
}
