//! Places in a file as people count them: lines and columns from 1, columns in Unicode scalars.
//!
//! Trap: the text inside the program has no byte-order mark. An offset in a report counts its three bytes,
//! because it is a place in the file; a column does not count it, because no editor shows it.

use indexwise_grammar::lines::{Lines, ScalarColumn};
use indexwise_grammar::span::Span;
use serde::Serialize;

use crate::files::{BYTE_ORDER_MARK, Text};

/// A place in a file.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
pub struct Place {
    /// From 1.
    pub line: usize,
    /// From 1, in Unicode scalars.
    pub column: usize,
    /// In UTF-8 bytes from the start of the file.
    pub offset: usize,
}

/// The places of one text.
pub struct Places<'a> {
    text: &'a str,
    lines: Lines,
    before: usize,
}

impl<'a> Places<'a> {
    /// Indexes a text.
    pub fn new(text: &'a Text) -> Self {
        let before = if text.marked { BYTE_ORDER_MARK.len() } else { 0 };
        Self { text: &text.text, lines: Lines::new(&text.text), before }
    }

    /// Where a span starts.
    pub fn start(&self, span: Span) -> Place {
        self.at(span.start)
    }

    /// Where a span ends.
    pub fn end(&self, span: Span) -> Place {
        self.at(span.end)
    }

    fn at(&self, offset: u32) -> Place {
        let (line, ScalarColumn(column)) = self.lines.in_scalars(self.text, offset);
        Place { line: line as usize + 1, column: column as usize + 1, offset: offset as usize + self.before }
    }

    /// The lines that a span touches, without their ends, as spans of the text.
    pub fn lines_of(&self, span: Span) -> impl DoubleEndedIterator<Item = Span> {
        let first = self.lines.line(span.start);
        // A span that ends where a line begins does not touch that line.
        let last = self.lines.line(span.end.saturating_sub(1).max(span.start));
        (first..=last).map(|line| self.lines.span(self.text, line))
    }

    /// The line before or after the one that holds an offset.
    pub fn neighbour(&self, offset: u32, step: i32) -> Option<&'a str> {
        let line = self.lines.line(offset).checked_add_signed(step)?;
        (line < self.lines.count()).then(|| self.lines.span(self.text, line).of(self.text))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_mark_counts_in_offsets_and_not_in_columns() {
        for (marked, offset) in [(false, 3), (true, 6)] {
            let text = Text { text: "μ\r\nα_i".into(), marked };
            let places = Places::new(&text);
            assert_eq!(places.at(2), Place { line: 1, column: 2, offset: offset - 1 });
            assert_eq!(places.at(6), Place { line: 2, column: 2, offset: offset + 3 });
        }
    }

    #[test]
    fn a_span_touches_its_lines() {
        let text = Text { text: "ab\ncd\nef".into(), marked: false };
        let places = Places::new(&text);
        let touched = |start, end| places.lines_of(Span::new(start, end)).collect::<Vec<_>>();
        assert_eq!(touched(0, 3), [Span::new(0, 2)]);
        assert_eq!(touched(1, 4), [Span::new(0, 2), Span::new(3, 5)]);
        assert_eq!(touched(3, 3), [Span::new(3, 5)]);
    }
}
