//! The texts that the client has open, as ropes: a change costs what it changes, not what the text is long.
//!
//! Positions of the protocol are turned into bytes here while a text changes, and in `convert.rs` where a text stands
//! still; `tests` hold the two against each other. Traps: LF, CRLF and a lone CR end a line, and nothing else (the
//! library is built so); a column past the end of a line means its end, one inside a character the character's start.

use std::path::{Path, PathBuf};
use std::sync::Arc;

use indexwise_grammar::hosts::Host;
use ropey::Rope;
use tower_lsp::lsp_types::{Position, TextDocumentContentChangeEvent, Url};

use super::convert::Encoding;
use crate::files::{Text, host_of};

/// An open text.
#[derive(Debug)]
pub struct Document {
    /// As the client names it.
    pub uri: Url,
    /// Its real path, or one that no file has.
    pub path: PathBuf,
    /// What kind of file it is.
    pub host: Host,
    /// The client's number of this text.
    pub version: i32,
    rope: Rope,
    /// The text, once it was asked for since the last change.
    text: Option<Arc<str>>,
}

/// What a change put in the place of what, in bytes.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Replaced {
    /// The first byte.
    pub start: usize,
    /// One past the last byte of what was there.
    pub end: usize,
    /// The length of what is there now.
    pub length: usize,
}

impl Replaced {
    /// Where an offset has moved to.
    pub fn moved(self, offset: u32) -> u32 {
        let at = offset as usize;
        if at <= self.start {
            return offset;
        }
        let moved = if at < self.end { self.start + self.length } else { at - self.end + self.start + self.length };
        moved as u32
    }
}

impl Document {
    /// A text that was opened.
    pub fn new(uri: Url, path: PathBuf, host: Host, version: i32, text: &str) -> Self {
        Self { uri, path, host, version, rope: Rope::from_str(text), text: None }
    }

    /// Makes a change.
    pub fn apply(&mut self, change: &TextDocumentContentChangeEvent, encoding: Encoding) -> Replaced {
        self.text = None;
        let whole = 0..self.rope.len_chars();
        let chars = match change.range {
            None => whole,
            Some(range) => {
                let (start, end) = (self.char_at(range.start, encoding), self.char_at(range.end, encoding));
                start.min(end)..end.max(start)
            }
        };
        let (start, end) = (self.rope.char_to_byte(chars.start), self.rope.char_to_byte(chars.end));
        self.rope.remove(chars.clone());
        self.rope.insert(chars.start, &change.text);
        Replaced { start, end, length: change.text.len() }
    }

    /// The byte offset of a position.
    pub fn offset(&self, position: Position, encoding: Encoding) -> u32 {
        self.rope.char_to_byte(self.char_at(position, encoding)) as u32
    }

    fn char_at(&self, position: Position, encoding: Encoding) -> usize {
        let (line, column) = (position.line as usize, position.character as usize);
        if line >= self.rope.len_lines() {
            return self.rope.len_chars();
        }
        let start = self.rope.line_to_char(line);
        let written = self.rope.line(line);
        let ends = written.chars_at(written.len_chars()).reversed().take(2);
        let end = start + written.len_chars() - ends.take_while(|c| matches!(c, '\n' | '\r')).count();
        match encoding {
            Encoding::Utf8 => {
                let wanted = self.rope.char_to_byte(start).saturating_add(column);
                self.rope.byte_to_char(wanted.min(self.rope.char_to_byte(end)))
            }
            Encoding::Utf16 => {
                let wanted = self.rope.char_to_utf16_cu(start).saturating_add(column);
                self.rope.utf16_cu_to_char(wanted.min(self.rope.char_to_utf16_cu(end)))
            }
            Encoding::Utf32 => start.saturating_add(column).min(end),
        }
    }

    /// The text as it stands.
    pub fn text(&mut self) -> Text {
        let text = self.text.get_or_insert_with(|| self.rope.to_string().into());
        Text { text: text.clone(), marked: false }
    }
}

