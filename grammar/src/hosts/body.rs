//! The end of a formula: from its opening delimiter to the matching one, or to where it must have ended.
//!
//! The one idea: a formula half typed must not swallow the text after it. So a search has stops, things that no
//! formula holds (a heading, a list, another display). An inline formula that meets a stop or a paragraph's end was
//! none; a display ends there at the latest, and at its first blank line if it had one.
//!
//! Dollars inside `\text{..}` belong to the formula around it. When that view finds no end (an unclosed `\text{`),
//! the caller asks again with `nested` off: then the next dollar closes.
//!
//! Time: after a blank line every opening of a display is a stop, so that what one search looks at in vain, the
//! next does not look at again.

use super::closer::{Closer, LONGEST_NAME, environment_name};
use super::vocabulary::{Command, command, is_listing, is_structure, mathematics, takes_text};
use super::wrappers::{Role, Wrappers};
use crate::macros::cursor::{Cursor, after_line_end, blank_line_follows, line_end};
use crate::macros::defines;

/// How the host lets its formulas run.
#[derive(Clone, Copy, Debug)]
pub(super) struct Manner {
    /// A display may hold a blank line, and an unclosed one still is a formula.
    pub crosses: bool,
    /// `%` starts a comment.
    pub comments: bool,
    /// Dollars inside `\text{..}` are inner ones.
    pub nested: bool,
}

/// Where a formula ends.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Ending {
    /// One past the body.
    pub body: usize,
    /// One past the closing delimiter.
    pub end: usize,
    /// Whether a comment or a definition stands in the body, which the caller may want to look at.
    pub noted: bool,
}

/// What a search came to.
pub(super) enum Outcome {
    /// A formula.
    Found(Ending),
    /// None; the text was looked at up to here.
    Lost(usize),
}

/// Inner environments that are remembered; deeper ones are passed over.
const DEEPEST: usize = 100;

/// What is open inside the formula.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Open {
    Group,
    Text,
    Dollar,
    Parenthesis,
}

/// What one token does to the search.
enum Step {
    On(usize),
    Close(usize, usize),
    Stop(usize),
}

/// Finds the end of the formula whose body starts at `from`; it ends at `limit` at the latest.
pub(super) fn find_end(
    text: &str,
    from: usize,
    limit: usize,
    closer: &Closer,
    manner: Manner,
    wrappers: &mut Wrappers,
) -> Outcome {
    let mut search = Search {
        text,
        bytes: text.as_bytes().get(..limit).unwrap_or(text.as_bytes()),
        closer,
        manner,
        open: Vec::new(),
        inner: Vec::new(),
        inner_dollars: 0,
        text_at: usize::MAX,
        blank: None,
        noted: false,
    };
    search.run(from, wrappers)
}

struct Search<'s> {
    text: &'s str,
    /// The text up to the limit.
    bytes: &'s [u8],
    closer: &'s Closer,
    manner: Manner,
    open: Vec<Open>,
    inner: Vec<&'s str>,
    /// How many of `open` are dollars or parentheses of mathematics inside text.
    inner_dollars: usize,
    /// Where a brace would open the argument of a command that takes text.
    text_at: usize,
    /// The first blank line's line end.
    blank: Option<usize>,
    noted: bool,
}

