//! Lines and columns of one text, in three encodings.
//!
//! Inside the project every place is a byte offset; this is the one edge where offsets become lines and columns
//! and back. The index is built once per text. A column is found from counts kept at every `BLOCK` bytes, so that a
//! conversion costs the same on a line of ten bytes and on one of ten megabytes; an all-ASCII text keeps no counts.
//!
//! Traps: LF, CRLF and a lone CR all end a line, and a line's own span excludes its end. A column past the end of a
//! line means the end of the line; an offset or column inside a character means that character's start.

use crate::span::Span;

/// A zero-based column in UTF-8 bytes.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct ByteColumn(pub u32);

/// A zero-based column in UTF-16 code units (what the language server protocol counts by default).
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct Utf16Column(pub u32);

/// A zero-based column in Unicode scalar values (what a reader of the one-line report counts).
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct ScalarColumn(pub u32);

/// Bytes between two kept counts; a conversion walks at most this far.
const BLOCK: usize = 256;

/// Where the lines of one text start, and how much stands before each block of bytes. Lines count from zero.
///
/// The text itself is not kept: every question takes it again, and it must be the text the index was built from.
#[derive(Clone, Debug)]
pub struct Lines {
    starts: Vec<u32>,
    /// `blocks[k]` counts what starts before byte `k * BLOCK`; empty for an ASCII text.
    blocks: Vec<Count>,
    length: u32,
}

/// Units before a place.
#[derive(Clone, Copy, Debug, Default)]
struct Count {
    utf16: u32,
    scalars: u32,
}

impl Count {
    /// Counts the byte if a character starts with it.
    fn add(&mut self, byte: u8) {
        self.scalars += u32::from(byte & 0xC0 != 0x80);
        self.utf16 += u32::from(byte & 0xC0 != 0x80) + u32::from(byte >= 0xF0);
    }
}

impl Lines {
    /// Builds the index.
    pub fn new(text: &str) -> Self {
        let blocks = if text.is_ascii() { Vec::new() } else { counts(text.as_bytes()) };
        Self { starts: line_starts(text.as_bytes()), blocks, length: text.len() as u32 }
    }

    /// The number of lines; an empty text has one.
    pub fn count(&self) -> u32 {
        self.starts.len() as u32
    }

    /// The line that holds a byte offset; the last line for offsets past the end.
    pub fn line(&self, offset: u32) -> u32 {
        (self.starts.partition_point(|start| *start <= offset) as u32).saturating_sub(1)
    }

    /// The first byte of a line, the end of the text for lines past the last.
    pub fn start(&self, line: u32) -> u32 {
        self.starts.get(line as usize).copied().unwrap_or(self.length)
    }

    /// A line without its line end.
    pub fn span(&self, text: &str, line: u32) -> Span {
        let start = self.start(line);
        let next = self.start(line.saturating_add(1));
        let written = text.get(start as usize..next as usize).unwrap_or_default();
        let kept = written.strip_suffix("\r\n").or(written.strip_suffix(['\n', '\r'])).unwrap_or(written);
        Span::new(start as usize, start as usize + kept.len())
    }

    /// Line and column in bytes.
    pub fn in_bytes(&self, text: &str, offset: u32) -> (u32, ByteColumn) {
        let offset = boundary(text, offset);
        let line = self.line(offset);
        (line, ByteColumn(offset - self.start(line)))
    }

    /// Line and column in UTF-16 units.
    pub fn in_utf16(&self, text: &str, offset: u32) -> (u32, Utf16Column) {
        let offset = boundary(text, offset);
        let line = self.line(offset);
        let column = self.before(text, offset).utf16 - self.before(text, self.start(line)).utf16;
        (line, Utf16Column(column))
    }

    /// Line and column in Unicode scalars.
    pub fn in_scalars(&self, text: &str, offset: u32) -> (u32, ScalarColumn) {
        let offset = boundary(text, offset);
        let line = self.line(offset);
        let column = self.before(text, offset).scalars - self.before(text, self.start(line)).scalars;
        (line, ScalarColumn(column))
    }

    /// The byte offset of a line and a column in bytes.
    pub fn from_bytes(&self, text: &str, line: u32, column: ByteColumn) -> u32 {
        let span = self.span(text, line);
        boundary(text, span.start.saturating_add(column.0).min(span.end))
    }

    /// The byte offset of a line and a column in UTF-16 units.
    pub fn from_utf16(&self, text: &str, line: u32, column: Utf16Column) -> u32 {
        self.find(text, line, column.0, |count| count.utf16)
    }

    /// The byte offset of a line and a column in Unicode scalars.
    pub fn from_scalars(&self, text: &str, line: u32, column: ScalarColumn) -> u32 {
        self.find(text, line, column.0, |count| count.scalars)
    }

    /// The last character start on the line with at most `column` units before it on the line.
    fn find(&self, text: &str, line: u32, column: u32, units: fn(&Count) -> u32) -> u32 {
        let span = self.span(text, line);
        if self.blocks.is_empty() {
            return span.start.saturating_add(column).min(span.end);
        }
        let wanted = units(&self.before(text, span.start)).saturating_add(column);
        let block = self.blocks.partition_point(|count| units(count) <= wanted).saturating_sub(1);
        let mut count = self.blocks.get(block).copied().unwrap_or_default();
        let from = block * BLOCK;
        let mut found = span.start;
        for (index, byte) in text.as_bytes().iter().enumerate().take(span.end as usize).skip(from) {
            let starts = byte & 0xC0 != 0x80;
            if starts && units(&count) > wanted {
                return found.max(span.start);
            }
            if starts {
                found = index as u32;
            }
            count.add(*byte);
        }
        if units(&count) > wanted { found.max(span.start) } else { span.end }
    }

