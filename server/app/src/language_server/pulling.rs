//! Diagnostics for a client that asks for them.
//!
//! The number of a result is a hash of what it says, so that nothing has to be remembered of what a client was told.

use std::collections::HashMap;
use std::hash::{DefaultHasher, Hash, Hasher};

use tower_lsp::lsp_types::{
    Diagnostic, DocumentDiagnosticReport, FullDocumentDiagnosticReport, PreviousResultId,
    RelatedFullDocumentDiagnosticReport, RelatedUnchangedDocumentDiagnosticReport, UnchangedDocumentDiagnosticReport,
    Url, WorkspaceDiagnosticReport, WorkspaceDocumentDiagnosticReport, WorkspaceFullDocumentDiagnosticReport,
    WorkspaceUnchangedDocumentDiagnosticReport,
};

use super::publishing::diagnostics;
use super::reading::Judged;

fn number(items: &[Diagnostic]) -> String {
    let mut hasher = DefaultHasher::new();
    // Diagnostics have no hash of their own.
    serde_json::to_string(items).unwrap_or_default().hash(&mut hasher);
    format!("{:016x}", hasher.finish())
}

/// The report on a document.
pub fn document(judged: &Judged, document: usize, before: Option<&str>) -> DocumentDiagnosticReport {
    let items = diagnostics(judged, document);
    let result_id = number(&items);
    if before == Some(result_id.as_str()) {
        let unchanged_document_diagnostic_report = UnchangedDocumentDiagnosticReport { result_id };
        let report =
            RelatedUnchangedDocumentDiagnosticReport { related_documents: None, unchanged_document_diagnostic_report };
        return DocumentDiagnosticReport::Unchanged(report);
    }
    full(FullDocumentDiagnosticReport { result_id: Some(result_id), items })
}

/// The report on a document that nothing is known of.
pub fn nothing() -> DocumentDiagnosticReport {
    full(FullDocumentDiagnosticReport::default())
}

const fn full(full_document_diagnostic_report: FullDocumentDiagnosticReport) -> DocumentDiagnosticReport {
    DocumentDiagnosticReport::Full(RelatedFullDocumentDiagnosticReport {
        related_documents: None,
        full_document_diagnostic_report,
    })
}

/// The report on all documents of all papers.
pub fn workspace(all: &[Judged], before: &[PreviousResultId]) -> WorkspaceDiagnosticReport {
    let before: HashMap<&Url, &str> = before.iter().map(|one| (&one.uri, one.value.as_str())).collect();
    let mut items = Vec::new();
    for judged in all {
        for (number, document) in judged.picture.documents.iter().enumerate() {
            let Some(uri) = &document.uri else { continue };
            let version = document.version.map(i64::from);
            let report = self::document(judged, number, before.get(uri).copied());
            items.push(in_workspace(report, uri.clone(), version));
        }
    }
    WorkspaceDiagnosticReport { items }
}

fn in_workspace(report: DocumentDiagnosticReport, uri: Url, version: Option<i64>) -> WorkspaceDocumentDiagnosticReport {
    match report {
        DocumentDiagnosticReport::Full(report) => {
            let full_document_diagnostic_report = report.full_document_diagnostic_report;
            let report = WorkspaceFullDocumentDiagnosticReport { uri, version, full_document_diagnostic_report };
            WorkspaceDocumentDiagnosticReport::Full(report)
        }
        DocumentDiagnosticReport::Unchanged(report) => {
            let unchanged_document_diagnostic_report = report.unchanged_document_diagnostic_report;
            let report =
                WorkspaceUnchangedDocumentDiagnosticReport { uri, version, unchanged_document_diagnostic_report };
            WorkspaceDocumentDiagnosticReport::Unchanged(report)
        }
    }
}
