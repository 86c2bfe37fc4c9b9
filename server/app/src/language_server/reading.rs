//! A paper read: an immutable picture of all its texts at one moment, which questions look at.
//!
//! `read` is the one place where a view is made. It runs off the worker's thread; what panics in it costs this one
//! picture, and the memory of those before. Trap: a reading that was begun is not broken off when the text moves on,
//! since that would cost the memory too, and the next reading more than this one has left to do.

use std::path::{Path, PathBuf};
use std::sync::Arc;

use indexwise_checker::paper::{Analysis, Cancel, DocumentAnalysis, Memory, Paper, StepMode, View};
use indexwise_checker::steps::Verdicts;
use indexwise_grammar::hosts::ReferenceKind;
use indexwise_grammar::lines::Lines;
use indexwise_grammar::span::Span;
use tower_lsp::lsp_types::{Location, Url};

use super::capabilities::Client;
use super::convert::Places;
use super::disk::RememberedDisk;
use super::settings::Settings;
use crate::configuration::Scope;
use crate::files::Text;
use crate::panics;
use crate::project::{Loaded, Overlay, PaperKey, load};

/// An open text at the moment of the picture.
#[derive(Clone, Debug)]
pub struct OpenText {
    /// As the client names it.
    pub uri: Url,
    /// Its real path.
    pub path: PathBuf,
    /// The client's number of it.
    pub version: i32,
    /// The text.
    pub text: Text,
}

/// What a picture is made of.
#[derive(Clone, Debug)]
pub struct Order {
    /// Which paper.
    pub key: PaperKey,
    /// What holds for it.
    pub scope: Arc<Scope>,
    /// What the client wants.
    pub settings: Arc<Settings>,
    /// What the client can do.
    pub client: Client,
    /// All open texts, those of other papers too: any of them may be asked for.
    pub open: Vec<OpenText>,
    /// What is not open.
    pub disk: Arc<RememberedDisk>,
}

/// A document of a picture.
#[derive(Debug)]
pub struct Pictured {
    /// As the client names it, or would; nothing for what is no file and not open.
    pub uri: Option<Url>,
    /// Its real path.
    pub path: PathBuf,
    /// The client's number of it, if it is open.
    pub version: Option<i32>,
    /// Where its lines begin.
    pub lines: Lines,
}

/// A paper, read.
pub struct Picture {
    /// What was read.
    pub view: View,
    /// The documents, by their numbers.
    pub documents: Vec<Pictured>,
    /// The styles, by their numbers.
    pub styles: Vec<(Option<Url>, Arc<str>)>,
    /// All files that were read.
    pub files: Vec<PathBuf>,
    /// What the documents ask for.
    pub asked: Vec<Vec<(ReferenceKind, String)>>,
    /// What was found without judging steps.
    pub balance: Arc<Analysis>,
    /// Verdicts that are known from earlier versions.
    verdicts: Verdicts,
    /// What the client wants.
    pub settings: Arc<Settings>,
    /// What the client can do.
    pub client: Client,
    scope: Arc<Scope>,
}

/// A picture with the newest that is known of it.
#[derive(Clone)]
pub struct Judged {
    /// The picture.
    pub picture: Arc<Picture>,
    /// What was found.
    pub analysis: Arc<Analysis>,
    /// Whether steps were judged.
    pub complete: bool,
}

/// Reads a paper, with what is kept of its earlier versions; both come back. Nothing if it was asked to end; the error
/// is what cannot be read, or what went wrong.
pub fn read(order: &Order, mut memory: Memory, cancel: &Cancel) -> (Result<Option<Picture>, String>, Memory) {
    match panics::caught(|| pictured(order, &mut memory, cancel)) {
        Ok(result) => (result, memory),
        // What is half done is no memory.
        Err(cause) => (Err(internal(&order.key.root, &cause)), Memory::default()),
    }
}

fn internal(path: &Path, cause: &str) -> String {
    format!("internal error while reading {}: {cause}", path.display())
}

