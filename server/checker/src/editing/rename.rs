//! Renaming an index in its scope, a kernel or a label in the whole paper; refused with a reason where it would not be
//! safe.
//!
//! An index is renamed where it is the same index: a dummy in its term, a free index through its whole statement, a
//! letter of a sum sign within that sum. A kernel is its name with its number of slots. What a macro's definition writes
//! is never edited. Before any edit is handed out, the paper is read again with the edits made (`assured.rs`): it has
//! to read as before, with the new letter.

mod assured;
mod kernel;
mod spelling;
#[cfg(test)]
mod tests;

use compact_str::CompactString;
use indexwise_grammar::hosts::Host;
use indexwise_grammar::span::Span;
use indexwise_grammar::tree::Sum;

use crate::changes::is_typed;
use crate::conventions::built_in::shown;
use crate::conventions::meanings::Meanings;
use crate::finding::Edit;
use crate::paper::{Asked, Unasked, View};

use super::indices::{Index, Role};
use super::kernels::KernelName;
use super::labels::{Mention, mentions};
use super::parts::parts_of;
use super::tokens::command_at;
use super::under::{Held, Under, under};

use assured::{Expected, reads_as_before};
use kernel::rename_kernel;
use spelling::{index_letter, respelled};

/// What may be renamed at a place.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Renamable {
    /// Its place.
    pub span: Span,
    /// What stands there.
    pub text: String,
}

/// Edits by the number of their document; those of a document in order and apart.
pub type Edits = Vec<(usize, Vec<Edit>)>;

/// What a rename at a byte offset would be about, or one clause that says why nothing can be renamed there.
pub fn prepare_rename(view: &View, document: usize, offset: u32) -> Result<Renamable, String> {
    let text = view.text(document);
    let span = match target(view, document, offset)? {
        Target::Index(held) => {
            may_be_renamed(view, document, offset, &held)?;
            held.part.span
        }
        Target::Kernel(span, _) => span,
        Target::Label(own) => own.span,
    };
    Ok(Renamable { span, text: span.of(text).to_owned() })
}

/// The edits that rename what stands at a byte offset, or one clause that says why it cannot be renamed so.
pub fn rename(view: &View, document: usize, offset: u32, to: &str) -> Result<Edits, String> {
    match target(view, document, offset)? {
        Target::Index(held) => {
            may_be_renamed(view, document, offset, &held)?;
            rename_index(view, document, &held, to.trim())
        }
        Target::Kernel(_, kernel) => rename_kernel(view, document, &kernel, to.trim()),
        Target::Label(own) => rename_label(view, document, &own, to.trim()),
    }
}

/// What is renamed.
enum Target {
    Index(Held),
    Kernel(Span, KernelName),
    Label(Mention),
}

fn target(view: &View, document: usize, offset: u32) -> Result<Target, String> {
    let text = view.text(document);
    match under(view, document, offset) {
        Some(Under::Index(held)) => Ok(Target::Index(held)),
        Some(Under::Label(own)) if is_given(view, &own.name) => Ok(Target::Label(own)),
        Some(Under::Label(own)) => Err(format!("the label {} is given nowhere", own.name)),
        Some(Under::Kernel(part, kernel)) if part.typed => Ok(Target::Kernel(part.span, kernel)),
        Some(Under::Kernel(part, kernel)) => Err(written_by_macro(&kernel.name, part.span, text)),
        Some(Under::Macro(span, _)) => {
            Err(format!("{} is a macro; only indices, kernels and labels are renamed", span.of(text)))
        }
        Some(Under::Other(part)) => Err(format!("{} is no index, kernel or label of a formula", part.span.of(text))),
        None => Err("no index, kernel or label stands there".to_owned()),
    }
}

fn is_given(view: &View, name: &str) -> bool {
    (0..view.len()).any(|number| mentions(view, number).iter().any(|one| one.given && one.name == name))
}

fn written_by_macro(letter: &str, call: Span, text: &str) -> String {
    let name = command_at(call, text).unwrap_or(call).of(text);
    format!("{} is written by the macro {name}, whose definition is left alone", shown(letter))
}

/// Whether an index is known well enough to be renamed.
fn may_be_renamed(view: &View, document: usize, offset: u32, held: &Held) -> Result<(), String> {
    let (text, letter) = (view.text(document), held.index.letter.as_str());
    let others = view.statement_at(document, offset, |asked| {
        let own = parts_of(asked, text).indices.into_iter().filter(|index| index.letter == held.index.letter);
        own.count() > 1
    });
    match (others, held.index.role) {
        (Err(Unasked::WithoutSum), _) => {
            return Err("the text says that no sum is meant, so that scopes are not known".to_owned());
        }
        (Err(Unasked::Skipped), _) => return Err("the author says to skip this formula".to_owned()),
        (_, Role::Thrice) => return Err(format!("{} stands more than twice in a product", shown(letter))),
        (Ok(true), Role::Unjudged) => return Err(format!("what {} belongs to is not known there", shown(letter))),
        _ => {}
    }
    match held.spans.iter().find(|span| !is_typed(text, **span, letter)) {
        Some(call) => Err(written_by_macro(letter, *call, text)),
        None => Ok(()),
    }
}

