//! The command line as a user meets it: options, exit statuses, lines on standard error.

#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic)]

mod run;

use std::io::{BufRead, BufReader};
use std::process::Stdio;

use run::Folder;

/// Trouble is exit status 2, nothing on standard output that is not a report, and this line.
#[track_caller]
fn complains(files: &[(&str, &[u8])], line: &str, want: &str) {
    let answer = Folder::new(files).run(line);
    assert_eq!(answer.status, 2, "{answer:?}");
    assert_eq!(answer.err, format!("indexwise: {want}\n"));
}

#[test]
fn nothing_to_report_is_status_0() {
    let folder = Folder::new(&[("a.tex", b"Only words."), ("b.md", b"$A_i = B_i$"), ("c.inote", b"Notes.")]);
    for line in ["check", "check .", "check a.tex b.md c.inote", "check --report lines"] {
        let answer = folder.run(line);
        assert_eq!((answer.status, answer.err.as_str()), (0, ""), "{line}: {answer:?}");
    }
}

#[test]
fn a_missing_file_is_trouble() {
    complains(&[], "check gone.tex", "gone.tex: not found");
}

#[test]
fn a_file_that_is_not_utf8_is_trouble() {
    complains(&[("a.tex", b"ab\xe9")], "check a.tex", "a.tex: is not UTF-8: first bad byte at offset 2");
}

#[cfg(target_os = "linux")]
#[test]
fn a_file_that_cannot_be_read_is_trouble() {
    // This file opens for everybody, and reading it fails for everybody.
    complains(&[], "check /proc/self/mem", "/proc/self/mem: input/output error");
}

#[test]
fn trouble_with_one_file_does_not_stop_the_others() {
    let folder = Folder::new(&[("a.tex", b"\xff"), ("b.tex", b""), ("c.tex", b"")]);
    let answer = folder.run("check a.tex gone.tex c.tex b.tex --report json-lines");
    assert_eq!(answer.status, 2);
    let paths: Vec<serde_json::Value> = answer
        .out
        .lines()
        .map(|line| serde_json::from_str::<serde_json::Value>(line).unwrap()["path"].clone())
        .collect();
    assert_eq!(paths, ["c.tex", "b.tex"]);
    let told: Vec<&str> = answer.err.lines().collect();
    assert_eq!(told, ["indexwise: gone.tex: not found", "indexwise: a.tex: is not UTF-8: first bad byte at offset 0"]);
}

#[test]
fn bad_options_are_told_in_one_line() {
    complains(&[], "", "say what to do: check, write-out, init, explain or completions (see --help)");
    complains(&[], "check -", "-: say with --host latex, markdown or note what standard input holds");
    complains(&[], "check --fix --host note -", "--fix: cannot write to standard input");
    complains(&[], "check --only ,", "--only and --without: a rule's name is missing");
    for line in ["chekc", "check --reprot text", "check --report pdf", "check --jobs none", "check --dry-run"] {
        let answer = Folder::new(&[]).run(line);
        assert_eq!((answer.status, answer.out.as_str()), (2, ""), "{line}");
        assert_eq!(answer.err.lines().count(), 1, "{line}: {}", answer.err);
        assert!(answer.err.starts_with("indexwise: "), "{line}: {}", answer.err);
    }
}

#[test]
fn an_unknown_rule_is_trouble() {
    for line in ["check --only no-rule", "check --without no-rule", "explain no-rule"] {
        let answer = Folder::new(&[]).run(line);
        assert_eq!((answer.status, answer.out.as_str()), (2, ""), "{line}");
        assert!(answer.err.starts_with("indexwise: no-rule: there is no such rule"), "{}", answer.err);
    }
}

#[test]
fn help_version_and_completions_are_given() {
    let folder = Folder::new(&[]);
    for (line, word) in [
        ("--help", "Usage"),
        ("check --help", "--dry-run"),
        ("--version", env!("CARGO_PKG_VERSION")),
        ("completions bash", "indexwise"),
        ("completions fish", "json-lines"),
    ] {
        let answer = folder.run(line);
        assert_eq!((answer.status, answer.err.as_str()), (0, ""), "{line}");
        assert!(answer.out.contains(word), "{line}: {}", answer.out);
    }
}

#[test]
fn every_listed_rule_is_explained() {
    let folder = Folder::new(&[]);
    let list = folder.run("explain").out;
    let names: Vec<&str> = list.lines().filter_map(|line| line.split(' ').next()).collect();
    assert!(names.len() > 10, "{list}");
    for name in names {
        let answer = folder.run(&format!("explain {name}"));
        assert_eq!((answer.status, answer.err.as_str()), (0, ""), "{name}");
        assert!(answer.out.starts_with(&format!("# {name}\n")), "{name}: {}", answer.out);
    }
}

