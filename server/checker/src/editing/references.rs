//! Where something is spoken of, and where it is defined: kernels, labels, macros and indices, in all files of a paper.
//!
//! A kernel's definitions are the sentences that declare it, then the formulas that define it by `:=`; of a kernel
//! without either, its first use. An index is defined where its family is declared, its references are the places of
//! its statement. What the configuration of a project declares stands in no file of the paper.

use indexwise_grammar::conventions::Sentence;
use indexwise_grammar::span::Span;

use crate::conventions::built_in::bare_letter;
use crate::paper::View;

use super::commands::{calls, definitions};
use super::kernels::{KernelName, defined_in_formulas, in_sentences, uses};
use super::labels::mentions;
use super::under::{Held, Under, under};

/// A file of a paper.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum File {
    /// A document, by its number.
    Document(usize),
    /// A style, by its number in `Paper::styles`.
    Style(usize),
}

/// A place in a file of a paper.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct Location {
    /// The file.
    pub file: File,
    /// The place in its text.
    pub span: Span,
}

/// Every place that speaks of what stands at a byte offset, in the order of files and places; those where it is
/// defined only if they are asked for.
pub fn references(view: &View, document: usize, offset: u32, with_declarations: bool) -> Vec<Location> {
    let Some(found) = under(view, document, offset) else { return Vec::new() };
    let mut all: Vec<Location> = match &found {
        Under::Label(own) => labels(view, |one| one.name == own.name && !one.given),
        Under::Macro(_, own) => in_documents(view, |number| calls(view, number, own)),
        Under::Index(held) => here(document, held.spans.iter().copied()),
        Under::Kernel(_, kernel) => in_documents(view, |number| {
            let said = in_sentences(view, number, kernel).into_iter().map(|(place, _)| place);
            uses(view, number, kernel).into_iter().chain(said).map(|place| place.span).collect()
        }),
        Under::Other(_) => Vec::new(),
    };
    let defined = defined(view, document, &found);
    all.retain(|place| !defined.contains(place));
    if with_declarations {
        all.extend(defined);
    }
    all.sort_unstable();
    all.dedup();
    all
}

/// Where what stands at a byte offset is defined, the best place first.
pub fn definition(view: &View, document: usize, offset: u32) -> Vec<Location> {
    under(view, document, offset).map(|found| defined(view, document, &found)).unwrap_or_default()
}

fn defined(view: &View, document: usize, found: &Under) -> Vec<Location> {
    match found {
        Under::Label(own) => labels(view, |one| one.name == own.name && one.given),
        Under::Macro(_, own) => definitions(view, own),
        Under::Index(held) => family(view, document, held),
        Under::Kernel(_, kernel) => kernel_defined(view, kernel),
        Under::Other(_) => Vec::new(),
    }
}

/// Where a kernel is declared, else defined, else used first.
pub(super) fn kernel_defined(view: &View, kernel: &KernelName) -> Vec<Location> {
    let declared = |number: usize| {
        let said = in_sentences(view, number, kernel).into_iter().filter(|(_, declares)| *declares);
        said.map(|(place, _)| place.span).collect()
    };
    let mut out = in_documents(view, declared);
    out.extend(in_documents(view, |number| {
        defined_in_formulas(view, number, kernel).into_iter().map(|(place, _)| place).collect()
    }));
    if out.is_empty() {
        let first = |number: usize| {
            let first = uses(view, number, kernel).first().map(|place| place.span);
            first.map(|span| Location { file: File::Document(number), span })
        };
        out.extend((0..view.len()).find_map(first));
    }
    out
}

/// The places in the sentences that put an index into its family: those of the document itself, else of the root.
fn family(view: &View, document: usize, held: &Held) -> Vec<Location> {
    let letter = held.index.letter.as_str();
    let said = |number: usize| {
        let sentences = view.declared(number).map_or(&[][..], |declared| &declared.sentences);
        let letters = sentences.iter().flat_map(|(sentence, _)| match sentence {
            Sentence::Family { letters, .. } | Sentence::Spatial { letters, .. } | Sentence::Frame { letters, .. } => {
                letters.as_slice()
            }
            Sentence::Cartesian(letters) => letters,
            _ => &[],
        });
        let own = letters.filter(|name| name.text == letter || name.text == bare_letter(letter));
        here(number, own.map(|name| name.span))
    };
    let own = said(document);
    if own.is_empty() && document > 0 { said(0) } else { own }
}

