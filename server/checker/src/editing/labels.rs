//! Labels and what refers to them, in the order of the text.
//!
//! `\label{..}` and the commands that refer to labels are looked for in the text itself, since they stand in prose too;
//! comments, listings and fenced code are passed over. In a note the labels are the leading `(name)`s, and a trailing
//! `[reason]` that holds a label's name refers to it. Directives (`check this using (eq:sag)`) refer in every host.

use std::collections::BTreeSet;

use indexwise_grammar::conventions::Sentence;
use indexwise_grammar::hosts::Host;
use indexwise_grammar::span::Span;

use crate::paper::View;

/// A label's name in a text.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(super) struct Mention {
    /// The name alone.
    pub span: Span,
    pub name: String,
    /// Whether it is given here; if not, it is referred to.
    pub given: bool,
    /// The command with its argument, or the brackets around the name.
    pub whole: Span,
}

/// Commands that refer to labels; some take several, separated by commas.
const REFERRING: &[&str] = &[
    "ref",
    "eqref",
    "cref",
    "Cref",
    "autoref",
    "pageref",
    "nameref",
    "vref",
    "Vref",
    "labelcref",
    "subref",
    "cpageref",
];
/// Environments whose text is shown as it stands.
const LISTINGS: &[&str] = &["verbatim", "lstlisting", "minted", "comment", "alltt"];

/// The labels of a document and what refers to labels in it.
pub(super) fn mentions(view: &View, document: usize) -> Vec<Mention> {
    let (text, host) = (view.text(document), view.host(document));
    let mut found = match host {
        Host::Note => in_note(view, document),
        Host::Latex | Host::Markdown => in_commands(text, host),
    };
    for (sentence, _) in view.declared(document).map_or(&[][..], |declared| &declared.sentences) {
        if let Sentence::Check { using } = sentence {
            let mention = |name: &indexwise_grammar::conventions::Name| Mention {
                span: name.span,
                name: name.text.to_string(),
                given: false,
                whole: name.span,
            };
            found.extend(using.iter().map(mention));
        }
    }
    // A name that is spelled otherwise than it is meant cannot be told apart.
    found.retain(|mention| mention.span.of(text) == mention.name);
    found.sort();
    found
}

/// The mention at an offset, its command included.
pub(super) fn mention_at(view: &View, document: usize, offset: u32) -> Option<Mention> {
    let all = mentions(view, document);
    let at = |span: Span| span.start <= offset && offset <= span.end;
    all.iter().find(|one| at(one.span)).or_else(|| all.iter().find(|one| at(one.whole))).cloned()
}

/// The names in a note: leading labels, and labels in trailing reasons.
fn in_note(view: &View, document: usize) -> Vec<Mention> {
    let text = view.text(document);
    let mut found = Vec::new();
    let labels = (0..view.len()).flat_map(|one| view.formulas(one)).flat_map(|formula| &formula.labels);
    let known: BTreeSet<&str> = labels.map(|(name, _)| name.as_str()).collect();
    for formula in view.formulas(document) {
        for (name, whole) in &formula.labels {
            let span = Span { start: whole.start + 1, end: whole.end.saturating_sub(1).max(whole.start + 1) };
            found.push(Mention { span, name: name.to_string(), given: true, whole: *whole });
        }
        let mut at = formula.span.start as usize;
        for line in formula.span.of(text).split_inclusive('\n') {
            reasons(line, at, &known, &mut found);
            at += line.len();
        }
    }
    found
}

/// The labels that the trailing `[reason]` of a line names.
fn reasons(line: &str, at: usize, known: &BTreeSet<&str>, found: &mut Vec<Mention>) {
    let trimmed = line.trim_end();
    let Some(open) = trimmed.rfind('[').filter(|_| trimmed.ends_with(']')) else { return };
    if !trimmed.get(..open).is_some_and(|before| before.ends_with([' ', '\t'])) {
        return;
    }
    let inside = trimmed.get(open + 1..trimmed.len() - 1).unwrap_or_default();
    let mut start = 0;
    for word in inside.split([' ', ',', '(', ')']) {
        if known.contains(word) {
            let span = Span::new(at + open + 1 + start, at + open + 1 + start + word.len());
            let whole = Span::new(at + open, at + trimmed.len());
            found.push(Mention { span, name: word.to_owned(), given: false, whole });
        }
        start += word.len() + 1;
    }
}

/// The arguments of `\label` and of what refers, outside of comments and listings.
fn in_commands(text: &str, host: Host) -> Vec<Mention> {
    let mut found = Vec::new();
    let mut at = 0;
    while let Some(next) = text.get(at..).and_then(|rest| rest.find(['\\', '%', '`', '<'])).map(|step| at + step) {
        let rest = text.get(next..).unwrap_or_default();
        at = next
            + match (host, rest.as_bytes().first()) {
                (Host::Latex, Some(b'%')) => rest.find('\n').unwrap_or(rest.len()),
                (Host::Markdown, Some(b'<')) if rest.starts_with("<!--") => rest.find("-->").unwrap_or(rest.len()),
                (Host::Markdown, Some(b'`')) => code(rest),
                (_, Some(b'\\')) => command(rest, next, &mut found),
                _ => 1,
            };
    }
    found
}

