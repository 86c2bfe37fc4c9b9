//! Reports on documents with slips, and what becomes of them under `--fix`.

#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic)]

mod run;

use run::{Answer, Folder, SLIP};
use serde_json::Value;

const RULE: &str = "free-index-mismatch";

/// A folder with one file, `a.tex`, that has the slip on its second line.
fn slip() -> Folder {
    Folder::new(&[("a.tex", format!("The force:\n{SLIP}\n").as_bytes())])
}

fn report(answer: &Answer) -> Value {
    serde_json::from_str(&answer.out).unwrap_or_else(|error| panic!("{error}: {answer:?}"))
}

/// The first finding of the first file.
fn first(answer: &Answer) -> Value {
    report(answer)["files"][0]["findings"][0].clone()
}

/// What a report says apart from the time that it took.
fn timeless(text: &str) -> String {
    text.lines().map(|line| line.split(" hints; ").next().unwrap()).collect::<Vec<_>>().join("\n")
}

#[test]
fn findings_are_status_1() {
    for kind in ["text", "lines", "json", "json-lines"] {
        let answer = slip().run(&format!("check --report {kind}"));
        assert_eq!((answer.status, answer.err.as_str()), (1, ""), "{kind}");
        assert!(answer.out.contains(RULE), "{kind}: {}", answer.out);
    }
}

#[test]
fn findings_and_trouble_together_are_status_2() {
    let answer = slip().run("check a.tex gone.tex");
    assert_eq!(answer.status, 2);
    assert!(answer.out.contains(RULE));
}

#[test]
fn hints_count_only_if_asked_for() {
    let folder = Folder::new(&[("a.tex", b"% indexwise: allow index-thrice here\n$A_i = B_i$\n")]);
    for (line, status) in [("check", 0), ("check --strict", 1), ("check --strict --without idle-allow", 0)] {
        let answer = folder.run(&format!("{line} --report lines"));
        assert_eq!((answer.status, answer.err.as_str()), (status, ""), "{line}: {answer:?}");
        assert_eq!(answer.out.contains(" hint: "), !line.contains("--without"), "{line}: {answer:?}");
    }
}

#[test]
fn rules_can_be_chosen() {
    for (line, status) in [
        ("check --only free-index-mismatch", 1),
        ("check --only index-thrice", 0),
        ("check --only index-thrice,free-index-mismatch", 1),
        ("check --without free-index-mismatch", 0),
    ] {
        assert_eq!(slip().run(line).status, status, "{line}");
    }
    let told = slip().run("check --only free-index-mismach").err;
    assert!(told.contains("the nearest is free-index-mismatch"), "{told}");
}

#[test]
fn a_line_has_the_form_that_editors_read() {
    let answer = slip().run("check --report lines");
    let line = answer.out.lines().next().unwrap();
    let pieces: Vec<&str> = line.splitn(4, ':').collect();
    let [file, line, column, rest] = pieces.as_slice() else { panic!("{line}") };
    assert_eq!((*file, *line), ("a.tex", "2"));
    assert!(column.parse::<usize>().unwrap() > 1, "{column}");
    assert!(rest.starts_with(" error: ") && rest.ends_with(&format!(" [{RULE}]")), "{rest}");
}

#[test]
fn the_text_shows_the_source_and_the_ledger() {
    let answer = slip().run("check");
    assert!(answer.out.starts_with("a.tex, line 2\n"), "{}", answer.out);
    for piece in [SLIP, "left side", "free  i", RULE, "Offered: ", "1 file: 1 formula, 1 with indices"] {
        assert!(answer.out.contains(piece), "{piece}: {}", answer.out);
    }
}

