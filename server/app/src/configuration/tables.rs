//! The tables of a configuration file as plain data, or everything that is wrong with them.
//!
//! A key that is not known is wrong, not passed over: a mistyped one would else be obeyed by nobody. Traps: the
//! library's tables are sorted by key, so what is wrong comes in no useful order and is sorted by place later; a
//! rule that is named in quotation marks is still the same key.

use std::ops::Range;
use std::path::{Path, PathBuf};

use indexwise_checker::finding::Severity;
use indexwise_checker::paper::SharedConventions;
use indexwise_checker::rules::RULES;
use indexwise_grammar::span::Span;
use toml::Spanned;
use toml::de::{DeTable, DeValue};

use super::selection::{self, Selection};
use super::{Configuration, Wrong, sentences};
use crate::files;
use crate::nearest::nearest;

const TABLES: [&str; 3] = ["conventions", "rules", "files"];
const CONVENTIONS_KEYS: [&str; 1] = ["lines"];
const FILES_KEYS: [&str; 3] = ["include", "exclude", "macros"];

/// The levels of a rule, by their words.
const LEVELS: [(&str, Option<Severity>); 4] = [
    ("off", None),
    ("hint", Some(Severity::Hint)),
    ("warning", Some(Severity::Warning)),
    ("error", Some(Severity::Error)),
];

/// Of a longer word of the author's, in letters, only the beginning is shown.
const LONGEST_SHOWN: usize = 60;

type Value<'t> = Spanned<DeValue<'t>>;
type Table<'t> = DeTable<'t>;

/// Reads the tables; names of files are relative to the folder. The path and the text stay empty.
pub(super) fn read(text: &str, folder: &Path) -> Result<Configuration, Vec<Wrong>> {
    let table = DeTable::parse(text).map_err(|error| {
        // What the library says at the end of the text has no place of its own.
        let span = span(error.span().unwrap_or(text.len()..text.len()));
        vec![Wrong { span, cause: format!("is not TOML: {}", error.message().replace('\n', "; ")) }]
    })?;
    let mut reader = Reader { text, folder, wrong: Vec::new(), configuration: Configuration::default() };
    reader.tables(table.get_ref());
    if reader.wrong.is_empty() { Ok(reader.configuration) } else { Err(reader.wrong) }
}

fn span(range: Range<usize>) -> Span {
    Span::new(range.start, range.end)
}

/// The configuration in the making.
struct Reader<'t> {
    text: &'t str,
    folder: &'t Path,
    wrong: Vec<Wrong>,
    configuration: Configuration,
}