fn labels(view: &View, wanted: impl Fn(&super::labels::Mention) -> bool) -> Vec<Location> {
    in_documents(view, |number| {
        mentions(view, number).into_iter().filter(|one| wanted(one)).map(|one| one.span).collect()
    })
}

fn in_documents(view: &View, spans: impl Fn(usize) -> Vec<Span>) -> Vec<Location> {
    (0..view.len()).flat_map(|number| here(number, spans(number).into_iter())).collect()
}

fn here(document: usize, spans: impl Iterator<Item = Span>) -> Vec<Location> {
    spans.map(|span| Location { file: File::Document(document), span }).collect()
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::indexing_slicing)]
    use super::*;
    use crate::editing::cursor::{paper_of, with_cursor};
    use crate::paper::Cancel;
    use indexwise_grammar::hosts::Host;

    /// References and definitions for the cursor in the first text, each as `file:place:letters`.
    fn asked(texts: &[&str], styles: &[&str]) -> (Vec<String>, Vec<String>) {
        let (first, offset) = with_cursor(texts[0]);
        let mut all = vec![first.as_str()];
        all.extend(&texts[1..]);
        let documents: Vec<(Host, &str)> = all.iter().map(|text| (Host::Latex, *text)).collect();
        let view = View::of(&paper_of(&documents, styles), &Cancel::default());
        let shown = |place: &Location| match place.file {
            File::Document(number) => format!("{number}:{}:{}", place.span.start, place.span.of(all[number])),
            File::Style(number) => format!("style {number}:{}", place.span.of(styles[number])),
        };
        let references = references(&view, 0, offset, false).iter().map(shown).collect();
        (references, definition(&view, 0, offset).iter().map(shown).collect())
    }

    #[track_caller]
    fn finds(texts: &[&str], styles: &[&str], references: &[&str], definitions: &[&str]) {
        let (found, defined) = asked(texts, styles);
        assert_eq!(found, references, "references of {texts:?}");
        assert_eq!(defined, definitions, "definitions of {texts:?}");
    }

    #[test]
    fn labels_in_all_files() {
        finds(
            &["See \\eqref{‸eq:u}, \\eqref{eq:v}.", "\\[u_i = w_i \\label{eq:u}\\] and \\ref{eq:u}"],
            &[],
            &["0:11:eq:u", "1:36:eq:u"],
            &["1:19:eq:u"],
        );
    }

    #[test]
    fn kernels_by_sentences_and_definitions() {
        finds(
            &["% indexwise: E_{ij} is symmetric\n$‸E_{ij} = E_{ji}$", "$E_{ij} := \\partial_i u_j$ and $E_i$"],
            &[],
            &["0:34:E", "0:43:E"],
            &["0:13:E", "1:1:E"],
        );
        finds(&["$A_i = B_i$ and $‸A_j = C_j$"], &[], &["0:17:A"], &["0:1:A"]);
    }

    #[test]
    fn macros_in_documents_and_styles() {
        finds(
            &["\\newcommand{\\E}{\\kappa}$\\‸E_{ij} = \\E_{ji}$"],
            &[],
            &["0:24:\\E", "0:34:\\E"],
            &["0:0:\\newcommand{\\E}{\\kappa}"],
        );
        finds(
            &["$\\‸E_{ij} = 0$"],
            &["\\newcommand{\\E}{\\kappa}"],
            &["0:1:\\E"],
            &["style 0:\\newcommand{\\E}{\\kappa}"],
        );
    }

    #[test]
    fn an_index_is_defined_where_its_family_is() {
        finds(
            &["% indexwise: i j k run from 1 to 3\n$A_‸i = B_i$ and $C_i = D_i$"],
            &[],
            &["0:38:i", "0:44:i"],
            &["0:13:i"],
        );
    }
}
