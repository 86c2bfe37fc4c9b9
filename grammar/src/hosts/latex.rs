//! The LaTeX host: one pass over the bytes of a `.tex`, `.ltx` or `.sty` file.
//!
//! Running text is skipped to the next backslash, dollar or percent sign; everything else has no say in where
//! mathematics stands (braces do not, so that `\textbf{.. $x$ ..}` needs no care). A formula's end is found by
//! `body.rs`, the author's own delimiters by `wrappers.rs`, what a command means to the scan by `vocabulary.rs`.
//!
//! Traps: in a file with `\documentclass` nothing before `\begin{document}` is mathematics, but definitions, parts and
//! directives there count; bodies of definitions are skipped; a dollar after a parenthesis in a picture computes a
//! coordinate; a definition holds from its end on.

use super::body::{Ending, Manner, Outcome, find_end};
use super::closer::{Closer, environment_name};
use super::patience::Patience;
use super::references::{read_references, root_in_comment};
use super::vocabulary::{Command, command, is_listing, is_picture, mathematics};
use super::wrappers::{Role, Wrappers};
use super::{Heading, Region, Scan, Setting, directives};
use crate::macros::cursor::{Cursor, line_end};
use crate::macros::{Definition, Macros, defines, defines_environment, read_definition, read_environment};
use crate::span::Span;

/// Finds regions, definitions, references, directives and headings.
pub(super) fn scan(text: &str, macros: &Macros) -> Scan {
    let mut scanner = Scanner {
        text,
        bytes: text.as_bytes(),
        at: 0,
        scan: Scan::default(),
        wrappers: Wrappers::new(macros),
        preamble: false,
        pictures: 0,
        patience: Patience::default(),
    };
    scanner.run();
    scanner.scan
}

struct Scanner<'t> {
    text: &'t str,
    bytes: &'t [u8],
    at: usize,
    scan: Scan,
    wrappers: Wrappers,
    /// Between `\documentclass` and `\begin{document}`.
    preamble: bool,
    /// Open pictures.
    pictures: u32,
    patience: Patience,
}

