//! What the client is told of what was found: sent by ourselves, or given when asked, never both.
//!
//! A document that is open is told of at every version, others only when something changed. Findings about steps come
//! later than the rest, in a second message; a client that asks is told to ask again.

use std::collections::BTreeMap;

use tower_lsp::lsp_types::{Diagnostic, PublishDiagnosticsParams, Url};

use super::convert;
use super::outbox::Note;
use super::reading::Judged;
use super::worker::Worker;

impl Worker {
    /// Tells what is known of a paper.
    pub(super) fn publish(&mut self, at: usize) {
        let Some(paper) = self.papers.get_mut(at) else { return };
        let Some(judged) = paper.current().cloned() else { return };
        let mut shown = BTreeMap::new();
        for document in 0..judged.picture.documents.len() {
            let Some(pictured) = judged.picture.documents.get(document) else { continue };
            let Some(uri) = &pictured.uri else { continue };
            shown.insert(uri.clone(), (pictured.version, diagnostics(&judged, document)));
        }
        let before = std::mem::replace(&mut paper.shown, shown.clone());
        if self.client.pulls {
            let changed =
                before.iter().map(|(uri, (_, list))| (uri, list)).ne(shown.iter().map(|(uri, (_, list))| (uri, list)));
            // Who asked for this version waits for it; what came late has to be asked for again.
            if changed && judged.complete && self.client.refreshes_diagnostics {
                self.outbox.put(Note::RefreshDiagnostics);
            }
            return;
        }
        for uri in before.keys().filter(|uri| !shown.contains_key(*uri)) {
            self.outbox.publish(PublishDiagnosticsParams { uri: uri.clone(), diagnostics: Vec::new(), version: None });
        }
        for (uri, (version, diagnostics)) in shown {
            let same = before.get(&uri).is_some_and(|(then, list)| *then == version && *list == diagnostics);
            let nothing_new = !before.contains_key(&uri) && version.is_none() && diagnostics.is_empty();
            if !same && !nothing_new {
                self.outbox.publish(PublishDiagnosticsParams { uri, diagnostics, version });
            }
        }
    }
}

/// What was found in a document, for the client.
pub fn diagnostics(judged: &Judged, document: usize) -> Vec<Diagnostic> {
    let picture = &judged.picture;
    let uri: Option<&Url> = picture.documents.get(document).and_then(|document| document.uri.as_ref());
    let (Some(places), Some(uri), Some(found)) = (picture.places(document), uri, judged.found(document)) else {
        return Vec::new();
    };
    let pages = picture.settings.pages.as_deref();
    found.findings.iter().map(|finding| convert::diagnostic(finding, &places, uri, &picture.client, pages)).collect()
}
