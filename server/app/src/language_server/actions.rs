//! Code actions: the fixes of findings.

use std::collections::HashMap;

use indexwise_checker::finding::{Edit, Finding};
use tower_lsp::lsp_types::{
    CodeAction, CodeActionContext, CodeActionKind, CodeActionOrCommand, CodeActionResponse,
    DocumentChanges, OneOf, OptionalVersionedTextDocumentIdentifier, TextDocumentEdit, WorkspaceEdit,
};

use super::convert::diagnostic;
use super::looking::Look;

/// The actions at a selection.
pub fn actions(look: &Look, context: &CodeActionContext) -> Option<CodeActionResponse> {
    if !look.client().action_literals {
        return None;
    }
    let selection = look.selection();
    let found = look.found()?;
    let touching = |finding: &&Finding| finding.span.start <= selection.end && selection.start <= finding.span.end;
    let mut actions = Vec::new();
    for finding in found.findings.iter().filter(touching) {
        for (place, fix) in finding.fixes.iter().enumerate() {
            let kind = CodeActionKind::QUICKFIX;
            if wanted(context, &kind) {
                let preferred = place == 0 && fix.bulk.is_ok();
                actions.push(CodeActionOrCommand::CodeAction(CodeAction {
                    title: fix.title.clone(),
                    kind: Some(kind),
                    diagnostics: shown(look, finding).map(|shown| vec![shown]),
                    edit: Some(edit(look, &fix.edits)),
                    is_preferred: look.client().preferred_actions.then_some(preferred),
                    ..CodeAction::default()
                }));
            }
        }
    }
    Some(actions)
}

/// Whether actions of a kind are asked for: no kinds are all kinds, and a kind holds those below it.
fn wanted(context: &CodeActionContext, kind: &CodeActionKind) -> bool {
    let holds = |outer: &CodeActionKind| {
        let rest = kind.as_str().strip_prefix(outer.as_str());
        outer.as_str().is_empty() || rest.is_some_and(|rest| rest.is_empty() || rest.starts_with('.'))
    };
    context.only.as_ref().is_none_or(|only| only.iter().any(holds))
}

/// A finding as it was shown.
fn shown(look: &Look, finding: &Finding) -> Option<tower_lsp::lsp_types::Diagnostic> {
    let pages = look.judged.picture.settings.pages.as_deref();
    Some(diagnostic(finding, &look.places()?, &look.uri, look.client(), pages))
}

/// Edits of the document, with its version where the client takes that.
pub fn edit(look: &Look, edits: &[Edit]) -> WorkspaceEdit {
    edit_of_all(look, &[(look.document, edits.to_vec())])
}

/// Edits of documents of the paper.
pub fn edit_of_all(look: &Look, edits: &[(usize, Vec<Edit>)]) -> WorkspaceEdit {
    let picture = &look.judged.picture;
    let of_document = |(document, edits): &(usize, Vec<Edit>)| {
        let pictured = picture.documents.get(*document)?;
        Some((pictured.uri.clone()?, pictured.version, picture.places(*document)?.edits(edits)))
    };
    let edits = edits.iter().filter_map(of_document);
    if !look.client().versioned_edits {
        let changes: HashMap<_, _> = edits.map(|(uri, _, edits)| (uri, edits)).collect();
        return WorkspaceEdit { changes: Some(changes), ..WorkspaceEdit::default() };
    }
    let edits = edits.map(|(uri, version, edits)| TextDocumentEdit {
        text_document: OptionalVersionedTextDocumentIdentifier { uri, version },
        edits: edits.into_iter().map(OneOf::Left).collect(),
    });
    WorkspaceEdit { document_changes: Some(DocumentChanges::Edits(edits.collect())), ..WorkspaceEdit::default() }
}
