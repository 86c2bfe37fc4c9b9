//! How a sentence of the conventions language is put into a document, in the comment form of its host.
//!
//! A directive stands before the formula that it speaks of: on a line of its own where that changes nothing in print,
//! else right before the formula. A declaration joins the last sentences that declare something, else it opens a comment
//! of its own. Every edit is tried on the scan of the text: where the sentence would speak of another formula, or would
//! not be seen, nothing is offered.

use indexwise_grammar::conventions::Sentence;
use indexwise_grammar::hosts::{Directive, Host};
use indexwise_grammar::span::Span;

use crate::finding::Edit;
use crate::paper::View;

/// The edit that puts a directive before a formula.
pub(super) fn before_formula(view: &View, document: usize, number: usize, sentence: &str) -> Option<Edit> {
    let place = Place::of(view, document, number)?;
    let edit = match view.host(document) {
        Host::Latex => place.latex(sentence),
        Host::Markdown => place.markdown(sentence)?,
        Host::Note => place.own_line(&format!("indexwise: {sentence}")),
    };
    (view.target_after(document, &edit, sentence) == Some(number)).then_some(edit)
}

/// Where a formula begins.
struct Place<'t> {
    text: &'t str,
    /// The first byte of the formula.
    start: usize,
    /// The first byte of its line.
    line: usize,
    /// Whether another formula reaches into the line before it.
    shared: bool,
    display: bool,
}

impl<'t> Place<'t> {
    fn of(view: &'t View, document: usize, number: usize) -> Option<Self> {
        let formulas = view.formulas(document);
        let formula = formulas.get(number)?;
        let (text, start) = (view.text(document), formula.span.start as usize);
        let line = line_start(text, start)?;
        let before = number.checked_sub(1).and_then(|before| formulas.get(before));
        let shared = before.is_some_and(|before| before.span.end as usize > line);
        Some(Self { text, start, line, shared, display: formula.display })
    }

    /// What stands before the formula on its line.
    fn prefix(&self) -> &'t str {
        self.text.get(self.line..self.start).unwrap_or_default()
    }

    /// A line of its own above the formula's line, with what that line begins with.
    fn own_line(&self, said: &str) -> Edit {
        let prefix = self.prefix();
        let blank = prefix.len() - prefix.trim_start_matches([' ', '\t', '>']).len();
        let indent = prefix.get(..blank).unwrap_or_default();
        insertion(self.line, format!("{indent}{said}{}", line_end(self.text)))
    }

    fn latex(&self, sentence: &str) -> Edit {
        let said = format!("% indexwise: {sentence}");
        if !self.shared {
            return self.own_line(&said);
        }
        // In the middle of a line: a `%` before the break keeps it out of print where there is no blank.
        let prefix = self.prefix();
        let blank = prefix.is_empty() || prefix.ends_with([' ', '\t']);
        let end = line_end(self.text);
        insertion(self.start, format!("{}{end}{said}{end}", if blank { "" } else { "%" }))
    }

    fn markdown(&self, sentence: &str) -> Option<Edit> {
        let said = format!("<!-- indexwise: {sentence} -->");
        let prefix = self.prefix();
        let begins = prefix.trim_start_matches([' ', '\t', '>']).is_empty();
        if !begins {
            // At the start of a list item or a cell a comment would make raw HTML of the line.
            let words = prefix.chars().any(char::is_alphabetic);
            return words.then(|| insertion(self.start, format!("{said} ")));
        }
        let above = self.text.get(..self.line).unwrap_or_default();
        let above_end = above.trim_end_matches(['\n', '\r']).len();
        let last = above.get(line_start(self.text, above_end)?..above_end).unwrap_or_default();
        let paragraph = !last.trim_matches([' ', '\t', '>']).is_empty();
        let next_line = above.get(above_end..).unwrap_or_default().matches('\n').count() == 1;
        // A comment on a line of its own would cut the paragraph of an inline formula in two.
        if !self.display && paragraph && next_line {
            return Some(insertion(above_end, format!(" {said}")));
        }
        Some(self.own_line(&said))
    }
}

