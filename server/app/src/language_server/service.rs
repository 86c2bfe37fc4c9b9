//! The service that tower-lsp calls: every message goes to the worker before anything is awaited.
//!
//! That is what keeps the order: handlers run at the same time, and whatever stands behind an await may be overtaken by
//! a later message. So a handler sends an event, and a request then waits for its answer alone. How each answer is made
//! from a look stands in the file of its feature.
//!
//! No handler awaits a request to the client: the worker has those sent by the outbox.

use std::path::PathBuf;
use std::sync::OnceLock;
use std::sync::mpsc::SyncSender;

use serde_json::Value;
use tokio::sync::oneshot;
use tower_lsp::jsonrpc::{Error, Result};
use tower_lsp::lsp_types::*;
use tower_lsp::{LanguageServer, async_trait};

use super::capabilities::{Client, offered};
use super::commands::{self, APPLY, About, CHECK_DERIVATION, Done, EXPLAIN, INSERT, SYMBOL_TABLE, WRITE_OUT};
use super::event::{Event, Question};
use super::looking::Look;
use super::reading::Judged;
use super::settings::SECTION;
use super::{actions, places, pulling, structure, tokens, writing};

/// The service.
pub struct Service {
    events: SyncSender<Event>,
    /// Whether a session has begun.
    begun: OnceLock<()>,
    /// Tells who watches over the client's process which it is.
    parent: Box<dyn Fn(u32) + Send + Sync>,
}

/// Whether a question whose text has moved on is still answered.
#[derive(Clone, Copy, PartialEq, Eq)]
enum When {
    /// Yes: what was asked is right for where the reader looks.
    Freshly,
    /// No: its answer would be put in the wrong places.
    Unmoved,
}

impl Service {
    /// A service whose worker listens to `events`.
    pub fn new(events: SyncSender<Event>, parent: impl Fn(u32) + Send + Sync + 'static) -> Self {
        Self { events, begun: OnceLock::new(), parent: Box::new(parent) }
    }

    /// Without a worker the session is over.
    fn tell(&self, event: Event) {
        let _ = self.events.send(event);
    }

    /// Asks about places of a document.
    async fn ask<T: Default + Send + 'static>(
        &self,
        uri: Url,
        places: Vec<Position>,
        when: When,
        answer: impl FnOnce(&Look) -> Result<T> + Send + 'static,
    ) -> Result<T> {
        let (reply, answered) = oneshot::channel();
        let freshly = when == When::Freshly;
        let task = move |look: std::result::Result<Look, super::event::Refusal>| {
            // Whoever asked may have taken the question back.
            if reply.is_closed() {
                return;
            }
            let answer = match look {
                Err(refusal) => refusal.answer(),
                Ok(look) if !freshly && look.has_moved() => Err(Error::content_modified()),
                Ok(look) => match answer(&look) {
                    Ok(_) if !freshly && look.has_moved() => Err(Error::content_modified()),
                    answer => answer,
                },
            };
            let _ = reply.send(answer);
        };
        self.tell(Event::Ask(Question { uri, places, freshly, task: Box::new(task) }));
        answered.await.unwrap_or_else(|_| Err(Error::internal_error()))
    }

    /// Asks about all papers.
    async fn ask_all<T: Send + 'static>(&self, answer: impl FnOnce(&[Judged]) -> T + Send + 'static) -> Result<T> {
        let (reply, answered) = oneshot::channel();
        let task = move |all: Vec<Judged>| drop(reply.send(answer(&all)));
        self.tell(Event::AskAll(Box::new(task)));
        answered.await.map_err(|_| Error::internal_error())
    }
}

impl Service {
    /// The request of our own: the ledger of the statement at a place.
    pub async fn ledger(&self, params: TextDocumentPositionParams) -> Result<Option<Value>> {
        let (uri, place) = at(params);
        self.ask(uri, place, When::Unmoved, |look| Ok(commands::ledger(look))).await
    }
}

#[async_trait]
impl LanguageServer for Service {
    async fn initialize(&self, params: InitializeParams) -> Result<InitializeResult> {
        if self.begun.set(()).is_err() {
            return Err(Error::invalid_request());
        }
        let client = Client::of(&params.capabilities);
        if let Some(parent) = params.process_id {
            (self.parent)(parent);
        }
        let settings = params.initialization_options.as_ref().map(section).unwrap_or_default();
        self.tell(Event::Begin { client, folder: folder_of(&params), settings });
        let info = ServerInfo { name: SECTION.to_owned(), version: Some(env!("CARGO_PKG_VERSION").to_owned()) };
        Ok(InitializeResult { capabilities: offered(&client, &params.capabilities), server_info: Some(info) })
    }

