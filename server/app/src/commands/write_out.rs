//! `indexwise write-out FILE:LINE:COLUMN`: the contraction at a place, written out.
//!
//! The file is read as `check` reads it: with its paper, its macros and the conventions around it. Exit status 0 if
//! something was written out, 1 if there is nothing to write out at the place, 2 if the place cannot be looked at.

use std::path::{Path, PathBuf};

use indexwise_checker::editing::write_out::{Because, Forms, RangeSource, Refusal, Summed, WrittenOut, write_out};
use indexwise_checker::paper::{Cancel, View};
use indexwise_grammar::hosts::Host;
use indexwise_grammar::lines::{Lines, ScalarColumn};
use indexwise_grammar::unicode_sign;

use crate::arguments::{Way, WriteOutArguments};
use crate::batch;
use crate::configuration::Scopes;
use crate::files::{self, Failure, Listed, Text};
use crate::output::{Status, complain, print, printable};
use crate::panics;
use crate::project::{Disk, Overlay, Roots, load};

/// Runs the command.
pub fn run(arguments: &WriteOutArguments) -> Status {
    match answered(arguments) {
        Ok((_, Ok(text))) => print(&text),
        Ok((place, Err(refusal))) => {
            complain(&format!("{place}: {refusal}"));
            Status::Findings
        }
        Err(failures) => {
            failures.iter().for_each(Failure::tell);
            Status::Trouble
        }
    }
}

/// The place as the user named it, and the text for standard output or why there is none.
type Answer = (String, Result<String, Refusal>);

fn answered(arguments: &WriteOutArguments) -> Result<Answer, Vec<Failure>> {
    let place = Place::read(&arguments.place.to_string_lossy()).map_err(|failure| vec![failure])?;
    let mut scopes = Scopes::new(arguments.conventions.as_deref());
    let file = listed(&place.file).map_err(|failure| vec![failure])?;
    scopes.enter(&file.path);
    if !scopes.failures().is_empty() {
        return Err(scopes.failures().to_vec());
    }
    let look = || panics::caught(|| looked(&file, &place, &scopes));
    let looked = batch::pool(Some(1)).map_err(|failure| vec![failure])?.install(look);
    let internal = |cause| Failure(format!("internal error while reading {}: {cause}", file.shown));
    let answer = looked.unwrap_or_else(|cause| Err(internal(cause))).map_err(|failure| vec![failure])?;
    let text = |written: WrittenOut| match arguments.way {
        Some(way) => format!("{}\n", in_way(&written.sum, way)),
        None => told(&file.shown, place.line, &written),
    };
    Ok((place.shown(), answer.map(text)))
}

/// The one file that is named.
fn listed(path: &Path) -> Result<Listed, Failure> {
    if path.as_os_str() == "-" {
        return Err(Failure::new("-", "a place is looked for in a file, not in standard input"));
    }
    if path.is_dir() {
        return Err(Failure::new(path.display(), "is a folder"));
    }
    let (mut found, mut failures) = files::find(&[path.to_owned()], Host::Latex, &mut |_| true);
    match (found.pop(), failures.pop()) {
        (Some(file), None) => Ok(file),
        (_, Some(failure)) => Err(failure),
        (None, None) => Err(Failure::new(path.display(), "not found")),
    }
}

/// Reads the paper of a file and asks for the place.
fn looked(file: &Listed, place: &Place, scopes: &Scopes) -> Result<Result<WrittenOut, Refusal>, Failure> {
    let disk = Disk;
    let mut texts = Overlay::new(&disk);
    if let Some(text) = &file.given {
        texts.lay(file.path.clone(), text.clone());
    }
    let own = match &file.given {
        Some(text) => text.clone(),
        None => files::read(&file.path).map_err(|cause| Failure::new(&file.shown, cause))?,
    };
    let offset = place.offset(&own, &file.shown)?;
    let key = Roots::new(&texts).paper_of(&file.path, file.host, file.given.is_none());
    let loaded = load(&texts, &key, &scopes.of(&file.path)).map_err(|cause| {
        Failure::new(&file.shown, format!("its main file {} cannot be read: {cause}", key.root.display()))
    })?;
    let too_large = || Failure::new(&file.shown, "was not read: its paper is too large");
    let document = loaded.document(&file.path).ok_or_else(too_large)?;
    Ok(write_out(&View::of(&loaded.paper, &Cancel::default()), document, offset))
}

