//! To which paper a file belongs.
//!
//! A file names its root (`subfiles`, a TEX root comment), or is one (`\documentclass`), or is a part of the
//! nearest file that leads to it. What was learnt of a folder is kept for the whole run; everything kept is a
//! function of the disk alone, so the order in which threads come to ask does not matter.
//!
//! Trap: a file may name a root that does not lead back to it. Then the paper is the root's with the file
//! appended, and differs from the root's own.

use std::collections::HashMap;
use std::hash::Hash;
use std::path::{Path, PathBuf};
use std::sync::{Arc, Mutex, OnceLock, PoisonError};

use indexwise_grammar::hosts::{Host, ReferenceKind};

use super::{Named, Outline, PaperKey, Place, Texts, folder_of, locate, marked_folder, named_root, outline};
use super::{plain_name, project_of};
use crate::panics;

/// How many folders upwards the file that includes another is searched for, its own among them.
const LEVELS: usize = 3;

/// How long a chain of files that name or include one another is followed upwards.
const LONGEST_CHAIN: usize = 16;

/// No more parts of a root are followed when it is asked what it leads to.
pub(super) const MOST_PARTS: usize = 2000;

/// Finds papers, and keeps what it learnt.
pub struct Roots<'a> {
    texts: &'a dyn Texts,
    outlines: Kept<PathBuf, Option<Arc<Outline>>>,
    reaches: Kept<(PathBuf, PathBuf), Arc<Vec<PathBuf>>>,
    folders: Kept<PathBuf, Arc<Includers>>,
}

/// For the parts that a folder's files lead to, the first file that does.
#[derive(Debug, Default)]
struct Includers {
    with_class: HashMap<PathBuf, PathBuf>,
    without_class: HashMap<PathBuf, PathBuf>,
}

impl<'a> Roots<'a> {
    /// Knows nothing yet.
    pub fn new(texts: &'a dyn Texts) -> Self {
        Self { texts, outlines: Kept::default(), reaches: Kept::default(), folders: Kept::default() }
    }

    /// The paper of a file, by its real path. A text that is not on the disk is included by no file
    /// (`on_disk`), and no folder is searched for its sake.
    pub fn paper_of(&self, file: &Path, host: Host, on_disk: bool) -> PaperKey {
        if host != Host::Latex {
            return PaperKey::alone(file, host);
        }
        let mut chain = vec![file.to_owned()];
        while let Some(root) = chain.last().and_then(|last| self.above(last, on_disk)) {
            if chain.contains(&root) || chain.len() >= LONGEST_CHAIN {
                break;
            }
            chain.push(root);
        }
        let Some((root, below)) = chain.split_last() else { return PaperKey::alone(file, host) };
        let appended = self.appended(root, below, file);
        PaperKey { root: root.clone(), appended, host }
    }

    /// The file next above: the root that a file names, or one that leads to it.
    fn above(&self, file: &Path, on_disk: bool) -> Option<PathBuf> {
        let outline = self.outline(file)?;
        match named_root(self.texts, file, &outline.references) {
            // The main file is not to be had, and the file says that it has one: nobody else is asked.
            Named::Root(_, root) => return self.outline(&root).map(|_| root),
            Named::Missing(_) | Named::Outside(_) => return None,
            Named::Nothing => {}
        }
        if outline.has_class || !on_disk { None } else { self.includer(file) }
    }

    /// The nearest file with a class that leads to this one; if there is none, the nearest without.
    fn includer(&self, file: &Path) -> Option<PathBuf> {
        let project = marked_folder(self.texts, file);
        let mut without_class = None;
        for folder in file.ancestors().skip(1).take(LEVELS) {
            let includers = self.folders.get(folder.to_owned(), |folder| Arc::new(self.includers(folder)));
            if let Some(root) = includers.with_class.get(file) {
                return Some(root.clone());
            }
            without_class = without_class.or_else(|| includers.without_class.get(file).cloned());
            if Some(folder) == project {
                break;
            }
        }
        without_class
    }

    fn includers(&self, folder: &Path) -> Includers {
        let mut includers = Includers::default();
        for file in self.texts.latex_files_in(folder) {
            let Some(outline) = self.outline(&file) else { continue };
            let side = if outline.has_class { &mut includers.with_class } else { &mut includers.without_class };
            for part in self.reach(&file, folder_of(&file)).iter().filter(|part| **part != file) {
                side.entry(part.clone()).or_insert_with(|| file.clone());
            }
        }
        includers
    }

    /// What must be appended to the root's paper for it to hold the file.
    fn appended(&self, root: &Path, below: &[PathBuf], file: &Path) -> Option<PathBuf> {
        if below.is_empty() || self.leads(root, root, file) {
            return None;
        }
        // From the root downwards: the first that brings the file along.
        let brings = |link: &&PathBuf| link.as_path() == file || self.leads(link, root, file);
        below.iter().rev().find(brings).cloned()
    }

    fn leads(&self, from: &Path, root: &Path, to: &Path) -> bool {
        self.reach(from, folder_of(root)).binary_search_by(|part| part.as_path().cmp(to)).is_ok()
    }

    /// The parts that a file leads to, sorted, if the root stands in `root_folder`.
    fn reach(&self, from: &Path, root_folder: &Path) -> Arc<Vec<PathBuf>> {
        self.reaches.get((from.to_owned(), root_folder.to_owned()), |_| Arc::new(self.follow(from, root_folder)))
    }

    fn follow(&self, from: &Path, root_folder: &Path) -> Vec<PathBuf> {
        // A root's project depends on its folder alone.
        let project = project_of(self.texts, &root_folder.join("-")).to_owned();
        let mut found = std::collections::HashSet::new();
        let mut reached = Vec::new();
        let mut open = vec![from.to_owned()];
        while let Some(file) = open.pop() {
            let Some(outline) = self.outline(&file) else { continue };
            for reference in outline.references.iter().filter(|reference| reference.kind == ReferenceKind::Part) {
                let Some(name) = plain_name(reference) else { continue };
                let folders = [root_folder, folder_of(&file)];
                let Place::File(part) = locate(self.texts, name, ".tex", &folders, Some(&project)) else { continue };
                if reached.len() < MOST_PARTS && found.insert(part.clone()) {
                    reached.push(part.clone());
                    open.push(part);
                }
            }
        }
        reached.sort();
        reached
    }

    /// What a file says of others; nothing if it cannot be read.
    fn outline(&self, file: &Path) -> Option<Arc<Outline>> {
        self.outlines.get(file.to_owned(), |file| {
            let text = self.texts.read(file).ok()?;
            // A scan that panics is told of when the file itself is checked, not for each file that looks at it.
            panics::caught(|| Arc::new(outline(&text.text, Host::Latex))).ok()
        })
    }
}

/// Values that are made once for each key, by whichever thread comes first; the others wait for it.
struct Kept<K, V>(Mutex<HashMap<K, Arc<OnceLock<V>>>>);

impl<K, V> Default for Kept<K, V> {
    fn default() -> Self {
        Self(Mutex::default())
    }
}

impl<K: Eq + Hash + Clone, V: Clone> Kept<K, V> {
    fn get(&self, key: K, make: impl FnOnce(&K) -> V) -> V {
        let mut kept = self.0.lock().unwrap_or_else(PoisonError::into_inner);
        let cell = kept.entry(key.clone()).or_default().clone();
        drop(kept);
        cell.get_or_init(|| make(&key)).clone()
    }
}
