//! Hosts: where the mathematics stands in a file.
//!
//! A scan is linear, never fails and knows no formula: it cuts the text into regions of mathematics and
//! notes what else the reader needs (macro definitions, parts, directives, headings). What stands in a
//! comment, in a listing or in a skipped branch is not a region.

mod latex;
mod markdown;
mod note;

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
