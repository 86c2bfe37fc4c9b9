//! Which configuration holds for which document.
//!
//! The nearest `indexwise.toml` upwards holds as a whole. Conventions of files farther out, up to the folder of the
//! repository, are outer scopes. Where there is no repository, the nearest file is the end of the project, and what
//! lies outside it is not looked at.
//!
//! Invariant: all files that make up one paper's key lie in one project (`project.rs`), so that they have the same
//! scope, and any of them may be asked for it.

use std::collections::HashMap;
use std::path::{Path, PathBuf};
use std::sync::Arc;

use indexwise_checker::paper::SharedConventions;

use super::{Configuration, FILE_NAME, Levels, REPOSITORY, read, read_sentences};
use crate::files::Failure;

/// What holds for a document.
#[derive(Clone, Debug, Default)]
pub struct Scope {
    /// Conventions, the outer first.
    pub shared: Vec<SharedConventions>,
    /// The nearest file, from which all the rest is taken.
    nearest: Option<Arc<Configuration>>,
}

impl Scope {
    /// The levels of the rules.
    pub fn levels(&self) -> Levels {
        self.nearest.as_ref().map(|nearest| nearest.levels.clone()).unwrap_or_default()
    }

    /// Further files with macros, as real paths.
    pub fn macros(&self) -> &[PathBuf] {
        self.nearest.as_ref().map(|nearest| nearest.macros.as_slice()).unwrap_or_default()
    }
}

/// The scopes of all folders that were entered, and the configurations that they are made of.
#[derive(Debug, Default)]
pub struct Scopes {
    /// In the place of the conventions that are found.
    named: Option<Arc<Configuration>>,
    marks: HashMap<PathBuf, Marks>,
    scopes: HashMap<PathBuf, Arc<Scope>>,
    /// By folder; nothing where the file cannot be read.
    read: HashMap<PathBuf, Option<Arc<Configuration>>>,
    in_order: Vec<Arc<Configuration>>,
    failures: Vec<Failure>,
}

/// What a folder holds.
#[derive(Clone, Copy, Debug)]
struct Marks {
    configuration: bool,
    repository: bool,
}

impl Scopes {
    /// Knows no folder yet; `named` is the file that the user names in the place of the conventions that are found.
    pub fn new(named: Option<&Path>) -> Self {
        let mut scopes = Self::default();
        let Some(path) = named else { return scopes };
        let is_toml = path.extension().is_some_and(|suffix| suffix.eq_ignore_ascii_case("toml"));
        let read = if is_toml { read } else { read_sentences };
        match read(path, &path.display().to_string()) {
            Ok(configuration) => scopes.named = Some(Arc::new(configuration)),
            Err(failures) => scopes.failures = failures,
        }
        scopes
    }

    /// Takes a configuration for one that stands at its path, although no file is there. Before any folder is entered.
    pub fn suppose(&mut self, configuration: Configuration) {
        let folder = configuration.path.parent().unwrap_or(Path::new("")).to_owned();
        let repository = folder.join(REPOSITORY).exists();
        self.marks.insert(folder.clone(), Marks { configuration: true, repository });
        let configuration = Arc::new(configuration);
        self.in_order.push(configuration.clone());
        self.read.insert(folder, Some(configuration));
    }

    /// The path of the configuration that is nearest to a file whose folder was entered.
    pub fn nearest(&self, file: &Path) -> Option<PathBuf> {
        self.of(file).nearest.as_ref().map(|nearest| nearest.path.clone())
    }

