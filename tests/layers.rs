//! The house rules that the compiler does not enforce, read off the sources:
//!
//! - who may import whom, between crates and between the modules of a crate (the two tables below);
//! - what reads files, prints, spawns or sleeps stands in the application alone, and the types of the language
//!   server protocol in its `language_server` alone;
//! - every file has a `//!` head, and none is longer than 600 lines without saying why.
//!
//! Each law is a function from one source to complaints, and is tried on an invented source that breaks it.

#![allow(clippy::panic, clippy::unwrap_used)]

use std::fs;
use std::path::{Path, PathBuf};

use indexwise_tests::rust_source::{NamedPath, paths};

/// Folder of a crate, and the crates of ours that it may import beside itself.
const CRATES: &[(&str, &[&str])] = &[
    ("grammar", &[]),
    ("server/algebra", &[]),
    ("server/checker", &["indexwise_grammar", "indexwise_algebra"]),
    ("server/app", &["indexwise_grammar", "indexwise_algebra", "indexwise_checker"]),
    ("tests", &["indexwise_grammar", "indexwise_algebra", "indexwise_checker"]),
];

/// The modules of a crate, each with the modules that it may import.
type Road = &'static [(&'static str, &'static [&'static str])];

/// Folder of a crate, its modules, and the modules of the same crate that each may import: the road that data
/// takes. A module that is not named here is a complaint, so that its place on the road is decided, not drifted
/// into. Files below a module's folder count as the module; `lib.rs` may import everything.
const MODULES: &[(&str, Road)] = &[
    (
        "grammar",
        &[
            ("span", &[]),
            ("lines", &["span"]),
            ("vocabulary", &[]),
            ("tokens", &["span"]),
            ("tree", &["span"]),
            ("macros", &["span", "tokens", "vocabulary"]),
            ("origin", &["span", "tokens"]),
            ("hosts", &["span", "tokens", "macros", "vocabulary"]),
            ("formula", &["span", "tokens", "tree", "macros", "origin", "hosts", "vocabulary"]),
            ("conventions", &["span", "tokens", "tree", "macros", "formula", "hosts", "vocabulary"]),
            ("write", &["span", "tree", "vocabulary"]),
        ],
    ),
    (
        "server/algebra",
        &[
            ("draws", &[]),
            ("trouble", &[]),
            // What tests of other modules share.
            ("laws", &["field", "number"]),
            ("field", &["draws"]),
            ("rational", &["draws", "field"]),
            ("number", &["draws", "trouble", "field", "rational"]),
            ("jet", &["laws", "trouble", "field", "number", "draws", "sample"]),
            ("tensor", &["laws", "trouble", "field", "number", "jet", "draws", "sample"]),
            ("contraction", &["trouble", "field", "number", "jet", "tensor", "draws", "sample"]),
            ("symbols", &["trouble", "number", "jet", "tensor"]),
            (
                "matrix",
                &["laws", "trouble", "field", "number", "jet", "tensor", "contraction", "symbols", "draws", "sample"],
            ),
            ("sample", &["laws", "draws", "trouble", "field", "number", "jet", "tensor", "matrix"]),
            (
                "geometry",
                &["trouble", "field", "number", "jet", "tensor", "contraction", "symbols", "matrix", "draws", "sample"],
            ),
            ("expression", &["contraction", "geometry", "rational", "sample"]),
            (
                "evaluation",
                &[
                    "trouble",
                    "number",
                    "rational",
                    "draws",
                    "jet",
                    "tensor",
                    "contraction",
                    "matrix",
                    "symbols",
                    "sample",
                    "geometry",
                    "expression",
                ],
            ),
            (
                "verdict",
                &[
                    "trouble",
                    "field",
                    "number",
                    "rational",
                    "draws",
                    "jet",
                    "tensor",
                    "contraction",
                    "sample",
                    "geometry",
                    "expression",
                    "evaluation",
                    "symmetry",
                    "normal_form",
                ],
            ),
            ("symmetry", &["draws"]),
            ("normal_form", &["draws", "rational", "symmetry"]),
        ],
    ),
];

