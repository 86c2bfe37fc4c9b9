//! Scripts: the letters and signs of a sub- or superscript, one item each.
//!
//! A script is a flat list: brackets in it need no partner, since `T_{(i|j|k)}` and `\nabla_{[a} R_{bc]de}` are
//! both the trade's habit. What has a structure of its own (a kernel with scripts, a fraction) is one item.

use chumsky::prelude::*;
use compact_str::{CompactString, format_compact};

use crate::span::Span;
use crate::tree::{Atom, Factor, Item, ItemKind, Joint, Level, Operator, Script};

use super::lexeme::{Kind, Lexeme};
use super::spelling;
use super::{Extra, Input, kind};

/// What may follow an atom.
#[derive(Clone, Debug)]
pub(super) enum Postfix {
    /// Primes.
    Prime(CompactString, Span),
    /// `!`
    Factorial(Span),
    /// A script.
    Script(Script),
    /// Scripts in plain order, by `\indices`.
    Scripts(Vec<Script>),
    /// Something that sets the next script apart.
    Gap,
}

/// One thing that follows an atom.
pub(super) fn scripts<'a>(
    factor: impl Parser<'a, Input<'a>, Factor, Extra> + Clone + 'a,
    atom: impl Parser<'a, Input<'a>, Factor, Extra> + Clone + 'a,
) -> impl Parser<'a, Input<'a>, Postfix, Extra> + Clone + 'a {
    let script = script(factor, atom).boxed();
    let next_is_script = kind(Kind::Up).or(kind(Kind::Down)).rewind();
    let stagger = kind(Kind::Stagger).ignored();
    let empty_group = kind(Kind::BraceOpen).then(stagger.repeated()).then(kind(Kind::BraceClose)).ignored();
    let gap = empty_group.or(stagger).then(next_is_script).to(Postfix::Gap);
    let prime = kind(Kind::Prime).map(|lexeme: &Lexeme| Postfix::Prime(lexeme.text.clone(), lexeme.span));
    let factorial = kind(Kind::Factorial).map(|lexeme: &Lexeme| Postfix::Factorial(lexeme.span));
    let indices = kind(Kind::Indices)
        .ignore_then(kind(Kind::BraceOpen))
        .ignore_then(script.clone().repeated().collect::<Vec<_>>())
        .then_ignore(kind(Kind::BraceClose))
        .map(|mut scripts| {
            scripts.iter_mut().for_each(|script: &mut Script| script.staggered = true);
            Postfix::Scripts(scripts)
        });
    choice((script.map(Postfix::Script), prime, factorial, gap, indices))
}

/// `_` or `^` with what it holds.
fn script<'a>(
    factor: impl Parser<'a, Input<'a>, Factor, Extra> + Clone + 'a,
    atom: impl Parser<'a, Input<'a>, Factor, Extra> + Clone + 'a,
) -> impl Parser<'a, Input<'a>, Script, Extra> + Clone + 'a {
    let level = select_ref! {
        Lexeme { kind: Kind::Up, span, .. } => (Level::Up, *span),
        Lexeme { kind: Kind::Down, span, .. } => (Level::Down, *span),
    };
    let list = items(factor).boxed();
    let braces = kind(Kind::BraceOpen).ignore_then(list).then(kind(Kind::BraceClose));
    let braces = braces.map(|(items, close): (_, &Lexeme)| (items, close.span));
    let single = sign().or(bare(atom)).map(|item| (vec![Piece::Item(item.clone())], item.span));
    let blank = kind(Kind::Stagger).repeated();
    level.then_ignore(blank).then(braces.or(single).or_not()).map(|((level, mark), held)| {
        let (pieces, end) = held.unwrap_or((Vec::new(), mark));
        let staggered = matches!(pieces.first(), Some(Piece::Blank));
        Script { span: mark.join(end), level, staggered, before: false, items: settle(pieces) }
    })
}

#[derive(Clone, Debug)]
enum Piece {
    Item(Item),
    Blank,
    Roman,
    Nested(Vec<Piece>),
}

/// A single atom after `_` or `^` without braces takes no scripts of its own: they are the kernel's.
fn bare<'a>(
    atom: impl Parser<'a, Input<'a>, Factor, Extra> + Clone + 'a,
) -> impl Parser<'a, Input<'a>, Item, Extra> + Clone + 'a {
    let letter = select_ref! {
        Lexeme { kind: Kind::Letter, text, span } => Item { span: *span, kind: ItemKind::Letter(text.clone()) },
        Lexeme { kind: Kind::Number, text, span } => Item { span: *span, kind: ItemKind::Number(text.clone()) },
    };
    let command = any_ref().filter(|lexeme: &&Lexeme| is_command(lexeme.kind)).rewind().ignore_then(atom).map(item_of);
    letter.or(command)
}

fn is_command(kind: Kind) -> bool {
    use Kind::*;
    matches!(
        kind,
        Accent | Bold | Roman | Fraction | Derivative | Differential | Root | Wrap | Norm | Unknown | Slashed | Tensor
    )
}

/// The pieces of a script in braces.
fn items<'a>(
    factor: impl Parser<'a, Input<'a>, Factor, Extra> + Clone + 'a,
) -> impl Parser<'a, Input<'a>, Vec<Piece>, Extra> + Clone + 'a {
    recursive(move |items| {
        // A command that nobody knows is transparent in a script.
        let nested = kind(Kind::Unknown)
            .or_not()
            .ignore_then(kind(Kind::BraceOpen))
            .ignore_then(items)
            .then_ignore(kind(Kind::BraceClose))
            .map(Piece::Nested);
        let blank = kind(Kind::Stagger).to(Piece::Blank);
        let roman = kind(Kind::RomanSwitch).to(Piece::Roman);
        let structured = factor.map(item_of).map(Piece::Item);
        choice((sign().map(Piece::Item), nested, blank, roman, structured)).repeated().collect::<Vec<_>>()
    })
}

