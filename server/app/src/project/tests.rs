//! Tests of papers: real files in a temporary project.

#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic)]

use std::fs;
use std::path::{Path, PathBuf};

use indexwise_grammar::hosts::Host;

use super::{Disk, Loaded, Overlay, Roots, load};
use crate::configuration::{Scope, Scopes};
use crate::files::Text;

const HEAD: &str = "\\documentclass{article}\n";

/// A project with these files.
fn project(files: &[(&str, &str)]) -> tempfile::TempDir {
    let folder = tempfile::tempdir().unwrap();
    fs::create_dir(folder.path().join(".git")).unwrap();
    for (name, text) in files {
        let path = folder.path().join(name);
        fs::create_dir_all(path.parent().unwrap()).unwrap();
        fs::write(path, text).unwrap();
    }
    folder
}

fn loaded(folder: &Path, name: &str) -> Loaded {
    let path = folder.canonicalize().unwrap().join(name);
    load(&Disk, &Roots::new(&Disk).paper_of(&path, Host::Latex, true), &Scope::default()).unwrap()
}

/// The documents of a file's paper, in order, then its styles.
#[track_caller]
fn paper_is(files: &[(&str, &str)], name: &str, documents: &[&str], styles: &[&str]) {
    let folder = project(files);
    let paper = loaded(folder.path(), name).paper;
    let names = |sources: &[indexwise_checker::paper::Source]| -> Vec<String> {
        sources.iter().map(|source| source.path.clone()).collect()
    };
    assert_eq!((names(&paper.documents), names(&paper.styles)), (owned(documents), owned(styles)));
    assert_eq!(troubles_in(folder.path(), name), Vec::<String>::new());
}

fn owned(names: &[&str]) -> Vec<String> {
    names.iter().map(|name| (*name).to_owned()).collect()
}

/// "document: message" for each trouble.
fn troubles_in(folder: &Path, name: &str) -> Vec<String> {
    let paper = loaded(folder, name).paper;
    let line = |trouble: &indexwise_checker::paper::Trouble| {
        let source = paper.documents.get(trouble.document).unwrap();
        assert!(!trouble.span.of(&source.text).is_empty(), "{trouble:?}");
        format!("{}: {}", source.path, trouble.message)
    };
    paper.troubles.iter().map(line).collect()
}

#[track_caller]
fn troubles(files: &[(&str, &str)], name: &str, want: &[&str]) {
    let folder = project(files);
    assert_eq!(troubles_in(folder.path(), name), owned(want));
}

#[test]
fn parts_come_depth_first_each_once() {
    let files = [
        ("main.tex", "\\documentclass{article}\\input{a}\\include{sub/b.tex}\\input{a}"),
        ("a.tex", "\\input{c}"),
        ("c.tex", ""),
        ("sub/b.tex", "\\input{sub/d}\\input{e}"),
        ("sub/d.tex", ""),
        ("sub/e.tex", ""),
    ];
    let all = ["main.tex", "a.tex", "c.tex", "sub/b.tex", "sub/d.tex", "sub/e.tex"];
    for (name, _) in files {
        paper_is(&files, name, &all, &[]);
    }
}

#[test]
fn the_folder_of_the_root_comes_before_that_of_the_part() {
    let files = [
        ("main.tex", "\\documentclass{article}\\input{sub/a}"),
        ("sub/a.tex", "\\input{b}"),
        ("b.tex", ""),
        ("sub/b.tex", ""),
    ];
    paper_is(&files, "main.tex", &["main.tex", "sub/a.tex", "b.tex"], &[]);
    // The other one is a part of a.tex only if main.tex is not there.
    paper_is(&files[1..], "sub/b.tex", &["sub/a.tex", "sub/b.tex"], &[]);
}

#[test]
fn import_speaks_of_its_folder() {
    let files =
        [("main.tex", "\\documentclass{article}\\import{sub/}{a}"), ("sub/a.tex", "\\input{b}"), ("sub/b.tex", "")];
    paper_is(&files, "main.tex", &["main.tex", "sub/a.tex", "sub/b.tex"], &[]);
}

#[test]
fn a_file_with_a_class_is_a_root() {
    let files = [("main.tex", HEAD), ("other.tex", "\\documentclass{article}\\input{main}")];
    paper_is(&files, "main.tex", &["main.tex"], &[]);
}

