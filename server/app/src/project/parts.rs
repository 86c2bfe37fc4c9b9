//! Loads a paper: the root, the parts in the order in which they are asked for, the local styles.
//!
//! Parts are read as TeX reads them, depth first, each once, on a stack of our own. What cannot be had becomes
//! a `Trouble` at the place that asks for it, once; a style that is not beside the document belongs to the TeX
//! installation and is passed over.

use std::collections::{HashMap, HashSet};
use std::path::{Path, PathBuf};
use std::sync::Arc;
use std::vec::IntoIter;

use indexwise_checker::paper::{Paper, Scanned, Source, Trouble};
use indexwise_grammar::hosts::{Host, Reference, ReferenceKind};

use super::roots::MOST_PARTS;
use super::{Named, PaperKey, Place, Texts, folder_of, locate, named_root, outline, plain_name, project_of};
use crate::configuration::Scope;
use crate::files::Text;

/// When the texts of a paper are larger than this together, in bytes, no more are read: dense mathematics takes a
/// hundred times its length in memory while it is checked.
const LARGEST_PAPER: usize = 64 << 20;

/// So many names of a cycle are spelled out.
const LONGEST_CYCLE_SHOWN: usize = 8;

/// Files that come with every TeX installation or are made by it, so that their absence means nothing.
const FROM_TEX: [&str; 10] =
    ["glyphtounicode", "epsf", "xy", "xypic", "tikz", "pstricks", "amssym.def", "amssym", "miniltx", "eplain"];
/// Suffixes of files that a TeX run makes.
const MADE_BY_TEX: [&str; 8] = ["bbl", "aux", "toc", "lof", "lot", "ind", "gls", "out"];

/// A paper with what is needed to report on its documents.
#[derive(Debug, Default)]
pub struct Loaded {
    /// What the checker reads.
    pub paper: Paper,
    /// For each document, where it came from.
    pub origins: Vec<Origin>,
    /// For each style, its real path.
    pub styles: Vec<PathBuf>,
    /// What each document asks for, by kind and name: where this stays, the same files are read together.
    pub asked: Vec<Vec<(ReferenceKind, String)>>,
    /// The documents by their real paths.
    known: HashMap<PathBuf, usize>,
}

/// Where a document came from.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Origin {
    /// Its real path.
    pub path: PathBuf,
    /// Its text with what the checker does not see.
    pub text: Text,
}

impl Loaded {
    /// Which document stands at a real path.
    pub fn document(&self, path: &Path) -> Option<usize> {
        self.known.get(path).copied()
    }
}

/// Loads a paper under what is said of it from outside. The error is the cause for which the root cannot be read.
pub fn load(texts: &dyn Texts, key: &PaperKey, scope: &Scope) -> Result<Loaded, String> {
    let mut reader = Reader::new(texts, key);
    reader.loaded.paper.shared.clone_from(&scope.shared);
    scope.macros().iter().for_each(|path| reader.macro_file(path));
    reader.open(key.root.clone(), texts.read(&key.root)?, key.host);
    reader.tell_of_root();
    reader.follow();
    if let Some(appended) = key.appended.as_ref().filter(|path| reader.loaded.document(path).is_none()) {
        reader.open(appended.clone(), texts.read(appended)?, key.host);
        reader.follow();
    }
    Ok(reader.loaded)
}

struct Reader<'a> {
    texts: &'a dyn Texts,
    root_folder: &'a Path,
    project: &'a Path,
    loaded: Loaded,
    known_styles: HashSet<PathBuf>,
    open: Vec<Open>,
    told: HashSet<(usize, String)>,
    bytes: usize,
}

/// A document in the midst of being followed.
struct Open {
    document: usize,
    references: IntoIter<Reference>,
}

/// A style in the midst of being followed.
struct OpenStyle {
    path: PathBuf,
    text: Arc<str>,
    references: IntoIter<Reference>,
}