/// What only the application does. A path breaks the law if these segments stand in it side by side.
const EDGE: &[&[&str]] = &[
    &["std", "fs"],
    &["std", "process"],
    &["std", "net"],
    &["std", "env"],
    &["std", "io"],
    &["thread", "sleep"],
    &["thread", "spawn"],
    &["println!"],
    &["print!"],
    &["eprintln!"],
    &["eprint!"],
    &["dbg!"],
];

/// Crates that carry the language server protocol.
const PROTOCOL: &[&str] = &["tower_lsp", "lsp_types"];

/// The most lines of a file that does not say why it is longer.
const LONGEST: usize = 600;

/// A Rust file, by its path from the workspace's root with `/` between the parts.
struct File {
    path: String,
    source: String,
}

impl File {
    /// The folder of the crate that the file belongs to, and the rest of the path.
    fn in_crate(&self) -> Option<(&'static str, &str)> {
        CRATES.iter().find_map(|(folder, _)| Some((*folder, self.path.strip_prefix(folder)?.strip_prefix('/')?)))
    }

    /// The module path of the file in its crate: none for `src/lib.rs`, two names for `src/macros/expansion.rs`.
    /// Nothing for files outside `src`.
    fn module(&self) -> Option<Vec<&str>> {
        let inside = self.in_crate()?.1.strip_prefix("src/")?.strip_suffix(".rs")?;
        Some(inside.split('/').filter(|name| !["lib", "main", "mod"].contains(name)).collect())
    }

    fn complaint(&self, line: usize, message: &str) -> String {
        format!("{}:{line}: {message}", self.path)
    }
}

/// A law: the complaints about one file.
type Law = fn(&File) -> Vec<String>;

fn crates_import_downwards(file: &File) -> Vec<String> {
    let Some((folder, _)) = file.in_crate() else { return Vec::new() };
    let allowed = CRATES.iter().find(|(name, _)| *name == folder).map_or(&[][..], |(_, allowed)| *allowed);
    let own = match folder {
        "server/app" => "indexwise".to_owned(),
        _ => format!("indexwise_{}", folder.rsplit('/').next().unwrap_or_default()),
    };
    let ours = |name: &str| name == "indexwise" || name.starts_with("indexwise_");
    let complaint = |path: NamedPath| {
        let name = path.segments.first()?;
        // The bare name is also an ordinary word; as a crate it is followed by something.
        let is_crate = ours(name) && (path.segments.len() > 1 || name.contains('_'));
        let forbidden = is_crate && *name != own && !allowed.contains(&name.as_str());
        forbidden.then(|| file.complaint(path.line, &format!("{folder} must not import {name}")))
    };
    paths(&file.source).into_iter().filter_map(complaint).collect()
}

fn modules_follow_the_road(file: &File) -> Vec<String> {
    let (Some((folder, _)), Some(module)) = (file.in_crate(), file.module()) else { return Vec::new() };
    let Some((_, road)) = MODULES.iter().find(|(name, _)| *name == folder) else { return Vec::new() };
    let Some(own) = module.first() else { return Vec::new() };
    let Some((_, allowed)) = road.iter().find(|(name, _)| name == own) else {
        return vec![file.complaint(1, &format!("module {own} has no place in the table of tests/layers.rs"))];
    };
    let complaint = |path: NamedPath| {
        let target = imported_module(&path, module.len())?;
        // What is no module of the crate is an item at its root, which `lib.rs` gives to all.
        let known = road.iter().any(|(name, _)| *name == target);
        let forbidden = known && target != *own && !allowed.contains(&target);
        forbidden.then(|| file.complaint(path.line, &format!("{own} must not import {target}")))
    };
    paths(&file.source).into_iter().filter_map(complaint).collect()
}

/// The top-level module of the crate that a path names by `crate` or `super`, seen from a file whose own module
/// lies `level` deep.
fn imported_module(path: &NamedPath, level: usize) -> Option<&str> {
    let supers = path.segments.iter().take_while(|segment| *segment == "super").count();
    let roots = match path.segments.first()?.as_str() {
        "crate" => 1,
        "super" if supers == level + path.depth => supers,
        _ => return None,
    };
    path.segments.get(roots).map(String::as_str)
}

