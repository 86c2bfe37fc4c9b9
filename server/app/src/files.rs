//! Files: finding them, reading them, writing them back (`files/writing.rs`).
//!
//! A text is kept without its byte-order mark, because nothing behind `app` should meet it; that there was one
//! is remembered, so that offsets in reports are those of the file and `--fix` puts it back.

pub mod writing;

use std::collections::HashSet;
use std::fs::File;
use std::io::Read;
use std::path::{Path, PathBuf};
use std::sync::Arc;

use ignore::WalkBuilder;
use indexwise_grammar::hosts::Host;

use crate::output::{cause, complain};

/// No file larger than this is read, in bytes: nobody writes that much mathematics by hand.
const LARGEST_FILE: u64 = 64 << 20;

/// What a byte-order mark looks like in UTF-8.
pub const BYTE_ORDER_MARK: &[u8] = b"\xef\xbb\xbf";

/// The text of a file.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Text {
    /// Without the byte-order mark; line endings as they are.
    pub text: Arc<str>,
    /// Whether the file begins with a byte-order mark.
    pub marked: bool,
}

impl Text {
    /// As the file has it.
    pub fn bytes(&self) -> Vec<u8> {
        let mark = if self.marked { BYTE_ORDER_MARK } else { b"" };
        [mark, self.text.as_bytes()].concat()
    }
}

/// A file that is to be checked.
#[derive(Clone, Debug)]
pub struct Listed {
    /// Its path as the user gave it; a folder's file has the folder's path in front.
    pub shown: String,
    /// Its real path, by which files are told apart.
    pub path: PathBuf,
    /// What kind of file it is.
    pub host: Host,
    /// Its text where it can be read only once: standard input, a pipe.
    pub given: Option<Text>,
}

/// Something that could not be done, in one line.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Failure(pub String);

impl Failure {
    /// What went wrong with a path.
    pub fn new(path: impl std::fmt::Display, cause: impl std::fmt::Display) -> Self {
        Self(format!("{path}: {cause}"))
    }

    /// Says it on standard error.
    pub fn tell(&self) {
        complain(&self.0);
    }
}

/// Reads a file whole. The error is the cause, without the path.
pub fn read(path: &Path) -> Result<Text, String> {
    read_at_most(path, LARGEST_FILE)
}

/// Reads a file of at most so many bytes, which are whole MiB.
pub fn read_at_most(path: &Path, most: u64) -> Result<Text, String> {
    let file = File::open(path).map_err(|error| cause(&error))?;
    read_from(file, most)
}

fn read_from(input: impl Read, most: u64) -> Result<Text, String> {
    let mut bytes = Vec::new();
    input.take(most + 1).read_to_end(&mut bytes).map_err(|error| cause(&error))?;
    if bytes.len() as u64 > most {
        return Err(format!("is larger than {} MiB", most >> 20));
    }
    decode(bytes)
}

fn decode(bytes: Vec<u8>) -> Result<Text, String> {
    let text = String::from_utf8(bytes)
        .map_err(|error| format!("is not UTF-8: first bad byte at offset {}", error.utf8_error().valid_up_to()))?;
    let unmarked = text.strip_prefix('\u{feff}');
    Ok(Text { marked: unmarked.is_some(), text: unmarked.unwrap_or(&text).into() })
}

/// Whether a file that a folder holds is to be checked, by its real path.
pub type Admits<'a> = dyn FnMut(&Path) -> bool + 'a;

/// The files under the paths, in the order of the paths, each once; a folder's in the order of their names. Files
/// that are named are taken without asking.
pub fn find(paths: &[PathBuf], input: Host, admits: &mut Admits) -> (Vec<Listed>, Vec<Failure>) {
    let mut found = Found { admits, files: Vec::new(), failures: Vec::new(), known: HashSet::new() };
    if paths.is_empty() {
        found.walk(Path::new("."), Path::new("."));
    }
    for path in paths {
        if path.as_os_str() == "-" {
            found.take_input(input);
        } else if path.is_dir() {
            found.walk(path, Path::new(""));
        } else {
            found.add_named(path);
        }
    }
    (found.files, found.failures)
}

struct Found<'f, 'a> {
    admits: &'f mut Admits<'a>,
    files: Vec<Listed>,
    failures: Vec<Failure>,
    known: HashSet<PathBuf>,
}

impl Found<'_, '_> {
    fn add(&mut self, shown: String, path: PathBuf, host: Host, given: Option<Text>) {
        if self.known.insert(path.clone()) {
            self.files.push(Listed { shown, path, host, given });
        }
    }

    /// A file that was named is read whatever its suffix.
    fn add_named(&mut self, path: &Path) {
        let shown = path.display().to_string();
        let host = host_of(path).unwrap_or(Host::Latex);
        let kind = match path.metadata() {
            Ok(kind) => kind,
            Err(error) => return self.failures.push(Failure::new(shown, cause(&error))),
        };
        if kind.is_file() {
            return match path.canonicalize() {
                Ok(real) => self.add(shown, real, host, None),
                Err(error) => self.failures.push(Failure::new(shown, cause(&error))),
            };
        }
        // A pipe can be read only once, and may have no real path.
        match read(path) {
            Ok(text) => self.add(shown, current_folder().join(path), host, Some(text)),
            Err(cause) => self.failures.push(Failure::new(shown, cause)),
        }
    }

