//! The Markdown host: a page with `$` mathematics, and LaTeX displays standing bare in it.
//!
//! The block structure, the code and the metadata come from pulldown-cmark. Where mathematics stands does not: to
//! CommonMark a backslash escapes `\(`, `_` and `*` are emphasis, and a `+` at a line's start is a list, all inside
//! formulas. So a scan of its own runs over the text and takes from the parser only what it must not enter.
//!
//! Dollars follow the usual rule: no space after the opening one, none before the closing one, no digit after that;
//! so sums of money are not mathematics. A display that was open first wins over an indented-code reading of its
//! lines. Escaped brackets (`\[1\]`) are formulas only if they hold a sign of mathematics.

mod outline;

use std::ops::Range;

use super::body::{Ending, Manner, Outcome, find_end};
use super::closer::{Closer, environment_name};
use super::directives::{MARK, push_sentences};
use super::patience::Patience;
use super::vocabulary::mathematics;
use super::wrappers::Wrappers;
use super::{Directive, Region, Scan, Setting};
use crate::macros::cursor::Cursor;
use crate::macros::{Macros, defines, read_definition};
use crate::span::Span;
use outline::{CodeKind, Outline, outline};

/// Raw HTML whose content is shown as typed.
const RAW_ELEMENTS: &[&str] = &["script", "style", "pre", "code", "textarea"];

/// Finds regions, definitions, directives and headings.
pub(super) fn scan(text: &str, macros: &Macros) -> Scan {
    let mut scanner = Scanner {
        text,
        bytes: text.as_bytes(),
        at: 0,
        outline: outline(text),
        next_code: 0,
        next_fence: 0,
        next_break: 0,
        next_heading: 0,
        scan: Scan::default(),
        wrappers: Wrappers::new(macros),
        patience: Patience::default(),
        unclosed: 0,
    };
    scanner.run();
    scanner.scan
}

struct Scanner<'t> {
    text: &'t str,
    bytes: &'t [u8],
    at: usize,
    outline: Outline,
    /// The first code, fence, break and heading not behind the scan.
    next_code: usize,
    next_fence: usize,
    next_break: usize,
    next_heading: usize,
    scan: Scan,
    /// Carries the macros; an author's own delimiters are a habit of LaTeX documents only.
    wrappers: Wrappers,
    patience: Patience,
    /// A bit for each closing mark of HTML that does not come any more.
    unclosed: u32,
}

