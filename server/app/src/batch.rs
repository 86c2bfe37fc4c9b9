//! Checks many files: groups them into papers, checks the papers in parallel, and hands the results on in the order
//! of the files while the work goes on, so that a report on a large archive need not be held in memory.
//!
//! A panic in one paper becomes one line; the other papers go on. The checker is a parameter, so that tests can
//! put one in its place that finds what they need.

use std::collections::{BTreeMap, HashMap};
use std::path::PathBuf;
use std::sync::{Mutex, MutexGuard, PoisonError};

use indexwise_checker::paper::{Analysis, DocumentAnalysis, Settings, Statistics, problems};
use rayon::prelude::*;
use rayon::{ThreadPool, ThreadPoolBuilder};

use crate::configuration::Scopes;
use crate::files::{Failure, Listed, Text};
use crate::mend::{self, Checker, Mended};
use crate::panics;
use crate::progress::Progress;
use crate::project::{Loaded, Overlay, PaperKey, Roots, Texts, load};
use crate::reports::FileReport;

/// Stack of a worker, in bytes: nesting is capped in the grammar, and this holds what the cap allows.
const STACK: usize = 16 << 20;

/// What came out besides the reports, in the order of the files.
#[derive(Debug, Default)]
pub struct Outcome {
    /// What was mended in the files and what was left; empty unless mending was asked for.
    pub mended: Vec<Mended>,
    /// What went wrong.
    pub failures: Vec<Failure>,
}

/// Takes the reports, file by file in the order of the files, each as soon as all before it are there. The answer is
/// whether more are wanted.
pub type Taker<'a> = dyn FnMut(FileReport) -> bool + Send + 'a;

/// How a run is done.
pub struct Run<'a> {
    /// The checker.
    pub checker: &'a Checker<'a>,
    /// Whether fixes are applied (to the texts in memory).
    pub mend: bool,
    /// What is said of the files from outside; their folders were entered.
    pub scopes: &'a Scopes,
    /// The bar to move.
    pub progress: &'a Progress,
}

/// The workers.
pub fn pool(jobs: Option<u16>) -> Result<ThreadPool, Failure> {
    let builder = ThreadPoolBuilder::new().num_threads(jobs.unwrap_or(0).into()).stack_size(STACK);
    builder.build().map_err(|error| Failure::new("--jobs", error))
}

/// Checks the files.
pub fn check(listed: &[Listed], disk: &dyn Texts, run: &Run, taker: &mut Taker) -> Outcome {
    let mut texts = Overlay::new(disk);
    for file in listed {
        if let Some(text) = &file.given {
            texts.lay(file.path.clone(), text.clone());
        }
    }
    let roots = Roots::new(&texts);
    let papers = papers(listed, &texts, &roots);
    let queue =
        Mutex::new(Queue { taker, wanted: true, next: 0, waiting: BTreeMap::new(), outcome: Outcome::default() });
    // A bridge gives the papers out in their order, so that few results wait for those before them.
    papers.into_iter().par_bridge().for_each(|paper| {
        if !locked(&queue).wanted {
            return;
        }
        let shares = check_paper(&paper, listed, &texts, run);
        run.progress.advance(paper.members.len());
        locked(&queue).put(&paper.members, shares);
    });
    queue.into_inner().unwrap_or_else(PoisonError::into_inner).outcome
}

fn locked<'m, 'q, 't>(queue: &'m Mutex<Queue<'q, 't>>) -> MutexGuard<'m, Queue<'q, 't>> {
    queue.lock().unwrap_or_else(PoisonError::into_inner)
}

/// Puts the results into the order of the files and hands them on.
struct Queue<'q, 't> {
    taker: &'q mut Taker<'t>,
    wanted: bool,
    next: usize,
    waiting: BTreeMap<usize, Option<Result<Checked, Failure>>>,
    outcome: Outcome,
}

impl Queue<'_, '_> {
    /// Takes what came of a paper. One failure may stand for all its members, so the others may have no result.
    fn put(&mut self, members: &[usize], shares: Vec<Share>) {
        self.waiting.extend(members.iter().map(|place| (*place, None)));
        self.waiting.extend(shares.into_iter().map(|(place, result)| (place, Some(result))));
        while let Some(result) = self.waiting.remove(&self.next) {
            self.next += 1;
            match result {
                Some(Ok(checked)) => {
                    self.wanted = self.wanted && (self.taker)(checked.report);
                    self.outcome.mended.extend(checked.mended);
                }
                Some(Err(failure)) => self.outcome.failures.push(failure),
                None => {}
            }
        }
    }
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
        Ok(Err(cause)) => members.iter().map(|(place, file)| (*place, Err(not_loaded(key, file, &cause)))).collect(),
        Err(cause) => vec![(first, Err(Failure(internal_error(&file.shown, members.len(), &cause))))],
    }
}

