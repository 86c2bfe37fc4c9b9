//! `indexwise init`: what it writes, that it changes no report, and when it refuses.

#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic)]

// Generated documents, which the program's own crate does not know.
#[allow(dead_code)]
#[path = "../../../tests/generate.rs"]
mod generate;
mod run;

use std::fs;
use std::path::Path;

use run::{Folder, SLIP};

const FILE: &str = "indexwise.toml";

/// A note on a bench with all indices down, in which a formula states a symmetry.
const NOTE: &str = "Bench notes, the collar

  sigma_ij = C_ijkl E_kl
  t_i = sigma_ij n_j
  q_i = K_ij h_j
  K_ij = K_ji
  A_ij = B_ik F_kj
";

/// All reports of a folder's documents, without the time that they took.
fn reports(folder: &Folder) -> String {
    let report = |kind: &str| {
        let answer = folder.run(&format!("check --steps off --report {kind}"));
        assert_eq!(answer.err, "");
        let timeless = answer.out.lines().map(|line| line.split(" hints; ").next().unwrap().to_owned() + "\n");
        format!("{}\n{}", answer.status, timeless.collect::<String>())
    };
    ["text", "lines", "json", "json-lines --only unread", "json --strict"].map(report).join("\n")
}

/// Runs `init`: what is written is what a dry run prints, and every report stays as it is. The answer is the file.
#[track_caller]
fn init(folder: &Folder) -> String {
    let before = reports(folder);
    let dry = folder.run("init --dry-run");
    assert_eq!((dry.status, dry.err.as_str()), (0, ""));
    assert!(!folder.path().join(FILE).exists());
    let answer = folder.run("init");
    assert_eq!((answer.status, answer.err.as_str()), (0, ""), "{answer:?}");
    assert!(answer.out.starts_with("indexwise.toml: written with "), "{}", answer.out);
    let text = String::from_utf8(folder.read(FILE)).unwrap();
    assert_eq!(text, dry.out);
    assert_eq!(reports(folder), before, "{text}");
    text
}

/// The sentences in force, and those that are comments.
fn sentences(text: &str) -> (Vec<String>, Vec<String>) {
    let table = toml::de::DeTable::parse(text).unwrap();
    let table = table.get_ref();
    let inner = |name: &str| table.get(name).and_then(|value| value.get_ref().as_table()).unwrap();
    let lines = inner("conventions").get("lines").and_then(|lines| lines.get_ref().as_array()).unwrap();
    let force = lines.iter().map(|line| line.get_ref().as_str().unwrap().to_owned()).collect();
    let out = text.lines().filter_map(|line| line.trim().strip_prefix("# '")?.strip_suffix("',")).map(str::to_owned);
    (force, out.collect())
}

fn documents(into: &Folder, from: &Path) {
    for entry in fs::read_dir(from).unwrap() {
        let path = entry.unwrap().path();
        let name = path.file_name().unwrap().to_str().unwrap();
        if path.is_dir() {
            documents(into, &path);
        } else {
            let root = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../tests/documents");
            let place = into.path().join("paper").join(path.strip_prefix(root).unwrap_or(Path::new(name)));
            fs::create_dir_all(place.parent().unwrap()).unwrap();
            fs::copy(&path, place).unwrap();
        }
    }
}

#[test]
fn an_empty_folder_gets_examples() {
    let text = init(&Folder::new(&[]));
    let (force, examples) = sentences(&text);
    assert_eq!(force, [""; 0]);
    assert!(examples.contains(&r"a_{\alpha \beta} is the metric".to_owned()), "{examples:?}");
    for table in ["[conventions]", "# [rules]", "# [files]"] {
        assert!(text.contains(table), "{table}: {text}");
    }
}

#[test]
fn the_examples_are_right_when_they_are_uncommented() {
    let folder = Folder::new(&[("style/shell.sty", b""), ("paper/a.md", b"words")]);
    let text = init(&folder);
    let uncomment = |line: &str| match line.trim_start().strip_prefix("# ") {
        Some(rest) if rest.starts_with(['\'', '[']) || rest.contains(" = ") => rest.to_owned() + "\n",
        _ => line.to_owned() + "\n",
    };
    fs::write(folder.path().join(FILE), text.lines().map(uncomment).collect::<String>()).unwrap();
    let answer = folder.run("check --strict");
    assert_eq!((answer.status, answer.err.as_str()), (0, ""), "{}", answer.out);
}

#[test]
fn a_note_with_all_indices_down_implies_its_family_and_a_stated_symmetry() {
    let text = init(&Folder::new(&[("notes/bench.inote", NOTE.as_bytes())]));
    let (force, out) = sentences(&text);
    assert_eq!(force, ["i j k l range over n dimensions", "i j k l are cartesian", "K_{i j} is symmetric"]);
    assert_eq!(out, [""; 0]);
    assert!(text.contains("# a formula states it: notes/bench.inote, line 6\n"), "{text}");
}

#[test]
fn the_demonstration_documents_keep_their_reports() {
    let folder = Folder::new(&[]);
    documents(&folder, &Path::new(env!("CARGO_MANIFEST_DIR")).join("../../tests/documents"));
    let (force, _) = sentences(&init(&folder));
    assert!(!force.is_empty());
}

