//! Every page of a rule, executed: its wrong example is reported by that rule and by no other, its right example by
//! none. And the registry: names, pages, the README's table.
//!
//! A page is Markdown: a title that is the rule's name, a few lines, and the sections `Wrong` and `Right` with one
//! `latex` block each. A rule that asks for habits has a section `Context` before them, whose block is put before
//! either example. The pages are what `indexwise explain` prints.

#![allow(clippy::expect_used, clippy::panic, clippy::unwrap_used)]

use std::fs;
use std::path::Path;
use std::sync::Arc;

use indexwise_checker::finding::Finding;
use indexwise_checker::paper::{Cancel, Paper, Settings, Source, Trouble, check};
use indexwise_checker::rules::{RULES, Rule, find};
use indexwise_grammar::conventions::{Sentence, read_sentence};
use indexwise_grammar::hosts::{Host, ReferenceKind, scan};
use indexwise_grammar::macros::Macros;
use indexwise_tests::files_below;

/// Parts that are there when an example asks for them; all others are missing.
const PARTS: &[&str] = &["sections/stresses"];
/// The longest page, in lines: it is read in a terminal.
const LONGEST_PAGE: usize = 50;

/// A section of a page: its title and its text.
fn sections(page: &str) -> Vec<(&str, &str)> {
    page.split("\n## ").skip(1).map(|section| section.split_once('\n').unwrap_or((section, ""))).collect()
}

/// The `latex` block of a section, if the page has the section.
fn block(rule: &Rule, title: &str) -> Option<String> {
    let (_, text) = sections(rule.page).into_iter().find(|(name, _)| *name == title)?;
    let mut blocks = text.split("```latex\n").skip(1).filter_map(|rest| rest.split_once("```"));
    let block = blocks.next().unwrap_or_else(|| panic!("{}: no block under {title}", rule.name)).0;
    assert!(blocks.next().is_none(), "{}: more than one block under {title}", rule.name);
    Some(block.to_owned())
}

/// What is found in an example of a page, with the page's context before it.
fn found(rule: &Rule, title: &str) -> Vec<Finding> {
    let example = block(rule, title).unwrap_or_else(|| panic!("{}: no section {title}", rule.name));
    let text = block(rule, "Context").unwrap_or_default() + "\n" + &example;
    let parts = scan(&text, Host::Latex, &Macros::default()).references;
    let missing =
        parts.into_iter().filter(|part| part.kind == ReferenceKind::Part && !PARTS.contains(&part.path.as_str()));
    let trouble =
        |span, path| Trouble { document: 0, span, message: format!("the part {path} was not found"), preamble: false };
    let paper = Paper {
        troubles: missing.map(|part| trouble(part.span, part.path)).collect(),
        documents: vec![Source { path: "page.tex".to_owned(), text: Arc::from(text), host: Host::Latex }],
        ..Paper::default()
    };
    // A rule that is off by default is asked for on its own page, beside all others.
    let settings = Settings { unread: !rule.on, ..Settings::default() };
    check(&paper, &settings, &Cancel::default()).documents.into_iter().flat_map(|one| one.findings).collect()
}

#[test]
fn a_wrong_example_is_reported_by_its_rule_alone() {
    for rule in RULES {
        let findings = found(rule, "Wrong");
        let told: Vec<String> = findings.iter().map(|one| format!("{}: {}", one.rule, one.message)).collect();
        assert!(!findings.is_empty(), "{}: nothing is reported", rule.name);
        assert!(findings.iter().all(|one| one.rule == rule.name), "{}: {told:#?}", rule.name);
        assert!(findings.iter().all(|one| one.severity == rule.severity), "{}: not its usual severity", rule.name);
    }
}

#[test]
fn a_right_example_is_reported_by_none() {
    for rule in RULES {
        let told: Vec<String> =
            found(rule, "Right").iter().map(|one| format!("{}: {}", one.rule, one.message)).collect();
        assert!(told.is_empty(), "{}: {told:#?}", rule.name);
    }
}