impl Scanner<'_> {
    fn run(&mut self) {
        while let Some(step) = self.bytes.get(self.at..).and_then(|rest| rest.iter().position(|b| is_telling(*b))) {
            self.at += step;
            match self.bytes.get(self.at) {
                Some(b'$') => self.dollar(),
                Some(b'%') => self.comment(),
                _ => self.control(),
            }
        }
    }

    fn comment(&mut self) {
        let end = line_end(self.bytes, self.at);
        if let Some(directive) = directives::in_comment(self.text, self.at) {
            self.at = directive.span.end as usize;
            self.scan.directives.push(directive);
            return;
        }
        self.scan.references.extend(root_in_comment(self.text, self.at));
        self.at = end;
    }

    fn dollar(&mut self) {
        if self.pictures > 0 && self.is_coordinate() {
            return;
        }
        if self.bytes.get(self.at + 1) == Some(&b'$') {
            self.formula(self.at, self.at + 2, Closer::Dollars, Setting::Display);
        } else {
            self.formula(self.at, self.at + 1, Closer::Dollar, Setting::Inline);
        }
    }

    /// Passes over `($(a)!0.5!(b)$)`.
    fn is_coordinate(&mut self) -> bool {
        let before = self.bytes.get(..self.at).unwrap_or_default().iter().rev().find(|byte| **byte != b' ');
        if before != Some(&b'(') {
            return false;
        }
        let inside = self.at + 1;
        let rest = self.bytes.get(inside..).unwrap_or_default();
        let close = rest.iter().position(|byte| *byte == b'$').unwrap_or(rest.len());
        let after = rest.get(close + 1..).unwrap_or_default().iter().find(|byte| **byte != b' ');
        self.at = if after == Some(&b')') { inside + close + 1 } else { inside };
        true
    }

    /// A formula from its opening delimiter at `start`, whose body starts at `from`.
    fn formula(&mut self, start: usize, from: usize, closer: Closer, setting: Setting) {
        let Self { text, bytes, wrappers, patience, .. } = self;
        let outcome = patience.find_end(start, |nested| {
            let manner = Manner { crosses: true, comments: true, nested };
            find_end(text, from, bytes.len(), &closer, manner, wrappers)
        });
        match outcome {
            Outcome::Found(ending) => {
                self.at = ending.end.max(from);
                self.push_region(start, from, ending, setting);
            }
            Outcome::Lost(_) => self.at = from,
        }
    }

    fn push_region(&mut self, start: usize, from: usize, ending: Ending, setting: Setting) {
        let body = Span::new(from, ending.body);
        let holes = if ending.noted { self.notes(body) } else { Vec::new() };
        if !self.preamble {
            let span = Span::new(start, ending.end);
            let heading = self.scan.headings.len().checked_sub(1).map(|last| last as u32);
            self.scan.regions.push(Region { span, body, setting, heading, holes });
        }
    }

    /// Collects the directives and definitions inside a formula; the definitions are no part of it.
    fn notes(&mut self, body: Span) -> Vec<Span> {
        let mut holes = Vec::new();
        let mut at = body.start as usize;
        let end = body.end as usize;
        while let Some(step) = self.bytes.get(at..end).and_then(|rest| rest.iter().position(|b| is_telling(*b))) {
            at += step;
            let mut cursor = Cursor::new(self.text, at);
            match self.bytes.get(at) {
                Some(b'%') => {
                    let directive = directives::in_comment(self.text, at);
                    at = directive.as_ref().map_or_else(|| line_end(self.bytes, at), |found| found.span.end as usize);
                    self.scan.directives.extend(directive);
                }
                Some(b'\\') => {
                    let defined = cursor.control().filter(|name| defines(name)).and_then(|_| self.define(at, end));
                    at = defined.map_or(cursor.at.max(at + 1), |span| span.end as usize);
                    holes.extend(defined);
                }
                _ => at += 1,
            }
        }
        holes
    }

    fn control(&mut self) {
        let start = self.at;
        let mut cursor = Cursor::new(self.text, start);
        let Some(name) = cursor.control() else {
            self.at += 1;
            return;
        };
        self.at = cursor.at;
        match name {
            "(" => self.formula(start, cursor.at, Closer::Parenthesis, Setting::Inline),
            "[" => self.formula(start, cursor.at, Closer::Bracket, Setting::Display),
            _ => match command(name) {
                Some(command) => self.command(command, start),
                None if defines(name) => self.definition(start),
                None if defines_environment(name) => self.environment_definition(start),
                None => self.wrapper(name, start),
            },
        }
    }

    /// A known command at `start`; the scan stands after its name.
    fn command(&mut self, command: Command, start: usize) {
        match command {
            Command::Begin => self.begin(start),
            Command::End => self.end(),
            Command::Verb => self.at = after_verb(self.text, self.at),
            Command::InlineListing { language } => self.inline_listing(language),
            Command::Heading(level) => self.heading(level, start),
            Command::SkippedBranch => self.at = after_skipped_branch(self.text, self.at),
            Command::Opaque => self.opaque(),
            Command::Ensure => self.ensure(start),
            Command::Break => {}
            Command::Class | Command::Package | Command::Part(_) | Command::PartOfFolder => {
                self.reference(command, start);
            }
        }
    }

    fn reference(&mut self, command: Command, start: usize) {
        if command == Command::Class {
            self.scan.has_class = true;
            self.preamble = true;
        }
        match self.attempt(|scanner| read_references(scanner.text, start, scanner.at, command)) {
            Some((references, end)) => {
                self.at = end;
                self.scan.references.extend(references);
            }
            None => self.opaque(),
        }
    }

    /// Reads something that looks ahead, unless too much of that has failed.
    fn attempt<T>(&mut self, read: impl FnOnce(&Self) -> Option<T>) -> Option<T> {
        if self.patience.is_spent() {
            return None;
        }
        let found = read(self);
        self.patience.count(found)
    }

    /// Passes over an optional and a braced argument, if they stand there.
    fn opaque(&mut self) {
        let mut cursor = Cursor::new(self.text, self.at);
        cursor.eat(b'*');
        if !matches!(cursor.peek(), Some(b'{' | b'[')) {
            return;
        }
        // The optional argument of a citation is text: only a file's options are passed over with it.
        let optional = cursor.peek() == Some(b'[');
        let end = self.attempt(|_| {
            let options = if optional { cursor.bracket()?.of(cursor.text) } else { "" };
            (!options.contains('$')).then_some(())?;
            cursor.typed_group().or_else(|| cursor.group()).map(|_| cursor.at)
        });
        self.at = end.unwrap_or(self.at);
    }

    fn ensure(&mut self, start: usize) {
        let mut cursor = Cursor::new(self.text, self.at);
        if let Some(body) = self.attempt(|_| cursor.group()) {
            self.argument_region(start, body, cursor.at, Setting::Inline);
        }
    }

    /// A formula that is the argument of a command.
    fn argument_region(&mut self, start: usize, body: Span, end: usize, setting: Setting) {
        self.at = end;
        let ending = Ending { body: body.end as usize, end, noted: true };
        self.push_region(start, body.start as usize, ending, setting);
    }

    fn heading(&mut self, level: u8, start: usize) {
        let mut cursor = Cursor::new(self.text, self.at);
        cursor.eat(b'*');
        let title = self.attempt(|_| {
            let _short = cursor.bracket();
            cursor.group()
        });
        if title.is_some() && !self.preamble {
            self.scan.headings.push(Heading { span: Span::new(start, cursor.at), level });
        }
    }

    /// `\lstinline[..]|..|`, `\mintinline{..}|..|`, or with braces for the bars.
    fn inline_listing(&mut self, language: bool) {
        let mut cursor = Cursor::new(self.text, self.at);
        let braced = self.attempt(|_| {
            if cursor.peek() == Some(b'[') {
                cursor.bracket()?;
            }
            if language {
                cursor.group()?;
            }
            let braced = cursor.peek() == Some(b'{');
            if braced {
                cursor.group()?;
            }
            Some(braced)
        });
        match braced {
            Some(true) => self.at = cursor.at,
            Some(false) => self.at = after_verb(self.text, cursor.at),
            None => {}
        }
    }

    fn begin(&mut self, start: usize) {
        let Some((name, next)) = environment_name(self.text, self.at) else { return };
        self.at = next;
        if name == "document" {
            self.preamble = false;
        } else if is_listing(name) {
            self.at = after_listing(self.text, next, name);
        } else if is_picture(name) {
            self.pictures += 1;
        } else if let Some(mathematics) = mathematics(name) {
            let from = self.after_environment_arguments(next, mathematics.groups);
            self.formula(start, from, Closer::Environment(name.to_owned()), mathematics.setting);
        } else {
            self.begin_own(name, start);
        }
    }

    /// An environment that the author may have defined.
    fn begin_own(&mut self, name: &str, start: usize) {
        match self.wrappers.role(name, start) {
            Some(Role::Opens { setting, .. }) => {
                let mut cursor = Cursor::new(self.text, self.at);
                self.wrappers.arguments(name, &mut cursor, None);
                self.formula(start, cursor.at, Closer::Environment(name.to_owned()), setting);
            }
            Some(Role::Listing) => self.at = after_listing(self.text, self.at, name),
            _ => {}
        }
    }

    /// After the options and the braced arguments of an environment of mathematics.
    fn after_environment_arguments(&mut self, next: usize, groups: u8) -> usize {
        let mut cursor = Cursor::new(self.text, next);
        for _ in 0..groups {
            // Directly after the name only: a formula may begin with a commutator.
            if cursor.peek() == Some(b'[') {
                self.attempt(|_| cursor.bracket());
            }
            self.attempt(|_| cursor.group());
        }
        cursor.at
    }

    fn end(&mut self) {
        let Some((name, next)) = environment_name(self.text, self.at) else { return };
        self.at = next;
        if name == "document" {
            self.at = self.bytes.len();
        } else if is_picture(name) {
            self.pictures = self.pictures.saturating_sub(1);
        }
    }

    fn wrapper(&mut self, name: &str, start: usize) {
        match self.wrappers.role(name, start) {
            Some(Role::Opens { closer, setting }) => {
                let mut cursor = Cursor::new(self.text, self.at);
                self.wrappers.arguments(name, &mut cursor, None);
                self.formula(start, cursor.at, closer, setting);
            }
            Some(Role::Wraps { argument, setting }) => {
                let mut cursor = Cursor::new(self.text, self.at);
                let body = self.attempt(|scanner| {
                    let span = scanner.wrappers.arguments(name, &mut cursor, Some(argument))?;
                    (scanner.bytes.get((span.start as usize).checked_sub(1)?) == Some(&b'{')).then_some(span)
                });
                if let Some(body) = body {
                    self.argument_region(start, body, cursor.at, setting);
                }
            }
            Some(Role::Closes | Role::Listing) | None => {}
        }
    }

    fn definition(&mut self, start: usize) {
        match self.define(start, self.bytes.len()) {
            Some(span) => self.at = span.end as usize,
            None => self.skip_arguments(),
        }
    }

    /// Reads a definition that is understood and ends before a limit, and puts it into force.
    fn define(&mut self, start: usize, limit: usize) -> Option<Span> {
        let found =
            self.attempt(|scanner| read_definition(scanner.text.get(..limit)?, start, scanner.wrappers.macros()))?;
        let span = found.span;
        self.put_into_force(found);
        Some(span)
    }

    fn put_into_force(&mut self, definition: Definition) {
        self.wrappers.define(&definition);
        self.scan.definitions.push(definition);
    }

    fn environment_definition(&mut self, start: usize) {
        match self.attempt(|scanner| read_environment(scanner.text, start)) {
            Some(definitions) => {
                self.at = definitions.first().map_or(self.at, |begin| begin.span.end as usize);
                definitions.into_iter().for_each(|definition| self.put_into_force(definition));
            }
            None => self.skip_arguments(),
        }
    }

    /// Passes over the name, the options and the bodies of a definition that is not understood.
    fn skip_arguments(&mut self) {
        let mut cursor = Cursor::new(self.text, self.at);
        cursor.eat_after_space(b'*');
        cursor.skip_space();
        cursor.control();
        self.at = cursor.at;
        while matches!(cursor.peek(), Some(b'[' | b'{'))
            && self.attempt(|_| cursor.bracket().or_else(|| cursor.group())).is_some()
        {
            self.at = cursor.at;
        }
    }
}

