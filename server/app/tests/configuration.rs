//! `indexwise.toml` as a user meets it: levels, selection, macros, conventions, and what is said when it is wrong.

#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic)]

mod run;

use run::{Answer, Folder, SLIP};

/// A folder of texts.
fn folder(files: &[(&str, &str)]) -> Folder {
    let files: Vec<(&str, &[u8])> = files.iter().map(|(name, text)| (*name, text.as_bytes())).collect();
    Folder::new(&files)
}

/// The lines of a report, without the words between severity and rule.
fn lines(answer: &Answer) -> Vec<String> {
    let short = |line: &str| {
        let (place, rest) = line.split_once(": ").unwrap();
        let (severity, rest) = rest.split_once(": ").unwrap();
        format!("{place} {severity} {}", rest.rsplit_once('[').unwrap().1.trim_end_matches(']'))
    };
    answer.out.lines().map(short).collect()
}

#[track_caller]
fn reports(folder: &Folder, line: &str, status: i32, want: &[&str]) {
    let answer = folder.run(&format!("{line} --report lines"));
    assert_eq!((answer.status, answer.err.as_str()), (status, ""), "{line}: {answer:?}");
    assert_eq!(lines(&answer), want, "{line}");
}

/// The configuration is wrong: status 2, no report, and these lines, each after the program's name.
#[track_caller]
fn wrong(toml: &[u8], want: &[&str]) {
    let folder = Folder::new(&[("indexwise.toml", toml), ("a.tex", SLIP.as_bytes())]);
    let answer = folder.run("check");
    assert_eq!((answer.status, answer.out.as_str()), (2, ""), "{answer:?}");
    let told: Vec<&str> =
        answer.err.lines().map(|line| line.strip_prefix("indexwise: indexwise.toml:").unwrap()).collect();
    assert_eq!(told, want);
}

const MISMATCH: &str = "a.tex:1:31 error free-index-mismatch";

#[test]
fn a_level_changes_what_is_reported_and_the_exit_status() {
    for (level, status, want) in [
        ("off", 0, vec![]),
        ("hint", 0, vec!["a.tex:1:31 hint free-index-mismatch"]),
        ("warning", 1, vec!["a.tex:1:31 warning free-index-mismatch"]),
        ("error", 1, vec![MISMATCH]),
    ] {
        let toml = format!("[rules]\nfree-index-mismatch = \"{level}\"\n");
        let folder = folder(&[("indexwise.toml", &toml), ("a.tex", SLIP)]);
        reports(&folder, "check", status, &want);
        reports(&folder, "check --strict", i32::from(!want.is_empty()), &want);
        reports(&folder, "check --without free-index-mismatch", 0, &[]);
    }
}

#[test]
fn what_the_command_line_names_is_on() {
    let folder = folder(&[("indexwise.toml", "rules = { free-index-mismatch = 'off' }"), ("a.tex", SLIP)]);
    reports(&folder, "check", 0, &[]);
    reports(&folder, "check --only free-index-mismatch", 1, &[MISMATCH]);
    reports(&folder, "check --only index-thrice", 0, &[]);
}

#[test]
fn a_rule_that_is_off_mends_nothing() {
    let text = "$A_i = B_i$, $A_i = C_i$, $A_i = D_i$, $B_i = C_i + D_i + E_k$";
    let folder = folder(&[("a.md", text)]);
    let mended = folder.run("check --fix --dry-run").out;
    assert!(mended.starts_with("would mend a.md:1"), "{mended}");
    std::fs::write(folder.path().join("indexwise.toml"), "[rules]\nfree-index-mismatch = \"off\"").unwrap();
    let left = folder.run("check --fix --dry-run");
    assert!(left.status == 0 && left.out.starts_with("1 file: "), "{left:?}");
}

#[test]
fn a_level_can_switch_on_a_rule_that_is_off_by_default() {
    let text = r"$q_i = \frac{\sigma_{ij} n_j}$";
    let folder = folder(&[("indexwise.toml", "[rules]\nunread = \"warning\""), ("a.md", text)]);
    let answer = folder.run("check --report lines");
    assert!(answer.status == 1 && answer.out.ends_with(" [unread]\n"), "{answer:?}");
}