/// The edit that declares something in a document; nothing if the sentence would not be read there.
pub(super) fn declaration(view: &View, document: usize, sentence: &str) -> Option<Edit> {
    let (text, host) = (view.text(document), view.host(document));
    let edit = match last_declaring(view, document) {
        Some(directive) => continued(text, host, directive, sentence)?,
        None => opened(view, document, sentence)?,
    };
    view.declared_after(document, &edit).map(|_| edit)
}

/// The last directive before which or in which something is declared for the whole document.
fn last_declaring(view: &View, document: usize) -> Option<&Directive> {
    let declared = view.declared(document)?;
    let declares = |directive: &&Directive| {
        let inside = |span: &Span| directive.span.holds(*span);
        declared.sentences.iter().any(|(sentence, span)| inside(span) && !is_directive(sentence))
    };
    view.scan(document)?.directives.iter().rev().find(declares)
}

/// Whether a sentence speaks of the formula after it, or of findings, and declares nothing.
pub(super) fn is_directive(sentence: &Sentence) -> bool {
    matches!(sentence, Sentence::Skip | Sentence::Allow { .. } | Sentence::Check { .. })
}

/// The sentence after the last one of a directive, in the manner of that.
fn continued(text: &str, host: Host, directive: &Directive, sentence: &str) -> Option<Edit> {
    let (_, last) = directive.sentences.last()?;
    let line = line_start(text, last.start as usize)?;
    let lead = text.get(line..last.start as usize)?;
    let at = last.end as usize;
    let own_line = line > directive.span.start as usize && lead.trim_start_matches([' ', '\t', '%', '>']).is_empty();
    let end = line_end(text);
    let put = match host {
        _ if own_line => format!("{end}{lead}{sentence}"),
        Host::Latex => format!("{end}{}%   {sentence}", indent_of(text, directive.span.start as usize)),
        _ => format!("; {sentence}"),
    };
    Some(insertion(at, put))
}

/// A comment of its own: before the body of a document, else near its start.
fn opened(view: &View, document: usize, sentence: &str) -> Option<Edit> {
    let (text, host) = (view.text(document), view.host(document));
    let end = line_end(text);
    let (at, put) = match host {
        Host::Latex => {
            let begin = text.find("\\begin{document}").and_then(|at| line_start(text, at)).unwrap_or(0);
            (begin, format!("% indexwise: {sentence}{end}"))
        }
        Host::Markdown => (after_front_matter(text), format!("<!-- indexwise: {sentence} -->{end}{end}")),
        Host::Note => (after_title(view, document), format!("conventions{end}  {sentence}{end}{end}")),
    };
    Some(insertion(at, put))
}

/// The first byte after the block between `---` that a page may begin with.
fn after_front_matter(text: &str) -> usize {
    let Some(rest) = text.strip_prefix("---") else { return 0 };
    let Some(close) = rest.find("\n---") else { return 0 };
    let after = rest.get(close + 4..).unwrap_or_default();
    let line = after.find('\n').map_or(after.len(), |at| at + 1);
    3 + close + 4 + line
}

/// The first byte after the first blank line of a note, if that comes before its first formula.
fn after_title(view: &View, document: usize) -> usize {
    let text = view.text(document);
    let first = view.formulas(document).first().map_or(text.len(), |formula| formula.span.start as usize);
    let mut at = 0;
    for line in text.split_inclusive('\n') {
        at += line.len();
        if at > first {
            break;
        }
        if line.trim().is_empty() {
            return at;
        }
    }
    0
}

/// Puts a text at a place.
pub(super) fn insertion(at: usize, text: String) -> Edit {
    Edit { span: Span::new(at, at), text }
}

fn line_start(text: &str, at: usize) -> Option<usize> {
    Some(text.get(..at)?.rfind('\n').map_or(0, |line| line + 1))
}

fn indent_of(text: &str, at: usize) -> &str {
    let line = line_start(text, at).and_then(|line| text.get(line..at)).unwrap_or_default();
    if line.trim().is_empty() { line } else { "" }
}

