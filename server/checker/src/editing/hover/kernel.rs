//! A kernel: its slots and symmetries, what declares and defines it, and where it is used first.

use indexwise_grammar::span::Span;

use crate::ledger::shown;
use crate::paper::View;
use crate::symbols::symmetries;

use crate::editing::kernels::{KernelName, defined_in_formulas, in_sentences, uses};
use crate::editing::parts::{What, parts_of};

use super::{Hover, code, line_of, times};

/// Declarations and definitions that are shown.
const SHOWN: usize = 4;
/// Signs of one that are shown.
const LONGEST: usize = 160;

pub(super) fn kernel(view: &View, document: usize, span: Span, kernel: &KernelName) -> Hover {
    let slots = match kernel.slots {
        0 => "no slots".to_owned(),
        1 => "one slot".to_owned(),
        slots => format!("{slots} slots"),
    };
    let mut lines =
        vec![format!("**{}**: kernel with {slots}{}", shown(&kernel.name), properties(view, document, span))];
    lines.extend(said(view, document, kernel));
    lines.push(first_use(view, document, kernel));
    Hover { span, markdown: lines.join("\n\n") }
}

/// What the use at a place is symmetric in.
fn properties(view: &View, document: usize, span: Span) -> String {
    let text = view.text(document);
    let mut words: Vec<String> = Vec::new();
    view.each_tree(document, Span { start: span.start, end: span.start }, |asked| {
        for part in parts_of(asked, text).parts.iter().filter(|part| part.span == span) {
            if let What::Kernel(made) = &part.what {
                words = symmetries(made, asked.eyes);
            }
        }
    });
    words.into_iter().map(|word| format!(", {word}")).collect()
}

/// The sentences that declare a kernel and the formulas that define it.
fn said(view: &View, document: usize, kernel: &KernelName) -> Vec<String> {
    let mut out: Vec<String> = Vec::new();
    for number in 0..view.len() {
        let text = view.text(number);
        let sentences = view.declared(number).map_or(&[][..], |declared| &declared.sentences);
        for (place, _) in in_sentences(view, number, kernel).iter().filter(|(_, declares)| *declares) {
            let sentence = sentences.iter().find(|(_, span)| span.holds(place.span));
            out.extend(sentence.map(|(_, span)| format!("declared: {}", shortened(span.of(text)))));
        }
        for (_, statement) in defined_in_formulas(view, number, kernel) {
            out.push(format!("defined: {}", shortened(statement.of(text))));
        }
    }
    out.dedup();
    let known = view.declared(document).is_some_and(|own| own.meanings.known(&kernel.name, kernel.slots).is_some());
    if out.is_empty() && known {
        out.push("declared outside of the paper".to_owned());
    }
    out.truncate(SHOWN);
    out
}

fn shortened(text: &str) -> String {
    let cut: String = text.chars().take(LONGEST).collect();
    if cut.len() == text.len() { code(text) } else { format!("{} ...", code(&cut)) }
}

fn first_use(view: &View, document: usize, kernel: &KernelName) -> String {
    let text = view.text(document);
    let all = uses(view, document, kernel);
    match all.first() {
        Some(first) => {
            format!("used {} in this document, first in line {}", times(all.len()), line_of(text, first.span.start))
        }
        None => "not used in a formula of this document".to_owned(),
    }
}