#[test]
fn a_page_is_short_and_has_its_sections_in_order() {
    for rule in RULES {
        let titles: Vec<&str> = sections(rule.page).iter().map(|(title, _)| *title).collect();
        assert!(matches!(titles.as_slice(), ["Wrong", "Right"] | ["Context", "Wrong", "Right"]), "{titles:?}");
        assert!(rule.page.starts_with(&format!("# {}\n\n", rule.name)), "{}: the title", rule.name);
        assert!(rule.page.lines().count() <= LONGEST_PAGE, "{}: the page is long", rule.name);
        assert!(rule.page.lines().all(|line| line.chars().count() <= 120), "{}: a line is long", rule.name);
        assert_ne!(block(rule, "Wrong"), block(rule, "Right"), "{}", rule.name);
    }
}

#[test]
fn names_are_unique_and_in_kebab_case() {
    for rule in RULES {
        assert_eq!(RULES.iter().filter(|other| other.name == rule.name).count(), 1, "{}", rule.name);
        let words: Vec<&str> = rule.name.split('-').collect();
        let is_word = |word: &&str| !word.is_empty() && word.chars().all(|sign| sign.is_ascii_lowercase());
        assert!(words.iter().all(is_word), "{}", rule.name);
        assert!(find(rule.name).is_some_and(|one| one.page == rule.page), "{}", rule.name);
        assert!(rule.summary.ends_with('.') && !rule.summary.contains('\n'), "{}: {}", rule.name, rule.summary);
    }
}

/// A rule is two files with one stem, and no page or file stands there without a rule.
#[test]
fn a_rule_is_a_file_and_a_page_of_its_name() {
    let stems = |suffix: &str| {
        let files = files_below("../server/checker/src/rules").into_iter();
        let of_suffix = files.filter(|path| path.extension().is_some_and(|other| other == suffix));
        of_suffix.map(|path| path.file_stem().unwrap().to_string_lossy().into_owned()).collect::<Vec<_>>()
    };
    let mut names: Vec<String> = RULES.iter().map(|rule| rule.name.replace('-', "_")).collect();
    names.sort();
    assert_eq!(stems("md"), names);
    let sources = stems("rs");
    assert!(names.iter().all(|name| sources.contains(name)), "{sources:?}");
}

#[test]
fn every_rule_can_be_allowed() {
    for rule in RULES {
        for (place, here) in [("here", true), ("in this file", false)] {
            let text = format!("allow {} {place}", rule.name);
            let read = read_sentence(&text, 0, Host::Latex, &Macros::default());
            let is_wanted = |sentence: &Sentence| matches!(sentence, Sentence::Allow { rule: name, here: said } if name.text == rule.name && *said == here);
            assert!(read.as_ref().is_ok_and(is_wanted), "{text}: {read:?}");
        }
    }
}

#[test]
fn the_readme_has_the_rules_as_they_are() {
    let readme = fs::read_to_string(Path::new(env!("CARGO_MANIFEST_DIR")).join("../README.md")).unwrap();
    let rows: Vec<&str> = readme.lines().filter(|line| line.starts_with("| `") && line.contains("-")).collect();
    let off = |rule: &Rule| if rule.on { "" } else { ", off" };
    for rule in RULES {
        let row = format!("| `{}` | {}{} | {} |", rule.name, rule.severity.word(), off(rule), rule.summary);
        assert!(readme.lines().any(|line| line == row), "the README lacks the row\n{row}");
    }
    let strangers: Vec<&&str> = rows
        .iter()
        .filter(|row| ["| error", "| warning", "| hint"].iter().any(|severity| row.contains(severity)))
        .filter(|row| !RULES.iter().any(|rule| row.starts_with(&format!("| `{}` |", rule.name))))
        .collect();
    assert!(strangers.is_empty(), "the README has rows for no rule: {strangers:?}");
}
