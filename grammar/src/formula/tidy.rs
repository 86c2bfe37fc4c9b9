//! From tokens to lexemes: commands take their meaning, layout goes, words are folded.
//!
//! One pass over the tokens with a cursor; whatever a command swallows (an optional argument, a group of words, an
//! environment) is swallowed here, so that the parsers see mathematics only. Nothing is ever refused: the worst
//! that happens to a token is that it is passed over.

mod words;

use compact_str::CompactString;

use crate::span::Span;
use crate::tokens::{Token, TokenKind};
use crate::vocabulary::{Class, TYPED_FUNCTIONS, class, latex_name};

use super::lexeme::{Kind, Lexeme};

/// Environments whose rows are rows of the formula they stand in.
const TRANSPARENT: &[&str] = &[
    "aligned",
    "alignedat",
    "split",
    "gathered",
    "multlined",
    "subequations",
    "equation",
    "align",
    "gather",
    "multline",
    "eqnarray",
    "displaymath",
    "math",
    "flalign",
    "alignat",
    "empheq",
    "tightalign",
    "lgathered",
    "rgathered",
    "IEEEeqnarraybox",
];

/// What stands for a quantity with a unit, whose number and unit are not read.
const QUANTITY: &str = "\\SI";

/// Fractions of one sign.
const FRACTIONS: &[(&str, &str, &str)] = &[
    ("½", "1", "2"),
    ("⅓", "1", "3"),
    ("⅔", "2", "3"),
    ("¼", "1", "4"),
    ("¾", "3", "4"),
    ("⅙", "1", "6"),
    ("⅛", "1", "8"),
];

/// What tidying yields.
#[derive(Default)]
pub(crate) struct Tidied {
    pub lexemes: Vec<Lexeme>,
    pub labels: Vec<(CompactString, Span)>,
    pub unknown: Vec<(CompactString, Span)>,
    /// Whether words in the formula say that no sum is meant.
    pub no_sum: bool,
    /// Whether something was passed over that may change the value.
    pub passed_over: bool,
}

/// Gives every token its meaning.
pub(crate) fn tidy(tokens: &[Token<'_>]) -> Tidied {
    let mut cursor = Cursor { tokens, at: 0, out: Tidied::default(), lefts: Vec::new(), digits_wanted: 0 };
    cursor.out.lexemes.reserve(tokens.len());
    while let Some(token) = cursor.next() {
        cursor.token(token);
    }
    cursor.out
}

struct Cursor<'t, 'a> {
    tokens: &'t [Token<'a>],
    at: usize,
    out: Tidied,
    /// For every open `\left`, whether its bracket is the empty one.
    lefts: Vec<bool>,
    /// How many single digits the command before takes as arguments (`\frac12`, `x^10`).
    digits_wanted: usize,
}

