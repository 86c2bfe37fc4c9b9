//! What the Markdown parser says about a page: code, block starts and headings, all by byte ranges.
//!
//! Only this file knows pulldown-cmark. Mathematics is not asked of it (see `markdown.rs`).

use std::ops::Range;

use pulldown_cmark::{CodeBlockKind, Event, Options, Parser, Tag, TagEnd};

use crate::hosts::Heading;
use crate::span::Span;

/// What the parser says about a page, everything in the order of the text.
#[derive(Default)]
pub(super) struct Outline {
    pub code: Vec<Code>,
    /// Starts of fenced code and metadata: no formula runs over one.
    pub fences: Vec<usize>,
    /// Starts of blocks, cells and items: no inline formula runs over one.
    pub breaks: Vec<usize>,
    pub headings: Vec<Heading>,
}

/// A stretch that is not running text.
pub(super) struct Code {
    pub range: Range<usize>,
    pub kind: CodeKind,
    /// The pieces of a block's content, without fences and quotation marks.
    pub lines: Vec<Range<usize>>,
}

#[derive(Clone, Copy, PartialEq, Eq)]
pub(super) enum CodeKind {
    /// A code span.
    Span,
    /// Indented code.
    Indented,
    /// Fenced code in some language, or metadata.
    Fenced,
    /// Fenced `math`.
    Mathematics,
    /// Fenced `indexwise`.
    Conventions,
}

/// Reads the structure of a page.
pub(super) fn outline(text: &str) -> Outline {
    let options = Options::ENABLE_TABLES
        | Options::ENABLE_FOOTNOTES
        | Options::ENABLE_STRIKETHROUGH
        | Options::ENABLE_TASKLISTS
        | Options::ENABLE_YAML_STYLE_METADATA_BLOCKS
        | Options::ENABLE_PLUSES_DELIMITED_METADATA_BLOCKS;
    let mut outline = Outline::default();
    let mut in_code = false;
    for (event, range) in Parser::new_ext(text, options).into_offset_iter() {
        match event {
            Event::Start(Tag::CodeBlock(kind)) => {
                in_code = true;
                outline.push_code(range, code_kind(&kind));
            }
            Event::Start(Tag::MetadataBlock(_)) => {
                in_code = true;
                outline.push_code(range, CodeKind::Fenced);
            }
            Event::End(TagEnd::CodeBlock | TagEnd::MetadataBlock(_)) => in_code = false,
            Event::Text(_) if in_code => {
                outline.code.last_mut().into_iter().for_each(|code| code.lines.push(range.clone()));
            }
            Event::Code(_) => outline.push_code(range, CodeKind::Span),
            Event::Start(Tag::Heading { level, .. }) => {
                outline.breaks.push(range.start);
                let span =
                    Span::new(range.start, range.start + text.get(range).map_or(0, |title| title.trim_end().len()));
                outline.headings.push(Heading { span, level: level as u8 });
            }
            Event::Start(tag) if is_block(&tag) => outline.breaks.push(range.start),
            Event::Rule => outline.breaks.push(range.start),
            _ => {}
        }
    }
    outline
}

impl Outline {
    fn push_code(&mut self, range: Range<usize>, kind: CodeKind) {
        if !matches!(kind, CodeKind::Span | CodeKind::Indented) {
            self.fences.push(range.start);
        }
        self.code.push(Code { range, kind, lines: Vec::new() });
    }
}

fn is_block(tag: &Tag) -> bool {
    use Tag::{
        BlockQuote, FootnoteDefinition, HtmlBlock, Item, List, Paragraph, Table, TableCell, TableHead, TableRow,
    };
    matches!(tag, Paragraph | BlockQuote(_) | List(_) | Item | FootnoteDefinition(_) | HtmlBlock)
        || matches!(tag, Table(_) | TableHead | TableRow | TableCell)
}

fn code_kind(kind: &CodeBlockKind) -> CodeKind {
    let CodeBlockKind::Fenced(information) = kind else { return CodeKind::Indented };
    match information.split_ascii_whitespace().next().unwrap_or_default() {
        "math" => CodeKind::Mathematics,
        "indexwise" => CodeKind::Conventions,
        _ => CodeKind::Fenced,
    }
}
