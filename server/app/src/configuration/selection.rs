//! Which files of a folder are checked: globs relative to the folder of the configuration file.
//!
//! A star stays within one name, `**` crosses folders, and a glob that fits a folder speaks of everything in it.

use std::path::{Component, Path, PathBuf};

pub(super) use globset::GlobSet as Globs;
use globset::{Glob, GlobBuilder, GlobSetBuilder};

/// No longer glob is taken, in bytes: what it becomes grows with it, and with how deep its braces are nested.
const LONGEST_GLOB: usize = 500;

/// No more globs are taken in one list.
const MOST_GLOBS: usize = 1000;

/// Which files are checked when a folder is searched.
#[derive(Clone, Debug, Default)]
pub struct Selection {
    folder: PathBuf,
    /// Nothing: everything is included.
    include: Option<Globs>,
    exclude: Globs,
}

impl Selection {
    pub(super) fn new(folder: &Path, include: Option<Globs>, exclude: Globs) -> Self {
        // An empty list asks for nothing in particular.
        Self { folder: folder.to_owned(), include: include.filter(|globs| !globs.is_empty()), exclude }
    }

    /// Whether a file, by its real path, is among the selected ones.
    pub fn admits(&self, file: &Path) -> bool {
        let inside = file.strip_prefix(&self.folder).unwrap_or(file);
        let fits = |globs: &Globs| {
            let named = |path: &&Path| path.file_name().is_some();
            inside.ancestors().take_while(named).any(|path| globs.is_match(path))
        };
        self.include.as_ref().is_none_or(fits) && !fits(&self.exclude)
    }
}

/// Reads a glob; the error is the cause.
pub(super) fn glob(written: &str) -> Result<Glob, String> {
    if written.len() > LONGEST_GLOB {
        return Err(format!("is longer than {LONGEST_GLOB} bytes"));
    }
    let inside = written.strip_prefix("./").unwrap_or(written);
    let inside = inside.strip_suffix('/').unwrap_or(inside);
    if inside.is_empty() {
        return Err("names no file".into());
    }
    let leaves = |piece: Component| !matches!(piece, Component::Normal(_));
    if Path::new(inside).components().any(leaves) {
        return Err("does not stay in the folder of this file".into());
    }
    let glob = GlobBuilder::new(inside).literal_separator(true).backslash_escape(true).build();
    glob.map_err(|error| format!("is no glob: {}", error.kind()))
}

/// Globs as one that fits what any of them fits; the error is the cause.
pub(super) fn together(globs: &[Glob]) -> Result<Globs, String> {
    if globs.len() > MOST_GLOBS {
        return Err(format!("has more than {MOST_GLOBS} globs"));
    }
    let mut builder = GlobSetBuilder::new();
    for glob in globs {
        builder.add(glob.clone());
    }
    builder.build().map_err(|error| format!("these globs are too much together: {}", error.kind()))
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    fn globs(written: &[&str]) -> Globs {
        together(&written.iter().map(|written| glob(written).unwrap()).collect::<Vec<_>>()).unwrap()
    }

    #[track_caller]
    fn admits(include: &[&str], exclude: &[&str], want: &[&str]) {
        let selection = Selection::new(Path::new("/shell"), Some(globs(include)), globs(exclude));
        let files = ["a.tex", "a.md", "old/a.tex", "old/deep/b.tex", "paper/old/c.tex", "older.tex"];
        let found = files.into_iter().filter(|file| selection.admits(&Path::new("/shell").join(file)));
        assert_eq!(found.collect::<Vec<_>>(), want, "{include:?} {exclude:?}");
    }

    #[test]
    fn globs_are_relative_to_the_folder() {
        admits(&[], &["old/**"], &["a.tex", "a.md", "paper/old/c.tex", "older.tex"]);
        admits(&[], &["**/old/**"], &["a.tex", "a.md", "older.tex"]);
        admits(&["*.tex"], &[], &["a.tex", "older.tex"]);
        admits(&["**/*.tex"], &["paper/**"], &["a.tex", "old/a.tex", "old/deep/b.tex", "older.tex"]);
        admits(&["./a.*"], &["a.md"], &["a.tex"]);
        admits(&["{old,paper}/*/*.tex"], &[], &["old/deep/b.tex", "paper/old/c.tex"]);
    }

    #[test]
    fn a_folder_stands_for_what_is_in_it() {
        for old in ["old", "old/", "./old", "o?d"] {
            admits(&[], &[old], &["a.tex", "a.md", "paper/old/c.tex", "older.tex"]);
            admits(&[old], &[], &["old/a.tex", "old/deep/b.tex"]);
        }
    }

    #[test]
    fn a_bad_glob_has_a_cause() {
        for bad in ["", "./", "/", "/shell/*", "../x", "a/../../b", "[a", "a{b", "{a"] {
            assert!(glob(bad).is_err(), "{bad}");
        }
        let deep = "{".repeat(LONGEST_GLOB / 2) + &"}".repeat(LONGEST_GLOB / 2);
        let built = glob(&deep).and_then(|glob| together(&[glob]));
        assert!(built.is_err() || built.is_ok_and(|globs| !globs.is_match("a")));
        assert!(glob(&"a".repeat(LONGEST_GLOB + 1)).unwrap_err().contains("longer"));
        assert!(together(&vec![glob("a").unwrap(); MOST_GLOBS + 1]).unwrap_err().contains("more than"));
    }
}