#[test]
fn folders_are_searched_for_what_is_included_and_not_excluded() {
    let text = "[files]\ninclude = ['**/*.tex']\nexclude = ['old', 'sub/b.tex']";
    let files = ["a.tex", "a.md", "old/a.tex", "sub/a.tex", "sub/b.tex", "sub/old/c.tex"];
    let mut all = vec![("indexwise.toml", text)];
    all.extend(files.map(|name| (name, SLIP)));
    let folder = folder(&all);
    let found = |line: &str| {
        let report: serde_json::Value = serde_json::from_str(&folder.run(line).out).unwrap();
        let paths = report["files"].as_array().unwrap().iter().map(|file| file["path"].as_str().unwrap().to_owned());
        paths.collect::<Vec<String>>()
    };
    assert_eq!(found("check --report json"), ["a.tex", "sub/a.tex", "sub/old/c.tex"]);
    assert_eq!(found("check sub --report json"), ["sub/a.tex", "sub/old/c.tex"]);
    assert_eq!(found("check old --report json"), [""; 0]);
    // What is named is checked.
    assert_eq!(found("check old/a.tex a.md sub/b.tex --report json"), ["old/a.tex", "a.md", "sub/b.tex"]);
}

#[test]
fn a_part_that_is_excluded_still_belongs_to_its_paper() {
    let root = r"\documentclass{article}\begin{document}\input{macros}$\stress_{ij} = T_{kj}$\end{document}";
    let part = r"\newcommand{\stress}{\sigma} $A_i = B_j$";
    let toml = "[files]\nexclude = ['macros.tex']";
    let folder = folder(&[("indexwise.toml", toml), ("main.tex", root), ("macros.tex", part)]);
    reports(&folder, "check", 1, &["main.tex:1:73 error free-index-mismatch"]);
}

#[test]
fn the_nearest_file_holds_as_a_whole() {
    let folder = folder(&[
        ("indexwise.toml", "[rules]\nfree-index-mismatch = 'off'\n[files]\nexclude = ['**/b.tex']"),
        ("sub/indexwise.toml", ""),
        ("sub/deep/a.tex", SLIP),
        ("sub/b.tex", SLIP),
        ("a.tex", SLIP),
        ("b.tex", "$A_i = B_i"),
    ]);
    let inner = ["sub/b.tex:1:31 error free-index-mismatch", "sub/deep/a.tex:1:31 error free-index-mismatch"];
    reports(&folder, "check", 1, &inner);
}

#[test]
fn nothing_beyond_the_repository_is_read() {
    let folder = folder(&[("indexwise.toml", "broken"), ("inner/.git/HEAD", ""), ("inner/a.tex", SLIP)]);
    let answer = folder.run("check inner --report lines");
    assert_eq!((answer.status, answer.err.as_str()), (1, ""));
}

#[test]
fn without_a_repository_nothing_beyond_the_nearest_file_is_read() {
    let folder = tempfile::tempdir().unwrap();
    std::fs::create_dir(folder.path().join("inner")).unwrap();
    for (name, text) in [("indexwise.toml", "broken"), ("inner/indexwise.toml", ""), ("inner/a.tex", SLIP)] {
        std::fs::write(folder.path().join(name), text).unwrap();
    }
    let run = |path: &str| {
        let mut command = std::process::Command::new(env!("CARGO_BIN_EXE_indexwise"));
        command.current_dir(folder.path()).args(["check", path]).output().unwrap().status.code()
    };
    assert_eq!(run("inner"), Some(1));
    std::fs::remove_file(folder.path().join("inner/indexwise.toml")).unwrap();
    assert_eq!(run("inner"), Some(2));
}

#[test]
fn a_file_above_the_current_folder_holds_and_is_told_of_as_seen_from_here() {
    let folder = folder(&[("indexwise.toml", "[rules]\nfree-index-mismatch = 'of'"), ("sub/deep/a.tex", SLIP)]);
    let output = folder.command("check").current_dir(folder.path().join("sub/deep")).output().unwrap();
    let want = "indexwise: ../../indexwise.toml:2:23: \"of\": a level is off, hint, warning or error\n";
    assert_eq!((output.status.code(), String::from_utf8(output.stderr).unwrap().as_str()), (Some(2), want));
}

#[test]
fn standard_input_is_checked_under_the_file_of_the_current_folder() {
    let folder = folder(&[("indexwise.toml", "[rules]\nfree-index-mismatch = 'off'")]);
    let answer = folder.run_with_input("check - --host latex", SLIP.as_bytes());
    assert_eq!((answer.status, answer.err.as_str()), (0, ""));
}

#[test]
fn unknown_keys_are_told_with_the_nearest() {
    wrong(b"[rule]\n", &["1:2: rule: there is no such key; the nearest is rules"]);
    wrong(b"strict = true\n", &["1:1: strict: there is no such key; the nearest is rules"]);
    wrong(
        b"[conventions]\nline = []\n\n[files]\nexclud = []\n",
        &[
            "2:1: line: there is no such key; the nearest is lines",
            "5:1: exclud: there is no such key; the nearest is exclude",
        ],
    );
    wrong(
        "# μ\n[rules]\n\"dummy-level\" = \"off\"\n".as_bytes(),
        &["3:1: dummy-level: there is no such rule; the nearest is dummy-levels"],
    );
}