#[test]
fn the_json_has_the_stated_shape() {
    let answer = slip().run("check --report json");
    let report = report(&answer);
    assert_eq!((&report["report"], &report["tool"]["name"]), (&Value::from(1), &Value::from("indexwise")));
    let file = &report["files"][0];
    for (count, want) in [("formulas", 1), ("indexed", 1), ("unread", 0), ("unknown_macros", 0)] {
        assert_eq!(file["statistics"][count], want, "{count}");
    }
    let finding = &file["findings"][0];
    assert_eq!((&finding["rule"], &finding["severity"]), (&Value::from(RULE), &Value::from("error")));
    let text = format!("The force:\n{SLIP}\n");
    is_span(finding, &text);
    for related in finding["related"].as_array().unwrap() {
        is_span(related, &text);
        assert!(related["message"].is_string());
    }
    let fixes = finding["fixes"].as_array().unwrap();
    assert!(!fixes.is_empty());
    for fix in fixes {
        assert!(fix["title"].is_string() && fix["bulk"].is_boolean());
        let edits = fix["edits"].as_array().unwrap();
        assert!(!edits.is_empty() && edits.iter().all(|edit| edit["text"].is_string()));
        edits.iter().for_each(|edit| is_span(edit, &text));
    }
}

/// Start and end are places of this ASCII text, and agree with themselves.
#[track_caller]
fn is_span(value: &Value, text: &str) {
    let place = |name: &str| {
        let number = |part: &str| usize::try_from(value[name][part].as_u64().unwrap()).unwrap();
        let offset = number("offset");
        let before = &text[..offset];
        let start = before.rfind('\n').map_or(0, |at| at + 1);
        assert_eq!(number("line"), before.matches('\n').count() + 1);
        assert_eq!(number("column"), offset - start + 1);
        offset
    };
    assert!(place("start") <= place("end"));
}

#[test]
fn a_byte_order_mark_counts_in_offsets_only() {
    let bytes = [b"\xef\xbb\xbf", SLIP.as_bytes()].concat();
    let (marked, plain) = (Folder::new(&[("a.tex", &bytes)]), Folder::new(&[("a.tex", SLIP.as_bytes())]));
    let [marked, plain] = [marked, plain].map(|folder| first(&folder.run("check --report json"))["start"].clone());
    assert_eq!((&marked["line"], &marked["column"]), (&plain["line"], &plain["column"]));
    assert_eq!(marked["offset"].as_u64(), plain["offset"].as_u64().map(|offset| offset + 3));
}

#[test]
fn line_ends_of_other_systems_are_line_ends() {
    let text = format!("The force:\r\n\r\n{SLIP}\r\n");
    let answer = Folder::new(&[("a.tex", text.as_bytes())]).run("check --report lines");
    assert!(answer.out.starts_with("a.tex:3:"), "{}", answer.out);
}

#[test]
fn standard_input_has_findings_too() {
    for (host, text) in [("latex", SLIP), ("markdown", SLIP), ("note", "  A_i = B^j C_ij + D_i + E_k\n")] {
        let answer = Folder::new(&[]).run_with_input(&format!("check - --report lines --host {host}"), text.as_bytes());
        assert_eq!(answer.status, 1, "{host}: {answer:?}");
        assert!(answer.out.starts_with("-:1:"), "{host}: {}", answer.out);
    }
}

#[test]
fn a_report_is_the_same_with_any_number_of_jobs() {
    let text = format!("{SLIP}\nWords.\n{SLIP}\n");
    let names: Vec<String> = (0..30).map(|at| format!("p{}/a{at}.tex", at % 4)).collect();
    let files: Vec<(&str, &[u8])> = names.iter().map(|name| (name.as_str(), text.as_bytes())).collect();
    let folder = Folder::new(&files);
    for kind in ["text", "lines", "json", "json-lines"] {
        let one = folder.run(&format!("check --jobs 1 --report {kind}"));
        assert!(one.out.contains(RULE));
        for jobs in [2, 8] {
            let more = folder.run(&format!("check --jobs {jobs} --report {kind}"));
            assert_eq!(timeless(&one.out), timeless(&more.out), "{kind}, {jobs} jobs");
        }
    }
}

