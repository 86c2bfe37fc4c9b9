//! What the server says by itself. The worker puts it here and never waits; one task sends it.
//!
//! The one idea: a client that does not read must not stop the worker, and what waits for it must not grow. So of the
//! diagnostics of a document only the newest wait, and of the rest only so many. Requests to the client are sent by
//! tasks of their own, since nobody knows when they are answered.

use std::collections::{BTreeMap, VecDeque};
use std::sync::{Arc, Mutex, MutexGuard, PoisonError};

use serde_json::Value;
use tokio::sync::oneshot::error::TryRecvError;
use tokio::sync::{Notify, oneshot};
use tower_lsp::Client as Wire;
use tower_lsp::lsp_types::notification::Progress;
use tower_lsp::lsp_types::request::WorkDoneProgressCreate;
use tower_lsp::lsp_types::{
    ApplyWorkspaceEditParams, ConfigurationItem, MessageType, ProgressParams, ProgressParamsValue, ProgressToken,
    PublishDiagnosticsParams, Registration, Url, WorkDoneProgress, WorkDoneProgressBegin, WorkDoneProgressCreateParams,
    WorkDoneProgressEnd, WorkspaceEdit,
};

use super::settings::SECTION;

/// So many messages wait at most; after that new ones are lost.
const MOST_WAITING: usize = 1000;

/// Something to say.
#[derive(Debug)]
pub enum Note {
    /// To be shown to the user.
    Show(MessageType, String),
    /// To be written into the client's log.
    Log(MessageType, String),
    /// Files are to be watched, settings to be told of.
    Register(Vec<Registration>),
    /// The settings are asked for; the answer goes to the function.
    AskSettings,
    /// The client asks again for diagnostics.
    RefreshDiagnostics,
    /// The client asks again for inlay hints.
    RefreshHints,
    /// The client asks again for code lenses.
    RefreshLenses,
    /// Work that lasts has begun, under a token and a title; it has ended when the other end of the channel is gone.
    Work(String, String, oneshot::Receiver<()>),
    /// The client makes an edit.
    Apply(String, WorkspaceEdit),
}

#[derive(Debug, Default)]
struct Waiting {
    diagnostics: BTreeMap<Url, PublishDiagnosticsParams>,
    notes: VecDeque<Note>,
}

/// What waits to be sent.
#[derive(Debug, Default)]
pub struct Outbox {
    waiting: Mutex<Waiting>,
    wake: Notify,
}

impl Outbox {
    /// Sends a note.
    pub fn put(&self, note: Note) {
        let mut waiting = self.locked();
        if waiting.notes.len() < MOST_WAITING {
            waiting.notes.push_back(note);
        }
        drop(waiting);
        self.wake.notify_one();
    }

    /// Sends the diagnostics of a document in the place of those that still wait.
    pub fn publish(&self, diagnostics: PublishDiagnosticsParams) {
        self.locked().diagnostics.insert(diagnostics.uri.clone(), diagnostics);
        self.wake.notify_one();
    }

    /// The notes that wait.
    #[cfg(test)]
    pub fn take_notes(&self) -> Vec<Note> {
        self.locked().notes.drain(..).collect()
    }

    fn locked(&self) -> MutexGuard<'_, Waiting> {
        self.waiting.lock().unwrap_or_else(PoisonError::into_inner)
    }

    /// Sends what comes, for ever; `settings` takes what the client answers about them.
    pub async fn deliver(self: Arc<Self>, wire: Wire, settings: impl Fn(Value) + Clone + Send + 'static) {
        loop {
            self.wake.notified().await;
            let Waiting { diagnostics, notes } = std::mem::take(&mut *self.locked());
            for (_, one) in diagnostics {
                wire.publish_diagnostics(one.uri, one.diagnostics, one.version).await;
            }
            for note in notes {
                say(&wire, note, &settings).await;
            }
        }
    }
}

async fn say(wire: &Wire, note: Note, settings: &(impl Fn(Value) + Clone + Send + 'static)) {
    match note {
        Note::Show(kind, text) => wire.show_message(kind, text).await,
        Note::Log(kind, text) => wire.log_message(kind, text).await,
        request => {
            let (wire, settings) = (wire.clone(), settings.clone());
            tokio::spawn(async move { ask(&wire, request, settings).await });
        }
    }
}

/// Sends a request to the client. What it answers matters only where settings are asked for.
async fn ask(wire: &Wire, note: Note, settings: impl Fn(Value)) {
    match note {
        Note::Register(registrations) => drop(wire.register_capability(registrations).await),
        Note::AskSettings => {
            let item = ConfigurationItem { scope_uri: None, section: Some(SECTION.to_owned()) };
            if let Ok(answers) = wire.configuration(vec![item]).await {
                settings(answers.into_iter().next().unwrap_or_default());
            }
        }
        Note::RefreshDiagnostics => drop(wire.workspace_diagnostic_refresh().await),
        Note::RefreshHints => drop(wire.inlay_hint_refresh().await),
        Note::RefreshLenses => drop(wire.code_lens_refresh().await),
        Note::Work(token, title, ended) => work(wire, token, title, ended).await,
        Note::Apply(label, edit) => {
            let params = ApplyWorkspaceEditParams { label: Some(label), edit };
            let _ = wire.send_request::<tower_lsp::lsp_types::request::ApplyWorkspaceEdit>(params).await;
        }
        Note::Show(..) | Note::Log(..) => {}
    }
}

/// A client may refuse to show progress, or the work may have ended before it agreed; then nothing of it is shown.
async fn work(wire: &Wire, token: String, title: String, mut ended: oneshot::Receiver<()>) {
    let params = WorkDoneProgressCreateParams { token: ProgressToken::String(token.clone()) };
    if wire.send_request::<WorkDoneProgressCreate>(params).await.is_err()
        || ended.try_recv() != Err(TryRecvError::Empty)
    {
        return;
    }
    let begin = WorkDoneProgressBegin { title, cancellable: Some(false), message: None, percentage: None };
    progress(wire, token.clone(), WorkDoneProgress::Begin(begin)).await;
    let _ = ended.await;
    progress(wire, token, WorkDoneProgress::End(WorkDoneProgressEnd::default())).await;
}

async fn progress(wire: &Wire, token: String, step: WorkDoneProgress) {
    let params = ProgressParams { token: ProgressToken::String(token), value: ProgressParamsValue::WorkDone(step) };
    wire.send_notification::<Progress>(params).await;
}
