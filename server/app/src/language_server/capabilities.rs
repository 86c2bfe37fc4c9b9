//! What the client can do, and what the server offers to it.
//!
//! The one idea: a client is read once into plain flags, so that no other file looks through its capabilities. What a
//! client does not announce it does not get.

use tower_lsp::lsp_types::{
    ClientCapabilities, CodeActionKind, CodeActionOptions, CodeActionProviderCapability, CodeLensOptions,
    CompletionOptions, DiagnosticOptions, DiagnosticServerCapabilities, DiagnosticTag, ExecuteCommandOptions,
    FoldingRangeProviderCapability, HoverProviderCapability, MarkupContent, MarkupKind, OneOf, RenameOptions,
    SelectionRangeProviderCapability, SemanticTokensFullOptions, SemanticTokensLegend, SemanticTokensOptions,
    ServerCapabilities, TextDocumentSyncCapability, TextDocumentSyncKind, TextDocumentSyncOptions,
    WorkDoneProgressOptions,
};

use super::commands::COMMANDS;
use super::convert::Encoding;
use super::tokens::KINDS;

/// What the client can do.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Client {
    /// What columns count, as agreed.
    pub encoding: Encoding,
    /// Asks for diagnostics instead of being sent them.
    pub pulls: bool,
    /// Can be told to ask again for diagnostics.
    pub refreshes_diagnostics: bool,
    /// Can be told to ask again for inlay hints.
    pub refreshes_hints: bool,
    /// Can be told to ask again for code lenses.
    pub refreshes_lenses: bool,
    /// Takes further places with a diagnostic.
    pub related: bool,
    /// Takes an address with the code of a diagnostic.
    pub code_description: bool,
    /// Keeps the data of a diagnostic.
    pub data: bool,
    /// Fades out what is unnecessary.
    pub unnecessary_tag: bool,
    /// Watches files when asked to.
    pub watches: bool,
    /// Can be asked for settings.
    pub has_settings: bool,
    /// Tells of changed settings only if it is asked to.
    pub registers_settings: bool,
    /// Shows progress.
    pub progress: bool,
    /// How what is told when hovering is marked up; nothing for clients that know no markup.
    pub hover: Option<Markup>,
    /// How what stands beside a completion is marked up.
    pub completion: Option<Markup>,
    /// Takes code actions, not only commands.
    pub action_literals: bool,
    /// Marks the preferred code action.
    pub preferred_actions: bool,
    /// Takes edits with the version of the document.
    pub versioned_edits: bool,
    /// Takes symbols within symbols.
    pub nested_symbols: bool,
    /// Makes edits that the server asks for.
    pub applies_edits: bool,
}

/// A markup that a client shows.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Markup {
    /// Markdown.
    Markdown,
    /// None: the text as it is.
    Plain,
}

impl Markup {
    /// Markdown, if the client takes it.
    fn of(formats: &[MarkupKind]) -> Option<Self> {
        let takes = |kind: MarkupKind| formats.contains(&kind);
        if takes(MarkupKind::Markdown) {
            Some(Self::Markdown)
        } else {
            takes(MarkupKind::PlainText).then_some(Self::Plain)
        }
    }

    /// A text in this markup.
    pub fn content(self, value: String) -> MarkupContent {
        let kind = match self {
            Self::Markdown => MarkupKind::Markdown,
            Self::Plain => MarkupKind::PlainText,
        };
        MarkupContent { kind, value }
    }
}

