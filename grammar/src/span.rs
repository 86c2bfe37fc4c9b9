//! Byte spans into one source text.
//!
//! Every position inside the project is a zero-based UTF-8 byte offset into the text of one file.
//! Lines and columns, and the other encodings, exist only at the edges (see `lines.rs`).

/// A half-open range of UTF-8 byte offsets, `start <= end`, both on character boundaries.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct Span {
    /// First byte.
    pub start: u32,
    /// One past the last byte.
    pub end: u32,
}

impl Span {
    /// The span `start..end`.
    pub const fn new(start: usize, end: usize) -> Self {
        Self { start: start as u32, end: end as u32 }
    }

    /// The smallest span that holds both.
    pub fn join(self, other: Self) -> Self {
        Self { start: self.start.min(other.start), end: self.end.max(other.end) }
    }

    /// Length in bytes.
    pub const fn len(self) -> usize {
        (self.end - self.start) as usize
    }

    /// Whether no byte is covered.
    pub const fn is_empty(self) -> bool {
        self.start == self.end
    }

    /// Whether `other` lies inside.
    pub const fn holds(self, other: Self) -> bool {
        self.start <= other.start && other.end <= self.end
    }

    /// The same stretch so many bytes further on.
    pub fn moved(self, by: i32) -> Self {
        Self { start: self.start.saturating_add_signed(by), end: self.end.saturating_add_signed(by) }
    }

    /// As a range of `usize`, to index a text.
    pub const fn range(self) -> std::ops::Range<usize> {
        self.start as usize..self.end as usize
    }

    /// The text covered, or nothing where the span does not fit the text.
    pub fn of(self, text: &str) -> &str {
        text.get(self.range()).unwrap_or_default()
    }
}
