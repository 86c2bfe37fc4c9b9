//! The demonstration documents: what the program reports of them, to the letter, and that it is what was planted.
//!
//! `tests/documents/expected.lines` was read line by line when it was made. After a change that alters it on
//! purpose, `INDEXWISE_TESTS=renew cargo test -p indexwise --test demo` writes it anew; read the difference before
//! it goes in. That every slip is reported where it stands, and nothing else, is checked apart from that file, so
//! that renewing it cannot hide a slip that is no longer found.

#![allow(clippy::unwrap_used, clippy::panic)]

#[path = "../../../tests/json_schema.rs"]
mod json_schema;

use std::fs;
use std::path::{Path, PathBuf};
use std::process::{Command, Stdio};

use serde_json::Value;

/// Documents of the demonstration, from the root of the repository.
const DOCUMENTS: &str = "tests/documents";
/// What stands before the name of the rule that has to report the formula after it.
const MARK: &str = "Planted: ";

fn root() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("../..")
}

/// What `check` with further options prints of the demonstration documents; there are findings, and no trouble.
fn check(options: &[&str]) -> String {
    let mut command = Command::new(env!("CARGO_BIN_EXE_indexwise"));
    command.current_dir(root()).args(["check", "--no-progress", DOCUMENTS]).args(options);
    let output = command.stdin(Stdio::null()).output().unwrap();
    assert_eq!(output.status.code(), Some(1), "{}", String::from_utf8_lossy(&output.stderr));
    assert!(output.stderr.is_empty(), "{}", String::from_utf8_lossy(&output.stderr));
    String::from_utf8(output.stdout).unwrap()
}

/// The report of the documents, one finding a line.
fn report() -> String {
    check(&["--report", "lines"])
}

#[test]
fn the_report_of_the_documents_is_the_one_that_was_read() {
    let path = root().join(DOCUMENTS).join("expected.lines");
    let report = report();
    if std::env::var_os("INDEXWISE_TESTS").is_some_and(|value| value == "renew") {
        fs::write(&path, &report).unwrap();
    }
    let expected = fs::read_to_string(&path).unwrap();
    let missing: Vec<&str> = expected.lines().filter(|line| !report.lines().any(|other| other == *line)).collect();
    let new: Vec<&str> = report.lines().filter(|line| !expected.lines().any(|other| other == *line)).collect();
    assert!(missing.is_empty() && new.is_empty(), "no longer:\n{}\nnew:\n{}", missing.join("\n"), new.join("\n"));
    assert_eq!(report, expected, "the order of the lines changed");
}

/// A slip or a finding: line, rule.
type Slip = (usize, String);

/// Where slips were planted in a document.
fn planted(text: &str) -> Vec<Slip> {
    let slip = |(at, line): (usize, &str)| {
        let rule = line.split_once(MARK)?.1;
        let rule = rule.split(|sign: char| sign != '-' && !sign.is_ascii_lowercase()).next()?;
        Some((at + 1, rule.to_owned()))
    };
    text.lines().enumerate().filter_map(slip).collect()
}

/// What is reported of a document.
fn reported(report: &str, path: &str) -> Vec<Slip> {
    let slip = |line: &str| {
        let rest = line.strip_prefix(path)?.strip_prefix(':')?;
        let number = rest.split(':').next()?.parse().ok()?;
        let rule = rest.rsplit('[').next()?.trim_end_matches(']');
        Some((number, rule.to_owned()))
    };
    report.lines().filter_map(slip).collect()
}

#[test]
fn every_planted_slip_is_reported_and_nothing_else() {
    let report = report();
    let names = [
        "derivation.tex",
        "field-notes.inote",
        "shell-waves/paper.tex",
        "shell-waves/review.md",
        "shell-waves/sections/stresses.tex",
    ];
    for name in names {
        let path = format!("{DOCUMENTS}/{name}");
        let slips = planted(&fs::read_to_string(root().join(&path)).unwrap());
        let findings = reported(&report, &path);
        let rules = |slips: &[Slip]| slips.iter().map(|(_, rule)| rule.clone()).collect::<Vec<_>>();
        assert_eq!(rules(&findings), rules(&slips), "{path}");
        for (at, ((line, rule), (mark, _))) in findings.iter().zip(&slips).enumerate() {
            let next = slips.get(at + 1).map_or(usize::MAX, |(line, _)| *line);
            assert!(mark < line && *line < next, "{path}:{line}: {rule} is not what was planted in line {mark}");
        }
    }
    let count = names.iter().map(|name| reported(&report, &format!("{DOCUMENTS}/{name}")).len()).sum::<usize>();
    assert_eq!(count, report.lines().count(), "a finding in a file that is not a document of the demonstration");
}

/// The rules that a document can show by itself; `unread` is off.
#[test]
fn every_rule_has_a_planted_slip() {
    let report = report();
    for rule in indexwise_checker::rules::RULES.iter().filter(|rule| rule.on) {
        let shown = report.lines().any(|line| line.ends_with(&format!("[{}]", rule.name)));
        assert!(shown, "{} is shown by no document", rule.name);
    }
}

/// The schema is what other programs are promised; version 1 is the one that the program writes.
#[test]
fn the_report_in_json_fits_its_schema() {
    let schema = fs::read_to_string(root().join("tests/report-1.schema.json")).unwrap();
    let schema = serde_json::from_str(&schema).unwrap();
    let whole: Value = serde_json::from_str(&check(&["--report", "json"])).unwrap();
    assert_eq!(json_schema::complaints(&schema, "#", &whole), [""; 0]);
    let lines = check(&["--report", "json-lines"]);
    for line in lines.lines() {
        let file = serde_json::from_str(line).unwrap();
        assert_eq!(json_schema::complaints(&schema, "#/$defs/file", &file), [""; 0]);
    }
    let findings = |file: &Value| file["findings"].as_array().map_or(0, Vec::len);
    let count: usize = whole["files"].as_array().unwrap().iter().map(findings).sum();
    assert_eq!(count, report().lines().count(), "the same findings in every form of the report");
}

/// What the README shows of the program's output is what the program prints.
#[test]
fn the_tour_of_the_readme_is_real() {
    let readme = fs::read_to_string(root().join("README.md")).unwrap();
    let printed = [check(&[]), check(&["--fix", "--dry-run"]), report()];
    let blocks =
        readme.split("\n```\n").filter(|block| block.starts_with(DOCUMENTS) || block.starts_with("would mend "));
    let mut shown = 0;
    for block in blocks {
        assert!(printed.iter().any(|text| text.contains(block)), "the program does not print\n{block}");
        shown += 1;
    }
    assert!(shown >= 4, "only {shown} blocks of output in the README");
}
