//! Reads documents written in tensor index notation: text to tree, no meaning.
//!
//! `read` is the only door for documents and never fails: what cannot be read is marked in the tree and the rest
//! is read on. The road inside: `hosts` cut the text into regions, `tokens` and `macros` turn a region into tokens
//! that know their places, `formula` reads these into a `tree`.

pub mod conventions;
pub mod formula;
pub mod hosts;
pub mod lines;
pub mod macros;
pub mod span;
pub mod tokens;
pub mod tree;
pub(crate) mod vocabulary;
pub mod write;

use std::borrow::Cow;

use formula::Draft;
use hosts::{Host, Region, Scan, Setting, scan};
use macros::Macros;
use span::Span;
use tree::Formula;

/// A document, read.
#[derive(Clone, Debug, Default)]
pub struct Document {
    /// What the host scan found.
    pub scan: Scan,
    /// One formula for each region of the scan, in the same order.
    pub formulas: Vec<Formula>,
}

/// Reads a text. `inherited` are the macros in force at its start: those of its styles and of the root it is a
/// part of. Linear in the text; every budget that is passed shows as an unread formula.
pub fn read(text: &str, host: Host, inherited: &Macros) -> Document {
    read_each(text, host, inherited, |_, _| {})
}

/// Formulas that are read together before the caller sees them.
const FORMULAS_AT_ONCE: usize = 256;

/// As `read`, and hands every formula with its number to the caller once it is read; what the caller takes out of
/// it (its statements) need not be kept for the whole document.
pub fn read_each(text: &str, host: Host, inherited: &Macros, mut each: impl FnMut(usize, &mut Formula)) -> Document {
    let scan = scan(text, host, inherited);
    let macros = macros_of(&scan, inherited);
    let mut formulas = Vec::with_capacity(scan.regions.len());
    for regions in scan.regions.chunks(FORMULAS_AT_ONCE) {
        let drafts: Vec<_> = regions.iter().map(|region| draft(region, text, host, &macros)).collect();
        for mut formula in formula::parse_all(&drafts) {
            each(formulas.len(), &mut formula);
            formulas.push(formula);
        }
    }
    Document { scan, formulas }
}

fn draft(region: &Region, text: &str, host: Host, macros: &Macros) -> (Span, bool, Draft) {
    let body = without_holes(region, text);
    let base = region.body.start as usize;
    let draft = match host {
        Host::Note => formula::prepare_note(&body, base),
        _ => formula::prepare(&body, base, macros),
    };
    (region.span, region.setting != Setting::Inline, draft)
}

/// Reads one region of a scanned document; `macros` are all those of the document. Places are those of the text.
pub fn read_region(region: &Region, text: &str, host: Host, macros: &Macros) -> Formula {
    read_regions(std::slice::from_ref(region), text, host, macros).pop().unwrap_or_default()
}

/// As `read_region`, for several regions at once, which is cheaper.
pub fn read_regions(regions: &[Region], text: &str, host: Host, macros: &Macros) -> Vec<Formula> {
    let drafts: Vec<_> = regions.iter().map(|region| draft(region, text, host, macros)).collect();
    formula::parse_all(&drafts)
}

/// Reads the body of one formula by itself; places count from its start.
pub fn read_formula(body: &str, macros: &Macros) -> Formula {
    let draft = formula::prepare(body, 0, macros);
    formula::parse_all(&[(Span::new(0, body.len()), true, draft)]).pop().unwrap_or_default()
}

/// As `read_formula`, for the body of a note's formula.
pub fn read_note_formula(body: &str) -> Formula {
    let draft = formula::prepare_note(body, 0);
    formula::parse_all(&[(Span::new(0, body.len()), true, draft)]).pop().unwrap_or_default()
}

/// The body of a region, with blanks where something stands in it that is not mathematics.
fn without_holes<'t>(region: &Region, text: &'t str) -> Cow<'t, str> {
    let body = region.body.of(text);
    if region.holes.is_empty() {
        return Cow::Borrowed(body);
    }
    let mut body = body.to_owned();
    for hole in &region.holes {
        let start = hole.start.saturating_sub(region.body.start) as usize;
        let end = hole.end.saturating_sub(region.body.start) as usize;
        if body.get(start..end).is_some() {
            body.replace_range(start..end, &" ".repeat(end - start));
        }
    }
    Cow::Owned(body)
}

/// The macros in force in a document: the inherited ones and its own, each from its place on.
pub fn macros_of(scan: &Scan, inherited: &Macros) -> Macros {
    let mut macros = inherited.clone();
    for definition in &scan.definitions {
        macros.define(definition.meaning.clone(), definition.span.end, definition.provide);
    }
    macros
}

/// The Unicode sign of a letter in LaTeX spelling, if it has one of its own: `\mu` is `μ`.
pub fn unicode_sign(letter: &str) -> Option<&'static str> {
    vocabulary::sign(letter)
}

/// A letter as the reader spells it: a Unicode Greek letter or a Greek name without its backslash becomes its
/// command, anything else stays.
pub fn latex_letter(letter: &str) -> &str {
    vocabulary::latex_name(letter).or_else(|| vocabulary::greek_word(letter)).unwrap_or(letter)
}
