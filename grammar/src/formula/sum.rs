//! Sums of terms, terms of factors.

use chumsky::prelude::*;

use crate::tree::{Factor, Joint, Sign, Sum, Term};

use super::lexeme::{Kind, Lexeme};
use super::spelling::{plus, times};
use super::{Extra, Input, join_all, kind};

/// Terms with signs between them; an empty side is an empty sum.
pub(super) fn sum_of<'a>(
    factor: impl Parser<'a, Input<'a>, Factor, Extra> + Clone + 'a,
) -> impl Parser<'a, Input<'a>, Sum, Extra> + Clone + 'a {
    let term = term_of(factor);
    let sign = kind(Kind::Plus).map(|lexeme: &Lexeme| Sign { kind: plus(&lexeme.text), span: lexeme.span });
    // A sign after a sign (`a + - b`) is taken with it.
    let signs = sign.foldl(sign.repeated(), |one, other| Sign {
        kind: one.kind.times(other.kind),
        span: one.span.join(other.span),
    });
    let signed = signs.then(term.clone()).map(|(sign, term)| Term { sign: Some(sign), ..term });
    term.map(|term| if term.factors.is_empty() { Vec::new() } else { vec![term] })
        .foldl(signed.repeated(), |mut terms, term| {
            terms.push(term);
            terms
        })
        .map(|terms| {
            let span =
                join_all(terms.iter().flat_map(|term| [term.sign.map_or(term.span, |sign| sign.span), term.span]));
            Sum { span, terms }
        })
}

/// Factors side by side or with signs of multiplication; may be empty.
fn term_of<'a>(
    factor: impl Parser<'a, Input<'a>, Factor, Extra> + Clone + 'a,
) -> impl Parser<'a, Input<'a>, Term, Extra> + Clone + 'a {
    let joint = select_ref! {
        Lexeme { kind: Kind::Times, text, .. } => times(text),
        Lexeme { kind: Kind::Slash, .. } => Joint::Slash,
        Lexeme { kind: Kind::Lone | Kind::Stagger | Kind::Prime | Kind::Factorial | Kind::RomanSwitch, .. } => Joint::Beside,
    };
    let later = |before, now| if now == Joint::Beside { before } else { now };
    let joints = empty().to(Joint::Beside).foldl(joint.repeated(), later);
    joints
        .then(factor)
        .map(|(joint, factor)| Factor { joint, ..factor })
        .repeated()
        .collect::<Vec<_>>()
        .then(empty().to(Joint::Beside).foldl(joint.repeated(), later))
        .map(|(factors, dangling)| {
            let span = join_all(factors.iter().map(|factor| factor.span));
            Term { span, sign: None, factors, dangling }
        })
}