#[test]
fn wrong_types_and_levels_are_told() {
    wrong(b"rules = 3", &["1:9: rules must be a table, not an integer"]);
    wrong(b"[[files]]", &["1:1: files must be a table, not a list"]);
    wrong(b"[rules]\nunread = true", &["2:10: the level of unread must be a string, not a boolean"]);
    wrong(b"[rules]\nunread = 'Off'", &["2:10: \"Off\": a level is off, hint, warning or error"]);
    wrong(b"[files]\nexclude = 'old'", &["2:11: exclude must be a list of strings, not a string"]);
    wrong(b"[files]\ninclude = ['a',\n  1.5]", &["3:3: include must hold strings, not a number"]);
    wrong(
        b"[conventions]\nlines = [1979-05-27, {}]",
        &["2:10: lines must hold strings, not a date", "2:22: lines must hold strings, not a table"],
    );
}

#[test]
fn bad_globs_are_told() {
    for glob in ["../x", "/x", ""] {
        let answer =
            folder(&[("indexwise.toml", &format!("[files]\ninclude = ['{glob}']")), ("a.tex", "")]).run("check");
        assert_eq!(answer.status, 2, "{glob}");
        assert!(answer.err.starts_with(&format!("indexwise: indexwise.toml:2:12: \"{glob}\": ")), "{}", answer.err);
    }
    let answer = folder(&[("indexwise.toml", "[files]\nexclude = ['b', '[a']"), ("a.tex", "")]).run("check");
    assert!(answer.err.starts_with("indexwise: indexwise.toml:2:17: \"[a\": is no glob: "), "{}", answer.err);
}

#[test]
fn everything_wrong_is_told_in_order_and_much_of_it_is_counted() {
    wrong(
        b"[files]\nmacros = ['gone.sty', '.']\n[rules]\nx = 'off'\n",
        &[
            "2:11: \"gone.sty\": not found",
            "2:23: \".\": is a folder",
            "4:1: x: there is no such rule; the nearest is unread",
        ],
    );
    let many: String = (0..50).map(|at| format!("k{at} = 1\n")).collect();
    let answer = folder(&[("indexwise.toml", &many), ("a.tex", "")]).run("check");
    assert_eq!(answer.err.lines().count(), 21);
    assert!(answer.err.ends_with("indexwise: indexwise.toml: 30 more of this kind\n"), "{}", answer.err);
}

#[test]
fn broken_toml_is_told_with_its_place() {
    for (toml, place) in [
        ("[rules\n", "1:7: "),
        ("[rules]\nunread = off\n", "2:10: "),
        ("[rules]\nunread = 'off'\nunread = 'off'\n", "3:1: "),
        ("[rules]\r\nμ = 'off'\r\n", "2:1: "),
        ("\u{feff}x = [", "1:6: "),
    ] {
        let answer = folder(&[("indexwise.toml", toml), ("a.tex", SLIP)]).run("check");
        assert_eq!((answer.status, answer.out.as_str(), answer.err.lines().count()), (2, "", 1), "{toml}");
        let want = format!("indexwise: indexwise.toml:{place}is not TOML: ");
        assert!(answer.err.starts_with(&want), "{toml}: {}", answer.err);
    }
}

#[test]
fn a_file_that_is_no_text_or_too_large_is_told() {
    wrong(b"# \xe9", &[" is not UTF-8: first bad byte at offset 2"]);
    wrong(&vec![b'#'; (1 << 20) + 1], &[" is larger than 1 MiB"]);
    let comment = vec![b'#'; 1 << 20];
    assert_eq!(Folder::new(&[("indexwise.toml", &comment), ("a.md", b"")]).run("check").status, 0);
    let is_folder = folder(&[("indexwise.toml/a.md", "")]).run("check");
    assert_eq!((is_folder.status, is_folder.err.as_str()), (2, "indexwise: indexwise.toml: is a folder\n"));
}

#[cfg(unix)]
#[test]
fn a_pipe_is_no_configuration() {
    let folder = folder(&[("a.md", "")]);
    let pipe = folder.path().join("indexwise.toml");
    assert!(std::process::Command::new("mkfifo").arg(pipe).status().unwrap().success());
    let answer = folder.run("check");
    assert_eq!((answer.status, answer.err.as_str()), (2, "indexwise: indexwise.toml: is not a file\n"));
}

