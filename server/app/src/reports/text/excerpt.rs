//! The author's source lines around a place, with a line of carets under it.
//!
//! At most a few lines, cut around the place; long lines are cut, too. Tabs are copied into the line of carets
//! and wide characters get as many blanks as they have columns, so that the carets stand under the place on
//! every terminal.

use std::ops::Range;

use indexwise_grammar::span::Span;
use unicode_width::UnicodeWidthChar;

use super::super::places::Places;
use super::{INDENT, PAGE};
use crate::output::printable;

/// So many source lines at most.
const MOST_LINES: usize = 6;

/// So many columns of a line at most, without the signs for what was cut: what is left of a page.
const LONGEST_LINE: usize = PAGE - INDENT.len() - 2;

/// So many columns of a line that is cut are left before the place.
const BEFORE_PLACE: usize = 36;

/// A tab takes as many columns at most.
const TAB: usize = 8;

/// The sign for what was cut.
const CUT: &str = "…";

/// A line of the excerpt.
#[derive(Debug, PartialEq, Eq)]
pub(super) enum Line {
    /// The author's.
    Source(String),
    /// Blanks and carets.
    Mark(String),
}

/// The lines of the statement around the place, which lies inside it.
pub(super) fn lines(text: &str, places: &Places, statement: Span, place: Span) -> Vec<Line> {
    let all: Vec<Span> = places.lines_of(statement).collect();
    let blamed = all.iter().position(|line| place.start <= line.end).unwrap_or_default();
    let from = (blamed + 1).saturating_sub(MOST_LINES / 2).min(all.len().saturating_sub(MOST_LINES));
    let shown = all.get(from..all.len().min(from + MOST_LINES)).unwrap_or_default();
    let margin = common_margin(shown.iter().map(|line| line.of(text)));
    let mut lines = Vec::new();
    for (at, line) in shown.iter().enumerate() {
        let source = line.of(text);
        let margin = margin.min(source.len());
        let body = source.get(margin..).unwrap_or_default();
        if from + at == blamed {
            let start = (place.start as usize).saturating_sub(line.start as usize + margin);
            let end = (place.end.min(line.end) as usize).saturating_sub(line.start as usize + margin);
            lines.extend(marked(body, start, end));
        } else {
            lines.push(Line::Source(cut(body, 0)));
        }
    }
    lines
}

/// The bytes of white space with which all lines begin that are not blank.
fn common_margin<'a>(lines: impl Iterator<Item = &'a str>) -> usize {
    let mut margin: Option<&str> = None;
    for line in lines.filter(|line| !line.trim().is_empty()) {
        let own = line.get(..line.len() - line.trim_start().len()).unwrap_or_default();
        let common =
            margin.map_or(own.len(), |margin| margin.bytes().zip(own.bytes()).take_while(|(a, b)| a == b).count());
        margin = own.get(..common).or(Some(""));
    }
    margin.map_or(0, str::len)
}

/// A line and the carets under the bytes `start..end` of it.
fn marked(line: &str, start: usize, end: usize) -> [Line; 2] {
    let shown = window(line, start);
    let mut mark = String::from(if shown.start > 0 { " " } else { "" });
    let mut carets = 0;
    for (at, c) in line.get(shown.clone()).unwrap_or_default().char_indices() {
        let at = shown.start + at;
        match c {
            '\t' if at < start => mark.push('\t'),
            _ if at < start => mark.extend(std::iter::repeat_n(' ', columns(c))),
            _ if at < end => carets += columns(c).max(usize::from(c == '\t')),
            _ => break,
        }
    }
    mark.extend(std::iter::repeat_n('^', carets.max(1)));
    [Line::Source(cut(line, start)), Line::Mark(mark)]
}

fn columns(c: char) -> usize {
    // A control character is shown as one replacement sign.
    c.width().unwrap_or(1)
}

/// The part of a line around a byte of it, with signs where it was cut.
fn cut(line: &str, place: usize) -> String {
    let shown = window(line, place);
    let before = if shown.start > 0 { CUT } else { "" };
    let after = if shown.end < line.trim_end().len() { CUT } else { "" };
    format!("{before}{}{after}", printable(line.get(shown).unwrap_or_default()))
}

/// The bytes of a line that are shown, `place` among them. Only as much of the line is walked as is shown: a
/// document may be one line of many megabytes.
fn window(line: &str, place: usize) -> Range<usize> {
    let line = line.trim_end();
    let first = 0..fitting(line.chars(), LONGEST_LINE);
    // Near the start, the line is shown from its start; a place at the very end of what is shown is not seen in
    // its surroundings.
    if first.end == line.len() || place <= fitting(line.chars(), LONGEST_LINE - BEFORE_PLACE / 2) {
        return first;
    }
    let before = line.get(..place).unwrap_or(line);
    let start = before.len() - fitting(before.chars().rev(), BEFORE_PLACE);
    let end = start + fitting(line.get(start..).unwrap_or_default().chars(), LONGEST_LINE);
    // Near the end, there is room for more of what stands before.
    if end < line.len() { start..end } else { line.len() - fitting(line.chars().rev(), LONGEST_LINE)..end }
}