    /// Learns of the folder of a file, by its real path.
    pub fn enter(&mut self, file: &Path) -> Arc<Scope> {
        let folder = file.parent().unwrap_or(Path::new(""));
        if let Some(scope) = self.scopes.get(folder) {
            return scope.clone();
        }
        let outer = self.folders_with_configuration(folder);
        // Nothing is known of the files that cannot be read, but then nothing is checked.
        let found: Vec<_> = outer.iter().rev().filter_map(|folder| self.configuration(folder)).collect();
        let shared = match &self.named {
            Some(named) => vec![named.conventions.clone()],
            None => found.iter().map(|file| file.conventions.clone()).collect(),
        };
        let shared = shared.into_iter().filter(|conventions| !conventions.sentences.is_empty()).collect();
        let scope = Arc::new(Scope { shared, nearest: found.last().cloned() });
        self.scopes.insert(folder.to_owned(), scope.clone());
        scope
    }

    /// Takes the scopes of folders that were not entered here.
    pub fn adopt(&mut self, other: Self) {
        // Each folder has one scope, so that the order does not matter.
        #[expect(clippy::iter_over_hash_type, reason = "entries are only put into a map")]
        for (folder, scope) in other.scopes {
            self.scopes.entry(folder).or_insert(scope);
        }
    }

    /// Whether a file that is found in a folder is to be checked.
    pub fn admits(&mut self, file: &Path) -> bool {
        self.enter(file).nearest.as_ref().is_none_or(|nearest| nearest.selection.admits(file))
    }

    /// The scope of a file whose folder was entered.
    pub fn of(&self, file: &Path) -> Arc<Scope> {
        file.parent().and_then(|folder| self.scopes.get(folder)).cloned().unwrap_or_default()
    }

    /// The files whose conventions are in force anywhere, in the order in which they were met.
    pub fn with_conventions(&self) -> &[Arc<Configuration>] {
        self.named.as_ref().map_or(&self.in_order, std::slice::from_ref)
    }

    /// All files that were read, those with macros too.
    pub fn files(&self) -> impl Iterator<Item = &Path> {
        let all = self.in_order.iter().chain(&self.named);
        all.flat_map(|file| std::iter::once(&file.path).chain(&file.macros)).map(PathBuf::as_path)
    }

    /// What is wrong with any file: if there is something, nothing must be checked.
    pub fn failures(&self) -> &[Failure] {
        &self.failures
    }

    /// The nearest folder first.
    fn folders_with_configuration(&mut self, from: &Path) -> Vec<PathBuf> {
        let mut found = Vec::new();
        for folder in from.ancestors() {
            let marks = *self.marks.entry(folder.to_owned()).or_insert_with(|| Marks {
                configuration: folder.join(FILE_NAME).exists(),
                repository: folder.join(REPOSITORY).exists(),
            });
            if marks.configuration {
                found.push(folder.to_owned());
            }
            if marks.repository {
                return found;
            }
        }
        found.truncate(1);
        found
    }

    fn configuration(&mut self, folder: &Path) -> Option<Arc<Configuration>> {
        if let Some(known) = self.read.get(folder) {
            return known.clone();
        }
        let path = folder.join(FILE_NAME);
        let read = match read(&path, &shown(&path)) {
            Ok(configuration) => Some(Arc::new(configuration)),
            Err(failures) => {
                self.failures.extend(failures);
                None
            }
        };
        self.in_order.extend(read.clone());
        self.read.insert(folder.to_owned(), read.clone());
        read
    }
}

