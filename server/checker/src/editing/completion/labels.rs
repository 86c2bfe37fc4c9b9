//! Labels of formulas, after `\eqref{`, `\ref{` and kin, and after `using` in a directive.

use indexwise_grammar::span::Span;

use crate::paper::View;

use super::{Suggestion, SuggestionKind, before};

/// Letters of a label, or of several, beyond which no reference is looked for.
const REACH: usize = 200;
/// Letters of a formula that are shown beside its label.
const SHOWN: usize = 60;

/// Labels where a reference is being typed.
pub(super) fn referred(view: &View, document: usize, offset: u32) -> Option<Vec<Suggestion>> {
    let before = before(view, document, offset);
    let open = before.rfind('{').filter(|open| before.len() - open < REACH)?;
    let typed = before.get(open + 1..)?;
    let command = before.get(..open)?.trim_end_matches('*');
    let name = command.get(command.rfind('\\')?..)?;
    let refers = name.ends_with("ref") && name.chars().skip(1).all(|letter| letter.is_ascii_alphabetic());
    if !refers || typed.contains(['}', '\n', '\\']) {
        return None;
    }
    let last = typed.rsplit(',').next().unwrap_or_default();
    Some(labels(view, offset, last.trim_start(), |label| label.to_owned()))
}

/// All labels of the paper that begin as typed, spelt by a function.
pub(super) fn labels(view: &View, offset: u32, typed: &str, spelt: impl Fn(&str) -> String) -> Vec<Suggestion> {
    let start = (offset as usize).saturating_sub(typed.len());
    let begun = typed.trim_start_matches('(');
    let mut out = Vec::new();
    for document in 0..view.len() {
        let text = view.text(document);
        for formula in view.formulas(document) {
            for (label, _) in formula.labels.iter().filter(|(label, _)| label.starts_with(begun)) {
                out.push(Suggestion {
                    label: label.to_string(),
                    detail: in_short(formula.span.of(text)),
                    documentation: None,
                    replaces: Span::new(start, offset as usize),
                    text: spelt(label),
                    kind: SuggestionKind::Label,
                    rank: 0,
                });
            }
        }
    }
    out
}

/// The beginning of a formula, on one line.
fn in_short(text: &str) -> String {
    let words: Vec<&str> = text.split_whitespace().collect();
    let line = words.join(" ");
    let short: String = line.chars().take(SHOWN).collect();
    if short.len() < line.len() { format!("{short}...") } else { short }
}
