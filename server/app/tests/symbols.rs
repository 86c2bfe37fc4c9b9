//! `check --symbols`: the symbol table in the reports that have a place for it.

#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic)]

#[path = "../../../tests/json_schema.rs"]
mod json_schema;
mod run;

use std::fs;
use std::path::Path;

use run::Folder;
use serde_json::{Value, json};

/// A note in which `E` is a modulus and a strain.
const NOTE: &str = "conventions
  E_ij is symmetric

The strain and the stress of the sheet:

  E_ij = 1/2 (u_i,j + u_j,i)
  sigma_ij = E E_ij
";

fn note() -> Folder {
    Folder::new(&[("bench/sheet.inote", NOTE.as_bytes()), ("words.md", b"no formulas")])
}

#[test]
fn the_text_has_the_table_after_the_findings() {
    let answer = note().run("check --symbols");
    assert_eq!((answer.status, answer.err.as_str()), (0, ""));
    let want = "bench/sheet.inote, symbols
    kernel    slots    uses    first
    E         2        2       6:3      declared
                                        symmetric in slots 1 2
    u         1        2       6:15
    σ         2        1       7:3
    E         0        1       7:14

    letter    used as     uses    first
    E         2 slots     2       6:3
              quantity    1       7:14

";
    let rest = answer.out.strip_prefix(want).unwrap_or_else(|| panic!("{}", answer.out));
    assert!(rest.starts_with("2 files: "), "{rest}");
    assert!(include_str!("../../../README.md").contains(want.trim_end()), "the README shows another table");
}

#[test]
fn json_has_the_table_in_the_object_of_the_file() {
    let answer = note().run("check --symbols --report json");
    assert_eq!((answer.status, answer.err.as_str()), (0, ""));
    let report: Value = serde_json::from_str(&answer.out).unwrap();
    let offset = |piece: &str| NOTE.find(piece).unwrap();
    let strain = json!({"line": 6, "column": 3, "offset": offset("E_ij = 1/2")});
    let modulus = json!({"line": 7, "column": 14, "offset": offset("E E_ij")});
    let symbols = &report["files"][0]["symbols"];
    let kernel = json!({"kernel": "E", "slots": 2, "uses": 2, "declared": true,
        "symmetries": ["symmetric in slots 1 2"], "first": strain});
    assert_eq!((&symbols["kernels"][0], symbols["kernels"].as_array().unwrap().len()), (&kernel, 4));
    let parts = json!([
        {"part": "2 slots", "uses": 2, "first": strain},
        {"part": "quantity", "uses": 1, "first": modulus},
    ]);
    assert_eq!(symbols["letters"], json!([{"letter": "E", "parts": parts}]));
    assert_eq!(report["files"][1]["symbols"], json!({"kernels": [], "letters": []}));
}

#[test]
fn nothing_changes_for_those_who_do_not_ask() {
    let folder = note();
    for kind in ["text", "json", "json-lines", "lines"] {
        let answer = folder.run(&format!("check --report {kind}"));
        assert!(!answer.out.contains("symbols"), "{kind}: {}", answer.out);
    }
    // One line for a finding is no place for a table.
    let lines = folder.run("check --symbols --report lines");
    assert_eq!((lines.status, lines.out.as_str()), (0, ""));
}

#[test]
fn the_table_changes_no_finding() {
    let documents = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../tests/documents");
    let run = |options: &str| {
        let folder = Folder::new(&[]);
        let line = format!("check --report json-lines {options} {}", documents.display());
        folder.run(&line).out
    };
    let plain = run("");
    let schema = fs::read_to_string(documents.join("../report-1.schema.json")).unwrap();
    let schema = serde_json::from_str(&schema).unwrap();
    let mut without = String::new();
    for line in run("--symbols").lines() {
        let mut file: Value = serde_json::from_str(line).unwrap();
        assert_eq!(json_schema::complaints(&schema, "#/$defs/file", &file), [""; 0]);
        let symbols = file.as_object_mut().unwrap().remove("symbols").unwrap();
        assert!(!symbols["kernels"].as_array().unwrap().is_empty(), "{line}");
        without += &format!("{file}\n");
    }
    let normal = |text: &str| -> Vec<Value> { text.lines().map(|line| serde_json::from_str(line).unwrap()).collect() };
    assert_eq!(normal(&without), normal(&plain));
}

#[test]
fn findings_still_decide_the_status() {
    let folder = Folder::new(&[("a.md", run::SLIP.as_bytes())]);
    let answer = folder.run("check --symbols");
    assert_eq!(answer.status, 1);
    let (finding, table) = (answer.out.find("free-index-mismatch").unwrap(), answer.out.find("a.md, symbols").unwrap());
    assert!(finding < table, "{}", answer.out);
}

#[test]
fn after_mending_the_table_is_that_of_the_mended_text() {
    let folder = Folder::new(&[("a.md", run::SLIP.as_bytes())]);
    let mended = folder.run("check --fix --symbols --report json");
    let again = folder.run("check --symbols --report json");
    let symbols = |out: &str| serde_json::from_str::<Value>(out).unwrap()["files"][0]["symbols"].clone();
    assert!(symbols(&again.out)["kernels"].as_array().unwrap().len() > 3);
    assert_eq!(symbols(&mended.out), symbols(&again.out));
}