/// How many bytes of these characters stand on so many columns.
fn fitting(chars: impl Iterator<Item = char>, most: usize) -> usize {
    let mut taken = 0;
    let fits = |c: &char| {
        taken += if *c == '\t' { TAB } else { columns(*c) };
        taken <= most
    };
    chars.take_while(fits).map(char::len_utf8).sum()
}

#[cfg(test)]
mod tests {
    use super::super::super::samples::span;
    use super::*;
    use crate::files::Text;
    use unicode_width::UnicodeWidthStr;

    #[track_caller]
    fn shown(text: &str, statement: &str, place: &str) -> String {
        let text = Text { text: text.into(), marked: false };
        let places = Places::new(&text);
        let lines = lines(&text.text, &places, span(&text.text, statement), span(&text.text, place));
        let line = |line: &Line| match line {
            Line::Source(text) | Line::Mark(text) => format!("{text}\n"),
        };
        lines.iter().map(line).collect()
    }

    #[test]
    fn carets_stand_under_the_place() {
        assert_eq!(shown("x\n  a = bc\r\ny", "a = bc", "bc"), "a = bc\n    ^^\n");
        assert_eq!(shown("a = bc   \n", "a = bc", "bc"), "a = bc\n    ^^\n");
    }

    #[test]
    fn tabs_and_wide_characters_keep_the_carets_in_line() {
        assert_eq!(shown("a\tb = c", "a\tb = c", "c"), "a\tb = c\n \t    ^\n");
        assert_eq!(shown("\t漢 = g\u{303}c", "漢 = g\u{303}c", "c"), "漢 = g\u{303}c\n      ^\n");
        assert_eq!(shown("漢 = c", "漢 = c", "漢"), "漢 = c\n^^\n");
    }

    #[test]
    fn a_common_margin_is_taken_off() {
        assert_eq!(shown("  a\n    = b\n\n  + c", "a\n    = b\n\n  + c", "c"), "a\n  = b\n\n+ c\n  ^\n");
    }

    #[test]
    fn many_lines_are_cut_around_the_place() {
        let text: String = (0..30).map(|at| format!("row {at};\n")).collect();
        let shown = shown(&text, &text, "20");
        assert_eq!(shown.lines().count(), MOST_LINES + 1, "{shown}");
        assert!(shown.contains("row 20;\n    ^^\n") && !shown.contains("row 2;"), "{shown}");
    }

    #[test]
    fn a_long_line_is_cut_around_the_place() {
        let text = format!("{}HERE{}", "x".repeat(5000), "y".repeat(5000));
        let shown = shown(&text, &text, "HERE");
        let lines: Vec<&str> = shown.lines().collect();
        let at = lines.first().and_then(|line| line.find("HERE"));
        assert_eq!(lines.len(), 2);
        assert!(lines.iter().all(|line| line.chars().count() <= LONGEST_LINE + 2), "{shown}");
        // The sign for what was cut has three bytes and one column.
        assert_eq!(at.map(|at| at - 2), lines.get(1).and_then(|mark| mark.find("^^^^")));
    }

    #[test]
    fn a_line_that_is_cut_is_shown_as_far_as_it_fits() {
        for (before, after) in [(75, 0), (500, 3), (60, 60), (40, 500), (0, 500)] {
            let text = format!("{}HERE{}", "x".repeat(before), "y".repeat(after));
            let shown = shown(&text, &text, "HERE");
            let source = shown.lines().next().unwrap_or_default();
            let letters = source.chars().filter(|c| c.is_ascii()).count();
            assert_eq!(letters, LONGEST_LINE, "{before} {after}: {shown}");
            assert!(source.contains("HERE"), "{shown}");
        }
    }

    #[test]
    fn a_long_line_of_wide_characters_is_cut_to_its_columns() {
        let shown = shown(&format!("{}HERE{}", "漢".repeat(500), "字".repeat(500)), "漢", "HERE");
        let (source, mark) = shown.split_once('\n').unwrap_or_default();
        assert!(source.width() <= PAGE - INDENT.len() && source.contains("漢HERE字"), "{shown}");
        assert_eq!(source.split("HERE").next().map(UnicodeWidthStr::width), mark.find("^^^^"), "{shown}");
    }

    #[test]
    fn a_place_at_the_end_of_a_line_gets_one_caret() {
        let text = Text { text: "ab\ncd".into(), marked: false };
        let lines = lines(&text.text, &Places::new(&text), Span::new(0, 5), Span::new(2, 2));
        assert_eq!(lines.get(1), Some(&Line::Mark("  ^".into())));
    }
}
