//! What the worker is told: everything that can happen, as one closed type.

use std::path::PathBuf;

use indexwise_checker::paper::{Analysis, Memory};
use serde_json::Value;
use tower_lsp::jsonrpc::{Error, Result};
use tower_lsp::lsp_types::{Position, TextDocumentContentChangeEvent, Url};

use super::capabilities::Client;
use super::looking::Look;
use super::reading::{Judged, Picture};
use crate::project::PaperKey;

/// Something that happened.
pub enum Event {
    /// A session begins.
    Begin {
        /// What the client can do.
        client: Client,
        /// The folder of what is no file.
        folder: PathBuf,
        /// The settings that came with the beginning.
        settings: Value,
    },
    /// The client is ready to be asked.
    Ready,
    /// A text was opened.
    Open {
        /// As the client names it.
        uri: Url,
        /// The client's name of its language.
        language: String,
        /// The client's number.
        version: i32,
        /// All of it.
        text: String,
    },
    /// A text was changed.
    Change {
        /// As the client names it.
        uri: Url,
        /// The client's number of the text after the changes.
        version: i32,
        /// One after another.
        changes: Vec<TextDocumentContentChangeEvent>,
    },
    /// A text was closed.
    Close(Url),
    /// Files may be others than before: one was saved, or watched ones changed.
    Files,
    /// Settings changed; these are they, or nothing where they have to be asked for.
    Settings(Value),
    /// The client answered what its settings are.
    SettingsAnswered(Value),
    /// A question about a document.
    Ask(Question),
    /// A question about all papers.
    AskAll(AllTask),
    /// The client is to make an edit.
    Apply(String, Box<tower_lsp::lsp_types::WorkspaceEdit>),
    /// A paper was read.
    Read {
        /// Which.
        key: PaperKey,
        /// At which state of its texts.
        revision: u64,
        /// The picture; nothing if it was given up.
        result: std::result::Result<Option<Box<Picture>>, String>,
        /// What is kept of it for the next reading.
        memory: Box<Memory>,
    },
    /// The steps of a paper were judged.
    Verdicts {
        /// Which.
        key: PaperKey,
        /// At which state of its texts.
        revision: u64,
        /// What was found; nothing if it was given up.
        result: std::result::Result<Option<Analysis>, String>,
    },
    /// Something went wrong while a question was answered.
    Trouble(String),
    /// The session ends.
    Shutdown,
}

/// A question about a document.
pub struct Question {
    /// As the client names it.
    pub uri: Url,
    /// The places that it is about; offsets once it has come to the worker.
    pub places: Vec<Position>,
    /// Whether it is answered even if the text has moved on.
    pub freshly: bool,
    /// What is done to answer it.
    pub task: Task,
}

/// Answers a question by a look, or says why there is no answer.
pub type Task = Box<dyn FnOnce(std::result::Result<Look, Refusal>) + Send>;

/// Answers a question by a look at all papers.
pub type AllTask = Box<dyn FnOnce(Vec<Judged>) + Send>;

/// Why a question is not answered.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Refusal {
    /// The text has moved on.
    Moved,
    /// The text is not open, or cannot be read.
    Unknown,
}

impl Refusal {
    /// What the client is told: of a text that is not known there is nothing to say.
    pub fn answer<T: Default>(self) -> Result<T> {
        match self {
            Self::Moved => Err(Error::content_modified()),
            Self::Unknown => Ok(T::default()),
        }
    }
}