    async fn initialized(&self, _: InitializedParams) {
        self.tell(Event::Ready);
    }

    /// The worker ends with the process: an answer that is still wanted may be on its way.
    async fn shutdown(&self) -> Result<()> {
        Ok(())
    }

    async fn did_open(&self, params: DidOpenTextDocumentParams) {
        let TextDocumentItem { uri, language_id: language, version, text } = params.text_document;
        self.tell(Event::Open { uri, language, version, text });
    }

    async fn did_change(&self, params: DidChangeTextDocumentParams) {
        let VersionedTextDocumentIdentifier { uri, version } = params.text_document;
        self.tell(Event::Change { uri, version, changes: params.content_changes });
    }

    async fn did_close(&self, params: DidCloseTextDocumentParams) {
        self.tell(Event::Close(params.text_document.uri));
    }

    async fn did_save(&self, _: DidSaveTextDocumentParams) {
        self.tell(Event::Files);
    }

    async fn did_change_watched_files(&self, _: DidChangeWatchedFilesParams) {
        self.tell(Event::Files);
    }

    async fn did_change_workspace_folders(&self, _: DidChangeWorkspaceFoldersParams) {
        self.tell(Event::Files);
    }

    async fn did_change_configuration(&self, params: DidChangeConfigurationParams) {
        self.tell(Event::Settings(section(&params.settings)));
    }

    async fn diagnostic(&self, params: DocumentDiagnosticParams) -> Result<DocumentDiagnosticReportResult> {
        let before = params.previous_result_id;
        let report = self.ask(params.text_document.uri, Vec::new(), When::Unmoved, move |look| {
            if !look.client().pulls {
                return Err(Error::method_not_found());
            }
            Ok(Some(pulling::document(&look.judged, look.document, before.as_deref())))
        });
        let report = report.await?.unwrap_or_else(pulling::nothing);
        Ok(DocumentDiagnosticReportResult::Report(report))
    }

    async fn workspace_diagnostic(&self, params: WorkspaceDiagnosticParams) -> Result<WorkspaceDiagnosticReportResult> {
        let report = self.ask_all(move |all| pulling::workspace(all, &params.previous_result_ids));
        Ok(WorkspaceDiagnosticReportResult::Report(report.await?))
    }

    async fn hover(&self, params: HoverParams) -> Result<Option<Hover>> {
        let (uri, place) = at(params.text_document_position_params);
        self.ask(uri, place, When::Freshly, |look| Ok(places::hover(look))).await
    }

    async fn document_highlight(&self, params: DocumentHighlightParams) -> Result<Option<Vec<DocumentHighlight>>> {
        let (uri, place) = at(params.text_document_position_params);
        self.ask(uri, place, When::Unmoved, |look| Ok(Some(places::highlights(look)))).await
    }

    async fn references(&self, params: ReferenceParams) -> Result<Option<Vec<Location>>> {
        let (uri, place) = at(params.text_document_position);
        let all = params.context.include_declaration;
        self.ask(uri, place, When::Unmoved, move |look| Ok(Some(places::references(look, all)))).await
    }

    async fn goto_definition(&self, params: GotoDefinitionParams) -> Result<Option<GotoDefinitionResponse>> {
        let (uri, place) = at(params.text_document_position_params);
        let answer = |look: &Look| Ok(Some(GotoDefinitionResponse::Array(places::definition(look))));
        self.ask(uri, place, When::Unmoved, answer).await
    }

    async fn prepare_rename(&self, params: TextDocumentPositionParams) -> Result<Option<PrepareRenameResponse>> {
        let (uri, place) = at(params);
        self.ask(uri, place, When::Unmoved, places::prepare_rename).await
    }

    async fn rename(&self, params: RenameParams) -> Result<Option<WorkspaceEdit>> {
        let (uri, place) = at(params.text_document_position);
        let name = params.new_name;
        self.ask(uri, place, When::Unmoved, move |look| places::rename(look, &name)).await
    }

    async fn semantic_tokens_full(&self, params: SemanticTokensParams) -> Result<Option<SemanticTokensResult>> {
        let answer = |look: &Look| Ok(Some(tokens::within(look, look.whole()).into()));
        self.ask(params.text_document.uri, Vec::new(), When::Unmoved, answer).await
    }

    async fn semantic_tokens_range(
        &self,
        params: SemanticTokensRangeParams,
    ) -> Result<Option<SemanticTokensRangeResult>> {
        let places = vec![params.range.start, params.range.end];
        let answer = |look: &Look| Ok(Some(tokens::within(look, look.selection()).into()));
        self.ask(params.text_document.uri, places, When::Unmoved, answer).await
    }