/// A file with a line and a column, both from 1.
#[derive(Debug, PartialEq, Eq)]
struct Place {
    file: PathBuf,
    line: u32,
    column: u32,
}

impl Place {
    /// Reads `FILE:LINE:COLUMN` from the end, since a path may have colons of its own (`C:\sheet.tex:3:4`).
    fn read(text: &str) -> Result<Self, Failure> {
        let mut parts = text.rsplitn(3, ':');
        let (column, line, file) = (parts.next(), parts.next(), parts.next());
        let (Some(column), Some(line), Some(file)) = (column, line, file.filter(|file| !file.is_empty())) else {
            return Err(Failure::new(text, "say the place as FILE:LINE:COLUMN"));
        };
        let number = |digits: &str, what: &str| {
            let number = digits.parse::<u32>().ok().filter(|number| *number > 0);
            number.ok_or_else(|| Failure::new(text, format!("\"{digits}\" is no {what}; they count from 1")))
        };
        Ok(Self { file: file.into(), line: number(line, "line")?, column: number(column, "column")? })
    }

    fn shown(&self) -> String {
        format!("{}:{}:{}", self.file.display(), self.line, self.column)
    }

    /// The byte offset of the place in a text. Right after the last character of a line is a place too.
    fn offset(&self, text: &Text, shown: &str) -> Result<u32, Failure> {
        let text: &str = &text.text;
        let lines = Lines::new(text);
        if self.line > lines.count() {
            let count = lines.count();
            let line = if count == 1 { "line" } else { "lines" };
            return Err(Failure::new(shown, format!("has {count} {line}, no line {}", self.line)));
        }
        let length = lines.span(text, self.line - 1).of(text).chars().count();
        if self.column as usize > length + 1 {
            let columns = if length == 1 { "column" } else { "columns" };
            let (line, column) = (self.line, self.column);
            return Err(Failure::new(shown, format!("line {line} has {length} {columns}, no column {column}")));
        }
        Ok(lines.from_scalars(text, self.line - 1, ScalarColumn(self.column - 1)))
    }
}

fn in_way(forms: &Forms, way: Way) -> &str {
    match way {
        Way::Latex => &forms.latex,
        Way::Unicode => &forms.unicode,
        Way::Note => &forms.note,
    }
}

/// Everything, for people: the term and its ranges, the sum, the three ways of writing it, what was left out.
fn told(file: &str, line: u32, written: &WrittenOut) -> String {
    let mut out = vec![format!("{}, line {line}", printable(file)), format!("    {}", written.term.unicode)];
    out.push(String::new());
    out.extend(written.letters.iter().map(|letter| format!("    {}", range(letter))));
    out.push(String::new());
    out.extend(one_below_the_other(written));
    out.push(String::new());
    out.push(format!("    LaTeX  {}", written.sum.latex));
    out.push(format!("    note   {}", written.sum.note));
    out.push(String::new());
    out.push(format!("    {}", counts(written)));
    out.extend(left_out(written));
    if !written.commuting.is_empty() {
        let names: Vec<String> = written.commuting.iter().map(|name| kernel(name)).collect();
        out.push(format!("    Components of {} are taken to commute.", names.join(", ")));
    }
    out.iter().map(|line| format!("{}\n", printable(line).trim_end())).collect()
}

/// The terms of the sum, one a line behind an equals sign.
fn one_below_the_other(written: &WrittenOut) -> Vec<String> {
    if written.terms.is_empty() {
        return vec![format!("    =   {}", written.sum.unicode)];
    }
    let line = |(number, term): (usize, &Forms)| {
        let text = term.unicode.as_str();
        let (sign, rest) = ['-', '−']
            .iter()
            .find_map(|sign| Some(("-", text.strip_prefix(*sign)?.trim_start())))
            .unwrap_or(if number == 0 { (" ", text) } else { ("+", text) });
        format!("    {} {sign} {rest}", if number == 0 { "=" } else { " " })
    };
    written.terms.iter().enumerate().map(line).collect()
}