/// A path as it is shortest seen from the current folder.
fn shown(path: &Path) -> String {
    let Ok(current) = Path::new(".").canonicalize() else { return path.display().to_string() };
    if let Ok(below) = path.strip_prefix(&current) {
        return below.display().to_string();
    }
    let above = path.parent().and_then(|folder| current.strip_prefix(folder).ok());
    let steps = above.map(|above| above.components().map(|_| "..").collect::<PathBuf>().join(FILE_NAME));
    steps.unwrap_or_else(|| path.to_owned()).display().to_string()
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;
    use indexwise_checker::finding::Severity;
    use std::fs;

    const OUTER: &str =
        "[conventions]\nlines = ['B is a label']\n[rules]\nunread = 'hint'\n[files]\nexclude = ['a.md']";
    const INNER: &str = "[conventions]\nlines = ['C is a label']\n[rules]\nindex-thrice = 'off'";

    /// A repository with a file in it, one in the folder `sub`, one without conventions in `sub/deep`.
    fn repository() -> (tempfile::TempDir, PathBuf) {
        let folder = tempfile::tempdir().unwrap();
        let root = folder.path().canonicalize().unwrap();
        fs::create_dir_all(root.join("sub/deep")).unwrap();
        fs::create_dir(root.join(REPOSITORY)).unwrap();
        for (name, text) in [("", OUTER), ("sub", INNER), ("sub/deep", "")] {
            fs::write(root.join(name).join(FILE_NAME), text).unwrap();
        }
        (folder, root)
    }

    fn sentences(scope: &Scope) -> Vec<&str> {
        scope.shared.iter().flat_map(|shared| &shared.sentences).map(|(sentence, _)| sentence.as_str()).collect()
    }

    #[test]
    fn conventions_are_nested_and_all_else_is_the_nearest_file_s() {
        let (_folder, root) = repository();
        let mut scopes = Scopes::default();
        let (outer, inner) = (scopes.enter(&root.join("a.md")), scopes.enter(&root.join("sub/a.md")));
        assert_eq!(sentences(&outer), ["B is a label"]);
        assert_eq!(sentences(&inner), ["B is a label", "C is a label"]);
        assert_eq!(outer.levels(), [("unread".to_owned(), Some(Severity::Hint))]);
        assert_eq!(inner.levels(), [("index-thrice".to_owned(), None)]);
        assert!(!scopes.admits(&root.join("a.md")) && scopes.admits(&root.join("sub/a.md")));
        let deep = scopes.enter(&root.join("sub/deep/a.md"));
        assert_eq!((sentences(&deep), deep.levels()), (sentences(&inner), Levels::new()));
        let shared = inner.shared.iter().map(|shared| &shared.path);
        assert_eq!(
            shared.collect::<Vec<_>>(),
            scopes.with_conventions()[..2].iter().map(|file| &file.conventions.path).collect::<Vec<_>>()
        );
        assert_eq!(sentences(&scopes.of(&root.join("sub/b.md"))), sentences(&inner));
        assert_eq!(scopes.failures(), []);
    }

    #[test]
    fn a_named_file_stands_in_the_place_of_all_conventions_and_of_nothing_else() {
        let (_folder, root) = repository();
        let list = root.join("bench.txt");
        fs::write(&list, "D is a label\n").unwrap();
        let mut scopes = Scopes::new(Some(&list));
        let inner = scopes.enter(&root.join("sub/a.md"));
        assert_eq!(sentences(&inner), ["D is a label"]);
        assert_eq!(inner.levels(), [("index-thrice".to_owned(), None)]);
        assert_eq!(scopes.with_conventions().len(), 1);
        assert_eq!(scopes.files().count(), 3);
    }

    #[test]
    fn a_bad_file_is_told_once() {
        let (_folder, root) = repository();
        fs::write(root.join(FILE_NAME), "x").unwrap();
        let mut scopes = Scopes::default();
        for name in ["a.md", "sub/a.md", "sub/b.md"] {
            scopes.enter(&root.join(name));
        }
        assert_eq!(scopes.failures().len(), 1);
    }

    #[test]
    fn paths_are_shown_from_the_current_folder() {
        let current = Path::new(".").canonicalize().unwrap();
        assert_eq!(shown(&current.join(FILE_NAME)), FILE_NAME);
        assert_eq!(shown(&current.join("sub").join(FILE_NAME)), Path::new("sub").join(FILE_NAME).display().to_string());
        let above = current.parent().unwrap().join(FILE_NAME);
        assert_eq!(shown(&above), Path::new("..").join(FILE_NAME).display().to_string());
        let aside = current.parent().unwrap().join("aside").join(FILE_NAME);
        assert_eq!(shown(&aside), aside.display().to_string());
    }
}