impl Search<'_> {
    fn run(&mut self, from: usize, wrappers: &mut Wrappers) -> Outcome {
        let mut at = from;
        while let Some(step) = self.bytes.get(at..).and_then(|rest| rest.iter().position(|b| is_telling(*b))) {
            at += step;
            let step = match self.bytes.get(at) {
                Some(b'\\') => self.control(at, wrappers),
                Some(b'$') => self.dollar(at),
                Some(b'{') => self.open_group(at),
                Some(b'}') => self.close_group(at),
                Some(b'%') => self.comment(at),
                _ => self.line_end(at),
            };
            match step {
                Step::On(next) => at = next,
                Step::Close(body, end) => return Outcome::Found(Ending { body, end, noted: self.noted }),
                Step::Stop(place) => return self.stopped(place),
            }
        }
        self.stopped(self.bytes.len())
    }

    /// The matching delimiter will not come: a display ends at its first blank line, anything else was none.
    fn stopped(&self, place: usize) -> Outcome {
        if self.closer.is_inline() || !self.manner.crosses {
            return Outcome::Lost(place);
        }
        let body = self.blank.unwrap_or(place);
        // A lone dollar where `$$` should stand was meant to close.
        let dollar = self.blank.is_none() && self.bytes.get(place) == Some(&b'$') && *self.closer == Closer::Dollars;
        Outcome::Found(Ending { body, end: body + usize::from(dollar), noted: self.noted })
    }

    fn in_text(&self) -> bool {
        self.manner.nested && self.open.last() == Some(&Open::Text)
    }

    fn dollar(&mut self, at: usize) -> Step {
        let double = self.bytes.get(at + 1) == Some(&b'$');
        if self.inner_dollars > 0 {
            self.close_inner();
            return Step::On(at + 1);
        }
        if self.in_text() {
            return self.open_inner(Open::Dollar, at + 1);
        }
        match self.closer {
            Closer::Dollar => Step::Close(at, at + 1),
            Closer::Dollars if double => self.close_dollars(at),
            // Inside a group of a display an unknown command may take text.
            _ if self.manner.nested && !double && self.blank.is_none() && !self.open.is_empty() => {
                if self.closer.is_inline() { Step::Stop(at) } else { self.open_inner(Open::Dollar, at + 1) }
            }
            _ => Step::Stop(at),
        }
    }

    /// `$$` after a blank line closes only what reads as a formula; else it opens the next one.
    fn close_dollars(&self, at: usize) -> Step {
        let tail = self.blank.map(|blank| self.text.get(blank..at).unwrap_or_default());
        if tail.is_some_and(reads_as_prose) { Step::Stop(at) } else { Step::Close(at, at + 2) }
    }

    fn open_inner(&mut self, what: Open, next: usize) -> Step {
        self.open.push(what);
        self.inner_dollars += 1;
        Step::On(next)
    }

    /// Closes the innermost mathematics inside text, with the groups left open in it.
    fn close_inner(&mut self) {
        while let Some(open) = self.open.pop() {
            if matches!(open, Open::Dollar | Open::Parenthesis) {
                self.inner_dollars -= 1;
                return;
            }
        }
    }

    fn open_group(&mut self, at: usize) -> Step {
        let text = self.text_at == at || self.in_text();
        self.open.push(if text { Open::Text } else { Open::Group });
        Step::On(at + 1)
    }

    fn close_group(&mut self, at: usize) -> Step {
        if matches!(self.open.last(), Some(Open::Dollar | Open::Parenthesis)) {
            self.close_inner();
        }
        if self.open.pop() == Some(Open::Text) {
            // The next argument of the same command takes text too.
            self.text_at = at + 1;
        }
        Step::On(at + 1)
    }

    fn comment(&mut self, at: usize) -> Step {
        if !self.manner.comments {
            return Step::On(at + 1);
        }
        self.noted = true;
        Step::On(line_end(self.bytes, at))
    }

    fn line_end(&mut self, at: usize) -> Step {
        if blank_line_follows(self.bytes, at) {
            if self.closer.is_inline() || !self.manner.crosses {
                return Step::Stop(at);
            }
            self.blank.get_or_insert(at);
        }
        Step::On(after_line_end(self.bytes, at))
    }

    fn control(&mut self, at: usize, wrappers: &mut Wrappers) -> Step {
        let mut cursor = Cursor::new(self.text, at);
        let Some(name) = cursor.control() else { return Step::On(at + 1) };
        let after = cursor.at;
        match name {
            "(" | ")" | "[" | "]" => return self.bracket(name, at, after),
            _ if after == at + 2 && !name.as_bytes().iter().all(u8::is_ascii_alphabetic) => return Step::On(after),
            _ => {}
        }
        match command(name) {
            Some(Command::Begin) => self.begin(at, after, wrappers),
            Some(Command::End) => self.end(at, after, wrappers),
            Some(Command::Heading(_) | Command::Class) => Step::Stop(at),
            Some(Command::Break) if self.in_text() => Step::On(after),
            Some(Command::Break) => self.stop_unless_display(at, after),
            Some(_) => Step::On(after),
            None if takes_text(name) => {
                self.text_at = text_argument(self.bytes, after);
                Step::On(after)
            }
            None if defines(name) => {
                self.noted = true;
                Step::On(after)
            }
            None => self.wrapper(name, at, after, wrappers),
        }
    }

    /// What no inline formula holds, and no display after a blank line.
    fn stop_unless_display(&self, at: usize, after: usize) -> Step {
        if self.closer.is_inline() || self.blank.is_some() { Step::Stop(at) } else { Step::On(after) }
    }

    fn bracket(&mut self, name: &str, at: usize, after: usize) -> Step {
        match (name, self.closer) {
            (")", Closer::Parenthesis) | ("]", Closer::Bracket) if self.inner_dollars == 0 => Step::Close(at, after),
            ("(", _) if self.in_text() => self.open_inner(Open::Parenthesis, after),
            (")", _) if self.inner_dollars > 0 => {
                self.close_inner();
                Step::On(after)
            }
            ("]", Closer::Bracket) => Step::Close(at, after),
            ("(", Closer::Parenthesis) | ("[", Closer::Bracket) => Step::Stop(at),
            _ => self.stop_unless_display(at, after),
        }
    }

    fn begin(&mut self, at: usize, after: usize, wrappers: &mut Wrappers) -> Step {
        let Some((name, next)) = environment_name(self.text, after) else { return Step::On(after) };
        if matches!(self.closer, Closer::Environment(own) if own == name) {
            return Step::Stop(at);
        }
        let opens = mathematics(name).is_some() || is_structure(name) || is_listing(name);
        if (opens || wrappers.role(name, at).is_some())
            && let Step::Stop(at) = self.stop_unless_display(at, next)
        {
            return Step::Stop(at);
        }
        if self.inner.len() < DEEPEST {
            self.inner.push(name);
        }
        Step::On(next)
    }

    fn end(&mut self, at: usize, after: usize, wrappers: &mut Wrappers) -> Step {
        let Some((name, next)) = environment_name(self.text, after) else { return Step::On(after) };
        if matches!(self.closer, Closer::Environment(own) if own == name) {
            return Step::Close(at, next);
        }
        if let Some(depth) = self.inner.iter().rposition(|inner| *inner == name) {
            self.inner.truncate(depth);
            return Step::On(next);
        }
        let displays = mathematics(name).is_some() || matches!(wrappers.role(name, at), Some(Role::Opens { .. }));
        match self.closer {
            // The author mixed two names, or closes with one what a macro opened with the other.
            Closer::Environment(_) | Closer::Bracket if displays && self.blank.is_none() => Step::Close(at, next),
            _ if self.inner.len() == DEEPEST => Step::On(next),
            _ => Step::Stop(at),
        }
    }

    fn wrapper(&mut self, name: &str, at: usize, after: usize, wrappers: &mut Wrappers) -> Step {
        match wrappers.role(name, at) {
            Some(Role::Closes) if !self.closer.is_inline() && *self.closer != Closer::Dollars => Step::Close(at, after),
            Some(Role::Opens { closer, .. }) if closer == Closer::Dollars && *self.closer == Closer::Dollars => {
                Step::Close(at, after)
            }
            Some(Role::Opens { .. }) => self.stop_unless_display(at, after),
            _ => Step::On(after),
        }
    }
}

