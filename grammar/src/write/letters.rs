//! Letters with their decorations and primes, in each dialect.
//!
//! The tree names a kernel `\hat \bar h'`: decorations outermost first, then the letter, then primes. In LaTeX the
//! decorations take braces; on a terminal accents combine with the letter and fonts have letters of their own.

use crate::vocabulary::{Class, TYPED_FUNCTIONS, class, greek_word, sign};

use super::Dialect;

/// A name taken apart.
pub(super) struct Name<'n> {
    /// Commands, outermost first, with their backslash.
    decorations: Vec<&'n str>,
    /// The letter or word alone.
    base: &'n str,
    /// Numbers and primes of an index after its letter: `_1'`; for a kernel primes only.
    tail: &'n str,
}

/// Takes a name apart.
pub(super) fn name_of(name: &str) -> Name<'_> {
    let mut decorations: Vec<&str> = name.split(' ').collect();
    let last = decorations.pop().unwrap_or_default();
    let cut = last.find(['\'', '_']).filter(|at| *at > 0).unwrap_or(last.len());
    let (base, tail) = last.split_at_checked(cut).unwrap_or((last, ""));
    Name { decorations, base, tail }
}

/// The words that a note takes for commands, other than Greek.
const NOTE_WORDS: &[&str] = &["sqrt", "log", "ln", "exp", "sin", "cos", "tan", "det", "tr", "sum", "box", "Box", "int"];

/// A kernel, by its name.
pub(super) fn kernel(name: &str, word: bool, dialect: Dialect) -> String {
    let name = name_of(name);
    let base =
        if word { self::word(name.base, dialect, name.decorations.is_empty()) } else { letter(name.base, dialect) };
    dressed(&name, base, dialect) + name.tail
}

/// A letter of a script, by its name: `\mu'`, `i_1`, `\dot \alpha`.
pub(super) fn index(name: &str, dialect: Dialect) -> String {
    let name = name_of(name);
    let mut out = dressed(&name, letter(name.base, dialect), dialect);
    let mut numbered = false;
    for (n, part) in name.tail.split('_').enumerate() {
        let digits = part.trim_end_matches('\'');
        let primes = part.len() - digits.len();
        if n > 0 {
            out.push('_');
            out.push_str(&if digits.len() > 1 { format!("{{{digits}}}") } else { digits.to_owned() });
            numbered = true;
        }
        // After a number a typed prime would go to the letter before it.
        let prime = if numbered && dialect != Dialect::Unicode { "^\\prime" } else { "'" };
        out.push_str(&prime.repeat(primes));
    }
    out
}

/// A label: a word in roman type.
pub(super) fn label(name: &str, dialect: Dialect) -> String {
    let parts = name_of(name);
    let is_letter = parts.base.starts_with('\\') || matches!(parts.base, "d" | "D") || !parts.tail.is_empty();
    match dialect {
        Dialect::Unicode if name.is_empty() => "…".to_owned(),
        Dialect::Unicode => dressed(&parts, letter(parts.base, dialect), dialect) + parts.tail,
        _ if name.is_empty() => "\\text{...}".to_owned(),
        // Words may hold any sign, a blank among them.
        _ if !name.contains('\\') && !is_letter => format!("\\mathrm{{{name}}}"),
        _ if is_letter => format!("{{\\rm {}}}", index(name, Dialect::Latex)),
        _ => dressed(&parts, format!("\\mathrm{{{}}}", parts.base), dialect) + parts.tail,
    }
}

/// One letter, without decorations.
pub(super) fn letter(letter: &str, dialect: Dialect) -> String {
    match dialect {
        Dialect::Latex => letter.to_owned(),
        Dialect::Unicode => shown(letter).to_owned(),
        Dialect::Note => match letter.strip_prefix('\\') {
            Some(name) if greek_word(name) == Some(letter) => name.to_owned(),
            _ => letter.to_owned(),
        },
    }
}

/// A word that stands for a quantity; `bare` if nothing decorates it.
fn word(word: &str, dialect: Dialect, bare: bool) -> String {
    match dialect {
        Dialect::Unicode => word.to_owned(),
        Dialect::Note if bare && is_note_word(word) => word.to_owned(),
        // In roman type the name of a function would be the function.
        _ if class(word) == Some(Class::Function) => format!("\\mathit{{{word}}}"),
        _ => format!("\\mathrm{{{word}}}"),
    }
}

/// Whether a note reads these letters as one kernel.
fn is_note_word(word: &str) -> bool {
    let spelled = word.len() > 1 && word.bytes().all(|byte| byte.is_ascii_alphabetic());
    spelled && !NOTE_WORDS.contains(&word) && !TYPED_FUNCTIONS.contains(&word) && greek_word(word).is_none()
}

fn dressed(name: &Name<'_>, base: String, dialect: Dialect) -> String {
    name.decorations.iter().rev().fold(base, |inner, decoration| decorated(decoration, &inner, dialect))
}

/// A decoration around what it decorates.
pub(super) fn decorated(decoration: &str, inner: &str, dialect: Dialect) -> String {
    match dialect {
        Dialect::Unicode => combined(decoration, inner),
        // An old font command switches the rest of its group.
        _ if decoration == "\\cal" => format!("{{\\cal {inner}}}"),
        _ => format!("{decoration}{{{inner}}}"),
    }
}

