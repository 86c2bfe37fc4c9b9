//! Checks many files: groups them into papers, checks the papers in parallel, and puts the results back into
//! the order of the files.
//!
//! A panic in one paper becomes one line; the other papers go on. The checker is a parameter, so that tests can
//! put one in its place that finds what they need.

use std::collections::HashMap;
use std::path::PathBuf;

use indexwise_checker::paper::{Analysis, DocumentAnalysis, Paper};
use rayon::prelude::*;
use rayon::{ThreadPool, ThreadPoolBuilder};

use crate::files::{Failure, Listed, Text};
use crate::mend::{self, Mended};
use crate::panics;
use crate::progress::Progress;
use crate::project::{Loaded, Overlay, PaperKey, Roots, Texts, load};
use crate::reports::FileReport;

/// Stack of a worker, in bytes: nesting is capped in the grammar, and this holds what the cap allows.
const STACK: usize = 16 << 20;

/// What judges a paper.
pub type Checker<'a> = dyn Fn(&Paper) -> Analysis + Sync + 'a;

/// What came out, in the order of the files.
#[derive(Debug, Default)]
pub struct Outcome {
    /// What was found in each file that could be checked.
    pub files: Vec<FileReport>,
    /// What was mended in them and what was left; empty unless mending was asked for.
    pub mended: Vec<Mended>,
    /// What went wrong.
    pub failures: Vec<Failure>,
}

/// How a run is done.
pub struct Run<'a> {
    /// The checker.
    pub checker: &'a Checker<'a>,
    /// Whether fixes are applied (to the texts in memory).
    pub mend: bool,
    /// The bar to move.
    pub progress: &'a Progress,
}

/// The workers.
pub fn pool(jobs: Option<u16>) -> Result<ThreadPool, Failure> {
    let builder = ThreadPoolBuilder::new().num_threads(jobs.unwrap_or(0).into()).stack_size(STACK);
    builder.build().map_err(|error| Failure::new("--jobs", error))
}

/// Checks the files.
pub fn check(listed: &[Listed], disk: &dyn Texts, run: &Run) -> Outcome {
    let mut texts = Overlay::new(disk);
    for file in listed {
        if let Some(text) = &file.given {
            texts.lay(file.path.clone(), text.clone());
        }
    }
    let roots = Roots::new(&texts);
    let papers = papers(listed, &texts, &roots);
    let mut results: Vec<Share> = papers
        .into_par_iter()
        .flat_map_iter(|paper| {
            let results = check_paper(&paper, listed, &texts, run);
            run.progress.advance(paper.members.len());
            results
        })
        .collect();
    results.sort_by_key(|(place, _)| *place);
    let mut outcome = Outcome::default();
    for (_, result) in results {
        match result {
            Ok(checked) => {
                outcome.files.push(checked.report);
                outcome.mended.extend(checked.mended);
            }
            Err(failure) => outcome.failures.push(failure),
        }
    }
    outcome
}

/// A paper with those of its files that are to be reported on, as places in the list.
struct Group {
    key: Result<PaperKey, Failure>,
    members: Vec<usize>,
}

/// The place of a file in the list, and what came of it.
type Share = (usize, Result<Checked, Failure>);

/// What was found in a file.
struct Checked {
    report: FileReport,
    mended: Option<Mended>,
}

fn papers(listed: &[Listed], texts: &dyn Texts, roots: &Roots) -> Vec<Group> {
    let keys: Vec<Result<PaperKey, Failure>> = listed
        .par_iter()
        .map(|file| {
            panics::caught(|| {
                // A file that cannot be read is told of by itself, whatever paper it might belong to.
                let readable = texts.read(&file.path).map_err(|cause| Failure::new(&file.shown, cause));
                readable.map(|_| roots.paper_of(&file.path, file.host, file.given.is_none()))
            })
            .unwrap_or_else(|cause| Err(Failure(internal_error(&file.shown, 1, &cause))))
        })
        .collect();
    let mut groups: Vec<Group> = Vec::new();
    let mut known: HashMap<PaperKey, usize> = HashMap::new();
    for (place, key) in keys.into_iter().enumerate() {
        let seen = key.as_ref().ok().and_then(|key| known.get(key)).and_then(|at| groups.get_mut(*at));
        if let Some(group) = seen {
            group.members.push(place);
            continue;
        }
        if let Ok(key) = &key {
            known.insert(key.clone(), groups.len());
        }
        groups.push(Group { key, members: vec![place] });
    }
    groups
}

fn check_paper(paper: &Group, listed: &[Listed], texts: &dyn Texts, run: &Run) -> Vec<Share> {
    let members: Vec<(usize, &Listed)> =
        paper.members.iter().filter_map(|place| Some((*place, listed.get(*place)?))).collect();
    let Some(&(first, file)) = members.first() else { return Vec::new() };
    let key = match &paper.key {
        Ok(key) => key,
        Err(failure) => return vec![(first, Err(failure.clone()))],
    };
    let checked = panics::caught(|| check_members(key, &members, texts, run));
    match checked {
        Ok(Ok(results)) => results,
        Ok(Err(cause)) => vec![(first, Err(Failure::new(&file.shown, cause)))],
        Err(cause) => vec![(first, Err(Failure(internal_error(&file.shown, members.len(), &cause))))],
    }
}