    /// What stands before a byte offset on a character boundary.
    fn before(&self, text: &str, offset: u32) -> Count {
        if self.blocks.is_empty() {
            return Count { utf16: offset, scalars: offset };
        }
        let block = (offset as usize / BLOCK).min(self.blocks.len() - 1);
        let mut count = self.blocks.get(block).copied().unwrap_or_default();
        for byte in text.as_bytes().get(block * BLOCK..offset as usize).unwrap_or_default() {
            count.add(*byte);
        }
        count
    }
}

/// The offset itself, or the start of the character it stands in, or the end of the text.
fn boundary(text: &str, offset: u32) -> u32 {
    let mut at = text.len().min(offset as usize);
    while !text.is_char_boundary(at) {
        at -= 1;
    }
    at as u32
}

fn line_starts(bytes: &[u8]) -> Vec<u32> {
    let mut starts = vec![0];
    let mut at = 0;
    while let Some(step) = bytes.get(at..).and_then(|rest| rest.iter().position(|b| matches!(b, b'\n' | b'\r'))) {
        at += step + 1;
        if bytes.get(at - 1) == Some(&b'\r') && bytes.get(at) == Some(&b'\n') {
            at += 1;
        }
        starts.push(at as u32);
    }
    starts
}

fn counts(bytes: &[u8]) -> Vec<Count> {
    let mut count = Count::default();
    let mut blocks = Vec::with_capacity(bytes.len() / BLOCK + 1);
    for block in bytes.chunks(BLOCK) {
        blocks.push(count);
        block.iter().for_each(|byte| count.add(*byte));
    }
    blocks
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::indexing_slicing)]
    use super::*;

    /// Compares every character boundary with a count made from the start of its line.
    #[track_caller]
    fn agrees(text: &str) {
        let lines = Lines::new(text);
        for offset in (0..=text.len()).filter(|at| text.is_char_boundary(*at)) {
            let at = offset as u32;
            let (line, ByteColumn(bytes)) = lines.in_bytes(text, at);
            let before = &text[lines.start(line) as usize..offset];
            assert_eq!(bytes as usize, before.len());
            let utf16 = Utf16Column(before.encode_utf16().count() as u32);
            let scalars = ScalarColumn(before.chars().count() as u32);
            assert_eq!(lines.in_utf16(text, at), (line, utf16), "offset {offset}");
            assert_eq!(lines.in_scalars(text, at), (line, scalars), "offset {offset}");
            // Between CR and LF lies no column of its own.
            let back = at.min(lines.span(text, line).end);
            assert_eq!(lines.from_utf16(text, line, utf16), back, "offset {offset}");
            assert_eq!(lines.from_scalars(text, line, scalars), back, "offset {offset}");
            assert_eq!(lines.from_bytes(text, line, ByteColumn(bytes)), back, "offset {offset}");
        }
    }

    #[test]
    fn every_offset_goes_there_and_back() {
        agrees("");
        agrees("u_ij\nw = 0");
        agrees("α = β\r\n𝔸 und 𝔹\rx\n\n");
        agrees(&"shell 𝔸 ∂_k ".repeat(200));
        agrees(&format!("{}\n{}\r\n", "é".repeat(BLOCK), "𝕏y".repeat(BLOCK)));
    }

    #[test]
    fn lines_end_in_three_ways() {
        let text = "a\nb\r\nc\rd";
        let lines = Lines::new(text);
        assert_eq!(lines.count(), 4);
        let spans: Vec<_> = (0..4).map(|line| lines.span(text, line).of(text)).collect();
        assert_eq!(spans, ["a", "b", "c", "d"]);
    }

    #[test]
    fn a_surrogate_pair_is_two_units_and_one_scalar() {
        let text = "𝔸x";
        let lines = Lines::new(text);
        assert_eq!(lines.in_utf16(text, 4), (0, Utf16Column(2)));
        assert_eq!(lines.in_scalars(text, 4), (0, ScalarColumn(1)));
        assert_eq!(lines.from_utf16(text, 0, Utf16Column(1)), 0);
        assert_eq!(lines.from_utf16(text, 0, Utf16Column(2)), 4);
    }

    #[test]
    fn places_outside_the_text_are_clamped() {
        let text = "ab\r\nγ";
        let lines = Lines::new(text);
        assert_eq!(lines.from_utf16(text, 0, Utf16Column(9)), 2);
        assert_eq!(lines.from_utf16(text, 7, Utf16Column(9)), 6);
        assert_eq!(lines.in_bytes(text, 99), (1, ByteColumn(2)));
        assert_eq!(lines.in_bytes(text, 5), (1, ByteColumn(0)));
        assert_eq!(Lines::new("").in_utf16("", 3), (0, Utf16Column(0)));
    }

    #[test]
    fn the_end_of_the_text_is_a_place() {
        let text = "a\n";
        let lines = Lines::new(text);
        assert_eq!(lines.in_bytes(text, 2), (1, ByteColumn(0)));
        assert_eq!(lines.from_bytes(text, 1, ByteColumn(0)), 2);
    }
}