#[test]
fn generated_documents_keep_their_reports() {
    let files: Vec<(String, String)> =
        (0..3).map(|seed| (format!("series-{seed}.tex"), generate::document(seed, 12_000))).collect();
    let files: Vec<(&str, &[u8])> = files.iter().map(|(name, text)| (name.as_str(), text.as_bytes())).collect();
    let (force, _) = sentences(&init(&Folder::new(&files)));
    assert!(force.iter().any(|sentence| sentence.contains(" range over ")), "{force:?}");
}

#[test]
fn a_sentence_that_would_change_a_report_is_a_comment_that_says_so() {
    // K is said to be symmetric, and contracted with an epsilon: to declare it brings a finding.
    let note = NOTE.to_owned() + "  m_i = epsilon_ijk K_jk\n";
    let text = init(&Folder::new(&[("bench.inote", note.as_bytes())]));
    let (force, out) = sentences(&text);
    assert_eq!(out, ["K_{i j} is symmetric"]);
    assert!(force.iter().any(|sentence| sentence.contains(" range over ")), "{force:?}");
    let comment = "    # a formula states it: bench.inote, line 6\n    # left out, since it adds 1 finding:\n    # 'K_";
    assert!(text.contains(comment), "{text}");
}

#[test]
fn a_folder_can_be_named_and_another_stays_as_it_is() {
    let folder = Folder::new(&[("a/x.inote", NOTE.as_bytes()), ("b/y.md", SLIP.as_bytes())]);
    let answer = folder.run("init a");
    assert_eq!((answer.status, answer.err.as_str()), (0, ""));
    assert!(answer.out.starts_with("a/indexwise.toml: written with 3 sentences in force"), "{}", answer.out);
    assert!(folder.path().join("a").join(FILE).is_file() && !folder.path().join(FILE).exists());
}

#[test]
fn a_file_that_is_there_is_not_written_over() {
    for line in ["init", "init --dry-run", "init ."] {
        let folder = Folder::new(&[("a.inote", NOTE.as_bytes()), (FILE, b"# ours\n")]);
        let answer = folder.run(line);
        assert_eq!((answer.status, answer.out.as_str()), (2, ""), "{line}");
        assert_eq!(answer.err, "indexwise: indexwise.toml: is there already, and is not written over\n");
        assert_eq!(folder.read(FILE), b"# ours\n");
    }
}

#[test]
fn a_folder_for_which_another_file_holds_is_refused() {
    let folder = Folder::new(&[("a/x.inote", NOTE.as_bytes()), (FILE, b"[rules]\ndummy-levels = 'off'\n")]);
    let answer = folder.run("init a");
    assert_eq!((answer.status, answer.out.as_str()), (2, ""));
    assert!(answer.err.ends_with("indexwise.toml holds here already; add to that one\n"), "{}", answer.err);
    assert!(!folder.path().join("a").join(FILE).exists());
}

#[test]
fn a_nearer_file_keeps_its_word() {
    let inner: &[u8] = b"[conventions]\nlines = ['K_ij is antisymmetric']\n[files]\nexclude = ['old.inote']\n";
    let slip = format!("{NOTE}  t_i = s_j\n");
    let files: [(&str, &[u8]); 4] = [
        ("a.inote", NOTE.as_bytes()),
        ("inner/b.inote", slip.as_bytes()),
        ("inner/old.inote", b"  x_i = y_j\n"),
        ("inner/indexwise.toml", inner),
    ];
    init(&Folder::new(&files));
}

#[test]
fn trouble_is_told() {
    let folder = Folder::new(&[("a.md", b"\xff"), ("b.inote", NOTE.as_bytes()), ("inner/c.md", b"words")]);
    for (line, told) in [("init gone", "gone: not found"), ("init a.md", "a.md: is not a folder")] {
        let answer = folder.run(line);
        assert_eq!((answer.status, answer.err), (2, format!("indexwise: {told}\n")), "{line}");
    }
    // What can be read is written down all the same.
    let answer = folder.run("init");
    assert_eq!(answer.status, 2);
    assert_eq!(answer.err, "indexwise: ./a.md: is not UTF-8: first bad byte at offset 0\n");
    assert_eq!(sentences(&String::from_utf8(folder.read(FILE)).unwrap()).0.len(), 3);
    fs::remove_file(folder.path().join(FILE)).unwrap();
    fs::write(folder.path().join("inner").join(FILE), "lines = ").unwrap();
    let answer = folder.run("init");
    assert_eq!(answer.status, 2);
    assert!(answer.err.contains("inner/indexwise.toml:1:"), "{}", answer.err);
    assert!(!folder.path().join(FILE).exists());
}

#[test]
fn parts_outside_the_folder_are_told_of() {
    // Without a repository the file makes its folder a project, and the part beside it is outside.
    let folder = tempfile::tempdir().unwrap();
    let (root, part) = (folder.path().join("a/sub/main.tex"), folder.path().join("a/part.tex"));
    fs::create_dir_all(root.parent().unwrap()).unwrap();
    fs::write(
        &root,
        "\\documentclass{article}\\begin{document}\\input{../part}$t_i = \\sigma_{ij} n_j$\\end{document}",
    )
    .unwrap();
    fs::write(&part, "$q_i = K_{ij} h_j$").unwrap();
    let mut command = std::process::Command::new(env!("CARGO_BIN_EXE_indexwise"));
    let output = command.current_dir(folder.path()).args(["init", "a"]).output().unwrap();
    let told = String::from_utf8(output.stderr).unwrap();
    assert_eq!(output.status.code(), Some(0), "{told}");
    assert!(told.contains("a/indexwise.toml: makes its folder one project"), "{told}");
}