/// The kind of file that the client's name of a language tells of, or else its suffix.
pub fn host(language: &str, path: &Path) -> Host {
    match language {
        "latex" | "tex" | "plaintex" => Host::Latex,
        "markdown" | "quarto" | "rmarkdown" | "rmd" => Host::Markdown,
        "indexwise-note" => Host::Note,
        _ => host_of(path).unwrap_or(Host::Latex),
    }
}

/// The real path behind a name. What is not on the disk has the path that it would have; what is no file at all gets a
/// path in `folder` that no file has.
pub fn path_of(uri: &Url, folder: &Path) -> PathBuf {
    let Ok(path) = uri.to_file_path() else {
        let name: String = uri.as_str().chars().map(|c| if c.is_ascii_alphanumeric() { c } else { '-' }).collect();
        return folder.join(format!("-{name}"));
    };
    if let Ok(real) = path.canonicalize() {
        return real;
    }
    let folder = path.parent().and_then(|folder| folder.canonicalize().ok());
    folder.zip(path.file_name()).map_or_else(|| path.clone(), |(folder, name)| folder.join(name))
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;
    use crate::language_server::convert::Places;
    use indexwise_grammar::lines::Lines;
    use tower_lsp::lsp_types::Range;

    const ENCODINGS: [Encoding; 3] = [Encoding::Utf8, Encoding::Utf16, Encoding::Utf32];

    fn document(text: &str) -> Document {
        Document::new(Url::parse("untitled:a").unwrap(), PathBuf::new(), Host::Latex, 1, text)
    }

    #[test]
    fn places_are_those_of_a_text_that_stands_still() {
        for text in ["", "a", "ab\r\ncd\n\ré𝔸x\r\n", "𝔸𝔹\u{2028}b\u{b}c\u{85}\n", "\r\r\n\n\r", "x\n"] {
            let (document, lines) = (document(text), Lines::new(text));
            for encoding in ENCODINGS {
                let places = Places { text, lines: &lines, encoding };
                for (line, character) in (0..8).flat_map(|line| (0..14).map(move |column| (line, column))) {
                    let position = Position { line, character };
                    let want = places.offset(position);
                    assert_eq!(document.offset(position, encoding), want, "{text:?} {position:?} {encoding:?}");
                }
            }
        }
    }

    #[test]
    fn a_change_is_made_in_every_encoding() {
        for (encoding, end) in [(Encoding::Utf8, 4), (Encoding::Utf16, 2), (Encoding::Utf32, 1)] {
            let mut document = document("a\r\n𝔸b");
            let range = Range::new(Position::new(0, 1), Position::new(1, end));
            let change = TextDocumentContentChangeEvent { range: Some(range), range_length: None, text: "é".into() };
            assert_eq!(document.apply(&change, encoding), Replaced { start: 1, end: 7, length: 2 });
            assert_eq!(&*document.text().text, "aéb");
        }
    }

    #[test]
    fn a_change_whose_ends_are_swapped_or_outside_is_made_all_the_same() {
        let mut document = document("ab");
        let range = Range::new(Position::new(7, 0), Position::new(0, 1));
        let change = TextDocumentContentChangeEvent { range: Some(range), range_length: None, text: "c".into() };
        document.apply(&change, Encoding::Utf16);
        assert_eq!(&*document.text().text, "ac");
        let whole = TextDocumentContentChangeEvent { range: None, range_length: None, text: "new".into() };
        document.apply(&whole, Encoding::Utf16);
        assert_eq!(&*document.text().text, "new");
    }

    #[test]
    fn offsets_move_with_what_stands_before_them() {
        let replaced = Replaced { start: 2, end: 5, length: 1 };
        let moved: Vec<u32> = [0, 2, 3, 5, 9].map(|at| replaced.moved(at)).to_vec();
        assert_eq!(moved, [0, 2, 3, 3, 7]);
    }

    #[test]
    fn what_is_no_file_has_a_path_of_its_own() {
        let path = path_of(&Url::parse("untitled:Untitled-1").unwrap(), Path::new("/w"));
        assert_eq!(path, Path::new("/w/-untitled-Untitled-1"));
    }
}