#[test]
fn findings_do_not_depend_on_what_else_is_listed() {
    let main = "\\documentclass{article}\n\\newcommand{\\force}{F}\n\\input{a}\n\\input{b}\n";
    let folder = Folder::new(&[("main.tex", main.as_bytes()), ("a.tex", SLIP.as_bytes()), ("b.tex", SLIP.as_bytes())]);
    let whole = folder.run("check --report json-lines");
    let alone: String = ["a.tex", "b.tex", "main.tex"]
        .map(|name| folder.run(&format!("check --report json-lines {name}")).out)
        .concat();
    assert_eq!(whole.out, alone);
}

#[test]
fn parts_that_are_cyclic_missing_or_outside_are_found_once() {
    let folder = Folder::new(&[
        ("main.tex", b"\\documentclass{article}\\begin{document}\\input{a}\\input{gone}\\end{document}"),
        ("a.tex", b"\\input{a}\n\\input{../../outside}"),
    ]);
    let outside = folder.path().parent().unwrap().join("outside.tex");
    let answer = folder.run("check --report lines");
    assert_eq!(answer.status, 1, "{answer:?} {outside:?}");
    for piece in ["includes itself through a.tex -> a.tex", "the part gone was not found"] {
        assert_eq!(answer.out.matches(piece).count(), 1, "{piece}: {}", answer.out);
    }
    assert!(answer.out.lines().all(|line| line.ends_with("[missing-part]")), "{}", answer.out);
}

#[test]
fn fixes_are_written_and_told() {
    let text = format!("\u{feff}The force:\r\n{SLIP}\r\n");
    let folder = Folder::new(&[("a.tex", text.as_bytes())]);
    let answer = folder.run("check --fix");
    assert_eq!((answer.status, answer.err.as_str()), (0, ""), "{answer:?}");
    assert!(answer.out.starts_with("mended a.tex:2: "), "{}", answer.out);
    let mended = text.replace("E_k", "E_i");
    assert_eq!(String::from_utf8(folder.read("a.tex")).unwrap(), mended);
    assert_eq!(folder.run("check").status, 0);
}

#[test]
fn a_dry_run_writes_nothing() {
    let folder = slip();
    let before = folder.read("a.tex");
    let answer = folder.run("check --fix --dry-run");
    assert_eq!(answer.status, 1);
    assert!(answer.out.starts_with("would mend a.tex:2: "), "{}", answer.out);
    for line in [format!("    - {SLIP}"), format!("    + {}", SLIP.replace("E_k", "E_i"))] {
        assert!(answer.out.lines().any(|told| told == line), "{line}: {}", answer.out);
    }
    assert_eq!(folder.read("a.tex"), before);
}

#[test]
fn what_was_mended_does_not_disturb_a_report_for_programs() {
    let answer = slip().run("check --fix --report json");
    assert_eq!(report(&answer)["files"][0]["findings"], Value::Array(Vec::new()));
    assert!(answer.err.starts_with("mended a.tex:2: "), "{}", answer.err);
}

#[test]
fn what_a_person_must_choose_is_left_with_a_reason() {
    let text = b"\\[ \\partial_i T_{jk} = \\partial_i S_{jm} \\]\n";
    let folder = Folder::new(&[("a.tex", text)]);
    let answer = folder.run("check --fix");
    assert_eq!(answer.status, 1, "{answer:?}");
    assert!(answer.out.starts_with("left a.tex:1: ") && answer.out.contains(" ("), "{}", answer.out);
    assert_eq!(folder.read("a.tex"), text);
}

#[cfg(unix)]
#[test]
fn a_file_that_may_not_be_written_is_trouble_and_stays() {
    use std::os::unix::fs::PermissionsExt;
    let folder = slip();
    let before = folder.read("a.tex");
    std::fs::set_permissions(folder.path().join("a.tex"), std::fs::Permissions::from_mode(0o444)).unwrap();
    let answer = folder.run("check --fix");
    assert_eq!((answer.status, answer.err.as_str()), (2, "indexwise: a.tex: is read-only; the file is as it was\n"));
    assert!(!answer.out.contains("mended a.tex"), "{}", answer.out);
    assert_eq!(folder.read("a.tex"), before);
}
