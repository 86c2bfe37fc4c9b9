//! Which steps the program verifies, and how a verdict stands in its reports.

#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic)]

#[path = "../../../tests/json_schema.rs"]
mod json_schema;
mod run;

use run::{Answer, Folder};
use serde_json::Value;

/// Declarations, and a chain whose second step is wrong by a factor.
const CHAIN: &str = "% indexwise: i j k run from 1 to 3; i j k are cartesian; S_{ij} is symmetric; v_i is a vector\n\
    $$ t_i = S_{ij} v_j + S_{ji} v_j = S_{ij} v_j $$\n";

fn check(text: &str, options: &str) -> Answer {
    Folder::new(&[("a.tex", text.as_bytes())]).run(&format!("check {options}"))
}

#[test]
fn steps_are_verified_where_they_are_asked_for() {
    let asked = format!("% indexwise: derivations are checked\n{CHAIN}");
    let cases = [
        (CHAIN, "auto", false),
        (CHAIN, "all", true),
        (CHAIN, "off", false),
        (asked.as_str(), "auto", true),
        (asked.as_str(), "all", true),
        (asked.as_str(), "off", false),
    ];
    for (text, mode, found) in cases {
        let answer = check(text, &format!("--steps {mode} --report lines"));
        assert_eq!((answer.status, answer.out.contains("[step-fails]")), (i32::from(found), found), "{mode}: {text}");
    }
    assert_eq!(check(&asked, "--report lines"), check(&asked, "--steps auto --report lines"), "the default");
    assert_eq!(check(CHAIN, "--steps some").status, 2);
}

#[test]
fn a_verdict_in_json_fits_the_schema() {
    let answer = check(CHAIN, "--steps all --report json");
    let report: Value = serde_json::from_str(&answer.out).unwrap();
    let schema = std::fs::read_to_string(concat!(env!("CARGO_MANIFEST_DIR"), "/../../tests/report-1.schema.json"));
    let schema = serde_json::from_str(&schema.unwrap()).unwrap();
    assert_eq!(json_schema::complaints(&schema, "#", &report), [""; 0]);
    let verdict = &report["files"][0]["findings"][0]["verdict"];
    assert_eq!(verdict["verdict"], "fails", "{report}");
    assert_eq!(verdict["counterexample"]["dimension"], 3, "{report}");
    let sides = &verdict["counterexample"];
    assert_ne!(sides["left"], sides["right"], "{report}");
}