#[test]
fn a_file_that_nobody_includes_is_its_own_root() {
    paper_is(&[("main.tex", HEAD), ("a.tex", "")], "a.tex", &["a.tex"], &[]);
}

#[test]
fn a_root_with_a_class_is_preferred_and_the_nearest_taken() {
    let files = [
        ("main.tex", "\\documentclass{article}\\input{sub/list}"),
        ("zmain.tex", "\\documentclass{article}\\input{sub/list}"),
        ("sub/list.tex", "\\input{a}"),
        ("sub/a.tex", ""),
    ];
    paper_is(&files, "sub/a.tex", &["main.tex", "sub/list.tex", "sub/a.tex"], &[]);
}

#[test]
fn the_search_stops_at_the_project() {
    let files =
        [("main.tex", "\\documentclass{article}\\input{inner/a}"), ("inner/indexwise.toml", ""), ("inner/a.tex", "")];
    paper_is(&files, "inner/a.tex", &["a.tex"], &[]);
}

#[test]
fn a_subfile_reaches_its_main_file() {
    let files = [
        ("main.tex", "\\documentclass{article}\\usepackage{subfiles}\\subfile{sub/a}"),
        ("sub/a.tex", "\\documentclass[../main.tex]{subfiles}\\input{b}"),
        ("sub/b.tex", ""),
    ];
    let all = ["main.tex", "sub/a.tex", "sub/b.tex"];
    for (name, _) in files {
        paper_is(&files, name, &all, &[]);
    }
}

#[test]
fn a_subfile_that_the_main_file_leaves_out_is_appended() {
    let files = [
        ("main.tex", "\\documentclass{article}\\input{part}"),
        ("part.tex", ""),
        ("sub/a.tex", "\\documentclass[../main]{subfiles}\\input{b}"),
        ("sub/b.tex", ""),
    ];
    paper_is(&files, "main.tex", &["main.tex", "part.tex"], &[]);
    for name in ["sub/a.tex", "sub/b.tex"] {
        paper_is(&files, name, &["main.tex", "part.tex", "sub/a.tex", "sub/b.tex"], &[]);
    }
}

#[test]
fn a_comment_names_the_main_file() {
    let files = [("main.tex", HEAD), ("sub/a.tex", "% !TEX root = ../main.tex\n")];
    paper_is(&files, "sub/a.tex", &["main.tex", "sub/a.tex"], &[]);
}

#[test]
fn a_main_file_that_is_not_there_is_one_trouble() {
    let files = [("sub/a.tex", "% !TEX root = ../main.tex\nText.")];
    let want = ["sub/a.tex: the main file ../main.tex named here was not found; its macros are unknown"];
    troubles(&files, "sub/a.tex", &want);
}

#[test]
fn a_main_file_that_cannot_be_read_is_one_trouble() {
    let folder = project(&[("a.tex", "% !TEX root = main.tex\nText.")]);
    fs::write(folder.path().join("main.tex"), b"\\documentclass{article}\xff\\input{a}").unwrap();
    let why = "cannot be read: is not UTF-8: first bad byte at offset 23; its macros are unknown";
    assert_eq!(troubles_in(folder.path(), "a.tex"), [format!("a.tex: the main file main.tex named here {why}")]);
}

#[test]
fn styles_beside_the_document_are_read_to_their_end() {
    let files = [
        ("main.tex", "\\documentclass{article}\\usepackage{amsmath,ours}\\input{sub/a}"),
        ("ours.sty", "\\RequirePackage{deeper}\\RequirePackage{xcolor}\\RequirePackage{ours}"),
        ("deeper.sty", "\\usepackage{ours}"),
        ("sub/a.tex", "\\usepackage{near}"),
        ("sub/near.sty", ""),
    ];
    paper_is(&files, "main.tex", &["main.tex", "sub/a.tex"], &["deeper.sty", "ours.sty", "sub/near.sty"]);
}

#[test]
fn missing_parts_are_told_once() {
    let files =
        [("main.tex", "\\documentclass{article}\\input{gone}\\input{gone}\\input{glyphtounicode}\\input{main.bbl}")];
    troubles(&files, "main.tex", &["main.tex: the part gone was not found"]);
}

#[test]
fn names_made_by_macros_are_passed_over() {
    troubles(&[("main.tex", "\\documentclass{article}\\input{\\where/a}\\input{}")], "main.tex", &[]);
}

