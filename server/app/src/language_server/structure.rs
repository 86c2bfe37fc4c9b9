//! Symbols, folding and selection: how a document is built.

use indexwise_checker::editing::folding::{folds, selection};
use indexwise_checker::editing::outline::{Entry, EntryKind, outline};
use indexwise_grammar::span::Span;
use tower_lsp::lsp_types::{
    DocumentSymbol, DocumentSymbolResponse, FoldingRange, Location, SelectionRange, SymbolInformation, SymbolKind,
};

use super::looking::Look;
use super::reading::{Judged, Picture};

/// So many symbols of a workspace are told of.
const MOST_SYMBOLS: usize = 1000;

/// The outline of the document.
pub fn symbols(look: &Look) -> DocumentSymbolResponse {
    let entries = outline(look.view(), look.document);
    if look.client().nested_symbols {
        return DocumentSymbolResponse::Nested(entries.into_iter().map(|entry| symbol(look, entry)).collect());
    }
    let mut flat = Vec::new();
    flatten(&look.judged.picture, look.document, &entries, "", &mut flat);
    DocumentSymbolResponse::Flat(flat)
}

/// The outline is two or three levels deep, whatever the author writes.
#[allow(deprecated, reason = "the member is part of the type")]
fn symbol(look: &Look, entry: Entry) -> DocumentSymbol {
    let children: Vec<DocumentSymbol> = entry.children.into_iter().map(|child| symbol(look, child)).collect();
    DocumentSymbol {
        name: named(&entry.name),
        detail: Some(entry.detail),
        kind: kind(entry.kind),
        tags: None,
        deprecated: None,
        range: look.range(entry.span),
        selection_range: look.range(entry.name_span),
        children: (!children.is_empty()).then_some(children),
    }
}

/// Editors refuse a symbol without a name.
fn named(name: &str) -> String {
    if name.trim().is_empty() { "formula".to_owned() } else { name.to_owned() }
}

const fn kind(kind: EntryKind) -> SymbolKind {
    match kind {
        EntryKind::Formula => SymbolKind::CONSTANT,
        EntryKind::Derivation => SymbolKind::FUNCTION,
        EntryKind::Declaration => SymbolKind::TYPE_PARAMETER,
    }
}

#[allow(deprecated, reason = "the member is part of the type")]
fn flatten(picture: &Picture, document: usize, entries: &[Entry], within: &str, out: &mut Vec<SymbolInformation>) {
    for entry in entries {
        let Some(location): Option<Location> = picture.location(document, entry.name_span) else { continue };
        out.push(SymbolInformation {
            name: named(&entry.name),
            kind: kind(entry.kind),
            tags: None,
            deprecated: None,
            location,
            container_name: (!within.is_empty()).then(|| within.to_owned()),
        });
        flatten(picture, document, &entry.children, &entry.name, out);
    }
}

/// The symbols of all papers whose name holds what is looked for, in any case.
pub fn of_all(all: &[Judged], query: &str) -> Vec<SymbolInformation> {
    let query = query.to_lowercase();
    let mut found = Vec::new();
    for judged in all {
        let picture = &judged.picture;
        for document in 0..picture.documents.len() {
            let mut own = Vec::new();
            flatten(picture, document, &outline(&picture.view, document), "", &mut own);
            found.extend(own.into_iter().filter(|symbol| symbol.name.to_lowercase().contains(&query)));
            if found.len() >= MOST_SYMBOLS {
                found.truncate(MOST_SYMBOLS);
                return found;
            }
        }
    }
    found
}

/// What may be folded: whole lines, since some editors fold nothing else.
pub fn folding(look: &Look) -> Vec<FoldingRange> {
    let one = |span: Span| {
        let range = look.range(span);
        let lines = range.start.line < range.end.line;
        lines.then(|| FoldingRange {
            start_line: range.start.line,
            end_line: range.end.line,
            ..FoldingRange::default()
        })
    };
    folds(look.view(), look.document).into_iter().filter_map(one).collect()
}

/// For each place, what holds it, from the inside out. A place that nothing holds stands for itself.
pub fn selections(look: &Look) -> Vec<SelectionRange> {
    let at = |offset: &u32| {
        let mut spans = selection(look.view(), look.document, *offset);
        if spans.is_empty() {
            spans.push(Span { start: *offset, end: *offset });
        }
        let mut outer: Option<Box<SelectionRange>> = None;
        for span in spans.iter().rev() {
            outer = Some(Box::new(SelectionRange { range: look.range(*span), parent: outer }));
        }
        outer.map(|range| *range)
    };
    look.offsets.iter().filter_map(at).collect()
}
