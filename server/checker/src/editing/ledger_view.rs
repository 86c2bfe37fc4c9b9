//! The ledger of the statement at a place: every side and term with its free and summed letters, and what is known of it.

use indexwise_grammar::span::Span;

use crate::finding::{JudgedStep, LedgerIndex};
use crate::ledger::{Judged, TermRow, shown, side_title};
use crate::paper::{Asked, DocumentAnalysis, View};
use crate::terms::{Flattened, Product};

/// A statement with its ledger.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct LedgerView {
    /// The statement.
    pub span: Span,
    /// Its text as the author wrote it.
    pub text: String,
    /// Each side, and where a side has several terms each of these after it.
    pub rows: Vec<ViewRow>,
    /// The verdicts at its relations, in order.
    pub marks: Vec<JudgedStep>,
}

/// One side or term.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct ViewRow {
    /// "left side", "right side, term 2".
    pub title: String,
    /// Where it stands.
    pub span: Span,
    /// Free letters with their levels, in the order of their first place; `odd` where the letter does not balance.
    pub free: Vec<LedgerIndex>,
    /// Letters summed over.
    pub summed: Vec<LedgerIndex>,
    /// Whether it matches any free letters: zero, words, a list.
    pub any: bool,
    /// Why it is zero by symmetry, if it is known to be.
    pub vanishes: Option<String>,
}

/// The ledger of the statement at a place; nothing where no statement with scripts stands that is looked at.
pub fn ledger_at(view: &View, document: usize, offset: u32, analysis: Option<&DocumentAnalysis>) -> Option<LedgerView> {
    let text = view.text(document);
    let mut ledger = view.statement_at(document, offset, |asked| ledger(asked, text)).ok()?;
    let marks = analysis.map_or(&[][..], |analysis| &analysis.steps);
    ledger.marks = marks.iter().filter(|mark| ledger.span.holds(mark.span)).cloned().collect();
    Some(ledger)
}

fn ledger(asked: &Asked<'_>, text: &str) -> LedgerView {
    let judged = asked.judged(text);
    let balanced = asked.reading.odd.is_empty() && asked.sketch.unjudged.is_none();
    let terms = Flattened::new(asked.tree, &judged, asked.eyes);
    let (all, sides) = (judged.rows(), asked.sketch.sides.len());
    let mut rows = Vec::new();
    for (number, side) in asked.sketch.sides.iter().enumerate() {
        let own: Vec<&TermRow> = all.iter().filter(|row| row.side == number).collect();
        let title = side_title(sides, number);
        let vanishes = |row: &TermRow| vanishes(&terms, row).filter(|_| balanced);
        match own.as_slice() {
            [one] => rows.push(ViewRow { vanishes: vanishes(one), ..view_row(&judged, title, one) }),
            own => {
                rows.push(ViewRow { span: side.span, ..whole_side(&judged, &title, own) });
                for row in own {
                    let title = format!("{title}, term {}", row.term + 1);
                    rows.push(ViewRow { vanishes: vanishes(row), ..view_row(&judged, title, row) });
                }
            }
        }
    }
    let span = asked.sketch.span;
    LedgerView { span, text: span.of(text).to_owned(), rows, marks: Vec::new() }
}

/// The row of a side: what is free in its first term that has letters of its own, and all that is summed.
fn whole_side(judged: &Judged<'_>, title: &str, own: &[&TermRow]) -> ViewRow {
    let told = own.iter().find(|row| !row.any);
    let mut out = told.map(|row| view_row(judged, title.to_owned(), row)).unwrap_or_default();
    out.title = title.to_owned();
    out.any = told.is_none();
    for row in own {
        let more = view_row(judged, String::new(), row).summed;
        out.summed.extend(more.into_iter().filter(|index| !out.summed.contains(index)).collect::<Vec<_>>());
    }
    out
}

