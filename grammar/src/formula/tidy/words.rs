//! Words in a formula, and what a command swallows: groups, options, whole environments.

use crate::span::Span;
use crate::tokens::{Token, TokenKind};
use crate::vocabulary::{Class, class};

use super::{Cursor, Kind, tidy};

/// Faces in which the name of an operator may be set: `\mathop{\mathrm{tr}}`.
const FACES: &[&str] = &["\\mathrm", "\\rm", "\\text", "\\mathsf"];

/// Words that stand between two statements.
const LINK_WORDS: &[&str] = &[
    "and",
    "or",
    "if",
    "for",
    "where",
    "with",
    "when",
    "since",
    "so",
    "then",
    "iff",
    "thus",
    "hence",
    "on",
    "in",
    "as",
    "at",
    "but",
    "i.e.",
    "e.g.",
    "cf.",
    "but",
    "while",
    "otherwise",
    "therefore",
    "because",
    "from",
    "using",
    "by",
    "via",
    "provided",
    "unless",
    "that",
    "is",
    "e",
    "und",
    "et",
    "y",
    "ou",
    "oder",
    "mit",
    "avec",
    "para",
];

impl<'a> Cursor<'_, 'a> {
    /// `\mathrm{..}`: a function's name, a differential, one letter or a word.
    pub(super) fn roman(&mut self, token: Token<'a>) {
        let Some((word, end)) = self.plain_group() else {
            return self.push(Kind::Roman, "mathrm", token.span);
        };
        self.word(&word, token.span.join(end), false);
    }

    pub(super) fn operator(&mut self, token: Token<'a>) {
        if self.peek().is_some_and(|next| next.text == "*") {
            self.at += 1;
        }
        let words = self.group_words();
        let last = self.at.checked_sub(1).and_then(|at| self.tokens.get(at));
        let end = last.map_or(token.span, |last| last.span);
        let name = FACES.iter().find_map(|face| words.strip_prefix(face)).unwrap_or(&words);
        self.push(Kind::Function, name, token.span.join(end));
    }

    /// `\text{..}`: words between statements, or one word that stands for a quantity or a function. Mathematics
    /// inside the words is read as statements of its own.
    pub(super) fn text(&mut self, token: Token<'a>) {
        self.skip_optional();
        let at = self.at;
        if let Some((word, end)) = self.plain_group().filter(|_| !self.padded(at)) {
            self.out.no_sum |= says_no_sum(self.tokens.get(at..self.at).unwrap_or_default());
            return self.word(&word, token.span.join(end), true);
        }
        self.at = at;
        let from = self.at;
        self.skip_group();
        let inner = self.tokens.get(from..self.at.min(self.tokens.len())).unwrap_or_default();
        let span = inner.last().map_or(token.span, |last| token.span.join(last.span));
        self.out.no_sum |= says_no_sum(inner);
        self.push(Kind::Text, "", span);
        for (n, part) in inner.split(|t| t.kind == TokenKind::Dollar).enumerate() {
            if n % 2 == 1 && !part.is_empty() {
                let inner = tidy(part);
                self.out.lexemes.extend(inner.lexemes);
                self.push(Kind::Text, "", span);
            }
        }
    }

    pub(super) fn word(&mut self, word: &str, span: Span, in_text: bool) {
        let kind = match word {
            "d" | "D" => return self.push(Kind::Letter, word, span),
            "" => return,
            _ if class(word) == Some(Class::Function) => Kind::Function,
            _ if in_text && LINK_WORDS.contains(&word) => Kind::Text,
            _ if word.contains(' ') => Kind::Text,
            _ => Kind::Word,
        };
        self.push(kind, word, span);
    }

    /// The words of a group that holds only letters, digits and signs, not brackets, dollars or commands. Blanks
    /// are gone by now, so words are told apart by the gaps between the places of their letters.
    pub(super) fn plain_group(&mut self) -> Option<(String, Span)> {
        let open = self.peek()?;
        if open.kind == TokenKind::Letter {
            self.at += 1;
            return Some((open.text.to_owned(), open.span));
        }
        if open.kind != TokenKind::BraceOpen {
            return None;
        }
        let mut word = String::new();
        let mut end = open.span.end;
        for (n, token) in self.tokens.get(self.at + 1..)?.iter().enumerate() {
            match token.kind {
                TokenKind::BraceClose => {
                    self.at += n + 2;
                    return Some((word.trim().to_owned(), token.span));
                }
                TokenKind::Letter | TokenKind::Number | TokenKind::Plus | TokenKind::Prime => {}
                TokenKind::Tie | TokenKind::Comma | TokenKind::Dot | TokenKind::Colon | TokenKind::Semicolon => {}
                TokenKind::Slash | TokenKind::Other | TokenKind::Relation => {}
                TokenKind::Sign => {
                    word.push(' ');
                    continue;
                }
                _ => return None,
            }
            let gap = token.span.start > end && !word.is_empty();
            if (gap || token.kind == TokenKind::Tie) && !word.ends_with(' ') {
                word.push(' ');
            }
            if token.kind != TokenKind::Tie {
                word.push_str(token.text);
            }
            end = token.span.end;
        }
        None
    }

    /// Whether the group that starts at a token has a blank inside its braces: then its words are prose.
    pub(super) fn padded(&self, at: usize) -> bool {
        let taken = self.tokens.get(at..self.at).unwrap_or_default();
        let gap = |pair: &[Token<'_>]| matches!(pair, [one, two] if one.span.end < two.span.start);
        taken.len() > 2 && (taken.get(..2).is_some_and(gap) || taken.get(taken.len() - 2..).is_some_and(gap))
    }

    /// Takes a group and returns its text without blanks.
    pub(super) fn group_words(&mut self) -> String {
        let from = self.at;
        self.skip_group();
        let taken = self.tokens.get(from..self.at.min(self.tokens.len())).unwrap_or_default();
        taken
            .iter()
            .filter(|t| !matches!(t.kind, TokenKind::BraceOpen | TokenKind::BraceClose))
            .map(|t| t.text)
            .collect()
    }

    /// Passes over one group or one token.
    pub(super) fn skip_group(&mut self) {
        let Some(first) = self.peek().filter(|token| token.kind != TokenKind::BraceClose) else { return };
        self.at += 1;
        if first.kind != TokenKind::BraceOpen {
            return;
        }
        let mut depth = 1;
        while depth > 0 {
            let Some(token) = self.next() else { break };
            depth += i32::from(token.kind == TokenKind::BraceOpen) - i32::from(token.kind == TokenKind::BraceClose);
        }
    }

    /// Passes over a group in braces or in brackets of any kind.
    pub(super) fn skip_block(&mut self) {
        let Some(first) = self.peek() else { return };
        if first.kind != TokenKind::Open {
            return self.skip_group();
        }
        let mut depth = 0;
        while let Some(token) = self.next() {
            depth += i32::from(token.kind == TokenKind::Open) - i32::from(token.kind == TokenKind::Close);
            if depth == 0 {
                break;
            }
        }
    }

    /// Passes over `[..]` where a group follows it: the options of a command.
    pub(super) fn skip_optional_before_group(&mut self) {
        let at = self.at;
        self.skip_optional();
        if self.peek().is_none_or(|next| next.kind != TokenKind::BraceOpen) {
            self.at = at;
        }
    }

    /// Passes over `[..]`, if one follows.
    pub(super) fn skip_optional(&mut self) {
        if self.peek().is_some_and(|next| next.text == "[") {
            let rest = self.tokens.get(self.at..).unwrap_or_default();
            if let Some(length) = rest.iter().position(|token| token.text == "]") {
                self.at += length + 1;
            }
        }
    }
}

fn says_no_sum(words: &[Token<'_>]) -> bool {
    let letters = words.iter().filter(|token| token.kind == TokenKind::Letter).map(|token| token.text.to_lowercase());
    letters.collect::<String>().contains("nosum")
}
