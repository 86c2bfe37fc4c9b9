//! A cursor over LaTeX source that reads control sequences and arguments, without knowing what they mean.
//!
//! Both the definitions and the host scan read arguments with it. It never moves past what it could not read, skips
//! comments as TeX does, and gives up on an argument longer than `ARGUMENT_BUDGET`, so that an unclosed brace
//! costs a bounded look ahead.

use crate::span::Span;

/// The longest argument that is read, in bytes; longer ones are as good as unclosed.
pub(crate) const ARGUMENT_BUDGET: usize = 20_000;

/// A place in a text.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Cursor<'t> {
    /// The text.
    pub text: &'t str,
    /// The next byte to read.
    pub at: usize,
}

impl<'t> Cursor<'t> {
    pub(crate) fn new(text: &'t str, at: usize) -> Self {
        Self { text, at }
    }

    /// The next byte.
    pub(crate) fn peek(&self) -> Option<u8> {
        self.text.as_bytes().get(self.at).copied()
    }

    /// The rest of the text.
    pub(crate) fn rest(&self) -> &'t str {
        self.text.get(self.at..).unwrap_or_default()
    }

    /// Takes a byte if it comes next.
    pub(crate) fn eat(&mut self, byte: u8) -> bool {
        let found = self.peek() == Some(byte);
        self.at += usize::from(found);
        found
    }

    /// Takes a byte if it comes next after space.
    pub(crate) fn eat_after_space(&mut self, byte: u8) -> bool {
        let mut ahead = *self;
        ahead.skip_space();
        let found = ahead.eat(byte);
        if found {
            *self = ahead;
        }
        found
    }

    /// Skips spaces, comments and line ends, but no blank line: a paragraph's end never stands before an argument.
    pub(crate) fn skip_space(&mut self) {
        let bytes = self.text.as_bytes();
        let mut ended = false;
        while let Some(byte) = bytes.get(self.at) {
            match byte {
                b' ' | b'\t' => self.at += 1,
                b'\n' | b'\r' if !ended => {
                    self.at = after_line_end(bytes, self.at);
                    ended = true;
                }
                b'%' => {
                    self.at = after_line_end(bytes, line_end(bytes, self.at));
                    ended = true;
                }
                _ => return,
            }
        }
    }

    /// Takes a control sequence and returns its name: a word of letters and `@`, or one other character.
    pub(crate) fn control(&mut self) -> Option<&'t str> {
        if self.peek() != Some(b'\\') {
            return None;
        }
        let start = self.at + 1;
        let rest = self.text.get(start..)?;
        let letters = rest.bytes().take_while(|byte| byte.is_ascii_alphabetic() || *byte == b'@').count();
        let length = if letters > 0 { letters } else { rest.chars().next()?.len_utf8() };
        self.at = start + length;
        rest.get(..length)
    }

    /// Takes `{..}` after space and returns the span inside the braces.
    pub(crate) fn group(&mut self) -> Option<Span> {
        let mut ahead = *self;
        ahead.skip_space();
        if !ahead.eat(b'{') {
            return None;
        }
        let start = ahead.at;
        let end = closing(self.text.as_bytes(), start, b'}')?;
        self.at = end + 1;
        Some(Span::new(start, end))
    }

    /// Takes `{..}` on one line as it is typed, as an address is: a percent sign in it starts no comment.
    pub(crate) fn typed_group(&mut self) -> Option<Span> {
        let inside = self.rest().strip_prefix('{')?;
        let mut depth = 0_usize;
        for (length, byte) in inside.bytes().take(ARGUMENT_BUDGET).enumerate() {
            match byte {
                b'\n' | b'\r' => return None,
                b'{' => depth += 1,
                b'}' if depth == 0 => {
                    let start = self.at + 1;
                    self.at = start + length + 1;
                    return Some(Span::new(start, start + length));
                }
                b'}' => depth -= 1,
                _ => {}
            }
        }
        None
    }

    /// Takes `[..]` after space and returns the span inside the brackets; braces inside hide a bracket.
    pub(crate) fn bracket(&mut self) -> Option<Span> {
        let mut ahead = *self;
        ahead.skip_space();
        if !ahead.eat(b'[') {
            return None;
        }
        let start = ahead.at;
        let end = closing(self.text.as_bytes(), start, b']')?;
        self.at = end + 1;
        Some(Span::new(start, end))
    }

    /// Takes an argument after space: a group's inside, a control sequence or one character.
    pub(crate) fn argument(&mut self) -> Option<Span> {
        if let Some(inside) = self.group() {
            return Some(inside);
        }
        let mut ahead = *self;
        ahead.skip_space();
        let start = ahead.at;
        match ahead.peek()? {
            b'\\' => ahead.control().map(|_| ())?,
            b'{' | b'}' | b'[' | b']' | b'\n' | b'\r' => return None,
            _ => ahead.at += ahead.rest().chars().next()?.len_utf8(),
        }
        *self = ahead;
        Some(Span::new(start, self.at))
    }
}