fn pictured(order: &Order, memory: &mut Memory, cancel: &Cancel) -> Result<Option<Picture>, String> {
    let mut texts = Overlay::new(&*order.disk);
    for open in &order.open {
        texts.lay(open.path.clone(), open.text.clone());
    }
    let root = order.key.root.display();
    let loaded = load(&texts, &order.key, &order.scope).map_err(|cause| format!("{root}: {cause}"))?;
    if cancel.is_cancelled() {
        return Ok(None);
    }
    let lines = || loaded.origins.iter().map(|origin| Lines::new(&origin.text.text)).collect();
    let ((view, balance), lines) = rayon::join(|| checked(order, &loaded.paper, memory), lines);
    let verdicts = memory.verdicts.clone();
    Ok((!cancel.is_cancelled()).then(|| picture(order, loaded, (view, balance, verdicts), lines)))
}

/// A paper read and judged without its steps.
fn checked(order: &Order, paper: &Paper, memory: &mut Memory) -> (View, Analysis) {
    let to_the_end = Cancel::default();
    let view = View::again(paper, memory, &to_the_end);
    let settings = order.settings.in_scope(&order.scope, StepMode::Off);
    let balance = view.judge_again(&settings, memory, &to_the_end);
    (view, balance)
}

fn picture(
    order: &Order,
    loaded: Loaded,
    (view, balance, verdicts): (View, Analysis, Verdicts),
    lines: Vec<Lines>,
) -> Picture {
    let named = |path: &Path| {
        let open = order.open.iter().find(|open| open.path == path);
        let uri = open.map_or_else(|| Url::from_file_path(path).ok(), |open| Some(open.uri.clone()));
        (uri, open.map(|open| open.version))
    };
    let documents = loaded.origins.iter().zip(lines).map(|(origin, lines)| {
        let (uri, version) = named(&origin.path);
        Pictured { uri, path: origin.path.clone(), version, lines }
    });
    let styles = loaded.styles.iter().zip(&loaded.paper.styles);
    Picture {
        documents: documents.collect(),
        styles: styles.map(|(path, source)| (named(path).0, source.text.clone())).collect(),
        files: loaded.origins.iter().map(|origin| origin.path.clone()).chain(loaded.styles.iter().cloned()).collect(),
        asked: loaded.asked,
        view,
        balance: Arc::new(balance),
        verdicts,
        settings: order.settings.clone(),
        client: order.client,
        scope: order.scope.clone(),
    }
}

impl Picture {
    /// Judges the steps, too. Nothing if it was asked to end.
    pub fn judge(&self, cancel: &Cancel) -> Result<Option<Analysis>, String> {
        let settings = self.settings.in_scope(&self.scope, self.settings.steps);
        let judged = panics::caught(|| self.view.judge_knowing(&settings, &self.verdicts, cancel));
        let root = self.documents.first().map(|root| root.path.as_path()).unwrap_or(Path::new(""));
        let judged = judged.map_err(|cause| internal(root, &cause))?;
        Ok((!cancel.is_cancelled()).then_some(judged))
    }

    /// The number of a document.
    pub fn document(&self, path: &Path) -> Option<usize> {
        self.documents.iter().position(|document| document.path == path)
    }

    /// The places of a document.
    pub fn places(&self, document: usize) -> Option<Places<'_>> {
        let lines = &self.documents.get(document)?.lines;
        Some(Places { text: self.view.text(document), lines, encoding: self.client.encoding })
    }

    /// A place in a document.
    pub fn location(&self, document: usize, span: Span) -> Option<Location> {
        let range = self.places(document)?.range(span);
        Some(Location { uri: self.documents.get(document)?.uri.clone()?, range })
    }
}

impl Judged {
    /// What was found in a document.
    pub fn found(&self, document: usize) -> Option<&DocumentAnalysis> {
        self.analysis.documents.get(document)
    }
}