/// How long the code is that begins with back-quotes; they alone, if nothing closes it.
fn code(rest: &str) -> usize {
    let ticks = rest.len() - rest.trim_start_matches('`').len();
    let fence = rest.get(..ticks).unwrap_or_default();
    let close = rest.get(ticks..).and_then(|inside| inside.find(fence));
    // Mathematics in a fence is read.
    if ticks > 2 && rest.get(ticks..).is_some_and(|info| info.trim_start().starts_with("math")) {
        return ticks;
    }
    close.map_or(ticks, |close| ticks + close + ticks)
}

/// Reads a command and says how far it reaches.
fn command(rest: &str, at: usize, found: &mut Vec<Mention>) -> usize {
    let letters = rest.get(1..).unwrap_or_default();
    let length = letters.find(|sign: char| !sign.is_ascii_alphabetic()).unwrap_or(letters.len());
    if length == 0 {
        return 1 + letters.chars().next().map_or(0, char::len_utf8);
    }
    let name = letters.get(..length).unwrap_or_default();
    let after = letters.get(length..).unwrap_or_default();
    if name == "verb" {
        let sign = after.trim_start_matches('*').chars().next();
        let inside = sign.and_then(|sign| after.split_once(sign)).map(|(_, inside)| inside);
        let end = inside.zip(sign).and_then(|(inside, sign)| inside.find(sign));
        return 1 + length + end.map_or(0, |end| end + 2);
    }
    let Some((inner, start)) = argument(after) else { return 1 + length };
    if name == "begin" && LISTINGS.contains(&inner) {
        let end = format!("\\end{{{inner}}}");
        return rest.find(&end).unwrap_or(rest.len());
    }
    let given = name == "label";
    if !given && !REFERRING.contains(&name) {
        return 1 + length;
    }
    let base = at + 1 + length + start;
    let whole = Span::new(at, base + inner.len() + 1);
    let mut within = 0;
    for part in inner.split(if given { '\n' } else { ',' }) {
        let name = part.trim();
        let from = base + within + (part.len() - part.trim_start().len());
        if !name.is_empty() {
            let span = Span::new(from, from + name.len());
            found.push(Mention { span, name: name.to_owned(), given, whole });
        }
        within += part.len() + 1;
    }
    1 + length + start + inner.len() + 1
}

/// The argument in braces right after a command, perhaps behind a star, and where it begins.
fn argument(after: &str) -> Option<(&str, usize)> {
    let open = after.len() - after.trim_start_matches(['*', ' ']).len();
    let inside = after.get(open..)?.strip_prefix('{')?;
    let close = inside.find(['}', '{']).filter(|close| inside.as_bytes().get(*close) == Some(&b'}'))?;
    Some((inside.get(..close)?, open + 1))
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::indexing_slicing)]
    use super::*;
    use crate::editing::cursor::view;

    #[track_caller]
    fn finds(host: Host, text: &str, want: &[(&str, bool)]) {
        let found = mentions(&view(text, host), 0);
        let found: Vec<(&str, bool)> = found.iter().map(|one| (one.span.of(text), one.given)).collect();
        assert_eq!(found, want, "{text}");
    }

    #[test]
    fn labels_and_what_refers_to_them() {
        let text = "\\begin{equation}\\label{eq:sag} u_i = w_i\\end{equation} By \\eqref{eq:sag} and \\cref{a, eq:b}.";
        finds(Host::Latex, text, &[("eq:sag", true), ("eq:sag", false), ("a", false), ("eq:b", false)]);
    }

    #[test]
    fn comments_and_listings_hold_none() {
        let text =
            "% \\ref{a}\n\\verb|\\ref{b}| \\begin{verbatim}\\ref{c}\\end{verbatim} 5\\% \\ref{d} \\ref {e}\\refx{f}";
        finds(Host::Latex, text, &[("d", false), ("e", false)]);
        finds(Host::Markdown, "`\\ref{a}` \\ref{b}\n\n```\n\\ref{c}\n```\n\n<!-- \\ref{d} -->", &[("b", false)]);
    }

    #[test]
    fn directives_refer() {
        let text = "$$u_i = w_i \\label{eq:a}$$\n\n<!-- indexwise: check this using (eq:a) -->\n\n$$u_i = w_i$$";
        finds(Host::Markdown, text, &[("eq:a", true), ("eq:a", false)]);
    }

    #[test]
    fn notes_name_labels_in_reasons() {
        let text = "Load:\n\n  (sag)  u_i = w_i\n\n  u_i n_i = w_i n_i   [sag, det]\n";
        finds(Host::Note, text, &[("sag", true), ("sag", false)]);
    }
}