/// `i runs over 1 2 3 (by custom, no range is declared)`
fn range(letter: &Summed) -> String {
    let values: Vec<String> = letter.values.iter().map(|value| kernel(value)).collect();
    let source = match &letter.source {
        RangeSource::Family => "declared".to_owned(),
        RangeSource::Coordinates => "the coordinates; no range is declared".to_owned(),
        RangeSource::Custom => "by custom; no range is declared".to_owned(),
        RangeSource::Open(bound) => format!("by custom; the declared range ends with {}", kernel(bound)),
    };
    format!("{} runs over {}  ({source})", kernel(&letter.letter), values.join(" "))
}

fn counts(written: &WrittenOut) -> String {
    let terms = |count: usize| if count == 1 { "1 term".to_owned() } else { format!("{count} terms") };
    if !written.collected {
        return format!("{}; not all could be compared, so that some may vanish or coincide.", terms(written.choices));
    }
    let gone = written.vanished.len();
    let met = written.choices - gone;
    let mut out = terms(written.choices);
    if gone > 0 {
        out.push_str(&format!(", of which {gone} {}", if gone == 1 { "vanishes" } else { "vanish" }));
    }
    if met > written.terms.len() {
        out.push_str(&format!("; by symmetry the others are {}", written.terms.len()));
    }
    out.push('.');
    out
}

/// What vanishes, those with one reason together.
fn left_out(written: &WrittenOut) -> Vec<String> {
    let mut zeros: Vec<&str> = Vec::new();
    let (mut together, mut cancelling): (Vec<&str>, Vec<&str>) = (Vec::new(), Vec::new());
    for one in &written.vanished {
        match &one.because {
            Because::Factor(factor) if zeros.contains(&factor.unicode.as_str()) => {}
            Because::Factor(factor) => zeros.push(&factor.unicode),
            Because::Symmetry => together.push(&one.term.unicode),
            Because::Cancels => cancelling.push(&one.term.unicode),
        }
    }
    let line = |what: &str, list: Vec<&str>| (!list.is_empty()).then(|| format!("    {what}: {}", list.join(", ")));
    let lines = [
        line("Zero factors", zeros),
        line("Zero by their symmetries together", together),
        line("Cancel one another", cancelling),
    ];
    lines.into_iter().flatten().collect()
}

/// A letter or a name as people read it.
fn kernel(name: &str) -> String {
    unicode_sign(name).unwrap_or(name).to_owned()
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    #[track_caller]
    fn place(text: &str, file: &str, line: u32, column: u32) {
        assert_eq!(Place::read(text), Ok(Place { file: file.into(), line, column }));
    }

    #[test]
    fn a_place_is_read_from_its_end() {
        place("sheet.tex:3:14", "sheet.tex", 3, 14);
        place("C:\\papers\\sheet.tex:3:14", "C:\\papers\\sheet.tex", 3, 14);
        place("odd:name:1.tex:3:14", "odd:name:1.tex", 3, 14);
    }

    #[test]
    fn what_is_no_place_is_told() {
        for text in ["sheet.tex", "sheet.tex:3", ":3:4", "C:\\sheet.tex:3"] {
            assert!(Place::read(text).is_err(), "{text}");
        }
        let Failure(line) = Place::read("sheet.tex:3:0").unwrap_err();
        assert_eq!(line, "sheet.tex:3:0: \"0\" is no column; they count from 1");
        let Failure(line) = Place::read("sheet.tex:-3:1").unwrap_err();
        assert_eq!(line, "sheet.tex:-3:1: \"-3\" is no line; they count from 1");
    }

    #[test]
    fn columns_are_characters_and_the_end_of_a_line_is_one_more() {
        let text = Text { text: "μν_i\nab".into(), marked: false };
        let at = |line, column| Place { file: "a".into(), line, column }.offset(&text, "a");
        assert_eq!((at(1, 3), at(1, 5), at(2, 3)), (Ok(4), Ok(6), Ok(9)));
        assert_eq!(at(1, 6), Err(Failure("a: line 1 has 4 columns, no column 6".into())));
        assert_eq!(at(3, 1), Err(Failure("a: has 2 lines, no line 3".into())));
    }
}
