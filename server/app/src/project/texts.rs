//! Where texts come from: the disk, or something laid over it.

use std::collections::HashMap;
use std::fs;
use std::path::{Path, PathBuf};

use indexwise_grammar::hosts::Host;

use crate::configuration::{FILE_NAME, REPOSITORY};
use crate::files::{self, Text, host_of};

/// No more files of a folder are looked into when the file that includes another is searched for.
const LARGEST_FOLDER: usize = 400;

/// What marks a folder as a project.
const MARKS: [&str; 2] = [REPOSITORY, FILE_NAME];

/// A source of texts. Paths that come out are real ones: absolute, without links.
pub trait Texts: Sync {
    /// The text of a file, or why it cannot be had.
    fn read(&self, path: &Path) -> Result<Text, String>;
    /// The real path of a file, if it is there.
    fn real_path(&self, path: &Path) -> Option<PathBuf>;
    /// The LaTeX files directly in a folder, by name, at most `LARGEST_FOLDER`.
    fn latex_files_in(&self, folder: &Path) -> Vec<PathBuf>;
    /// Whether a folder is marked as a project.
    fn is_project(&self, folder: &Path) -> bool;
}

/// What is on the disk.
#[derive(Clone, Copy, Debug)]
pub struct Disk;

impl Texts for Disk {
    fn read(&self, path: &Path) -> Result<Text, String> {
        files::read(path)
    }

    fn real_path(&self, path: &Path) -> Option<PathBuf> {
        path.canonicalize().ok().filter(|real| real.is_file())
    }

    fn latex_files_in(&self, folder: &Path) -> Vec<PathBuf> {
        let Ok(entries) = fs::read_dir(folder) else { return Vec::new() };
        let mut paths: Vec<_> = entries
            .filter_map(|entry| Some(entry.ok()?.path()))
            .filter(|path| host_of(path) == Some(Host::Latex))
            .collect();
        paths.sort();
        paths.truncate(LARGEST_FOLDER);
        paths.iter().filter_map(|path| self.real_path(path)).collect()
    }

    fn is_project(&self, folder: &Path) -> bool {
        MARKS.iter().any(|mark| folder.join(mark).exists())
    }
}

/// What is on the disk and a configuration file in a folder that has none, as it would be if one were written.
#[derive(Clone, Debug)]
pub struct DiskWithProject {
    /// The real path of the folder.
    pub folder: PathBuf,
}

impl Texts for DiskWithProject {
    fn read(&self, path: &Path) -> Result<Text, String> {
        Disk.read(path)
    }

    fn real_path(&self, path: &Path) -> Option<PathBuf> {
        Disk.real_path(path)
    }

    fn latex_files_in(&self, folder: &Path) -> Vec<PathBuf> {
        Disk.latex_files_in(folder)
    }

    fn is_project(&self, folder: &Path) -> bool {
        folder == self.folder || Disk.is_project(folder)
    }
}

/// Texts laid over a source: they are read instead of what it has, and are there even if it has none.
pub struct Overlay<'a> {
    below: &'a dyn Texts,
    texts: HashMap<PathBuf, Text>,
}

impl<'a> Overlay<'a> {
    /// Nothing laid over yet.
    pub fn new(below: &'a dyn Texts) -> Self {
        Self { below, texts: HashMap::new() }
    }

    /// Lays a text over a real path.
    pub fn lay(&mut self, path: PathBuf, text: Text) {
        self.texts.insert(path, text);
    }
}

impl Texts for Overlay<'_> {
    fn read(&self, path: &Path) -> Result<Text, String> {
        self.texts.get(path).map_or_else(|| self.below.read(path), |text| Ok(text.clone()))
    }

    fn real_path(&self, path: &Path) -> Option<PathBuf> {
        if self.texts.contains_key(path) { Some(path.to_owned()) } else { self.below.real_path(path) }
    }

    fn latex_files_in(&self, folder: &Path) -> Vec<PathBuf> {
        self.below.latex_files_in(folder)
    }

    fn is_project(&self, folder: &Path) -> bool {
        self.below.is_project(folder)
    }
}
