//! What every letter of the formulas is, for an editor's colours.
//!
//! The tokens stand in the order of the text, never overlap, are never empty and never cross a line's end. What a macro
//! writes has no letters of its own in the text: the macro's name gets one token, that of a kernel where it writes one.

use indexwise_grammar::span::Span;

use crate::paper::View;

use super::indices::Role;
use super::parts::{Part, Parts, What, parts_of};

/// What a token is.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum TokenKind {
    /// A free index.
    Free,
    /// An index that is summed, by its pair or by a sum sign.
    Dummy,
    /// The value of an index.
    Component,
    /// A kernel.
    Kernel,
    /// What differentiates.
    Derivative,
    /// A script that names something.
    Label,
}

/// A stretch of the text with what it is.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct Token {
    /// Where it stands.
    pub span: Span,
    /// What it is.
    pub kind: TokenKind,
}

/// The tokens of a document that touch a stretch of the text.
pub fn tokens(view: &View, document: usize, within: Span) -> Vec<Token> {
    let text = view.text(document);
    let mut found: Vec<Token> = Vec::new();
    let skipped = view.skipped(document);
    view.each_tree(document, within, |asked| {
        if skipped.contains(&asked.number) {
            return;
        }
        let parts = parts_of(asked, text);
        found.extend(parts.parts.iter().filter_map(|part| token(part, &parts, text)));
    });
    found.retain(|token| token.span.start <= within.end && within.start <= token.span.end);
    // Of two in one place the shorter one counts, then a kernel.
    found.sort_by_key(|token| (token.span.start, token.span.len(), token.kind != TokenKind::Kernel, token.kind));
    let mut out: Vec<Token> = Vec::with_capacity(found.len());
    for token in found.into_iter().flat_map(|token| on_lines(token, text)) {
        if out.last().is_none_or(|last| last.span.end <= token.span.start) {
            out.push(token);
        }
    }
    out
}

fn token(part: &Part, parts: &Parts, text: &str) -> Option<Token> {
    let kind = match &part.what {
        What::Index(number) => match parts.indices.get(*number)?.role {
            Role::Free | Role::Unjudged => TokenKind::Free,
            Role::Summed | Role::Bound | Role::Thrice => TokenKind::Dummy,
        },
        What::Component(_) => TokenKind::Component,
        What::Label(_) => TokenKind::Label,
        What::Kernel(_) => TokenKind::Kernel,
        What::Derivative(_) => TokenKind::Derivative,
    };
    let span = if part.typed { part.span } else { command_at(part.span, text)? };
    Some(Token { span, kind })
}

/// The name of the command that a span begins with.
pub(super) fn command_at(span: Span, text: &str) -> Option<Span> {
    let name = span.of(text).strip_prefix('\\')?;
    let length = name.find(|sign: char| !sign.is_ascii_alphabetic() && sign != '@').unwrap_or(name.len());
    (length > 0).then(|| Span { start: span.start, end: span.start + 1 + u32::try_from(length).unwrap_or(0) })
}

/// A token cut at the ends of lines, without blanks around the cuts.
fn on_lines(token: Token, text: &str) -> Vec<Token> {
    let mut at = token.span.start as usize;
    let mut out = Vec::new();
    for line in token.span.of(text).split_inclusive(['\n', '\r']) {
        let blank = line.len() - line.trim_start().len();
        let length = line.trim().len();
        if length > 0 {
            out.push(Token { span: Span::new(at + blank, at + blank + length), ..token });
        }
        at += line.len();
    }
    out
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::indexing_slicing)]
    use super::*;
    use crate::editing::cursor::view;
    use indexwise_grammar::hosts::Host;

    /// Every token of a text as `kind:letters`.
    #[track_caller]
    fn reads(host: Host, text: &str, want: &str) {
        let view = view(text, host);
        let all = tokens(&view, 0, Span::new(0, text.len()));
        let word = |token: &Token| {
            let kind = match token.kind {
                TokenKind::Free => "free",
                TokenKind::Dummy => "dummy",
                TokenKind::Component => "component",
                TokenKind::Kernel => "kernel",
                TokenKind::Derivative => "derivative",
                TokenKind::Label => "label",
            };
            format!("{kind}:{}", token.span.of(text))
        };
        assert_eq!(all.iter().map(word).collect::<Vec<_>>().join(" "), want, "{text}");
    }

    #[test]
    fn the_letters_of_a_formula() {
        reads(
            Host::Markdown,
            "$\\partial_i \\sigma_{ij} = f_j$",
            "derivative:\\partial dummy:i kernel:\\sigma dummy:i free:j kernel:f free:j",
        );
        reads(
            Host::Markdown,
            "$R^{(3)}_{ij} V^j + \\rho_{\\rm m} g_{00} u_i = 0$",
            "kernel:R free:i dummy:j kernel:V dummy:j kernel:\\rho label:m kernel:g component:00 kernel:u free:i",
        );
    }

    #[test]
    fn notes_have_names_and_signs() {
        reads(
            Host::Note,
            "The load:\n\n  sigma_ij n_j = t_i\n",
            "kernel:sigma free:i dummy:j kernel:n dummy:j kernel:t free:i",
        );
        reads(
            Host::Note,
            "Waves:\n\n  A^{mu nu} B_ν = C^μ\n",
            "kernel:A free:mu dummy:nu kernel:B dummy:ν kernel:C free:μ",
        );
    }

    #[test]
    fn a_sum_sign_binds_its_letter() {
        reads(
            Host::Markdown,
            "$\\sum_{a} w_a v_a = h$, and so $E_{ij} F_{ij} = w$",
            "dummy:a kernel:w dummy:a kernel:v dummy:a kernel:h kernel:E dummy:i dummy:j kernel:F dummy:i dummy:j kernel:w",
        );
    }

    #[test]
    fn a_macro_gets_one_token() {
        reads(
            Host::Latex,
            "\\newcommand{\\bend}[2]{\\kappa_{#1#2}}\\newcommand{\\trace}{\\kappa_{mm}}\n$\\bend ij n_j = \\trace q_i$",
            "kernel:\\bend free:i dummy:j kernel:n dummy:j kernel:\\trace kernel:q free:i",
        );
    }

    #[test]
    fn what_is_skipped_has_no_tokens_and_what_has_no_letters_has() {
        let text = "<!-- indexwise: skip this -->\n$A_i = B_i$\n\n$g_{00} = 1$";
        reads(Host::Markdown, text, "kernel:g component:00");
    }

    #[test]
    fn only_what_touches_the_stretch() {
        let text = "$A_i = B_i$ and $C_j = D_j$";
        let view = view(text, Host::Markdown);
        let second: Vec<&str> = tokens(&view, 0, Span::new(16, 20)).iter().map(|token| token.span.of(text)).collect();
        assert_eq!(second, ["C", "j"]);
        assert!(tokens(&view, 7, Span::new(0, 5)).is_empty());
    }

    #[test]
    fn a_token_ends_with_its_line() {
        let text = "\\mathrm{\n  q}";
        let cut = on_lines(Token { span: Span::new(0, text.len()), kind: TokenKind::Kernel }, text);
        assert_eq!(cut.iter().map(|token| token.span.of(text)).collect::<Vec<_>>(), ["\\mathrm{", "q}"]);
    }
}