/// The root could be read when its paper was looked for, and cannot be read any more.
fn not_loaded(key: &PaperKey, file: &Listed, cause: &str) -> Failure {
    if file.path == key.root {
        return Failure::new(&file.shown, cause);
    }
    Failure::new(&file.shown, format!("was not checked: its main file {} cannot be read: {cause}", key.root.display()))
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
    // All members have the scope of the root.
    let scope = members.first().map(|(_, file)| run.scopes.of(&file.path)).unwrap_or_default();
    let loaded = load(texts, key, &scope)?;
    let analysis = (run.checker)(&loaded.paper, &scope);
    let mut results: Vec<_> = members.iter().map(|(place, file)| (*place, checked(&loaded, &analysis, file))).collect();
    if run.mend {
        let wanted: Vec<(PathBuf, &str)> =
            members.iter().map(|(_, file)| (file.path.clone(), file.shown.as_str())).collect();
        let mended = mend::mend(texts, (key, &scope), &wanted, run.checker, (loaded, analysis))?;
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

/// What is wrong with the conventions of configuration files: a report for each that has something, once for all the
/// papers that share them.
pub fn configurations(scopes: &Scopes, settings: &Settings) -> Vec<FileReport> {
    let reports = scopes.with_conventions().iter().map(|configuration| {
        let mut findings = problems(&configuration.conventions);
        Settings { levels: configuration.levels.clone(), ..settings.clone() }.settle(&mut findings);
        let (path, text) = (configuration.conventions.path.clone(), configuration.text.clone());
        FileReport {
            path,
            host: None,
            statistics: Statistics::default(),
            findings,
            symbols: None,
            steps: Vec::new(),
            text,
        }
    });
    reports.filter(|report| !report.findings.is_empty()).collect()
}

fn report_of(shown: &str, file: &Listed, found: DocumentAnalysis, text: Option<&Text>) -> FileReport {
    // Without places nobody asks for the text again, and a large archive need not be held in memory.
    let has_places = !found.findings.is_empty()
        || !found.steps.is_empty()
        || found.symbols.as_ref().is_some_and(|symbols| !symbols.is_empty());
    let text = text.filter(|_| has_places).cloned().unwrap_or_default();
    FileReport {
        path: shown.to_owned(),
        host: Some(file.host),
        statistics: found.statistics,
        findings: found.findings,
        symbols: found.symbols,
        steps: found.steps,
        text,
    }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::indexing_slicing)]
    use indexwise_checker::paper::Paper;

    use super::*;
    use crate::configuration::Scope;
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

    /// The names of the files that were reported on, and what went wrong; no report is wanted after `last`.
    fn run_until(last: &str, jobs: u16, folder: &tempfile::TempDir, checker: &Checker) -> (Vec<String>, Vec<Failure>) {
        let (listed, _) = files::find(&[folder.path().to_owned()], Host::Latex, &mut |_| true);
        let progress = Progress::new(listed.len(), false);
        let run = Run { checker, mend: false, scopes: &Scopes::default(), progress: &progress };
        let mut names = Vec::new();
        let mut taker = |file: FileReport| {
            names.push(file.path.rsplit('/').next().unwrap().to_owned());
            names.last().is_none_or(|name| name != last)
        };
        let outcome = pool(Some(jobs)).unwrap().install(|| check(&listed, &Disk, &run, &mut taker));
        (names, outcome.failures)
    }

    fn run_on(folder: &tempfile::TempDir, checker: &Checker) -> (Vec<String>, Vec<Failure>) {
        run_until("", 2, folder, checker)
    }

    fn nothing(paper: &Paper) -> Analysis {
        Analysis { documents: paper.documents.iter().map(|_| DocumentAnalysis::default()).collect() }
    }

    #[test]
    fn a_panic_in_one_paper_is_one_failure_and_the_others_go_on() {
        let folder = folder(&[("a.md", b"a"), ("b.md", b"bad"), ("c.md", b"c")]);
        let checker = |paper: &Paper, _: &Scope| {
            assert!(paper.documents.iter().all(|source| &*source.text != "bad"), "no way");
            nothing(paper)
        };
        let (names, failures) = run_on(&folder, &checker);
        assert_eq!(names, ["a.md", "c.md"]);
        let [Failure(line)] = failures.as_slice() else { panic!("{failures:?}") };
        assert!(line.starts_with("internal error while checking ") && line.contains("b.md: no way"), "{line}");
    }

    #[test]
    fn an_unreadable_file_does_not_stop_the_others() {
        let folder = folder(&[("a.md", b"\xff"), ("b.md", b"b")]);
        let (names, failures) = run_on(&folder, &|paper: &Paper, _: &Scope| nothing(paper));
        assert_eq!(names, ["b.md"]);
        let [Failure(line)] = failures.as_slice() else { panic!("{failures:?}") };
        assert!(line.ends_with("a.md: is not UTF-8: first bad byte at offset 0"), "{line}");
    }

    #[test]
    fn a_paper_is_checked_once_for_all_its_files() {
        let root: &[u8] = b"\\documentclass{article}\\begin{document}\\input{part}\\end{document}";
        let folder = folder(&[("main.tex", root), ("part.tex", b"x")]);
        let count = std::sync::atomic::AtomicUsize::new(0);
        let checker = |paper: &Paper, _: &Scope| {
            count.fetch_add(1, std::sync::atomic::Ordering::Relaxed);
            assert_eq!(paper.documents.len(), 2);
            nothing(paper)
        };
        let (names, failures) = run_on(&folder, &checker);
        assert_eq!((names.len(), failures), (2, Vec::new()));
        assert_eq!(count.into_inner(), 1);
    }

    #[test]
    fn a_panic_in_a_paper_does_not_hold_up_what_comes_after_its_parts() {
        let root: &[u8] = b"\\documentclass{article}\\input{c}\\input{e}";
        let folder = folder(&[("a.tex", root), ("b.md", b"b"), ("c.tex", b"c"), ("d.md", b"d"), ("e.tex", b"e")]);
        let checker = |paper: &Paper, _: &Scope| {
            assert!(paper.documents.len() == 1, "no way");
            nothing(paper)
        };
        let (names, failures) = run_on(&folder, &checker);
        assert_eq!(names, ["b.md", "d.md"]);
        let [Failure(line)] = failures.as_slice() else { panic!("{failures:?}") };
        assert!(line.contains("a.tex and 2 more of its paper: no way"), "{line}");
    }

    #[test]
    fn a_report_is_handed_on_before_the_next_paper_is_checked() {
        let folder = folder(&[("a.md", b"a"), ("b.md", b"b"), ("c.md", b"c")]);
        let (listed, _) = files::find(&[folder.path().to_owned()], Host::Latex, &mut |_| true);
        let (progress, taken) = (Progress::new(3, false), std::sync::atomic::AtomicUsize::new(0));
        let checker = |paper: &Paper, _: &Scope| {
            let before = ["a", "b", "c"].iter().position(|text| *text == &*paper.documents[0].text).unwrap();
            assert_eq!(taken.load(std::sync::atomic::Ordering::SeqCst), before);
            nothing(paper)
        };
        let run = Run { checker: &checker, mend: false, scopes: &Scopes::default(), progress: &progress };
        let mut taker = |_| {
            taken.fetch_add(1, std::sync::atomic::Ordering::SeqCst);
            true
        };
        let outcome = pool(Some(1)).unwrap().install(|| check(&listed, &Disk, &run, &mut taker));
        assert_eq!((outcome.failures, taken.into_inner()), (Vec::new(), 3));
    }

    #[test]
    fn no_work_is_begun_once_no_report_is_wanted() {
        let names: Vec<String> = (100..200).map(|at| format!("{at}.md")).collect();
        let files: Vec<(&str, &[u8])> = names.iter().map(|name| (name.as_str(), &b"x"[..])).collect();
        let count = std::sync::atomic::AtomicUsize::new(0);
        let checker = |paper: &Paper, _: &Scope| {
            count.fetch_add(1, std::sync::atomic::Ordering::Relaxed);
            nothing(paper)
        };
        let (taken, _) = run_until("101.md", 1, &folder(&files), &checker);
        assert_eq!((taken, count.into_inner()), (vec!["100.md".to_owned(), "101.md".to_owned()], 2));
    }
}
