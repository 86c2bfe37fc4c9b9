//! The lexer: one token set for all hosts.
//!
//! Tokens are cut without knowledge of macros or of the host; `macros::expansion` and `formula::tidy` give them
//! meaning. A token borrows its text, either from the document or from a macro's body, and knows the place in
//! the document that produced it. The lexer is total: what fits nothing is `Other`.

use logos::Logos;

use crate::span::Span;

/// What a token is, by its spelling alone.
#[derive(Logos, Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum TokenKind {
    /// White space.
    #[regex(r"[ \t\r\n\u{a0}\u{2009}\u{200a}\u{feff}]+")]
    Space,
    /// A comment to the end of the line, with the line end and the blanks that begin the next line.
    #[regex(r"%[^\n]*(\n[ \t]*)?", allow_greedy = true)]
    Comment,
    /// `\name`.
    #[regex(r"\\[A-Za-z@]+")]
    Command,
    /// `\\`, with a star or a `[2pt]`.
    #[regex(r"\\\\\*?([ \t]*\[[ \t]*-?[0-9.]+[ \t]*[a-z\\]+[ \t]*\])?")]
    RowBreak,
    /// A backslash with one sign that is not a letter: `\,`, `\{`, `\|`.
    #[regex(r"\\[^A-Za-z@\\]")]
    #[token("\\")]
    Sign,
    /// `{`
    #[token("{")]
    BraceOpen,
    /// `}`
    #[token("}")]
    BraceClose,
    /// `(` or `[`
    #[regex(r"[(\[]")]
    Open,
    /// `)` or `]`
    #[regex(r"[)\]]")]
    Close,
    /// `|`
    #[token("|")]
    Bar,
    /// `_`
    #[token("_")]
    Down,
    /// `^`
    #[token("^")]
    Up,
    /// `&`
    #[token("&")]
    Cell,
    /// `~`
    #[token("~")]
    Tie,
    /// One letter of any script, Greek and mathematical signs that are written like letters among them.
    #[regex(r"\p{Alphabetic}|[∂∇□△ℏℓ]")]
    Letter,
    /// A number without a sign.
    #[regex(r"[0-9]+(\.[0-9]+)?")]
    Number,
    /// `'` or several.
    #[regex(r"['’′]+")]
    Prime,
    /// `,`
    #[token(",")]
    Comma,
    /// `;`
    #[token(";")]
    Semicolon,
    /// `:`
    #[token(":")]
    Colon,
    /// `.`
    #[token(".")]
    Dot,
    /// `...` or `…`
    #[regex(r"\.\.\.|…|⋯")]
    Dots,
    /// A relation of one sign.
    #[regex(r"[=<>≡≈≠≤≥∼≃≅∝≪≫]|:=|=:")]
    Relation,
    /// An arrow of one sign.
    #[regex(r"[→⇒⟹⇔↦⟶↔]")]
    Arrow,
    /// `+`, `-` and kin.
    #[regex(r"[-+−±∓]")]
    Plus,
    /// A sign of multiplication.
    #[regex(r"[*·×⊗∧⋅]")]
    Times,
    /// `/`
    #[token("/")]
    Slash,
    /// `#1`
    #[regex(r"#[0-9]")]
    Parameter,
    /// `$`
    #[token("$")]
    Dollar,
    /// `√`
    #[token("√")]
    Root,
    /// Anything else.
    Other,
}

/// A token with its text and its place in the document.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Token<'a> {
    /// What it is.
    pub kind: TokenKind,
    /// As written, in the document or in a macro's body.
    pub text: &'a str,
    /// The place in the document: of the token itself, or of the macro call that produced it.
    pub span: Span,
}

/// Cuts `text`, which starts at byte `base` of the document, into tokens, white space and comments among them.
pub fn lex(text: &str, base: usize) -> impl Iterator<Item = Token<'_>> {
    TokenKind::lexer(text).spanned().map(move |(kind, range)| Token {
        kind: kind.unwrap_or(TokenKind::Other),
        text: text.get(range.clone()).unwrap_or_default(),
        span: Span::new(base + range.start, base + range.end),
    })
}

/// The number of tokens of a text: what a bench of the lexer alone runs.
pub fn count(text: &str) -> usize {
    lex(text, 0).count()
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    fn kinds(text: &str) -> Vec<TokenKind> {
        lex(text, 0).map(|token| token.kind).collect()
    }

    #[test]
    fn tokens_make_up_the_text() {
        for text in ["\\Gamma^i_{jk} % note\n  = ½ μ'", "a\\\\[2pt]b\\", "#1 #x \u{1F600} ∂_i"] {
            let joined: String = lex(text, 0).map(|token| token.text).collect();
            assert_eq!(joined, text);
        }
    }

    #[test]
    fn a_row_break_takes_its_length_but_not_a_bracket_of_the_next_row() {
        use TokenKind::*;
        assert_eq!(kinds("\\\\[2pt]"), [RowBreak]);
        assert_eq!(kinds("\\\\[a,"), [RowBreak, Open, Letter, Comma]);
        assert_eq!(kinds("\\\\*&"), [RowBreak, Cell]);
    }

    #[test]
    fn a_trailing_backslash_is_a_sign() {
        assert_eq!(kinds("a\\"), [TokenKind::Letter, TokenKind::Sign]);
    }
}