fn is_telling(byte: u8) -> bool {
    matches!(byte, b'\\' | b'$' | b'{' | b'}' | b'%' | b'\n' | b'\r')
}

/// Where the braces of a text argument would open: after a star and an optional argument on the same line.
fn text_argument(bytes: &[u8], after: usize) -> usize {
    let rest = bytes.get(after..(after + LONGEST_NAME).min(bytes.len())).unwrap_or_default();
    let mut at = rest.iter().take_while(|byte| matches!(byte, b'*' | b' ')).count();
    while rest.get(at) == Some(&b'[') {
        at += rest.get(at..).and_then(|left| left.iter().position(|b| *b == b']')).map_or(rest.len(), |end| end + 1);
    }
    after + at
}

/// Whether a text holds three plain words in a row outside of braces.
fn reads_as_prose(text: &str) -> bool {
    let (mut depth, mut words) = (0_usize, 0);
    for word in text.split_ascii_whitespace() {
        let plain =
            depth == 0 && word.len() > 1 && word.trim_end_matches([',', '.']).bytes().all(|b| b.is_ascii_alphabetic());
        words = if plain { words + 1 } else { 0 };
        if words == 3 {
            return true;
        }
        for byte in word.bytes() {
            depth = if byte == b'{' { depth + 1 } else { depth.saturating_sub(usize::from(byte == b'}')) };
        }
    }
    false
}