impl<'t, 'a> Cursor<'t, 'a> {
    fn next(&mut self) -> Option<Token<'a>> {
        let token = self.tokens.get(self.at).copied();
        self.at += 1;
        token
    }

    fn peek(&self) -> Option<Token<'a>> {
        self.tokens.get(self.at).copied()
    }

    fn push(&mut self, kind: Kind, text: impl Into<CompactString>, span: Span) {
        self.out.lexemes.push(Lexeme { kind, text: text.into(), span });
    }

    fn token(&mut self, token: Token<'a>) {
        let wanted = std::mem::take(&mut self.digits_wanted);
        if token.kind == TokenKind::BraceOpen && self.braced_operator() {
            let Some(operator) = self.next() else { return };
            self.at += 1;
            return self.token(operator);
        }
        let kind = match token.kind {
            TokenKind::Number => return self.number(token, wanted),
            TokenKind::Command => return self.command(token),
            TokenKind::Letter => return self.letter(token),
            TokenKind::Sign => return self.sign(token),
            TokenKind::Colon => return self.colon(token),
            TokenKind::Plus => return self.plus(token),
            TokenKind::Down | TokenKind::Up => {
                self.digits_wanted = 1;
                if token.kind == TokenKind::Down { Kind::Down } else { Kind::Up }
            }
            TokenKind::BraceOpen => Kind::BraceOpen,
            TokenKind::BraceClose => Kind::BraceClose,
            TokenKind::Open => Kind::Open,
            TokenKind::Close => Kind::Close,
            TokenKind::Bar => Kind::Bar,
            TokenKind::RowBreak => Kind::Row,
            TokenKind::Cell => Kind::Cell,
            // Typographic primes are primes.
            TokenKind::Prime => return self.push(Kind::Prime, "'".repeat(token.text.chars().count()), token.span),
            TokenKind::Comma => Kind::Comma,
            TokenKind::Semicolon => Kind::Semicolon,
            TokenKind::Dots => Kind::Dots,
            TokenKind::Relation => relation_sign(token.text),
            TokenKind::Arrow => Kind::Arrow,
            TokenKind::Times => Kind::Times,
            TokenKind::Slash => Kind::Slash,
            TokenKind::Root => Kind::Root,
            TokenKind::Tie => Kind::Stagger,
            TokenKind::Other => return self.other(token),
            TokenKind::Space | TokenKind::Comment | TokenKind::Dot | TokenKind::Parameter | TokenKind::Dollar => return,
        };
        self.push(kind, token.text, token.span);
    }

    /// Whether the brace that was just taken holds one sign of a product or a relation and no more: `a{/}b`, `a{=}b`.
    fn braced_operator(&self) -> bool {
        let Some([operator, close]) = self.tokens.get(self.at..self.at + 2) else { return false };
        let script = matches!(self.out.lexemes.last().map(|lexeme| lexeme.kind), Some(Kind::Up | Kind::Down));
        close.kind == TokenKind::BraceClose && is_operator(operator) && !script
    }

    /// A number; where single digits are wanted they are cut off its front.
    fn number(&mut self, token: Token<'a>, wanted: usize) {
        let at = token.span.start as usize;
        let cut = wanted.min(token.text.len().saturating_sub(1));
        let in_place = token.span.len() == token.text.len();
        for (n, digit) in token.text.char_indices().take(cut) {
            let span = if in_place { Span::new(at + n, at + n + 1) } else { token.span };
            self.push(Kind::Number, digit.to_string(), span);
        }
        let span = if in_place { Span::new(at + cut, at + token.text.len()) } else { token.span };
        self.push(Kind::Number, token.text.get(cut..).unwrap_or_default(), span);
    }

    /// Signs that are neither letters nor of the lexer's own.
    fn other(&mut self, token: Token<'a>) {
        if let Some((_, over, under)) = FRACTIONS.iter().find(|(sign, ..)| *sign == token.text) {
            self.push(Kind::Fraction, "frac", token.span);
            self.push(Kind::Number, *over, token.span);
            return self.push(Kind::Number, *under, token.span);
        }
        let (kind, text) = match token.text {
            "!" => (Kind::Factorial, "!"),
            "∑" => (Kind::Sum, "sum"),
            "∏" => (Kind::Sum, "prod"),
            "∫" => (Kind::Integral, "int"),
            "∞" => (Kind::Letter, "\\infty"),
            "†" => (Kind::Mark, "dagger"),
            "⟨" => (Kind::Open, "langle"),
            "⟩" => (Kind::Close, "rangle"),
            "‖" => (Kind::Bar, "\\|"),
            _ => {
                self.out.passed_over = true;
                return;
            }
        };
        self.push(kind, text, token.span);
    }

    fn plus(&mut self, token: Token<'a>) {
        let arrow = token.text == "-" && self.peek().is_some_and(|next| next.text == ">");
        if arrow {
            self.at += 1;
        }
        self.push(if arrow { Kind::Arrow } else { Kind::Plus }, token.text, token.span);
    }

    /// `:=` is a relation, a lone colon a product of tensors or a mark.
    fn colon(&mut self, token: Token<'a>) {
        let equal = self.peek().filter(|next| next.text == "=");
        match equal {
            Some(next) => {
                self.at += 1;
                self.push(Kind::Equal, ":=", token.span.join(next.span));
            }
            None if self.peek().is_some_and(|next| matches!(next.text, "\\quad" | "\\qquad" | "\\ " | "\\;" | "&")) => {
                self.push(Kind::Separator, ":", token.span);
            }
            None => self.push(Kind::Times, ":", token.span),
        }
    }

    fn sign(&mut self, token: Token<'a>) {
        match token.text {
            "\\{" => self.push(Kind::Open, "\\{", token.span),
            "\\}" => self.push(Kind::Close, "\\}", token.span),
            "\\|" => self.push(Kind::Bar, "\\|", token.span),
            "\\ " | "\\," | "\\;" | "\\:" | "\\!" | "\\>" => self.push(Kind::Stagger, "", token.span),
            _ => {}
        }
    }

    /// A letter, or a run of letters that spells a function (`det`, `diag`) typed without its backslash.
    fn letter(&mut self, token: Token<'a>) {
        if let Some((length, name)) = self.typed_function(token) {
            let last = self.tokens.get(self.at + length - 2).map_or(token.span, |t| t.span);
            self.at += length - 1;
            return self.push(Kind::Function, name, token.span.join(last));
        }
        self.push(Kind::Letter, latex_name(token.text).unwrap_or(token.text), token.span);
    }

    fn typed_function(&self, token: Token<'a>) -> Option<(usize, &'static str)> {
        let starts = TYPED_FUNCTIONS.iter().any(|word| word.starts_with(token.text));
        let after_letter =
            self.out.lexemes.last().is_some_and(|l| l.kind == Kind::Letter && l.span.end == token.span.start);
        if !starts || after_letter {
            return None;
        }
        let mut word = String::from(token.text);
        let mut end = token.span.end;
        for next in self.tokens.get(self.at..)? {
            if next.kind != TokenKind::Letter || next.span.start != end || word.len() > 5 {
                break;
            }
            word.push_str(next.text);
            end = next.span.end;
        }
        TYPED_FUNCTIONS.iter().find(|known| **known == word).map(|known| (known.len(), *known))
    }

    fn command(&mut self, token: Token<'a>) {
        let name = token.text.get(1..).unwrap_or_default();
        let Some(class) = class(name) else {
            self.out.unknown.push((name.into(), token.span));
            self.skip_optional_before_group();
            return self.push(Kind::Unknown, name, token.span);
        };
        let kind = match class {
            Class::Letter => Kind::Letter,
            Class::Accent | Class::Font => Kind::Accent,
            Class::Bold => Kind::Bold,
            Class::Roman => return self.roman(token),
            Class::RomanSwitch => Kind::RomanSwitch,
            Class::Text => return self.text(token),
            Class::Operator => return self.operator(token),
            Class::Fraction => {
                self.digits_wanted = 2;
                Kind::Fraction
            }
            Class::Root => {
                self.digits_wanted = 1;
                Kind::Root
            }
            Class::Over => Kind::Over,
            Class::Derivative => Kind::Derivative,
            Class::Differential => Kind::Differential,
            Class::Sum => Kind::Sum,
            Class::Integral => Kind::Integral,
            Class::Limit => Kind::Limit,
            Class::Function => Kind::Function,
            Class::Equal => Kind::Equal,
            Class::Loose => Kind::Loose,
            Class::Arrow => Kind::Arrow,
            Class::ArrowWords => {
                self.skip_optional();
                self.skip_group();
                if name == "xlongequal" { Kind::Equal } else { Kind::Arrow }
            }
            Class::Separator => Kind::Separator,
            Class::Plus => Kind::Plus,
            Class::Times => Kind::Times,
            Class::Open => Kind::Open,
            Class::Close => Kind::Close,
            Class::Bar => Kind::Bar,
            Class::Dots => Kind::Dots,
            Class::Wrap | Class::Eval => {
                self.skip_optional_before_group();
                Kind::Wrap
            }
            Class::Struck => {
                self.skip_group();
                Kind::Wrap
            }
            Class::Brace => Kind::Brace,
            Class::Norm => Kind::Norm,
            Class::Average => Kind::Average,
            Class::Pair | Class::Ket => Kind::Pair,
            Class::Order => Kind::Order,
            Class::Tensor => Kind::Tensor,
            Class::Indices => Kind::Indices,
            Class::Slashed => Kind::Slashed,
            Class::Mark => Kind::Mark,
            Class::Stagger => Kind::Stagger,
            _ => return self.layout(token, class),
        };
        let text = if kind == Kind::Letter { token.text } else { name };
        self.push(kind, text, token.span);
        if takes_star(kind) && self.peek().is_some_and(|next| next.text == "*") {
            self.at += 1;
        }
    }

    /// Commands that print nothing of their own or swallow what follows.
    fn layout(&mut self, token: Token<'a>, class: Class) {
        match class {
            Class::Drop => {
                self.skip_optional();
                self.skip_group();
            }
            Class::Drop2 => {
                self.skip_group();
                self.skip_group();
            }
            Class::Wrap2 => {
                self.skip_optional();
                self.skip_group();
            }
            Class::Overset => self.set_over(),
            Class::Phantom => {
                self.skip_group();
                self.push(Kind::Stagger, "", token.span);
            }
            Class::Label => {
                let label = self.group_words();
                self.out.labels.push((label.into(), token.span));
            }
            Class::Number1 | Class::Number2 => {
                self.skip_optional();
                self.skip_group();
                if class == Class::Number2 {
                    self.skip_group();
                }
                self.push(Kind::Number, QUANTITY, token.span);
            }
            Class::Delimiter => self.delimiter(token),
            Class::Not => self.negated(),
            Class::Begin => self.begin(token),
            Class::End => {
                self.group_words();
            }
            Class::Block => {
                self.skip_block();
                self.push(Kind::Matrix, "", token.span);
            }
            _ => {}
        }
    }

    /// `\overset{words}{body}`: the words go. Over a relation they say what it claims, over anything else they may
    /// make another thing of it.
    fn set_over(&mut self) {
        self.skip_optional();
        let words = self.group_words();
        let braced = self.peek().is_some_and(|next| next.kind == TokenKind::BraceOpen);
        let body = self.tokens.get(self.at + usize::from(braced)).copied();
        match body.filter(|token| token.text == "=") {
            Some(token) => {
                self.at += if braced { 3 } else { 1 };
                self.push(Kind::Equal, claimed(&words), token.span);
            }
            None => self.out.passed_over |= !body.is_some_and(|token| is_operator(&token)),
        }
    }

    fn negated(&mut self) {
        if let Some(next) = self.next() {
            self.push(Kind::Loose, "not", next.span);
        }
    }

    /// `\left(`, `\big|`: what follows is a bracket, whichever way it is drawn.
    fn delimiter(&mut self, token: Token<'a>) {
        let Some(next) = self.next() else { return };
        let empty = next.text == ".";
        let bar =
            matches!(next.text, "|" | "\\|" | "\\vert" | "\\Vert" | "\\lvert" | "\\rvert" | "\\lVert" | "\\rVert");
        let span = token.span.join(next.span);
        match token.text {
            "\\left" => {
                self.lefts.push(empty);
                match (empty, bar) {
                    (true, _) => {}
                    (_, true) => self.push(Kind::Open, single_or_double(next.text), span),
                    _ => self.push(Kind::Open, next.text, span),
                }
            }
            "\\right" => {
                let from_nothing = self.lefts.pop().unwrap_or(true);
                match (empty, bar, from_nothing) {
                    (true, ..) => {}
                    (_, true, true) => self.push(Kind::Bar, "eval", span),
                    (_, true, _) => self.push(Kind::Close, single_or_double(next.text), span),
                    _ => self.push(Kind::Close, next.text, span),
                }
            }
            "\\middle" => {}
            _ if bar => self.push(Kind::Bar, next.text, span),
            _ if matches!(
                next.kind,
                TokenKind::Open | TokenKind::Close | TokenKind::Sign | TokenKind::Command | TokenKind::Slash
            ) =>
            {
                self.token(Token { span, ..next });
            }
            _ => {}
        }
    }

    /// Environments: those that only align are taken away, any other is a matrix.
    fn begin(&mut self, token: Token<'a>) {
        let name = self.group_words();
        if TRANSPARENT.contains(&name.trim_end_matches('*')) {
            self.skip_optional();
            if name.contains("at") || name.starts_with("IEEE") || name == "empheq" {
                self.skip_group();
            }
            return;
        }
        let mut depth = 1;
        let mut end = token.span;
        while depth > 0 {
            let Some(next) = self.next() else { break };
            end = next.span;
            depth += match next.text {
                "\\begin" => 1,
                "\\end" => -1,
                _ => 0,
            };
        }
        self.group_words();
        self.push(Kind::Matrix, name, token.span.join(end));
    }
}