fn only_the_application_touches_the_world(file: &File) -> Vec<String> {
    let below = ["grammar/src/", "server/algebra/src/", "server/checker/src/"];
    if !below.iter().any(|folder| file.path.starts_with(folder)) {
        return Vec::new();
    }
    let breaks = |path: &NamedPath| {
        let named: Vec<&str> = path.segments.iter().map(String::as_str).collect();
        EDGE.iter().any(|edge| named.windows(edge.len()).any(|window| window == *edge))
    };
    let complaint =
        |path: &NamedPath| file.complaint(path.line, &format!("{} below the application", path.segments.join("::")));
    paths(&file.source).iter().filter(|path| breaks(path)).map(complaint).collect()
}

fn the_protocol_stays_in_the_language_server(file: &File) -> Vec<String> {
    if file.path.starts_with("server/app/src/language_server") {
        return Vec::new();
    }
    let breaks = |path: &NamedPath| path.segments.first().is_some_and(|name| PROTOCOL.contains(&name.as_str()));
    let complaint = |path: &NamedPath| file.complaint(path.line, "a protocol type outside the language server");
    paths(&file.source).iter().filter(|path| breaks(path)).map(complaint).collect()
}

fn every_file_has_a_head(file: &File) -> Vec<String> {
    let first = file.source.lines().next().unwrap_or_default();
    let words = first.strip_prefix("//!").is_some_and(|head| !head.trim().is_empty());
    if words { Vec::new() } else { vec![file.complaint(1, "the file does not begin with a `//!` head")] }
}

fn long_files_say_why(file: &File) -> Vec<String> {
    let lines = file.source.lines().count();
    let reason = file.source.lines().any(|line| line.starts_with("//! Long because "));
    if lines <= LONGEST || reason {
        return Vec::new();
    }
    vec![file.complaint(lines, &format!("more than {LONGEST} lines without a line `//! Long because ...`"))]
}

/// Every Rust file of the workspace, in the order of paths.
fn workspace() -> Vec<File> {
    let root = Path::new(env!("CARGO_MANIFEST_DIR")).parent().unwrap().to_owned();
    let mut pending: Vec<PathBuf> = CRATES.iter().map(|(folder, _)| root.join(folder)).collect();
    let mut files = Vec::new();
    while let Some(folder) = pending.pop() {
        for entry in fs::read_dir(&folder).unwrap().map(Result::unwrap) {
            let path = entry.path();
            if path.is_dir() && entry.file_name() != "target" {
                pending.push(path);
            } else if path.extension().is_some_and(|suffix| suffix == "rs") {
                let source = fs::read_to_string(&path).unwrap();
                let path = path.strip_prefix(&root).unwrap().to_string_lossy().replace('\\', "/");
                files.push(File { path, source });
            }
        }
    }
    files.sort_by(|a, b| a.path.cmp(&b.path));
    files
}

#[track_caller]
fn holds(law: Law) {
    let files = workspace();
    assert!(files.len() > 20, "the sources have not been found");
    let complaints: Vec<String> = files.iter().flat_map(law).collect();
    assert!(complaints.is_empty(), "{}", complaints.join("\n"));
}

/// The number of complaints of a law about an invented file.
fn complaints(law: Law, path: &str, source: &str) -> usize {
    law(&File { path: path.to_owned(), source: source.to_owned() }).len()
}

#[test]
fn imports_between_crates_point_down() {
    holds(crates_import_downwards);
}

#[test]
fn imports_between_modules_follow_the_road() {
    holds(modules_follow_the_road);
}

#[test]
fn files_output_and_threads_are_the_application_s_alone() {
    holds(only_the_application_touches_the_world);
}

#[test]
fn protocol_types_are_the_language_server_s_alone() {
    holds(the_protocol_stays_in_the_language_server);
}

#[test]
fn every_file_says_what_it_is() {
    holds(every_file_has_a_head);
}

#[test]
fn no_file_is_long_without_a_reason() {
    holds(long_files_say_why);
}

