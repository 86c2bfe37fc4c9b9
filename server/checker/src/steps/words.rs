//! Words around a formula that say that its sides are equal there, or nearly so, and not everywhere.
//!
//! "In locally inertial coordinates", "to first order", "up to a total derivative", "for an incompressible flow": an
//! author who says so in prose owes no identity for arbitrary fields. Such a step is a hint that quotes the words. The
//! words count from the last heading before the formula to the end of its paragraph, since an assumption that opens a
//! section holds to its end. Trap: comments are the author's talk with the program and do not count.

use indexwise_grammar::span::Span;

/// Beginnings of words and phrases, in lower case with single blanks.
const PHRASES: &[&str] = &[
    // At a point, or in coordinates of a kind.
    "locally inertial",
    "local inertial",
    "inertial coordinates",
    "inertial frame",
    "normal coordinates",
    "locally flat",
    "locally lorentz",
    "freely falling",
    "connection vanish",
    "symbols vanish",
    "vanish at",
    "unimodular",
    "adapted coordinates",
    "flat space",
    "flat metric",
    "minkowski",
    // Up to terms that are left out.
    "neglect",
    "negligibl",
    "drop the",
    "drop terms",
    "dropp",
    "ignor",
    "leading order",
    "lowest order",
    "first order",
    "second order",
    "higher order",
    "higher-order",
    "this order",
    "linearis",
    "lineariz",
    "approximat",
    "small compared",
    "total derivative",
    "total divergence",
    "boundary term",
    "surface term",
    "by parts",
    // Under a condition on the fields.
    "on shell",
    "on-shell",
    "gauge",
    "incompressib",
    "divergence-free",
    "divergence free",
    "divergenceless",
    "solenoidal",
    "irrotational",
    "curl-free",
    "steady",
    "static",
    "uniform",
    "homogeneous",
];

/// What begins a new heading.
const HEADINGS: &[&str] =
    &["\\chapter", "\\section", "\\subsection", "\\subsubsection", "\\paragraph", "\n# ", "\n## "];

/// Bytes of text that are looked at on each side.
const REACH: usize = 8_000;

/// The first such words around a place, as they are listed above.
pub(super) fn loosening(text: &str, place: Span) -> Option<&'static str> {
    let (start, end) = (place.start as usize, place.end as usize);
    let before = text.get(at_character(text, start.saturating_sub(REACH))..start)?;
    let heading = HEADINGS.iter().filter_map(|heading| before.rfind(heading)).max().unwrap_or(0);
    let after = text.get(end..at_character(text, end.saturating_add(REACH)))?;
    let paragraph = after.find("\n\n").unwrap_or(after.len());
    let words = format!("{} {}", plain(before.get(heading..)?), plain(after.get(..paragraph)?));
    PHRASES.iter().filter_map(|phrase| Some((begins(&words, phrase)?, *phrase))).min().map(|(_, phrase)| phrase)
}

/// The nearest place at or before one where a character begins.
fn at_character(text: &str, place: usize) -> usize {
    let place = place.min(text.len());
    (0..=place).rev().find(|place| text.is_char_boundary(*place)).unwrap_or(0)
}

/// Lower case, single blanks, no comments.
fn plain(text: &str) -> String {
    let uncommented = text.lines().map(|line| {
        let line = line.split_once("<!--").map_or(line, |(before, _)| before);
        if line.trim_start().starts_with('%') { "" } else { line }
    });
    let words: Vec<&str> = uncommented.flat_map(str::split_whitespace).collect();
    words.join(" ").to_lowercase()
}

/// Where a word of a text begins with a phrase.
fn begins(text: &str, phrase: &str) -> Option<usize> {
    let inside =
        |at: usize| text.get(..at).and_then(|before| before.chars().next_back()).is_some_and(char::is_alphabetic);
    text.match_indices(phrase).map(|(at, _)| at).find(|at| !inside(*at))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn said(text: &str, expected: Option<&str>) {
        let start = text.find('$').map_or(0, |at| at as u32);
        assert_eq!(loosening(text, Span { start, end: start + 1 }), expected);
    }

    #[test]
    fn words_count_from_the_heading_to_the_end_of_the_paragraph() {
        said("\\section{A} In locally\n inertial coordinates\n\n $x$", Some("locally inertial"));
        said("In locally inertial coordinates\n\\section{B} $x$", None);
        said("Then $x$, where we\nneglect the curvature.", Some("neglect"));
        said("Then $x$.\n\nWe neglect the curvature later.", None);
    }

    #[test]
    fn comments_and_inner_letters_do_not_count() {
        said("% we drop terms\n$x$", None);
        said("The ecstatic $x$", None);
        said("\u{e9}\u{e9} $x$ \u{e9}", None);
    }
}
