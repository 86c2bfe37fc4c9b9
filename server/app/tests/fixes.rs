//! `--fix` on copies of the demonstration documents: what is mended and what is left, that nothing else changes, and
//! that a process that is killed in the midst of it leaves every file whole.

#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic)]

mod run;

use std::collections::BTreeMap;
use std::fs;
use std::path::{Path, PathBuf};

use run::{Folder, SLIP};
use serde_json::Value;

/// A file with a byte-order mark and the line ends of another system, to see that it keeps them.
const FOREIGN: &str = "shell-waves/paper.tex";
/// The slips with one smallest change that a majority backs, and that change.
const MENDED: [(&str, &str); 4] = [
    ("field-notes.inote", "Write j for l in E_il"),
    (FOREIGN, "Write β for δ in a_{\\alpha\\delta}"),
    ("shell-waves/review.md", "Write μ for the dummy γ in its 4 places"),
    ("shell-waves/sections/stresses.tex", "Close the brace before N^{\\alpha\\beta}"),
];

/// A copy of the documents.
fn documents() -> Folder {
    let root = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../tests/documents");
    let folder = Folder::new(&[]);
    let mut open = vec![PathBuf::new()];
    while let Some(inside) = open.pop() {
        fs::create_dir_all(folder.path().join(&inside)).unwrap();
        for entry in fs::read_dir(root.join(&inside)).unwrap() {
            let entry = entry.unwrap();
            let name = inside.join(entry.file_name());
            if entry.file_type().unwrap().is_dir() {
                open.push(name);
            } else {
                fs::write(folder.path().join(&name), fs::read(entry.path()).unwrap()).unwrap();
            }
        }
    }
    let text = String::from_utf8(folder.read(FOREIGN)).unwrap();
    fs::write(folder.path().join(FOREIGN), format!("\u{feff}{}", text.replace('\n', "\r\n"))).unwrap();
    folder
}

/// All files of a folder by name.
fn files(folder: &Folder) -> BTreeMap<String, Vec<u8>> {
    let answer = folder.run("check --report json");
    let report: Value = serde_json::from_str(&answer.out).unwrap();
    let names = report["files"].as_array().unwrap().iter().map(|file| file["path"].as_str().unwrap().to_owned());
    names.map(|name| (name.clone(), folder.read(&name))).collect()
}

/// The bytes with the edits of the first fix of each finding that may be applied in bulk, as the report states them.
fn with_edits(bytes: &[u8], file: &Value) -> Vec<u8> {
    let mut edits: Vec<(usize, usize, String)> = Vec::new();
    for finding in file["findings"].as_array().unwrap() {
        let fix = finding["fixes"].as_array().unwrap().iter().find(|fix| fix["bulk"] == true);
        for edit in fix.iter().flat_map(|fix| fix["edits"].as_array().unwrap()) {
            let offset = |end: &str| usize::try_from(edit[end]["offset"].as_u64().unwrap()).unwrap();
            edits.push((offset("start"), offset("end"), edit["text"].as_str().unwrap().to_owned()));
        }
    }
    edits.sort();
    let mut bytes = bytes.to_vec();
    for (start, end, text) in edits.into_iter().rev() {
        bytes.splice(start..end, text.into_bytes());
    }
    bytes
}

#[test]
fn the_documents_are_mended_where_one_change_is_sure_and_nowhere_else() {
    let folder = documents();
    let before = files(&folder);
    let report: Value = serde_json::from_str(&folder.run("check --report json").out).unwrap();
    let found: usize =
        report["files"].as_array().unwrap().iter().map(|f| f["findings"].as_array().unwrap().len()).sum();

    let answer = folder.run("check --fix --report lines");
    assert_eq!(answer.status, 1, "slips are left: {answer:?}");
    let (mended, left): (Vec<&str>, Vec<&str>) =
        answer.err.lines().filter(|line| !line.is_empty()).partition(|line| line.starts_with("mended "));
    for (line, (name, title)) in mended.iter().zip(MENDED) {
        assert!(line.starts_with(&format!("mended {name}:")) && line.ends_with(title), "{line}");
    }
    assert_eq!((mended.len(), left.len()), (MENDED.len(), found - MENDED.len()), "{}", answer.err);
    assert!(left.iter().all(|line| line.starts_with("left ") && line.ends_with(')')), "{}", answer.err);
    assert_eq!(answer.out.lines().count(), left.len(), "what was left is reported: {}", answer.out);

    for file in report["files"].as_array().unwrap() {
        let name = file["path"].as_str().unwrap();
        let (want, now) = (with_edits(&before[name], file), folder.read(name));
        assert!(now == want, "{name}:\n{}\nand not\n{}", String::from_utf8_lossy(&now), String::from_utf8_lossy(&want));
    }
    let foreign = folder.read(FOREIGN);
    assert!(foreign.starts_with(b"\xef\xbb\xbf") && foreign != before[FOREIGN]);
}