#[test]
fn nesting_without_end_is_told() {
    // The most that the library takes of both.
    let key = vec!["a"; 80].join(".");
    let inside = format!("{{{key} = ").repeat(80) + "1" + &"}".repeat(80);
    for toml in [
        format!("x = {}", "[".repeat(500_000)),
        format!("x = {}", "{a=".repeat(300_000)),
        vec!["a"; 500_000].join("."),
        format!("{key} = {inside}"),
        format!("[files]\ninclude = ['{}']", "{".repeat(400)),
    ] {
        let answer = folder(&[("indexwise.toml", &toml), ("a.tex", SLIP)]).run("check");
        assert_eq!((answer.status, answer.out.as_str()), (2, ""), "{}", &toml[..20]);
        assert!(answer.err.len() < 1000, "{}", answer.err);
    }
}

#[test]
fn marks_and_line_ends_of_other_systems_are_read() {
    let toml = "\u{feff}[rules]\r\nfree-index-mismatch = \"hint\"\r\n\r\n[conventions]\r\nlines = '''\r\nB is a lable\r\n'''\r\n";
    let folder = folder(&[("indexwise.toml", toml), ("a.tex", SLIP)]);
    let want = ["indexwise.toml:6:8 error convention-unreadable", "a.tex:1:31 hint free-index-mismatch"];
    reports(&folder, "check", 1, &want);
    let report: serde_json::Value = serde_json::from_str(&folder.run("check --report json").out).unwrap();
    // The place in the file, with its mark.
    let offset = toml.find("lable").unwrap();
    assert_eq!(report["files"][0]["findings"][0]["start"]["offset"], offset);
}

#[test]
fn files_with_macros_are_read_for_every_paper() {
    let sty = r"\newcommand{\stress}[2]{\sigma_{#1#2}}";
    let toml = "[files]\nmacros = ['style/extra.sty']";
    let text = r"$\stress{i}{j} = T_{ij}$ and $\stress{i}{j} = T_{kj}$";
    for name in ["a.tex", "a.md"] {
        let folder = folder(&[("indexwise.toml", toml), ("style/extra.sty", sty), (name, text)]);
        reports(&folder, "check", 1, &[&format!("{name}:1:50 error free-index-mismatch")]);
        std::fs::write(folder.path().join("indexwise.toml"), "").unwrap();
        reports(&folder, "check", 0, &[]);
    }
}

#[test]
fn a_file_with_macros_that_is_no_text_is_told() {
    let folder = Folder::new(&[("indexwise.toml", b"[files]\nmacros = ['x.sty']"), ("x.sty", b"\xff"), ("a.md", b"")]);
    let answer = folder.run("check");
    let want = "indexwise: indexwise.toml:2:11: \"x.sty\": is not UTF-8: first bad byte at offset 0\n";
    assert_eq!((answer.status, answer.err.as_str()), (2, want));
}

#[test]
fn unreadable_sentences_are_reported_once_a_run_where_they_stand() {
    let toml = "[conventions]\nlines = ['B is a label', 'B is a label; C is a lable', \"\\\\mu is a lable\"]\n";
    let folder = folder(&[("indexwise.toml", toml), ("a.tex", SLIP), ("b.md", SLIP), ("sub/c.md", "words")]);
    let own = ["indexwise.toml:2:48 error convention-unreadable", "indexwise.toml:2:56 error convention-unreadable"];
    reports(&folder, "check sub", 1, &own);
    reports(&folder, "check a.tex b.md", 1, &[own[0], own[1], MISMATCH, "b.md:1:31 error free-index-mismatch"]);
    reports(&folder, "check sub --without convention-unreadable", 0, &[]);
    let hint = format!("{toml}[rules]\nconvention-unreadable = 'hint'");
    std::fs::write(folder.path().join("indexwise.toml"), hint).unwrap();
    reports(
        &folder,
        "check sub",
        0,
        &own.map(|line| line.replace("error", "hint")).iter().map(String::as_str).collect::<Vec<_>>(),
    );
}

