//! Statements: sides with relations between them.

use chumsky::prelude::*;

use crate::tree::{Relation, RelationKind, Statement, Sum};

use super::lexeme::{Kind, Lexeme};
use super::{Extra, Input, join_all};

/// `side rel side rel side`; never fails on lexemes that a sum can take.
pub(super) fn statement<'a>(
    sum: impl Parser<'a, Input<'a>, Sum, Extra> + Clone + 'a,
) -> impl Parser<'a, Input<'a>, Statement, Extra> + Clone + 'a {
    let relation = select_ref! {
        Lexeme { kind: Kind::Equal, span, .. } => Relation { kind: RelationKind::Equal, span: *span },
        Lexeme { kind: Kind::Loose, span, text } => Relation { kind: loose(text), span: *span },
        Lexeme { kind: Kind::Arrow, span, .. } => Relation { kind: RelationKind::Free, span: *span },
    };
    let first = sum.clone().map(|side| Statement { span: side.span, sides: vec![side], relations: Vec::new() });
    first.foldl(relation.then(sum).repeated(), |mut statement, (relation, side)| {
        statement.span = join_all([statement.span, relation.span, side.span]);
        statement.relations.push(relation);
        statement.sides.push(side);
        statement
    })
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