/// Items of one lexeme that are no factor.
fn sign<'a>() -> impl Parser<'a, Input<'a>, Item, Extra> + Clone {
    any_ref()
        .filter(|lexeme: &&Lexeme| sign_kind(lexeme).is_some())
        .map(|lexeme: &Lexeme| Item { span: lexeme.span, kind: sign_kind(lexeme).unwrap_or(ItemKind::Dots) })
}

fn sign_kind(lexeme: &Lexeme) -> Option<ItemKind> {
    let text = lexeme.text.as_str();
    Some(match lexeme.kind {
        Kind::Word | Kind::Function | Kind::Text | Kind::Matrix | Kind::Limit => ItemKind::Label(lexeme.text.clone()),
        Kind::Comma => ItemKind::Comma,
        Kind::Semicolon => ItemKind::Semicolon,
        Kind::Bar => ItemKind::Bar,
        Kind::Open | Kind::Close | Kind::Lone if text.contains('|') || text.ends_with("ert") => ItemKind::Bar,
        Kind::Open | Kind::Close | Kind::Lone => bracket(text),
        Kind::Plus => ItemKind::Sign(spelling::plus(text)),
        Kind::Times if text == "*" || text == "ast" || text == "star" || text == "circ" => {
            ItemKind::Mark(lexeme.text.clone())
        }
        Kind::Times => ItemKind::Operator(Operator::Joint(spelling::times(text))),
        Kind::Slash => ItemKind::Operator(Operator::Joint(Joint::Slash)),
        Kind::Over => ItemKind::Operator(Operator::Over),
        Kind::Factorial => ItemKind::Mark(lexeme.text.clone()),
        Kind::Mark | Kind::Prime => ItemKind::Mark(lexeme.text.clone()),
        Kind::Loose if text == "perp" || text == "parallel" => ItemKind::Mark(lexeme.text.clone()),
        Kind::Equal | Kind::Loose | Kind::Arrow => ItemKind::Relation(spelling::relation(lexeme)),
        Kind::Dots => ItemKind::Dots,
        Kind::Row | Kind::Cell | Kind::Separator | Kind::Indices => ItemKind::Operator(Operator::Break),
        _ => return None,
    })
}

fn bracket(text: &str) -> ItemKind {
    match text {
        "(" | "[" => ItemKind::Open(text.chars().next().unwrap_or('(')),
        ")" | "]" => ItemKind::Close(text.chars().next().unwrap_or(')')),
        "\\}" | "rbrace" => ItemKind::Close('}'),
        "\\{" | "lbrace" => ItemKind::Open('{'),
        "langle" => ItemKind::Open('<'),
        _ => ItemKind::Close('>'),
    }
}

/// A factor inside a script: a lone letter is a letter, a letter with a number or a prime is another letter.
fn item_of(factor: Factor) -> Item {
    let span = factor.span;
    let kind = match &factor.atom {
        Atom::Number(number) if factor.scripts.is_empty() && factor.marks.chars().all(|mark| mark == '\'') => {
            ItemKind::Number(format_compact!("{number}{}", factor.marks))
        }
        Atom::Dots => ItemKind::Dots,
        _ if !factor.marks.is_empty() => ItemKind::Factor(Box::new(factor)),
        Atom::Kernel(kernel) if kernel.word => ItemKind::Label(kernel.name.clone()),
        Atom::Kernel(kernel) => match numbered(&kernel.name, &factor.scripts) {
            Some(name) if kernel.bold || is_styled(&kernel.name) => ItemKind::Styled(name),
            Some(name) => ItemKind::Letter(name),
            None => ItemKind::Factor(Box::new(factor)),
        },
        _ => ItemKind::Factor(Box::new(factor)),
    };
    Item { span, kind }
}

/// Type that makes a letter a label rather than an index.
fn is_styled(name: &str) -> bool {
    ["\\math", "\\bm", "\\bold", "\\cal", "\\symup", "\\pmb", "\\vec"].iter().any(|font| name.starts_with(font))
}

/// The name of a letter whose scripts only number or prime it.
pub(crate) fn numbered(name: &CompactString, scripts: &[Script]) -> Option<CompactString> {
    let mut out = name.clone();
    for script in scripts {
        let [item] = script.items.as_slice() else { return None };
        match (&item.kind, script.level) {
            (ItemKind::Number(number), Level::Down) => out = format_compact!("{out}_{number}"),
            (ItemKind::Mark(mark), Level::Up) if mark == "prime" => out.push('\''),
            _ => return None,
        }
    }
    Some(out)
}

/// Nested groups spliced in, blanks dropped, a roman switch turning letters into labels.
fn settle(pieces: Vec<Piece>) -> Vec<Item> {
    let mut out = Vec::with_capacity(pieces.len());
    let mut roman = false;
    for piece in pieces {
        match piece {
            Piece::Blank => {}
            Piece::Roman => roman = true,
            Piece::Nested(inner) => out.extend(settle(inner)),
            Piece::Item(item) => out.push(match item.kind {
                ItemKind::Letter(name) if roman => Item { kind: ItemKind::Label(name), ..item },
                _ => item,
            }),
        }
    }
    out
}