#[test]
fn cycles_are_told_once() {
    let files = [
        ("main.tex", "\\documentclass{article}\\input{a}"),
        ("a.tex", "\\input{b}"),
        ("b.tex", "\\input{a}\\input{a}\\input{b}"),
    ];
    let want = [
        "b.tex: the part a.tex includes itself through a.tex -> b.tex -> a.tex",
        "b.tex: the part b.tex includes itself through b.tex -> b.tex",
    ];
    for name in ["main.tex", "a.tex", "b.tex"] {
        troubles(&files, name, &want);
    }
    // Without a root there is still an end.
    let without = project(&files[1..]);
    assert_eq!(loaded(without.path(), "a.tex").paper.documents.len(), 2);
}

#[test]
fn nothing_is_read_outside_the_project() {
    let outer = project(&[("secret.tex", ""), ("inner/.git/x", ""), ("inner/main.tex", "\\input{../secret}")]);
    let folder = outer.path().join("inner");
    assert_eq!(troubles_in(&folder, "main.tex"), ["main.tex: the part ../secret lies outside the project"]);
}

#[cfg(unix)]
#[test]
fn a_link_does_not_lead_outside() {
    let outer = project(&[("secret.tex", ""), ("inner/.git/x", ""), ("inner/main.tex", "\\input{link}")]);
    let folder = outer.path().join("inner");
    std::os::unix::fs::symlink("../secret.tex", folder.join("link.tex")).unwrap();
    assert_eq!(troubles_in(&folder, "main.tex"), ["main.tex: the part link lies outside the project"]);
}

#[test]
fn a_part_that_is_no_text_is_a_trouble_of_the_one_that_asks() {
    let folder = project(&[("main.tex", "\\documentclass{article}\\input{a}")]);
    fs::write(folder.path().join("a.tex"), b"x\xff").unwrap();
    let want = "main.tex: the part a.tex cannot be read: is not UTF-8: first bad byte at offset 1";
    assert_eq!(troubles_in(folder.path(), "main.tex"), [want]);
}

#[test]
fn a_deep_chain_of_parts_is_followed_without_recursion() {
    let folder = project(&[("main.tex", "\\documentclass{article}\\input{p0}")]);
    for at in 0..2100 {
        fs::write(folder.path().join(format!("p{at}.tex")), format!("\\input{{p{}}}", at + 1)).unwrap();
    }
    let paper = loaded(folder.path(), "main.tex").paper;
    assert_eq!(paper.documents.len(), 2001);
    assert!(paper.troubles.iter().any(|trouble| trouble.message.contains("too large")), "{:?}", paper.troubles);
}

#[test]
fn a_text_laid_over_the_disk_is_read_instead() {
    let folder = project(&[("main.tex", HEAD), ("a.tex", "")]);
    let root: PathBuf = folder.path().canonicalize().unwrap().join("main.tex");
    let mut overlay = Overlay::new(&Disk);
    overlay.lay(root.clone(), Text { text: "\\documentclass{article}\\input{a}".into(), marked: false });
    let key = Roots::new(&overlay).paper_of(&root, Host::Latex, true);
    assert_eq!(load(&overlay, &key, &Scope::default()).unwrap().paper.documents.len(), 2);
}

#[test]
fn a_scope_brings_conventions_and_macros_before_the_paper_s_own_styles() {
    let folder = project(&[
        ("indexwise.toml", "[conventions]\nlines = ['B is a label']\n[files]\nmacros = ['style/extra.sty', 'own.sty']"),
        ("style/extra.sty", "\\RequirePackage{more}"),
        ("style/more.sty", ""),
        ("own.sty", ""),
        ("other.sty", ""),
        ("main.tex", "\\documentclass{article}\\usepackage{other}\\usepackage{own}"),
        ("notes.md", ""),
    ]);
    let root = folder.path().canonicalize().unwrap();
    let mut scopes = Scopes::default();
    for (name, host, own) in [("main.tex", Host::Latex, &["other.sty"][..]), ("notes.md", Host::Markdown, &[])] {
        let path = root.join(name);
        let scope = scopes.enter(&path);
        let paper = load(&Disk, &Roots::new(&Disk).paper_of(&path, host, true), &scope).unwrap().paper;
        let styles: Vec<&str> = paper.styles.iter().map(|style| style.path.as_str()).collect();
        assert_eq!(styles, [&["style/more.sty", "style/extra.sty", "own.sty"], own].concat());
        assert_eq!(paper.shared, scope.shared);
        assert_eq!(paper.shared[0].sentences[0].0, "B is a label");
    }
}