impl Client {
    /// Reads what a client announces.
    pub fn of(capabilities: &ClientCapabilities) -> Self {
        let text = capabilities.text_document.as_ref();
        let workspace = capabilities.workspace.as_ref();
        let general = capabilities.general.as_ref();
        let published = text.and_then(|text| text.publish_diagnostics.as_ref());
        let tags = published.and_then(|published| published.tag_support.as_ref());
        let action = text.and_then(|text| text.code_action.as_ref());
        let item = text.and_then(|text| text.completion.as_ref()?.completion_item.as_ref());
        let edits = workspace.and_then(|workspace| workspace.workspace_edit.as_ref());
        let hover = text.and_then(|text| text.hover.as_ref()?.content_format.as_ref());
        let documentation = item.and_then(|item| item.documentation_format.as_ref());
        let settings = workspace.and_then(|workspace| workspace.did_change_configuration);
        let watched = workspace.and_then(|workspace| workspace.did_change_watched_files);
        let yes = |said: Option<bool>| said == Some(true);
        Self {
            encoding: Encoding::agreed(general.and_then(|general| general.position_encodings.as_deref())),
            pulls: text.is_some_and(|text| text.diagnostic.is_some()),
            refreshes_diagnostics: yes(workspace.and_then(|one| one.diagnostic.as_ref()?.refresh_support)),
            refreshes_hints: yes(workspace.and_then(|one| one.inlay_hint.as_ref()?.refresh_support)),
            refreshes_lenses: yes(workspace.and_then(|one| one.code_lens.as_ref()?.refresh_support)),
            related: yes(published.and_then(|published| published.related_information)),
            code_description: yes(published.and_then(|published| published.code_description_support)),
            data: yes(published.and_then(|published| published.data_support)),
            unnecessary_tag: tags.is_some_and(|tags| tags.value_set.contains(&DiagnosticTag::UNNECESSARY)),
            watches: yes(watched.and_then(|watched| watched.dynamic_registration)),
            has_settings: yes(workspace.and_then(|workspace| workspace.configuration)),
            registers_settings: yes(settings.and_then(|settings| settings.dynamic_registration)),
            progress: yes(capabilities.window.as_ref().and_then(|window| window.work_done_progress)),
            hover: hover.and_then(|formats| Markup::of(formats)),
            completion: documentation.and_then(|formats| Markup::of(formats)),
            action_literals: action.is_some_and(|action| action.code_action_literal_support.is_some()),
            preferred_actions: yes(action.and_then(|action| action.is_preferred_support)),
            versioned_edits: yes(edits.and_then(|edits| edits.document_changes)),
            nested_symbols: yes(
                text.and_then(|text| text.document_symbol.as_ref()?.hierarchical_document_symbol_support)
            ),
            applies_edits: yes(workspace.and_then(|workspace| workspace.apply_edit)),
        }
    }
}

/// What the server offers to a client.
pub fn offered(client: &Client, capabilities: &ClientCapabilities) -> ServerCapabilities {
    let text = capabilities.text_document.as_ref();
    let prepares = text.and_then(|text| text.rename.as_ref()?.prepare_support) == Some(true);
    ServerCapabilities {
        position_encoding: Some(client.encoding.kind()),
        text_document_sync: Some(TextDocumentSyncCapability::Options(TextDocumentSyncOptions {
            open_close: Some(true),
            change: Some(TextDocumentSyncKind::INCREMENTAL),
            save: Some(true.into()),
            ..TextDocumentSyncOptions::default()
        })),
        diagnostic_provider: client.pulls.then(|| {
            DiagnosticServerCapabilities::Options(DiagnosticOptions {
                identifier: None,
                inter_file_dependencies: true,
                workspace_diagnostics: true,
                work_done_progress_options: WorkDoneProgressOptions::default(),
            })
        }),
        hover_provider: Some(HoverProviderCapability::Simple(true)),
        code_action_provider: Some(code_actions(client)),
        rename_provider: Some(match prepares {
            true => OneOf::Right(RenameOptions {
                prepare_provider: Some(true),
                work_done_progress_options: WorkDoneProgressOptions::default(),
            }),
            false => OneOf::Left(true),
        }),
        document_highlight_provider: Some(OneOf::Left(true)),
        references_provider: Some(OneOf::Left(true)),
        definition_provider: Some(OneOf::Left(true)),
        completion_provider: Some(CompletionOptions {
            trigger_characters: Some(["_", "^", "\\", "{", " "].map(str::to_owned).to_vec()),
            ..CompletionOptions::default()
        }),
        semantic_tokens_provider: Some(
            SemanticTokensOptions {
                legend: SemanticTokensLegend { token_types: KINDS.to_vec(), token_modifiers: Vec::new() },
                range: Some(true),
                full: Some(SemanticTokensFullOptions::Bool(true)),
                work_done_progress_options: WorkDoneProgressOptions::default(),
            }
            .into(),
        ),
        inlay_hint_provider: Some(OneOf::Left(true)),
        code_lens_provider: Some(CodeLensOptions { resolve_provider: Some(false) }),
        document_symbol_provider: Some(OneOf::Left(true)),
        workspace_symbol_provider: Some(OneOf::Left(true)),
        folding_range_provider: Some(FoldingRangeProviderCapability::Simple(true)),
        selection_range_provider: Some(SelectionRangeProviderCapability::Simple(true)),
        execute_command_provider: Some(ExecuteCommandOptions {
            commands: COMMANDS.map(str::to_owned).to_vec(),
            work_done_progress_options: WorkDoneProgressOptions::default(),
        }),
        ..ServerCapabilities::default()
    }
}

fn code_actions(client: &Client) -> CodeActionProviderCapability {
    if !client.action_literals {
        return CodeActionProviderCapability::Simple(true);
    }
    CodeActionProviderCapability::Options(CodeActionOptions {
        code_action_kinds: Some(vec![CodeActionKind::QUICKFIX, CodeActionKind::REFACTOR, CodeActionKind::SOURCE]),
        resolve_provider: Some(false),
        work_done_progress_options: WorkDoneProgressOptions::default(),
    })
}