/// How the lines of a text end.
fn line_end(text: &str) -> &'static str {
    let first = text.find('\n').and_then(|at| at.checked_sub(1)).and_then(|before| text.as_bytes().get(before));
    if first == Some(&b'\r') { "\r\n" } else { "\n" }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]

    use super::*;
    use crate::editing::cursor::view;
    use crate::finding::edited;

    const SENTENCE: &str = "check this";

    /// The text with a directive before its last formula; nothing if there is no place for one.
    fn directed(text: &str, host: Host) -> Option<String> {
        let view = view(text, host);
        let edit = before_formula(&view, 0, view.formulas(0).len() - 1, SENTENCE)?;
        edited(text, &[edit])
    }

    #[track_caller]
    fn before(host: Host, text: &str, want: &str) {
        assert_eq!(directed(text, host).as_deref(), Some(want), "{text}");
    }

    #[test]
    fn a_directive_in_latex() {
        before(Host::Latex, "so ($x = y$)\n", "% indexwise: check this\nso ($x = y$)\n");
        before(Host::Latex, "$a = b$,$x = y$", "$a = b$,%\n% indexwise: check this\n$x = y$");
        before(Host::Latex, "A\r\n  \\[ x = y \\]\r\n", "A\r\n  % indexwise: check this\r\n  \\[ x = y \\]\r\n");
        before(Host::Latex, "\\[ a = b\n\\] and $x = y$", "\\[ a = b\n\\] and \n% indexwise: check this\n$x = y$");
    }

    #[test]
    fn a_directive_in_markdown() {
        let said = "<!-- indexwise: check this -->";
        before(Host::Markdown, "> Text\n>\n> $$ x = y $$\n", &format!("> Text\n>\n> {said}\n> $$ x = y $$\n"));
        before(Host::Markdown, "Text $a_i$ and $x = y$", &format!("Text $a_i$ and {said} $x = y$"));
        before(Host::Markdown, "- so $x = y$", &format!("- so {said} $x = y$"));
        before(Host::Markdown, "```math\nx = y\n```\n", &format!("{said}\n```math\nx = y\n```\n"));
        for text in ["- $x = y$", "| $x = y$ |"] {
            assert_eq!(directed(text, Host::Markdown), None, "{text}");
        }
    }

    #[test]
    fn a_directive_in_a_note() {
        before(Host::Note, "A\n\n  a = b\n  x = y\n", "A\n\n  a = b\n  indexwise: check this\n  x = y\n");
    }

    #[track_caller]
    fn declares(host: Host, text: &str, want: &str) {
        let sentence = if host == Host::Note { "T_ij is symmetric" } else { "T_{ij} is symmetric" };
        let edit = declaration(&view(text, host), 0, sentence);
        let after = edit.and_then(|edit| edited(text, &[edit]));
        assert_eq!(after.as_deref(), Some(want), "{text}");
    }

    #[test]
    fn a_declaration_joins_the_others() {
        let said = "T_{ij} is symmetric";
        declares(
            Host::Latex,
            "  % indexwise: h is small\n$x$",
            &format!("  % indexwise: h is small\n  %   {said}\n$x$"),
        );
        declares(
            Host::Latex,
            "% indexwise:\n%   h is small\n$x$",
            &format!("% indexwise:\n%   h is small\n%   {said}\n$x$"),
        );
        declares(
            Host::Markdown,
            "<!-- indexwise: h is small -->\n",
            &format!("<!-- indexwise: h is small; {said} -->\n"),
        );
        declares(
            Host::Markdown,
            "```indexwise\nh is small\n```\n",
            &format!("```indexwise\nh is small\n{said}\n```\n"),
        );
        declares(
            Host::Note,
            "conventions\n  h is small\n\n  a = b\n",
            "conventions\n  h is small\n  T_ij is symmetric\n\n  a = b\n",
        );
        declares(Host::Note, "indexwise: h is small\n", "indexwise: h is small; T_ij is symmetric\n");
    }

    #[test]
    fn the_first_declaration_opens_a_comment() {
        let said = "T_{ij} is symmetric";
        declares(
            Host::Latex,
            "\\documentclass{article}\n\\begin{document}\n% indexwise: skip this\n$x$",
            &format!(
                "\\documentclass{{article}}\n% indexwise: {said}\n\\begin{{document}}\n% indexwise: skip this\n$x$"
            ),
        );
        declares(
            Host::Markdown,
            "---\na: b\n---\nText\n",
            &format!("---\na: b\n---\n<!-- indexwise: {said} -->\n\nText\n"),
        );
        declares(Host::Note, "Title\n\n  a = b\n", "Title\n\nconventions\n  T_ij is symmetric\n\n  a = b\n");
    }
}
