//! What a paper implies of its conventions, for an author who begins to write them down.

use crate::conventions::implied::{Implied, families, metric, symmetry};
use crate::conventions::inferred::Prices;
use crate::terms::symmetries::Customs;
use crate::terms::{Eyes, sides};

use super::judging::Trees;
use super::{Cancel, Paper, Sketched, gather, read_paper, total};

/// The sentences that a paper implies, each once: families and the metric by its first document that shows any,
/// symmetries of all documents.
pub fn implied(paper: &Paper, cancel: &Cancel) -> Vec<Implied> {
    let read = read_paper(paper);
    let sketched: Vec<Sketched<'_>> = read.iter().map(Sketched::of).collect();
    let evidence = gather(&sketched, cancel);
    let all = total(&evidence);
    let mut out: Vec<Implied> = Vec::new();
    let mut symmetries: Vec<Implied> = Vec::new();
    for document in &sketched {
        // The habits of the whole paper: its conventions stand in one place.
        let (declared, macros) = (&document.read.declared, &document.read.macros);
        let prices = Prices { file: &all, paper: &all, declared, macros };
        if out.is_empty() {
            out.extend(families(&prices));
            out.extend(metric(&prices));
        }
        stated(document, &prices, &mut symmetries);
    }
    out.extend(symmetries);
    out
}

/// Symmetries that formulas of a document state.
fn stated(document: &Sketched<'_>, prices: &Prices<'_>, out: &mut Vec<Implied>) {
    let scores = document.scores(prices);
    let customs = Customs::of(document.read.text, prices);
    let mut trees = Trees::default();
    for statement in document.statements.iter().filter(|statement| statement.sketch.sides.len() > 1) {
        let reading = statement.read(&scores);
        if !reading.odd.is_empty() {
            continue;
        }
        let eyes = Eyes::new(statement.sketch, &reading.choice, prices, customs);
        let found = trees.statement(document.read, statement.formula, statement.sketch.span, |tree| {
            let sides = sides(tree, &eyes);
            sides.windows(2).filter_map(|pair| symmetry(pair.first()?, pair.get(1)?)).collect::<Vec<_>>()
        });
        for implied in found {
            if out.iter().all(|other| other.sentence != implied.sentence) {
                out.push(implied);
            }
        }
    }
}
