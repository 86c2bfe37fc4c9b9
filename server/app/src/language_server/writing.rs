//! Completion, inlay hints and code lenses: what is shown while somebody writes.

use indexwise_checker::editing::completion::{Suggestion, SuggestionKind, complete};
use indexwise_checker::editing::hints::hints;
use indexwise_checker::editing::lenses::{CHECK, Lens, lenses};
use serde_json::json;
use tower_lsp::lsp_types::{
    CodeLens, Command, CompletionItem, CompletionItemKind, CompletionList, CompletionTextEdit, Documentation,
    InlayHint, InlayHintLabel, InlayHintTooltip, TextEdit,
};

use super::commands::CHECK_DERIVATION;
use super::looking::Look;

/// What may be typed at a place. The list is asked for again with every letter: what is owed changes with each.
pub fn completion(look: &Look) -> CompletionList {
    let found = complete(look.view(), look.document, look.offset());
    CompletionList { is_incomplete: true, items: found.into_iter().filter_map(|one| item(look, one)).collect() }
}

fn item(look: &Look, suggestion: Suggestion) -> Option<CompletionItem> {
    let new_text = look.places()?.written(&suggestion.text);
    let markup = |words| match look.client().completion {
        Some(markup) => Documentation::MarkupContent(markup.content(words)),
        None => Documentation::String(words),
    };
    Some(CompletionItem {
        label: suggestion.label,
        kind: Some(item_kind(suggestion.kind)),
        detail: Some(suggestion.detail),
        documentation: suggestion.documentation.map(markup),
        sort_text: Some(format!("{:06}", suggestion.rank)),
        filter_text: Some(suggestion.text),
        text_edit: Some(CompletionTextEdit::Edit(TextEdit { range: look.range(suggestion.replaces), new_text })),
        ..CompletionItem::default()
    })
}

const fn item_kind(kind: SuggestionKind) -> CompletionItemKind {
    match kind {
        SuggestionKind::Owed => CompletionItemKind::FIELD,
        SuggestionKind::Fresh => CompletionItemKind::VARIABLE,
        SuggestionKind::Kernel => CompletionItemKind::FUNCTION,
        SuggestionKind::Rule => CompletionItemKind::ENUM_MEMBER,
        SuggestionKind::Label => CompletionItemKind::REFERENCE,
        SuggestionKind::Sentence => CompletionItemKind::KEYWORD,
    }
}

/// The inlay hints of a stretch, if the user wants any.
pub fn inlay_hints(look: &Look) -> Vec<InlayHint> {
    let Some(found) = look.found().filter(|_| look.judged.picture.settings.hints) else { return Vec::new() };
    let Some(places) = look.places() else { return Vec::new() };
    let hints = hints(look.view(), look.document, look.selection(), found).into_iter().map(|hint| InlayHint {
        position: places.position(hint.at),
        label: InlayHintLabel::String(hint.text),
        kind: None,
        text_edits: None,
        tooltip: Some(InlayHintTooltip::String(hint.tooltip)),
        padding_left: Some(true),
        padding_right: Some(true),
        data: None,
    });
    hints.collect()
}

/// The lenses of the document.
pub fn code_lenses(look: &Look) -> Vec<CodeLens> {
    let Some(found) = look.found() else { return Vec::new() };
    lenses(look.view(), look.document, found).into_iter().map(|lens| code_lens(look, lens)).collect()
}

/// A lens that only tells something has a command without a name: there is nothing to do.
fn code_lens(look: &Look, lens: Lens) -> CodeLens {
    let range = look.range(lens.span);
    let place = json!({ "textDocument": { "uri": look.uri }, "position": range.start });
    let command = match lens.title == CHECK {
        true => Command { title: lens.title, command: CHECK_DERIVATION.to_owned(), arguments: Some(vec![place]) },
        false => Command { title: lens.title, command: String::new(), arguments: None },
    };
    CodeLens { range, command: Some(command), data: None }
}
