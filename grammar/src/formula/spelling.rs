//! Which sign a lexeme is: from the many spellings of a sign to the one that the tree keeps.
//!
//! A lexeme holds a command's name without its backslash, or the sign as typed (`\le` and `≤`, `\cdot` and `·`).

use compact_str::{CompactString, format_compact};

use crate::tree::{Bracket, Joint, Product, SignKind};
use crate::vocabulary::command;

use super::lexeme::{Kind, Lexeme};

/// Signs of relations and arrows typed as themselves, with their commands.
const RELATIONS: &[(&str, &str)] = &[
    ("≡", "\\equiv"),
    ("≈", "\\approx"),
    ("≠", "\\neq"),
    ("≤", "\\leq"),
    ("≥", "\\geq"),
    ("∼", "\\sim"),
    ("≃", "\\simeq"),
    ("≅", "\\cong"),
    ("∝", "\\propto"),
    ("≪", "\\ll"),
    ("≫", "\\gg"),
    ("→", "\\to"),
    ("⟶", "\\longrightarrow"),
    ("↦", "\\mapsto"),
    ("↔", "\\leftrightarrow"),
    ("-", "\\to"),
];

/// The sign of a relation in LaTeX.
pub(super) fn relation(lexeme: &Lexeme) -> CompactString {
    let text = lexeme.text.as_str();
    if let Some((_, known)) = RELATIONS.iter().find(|(typed, _)| *typed == text) {
        return (*known).into();
    }
    command(text).map_or_else(|| lexeme.text.clone(), CompactString::from)
}

/// Plus, minus or either.
pub(super) fn plus(text: &str) -> SignKind {
    match text {
        "-" | "−" => SignKind::Minus,
        "±" | "pm" => SignKind::PlusMinus,
        "∓" | "mp" => SignKind::MinusPlus,
        _ => SignKind::Plus,
    }
}

/// A sign of multiplication, or one between sets or maps.
pub(super) fn times(text: &str) -> Joint {
    if matches!(text, "cap" | "cup" | "setminus" | "circ" | "sqcup") {
        return Joint::Set(command(text).unwrap_or("\\circ"));
    }
    Joint::Times(match text {
        "cdot" | "·" | "⋅" | "cdotp" | "dotproduct" | "vdot" => Product::Dot,
        "times" | "×" | "cross" | "crossproduct" => Product::Cross,
        "otimes" | "⊗" => Product::Tensor,
        "wedge" | "∧" => Product::Wedge,
        "*" | "ast" => Product::Star,
        ":" => Product::Colon,
        _ => Product::Other(command(text).unwrap_or("\\cdot")),
    })
}

/// A bracket by its opening sign: its shape and its LaTeX spelling.
pub(super) fn bracket(text: &str) -> (Bracket, &'static str) {
    match text.trim_start_matches('\\') {
        "(" | "lparen" => (Bracket::Round, "("),
        "[" | "lbrack" => (Bracket::Square, "["),
        "{" | "lbrace" => (Bracket::Curly, "\\{"),
        "|" if text == "\\|" => (Bracket::Bars, "\\|"),
        "|" | "vert" | "lvert" => (Bracket::Bars, "|"),
        "Vert" | "lVert" => (Bracket::Bars, "\\|"),
        "langle" | "lang" => (Bracket::Angle, "\\langle"),
        "<" => (Bracket::Round, "<"),
        name => (Bracket::Round, command(name).unwrap_or("(")),
    }
}

/// The bracket that a command stands for: one around its argument, or around several.
pub(super) fn bracket_command(kind: Kind, name: &str) -> (Bracket, &'static str) {
    match (kind, name) {
        (Kind::Norm, "abs" | "absolutevalue") => (Bracket::Bars, "|"),
        (Kind::Norm, "norm") => (Bracket::Bars, "\\|"),
        (Kind::Norm, _) => (Bracket::Bars, command(name).unwrap_or("|")),
        (Kind::Average, _) => (Bracket::Angle, "\\langle"),
        (_, "commutator") => (Bracket::Pair, "\\comm"),
        (_, "anticommutator" | "anticomm") => (Bracket::Pair, "\\acomm"),
        (_, "poissonbracket") => (Bracket::Pair, "\\pb"),
        _ => (Bracket::Pair, command(name).unwrap_or("\\comm")),
    }
}

/// The command of a derivative, of the `physics` package where several mean the same.
pub(super) fn derivative(name: &str) -> &'static str {
    match name {
        "dv" | "odv" | "derivative" | "diff" => "\\dv",
        "pdv" | "partialderivative" | "diffp" => "\\pdv",
        "fdv" | "functionalderivative" => "\\fdv",
        _ => command(name).unwrap_or("\\dv"),
    }
}

/// An accent's or a wrapping command's name as it stands before what it marks.
pub(super) fn mark(name: &str) -> CompactString {
    format_compact!("\\{name} ")
}
