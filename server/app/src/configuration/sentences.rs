//! Sentences in a string of a configuration file, or in a plain list, with their places in the file.
//!
//! In a literal string, and in a basic one without a backslash, a sentence stands in the file as it is, so that its
//! place is exact. Where escapes are in play the file spells it otherwise, and its place is the whole string.

use indexwise_grammar::hosts;
use indexwise_grammar::span::Span;

/// The opening of a string, longest first; a line end right after a threefold one is no part of the string.
const OPENINGS: [&str; 4] = ["'''", "\"\"\"", "'", "\""];

/// The sentences of a string that stands at a place with its quotation marks and means `said`.
pub(super) fn of_string(text: &str, said: &str, place: Span) -> Vec<(String, Span)> {
    match plain(text, place) {
        Some(inside) => hosts::sentences(text, inside),
        None => {
            let found = hosts::sentences(said, Span::new(0, said.len()));
            found.into_iter().map(|(sentence, _)| (sentence, place)).collect()
        }
    }
}

/// What stands between the quotation marks, if it means what it looks like.
fn plain(text: &str, place: Span) -> Option<Span> {
    let written = place.of(text);
    let mark = OPENINGS.into_iter().find(|mark| written.len() >= 2 * mark.len() && written.starts_with(mark))?;
    let inside = written.strip_prefix(mark)?.strip_suffix(mark)?;
    if mark.starts_with('"') && inside.contains('\\') {
        return None;
    }
    let start = place.start as usize + mark.len();
    Some(Span::new(start, start + inside.len()))
}

/// The sentences of a plain list. A `#` at the start of a line or after a blank begins a comment.
pub(super) fn of_list(text: &str) -> Vec<(String, Span)> {
    let mut found = Vec::new();
    let mut start = 0;
    for line in text.split_inclusive(['\n', '\r']) {
        let end = start + comment(line).unwrap_or(line.len());
        found.extend(hosts::sentences(text, Span::new(start, end)));
        start += line.len();
    }
    found
}

/// Where the comment of a line begins.
fn comment(line: &str) -> Option<usize> {
    let begins = |at: &usize| line.get(..*at).is_some_and(|before| before.is_empty() || before.ends_with([' ', '\t']));
    line.match_indices('#').map(|(at, _)| at).find(begins)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// What the sentences of a string say, and what stands at their places.
    fn read<'t>(text: &'t str, said: &str) -> Vec<(String, &'t str)> {
        let found = of_string(text, said, Span::new(0, text.len()));
        found.into_iter().map(|(sentence, span)| (sentence, span.of(text))).collect()
    }

    #[test]
    fn in_plain_strings_places_are_exact() {
        let want = [("B is a label".to_owned(), "B is a label"), ("\\mu is a label".to_owned(), "\\mu is a label")];
        for text in ["'B is a label; \\mu is a label'", "'''\r\n B is a label\r\n\r\n  \\mu is a label \r\n'''"] {
            assert_eq!(read(text, "not looked at"), want, "{text}");
        }
        assert_eq!(read("\"B is a label\"", ""), want[..1]);
        assert_eq!(read("\"\"\"\nB is a label\"\"\"", ""), want[..1]);
        for empty in ["''", "\"\"", "''''''", "\"\"\"\"\"\"", "' ; '"] {
            assert_eq!(read(empty, ""), [], "{empty}");
        }
    }

    #[test]
    fn where_escapes_are_in_play_the_place_is_the_string() {
        let text = "\"\\\\mu is a label; B is a label\"";
        let want = [("\\mu is a label".to_owned(), text), ("B is a label".to_owned(), text)];
        assert_eq!(read(text, "\\mu is a label; B is a label"), want);
    }

    #[test]
    fn a_list_has_comments() {
        let text = "# of the shell\n\nB is a label # a body\r\n\\mu is a label; r is a coordinate\n#";
        let found = of_list(text);
        let said: Vec<&str> = found.iter().map(|(sentence, _)| sentence.as_str()).collect();
        assert_eq!(said, ["B is a label", "\\mu is a label", "r is a coordinate"]);
        assert!(found.iter().all(|(sentence, span)| span.of(text) == sentence));
        assert_eq!(of_list("g\\# is small").len(), 1);
    }
}