    /// Standard input stands in the current folder, where its parts and styles are looked for.
    fn take_input(&mut self, host: Host) {
        match read_from(std::io::stdin().lock(), LARGEST_FILE) {
            Ok(text) => self.add("-".into(), current_folder().join("-"), host, Some(text)),
            Err(cause) => self.failures.push(Failure::new("standard input", cause)),
        }
    }

    /// The files in a folder, ignore files respected, links not followed. `hidden` is left out of shown paths.
    fn walk(&mut self, folder: &Path, hidden: &Path) {
        let walk = WalkBuilder::new(folder).require_git(false).sort_by_file_name(Ord::cmp).build();
        for entry in walk {
            let entry = match entry {
                Ok(entry) => entry,
                Err(error) => {
                    self.failures.push(walk_failure(folder, &error));
                    continue;
                }
            };
            let Some(host) = host_of(entry.path()) else { continue };
            if !entry.file_type().is_some_and(|kind| kind.is_file()) {
                continue;
            }
            let shown = entry.path().strip_prefix(hidden).unwrap_or(entry.path()).display().to_string();
            match entry.path().canonicalize() {
                Ok(real) if (self.admits)(&real) => self.add(shown, real, host, None),
                Ok(_) => {}
                Err(error) => self.failures.push(Failure::new(shown, cause(&error))),
            }
        }
    }
}

/// Where there is no current folder, there is no file in it either.
fn current_folder() -> PathBuf {
    Path::new(".").canonicalize().unwrap_or_else(|_| PathBuf::from("/"))
}

/// The walker's error in our form: the path, and the cause alone.
fn walk_failure(folder: &Path, error: &ignore::Error) -> Failure {
    let path = path_of(error).unwrap_or(folder).display();
    match error.io_error() {
        Some(io) => Failure::new(path, cause(io)),
        None => Failure::new(path, error),
    }
}

fn path_of(mut error: &ignore::Error) -> Option<&Path> {
    loop {
        match error {
            ignore::Error::WithPath { path, .. } => return Some(path),
            ignore::Error::WithDepth { err, .. } | ignore::Error::WithLineNumber { err, .. } => error = err,
            _ => return None,
        }
    }
}

/// The kind of file that a suffix tells of, for the suffixes that a folder is searched for.
pub fn host_of(path: &Path) -> Option<Host> {
    let suffix = path.extension()?.to_str()?.to_ascii_lowercase();
    match suffix.as_str() {
        "tex" | "ltx" => Some(Host::Latex),
        "md" | "qmd" | "rmd" => Some(Host::Markdown),
        "inote" => Some(Host::Note),
        _ => None,
    }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used, clippy::expect_used)]
    use super::*;
    use std::fs;

    fn shown(paths: &[PathBuf]) -> Vec<String> {
        find(paths, Host::Latex, &mut |_| true).0.into_iter().map(|file| file.shown).collect()
    }

    #[test]
    fn a_byte_order_mark_is_taken_off_and_put_back() {
        let text = decode(b"\xef\xbb\xbfa\r\n".to_vec()).unwrap();
        assert_eq!((&*text.text, text.marked), ("a\r\n", true));
        assert_eq!(text.bytes(), b"\xef\xbb\xbfa\r\n");
        assert_eq!(decode(b"a".to_vec()).unwrap().bytes(), b"a");
    }

    #[test]
    fn a_bad_byte_is_told_with_its_offset() {
        assert_eq!(decode(b"ab\xe9c".to_vec()).unwrap_err(), "is not UTF-8: first bad byte at offset 2");
    }

    #[test]
    fn a_huge_file_is_refused() {
        let told = read_from(std::io::repeat(b'a'), LARGEST_FILE).unwrap_err();
        assert_eq!(told, "is larger than 64 MiB");
    }

    #[test]
    fn folders_are_searched_by_suffix_in_order_and_ignore_files_are_respected() {
        let folder = tempfile::tempdir().unwrap();
        for name in ["b.tex", "a/z.md", "a/b.Rmd", "c.inote", "d.txt", "e.sty", "gone.tex", ".hidden.tex"] {
            let path = folder.path().join(name);
            fs::create_dir_all(path.parent().unwrap()).unwrap();
            fs::write(path, "x").unwrap();
        }
        fs::write(folder.path().join(".gitignore"), "gone.tex\n").unwrap();
        let want = ["a/b.Rmd", "a/z.md", "b.tex", "c.inote"];
        let want: Vec<_> = want.iter().map(|name| folder.path().join(name).display().to_string()).collect();
        assert_eq!(shown(&[folder.path().to_owned()]), want);
    }

    #[test]
    fn a_named_file_is_read_whatever_its_suffix_and_once() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("draft.txt");
        fs::write(&path, "x").unwrap();
        let again = folder.path().join(".").join("draft.txt");
        assert_eq!(shown(&[path.clone(), again]), [path.display().to_string()]);
    }

    #[test]
    fn a_missing_file_does_not_stop_the_others() {
        let folder = tempfile::tempdir().unwrap();
        let (here, gone) = (folder.path().join("a.tex"), folder.path().join("b.tex"));
        fs::write(&here, "x").unwrap();
        let (files, failures) = find(&[gone.clone(), here], Host::Latex, &mut |_| true);
        assert_eq!(files.len(), 1);
        assert_eq!(failures, [Failure::new(gone.display(), "not found")]);
    }
}
