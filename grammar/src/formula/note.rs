//! Plain notes: from what is typed by hand to the tokens that LaTeX would have.
//!
//! In a note a word is one kernel, a run of letters after `_` or `^` is one index a letter, Greek may be typed as
//! names, and functions need no backslash. The tokens made here keep the places of what was typed, so that the
//! rest of the reader does not know the difference.

use compact_str::CompactString;

use crate::span::Span;
use crate::tokens::{Token, TokenKind, lex};
use crate::vocabulary::{Class, class, greek_word};

/// A note's formula as LaTeX tokens.
pub(crate) struct NoteFormula<'a> {
    pub tokens: Vec<Token<'a>>,
    /// The leading `(name)`.
    pub label: Option<(CompactString, Span)>,
    /// Whether a line says `no sum`.
    pub no_sum: bool,
    /// What stands in a trailing `[reason]`, line by line.
    pub reasons: Vec<(CompactString, Span)>,
}

/// Words that are commands in LaTeX.
const COMMANDS: &[(&str, &str)] = &[
    ("sqrt", "\\sqrt"),
    ("log", "\\log"),
    ("ln", "\\ln"),
    ("exp", "\\exp"),
    ("sin", "\\sin"),
    ("cos", "\\cos"),
    ("tan", "\\tan"),
    ("det", "\\det"),
    ("tr", "\\tr"),
    ("partial", "\\partial"),
    ("nabla", "\\nabla"),
    ("sum", "\\sum"),
    ("box", "\\Box"),
    ("Box", "\\Box"),
    ("int", "\\int"),
];

/// Relations of two signs.
const PAIRS: &[(&str, &str, &str)] =
    &[("!", "=", "\\neq"), ("<", "=", "\\leq"), (">", "=", "\\geq"), ("~", "=", "\\simeq"), ("=", ">", "\\implies")];

/// Reads the text of a formula that starts at byte `base` of the note.
pub(crate) fn note_tokens(text: &str, base: usize) -> NoteFormula<'_> {
    let (label, text, base) = take_label(text, base);
    let mut out = Vec::new();
    let mut no_sum = false;
    let mut reasons = Vec::new();
    for line in lines(text) {
        let (start, words) = line;
        let line = without_reason(words);
        no_sum |= words.contains("no sum");
        let reason = words.get(line.len()..).unwrap_or_default().trim();
        if let Some(reason) = reason.strip_prefix('[').and_then(|reason| reason.strip_suffix(']')) {
            let from = base + start + line.len();
            reasons.push((reason.into(), Span::new(from, base + start + words.trim_end().len())));
        }
        if !out.is_empty() {
            out.push(made(TokenKind::RowBreak, "\\\\", Span::new(base + start, base + start)));
        }
        Writer { tokens: lex(line, base + start).collect(), at: 0, out: &mut out }.line();
    }
    NoteFormula { tokens: out, label, no_sum, reasons }
}

fn lines(text: &str) -> impl Iterator<Item = (usize, &str)> {
    let mut at = 0;
    text.split_inclusive('\n').map(move |line| {
        let start = at;
        at += line.len();
        (start, line)
    })
}

/// A leading `(name)`, if more than a bracketed expression: a word of two letters or more, then a blank.
fn take_label(text: &str, base: usize) -> (Option<(CompactString, Span)>, &str, usize) {
    let blank = text.len() - text.trim_start().len();
    let rest = text.get(blank..).unwrap_or_default();
    let close = rest.find(')');
    let name = close.and_then(|end| rest.get(1..end)).filter(|_| rest.starts_with('('));
    let is_name = |name: &&str| name.len() > 1 && name.chars().all(|c| c.is_alphanumeric() || "-_:.".contains(c));
    match (name.filter(is_name), close) {
        (Some(name), Some(end)) if rest.get(end + 1..).is_some_and(|after| after.starts_with([' ', '\t'])) => {
            let span = Span::new(base + blank, base + blank + end + 1);
            let cut = blank + end + 1;
            (Some((name.into(), span)), text.get(cut..).unwrap_or_default(), base + cut)
        }
        _ => (None, text, base),
    }
}

