//! Signs of sums, products and relations in each dialect, and the Unicode signs of commands that are no letters.

use crate::tree::{Joint, Product, SignKind};

use super::Dialect;

/// Commands with the sign that a terminal shows for them.
const SIGNS: &[(&str, &str)] = &[
    ("\\equiv", "≡"),
    ("\\approx", "≈"),
    ("\\neq", "≠"),
    ("\\ne", "≠"),
    ("\\leq", "≤"),
    ("\\le", "≤"),
    ("\\leqslant", "≤"),
    ("\\geq", "≥"),
    ("\\ge", "≥"),
    ("\\geqslant", "≥"),
    ("\\lt", "<"),
    ("\\gt", ">"),
    ("\\ll", "≪"),
    ("\\gg", "≫"),
    ("\\sim", "∼"),
    ("\\simeq", "≃"),
    ("\\cong", "≅"),
    ("\\propto", "∝"),
    ("\\coloneqq", ":="),
    ("\\coloneq", ":="),
    ("\\colonequals", ":="),
    ("\\Coloneqq", ":="),
    ("\\eqqcolon", "=:"),
    ("\\eqcolon", "=:"),
    ("\\triangleq", "≜"),
    ("\\defeq", "≝"),
    ("\\eqdef", "≝"),
    ("\\doteq", "≐"),
    ("\\stackrel", "=!"),
    ("\\stackrel?", "=?"),
    ("\\not", "≠"),
    ("\\to", "→"),
    ("\\rightarrow", "→"),
    ("\\longrightarrow", "⟶"),
    ("\\xrightarrow", "→"),
    ("\\leftarrow", "←"),
    ("\\gets", "←"),
    ("\\mapsto", "↦"),
    ("\\leftrightarrow", "↔"),
    ("\\longleftrightarrow", "⟷"),
    ("\\in", "∈"),
    ("\\notin", "∉"),
    ("\\subset", "⊂"),
    ("\\subseteq", "⊆"),
    ("\\perp", "⊥"),
    ("\\parallel", "∥"),
    ("\\mid", "|"),
    ("\\pm", "±"),
    ("\\mp", "∓"),
    ("\\cdot", "·"),
    ("\\times", "×"),
    ("\\otimes", "⊗"),
    ("\\wedge", "∧"),
    ("\\star", "⋆"),
    ("\\bullet", "•"),
    ("\\odot", "⊙"),
    ("\\oplus", "⊕"),
    ("\\ominus", "⊖"),
    ("\\cap", "∩"),
    ("\\cup", "∪"),
    ("\\setminus", "∖"),
    ("\\circ", "∘"),
    ("\\dagger", "†"),
    ("\\dag", "†"),
    ("\\ddagger", "‡"),
    ("\\prime", "'"),
    ("\\top", "⊤"),
    ("\\bot", "⊥"),
    ("\\degree", "°"),
    ("\\ast", "*"),
    ("\\sum", "∑"),
    ("\\prod", "∏"),
    ("\\coprod", "∐"),
    ("\\bigcup", "⋃"),
    ("\\bigcap", "⋂"),
    ("\\bigoplus", "⨁"),
    ("\\bigotimes", "⨂"),
    ("\\int", "∫"),
    ("\\iint", "∬"),
    ("\\iiint", "∭"),
    ("\\oint", "∮"),
];

/// The sign that a terminal shows for a command, or the name of the command.
pub(super) fn shown(command: &str) -> &str {
    let known = SIGNS.iter().find(|(name, _)| *name == command).map(|(_, sign)| *sign);
    known.unwrap_or_else(|| command.trim_start_matches('\\'))
}

/// A relation.
pub(super) fn relation(sign: &str, dialect: Dialect) -> String {
    if dialect == Dialect::Unicode {
        return shown(sign).to_owned();
    }
    match sign {
        "\\stackrel" => "\\stackrel{!}{=}".to_owned(),
        "\\stackrel?" => "\\stackrel{?}{=}".to_owned(),
        "\\not" => "\\not=".to_owned(),
        _ if sign.starts_with("\\x") => format!("{sign}{{}}"),
        _ => sign.to_owned(),
    }
}

/// Plus, minus or either.
pub(super) fn plus(kind: SignKind, dialect: Dialect) -> &'static str {
    if dialect == Dialect::Unicode { shown(kind.latex()) } else { kind.latex() }
}

/// A joint that is no mere neighbourhood.
pub(super) fn joint(joint: Joint, dialect: Dialect) -> String {
    let sign = match joint {
        Joint::Beside => "",
        Joint::Times(product) => product.latex(),
        Joint::Slash => "/",
        Joint::Set(sign) => sign,
        Joint::Apart => ",",
    };
    // The lexer of notes knows these signs as they are.
    let typed = matches!(joint, Joint::Times(Product::Dot | Product::Cross | Product::Tensor | Product::Wedge));
    if dialect == Dialect::Unicode || (dialect == Dialect::Note && typed) {
        return shown(sign).to_owned();
    }
    sign.to_owned()
}
