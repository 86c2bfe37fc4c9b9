//! `indexwise.toml`: what a project says of itself, once for all of its documents.
//!
//! `tables.rs` reads the file into plain data, `selection.rs` holds its globs, `sentences.rs` finds the sentences of
//! its conventions, `scopes.rs` says which files hold for which documents. The one idea: a configuration is read
//! whole or not at all. Everything that is wrong with it is told with line and column, and nothing is checked under
//! half of it.

mod scopes;
mod selection;
mod sentences;
mod tables;

use std::path::{Path, PathBuf};

use indexwise_checker::finding::Severity;
use indexwise_checker::paper::SharedConventions;
use indexwise_grammar::span::Span;

use crate::files::{self, Failure, Text};
use crate::output::cause;
use crate::panics;
use crate::reports::places::Places;

pub use scopes::{Scope, Scopes};
pub use selection::Selection;

/// The name of the file.
pub const FILE_NAME: &str = "indexwise.toml";

/// What a folder holds that is a repository.
pub const REPOSITORY: &str = ".git";

/// No configuration larger than this is read, in bytes.
const LARGEST: u64 = 1 << 20;

/// Stack for reading a file, in bytes: the deepest nesting needs between 1 and 8 MiB without optimisation.
const STACK: usize = 32 << 20;

/// Of more things that are wrong with one file, the rest is only counted.
const MOST_TOLD: usize = 20;

/// Rules with the severity that a project gives them; nothing: off. Sorted by name.
pub type Levels = Vec<(String, Option<Severity>)>;

/// A configuration file, read.
#[derive(Clone, Debug, Default)]
pub struct Configuration {
    /// Where it stands: its folder is a real path.
    pub path: PathBuf,
    /// What the findings about its sentences speak of.
    pub text: Text,
    /// Its conventions; without sentences if it has none.
    pub conventions: SharedConventions,
    /// The table `[rules]`.
    pub levels: Levels,
    /// `include` and `exclude` of the table `[files]`.
    pub selection: Selection,
    /// `macros` of the table `[files]`, as real paths.
    pub macros: Vec<PathBuf>,
}

/// Something wrong in a configuration, and where.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
struct Wrong {
    span: Span,
    cause: String,
}

/// Reads `indexwise.toml` or a file of its shape.
pub fn read(path: &Path, shown: &str) -> Result<Configuration, Vec<Failure>> {
    read_as(text_of(path).map_err(|cause| vec![Failure::new(shown, cause)])?, path, shown)
}

/// Reads a text as the file that is, or might be, at a path.
pub fn read_as(text: Text, path: &Path, shown: &str) -> Result<Configuration, Vec<Failure>> {
    let folder = path.parent().unwrap_or(Path::new(""));
    let tables =
        on_large_stack(|| tables::read(&text.text, folder)).map_err(|cause| vec![Failure::new(shown, cause)])?;
    let mut tables = tables.map_err(|wrong| told(shown, &text, wrong))?;
    tables.conventions.path = shown.to_owned();
    tables.conventions.text = text.text.clone();
    Ok(Configuration { path: path.to_owned(), text, ..tables })
}

/// The library caps how deep brackets are nested and how many parts a key has, but one times the other is much for
/// the stack of any thread that may come here.
fn on_large_stack<T: Send>(work: impl FnOnce() -> T + Send) -> Result<T, String> {
    std::thread::scope(|scope| {
        let thread = std::thread::Builder::new().stack_size(STACK).spawn_scoped(scope, || panics::caught(work));
        let ended = thread.map_err(|error| cause(&error))?.join();
        ended.unwrap_or_else(|_| Err("no message".into())).map_err(|cause| format!("internal error: {cause}"))
    })
}

/// Reads a plain list of sentences, one or more a line; what stands after a `#` is a comment.
pub fn read_sentences(path: &Path, shown: &str) -> Result<Configuration, Vec<Failure>> {
    let text = text_of(path).map_err(|cause| vec![Failure::new(shown, cause)])?;
    let sentences = sentences::of_list(&text.text);
    let conventions = SharedConventions { path: shown.to_owned(), text: text.text.clone(), sentences };
    Ok(Configuration { path: path.to_owned(), text, conventions, ..Configuration::default() })
}

/// Reading from a pipe or a device might never end, so that only files are read.
fn text_of(path: &Path) -> Result<Text, String> {
    regular(path)?;
    files::read_at_most(path, LARGEST)
}

fn regular(path: &Path) -> Result<(), String> {
    let kind = path.metadata().map_err(|error| cause(&error))?;
    if kind.is_dir() {
        return Err("is a folder".into());
    }
    if kind.is_file() { Ok(()) } else { Err("is not a file".into()) }
}

/// What is wrong as lines for people, in the order of the places.
fn told(shown: &str, text: &Text, mut wrong: Vec<Wrong>) -> Vec<Failure> {
    wrong.sort();
    let places = Places::new(text);
    let mut failures: Vec<Failure> = wrong
        .iter()
        .take(MOST_TOLD)
        .map(|wrong| {
            let place = places.start(wrong.span);
            Failure(format!("{shown}:{}:{}: {}", place.line, place.column, wrong.cause))
        })
        .collect();
    if wrong.len() > MOST_TOLD {
        failures.push(Failure::new(shown, format!("{} more of this kind", wrong.len() - MOST_TOLD)));
    }
    failures
}
