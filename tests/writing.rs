//! What is written is read again as it was: every statement of the fixtures, of the demonstration documents and of
//! generated ones, in LaTeX and as a note.
//!
//! Two trees are the same if their dumps are, and if their scripts are set apart at the same places. Statements that
//! cannot be written in full (a matrix, a quantity with a unit, words) are counted, and few. A note has no stacked
//! fractions: there it is asked that the second writing is the first, and fractions apart, that the trees agree.

#![allow(clippy::panic, clippy::unwrap_used, clippy::expect_used)]

use indexwise_grammar::hosts::Host;
use indexwise_grammar::macros::Macros;
use indexwise_grammar::tree::{Atom, Formula, FractionKind, Statement, dump, walk};
use indexwise_grammar::write::{Dialect, Written, write_statement};
use indexwise_grammar::{read, read_formula, read_note_formula};
use indexwise_tests::annotations::Fixture;
use indexwise_tests::{documents_below, generate};

/// Documents that are generated, each with its own seed.
const GENERATED: u64 = 4;
/// Bytes of a generated document.
const SIZE: usize = 20_000;

/// Every statement of every document.
fn statements() -> Vec<Statement> {
    let mut texts: Vec<(Host, String)> = Vec::new();
    texts.extend(documents_below("fixtures").into_iter().map(|(_, host, text)| (host, Fixture::read(&text).text)));
    texts.extend(documents_below("documents").into_iter().map(|(_, host, text)| (host, text)));
    texts.extend((0..GENERATED).map(|seed| (Host::Latex, generate::document(seed, SIZE))));
    let read = |(host, text): &(Host, String)| read(text, *host, &Macros::default()).formulas;
    texts.iter().flat_map(read).flat_map(|formula| formula.statements).collect()
}

/// A statement as a line, with what the dump leaves out.
fn shape(statement: &Statement) -> String {
    let mut apart = String::new();
    for side in &statement.sides {
        walk(side, &mut |factor| {
            apart.extend(factor.scripts.iter().map(|script| match (script.staggered, script.before) {
                (false, false) => '.',
                (true, false) => 's',
                (_, true) => 'b',
            }));
        });
    }
    dump(&Formula { statements: vec![statement.clone()], ..Formula::default() }) + "  " + &apart
}

fn shapes(statements: &[Statement]) -> String {
    statements.iter().map(shape).collect::<Vec<_>>().join("\n")
}

fn as_note(text: &str) -> Vec<Statement> {
    read_note_formula(text).statements
}

/// Whether a statement holds one sum above another, which a note writes with a slash.
fn holds_quotient(statement: &Statement) -> bool {
    let mut found = false;
    for side in &statement.sides {
        walk(side, &mut |factor| {
            found |= matches!(&factor.atom, Atom::Fraction(fraction) if fraction.kind == FractionKind::Quotient);
        });
    }
    found
}

/// Writes all, reads all again; what differs is shown, and how many could not be written in full.
fn compare(dialect: Dialect, again: fn(&str) -> Vec<Statement>, fair: fn(&Statement) -> bool) -> (Vec<String>, usize) {
    let (mut wrong, mut incomplete) = (Vec::new(), 0);
    for statement in statements() {
        let Written { text, complete } = write_statement(&statement, dialect);
        incomplete += usize::from(!complete);
        if !complete || !fair(&statement) {
            continue;
        }
        let (before, after) = (shape(&statement), shapes(&again(&text)));
        if before != after {
            wrong.push(format!("{text}\n   was {before}\n   is  {after}"));
        }
    }
    (wrong, incomplete)
}

#[test]
fn latex_is_read_as_it_was() {
    let (wrong, incomplete) =
        compare(Dialect::Latex, |text| read_formula(text, &Macros::default()).statements, |_| true);
    assert!(wrong.is_empty(), "{} differ\n{}", wrong.len(), wrong.join("\n"));
    let all = statements().len();
    assert!(all > 1000 && incomplete * 20 < all, "{incomplete} of {all} cannot be written in full");
}

#[test]
fn notes_are_read_as_they_were() {
    let (wrong, incomplete) = compare(Dialect::Note, as_note, |statement| !holds_quotient(statement));
    assert!(wrong.is_empty(), "{} differ\n{}", wrong.len(), wrong.join("\n"));
    let all = statements().len();
    assert!(incomplete * 20 < all, "{incomplete} of {all} cannot be written in full");
}

#[test]
fn a_note_is_written_again_as_it_was() {
    let mut wrong = Vec::new();
    for statement in statements() {
        let first = write_statement(&statement, Dialect::Note);
        let again: Vec<String> =
            as_note(&first.text).iter().map(|statement| write_statement(statement, Dialect::Note).text).collect();
        if first.complete && again.join("\n") != first.text {
            wrong.push(format!("{}\n   {}", first.text, again.join("\n   ")));
        }
    }
    assert!(wrong.is_empty(), "{} differ\n{}", wrong.len(), wrong.join("\n"));
}