impl<'a> Reader<'a> {
    fn new(texts: &'a dyn Texts, key: &'a PaperKey) -> Self {
        Self {
            texts,
            root_folder: folder_of(&key.root),
            project: project_of(texts, &key.root),
            loaded: Loaded::default(),
            known_styles: HashSet::new(),
            open: Vec::new(),
            told: HashSet::new(),
            bytes: 0,
        }
    }

    fn open(&mut self, path: PathBuf, text: Text, host: Host) {
        let document = self.loaded.paper.documents.len();
        // Only LaTeX asks for files.
        let scanned = (host == Host::Latex).then(|| Scanned::new(text.text.clone(), host));
        let references = scanned.as_ref().map(|scanned| scanned.scan().references.clone()).unwrap_or_default();
        self.loaded.paper.scans.push(scanned);
        self.loaded.asked.push(references.iter().map(|one| (one.kind, one.path.clone())).collect());
        let references = references.into_iter();
        let shown = self.shown(&path);
        self.bytes += text.text.len();
        self.loaded.paper.documents.push(Source { path: shown, text: text.text.clone(), host });
        self.loaded.known.insert(path.clone(), document);
        self.loaded.origins.push(Origin { path, text });
        self.open.push(Open { document, references });
    }

    /// A root that names a main file of its own is one only because that file cannot be had.
    fn tell_of_root(&mut self) {
        let Some(origin) = self.loaded.origins.first() else { return };
        let Some(open) = self.open.first() else { return };
        let (reference, why) = match named_root(self.texts, &origin.path, open.references.as_slice()) {
            Named::Missing(reference) => (reference.clone(), "was not found".to_owned()),
            Named::Outside(reference) => (reference.clone(), "lies outside the project".to_owned()),
            Named::Root(reference, root) => match self.texts.read(&root) {
                Err(cause) => (reference.clone(), format!("cannot be read: {cause}")),
                Ok(_) => return,
            },
            Named::Nothing => return,
        };
        let name = plain_name(&reference).unwrap_or_default();
        let message = format!("the main file {name} named here {why}; its macros are unknown");
        self.tell(0, &reference, message);
    }

    fn follow(&mut self) {
        while let Some(open) = self.open.last_mut() {
            let document = open.document;
            match open.references.next() {
                None => drop(self.open.pop()),
                Some(reference) => match reference.kind {
                    ReferenceKind::Part => self.part(document, &reference),
                    ReferenceKind::Style => self.style(document, &reference),
                    ReferenceKind::Root => {}
                },
            }
        }
    }

    fn part(&mut self, document: usize, reference: &Reference) {
        let Some(name) = plain_name(reference) else { return };
        match self.locate(name, ".tex", document) {
            Place::File(path) => self.found_part(document, reference, path),
            Place::Outside => self.tell(document, reference, format!("the part {name} lies outside the project")),
            Place::Missing if is_from_tex(name) => {}
            Place::Missing => self.tell(document, reference, format!("the part {name} was not found")),
        }
    }

    fn found_part(&mut self, document: usize, reference: &Reference, path: PathBuf) {
        if let Some(&known) = self.loaded.known.get(&path) {
            return self.known_part(document, reference, known);
        }
        let name = self.shown(&path);
        if self.is_full() {
            let message = format!("the part {name} is not read: the paper is too large");
            return self.tell(document, reference, message);
        }
        match self.texts.read(&path) {
            Ok(text) => self.open(path, text, Host::Latex),
            Err(cause) => self.tell(document, reference, format!("the part {name} cannot be read: {cause}")),
        }
    }

    /// A part that was read before is no trouble, unless it is still being followed: then it includes itself.
    fn known_part(&mut self, document: usize, reference: &Reference, known: usize) {
        let Some(from) = self.open.iter().position(|open| open.document == known) else { return };
        let names = self.open.iter().skip(from).map(|open| open.document).chain([known]);
        let names = names.filter_map(|at| self.loaded.paper.documents.get(at)).map(|source| source.path.as_str());
        let mut names: Vec<&str> = names.collect();
        let name = names.first().copied().unwrap_or_default().to_owned();
        if names.len() > LONGEST_CYCLE_SHOWN {
            names.splice(LONGEST_CYCLE_SHOWN - 1..names.len() - 1, ["..."]);
        }
        let message = format!("the part {name} includes itself through {}", names.join(" -> "));
        self.tell(document, reference, message);
    }

