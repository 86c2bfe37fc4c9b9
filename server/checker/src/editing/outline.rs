//! The outline of a document: its formulas by label, with their rows, and what is declared.
//!
//! Only formulas that are set on their own, or have a label, or are derivations: letters in a sentence would drown them.
//! One without a label is told by its number among these.

use indexwise_grammar::hosts::{Host, Region, Setting};
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::Formula;

use crate::paper::View;

use super::rows::{lines_of, rows_of};
use super::saying::is_directive;

/// An entry of the outline.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Entry {
    /// A label, a number, or a sentence.
    pub name: String,
    /// The beginning of what it says.
    pub detail: String,
    /// What it is.
    pub kind: EntryKind,
    /// The whole.
    pub span: Span,
    /// The part that names it, inside of the whole.
    pub name_span: Span,
    /// What it is made of, in order.
    pub children: Vec<Self>,
}

/// What an entry is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum EntryKind {
    /// A formula, or a row of one.
    Formula,
    /// A formula with a chain of equalities.
    Derivation,
    /// A sentence of the conventions, or several together.
    Declaration,
}

/// Letters of a formula that are shown beside its name.
const SHOWN: usize = 60;

/// The outline of a document in the order of the text.
pub fn outline(view: &View, document: usize) -> Vec<Entry> {
    let mut out = declarations(view, document);
    let chains = view.chains(document);
    let regions = view.scan(document).map_or(&[][..], |scan| &scan.regions);
    let mut number = 0;
    for (at, (formula, region)) in view.formulas(document).iter().zip(regions).enumerate() {
        let derivation = chains.binary_search(&at).is_ok();
        if formula.display || !formula.labels.is_empty() || derivation {
            number += 1;
            out.push(entry(view.text(document), view.host(document), formula, region, number, derivation));
        }
    }
    out.sort_by_key(|entry| entry.span);
    out
}

fn entry(text: &str, host: Host, formula: &Formula, region: &Region, number: usize, derivation: bool) -> Entry {
    let rows =
        if host == Host::Note { lines_of(text, after_label(region.body, formula)) } else { rows_of(text, region.body) };
    let label = formula.labels.first();
    let name_span = label.map(|(_, span)| *span).filter(|span| formula.span.holds(*span));
    let first = rows.first().copied().unwrap_or(region.body);
    let several = region.setting == Setting::Rows || rows.len() > 1;
    let children = if several { rows.iter().map(|row| row_entry(text, *row)).collect() } else { Vec::new() };
    Entry {
        name: label.map_or_else(|| format!("formula {number}"), |(label, _)| label.to_string()),
        detail: in_short(first.of(text)),
        kind: if derivation { EntryKind::Derivation } else { EntryKind::Formula },
        span: formula.span,
        name_span: name_span.unwrap_or(first),
        children,
    }
}

/// The body of a note's formula without the `(name)` that it begins with.
fn after_label(body: Span, formula: &Formula) -> Span {
    let label = formula.labels.first().map(|(_, span)| *span).filter(|span| span.start <= body.start + 1);
    label.map_or(body, |label| Span { start: (label.end + u32::from(label.start > body.start)).min(body.end), ..body })
}

fn row_entry(text: &str, row: Span) -> Entry {
    let (name, detail) = (in_short(row.of(text)), String::new());
    Entry { name, detail, kind: EntryKind::Formula, span: row, name_span: row, children: Vec::new() }
}

/// Directives that declare something, each with its sentences.
fn declarations(view: &View, document: usize) -> Vec<Entry> {
    let (Some(scan), Some(declared)) = (view.scan(document), view.declared(document)) else { return Vec::new() };
    let text = view.text(document);
    let mut out = Vec::new();
    for directive in &scan.directives {
        let own =
            declared.sentences.iter().filter(|(sentence, span)| directive.span.holds(*span) && !is_directive(sentence));
        let mut sentences: Vec<Entry> =
            own.map(|(_, span)| Entry { kind: EntryKind::Declaration, ..row_entry(text, *span) }).collect();
        match sentences.len() {
            0 => {}
            1 => out.append(&mut sentences),
            count => out.push(Entry {
                name: "conventions".to_owned(),
                detail: format!("{count} sentences"),
                kind: EntryKind::Declaration,
                span: directive.span,
                name_span: sentences.first().map_or(directive.span, |first| first.span),
                children: sentences,
            }),
        }
    }
    out
}

/// The beginning of a text on one line, without layout.
fn in_short(text: &str) -> String {
    let words: Vec<&str> =
        text.split(|sign: char| sign.is_whitespace() || sign == '&').filter(|word| !word.is_empty()).collect();
    let line = words.join(" ");
    let short: String = line.chars().take(SHOWN).collect();
    if short.len() < line.len() { format!("{short}...") } else { short }
}

#[cfg(test)]
mod tests {
    use indexwise_grammar::hosts::Host;

    use super::*;
    use crate::editing::cursor::view;

    fn told(entries: &[Entry], indent: &str, out: &mut String) {
        for entry in entries {
            assert!(entry.span.holds(entry.name_span), "{entry:?}");
            out.push_str(&format!("{indent}{:?} {} | {}\n", entry.kind, entry.name, entry.detail));
            told(&entry.children, &format!("{indent}  "), out);
        }
    }

    #[track_caller]
    fn shows(text: &str, host: Host, want: &str) {
        let mut out = String::new();
        told(&outline(&view(text, host), 0), "", &mut out);
        assert_eq!(out, want);
    }

    #[test]
    fn formulas_rows_and_declarations() {
        shows(
            "% indexwise: h is small\n% indexwise: i j run from 1 to 3\n%   T_{ij} is symmetric\nHere $x_i$ is\n\
             \\begin{align}\\label{eq:chain}\n A_i &= B_{ij} C_j \\\\\n &= D_i\n\\end{align}\n\
             % indexwise: skip this\n\\[ E_i = \\begin{pmatrix} 1 \\\\ 2 \\end{pmatrix} \\]\n",
            Host::Latex,
            "Declaration h is small | \n\
             Declaration conventions | 2 sentences\n\
             \x20 Declaration i j run from 1 to 3 | \n\
             \x20 Declaration T_{ij} is symmetric | \n\
             Derivation eq:chain | A_i = B_{ij} C_j\n\
             \x20 Formula A_i = B_{ij} C_j | \n\
             \x20 Formula = D_i | \n\
             Formula formula 2 | E_i = \\begin{pmatrix} 1 \\\\ 2 \\end{pmatrix}\n",
        );
    }

    #[test]
    fn a_note_has_its_lines() {
        shows(
            "Sheet\n\n  (trace) G_ii = 2 k\n          = k + k\n\n  A_i = B_i\n",
            Host::Note,
            "Derivation trace | G_ii = 2 k\n\x20 Formula G_ii = 2 k | \n\x20 Formula = k + k | \nFormula formula 2 | A_i = B_i\n",
        );
    }

    #[test]
    fn a_text_without_formulas_has_none() {
        shows("Words, and $x$.", Host::Latex, "");
    }
}
