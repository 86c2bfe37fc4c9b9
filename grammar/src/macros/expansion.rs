//! Expansion of the author's macros under a budget.
//!
//! The tokens still to be read stand on a stack, so that a macro may take arguments that follow the call of
//! another. Every token that a body yields carries the span of the call; the tokens of an argument keep their
//! own. A macro that calls itself runs into the budget, which is a result and not a failure.

use crate::span::Span;
use crate::tokens::{Token, TokenKind, lex};

use super::{Macro, Macros, Parameter};

/// Tokens that one formula may expand to beyond its own.
const EXPANSION_BUDGET: usize = 20_000;
/// Tokens that one argument may hold.
const ARGUMENT_BUDGET: usize = 4_000;

/// Tokens without white space, macros expanded; `None` if the budget is passed.
pub(crate) fn expand<'a>(text: &'a str, base: usize, macros: &'a Macros) -> Option<Vec<Token<'a>>> {
    let own: Vec<Token<'a>> = printing(text, base).collect();
    let known = |token: &Token<'a>| meaning(token, macros).is_some();
    if macros.is_empty() || !own.iter().any(known) {
        return Some(own);
    }
    let mut budget = EXPANSION_BUDGET;
    let mut out = Vec::with_capacity(own.len() * 2);
    let mut stack: Vec<Token<'a>> = own.into_iter().rev().collect();
    while let Some(token) = stack.pop() {
        let Some(found) = meaning(&token, macros) else {
            out.push(token);
            continue;
        };
        if let Some(text) = saved(found, token.span, macros) {
            out.push(Token { text, ..token });
            continue;
        }
        let (arguments, end) = take_arguments(found, &mut stack, token.span);
        let body = substitute(found, &arguments, token.span.join(end));
        budget = budget.checked_sub(body.len() + 1)?;
        stack.extend(body.into_iter().rev());
    }
    Some(out)
}

/// The author's meaning of a token.
fn meaning<'a>(token: &Token<'a>, macros: &'a Macros) -> Option<&'a Macro> {
    let name = if token.kind == TokenKind::Command { token.text.get(1..)? } else { return None };
    macros.at(name, token.span.start).map(AsRef::as_ref)
}

/// The built-in command that a macro saved under another name before the author redefined it through that name
/// (`\let\oldvec\vec`, then a new `\vec` that uses `\oldvec`): it stands for itself and is not expanded again.
fn saved<'a>(found: &'a Macro, place: Span, macros: &Macros) -> Option<&'a str> {
    let name = found.body.strip_prefix('\\').filter(|_| found.parameters.is_empty())?;
    let redefined = macros.at(name, place.start)?;
    let mut uses = lex(&redefined.body, 0).filter(|token| token.kind == TokenKind::Command);
    uses.any(|token| token.text.get(1..) == Some(found.name.as_str())).then_some(found.body.as_str())
}

fn printing(text: &str, base: usize) -> impl Iterator<Item = Token<'_>> {
    lex(text, base).filter(|token| !matches!(token.kind, TokenKind::Space | TokenKind::Comment))
}

/// The arguments of a call, popped off the stack, and the span of the last token taken.
fn take_arguments<'a>(found: &'a Macro, stack: &mut Vec<Token<'a>>, call: Span) -> (Vec<Vec<Token<'a>>>, Span) {
    let mut arguments = Vec::with_capacity(found.parameters.len());
    let mut end = call;
    for parameter in &found.parameters {
        let argument = match parameter {
            Parameter::Star => {
                let star = stack.pop_if(|token| token.text == "*");
                star.into_iter().collect()
            }
            Parameter::Optional(default) => match take_bracketed(stack, &mut end) {
                Some(given) => given,
                None => printing(default, 0).map(|token| Token { span: call, ..token }).collect(),
            },
            Parameter::Mandatory => take_argument(stack, &mut end),
            Parameter::Until(delimiter) => take_until(stack, delimiter, &mut end),
        };
        arguments.push(argument);
    }
    (arguments, end)
}

/// `{..}` without its braces, or one token; nothing at the end of the formula.
fn take_argument<'a>(stack: &mut Vec<Token<'a>>, end: &mut Span) -> Vec<Token<'a>> {
    let Some(first) = stack.pop_if(|token| token.kind != TokenKind::BraceClose) else { return Vec::new() };
    *end = first.span;
    if first.kind != TokenKind::BraceOpen {
        return vec![first];
    }
    let mut depth = 1;
    let mut taken = Vec::new();
    while let Some(token) = stack.pop() {
        *end = token.span;
        depth += i32::from(token.kind == TokenKind::BraceOpen) - i32::from(token.kind == TokenKind::BraceClose);
        if depth == 0 || taken.len() >= ARGUMENT_BUDGET {
            break;
        }
        taken.push(token);
    }
    taken
}