/// Accents, with the sign that combines with the letter before it.
const ACCENTS: &[(&str, char)] = &[
    ("\\hat", '\u{302}'),
    ("\\widehat", '\u{302}'),
    ("\\bar", '\u{304}'),
    ("\\overline", '\u{305}'),
    ("\\tilde", '\u{303}'),
    ("\\widetilde", '\u{303}'),
    ("\\check", '\u{30C}'),
    ("\\widecheck", '\u{30C}'),
    ("\\vec", '\u{20D7}'),
    ("\\va", '\u{20D7}'),
    ("\\overrightarrow", '\u{20D7}'),
    ("\\overleftarrow", '\u{20D6}'),
    ("\\overleftrightarrow", '\u{20E1}'),
    ("\\dot", '\u{307}'),
    ("\\overdot", '\u{307}'),
    ("\\ddot", '\u{308}'),
    ("\\dddot", '\u{20DB}'),
    ("\\ddddot", '\u{20DC}'),
    ("\\breve", '\u{306}'),
    ("\\acute", '\u{301}'),
    ("\\grave", '\u{300}'),
    ("\\mathring", '\u{30A}'),
    ("\\underline", '\u{332}'),
    ("\\underbar", '\u{331}'),
    ("\\utilde", '\u{330}'),
    ("\\slashed", '\u{338}'),
];

/// Fonts, with the first capital and the first small letter of their alphabets. Script and fraktur are taken from the
/// bold alphabets, which have no gaps.
const FONTS: &[(&str, u32, u32)] = &[
    ("\\mathcal", 0x1D4D0, 0x1D4EA),
    ("\\mathscr", 0x1D4D0, 0x1D4EA),
    ("\\cal", 0x1D4D0, 0x1D4EA),
    ("\\mathfrak", 0x1D56C, 0x1D586),
    ("\\mathsf", 0x1D5A0, 0x1D5BA),
    ("\\mathtt", 0x1D670, 0x1D68A),
    ("\\mathbf", 0x1D400, 0x1D41A),
    ("\\boldsymbol", 0x1D400, 0x1D41A),
    ("\\bm", 0x1D400, 0x1D41A),
    ("\\vb", 0x1D400, 0x1D41A),
    ("\\bold", 0x1D400, 0x1D41A),
    ("\\pmb", 0x1D400, 0x1D41A),
    ("\\symbf", 0x1D400, 0x1D41A),
];

/// On a terminal: the accent goes on the first letter, a font changes it.
fn combined(decoration: &str, inner: &str) -> String {
    let mut rest = inner.chars();
    let Some(first) = rest.next() else { return String::new() };
    let rest = rest.as_str();
    if let Some((_, accent)) = ACCENTS.iter().find(|(name, _)| *name == decoration) {
        return format!("{first}{accent}{rest}");
    }
    let font = FONTS.iter().find(|(name, ..)| *name == decoration);
    let other = font.and_then(|(_, capitals, small)| in_font(first, *capitals, *small)).unwrap_or(first);
    format!("{other}{rest}")
}

fn in_font(letter: char, capitals: u32, small: u32) -> Option<char> {
    /// The first capital of the bold alphabet: Greek has bold letters only.
    const BOLD: u32 = 0x1D400;
    let code = match letter {
        'A'..='Z' => capitals + (letter as u32 - 'A' as u32),
        'a'..='z' => small + (letter as u32 - 'a' as u32),
        'Α'..='Ω' if capitals == BOLD => 0x1D6A8 + (letter as u32 - 'Α' as u32),
        'α'..='ω' if capitals == BOLD => 0x1D6C2 + (letter as u32 - 'α' as u32),
        _ => return None,
    };
    char::from_u32(code)
}

/// The sign that a terminal shows for a letter in LaTeX spelling.
pub(super) fn shown(letter: &str) -> &str {
    const OTHERS: &[(&str, &str)] = &[
        ("\\varpi", "ϖ"),
        ("\\infty", "∞"),
        ("\\wp", "℘"),
        ("\\aleph", "ℵ"),
        ("\\imath", "ı"),
        ("\\jmath", "ȷ"),
        ("\\hslash", "ℏ"),
        ("\\emptyset", "∅"),
        ("\\varnothing", "∅"),
        ("\\square", "□"),
        ("\\dAlembert", "□"),
        ("\\laplacian", "∇²"),
        ("\\triangle", "△"),
        ("\\digamma", "ϝ"),
        ("\\forall", "∀"),
        ("\\exists", "∃"),
        ("\\neg", "¬"),
        ("\\varGamma", "Γ"),
        ("\\varDelta", "Δ"),
        ("\\varTheta", "Θ"),
        ("\\varLambda", "Λ"),
        ("\\varXi", "Ξ"),
        ("\\varPi", "Π"),
        ("\\varSigma", "Σ"),
        ("\\varPhi", "Φ"),
        ("\\varPsi", "Ψ"),
        ("\\varOmega", "Ω"),
    ];
    let other = || OTHERS.iter().find(|(name, _)| *name == letter).map(|(_, sign)| *sign);
    sign(letter).or_else(other).unwrap_or_else(|| letter.trim_start_matches('\\'))
}

/// Whether letters side by side would be read as a word: a function typed without its backslash, a Greek name.
pub(super) fn spells_a_word(letters: &str) -> bool {
    TYPED_FUNCTIONS.iter().any(|word| letters.contains(word)) || (letters.len() > 1 && greek_word(letters).is_some())
}