#[test]
fn every_shell_gets_its_completions() {
    for shell in ["bash", "elvish", "fish", "powershell", "zsh"] {
        let answer = Folder::new(&[]).run(&format!("completions {shell}"));
        assert_eq!((answer.status, answer.err.as_str()), (0, ""), "{shell}");
        for word in ["dry-run", "explain", "json-lines"] {
            // This shell's script knows the names of options and not their values.
            let known = answer.out.contains(word) || (word == "json-lines" && matches!(shell, "elvish" | "powershell"));
            assert!(known, "{shell}: {word}");
        }
    }
}

#[test]
fn an_empty_folder_is_clean() {
    let answer = Folder::new(&[]).run("check");
    assert_eq!(answer.status, 0);
    assert!(answer.out.starts_with("0 files: "), "{}", answer.out);
}

#[test]
fn paths_are_shown_as_they_were_given() {
    let folder = Folder::new(&[("sub/a.tex", b""), ("b.md", b"")]);
    for (line, want) in [
        ("check", ["b.md", "sub/a.tex"]),
        ("check .", ["./b.md", "./sub/a.tex"]),
        ("check sub b.md", ["sub/a.tex", "b.md"]),
        ("check sub/../b.md b.md sub/a.tex", ["sub/../b.md", "sub/a.tex"]),
    ] {
        let answer = folder.run(&format!("{line} --report json"));
        let report: serde_json::Value = serde_json::from_str(&answer.out).unwrap();
        let paths: Vec<&str> =
            report["files"].as_array().unwrap().iter().map(|file| file["path"].as_str().unwrap()).collect();
        assert_eq!(paths, want, "{line}");
    }
}

#[test]
fn standard_input_is_read() {
    let folder = Folder::new(&[]);
    for host in ["latex", "markdown", "note"] {
        let answer = folder.run_with_input(&format!("check - --host {host} --report json"), b"words");
        assert_eq!((answer.status, answer.err.as_str()), (0, ""), "{host}");
        let report: serde_json::Value = serde_json::from_str(&answer.out).unwrap();
        assert_eq!(report["files"][0]["path"], "-");
    }
}

#[cfg(unix)]
#[test]
fn a_pipe_is_read_once() {
    let folder = Folder::new(&[]);
    let pipe = folder.path().join("pipe");
    assert!(std::process::Command::new("mkfifo").arg(&pipe).status().unwrap().success());
    let writer = std::thread::spawn(move || std::fs::write(pipe, "words"));
    let answer = folder.run("check pipe");
    writer.join().unwrap().unwrap();
    assert_eq!((answer.status, answer.err.as_str()), (0, ""));
    assert!(answer.out.starts_with("1 file: "), "{}", answer.out);
}

#[test]
fn the_report_goes_to_a_file() {
    let folder = Folder::new(&[("a.tex", b"")]);
    let answer = folder.run("check --report json --output report.json");
    assert_eq!((answer.status, answer.out.as_str(), answer.err.as_str()), (0, "", ""));
    let report: serde_json::Value = serde_json::from_slice(&folder.read("report.json")).unwrap();
    assert_eq!(report["files"][0]["path"], "a.tex");
    complains(&[("a.tex", b"")], "check --output none/report", "none/report: not found");
}

#[test]
fn the_report_does_not_go_over_a_document() {
    let folder = Folder::new(&[("a.tex", b"words")]);
    let answer = folder.run("check --output ./a.tex");
    assert_eq!(answer.status, 2);
    assert_eq!(folder.read("a.tex"), b"words");
}

#[cfg(unix)]
#[test]
fn a_reader_that_goes_away_is_no_error() {
    let text = "$A_i = B_i$ and words\n";
    let names: Vec<String> = (0..4000).map(|at| format!("a{at}.md")).collect();
    let files: Vec<(&str, &[u8])> = names.iter().map(|name| (name.as_str(), text.as_bytes())).collect();
    let folder = Folder::new(&files);
    let mut command = folder.command("check --report json-lines");
    let mut child = command.stdout(Stdio::piped()).stderr(Stdio::piped()).spawn().unwrap();
    let mut line = String::new();
    // The report is larger than a pipe holds, so the program is still writing when its reader goes away.
    BufReader::with_capacity(16, child.stdout.take().unwrap()).read_line(&mut line).unwrap();
    let output = child.wait_with_output().unwrap();
    assert_eq!((output.status.code(), String::from_utf8_lossy(&output.stderr).as_ref()), (Some(0), ""));
}

#[test]
fn no_escape_codes_where_there_is_no_terminal() {
    let folder = Folder::new(&[("a.md", run::SLIP.as_bytes())]);
    for line in ["check", "check gone.tex", "explain", "--help"] {
        let answer = folder.run(line);
        assert!(!answer.out.contains('\u{1b}') && !answer.err.contains('\u{1b}'), "{line}: {answer:?}");
    }
}