fn rename_index(view: &View, document: usize, held: &Held, to: &str) -> Result<Edits, String> {
    let (text, host) = (view.text(document), view.host(document));
    let letter = index_letter(to).ok_or_else(|| format!("{to} is no letter that an index can have"))?;
    if letter == held.index.letter {
        return Ok(Vec::new());
    }
    let meanings = view.declared(document).map(|declared| &declared.meanings);
    if let Some(meanings) = meanings {
        keeps_family(meanings, &held.index.letter, &letter)?;
    }
    let place = held.part.span.start;
    let clash =
        view.statement_at(document, place, |asked| clash(asked, text, &held.index, &letter)).unwrap_or_default();
    if let Some(clash) = clash.before_reading {
        return Err(clash);
    }
    let edit = |span: &Span| Edit { span: *span, text: respelled(&letter, *span, text, host) };
    let mut spans = held.spans.clone();
    spans.extend(named_beside(view, document, held));
    spans.sort_unstable();
    let edits = vec![(document, spans.iter().map(edit).collect::<Vec<Edit>>())];
    let expected = Expected::Index { document, from: &held.index.letter, to: &letter };
    if reads_as_before(view, &edits, &expected) {
        return Ok(edits);
    }
    Err(clash
        .after_reading
        .unwrap_or_else(|| format!("the formula would be read in another way with {}", shown(&letter))))
}

/// `i = 1, 2, 3` beside the statement in its formula: there the letter names the free index, if no other statement of
/// the formula has one of its name.
fn named_beside(view: &View, document: usize, held: &Held) -> Vec<Span> {
    let (text, letter) = (view.text(document), &held.index.letter);
    let Some(formula) = view.formulas(document).get(held.formula).filter(|_| held.index.role == Role::Free) else {
        return Vec::new();
    };
    let (mut named, mut other) = (Vec::new(), false);
    view.each_tree(document, formula.span, |asked| {
        let own = held.spans.iter().any(|span| asked.sketch.span.holds(*span));
        if asked.number != held.formula || own {
            return;
        }
        other |= asked.sketch.letters.contains(letter);
        let lone = |side: &Sum| side.terms.iter().all(|term| term.factors.len() == 1);
        if asked.sketch.places.is_empty() && asked.tree.sides.iter().all(lone) {
            let quantities = asked.sketch.quantities.iter().filter(|(name, _)| name == letter);
            named.extend(quantities.map(|(_, span)| *span).filter(|span| is_typed(text, *span, letter)));
        }
    });
    if other { Vec::new() } else { named }
}

/// Whether the new letter may stand where the old one does, as far as the author declares.
fn keeps_family(meanings: &Meanings, from: &str, to: &str) -> Result<(), String> {
    let name = shown(to);
    if meanings.is_component(to) || meanings.coordinates.iter().any(|one| one == to) {
        return Err(format!("{name} is declared to name a component"));
    }
    if meanings.is_not_index(to) {
        return Err(format!("{name} is declared a label"));
    }
    match (meanings.family_number(from), meanings.family_number(to)) {
        (one, two) if one == two => Ok(()),
        (Some(number), None) => {
            let letters = meanings
                .families
                .get(number)
                .map(|family| family.letters.iter().map(|one| shown(one)).collect::<Vec<_>>());
            Err(format!("{name} is not declared to run with {}", letters.unwrap_or_default().join(" ")))
        }
        (None, Some(_)) => Err(format!("{name} belongs to a declared family and {} to none", shown(from))),
        _ => Err(format!("{name} and {} are declared in different families", shown(from))),
    }
}

/// What speaks against a new letter in a statement: for certain, and if the reading shows that the two meet.
#[derive(Default)]
struct Clash {
    before_reading: Option<String>,
    after_reading: Option<String>,
}

fn clash(asked: &Asked<'_>, text: &str, own: &Index, to: &CompactString) -> Clash {
    let name = shown(to);
    let indices = parts_of(asked, text).indices;
    let mut others = indices.iter().filter(|index| index.letter == *to).map(|index| index.role);
    let first = others.clone().next();
    let free = others.any(|role| matches!(role, Role::Free | Role::Unjudged));
    let quantity = asked.sketch.quantities.iter().any(|(letter, _)| letter == to);
    let certain = if free {
        Some(format!("{name} is free in that statement already"))
    } else if own.role != Role::Summed && own.role != Role::Bound && first.is_some() {
        Some(format!("{name} is summed in that statement already"))
    } else if quantity {
        Some(format!("{name} is a quantity in that statement"))
    } else {
        None
    };
    Clash { before_reading: certain, after_reading: first.map(|_| format!("{name} is summed in that term already")) }
}

fn rename_label(view: &View, document: usize, own: &Mention, to: &str) -> Result<Edits, String> {
    let odd = |sign: char| !(sign.is_alphanumeric() || "-_:.+*/@!'".contains(sign));
    let short = view.host(document) == Host::Note && to.chars().count() < 2;
    if to.is_empty() || to.contains(odd) || short {
        return Err(format!("{to} is no name of a label"));
    }
    if to == own.name {
        return Ok(Vec::new());
    }
    if is_given(view, to) {
        return Err(format!("the label {to} is given already"));
    }
    let mut edits: Edits = Vec::new();
    for number in 0..view.len() {
        let places = mentions(view, number).into_iter().filter(|one| one.name == own.name);
        let mut all: Vec<Edit> = places.map(|one| Edit { span: one.span, text: to.to_owned() }).collect();
        all.dedup();
        if !all.is_empty() {
            edits.push((number, all));
        }
    }
    Ok(edits)
}