/// A trailing `[reason]` or `(no sum over i)` stands apart by a blank and holds a word; `T_[ij]` does not.
fn without_reason(line: &str) -> &str {
    let trimmed = line.trim_end();
    if let Some(at) = trimmed.rfind("(no sum") {
        return trimmed.get(..at).unwrap_or_default();
    }
    let Some(open) = trimmed.rfind('[').filter(|_| trimmed.ends_with(']')) else { return line };
    let before = trimmed.get(..open).unwrap_or_default();
    if before.ends_with([' ', '\t']) { before } else { line }
}

/// Whether a LaTeX command's argument is words, not kernels.
fn takes_words(command: &str) -> bool {
    let class = command.strip_prefix('\\').and_then(class);
    matches!(class, Some(Class::Roman | Class::Text | Class::Operator)) || command == "\\mathit"
}

/// Signs that are written like letters but are no part of a word.
fn stands_alone(letter: &str) -> bool {
    matches!(letter, "∂" | "∇" | "□")
}

fn made(kind: TokenKind, text: &'static str, span: Span) -> Token<'static> {
    Token { kind, text, span }
}

struct Writer<'t, 'a> {
    tokens: Vec<Token<'a>>,
    at: usize,
    out: &'t mut Vec<Token<'a>>,
}

impl<'a> Writer<'_, 'a> {
    fn line(&mut self) {
        while let Some(token) = self.tokens.get(self.at).copied() {
            match token.kind {
                TokenKind::Space | TokenKind::Comment => self.at += 1,
                TokenKind::Letter => self.word(),
                TokenKind::Down | TokenKind::Up => self.script(),
                TokenKind::Command if takes_words(token.text) => self.words(token),
                _ => self.sign(token),
            }
        }
    }

    /// A LaTeX command with words in braces, which stay as they are.
    fn words(&mut self, command: Token<'a>) {
        self.out.push(command);
        self.at += 1;
        let mut depth = 0_usize;
        while let Some(token) = self.tokens.get(self.at).copied() {
            match token.kind {
                TokenKind::BraceOpen => depth += 1,
                TokenKind::BraceClose => depth = depth.saturating_sub(1),
                _ if depth == 0 => return,
                _ => {}
            }
            self.at += 1;
            if !matches!(token.kind, TokenKind::Space | TokenKind::Comment) {
                self.out.push(token);
            }
            if depth == 0 {
                return;
            }
        }
    }

    /// A sign by itself, or a relation typed with two.
    fn sign(&mut self, token: Token<'a>) {
        let next = self.tokens.get(self.at + 1).copied().filter(|next| next.span.start == token.span.end);
        let pair = next.and_then(|next| {
            let known = PAIRS.iter().find(|(first, second, _)| *first == token.text && *second == next.text);
            known.map(|(.., command)| made(TokenKind::Command, command, token.span.join(next.span)))
        });
        self.at += if pair.is_some() { 2 } else { 1 };
        self.out.push(match token.kind {
            TokenKind::Tie => made(TokenKind::Command, "\\sim", token.span),
            _ => pair.unwrap_or(token),
        });
    }

    /// The letters that stand together from here on, as one text where the lexer's pieces allow it.
    fn run(&self) -> (usize, String, Span) {
        let mut word = String::new();
        let mut span = Span::default();
        let mut length = 0;
        for token in self.tokens.get(self.at..).unwrap_or_default() {
            if token.kind != TokenKind::Letter
                || (length > 0 && (token.span.start != span.end || stands_alone(token.text)))
            {
                break;
            }
            span = if length == 0 { token.span } else { span.join(token.span) };
            word.push_str(token.text);
            length += 1;
            if stands_alone(token.text) {
                break;
            }
        }
        (length, word, span)
    }

    fn word(&mut self) {
        let (length, word, span) = self.run();
        let known = COMMANDS.iter().find(|(name, _)| *name == word).map(|(_, command)| *command);
        if let Some(command) = known.or_else(|| greek_word(&word)) {
            self.out.push(made(TokenKind::Command, command, span));
        } else if length == 1 {
            self.out.extend(self.tokens.get(self.at).copied());
        } else {
            self.letters_as_word(length, span);
        }
        self.at += length;
    }

    /// A word of several letters is one kernel: in LaTeX it would be set in one type.
    fn letters_as_word(&mut self, length: usize, span: Span) {
        let first = Span { end: span.start, ..span };
        let last = Span { start: span.end, ..span };
        self.out.push(made(TokenKind::Command, "\\mathit", first));
        self.out.push(made(TokenKind::BraceOpen, "{", first));
        self.out.extend(self.tokens.iter().skip(self.at).take(length).copied());
        self.out.push(made(TokenKind::BraceClose, "}", last));
    }

    /// `_` or `^` with a run of letters, a name, a number, brackets, or braces with names.
    fn script(&mut self) {
        let Some(mark) = self.tokens.get(self.at).copied() else { return };
        self.out.push(mark);
        self.at += 1;
        if self.tokens.get(self.at).is_some_and(|token| token.kind == TokenKind::BraceOpen) {
            return self.braces();
        }
        self.out.push(made(TokenKind::BraceOpen, "{", mark.span));
        let mut end = mark.span;
        if let Some(minus) = self.minus_of_power(mark) {
            self.out.push(minus);
            self.at += 1;
            end = minus.span;
        }
        while let Some(token) = self.tokens.get(self.at).copied().filter(|token| token.span.start == end.end) {
            if !self.belongs(token) {
                break;
            }
            if token.kind == TokenKind::Letter {
                end = self.letters();
            } else {
                self.out.push(token);
                self.at += 1;
                end = token.span;
            }
        }
        let close = Span { start: end.end, end: end.end };
        self.out.push(made(TokenKind::BraceClose, "}", close));
    }

    /// The sign in `A^-1`, `A^-T`: nobody subtracts from a sign that has nothing above it.
    fn minus_of_power(&self, mark: Token<'a>) -> Option<Token<'a>> {
        let [minus, next, ..] = self.tokens.get(self.at..)? else { return None };
        let close = minus.span.start == mark.span.end && next.span.start == minus.span.end;
        let power = matches!(next.kind, TokenKind::Number | TokenKind::Letter);
        (mark.kind == TokenKind::Up && minus.text == "-" && close && power).then_some(*minus)
    }

    /// Whether a token goes on with a script: letters, numbers, brackets of symmetry; a comma or a semicolon only
    /// directly before a letter.
    fn belongs(&self, token: Token<'a>) -> bool {
        let next_is_letter = || {
            self.tokens.get(self.at + 1).is_some_and(|next| {
                next.span.start == token.span.end && matches!(next.kind, TokenKind::Letter | TokenKind::Command)
            })
        };
        match token.kind {
            TokenKind::Letter | TokenKind::Number | TokenKind::Prime | TokenKind::Command => true,
            TokenKind::Comma | TokenKind::Semicolon => next_is_letter(),
            TokenKind::Open => next_is_letter() && self.closes(),
            TokenKind::Close | TokenKind::Bar => self.out_open(),
            _ => false,
        }
    }

    /// Whether the bracket here closes after letters only.
    fn closes(&self) -> bool {
        let rest = self.tokens.get(self.at + 1..).unwrap_or_default();
        let end = rest.iter().position(|token| !matches!(token.kind, TokenKind::Letter | TokenKind::Bar));
        end.and_then(|at| rest.get(at)).is_some_and(|token| token.kind == TokenKind::Close)
    }

    /// Whether the script being written holds an open bracket.
    fn out_open(&self) -> bool {
        let script = self.out.iter().rev().take_while(|token| token.kind != TokenKind::BraceOpen);
        script.fold(0, |depth, token| match token.kind {
            TokenKind::Open => depth + 1,
            TokenKind::Close => depth - 1,
            _ => depth,
        }) > 0
    }

    /// A run of letters in a script: a Greek name is one letter, else each letter is one.
    fn letters(&mut self) -> Span {
        let (length, word, span) = self.run();
        match greek_word(&word).filter(|_| length > 1) {
            Some(command) => self.out.push(made(TokenKind::Command, command, span)),
            None => self.out.extend(self.tokens.iter().skip(self.at).take(length).copied()),
        }
        self.at += length;
        span
    }

    /// `{mu nu rho}`: names separated by blanks.
    fn braces(&mut self) {
        let mut depth = 0;
        while let Some(token) = self.tokens.get(self.at).copied() {
            match token.kind {
                TokenKind::Letter => {
                    self.letters();
                    continue;
                }
                TokenKind::BraceOpen => depth += 1,
                TokenKind::BraceClose => depth -= 1,
                _ => {}
            }
            self.at += 1;
            if token.kind != TokenKind::Space {
                self.out.push(token);
            }
            if depth == 0 {
                return;
            }
        }
    }
}
