//! Code actions: fixes of findings, and what else may be done at a place; and edits as the client takes them.

use std::collections::HashMap;

use indexwise_checker::editing::actions::{Action, ActionKind, actions};
use indexwise_checker::finding::{Edit, Finding};
use serde_json::to_value;
use tower_lsp::lsp_types::{
    CodeAction, CodeActionContext, CodeActionKind, CodeActionOrCommand, CodeActionResponse, Command, Diagnostic,
    DocumentChanges, OneOf, OptionalVersionedTextDocumentIdentifier, TextDocumentEdit, WorkspaceEdit,
};

use super::commands::APPLY;
use super::convert::diagnostic;
use super::looking::Look;

/// What puts something in is a kind of its own below refactoring.
const INSERT: CodeActionKind = CodeActionKind::new("refactor.insert");

/// The actions at a selection.
pub fn at_selection(look: &Look, context: &CodeActionContext) -> Option<CodeActionResponse> {
    let actions = offered(look);
    let asked = actions.into_iter().filter(|action| wanted(context, &kind(action.kind)));
    if look.client().action_literals {
        return Some(asked.map(|action| CodeActionOrCommand::CodeAction(literal(look, action))).collect());
    }
    // Such a client runs commands; without the ability to make our edits, nothing can be done.
    let commands = asked.filter(|_| look.client().applies_edits).map(|action| {
        let edit = to_value(edit(look, &action.edits)).unwrap_or_default();
        let arguments = Some(vec![action.title.clone().into(), edit]);
        CodeActionOrCommand::Command(Command { title: action.title, command: APPLY.to_owned(), arguments })
    });
    Some(commands.collect())
}

/// What may be done at a selection.
pub fn offered(look: &Look) -> Vec<Action> {
    let found = look.found().map(|found| actions(look.view(), look.document, look.selection(), found));
    found.unwrap_or_default()
}

fn literal(look: &Look, action: Action) -> CodeAction {
    let finding = match action.kind {
        ActionKind::Fix { finding } => look.found().and_then(|found| found.findings.get(finding)),
        _ => None,
    };
    CodeAction {
        edit: Some(edit(look, &action.edits)),
        title: action.title,
        kind: Some(kind(action.kind)),
        diagnostics: finding.and_then(|finding| shown(look, finding)).map(|shown| vec![shown]),
        is_preferred: look.client().preferred_actions.then_some(action.preferred),
        ..CodeAction::default()
    }
}

const fn kind(kind: ActionKind) -> CodeActionKind {
    match kind {
        ActionKind::Fix { .. } | ActionKind::Declare => CodeActionKind::QUICKFIX,
        ActionKind::Rewrite => CodeActionKind::REFACTOR_REWRITE,
        ActionKind::Insert => INSERT,
        ActionKind::Check => CodeActionKind::REFACTOR,
    }
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
fn shown(look: &Look, finding: &Finding) -> Option<Diagnostic> {
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