#[test]
fn an_import_against_the_arrows_is_seen() {
    let law = crates_import_downwards;
    assert_eq!(complaints(law, "grammar/src/lines.rs", "use indexwise_checker::finding::Finding;"), 1);
    assert_eq!(complaints(law, "server/algebra/src/field.rs", "fn f() { indexwise_grammar::lines::of() }"), 1);
    assert_eq!(complaints(law, "server/checker/src/paper.rs", "use {indexwise::run, std::fmt};"), 1);
    assert_eq!(complaints(law, "server/checker/src/paper.rs", "use indexwise_grammar::span::Span;"), 0);
    assert_eq!(complaints(law, "grammar/examples/regions.rs", "use indexwise_grammar::hosts::scan;"), 0);
    assert_eq!(complaints(law, "grammar/src/lines.rs", "// use indexwise_checker::paper;\n"), 0);
}

#[test]
fn a_module_off_the_road_is_seen() {
    let law = modules_follow_the_road;
    assert_eq!(complaints(law, "grammar/src/tokens.rs", "use crate::tree::Formula;"), 1);
    assert_eq!(complaints(law, "grammar/src/tokens.rs", "use super::tree::Formula;"), 1);
    assert_eq!(complaints(law, "grammar/src/macros/expansion.rs", "use super::super::formula;"), 1);
    assert_eq!(complaints(law, "grammar/src/hosts/latex.rs", "use crate::{span::Span, formula::read};"), 1);
    assert_eq!(complaints(law, "grammar/src/tokens.rs", "mod tests { fn f() { super::super::tree::dump() } }"), 1);
    assert_eq!(complaints(law, "grammar/src/astrology.rs", ""), 1);
    assert_eq!(complaints(law, "grammar/src/hosts/latex.rs", "use super::Scan;\nuse crate::macros::Macros;"), 0);
    assert_eq!(complaints(law, "grammar/src/tokens.rs", "mod tests { use super::tree; }"), 0);
    assert_eq!(complaints(law, "grammar/src/lib.rs", "pub use crate::tree::Formula;"), 0);
}

#[test]
fn a_world_touched_from_below_is_seen() {
    let law = only_the_application_touches_the_world;
    for source in [
        "use std::fs;",
        "use std::{fmt, process::Command};",
        "fn f() { std::net::TcpStream::connect(x); }",
        "fn f() { println!(\"\") }",
        "use std::thread; fn f() { thread::sleep(x) }",
    ] {
        assert_eq!(complaints(law, "server/checker/src/paper.rs", source), 1, "{source}");
        assert_eq!(complaints(law, "server/app/src/main.rs", source), 0, "{source}");
    }
    assert_eq!(complaints(law, "grammar/src/lines.rs", "/// As `println!` does.\nconst S: &str = \"std::fs\";"), 0);
}

#[test]
fn a_protocol_type_astray_is_seen() {
    let law = the_protocol_stays_in_the_language_server;
    let source = "use tower_lsp::lsp_types::Position;";
    assert_eq!(complaints(law, "server/app/src/commands/check.rs", source), 1);
    assert_eq!(complaints(law, "server/app/src/language_server/convert.rs", source), 0);
}

#[test]
fn a_file_without_a_head_is_seen() {
    for source in ["", "use a;", "//!\n", "// Words.\n", "\n//! Late.\n"] {
        assert_eq!(complaints(every_file_has_a_head, "grammar/src/lines.rs", source), 1, "{source:?}");
    }
    assert_eq!(complaints(every_file_has_a_head, "grammar/src/lines.rs", "//! Words.\n"), 0);
}

#[test]
fn a_long_file_without_a_reason_is_seen() {
    let long = "//! Words.\n".to_owned() + &"fn f() {}\n".repeat(LONGEST);
    assert_eq!(complaints(long_files_say_why, "grammar/src/lines.rs", &long), 1);
    let reasoned = long.replace("Words.", "Long because it is one table.");
    assert_eq!(complaints(long_files_say_why, "grammar/src/lines.rs", &reasoned), 0);
}
