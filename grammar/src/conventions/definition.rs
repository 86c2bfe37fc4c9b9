//! Definitions: sentences that are formulas, `R_{ij} := \partial_k \Gamma^k_{ij} - ...`.
//!
//! The sign `:=` (or its command) outside brackets makes a sentence a definition; all of it is read as one formula.

use crate::span::Span;
use crate::tree::{Atom, Formula, Statement, Sum};

use super::Sentence;
use super::sentence::Trouble;

/// Ways to write the sign of a definition.
const SIGNS: &[&str] = &[":=", "\\coloneqq"];

/// Whether a text is a definition.
pub(super) fn is_definition(text: &str) -> bool {
    SIGNS.iter().any(|sign| text.contains(sign))
}

/// The definition that the formula of a text is; the text starts at byte `base`.
pub(super) fn definition(text: &str, base: usize, formula: Formula) -> Result<Sentence, Trouble> {
    let span = Span::new(base, base + text.len());
    let statement = statement(formula, span)?;
    let end = Span { start: span.end, end: span.end };
    if let Some(second) = statement.relations.get(1) {
        return Err(trouble(second.span, "a definition has one relation"));
    }
    let is_sign = |span: Span| {
        let at = (span.start as usize).saturating_sub(base)..(span.end as usize).saturating_sub(base);
        text.get(at).is_some_and(|sign| SIGNS.contains(&sign))
    };
    match (statement.sides.as_slice(), statement.relations.as_slice()) {
        ([new, meaning], [sign]) if is_sign(sign.span) => {
            defines(new, sign.span)?;
            if meaning.terms.is_empty() {
                return Err(trouble(end, "nothing follows the sign of the definition"));
            }
            Ok(Sentence::Definition(Box::new(statement)))
        }
        _ => Err(trouble(span, "a definition has one relation, which is `:=`")),
    }
}

fn trouble(at: Span, reason: &str) -> Trouble {
    Trouble { at, reason: reason.to_owned() }
}

/// The only statement of a formula that is read to its end.
fn statement(mut formula: Formula, span: Span) -> Result<Statement, Trouble> {
    if let Some((name, at)) = formula.unknown.first() {
        return Err(Trouble { at: *at, reason: format!("`\\{name}` is not defined") });
    }
    if let Some(unread) = formula.unread.first() {
        return Err(trouble(unread.span, unread.reason));
    }
    if let Some(second) = formula.statements.get(1) {
        return Err(trouble(second.span, "a definition is one statement"));
    }
    formula.statements.pop().ok_or_else(|| trouble(span, "a definition has two sides"))
}

/// Whether the left side is a kernel with its scripts and nothing else.
fn defines(side: &Sum, sign: Span) -> Result<(), Trouble> {
    if let [term] = side.terms.as_slice()
        && let [factor] = term.factors.as_slice()
        && matches!(factor.atom, Atom::Kernel(_))
        && term.sign.is_none()
    {
        return Ok(());
    }
    let at = if side.span.is_empty() { sign } else { side.span };
    Err(trouble(at, "a definition has one tensor on its left"))
}
