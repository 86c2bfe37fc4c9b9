//! Tokens to statements.
//!
//! `tidy` gives tokens their meaning, `brackets` matches, `segments` cuts into statements; the parsers in
//! `relation`, `sum`, `factor` and `script` (chumsky) then read each statement in one pass without a second try.
//! They cannot fail: whatever they do not know becomes an unread part.

mod brackets;
mod factor;
mod lexeme;
mod note;
mod relation;
mod script;
mod segments;
mod spelling;
mod sum;
mod tidy;

use chumsky::prelude::*;

use crate::macros::Macros;
use crate::macros::expansion::expand;
use crate::span::Span;
use crate::tokens::Token;
use crate::tree::{Formula, Statement, Unread};

use lexeme::{Kind, Lexeme, Prepared};
pub(crate) use script::numbered;

type Input<'a> = &'a [Lexeme];
type Extra = extra::Default;

/// Lexemes of one formula beyond which it is not read.
const LEXEME_BUDGET: usize = 60_000;

/// A formula before parsing.
pub(crate) enum Draft {
    /// Cut into statements.
    Prepared(Prepared),
    /// Not read, and why.
    Unread(&'static str),
}

/// Expands, tidies and cuts the body of a formula.
pub(crate) fn prepare(body: &str, base: usize, macros: &Macros) -> Draft {
    let Some(tokens) = expand(body, base, macros) else { return Draft::Unread("macro expansion passes its budget") };
    prepare_tokens(&tokens)
}

/// As `prepare`, for the body of a note's formula, which has no macros.
pub(crate) fn prepare_note(body: &str, base: usize) -> Draft {
    let note = note::note_tokens(body, base);
    match prepare_tokens(&note.tokens) {
        Draft::Prepared(mut prepared) => {
            prepared.labels.extend(note.label);
            prepared.no_sum |= note.no_sum;
            prepared.reasons = note.reasons;
            Draft::Prepared(prepared)
        }
        unread => unread,
    }
}

/// As `prepare`, for tokens that are expanded already.
fn prepare_tokens(tokens: &[Token<'_>]) -> Draft {
    let mut tidied = tidy::tidy(tokens);
    if tidied.lexemes.len() > LEXEME_BUDGET {
        return Draft::Unread("the formula is longer than the budget");
    }
    if !brackets::match_brackets(&mut tidied.lexemes) {
        return Draft::Unread("brackets are nested deeper than the budget");
    }
    tidied.passed_over |= passes_over(&tidied.lexemes);
    Draft::Prepared(segments::cut(tidied))
}

/// Whether the parsers will pass over what may change the value: a bracket without a partner, or a switch to roman
/// type, after which letters may be words. In scripts both are kept.
fn passes_over(lexemes: &[Lexeme]) -> bool {
    let mut scripts: Vec<bool> = Vec::new();
    let mut before = None;
    for lexeme in lexemes {
        let in_script = scripts.last().copied().unwrap_or_default();
        match lexeme.kind {
            Kind::BraceOpen => scripts.push(in_script || matches!(before, Some(Kind::Up | Kind::Down))),
            Kind::BraceClose => {
                scripts.pop();
            }
            Kind::Lone | Kind::RomanSwitch if !in_script => return true,
            _ => {}
        }
        before = Some(lexeme.kind);
    }
    false
}

/// Parses drafts; the parsers are built once for all of them.
pub(crate) fn parse_all(drafts: &[(Span, bool, Draft)]) -> Vec<Formula> {
    let parser = statement();
    drafts.iter().map(|(span, display, draft)| parse(*span, *display, draft, &parser)).collect()
}

fn parse<'a>(
    span: Span,
    display: bool,
    draft: &'a Draft,
    parser: &impl Parser<'a, Input<'a>, Statement, Extra>,
) -> Formula {
    let prepared = match draft {
        Draft::Prepared(prepared) => prepared,
        Draft::Unread(reason) => {
            return Formula { span, display, unread: vec![Unread { span, reason }], ..Formula::default() };
        }
    };
    let mut formula = Formula {
        span,
        display,
        labels: prepared.labels.clone(),
        unknown: prepared.unknown.clone(),
        no_sum: prepared.no_sum,
        reasons: prepared.reasons.clone(),
        passed_over: prepared.passed_over,
        ..Formula::default()
    };
    for range in &prepared.statements {
        let lexemes = prepared.lexemes.get(range.clone()).unwrap_or_default();
        match parser.parse(lexemes).into_output() {
            Some(mut statement) => {
                if statement.span.is_empty() {
                    // All of it comes from a macro's body or stands for nothing: the whole formula is its place.
                    statement.span = span;
                }
                formula.statements.push(statement);
            }
            None => {
                let span = join_all(lexemes.iter().map(|lexeme| lexeme.span));
                formula.unread.push(Unread { span, reason: "the statement has no known form" });
            }
        }
    }
    crate::tree::unread_parts(&mut formula);
    formula
}

/// The parser of a whole statement.
fn statement<'a>() -> impl Parser<'a, Input<'a>, Statement, Extra> {
    let sum = recursive(|sum| sum::sum_of(factor::factor(sum).boxed()));
    relation::statement(sum.boxed()).then_ignore(end())
}

/// One lexeme of a kind.
fn kind<'a>(kind: Kind) -> impl Parser<'a, Input<'a>, &'a Lexeme, Extra> + Copy {
    any_ref().filter(move |lexeme: &&Lexeme| lexeme.kind == kind)
}

/// The smallest span that holds all; empty ones do not count.
fn join_all(spans: impl IntoIterator<Item = Span>) -> Span {
    spans.into_iter().filter(|span| !span.is_empty()).reduce(Span::join).unwrap_or_default()
}

#[cfg(test)]
mod tests;