impl Scanner<'_> {
    fn run(&mut self) {
        while let Some(step) = self.bytes.get(self.at..).and_then(|rest| rest.iter().position(|b| is_telling(*b))) {
            self.at += step;
            if self.enter_code() {
                continue;
            }
            match self.bytes.get(self.at) {
                Some(b'$') => self.dollar(),
                Some(b'<') => self.angle(),
                _ => self.control(),
            }
        }
        // What the last telling byte did not reach.
        self.at = self.bytes.len();
        self.enter_code();
        self.pass_headings(self.at);
    }

    /// Handles the code that the scan has come to or passed; whether the scan moved.
    fn enter_code(&mut self) -> bool {
        while let Some(code) = self.outline.code.get(self.next_code).filter(|code| code.range.start <= self.at) {
            self.next_code += 1;
            let (range, kind) = (code.range.clone(), code.kind);
            // Code that starts inside what was read as a formula is part of that formula.
            let inside = self.scan.regions.last().is_some_and(|last| range.start < last.span.end as usize);
            if inside {
                continue;
            }
            match kind {
                CodeKind::Mathematics => self.fenced_mathematics(),
                CodeKind::Conventions => self.fenced_conventions(),
                _ => {}
            }
            if range.end > self.at {
                self.at = range.end;
                return true;
            }
        }
        false
    }

    fn code_lines(&self) -> Vec<Range<usize>> {
        let code = self.next_code.checked_sub(1).and_then(|index| self.outline.code.get(index));
        code.map(|code| code.lines.clone()).unwrap_or_default()
    }

    fn fenced_mathematics(&mut self) {
        let lines = self.code_lines();
        let code = self.next_code.checked_sub(1).and_then(|index| self.outline.code.get(index));
        let (Some(code), Some(first), Some(last)) = (code, lines.first(), lines.last()) else { return };
        let span = Span::new(code.range.start, code.range.end);
        let ending = Ending { body: last.end, end: span.end as usize, noted: true };
        self.push_region(span.start as usize, first.start, ending, Setting::Display);
    }

    fn fenced_conventions(&mut self) {
        let code = self.next_code.checked_sub(1).and_then(|index| self.outline.code.get(index));
        let Some(span) = code.map(|code| Span::new(code.range.start, code.range.end)) else { return };
        let mut sentences = Vec::new();
        for line in self.code_lines() {
            push_sentences(self.text, Span::new(line.start, line.end), &mut sentences);
        }
        self.scan.directives.push(Directive { span, sentences });
    }

    fn dollar(&mut self) {
        let start = self.at;
        if self.bytes.get(start + 1) == Some(&b'$') {
            self.formula(start, start + 2, Closer::Dollars, Setting::Display);
        } else if !self.dollars_around_code(start) {
            self.formula(start, start + 1, Closer::Dollar, Setting::Inline);
        }
    }

    /// A code span between dollars is a formula too.
    fn dollars_around_code(&mut self, start: usize) -> bool {
        let Some(code) = self.outline.code.get(self.next_code) else { return false };
        let Range { start: from, end } = code.range;
        if code.kind != CodeKind::Span || from != start + 1 || self.bytes.get(end) != Some(&b'$') {
            return false;
        }
        let marks = self.bytes.get(from..end).unwrap_or_default().iter().take_while(|byte| **byte == b'`').count();
        self.next_code += 1;
        self.at = end + 1;
        let ending = Ending { body: end - marks, end: end + 1, noted: false };
        self.push_region(start, from + marks, ending, Setting::Inline);
        true
    }

    /// A formula from its opening delimiter at `start`, whose body starts at `from`.
    fn formula(&mut self, start: usize, from: usize, closer: Closer, setting: Setting) {
        self.at = from;
        if closer == Closer::Dollar && self.bytes.get(from).is_none_or(u8::is_ascii_whitespace) {
            return;
        }
        let limit = self.limit(from, setting);
        let crosses = matches!(closer, Closer::Environment(_));
        let Self { text, wrappers, patience, .. } = self;
        let outcome = patience.find_end(start, |nested| {
            let manner = Manner { crosses, comments: false, nested };
            find_end(text, from, limit, &closer, manner, wrappers)
        });
        let Outcome::Found(ending) = outcome else { return };
        if self.is_formula(from, ending, &closer) {
            self.at = ending.end.max(from);
            self.push_region(start, from, ending, setting);
        } else {
            self.patience.lose(ending.end);
        }
    }

    /// Where a formula must have ended: the next fence, and for one in the line also the next block or code span.
    fn limit(&mut self, from: usize, setting: Setting) -> usize {
        let outline = &self.outline;
        self.next_fence = not_before(&outline.fences, self.next_fence, from);
        self.next_break = not_before(&outline.breaks, self.next_break, from);
        let fence = outline.fences.get(self.next_fence).copied();
        let inline = setting == Setting::Inline;
        let code = outline.code.get(self.next_code..).unwrap_or_default().iter().map(|code| code.range.start);
        let code = code.filter(|_| inline).find(|start| *start >= from);
        let block = outline.breaks.get(self.next_break).copied().filter(|_| inline);
        [fence, code, block].into_iter().flatten().min().unwrap_or(self.bytes.len())
    }

    /// Whether what stands between the delimiters is mathematics by the manners of Markdown.
    fn is_formula(&self, from: usize, ending: Ending, closer: &Closer) -> bool {
        let body = self.bytes.get(from..ending.body).unwrap_or_default();
        match closer {
            Closer::Dollar => {
                let digit = self.bytes.get(ending.end).is_some_and(u8::is_ascii_digit);
                !digit && !body.last().is_none_or(u8::is_ascii_whitespace)
            }
            Closer::Dollars => !body.iter().all(u8::is_ascii_whitespace),
            Closer::Parenthesis | Closer::Bracket => {
                body.iter().any(|byte| matches!(byte, b'\\' | b'_' | b'^' | b'=' | b'+' | b'<' | b'>' | b'{'))
            }
            Closer::Environment(_) => true,
        }
    }

    fn push_region(&mut self, start: usize, from: usize, ending: Ending, setting: Setting) {
        let body = Span::new(from, ending.body);
        let mut holes = self.quotation_marks(body);
        if ending.noted {
            holes.extend(self.definitions_in(body));
            holes.sort_unstable();
        }
        if !holes.is_empty() && self.is_blank_without(body, &holes) {
            return;
        }
        self.pass_headings(start);
        let heading = self.scan.headings.len().checked_sub(1).map(|last| last as u32);
        self.scan.regions.push(Region { span: Span::new(start, ending.end), body, setting, heading, holes });
    }

    /// Takes the headings up to a place; a line that a formula holds is none.
    fn pass_headings(&mut self, place: usize) {
        while let Some(heading) = self.outline.headings.get(self.next_heading) {
            let start = heading.span.start;
            if start as usize > place {
                return;
            }
            self.next_heading += 1;
            let held = self.scan.regions.last().is_some_and(|last| last.span.start < start && start < last.span.end);
            if !held {
                self.scan.headings.push(heading.clone());
            }
        }
    }

    /// The `>` at the starts of lines of a formula in a block quotation.
    fn quotation_marks(&self, body: Span) -> Vec<Span> {
        if !body.of(self.text).contains('\n') {
            return Vec::new();
        }
        let line_start =
            self.text.get(..body.start as usize).map_or(0, |before| before.rfind('\n').map_or(0, |at| at + 1));
        let quoted = self.bytes.get(line_start..).unwrap_or_default().iter().find(|byte| **byte != b' ') == Some(&b'>');
        if !quoted {
            return Vec::new();
        }
        let mut marks = Vec::new();
        for (end, _) in body.of(self.text).match_indices('\n') {
            let start = body.start as usize + end + 1;
            let line = self.text.get(start..body.end as usize).unwrap_or_default();
            let length = line.bytes().take_while(|byte| matches!(byte, b' ' | b'>')).count();
            let mark = line.get(..length).map_or("", str::trim_end);
            if !mark.is_empty() {
                marks.push(Span::new(start, start + mark.len()));
            }
        }
        marks
    }

    /// Reads the definitions in a formula and puts them into force.
    fn definitions_in(&mut self, body: Span) -> Vec<Span> {
        let mut spans = Vec::new();
        let mut at = body.start as usize;
        let end = body.end as usize;
        while let Some(step) = self.bytes.get(at..end).and_then(|rest| rest.iter().position(|byte| *byte == b'\\')) {
            at += step;
            let mut cursor = Cursor::new(self.text, at);
            let defined = cursor.control().filter(|name| defines(name)).and_then(|_| self.define(at, end));
            at = defined.map_or(cursor.at.max(at + 1), |span| span.end as usize);
            spans.extend(defined);
        }
        spans
    }

    fn is_blank_without(&self, body: Span, holes: &[Span]) -> bool {
        let mut from = body.start as usize;
        for hole in holes.iter().chain([&Span::new(body.end as usize, body.end as usize)]) {
            if !self.text.get(from..hole.start as usize).unwrap_or_default().trim().is_empty() {
                return false;
            }
            from = hole.end as usize;
        }
        true
    }

    /// Reads a definition that is understood and ends before a limit, and puts it into force.
    fn define(&mut self, start: usize, limit: usize) -> Option<Span> {
        if self.patience.is_spent() {
            return None;
        }
        let found = read_definition(self.text.get(..limit)?, start, self.wrappers.macros());
        let found = self.patience.count(found)?;
        let span = found.span;
        self.wrappers.define(&found);
        self.scan.definitions.push(found);
        Some(span)
    }

    fn control(&mut self) {
        let start = self.at;
        let mut cursor = Cursor::new(self.text, start);
        let name = cursor.control().unwrap_or_default();
        self.at = cursor.at.max(start + 1);
        match name {
            "(" => self.formula(start, cursor.at, Closer::Parenthesis, Setting::Inline),
            "[" => self.formula(start, cursor.at, Closer::Bracket, Setting::Display),
            "begin" => self.begin(start),
            _ if defines(name) => {
                self.at = self.define(start, self.bytes.len()).map_or(self.at, |span| span.end as usize)
            }
            _ => {}
        }
    }

    fn begin(&mut self, start: usize) {
        let Some((name, next)) = environment_name(self.text, self.at) else { return };
        let Some(mathematics) = mathematics(name) else { return };
        let mut cursor = Cursor::new(self.text, next);
        for _ in 0..mathematics.groups {
            cursor.group();
        }
        self.formula(start, cursor.at, Closer::Environment(name.to_owned()), mathematics.setting);
    }

    fn angle(&mut self) {
        let start = self.at;
        self.at += 1;
        let rest = self.text.get(self.at..).unwrap_or_default();
        if let Some(said) = rest.strip_prefix("!--") {
            if let Some(end) = self.after("-->", start + 4, 0) {
                self.comment(start, said.len(), end);
            }
            return;
        }
        let name_length = rest.bytes().take_while(u8::is_ascii_alphabetic).take(10).count();
        let name = rest.get(..name_length).unwrap_or_default();
        let raw = RAW_ELEMENTS.iter().position(|element| element.eq_ignore_ascii_case(name));
        let Some(raw) = raw.filter(|_| matches!(rest.as_bytes().get(name_length), Some(b'>' | b' ' | b'\n'))) else {
            return;
        };
        let close = format!("</{name}");
        self.at = self.after(&close, self.at, raw as u32 + 1).unwrap_or(self.at);
    }

    /// One past the next `close`; it is looked for no more once it did not come.
    fn after(&mut self, close: &str, from: usize, bit: u32) -> Option<usize> {
        if self.unclosed & (1 << bit) != 0 {
            return None;
        }
        let found = self.text.get(from..).and_then(|rest| rest.find(close)).map(|at| from + at + close.len());
        self.unclosed |= u32::from(found.is_none()) << bit;
        found
    }

    /// An HTML comment from `start` to `end`, which may be a directive.
    fn comment(&mut self, start: usize, rest: usize, end: usize) {
        self.at = end;
        let from = self.text.len() - rest;
        let inside = self.text.get(from..end - 3).unwrap_or_default();
        if let Some(said) = inside.trim_start().strip_prefix(MARK) {
            let mut sentences = Vec::new();
            let from = end - 3 - said.len();
            push_sentences(self.text, Span::new(from, end - 3), &mut sentences);
            self.scan.directives.push(Directive { span: Span::new(start, end), sentences });
        }
    }
}

/// The first index from `index` on whose place is not before `from`.
fn not_before(places: &[usize], index: usize, from: usize) -> usize {
    let behind = places.get(index..).unwrap_or_default().iter().take_while(|place| **place < from).count();
    index + behind
}

fn is_telling(byte: u8) -> bool {
    matches!(byte, b'\\' | b'$' | b'<')
}

#[cfg(test)]
mod tests;