/// The closing byte for what was opened just before `from`, at the same depth of braces.
fn closing(bytes: &[u8], from: usize, close: u8) -> Option<usize> {
    let limit = bytes.len().min(from.saturating_add(ARGUMENT_BUDGET + 1));
    let mut depth = 0_usize;
    let mut at = from;
    while at < limit {
        match bytes.get(at)? {
            b'\\' => at += 1,
            b'%' => at = line_end(bytes, at),
            byte if *byte == close && depth == 0 => return Some(at),
            b'{' => depth += 1,
            b'}' => depth = depth.checked_sub(1)?,
            _ => {}
        }
        at += 1;
    }
    None
}

/// The line end (LF or CR) at or after `at`, or the end of the text.
pub(crate) fn line_end(bytes: &[u8], at: usize) -> usize {
    let rest = bytes.get(at..).unwrap_or_default();
    at + rest.iter().position(|byte| matches!(byte, b'\n' | b'\r')).unwrap_or(rest.len())
}

/// The start of the next line, given its line end; the end of the text at the end of the text.
pub(crate) fn after_line_end(bytes: &[u8], at: usize) -> usize {
    match (bytes.get(at), bytes.get(at + 1)) {
        (Some(b'\r'), Some(b'\n')) => at + 2,
        (Some(_), _) => at + 1,
        (None, _) => bytes.len(),
    }
}

/// Whether the line after the line end at `at` is blank (and is not merely the end of the text).
pub(crate) fn blank_line_follows(bytes: &[u8], at: usize) -> bool {
    let rest = bytes.get(after_line_end(bytes, at)..).unwrap_or_default();
    rest.iter().find(|byte| !matches!(byte, b' ' | b'\t')).is_some_and(|byte| matches!(byte, b'\n' | b'\r'))
}

/// A text without its comments: as TeX, a comment takes its line end and the space before the next line's text.
pub(crate) fn without_comments(text: &str) -> String {
    let bytes = text.as_bytes();
    let mut kept = String::with_capacity(text.len());
    let (mut from, mut at) = (0, 0);
    while at < bytes.len() {
        match bytes.get(at) {
            Some(b'\\') => at += 2,
            Some(b'%') => {
                kept.push_str(text.get(from..at).unwrap_or_default());
                at = after_line_end(bytes, line_end(bytes, at));
                at += bytes.get(at..).unwrap_or_default().iter().take_while(|b| matches!(b, b' ' | b'\t')).count();
                from = at;
            }
            _ => at += 1,
        }
    }
    kept.push_str(text.get(from..).unwrap_or_default());
    kept
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::indexing_slicing)]
    use super::*;

    #[track_caller]
    fn group(text: &str, expected: Option<&str>) {
        let mut cursor = Cursor::new(text, 0);
        assert_eq!(cursor.group().map(|span| span.of(text)), expected, "{text}");
        assert_eq!(cursor.at == 0, expected.is_none(), "what is not read is not passed");
    }

    #[test]
    fn groups_balance_and_know_comments() {
        group("{a{b}\\}c} d", Some("a{b}\\}c"));
        group(" % note {\n  {a % }\n b}", Some("a % }\n b"));
        group("{a", None);
        group("\n\n{a}", None);
        group(&format!("{{{}}}", "x".repeat(ARGUMENT_BUDGET + 1)), None);
    }

    #[test]
    fn brackets_are_hidden_by_braces() {
        let text = "[a{]}b] c";
        assert_eq!(Cursor::new(text, 0).bracket().map(|span| span.of(text)), Some("a{]}b"));
        assert_eq!(Cursor::new("[a}]", 0).bracket(), None);
    }

    #[test]
    fn control_sequences() {
        for (text, name) in
            [("\\mu_i", Some("mu")), ("\\a@b1", Some("a@b")), ("\\é", Some("é")), ("\\", None), ("x", None)]
        {
            assert_eq!(Cursor::new(text, 0).control(), name, "{text}");
        }
    }

    #[test]
    fn arguments_may_be_single_tokens() {
        for (text, argument) in
            [(" x y", Some("x")), ("\\mu x", Some("\\mu")), ("{xy}", Some("xy")), ("", None), ("}", None)]
        {
            assert_eq!(Cursor::new(text, 0).argument().map(|span| span.of(text)), argument, "{text}");
        }
    }

    #[test]
    fn blank_lines() {
        assert!(blank_line_follows(b"a\n \t\nb", 1));
        assert!(blank_line_follows(b"a\r\n\r\n", 1));
        assert!(!blank_line_follows(b"a\n b", 1));
        assert!(!blank_line_follows(b"a\n  ", 1));
    }
}