impl Reader<'_> {
    fn tell(&mut self, place: Range<usize>, cause: impl Into<String>) {
        self.wrong.push(Wrong { span: span(place), cause: cause.into() });
    }

    fn tables(&mut self, table: &Table) {
        for (key, value) in table {
            let name: &str = key.get_ref();
            if !TABLES.contains(&name) {
                self.tell(key.span(), unknown("there is no such key", name, TABLES.into_iter()));
                continue;
            }
            let Some(inner) = self.table(name, value) else { continue };
            match name {
                "conventions" => self.conventions(inner),
                "rules" => self.rules(inner),
                _ => self.files(inner),
            }
        }
    }

    fn conventions(&mut self, table: &Table) {
        for (key, value) in table {
            match key.get_ref().as_ref() {
                "lines" => self.configuration.conventions = self.lines(value),
                other => self.tell(key.span(), unknown("there is no such key", other, CONVENTIONS_KEYS.into_iter())),
            }
        }
    }

    /// A list of strings or one string; each may hold several sentences.
    fn lines(&mut self, value: &Value) -> SharedConventions {
        let strings = match value.get_ref() {
            DeValue::String(said) => vec![(said.as_ref(), value.span())],
            _ => self.strings("lines", value),
        };
        let sentences =
            strings.into_iter().flat_map(|(said, place)| sentences::of_string(self.text, said, span(place)));
        SharedConventions { sentences: sentences.collect(), ..SharedConventions::default() }
    }

    fn rules(&mut self, table: &Table) {
        for (key, value) in table {
            let name: &str = key.get_ref();
            if !RULES.iter().any(|rule| rule.name == name) {
                let names = RULES.iter().map(|rule| rule.name);
                self.tell(key.span(), unknown("there is no such rule", name, names));
                continue;
            }
            match value.get_ref() {
                DeValue::String(word) => match LEVELS.iter().find(|(level, _)| level == word) {
                    Some((_, level)) => self.configuration.levels.push((name.to_owned(), *level)),
                    None => {
                        let cause = format!("\"{}\": a level is off, hint, warning or error", short(word));
                        self.tell(value.span(), cause);
                    }
                },
                other => self.tell(value.span(), format!("the level of {name} must be a string, not {}", kind(other))),
            }
        }
    }

    fn files(&mut self, table: &Table) {
        let (mut include, mut exclude) = (None, None);
        for (key, value) in table {
            match key.get_ref().as_ref() {
                "include" => include = Some(self.globs("include", value)),
                "exclude" => exclude = Some(self.globs("exclude", value)),
                "macros" => self.configuration.macros = self.macros(value),
                other => self.tell(key.span(), unknown("there is no such key", other, FILES_KEYS.into_iter())),
            }
        }
        self.configuration.selection = Selection::new(self.folder, include, exclude.unwrap_or_default());
    }

    fn globs(&mut self, name: &str, value: &Value) -> selection::Globs {
        let mut globs = Vec::new();
        for (written, place) in self.strings(name, value) {
            match selection::glob(written) {
                Ok(glob) => globs.push(glob),
                Err(cause) => self.tell(place, format!("\"{}\": {cause}", short(written))),
            }
        }
        selection::together(&globs).unwrap_or_else(|cause| {
            self.tell(value.span(), format!("{name}: {cause}"));
            selection::Globs::default()
        })
    }

    /// A file that is named here must be there: without it, nobody would know why formulas are not judged.
    fn macros(&mut self, value: &Value) -> Vec<PathBuf> {
        let mut paths = Vec::new();
        for (name, place) in self.strings("macros", value) {
            match macro_file(self.folder, name) {
                Ok(path) => paths.push(path),
                Err(cause) => self.tell(place, format!("\"{}\": {cause}", short(name))),
            }
        }
        paths
    }

    fn table<'v, 't>(&mut self, name: &str, value: &'v Value<'t>) -> Option<&'v Table<'t>> {
        if let DeValue::Table(table) = value.get_ref() {
            return Some(table);
        }
        self.tell(value.span(), format!("{name} must be a table, not {}", kind(value.get_ref())));
        None
    }

    /// The strings of a list with their places.
    fn strings<'v>(&mut self, name: &str, value: &'v Value) -> Vec<(&'v str, Range<usize>)> {
        let DeValue::Array(array) = value.get_ref() else {
            self.tell(value.span(), format!("{name} must be a list of strings, not {}", kind(value.get_ref())));
            return Vec::new();
        };
        let mut strings = Vec::new();
        for item in array.iter() {
            match item.get_ref() {
                DeValue::String(string) => strings.push((string.as_ref(), item.span())),
                other => self.tell(item.span(), format!("{name} must hold strings, not {}", kind(other))),
            }
        }
        strings
    }
}

/// The real path of a file with macros. It is read for every paper, so that only its being readable counts here.
fn macro_file(folder: &Path, name: &str) -> Result<PathBuf, String> {
    let path = folder.join(name);
    super::regular(&path)?;
    files::read(&path)?;
    path.canonicalize().map_err(|error| crate::output::cause(&error))
}

fn unknown<'n>(what: &str, name: &str, names: impl Iterator<Item = &'n str>) -> String {
    // What is far too long is near to nothing, and comparing it would take long.
    let near = nearest(&short(name).to_ascii_lowercase(), names).unwrap_or_default();
    format!("{}: {what}; the nearest is {near}", short(name))
}

fn short(word: &str) -> String {
    match word.char_indices().nth(LONGEST_SHOWN) {
        Some((end, _)) => format!("{}...", word.get(..end).unwrap_or_default()),
        None => word.to_owned(),
    }
}

/// What kind of value somebody wrote.
fn kind(value: &DeValue) -> &'static str {
    match value {
        DeValue::String(_) => "a string",
        DeValue::Integer(_) => "an integer",
        DeValue::Float(_) => "a number",
        DeValue::Boolean(_) => "a boolean",
        DeValue::Datetime(_) => "a date",
        DeValue::Array(_) => "a list",
        DeValue::Table(_) => "a table",
    }
}
