//! Statements: sides with relations between them.

use chumsky::prelude::*;

use crate::tree::{Relation, RelationKind, Statement, Sum};

use super::lexeme::{Kind, Lexeme};
use super::spelling;
use super::{Extra, Input, join_all};

/// `side rel side rel side`; never fails on lexemes that a sum can take.
pub(super) fn statement<'a>(
    sum: impl Parser<'a, Input<'a>, Sum, Extra> + Clone + 'a,
) -> impl Parser<'a, Input<'a>, Statement, Extra> + Clone + 'a {
    let relation = any_ref().filter(|lexeme: &&Lexeme| compares(lexeme).is_some()).map(|lexeme: &Lexeme| Relation {
        kind: compares(lexeme).unwrap_or(RelationKind::Free),
        sign: spelling::relation(lexeme),
        span: lexeme.span,
    });
    let first = sum.clone().map(|side| Statement { span: side.span, sides: vec![side], relations: Vec::new() });
    first.foldl(relation.then(sum).repeated(), |mut statement, (relation, side)| {
        statement.span = join_all([statement.span, relation.span, side.span]);
        statement.relations.push(relation);
        statement.sides.push(side);
        statement
    })
}

/// How a lexeme compares, if it is a relation.
fn compares(lexeme: &Lexeme) -> Option<RelationKind> {
    match lexeme.kind {
        Kind::Equal => Some(RelationKind::Equal),
        Kind::Loose => Some(loose(&lexeme.text)),
        Kind::Arrow => Some(RelationKind::Free),
        _ => None,
    }
}

/// Relations of order and inequality compare numbers, the others (`\sim`, `\approx`) whole expressions.
fn loose(text: &str) -> RelationKind {
    const EXPRESSIONS: &[&str] = &[
        "approx",
        "simeq",
        "sim",
        "cong",
        "propto",
        "asymp",
        "thickapprox",
        "thicksim",
        "approxeq",
        "varpropto",
        "eqsim",
        "≈",
        "∼",
        "≃",
        "≅",
        "∝",
    ];
    if EXPRESSIONS.contains(&text) { RelationKind::Loose } else { RelationKind::Order }
}