    async fn code_action(&self, params: CodeActionParams) -> Result<Option<CodeActionResponse>> {
        let CodeActionParams { text_document, range, context, .. } = params;
        let places = vec![range.start, range.end];
        self.ask(text_document.uri, places, When::Unmoved, move |look| Ok(actions::at_selection(look, &context))).await
    }

    async fn completion(&self, params: CompletionParams) -> Result<Option<CompletionResponse>> {
        let (uri, place) = at(params.text_document_position);
        let answer = |look: &Look| Ok(Some(CompletionResponse::List(writing::completion(look))));
        self.ask(uri, place, When::Freshly, answer).await
    }

    async fn inlay_hint(&self, params: InlayHintParams) -> Result<Option<Vec<InlayHint>>> {
        let places = vec![params.range.start, params.range.end];
        let answer = |look: &Look| Ok(Some(writing::inlay_hints(look)));
        self.ask(params.text_document.uri, places, When::Unmoved, answer).await
    }

    async fn code_lens(&self, params: CodeLensParams) -> Result<Option<Vec<CodeLens>>> {
        let answer = |look: &Look| Ok(Some(writing::code_lenses(look)));
        self.ask(params.text_document.uri, Vec::new(), When::Unmoved, answer).await
    }

    async fn document_symbol(&self, params: DocumentSymbolParams) -> Result<Option<DocumentSymbolResponse>> {
        let answer = |look: &Look| Ok(Some(structure::symbols(look)));
        self.ask(params.text_document.uri, Vec::new(), When::Unmoved, answer).await
    }

    async fn symbol(&self, params: WorkspaceSymbolParams) -> Result<Option<Vec<SymbolInformation>>> {
        self.ask_all(move |all| Some(structure::of_all(all, &params.query))).await
    }

    async fn folding_range(&self, params: FoldingRangeParams) -> Result<Option<Vec<FoldingRange>>> {
        let answer = |look: &Look| Ok(Some(structure::folding(look)));
        self.ask(params.text_document.uri, Vec::new(), When::Unmoved, answer).await
    }

    async fn selection_range(&self, params: SelectionRangeParams) -> Result<Option<Vec<SelectionRange>>> {
        let answer = |look: &Look| Ok(Some(structure::selections(look)));
        self.ask(params.text_document.uri, params.positions, When::Unmoved, answer).await
    }

    async fn execute_command(&self, params: ExecuteCommandParams) -> Result<Option<Value>> {
        let arguments = params.arguments;
        match params.command.as_str() {
            EXPLAIN => return commands::page(&arguments).map(Some),
            APPLY => {
                let (title, edit) = commands::given_edit(&arguments)?;
                self.tell(Event::Apply(title, Box::new(edit)));
                return Ok(None);
            }
            _ => {}
        }
        let run: fn(&Look, Option<&str>) -> Done = match params.command.as_str() {
            WRITE_OUT => |look, _| (commands::written_out(look), None),
            SYMBOL_TABLE => |look, _| (commands::symbol_table(look), None),
            CHECK_DERIVATION => |look, _| commands::checked(look),
            INSERT => commands::inserted,
            other => return Err(Error::invalid_params(format!("there is no command {other}"))),
        };
        let About { text_document, position, label } = About::read(&arguments)?;
        let answer = move |look: &Look| Ok(Some(run(look, label.as_deref())));
        let done: Option<Done> = self.ask(text_document.uri, vec![position], When::Unmoved, answer).await?;
        let Some((answer, edit)) = done else { return Ok(None) };
        if let Some((title, edit)) = edit {
            self.tell(Event::Apply(title, Box::new(edit)));
        }
        Ok(Some(answer))
    }
}

/// The document and the place of a question.
fn at(params: TextDocumentPositionParams) -> (Url, Vec<Position>) {
    (params.text_document.uri, vec![params.position])
}

/// The part of a client's settings that is ours: some send all of them, some only that part.
fn section(settings: &Value) -> Value {
    settings.get(SECTION).unwrap_or(settings).clone()
}

/// The folder that what is no file is taken to stand in.
#[allow(deprecated, reason = "clients of an older protocol say where they are in this way alone")]
fn folder_of(params: &InitializeParams) -> PathBuf {
    let folder = params.workspace_folders.as_ref().and_then(|folders| Some(folders.first()?.uri.clone()));
    let folder = folder.or_else(|| params.root_uri.clone()).and_then(|uri| uri.to_file_path().ok());
    let folder = folder.or_else(|| std::env::current_dir().ok());
    folder.and_then(|folder| folder.canonicalize().ok()).unwrap_or_else(|| PathBuf::from("/"))
}
