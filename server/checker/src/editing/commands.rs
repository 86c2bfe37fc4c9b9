//! The author's macros at a place: which one is called there, and where it is defined.
//!
//! A macro is known by its meaning in force at the call, so that a name that is defined anew has several. Styles are
//! scanned when they are asked for.

use std::sync::Arc;

use indexwise_grammar::hosts::{Host, scan};
use indexwise_grammar::macros::{Definition, Macro, Macros};
use indexwise_grammar::span::Span;

use crate::paper::View;

use super::references::{File, Location};

/// The macro whose name stands at an offset, and the name's place with its backslash.
pub(super) fn call_at(view: &View, document: usize, offset: u32) -> Option<(Span, Arc<Macro>)> {
    let span = command_around(view.text(document), offset)?;
    Some((span, meaning(view, document, span)?))
}

/// The author's meaning of a command at a place.
fn meaning(view: &View, document: usize, span: Span) -> Option<Arc<Macro>> {
    if view.host(document) == Host::Note {
        return None;
    }
    let name = span.of(view.text(document)).get(1..)?;
    view.prices(document)?.macros.at(name, span.start).cloned()
}

/// The command that holds an offset or ends there.
fn command_around(text: &str, offset: u32) -> Option<Span> {
    let is_letter = |sign: char| sign.is_ascii_alphabetic() || sign == '@';
    let before = text.get(..offset as usize)?;
    // On the backslash itself the command begins.
    let start = if text.get(offset as usize..)?.starts_with('\\') {
        before.len()
    } else {
        before.trim_end_matches(is_letter).strip_suffix('\\')?.len()
    };
    let letters = text.get(start + 1..)?;
    let length = letters.find(|sign| !is_letter(sign)).unwrap_or(letters.len());
    // `\\name` is a line break and a word.
    let escaped = text.get(..start)?.chars().rev().take_while(|sign| *sign == '\\').count() % 2 == 1;
    (length > 0 && !escaped).then(|| Span::new(start, start + 1 + length))
}

/// Where a macro is defined: the defining command.
pub(super) fn definitions(view: &View, found: &Arc<Macro>) -> Vec<Location> {
    let own = |definition: &&Definition| definition.meaning == *found;
    let mut out: Vec<Location> = Vec::new();
    for document in 0..view.len() {
        let defined = view.scan(document).into_iter().flat_map(|scan| &scan.definitions);
        let file = File::Document(document);
        out.extend(defined.filter(own).map(|definition| Location { file, span: definition.span }));
    }
    for (number, style) in view.paper().styles.iter().enumerate() {
        let defined = scan(&style.text, style.host, &Macros::default()).definitions;
        let file = File::Style(number);
        out.extend(defined.iter().filter(own).map(|definition| Location { file, span: definition.span }));
    }
    out
}

/// Where a macro is called by name in a document, outside of its own definitions.
pub(super) fn calls(view: &View, document: usize, found: &Arc<Macro>) -> Vec<Span> {
    let text = view.text(document);
    let name = format!("\\{}", found.name);
    let defined: Vec<Span> = definitions(view, found)
        .into_iter()
        .filter(|location| location.file == File::Document(document))
        .map(|location| location.span)
        .collect();
    let spans = text.match_indices(&name).filter_map(|(at, _)| command_around(text, u32::try_from(at).ok()?));
    spans
        .filter(|span| span.len() == name.len() && !defined.iter().any(|whole| whole.holds(*span)))
        .filter(|span| meaning(view, document, *span).as_ref() == Some(found))
        .collect()
}