/// `[..]` without its brackets, if one follows.
fn take_bracketed<'a>(stack: &mut Vec<Token<'a>>, end: &mut Span) -> Option<Vec<Token<'a>>> {
    stack.pop_if(|token| token.text == "[")?;
    let mut depth = 0;
    let mut taken = Vec::new();
    while let Some(token) = stack.pop() {
        *end = token.span;
        depth += i32::from(token.kind == TokenKind::BraceOpen) - i32::from(token.kind == TokenKind::BraceClose);
        if (depth == 0 && token.text == "]") || taken.len() >= ARGUMENT_BUDGET {
            break;
        }
        taken.push(token);
    }
    Some(taken)
}

/// Everything up to a delimiter of `\def`, which is taken too.
fn take_until<'a>(stack: &mut Vec<Token<'a>>, delimiter: &str, end: &mut Span) -> Vec<Token<'a>> {
    let wanted: Vec<Token<'_>> = printing(delimiter, 0).collect();
    let mut taken: Vec<Token<'a>> = Vec::new();
    while let Some(token) = stack.pop() {
        *end = token.span;
        taken.push(token);
        let tail = taken.len().checked_sub(wanted.len()).and_then(|at| taken.get(at..));
        if tail.is_some_and(|tail| tail.iter().map(|t| t.text).eq(wanted.iter().map(|t| t.text))) {
            taken.truncate(taken.len() - wanted.len());
            break;
        }
        if taken.len() >= ARGUMENT_BUDGET {
            break;
        }
    }
    taken
}

/// The body with the arguments put in. An argument is wrapped in nothing: as in TeX, it is spliced.
fn substitute<'a>(found: &'a Macro, arguments: &[Vec<Token<'a>>], call: Span) -> Vec<Token<'a>> {
    let mut out = Vec::new();
    if found.operator {
        out.push(Token { kind: TokenKind::Command, text: "\\operatorname", span: call });
        out.push(Token { kind: TokenKind::BraceOpen, text: "{", span: call });
    }
    for token in printing(&found.body, 0) {
        if token.kind == TokenKind::Parameter {
            let number = token.text.get(1..).and_then(|digit| digit.parse::<usize>().ok()).unwrap_or(0);
            out.extend(number.checked_sub(1).and_then(|at| arguments.get(at)).into_iter().flatten());
        } else {
            out.push(Token { span: call, ..token });
        }
    }
    if found.operator {
        out.push(Token { kind: TokenKind::BraceClose, text: "}", span: call });
    }
    out
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;
    use std::sync::Arc;

    fn table(entries: &[(&str, Vec<Parameter>, &str)]) -> Macros {
        let mut macros = Macros::default();
        for (name, parameters, body) in entries {
            let (name, body) = ((*name).to_owned(), (*body).to_owned());
            macros.define(Arc::new(Macro { name, parameters: parameters.clone(), body, operator: false }), 0, false);
        }
        macros
    }

    fn text(source: &str, macros: &Macros) -> String {
        expand(source, 0, macros).unwrap().iter().map(|token| token.text).collect::<Vec<_>>().join(" ")
    }

    #[test]
    fn arguments_keep_their_places_and_bodies_take_the_call() {
        let macros = table(&[("chr", vec![Parameter::Mandatory, Parameter::Mandatory], "\\Gamma^{#1}{}_{#2}")]);
        let source = "x \\chr{i}{jk}";
        let tokens = expand(source, 0, &macros).unwrap();
        let letters: Vec<&str> = tokens.iter().filter(|t| t.text == "j").map(|t| t.span.of(source)).collect();
        assert_eq!(letters, ["j"]);
        assert_eq!(tokens.get(1).unwrap().span.of(source), "\\chr{i}{jk}");
    }

    #[test]
    fn a_macro_takes_arguments_that_follow_the_call_of_another() {
        let macros = table(&[("a", vec![], "\\b"), ("b", vec![Parameter::Mandatory], "[#1]")]);
        assert_eq!(text("\\a{x}y", &macros), "[ x ] y");
    }

    #[test]
    fn optional_star_and_delimited_parameters() {
        let macros = table(&[
            ("o", vec![Parameter::Optional("d".into()), Parameter::Mandatory], "#1#2"),
            ("s", vec![Parameter::Star, Parameter::Mandatory], "#2"),
            ("u", vec![Parameter::Until(".".into())], "(#1)"),
        ]);
        assert_eq!(text("\\o{x} \\o[e]{x}", &macros), "d x e x");
        assert_eq!(text("\\s*{x}\\s y", &macros), "x y");
        assert_eq!(text("\\u ab.c", &macros), "( a b ) c");
    }

    #[test]
    fn a_saved_command_stands_for_itself() {
        let macros = table(&[("old", vec![], "\\vec"), ("vec", vec![Parameter::Mandatory], "\\old{#1}")]);
        assert_eq!(text("\\vec{x}", &macros), "\\vec { x }");
    }

    #[test]
    fn a_macro_that_calls_itself_ends_in_the_budget() {
        let macros = table(&[("a", vec![], "\\a\\a")]);
        assert!(expand("\\a", 0, &macros).is_none());
    }
}