#[test]
fn a_configuration_file_is_shown_and_not_counted_as_a_document() {
    let toml = "[conventions]\nlines = ['''\nB is a label\nC is a lable\n''']\n";
    let folder = folder(&[("indexwise.toml", toml), ("a.md", "$A_i = B_i$")]);
    let text = folder.run("check").out;
    let want = "indexwise.toml, line 4
    C is a lable
           ^^^^^                                         convention-unreadable

    error: this sentence has no known form: `lable` is not a kind of thing;
        the nearest form is \"LETTER is a label\", as in \"B is a label\"
    4:1: the sentence

1 file: 1 formula, ";
    assert!(text.starts_with(want), "{text}");
    let report: serde_json::Value = serde_json::from_str(&folder.run("check --report json").out).unwrap();
    let statistics = serde_json::json!({"formulas": 0, "indexed": 0, "unread": 0, "unknown_macros": 0});
    assert_eq!(
        (&report["files"][0]["path"], &report["files"][0]["statistics"]),
        (&"indexwise.toml".into(), &statistics)
    );
    assert_eq!(report["files"][1]["path"], "a.md");
}

#[test]
fn fixes_go_into_documents_beside_a_configuration_with_findings() {
    let toml = "[conventions]\nlines = ['C is a lable']\n";
    let text = "$A_i = B_i$, $A_i = C_i$, $A_i = D_i$, $B_i = C_i + D_i + E_k$";
    let folder = folder(&[("indexwise.toml", toml), ("a.md", text)]);
    reports_after_fix(&folder);
    assert_eq!(folder.read("indexwise.toml"), toml.as_bytes());
    assert_eq!(folder.read("a.md"), text.replace("E_k", "E_i").as_bytes());
}

/// What was mended is told on standard error, and what is left is the configuration's.
fn reports_after_fix(folder: &Folder) {
    let answer = folder.run("check --fix --report lines");
    assert_eq!(lines(&answer), ["indexwise.toml:2:18 error convention-unreadable"]);
    assert!(answer.status == 1 && answer.err.contains("mended a.md:1"), "{answer:?}");
}

#[test]
fn conventions_can_be_named() {
    let toml = "[conventions]\nlines = ['C is a lable']\n[rules]\nfree-index-mismatch = 'hint'";
    let list = "# of the bench\nB is a label\n\n  D is a lable   # not so\n";
    let files =
        [("indexwise.toml", toml), ("bench.txt", list), ("bench.toml", "[conventions]\nlines = 'E is a lable'")];
    let folder = folder(&[&files[..], &[("a.tex", SLIP)]].concat());
    let hint = "a.tex:1:31 hint free-index-mismatch";
    reports(&folder, "check", 1, &["indexwise.toml:2:18 error convention-unreadable", hint]);
    reports(&folder, "check --conventions bench.txt", 1, &["bench.txt:4:10 error convention-unreadable", hint]);
    reports(&folder, "check --conventions bench.toml", 1, &["bench.toml:2:17 error convention-unreadable", hint]);
}

#[test]
fn conventions_that_are_named_and_cannot_be_had_are_trouble() {
    let folder = folder(&[("a.tex", SLIP), ("bad.toml", "[rules]\nx = 1"), ("sub/b.md", "")]);
    for (name, want) in [
        ("gone.txt", "gone.txt: not found"),
        ("gone.toml", "gone.toml: not found"),
        ("sub", "sub: is a folder"),
        ("bad.toml", "bad.toml:2:1: x: there is no such rule; the nearest is unread"),
    ] {
        let answer = folder.run(&format!("check --conventions {name}"));
        assert_eq!((answer.status, answer.out.as_str(), answer.err), (2, "", format!("indexwise: {want}\n")));
    }
}

#[test]
fn the_report_does_not_go_over_the_configuration() {
    let toml = "[files]\nmacros = ['x.sty']";
    let folder = folder(&[("indexwise.toml", toml), ("x.sty", ""), ("a.md", ""), ("list.txt", "")]);
    for name in ["indexwise.toml", "x.sty", "list.txt"] {
        let answer = folder.run(&format!("check --conventions list.txt --output {name}"));
        assert_eq!(answer.status, 2, "{name}");
        assert!(answer.err.contains("part of the configuration"), "{}", answer.err);
    }
    assert_eq!(folder.read("indexwise.toml"), toml.as_bytes());
}

#[test]
fn a_part_is_checked_under_the_file_that_is_nearest_to_it() {
    let root = r"\documentclass{article}\begin{document}\input{sub/part}";
    let root = format!("{root}{SLIP}\\end{{document}}");
    let folder = folder(&[
        ("indexwise.toml", ""),
        ("main.tex", &root),
        ("sub/part.tex", SLIP),
        ("sub/indexwise.toml", "[rules]\nfree-index-mismatch = 'hint'"),
    ]);
    let part = "sub/part.tex:1:31 hint free-index-mismatch";
    let root = "main.tex:1:86 error free-index-mismatch";
    reports(&folder, "check sub", 0, &[part]);
    reports(&folder, "check", 1, &[root, part]);
    reports(&folder, "check sub main.tex", 1, &[part, root]);
}