fn takes_star(kind: Kind) -> bool {
    matches!(kind, Kind::Derivative | Kind::Norm | Kind::Average | Kind::Pair | Kind::Tensor | Kind::Wrap | Kind::Bold)
}

/// A bar, or the double bar of a norm.
fn single_or_double(text: &str) -> &'static str {
    if matches!(text, "\\|" | "\\Vert" | "\\lVert" | "\\rVert") { "\\|" } else { "|" }
}

/// The sign that words over an equality make of it.
fn claimed(words: &str) -> &'static str {
    let words = words.trim_start_matches("\\text").trim_start_matches("\\mathrm").trim_start_matches("\\rm");
    match words.trim_matches(['.', ' ']) {
        "def" | "Def" | "\\triangle" | "\\Delta" | "." => ":=",
        "!" | "\\bullet" | "*" => "\\stackrel",
        "?" => "\\stackrel?",
        _ => "=",
    }
}

/// Whether a token joins or compares what stands around it.
fn is_operator(token: &Token<'_>) -> bool {
    let class = || token.text.strip_prefix('\\').and_then(class);
    matches!(token.kind, TokenKind::Slash | TokenKind::Times | TokenKind::Relation | TokenKind::Arrow)
        || matches!(class(), Some(Class::Equal | Class::Loose | Class::Arrow | Class::Times))
}

fn relation_sign(text: &str) -> Kind {
    if matches!(text, "=" | ":=" | "=:" | "≡") { Kind::Equal } else { Kind::Loose }
}
