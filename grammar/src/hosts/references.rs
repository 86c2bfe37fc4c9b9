//! The files that a LaTeX text asks for, read from one command each.

use super::vocabulary::Command;
use super::{Reference, ReferenceKind};
use crate::macros::cursor::{Cursor, line_end};
use crate::span::Span;

/// A `% !TEX root` comment counts in the first lines of a file, which end at this byte at the latest.
const ROOT_COMMENT_REACH: usize = 4096;

/// ... and this many lines.
const ROOT_COMMENT_LINES: usize = 20;

/// Reads the references of the command at `at` whose name ends at `after`; the end of what was read comes along.
pub(super) fn read_references(
    text: &str,
    at: usize,
    after: usize,
    command: Command,
) -> Option<(Vec<Reference>, usize)> {
    let mut cursor = Cursor::new(text, after);
    let (kind, paths) = match command {
        Command::Part(bare) => (ReferenceKind::Part, vec![part(&mut cursor, bare)?]),
        Command::PartOfFolder => (ReferenceKind::Part, vec![part_of_folder(&mut cursor)?]),
        Command::Package => {
            cursor.bracket();
            let names = cursor.group()?.of(text);
            (ReferenceKind::Style, names.split(',').map(str::to_owned).collect())
        }
        Command::Class => (ReferenceKind::Root, vec![main_file(&mut cursor)?]),
        _ => return None,
    };
    let span = Span::new(at, cursor.at);
    let paths = paths.iter().map(|path| path.trim().trim_matches('"'));
    // A path that a macro completes cannot be followed.
    let known = paths.filter(|path| !path.is_empty() && !path.contains(['\\', '#', '{', '}', '%', '\n']));
    Some((known.map(|path| Reference { span, path: path.to_owned(), kind }).collect(), cursor.at))
}

/// `{file}`, or with `bare` also the word up to the next space.
fn part(cursor: &mut Cursor, bare: bool) -> Option<String> {
    let text = cursor.text;
    if let Some(path) = cursor.group() {
        return Some(path.of(text).to_owned());
    }
    if !bare || cursor.peek() != Some(b' ') {
        return None;
    }
    let line = text.get(cursor.at..line_end(text.as_bytes(), cursor.at))?;
    let start = cursor.at + (line.len() - line.trim_start().len());
    let word = text.get(start..)?.split(|letter: char| letter.is_whitespace() || "\\{}%$".contains(letter)).next()?;
    cursor.at = start + word.len();
    Some(word.to_owned())
}

fn part_of_folder(cursor: &mut Cursor) -> Option<String> {
    let text = cursor.text;
    cursor.eat(b'*');
    let (folder, file) = (cursor.group()?.of(text).trim(), cursor.group()?.of(text).trim());
    let slash = if folder.is_empty() || folder.ends_with('/') { "" } else { "/" };
    Some(format!("{folder}{slash}{file}"))
}

/// `[main.tex]{subfiles}`.
fn main_file(cursor: &mut Cursor) -> Option<String> {
    let text = cursor.text;
    let main = cursor.bracket()?.of(text);
    (cursor.group()?.of(text).trim() == "subfiles").then(|| main.to_owned())
}

/// The root that the comment at `at` names: `% !TEX root = main.tex`.
pub(super) fn root_in_comment(text: &str, at: usize) -> Option<Reference> {
    if at > ROOT_COMMENT_REACH || text.get(..at)?.lines().count() > ROOT_COMMENT_LINES {
        return None;
    }
    let end = line_end(text.as_bytes(), at);
    let said = text.get(at..end)?.trim_start_matches('%').trim_start().strip_prefix('!')?;
    let (program, said) = said.trim_start().split_at_checked(3)?;
    let said = said.trim_start();
    let (word, said) = said.split_at_checked(4)?;
    let path = said.trim_start().strip_prefix('=')?.trim();
    let names = program.eq_ignore_ascii_case("tex") && word.eq_ignore_ascii_case("root") && !path.is_empty();
    names.then(|| Reference { span: Span::new(at, end), path: path.to_owned(), kind: ReferenceKind::Root })
}