#[test]
fn a_second_run_finds_nothing_more_to_mend() {
    let folder = documents();
    folder.run("check --fix");
    let once = files(&folder);
    let answer = folder.run("check --fix --report lines");
    assert_eq!(answer.status, 1);
    assert!(answer.err.lines().all(|line| line.is_empty() || line.starts_with("left ")), "{}", answer.err);
    assert_eq!(files(&folder), once);
}

#[cfg(unix)]
mod on_unix {
    use super::*;
    use std::os::unix::fs::{MetadataExt, PermissionsExt};
    use std::process::Stdio;
    use std::thread::sleep;
    use std::time::Duration;

    fn metadata(folder: &Folder, name: &str) -> fs::Metadata {
        fs::metadata(folder.path().join(name)).unwrap()
    }

    #[test]
    fn permissions_are_kept_and_only_mended_files_are_written() {
        let folder = documents();
        for (at, (name, _)) in MENDED.iter().enumerate() {
            let mode = [0o640, 0o600, 0o664, 0o755].get(at).copied().unwrap_or(0o644);
            fs::set_permissions(folder.path().join(name), fs::Permissions::from_mode(mode)).unwrap();
        }
        let modes = |folder: &Folder| MENDED.map(|(name, _)| metadata(folder, name).permissions().mode());
        let inodes = |folder: &Folder| MENDED.map(|(name, _)| metadata(folder, name).ino());
        let before = modes(&folder);
        folder.run("check --fix");
        assert_eq!(modes(&folder), before);
        // A file that is written is another one under the same name.
        let once = inodes(&folder);
        folder.run("check --fix");
        assert_eq!(inodes(&folder), once);
    }

    /// So many files are to be mended, each of so many bytes, and so many times the process is killed at it.
    const FILES: usize = 10;
    const BYTES: usize = 400_000;
    const KILLS: usize = 10;

    #[test]
    fn a_killed_process_leaves_each_file_old_or_new() {
        let prose = "The shell is thin and the waves are long.\n".repeat(BYTES / 42);
        let old = format!("{prose}{SLIP}\n{prose}");
        let new = old.replace("E_k", "E_i");
        let names: Vec<String> = (0..FILES).map(|at| format!("a{at}.md")).collect();
        let mut ended_by_us = 0;
        for round in 0..KILLS {
            let files: Vec<(&str, &[u8])> = names.iter().map(|name| (name.as_str(), old.as_bytes())).collect();
            let folder = Folder::new(&files);
            ended_by_us += usize::from(killed(&folder, &names, round));
            for name in &names {
                let now = folder.read(name);
                assert!(now == old.as_bytes() || now == new.as_bytes(), "{name}, round {round}: {} bytes", now.len());
            }
            if round == 0 {
                // Whatever the killed process left behind is no document, and the work can be done again.
                assert_eq!(folder.run("check --fix").status, 0);
                assert!(names.iter().all(|name| folder.read(name) == new.as_bytes()));
            }
        }
        assert!(ended_by_us > 0, "no process was killed before its end");
    }

    /// Kills the program when it has written some of the files, more of them in each round, and is most likely at
    /// the next; tells whether that was in time.
    fn killed(folder: &Folder, names: &[String], round: usize) -> bool {
        let inodes = || names.iter().map(|name| metadata(folder, name).ino()).collect::<Vec<_>>();
        let before = inodes();
        let mut command = folder.command("check --fix --no-progress");
        let mut child = command.stdout(Stdio::null()).stderr(Stdio::null()).spawn().unwrap();
        let written = || inodes().iter().zip(&before).filter(|(now, before)| now != before).count();
        let wanted = round % (FILES - 1);
        while child.try_wait().unwrap().is_none() && written() < wanted {
            sleep(Duration::from_micros(100));
        }
        sleep(Duration::from_micros(170 * round as u64));
        child.kill().unwrap();
        child.wait().unwrap().code().is_none()
    }
}