fn view_row(judged: &Judged<'_>, title: String, row: &TermRow) -> ViewRow {
    let index = |letter: &str, level| {
        let odd = judged.reading.odd.iter().any(|(other, _)| other == letter);
        LedgerIndex { letter: shown(letter), level, odd }
    };
    ViewRow {
        title,
        span: row.span,
        free: row.free.iter().map(|(letter, place)| index(letter, judged.level(*place))).collect(),
        summed: row.summed.iter().map(|letter| index(letter, "")).collect(),
        any: row.any,
        vanishes: None,
    }
}

/// Why a term is zero: every product that it is made of vanishes by symmetry.
fn vanishes(terms: &Flattened<'_>, row: &TermRow) -> Option<String> {
    let side = terms.sides.get(row.side).filter(|side| side.complete)?;
    let own: Vec<&Product> = side.products.iter().filter(|product| product.span == row.span).collect();
    let bracket = |product: &&&Product| product.brackets.iter().any(|bracket| terms.bracket_zero(product, bracket));
    let contraction = |product: &&&Product| terms.contraction_zero(product).is_some();
    if own.is_empty() || !own.iter().all(|product| bracket(&product) || contraction(&product)) {
        return None;
    }
    let brackets = own.iter().all(|product| bracket(&product));
    Some(
        if brackets { "its brackets hold slots of the other symmetry" } else { "its contractions cancel by symmetry" }
            .to_owned(),
    )
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]

    use indexwise_grammar::hosts::Host;

    use super::*;
    use crate::editing::cursor::Placed;

    #[track_caller]
    fn shows(text: &str, want: &[&str]) -> Option<LedgerView> {
        let placed = Placed::new(text, Host::Latex);
        let found = ledger_at(&placed.view, 0, placed.at(), Some(&placed.analysis()));
        let letters = |list: &[LedgerIndex]| {
            let said =
                |index: &LedgerIndex| format!("{} {}{}", index.letter, index.level, if index.odd { "!" } else { "" });
            list.iter().map(said).map(|said| said.trim_end().to_owned()).collect::<Vec<_>>().join(", ")
        };
        let rows = found.iter().flat_map(|ledger| &ledger.rows).map(|row| {
            let gone = row.vanishes.as_ref().map(|_| " gone").unwrap_or_default();
            format!("{}: {} | {}{gone}", row.title, letters(&row.free), letters(&row.summed))
        });
        assert_eq!(rows.collect::<Vec<_>>(), want, "{text}");
        found
    }

    #[test]
    fn sides_and_terms_with_their_letters() {
        let ledger = shows(
            "Here $v^\\mu = ‸g^{\\mu\\nu} u_\\nu + w^\\mu$ and $x$.",
            &[
                "left side: μ up | ",
                "right side: μ up | ν",
                "right side, term 1: μ up | ν",
                "right side, term 2: μ up | ",
            ],
        );
        assert_eq!(ledger.unwrap().text, "v^\\mu = g^{\\mu\\nu} u_\\nu + w^\\mu");
        shows("$p‸$ and $x = y$", &[]);
    }

    #[test]
    fn odd_letters_are_marked() {
        shows("$A_{ij} = B_{ik} C_{kj}$ and $A_{ij} = ‸B_{ik}$", &["left side: i, j ! | ", "right side: i, k ! | "]);
    }

    #[test]
    fn a_term_that_vanishes_and_verdicts() {
        let lead = "% indexwise: i j run from 1 to 3; i j are cartesian; F_{ij} is antisymmetric; S_{ij} is symmetric; check this\n";
        let ledger = shows(
            &format!("{lead}$q = ‸S_{{ij}} S_{{ij}} + F_{{ij}} S_{{ij}} = S_{{ij}} S_{{ij}}$"),
            &[
                "side 1:  | ",
                "side 2:  | i, j",
                "side 2, term 1:  | i, j",
                "side 2, term 2:  | i, j gone",
                "side 3:  | i, j",
            ],
        );
        let signs: Vec<_> = ledger.unwrap().marks.iter().map(|mark| mark.outcome()).collect();
        assert!(signs.contains(&crate::finding::Outcome::Holds), "{signs:?}");
    }
}