    /// A style and those that it asks for. They are read to their end before it goes on, so they come first.
    fn style(&mut self, document: usize, reference: &Reference) {
        let folder = self.folder_of_document(document);
        let mut open = Vec::new();
        self.open_style(&folder, reference, &mut open);
        self.follow_styles(open);
    }

    fn follow_styles(&mut self, mut open: Vec<OpenStyle>) {
        while let Some(style) = open.last_mut() {
            let folder = folder_of(&style.path).to_owned();
            if let Some(reference) = style.references.next() {
                self.open_style(&folder, &reference, &mut open);
            } else if let Some(style) = open.pop() {
                let path = self.shown(&style.path);
                self.loaded.styles.push(style.path);
                self.loaded.paper.styles.push(Source { path, text: style.text, host: Host::Latex });
            }
        }
    }

    /// A file with macros that the configuration names; the paper's own styles come later and may say otherwise.
    fn macro_file(&mut self, path: &Path) {
        let mut open = Vec::new();
        self.read_style(path.to_owned(), &mut open);
        self.follow_styles(open);
    }

    /// Opens what a document or a style asks for, if it stands in the project.
    fn open_style(&mut self, folder: &Path, reference: &Reference, open: &mut Vec<OpenStyle>) {
        let suffix = match reference.kind {
            ReferenceKind::Style => ".sty",
            ReferenceKind::Part => ".tex",
            ReferenceKind::Root => return,
        };
        let Some(name) = plain_name(reference) else { return };
        let folders = [self.root_folder, folder];
        let Place::File(path) = locate(self.texts, name, suffix, &folders, Some(self.project)) else { return };
        self.read_style(path, open);
    }

    fn read_style(&mut self, path: PathBuf, open: &mut Vec<OpenStyle>) {
        if self.is_full() || self.loaded.known.contains_key(&path) || !self.known_styles.insert(path.clone()) {
            return;
        }
        let Ok(text) = self.texts.read(&path) else { return };
        self.bytes += text.text.len();
        let references = outline(&text.text, Host::Latex).references.into_iter();
        open.push(OpenStyle { path, text: text.text, references });
    }

    fn locate(&self, name: &str, suffix: &str, document: usize) -> Place {
        let folder = self.folder_of_document(document);
        locate(self.texts, name, suffix, &[self.root_folder, &folder], Some(self.project))
    }

    fn folder_of_document(&self, document: usize) -> PathBuf {
        let origin = self.loaded.origins.get(document);
        origin.map_or_else(PathBuf::new, |origin| folder_of(&origin.path).to_owned())
    }

    fn is_full(&self) -> bool {
        self.loaded.known.len() + self.known_styles.len() > MOST_PARTS || self.bytes > LARGEST_PAPER
    }

    /// The same trouble is told once for each document.
    fn tell(&mut self, document: usize, reference: &Reference, message: String) {
        if self.told.insert((document, message.clone())) {
            self.loaded.paper.troubles.push(Trouble {
                document,
                span: reference.span,
                message,
                preamble: reference.kind == ReferenceKind::Root,
            });
        }
    }

    /// A path as seen from the project, the same on every machine.
    fn shown(&self, path: &Path) -> String {
        let inside = path.strip_prefix(self.project).unwrap_or(path);
        let pieces: Vec<_> = inside.iter().map(|piece| piece.to_string_lossy()).collect();
        pieces.join("/")
    }
}

fn is_from_tex(name: &str) -> bool {
    let path = Path::new(name);
    let suffix = path.extension().and_then(|suffix| suffix.to_str());
    let stem = name.strip_suffix(".tex").unwrap_or(name);
    FROM_TEX.contains(&stem) || suffix.is_some_and(|suffix| MADE_BY_TEX.contains(&suffix))
}