fn is_telling(byte: u8) -> bool {
    matches!(byte, b'\\' | b'$' | b'%')
}

/// After `|..|` on one line; where it stands if there is no such thing.
fn after_verb(text: &str, at: usize) -> usize {
    let bytes = text.as_bytes();
    let start = at + usize::from(bytes.get(at) == Some(&b'*'));
    let Some(mark) = bytes.get(start).filter(|byte| byte.is_ascii_punctuation() || byte.is_ascii_digit()) else {
        return at;
    };
    let rest = bytes.get(start + 1..).unwrap_or_default();
    match rest.iter().position(|byte| byte == mark || matches!(byte, b'\n' | b'\r')) {
        Some(length) if rest.get(length) == Some(mark) => start + length + 2,
        _ => at,
    }
}

/// After `\end{name}`, or the end of the text: nothing in a listing is read, closed or not.
fn after_listing(text: &str, at: usize, name: &str) -> usize {
    let end = format!("\\end{{{name}}}");
    let rest = text.get(at..).unwrap_or_default();
    rest.find(&end).map_or(text.len(), |length| at + length + end.len())
}

/// After the `\fi` or `\else` of an `\iffalse`, counting inner conditionals; the end of the text as in TeX.
fn after_skipped_branch(text: &str, at: usize) -> usize {
    let bytes = text.as_bytes();
    let mut depth = 0_u32;
    let mut cursor = Cursor::new(text, at);
    while let Some(step) = bytes.get(cursor.at..).and_then(|rest| rest.iter().position(|b| matches!(b, b'\\' | b'%'))) {
        cursor.at += step;
        if cursor.peek() == Some(b'%') {
            cursor.at = line_end(bytes, cursor.at);
            continue;
        }
        match cursor.control() {
            Some("fi") if depth == 0 => return cursor.at,
            Some("else") if depth == 0 => return cursor.at,
            Some("fi") => depth -= 1,
            // Not conditionals of TeX: they take braces.
            Some("iff" | "ifthenelse" | "ifdef" | "ifdefined@" | "ifblank" | "ifstrequal" | "ifstrempty") => {}
            Some(name) if name.starts_with("if") => depth += 1,
            Some(_) => {}
            None => cursor.at += 1,
        }
    }
    text.len()
}

#[cfg(test)]
mod tests;