fn internal_error(path: &str, files: usize, cause: &str) -> String {
    let others = if files > 1 { format!(" and {} more of its paper", files - 1) } else { String::new() };
    format!("internal error while checking {path}{others}: {cause}")
}

fn check_members(
    key: &PaperKey,
    members: &[(usize, &Listed)],
    texts: &dyn Texts,
    run: &Run,
) -> Result<Vec<Share>, String> {
    let loaded = load(texts, key)?;
    let analysis = (run.checker)(&loaded.paper);
    let mut results: Vec<_> = members.iter().map(|(place, file)| (*place, checked(&loaded, &analysis, file))).collect();
    if run.mend {
        let wanted: Vec<(PathBuf, &str)> =
            members.iter().map(|(_, file)| (file.path.clone(), file.shown.as_str())).collect();
        let mended = mend::mend(texts, key, &wanted, run.checker, (loaded, analysis))?;
        for ((_, checked), mended) in results.iter_mut().zip(mended) {
            if let Ok(checked) = checked {
                checked.mended = Some(mended);
            }
        }
    }
    Ok(results)
}

/// A file's share. A budget may have ended the reading of the paper before it came to the file; silence would
/// then pass for a clean file.
fn checked(loaded: &Loaded, analysis: &Analysis, file: &Listed) -> Result<Checked, Failure> {
    let not_read = || Failure::new(&file.shown, "was not checked: its paper is too large");
    let document = loaded.document(&file.path).ok_or_else(not_read)?;
    let found = analysis.documents.get(document).cloned().unwrap_or_default();
    let text = loaded.origins.get(document).map(|origin| &origin.text);
    Ok(Checked { report: report_of(&file.shown, file, found, text), mended: None })
}

fn report_of(shown: &str, file: &Listed, found: DocumentAnalysis, text: Option<&Text>) -> FileReport {
    // Without findings nobody asks for the text again, and a large archive need not be held in memory.
    let text = text.filter(|_| !found.findings.is_empty()).cloned().unwrap_or_default();
    FileReport { path: shown.to_owned(), host: file.host, statistics: found.statistics, findings: found.findings, text }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic)]
    use super::*;
    use crate::files;
    use crate::project::Disk;
    use indexwise_grammar::hosts::Host;
    use std::fs;

    fn folder(files: &[(&str, &[u8])]) -> tempfile::TempDir {
        let folder = tempfile::tempdir().unwrap();
        for (name, bytes) in files {
            fs::write(folder.path().join(name), bytes).unwrap();
        }
        folder
    }

    fn run_on(folder: &tempfile::TempDir, checker: &Checker) -> Outcome {
        let (listed, _) = files::find(&[folder.path().to_owned()], Host::Latex);
        let progress = Progress::new(listed.len(), false);
        let run = Run { checker, mend: false, progress: &progress };
        pool(Some(2)).unwrap().install(|| check(&listed, &Disk, &run))
    }

    fn nothing(paper: &Paper) -> Analysis {
        Analysis { documents: paper.documents.iter().map(|_| DocumentAnalysis::default()).collect() }
    }

    #[test]
    fn a_panic_in_one_paper_is_one_failure_and_the_others_go_on() {
        let folder = folder(&[("a.md", b"a"), ("b.md", b"bad"), ("c.md", b"c")]);
        let checker = |paper: &Paper| {
            assert!(paper.documents.iter().all(|source| &*source.text != "bad"), "no way");
            nothing(paper)
        };
        let outcome = run_on(&folder, &checker);
        let names: Vec<_> = outcome.files.iter().map(|file| file.path.rsplit('/').next().unwrap()).collect();
        assert_eq!(names, ["a.md", "c.md"]);
        let [Failure(line)] = outcome.failures.as_slice() else { panic!("{:?}", outcome.failures) };
        assert!(line.starts_with("internal error while checking ") && line.contains("b.md: no way"), "{line}");
    }

    #[test]
    fn an_unreadable_file_does_not_stop_the_others() {
        let folder = folder(&[("a.md", b"\xff"), ("b.md", b"b")]);
        let outcome = run_on(&folder, &nothing);
        assert_eq!(outcome.files.len(), 1);
        let [Failure(line)] = outcome.failures.as_slice() else { panic!("{:?}", outcome.failures) };
        assert!(line.ends_with("a.md: is not UTF-8: first bad byte at offset 0"), "{line}");
    }

    #[test]
    fn a_paper_is_checked_once_for_all_its_files() {
        let root: &[u8] = b"\\documentclass{article}\\begin{document}\\input{part}\\end{document}";
        let folder = folder(&[("main.tex", root), ("part.tex", b"x")]);
        let count = std::sync::atomic::AtomicUsize::new(0);
        let checker = |paper: &Paper| {
            count.fetch_add(1, std::sync::atomic::Ordering::Relaxed);
            assert_eq!(paper.documents.len(), 2);
            nothing(paper)
        };
        let outcome = run_on(&folder, &checker);
        assert_eq!((outcome.files.len(), outcome.failures), (2, Vec::new()));
        assert_eq!(count.into_inner(), 1);
    }
}
