//! The folder checked as if a configuration stood in it.
//!
//! What is compared are the reports of all files as they would be written, parts that could not be read among them,
//! so that a configuration that changes none of them changes no report of any form.

use std::collections::BTreeMap;
use std::path::PathBuf;
use std::sync::{Mutex, PoisonError};

use indexwise_checker::conventions::implied::Implied;
use indexwise_checker::finding::Finding;
use indexwise_checker::paper::{Analysis, Cancel, DocumentAnalysis, Implications, Paper, Settings, Steps, check};
use indexwise_grammar::hosts::Host;

use crate::arguments::InitArguments;
use crate::batch::{self, Run};
use crate::configuration::{self, Scope, Scopes};
use crate::files::{self, Failure, Text};
use crate::mend::Checker;
use crate::progress::Progress;
use crate::project::{Disk, DiskWithProject, Texts};
use crate::reports::FileReport;

/// A folder, and where its configuration would stand.
pub(super) struct Trial<'a> {
    arguments: &'a InitArguments,
    place: PathBuf,
    pool: rayon::ThreadPool,
}

/// What a check of the folder reports.
pub(super) struct Reports {
    files: Vec<FileReport>,
    /// Files that could not be checked.
    pub(super) failures: Vec<Failure>,
}

impl<'a> Trial<'a> {
    pub(super) fn new(arguments: &'a InitArguments, place: PathBuf) -> Result<Self, Vec<Failure>> {
        let pool = batch::pool(arguments.jobs).map_err(|failure| vec![failure])?;
        Ok(Self { arguments, place, pool })
    }

    /// The reports as they are, or as they would be with a configuration of this text.
    pub(super) fn reports(&self, text: Option<&str>) -> Result<Reports, Vec<Failure>> {
        let settings = Settings { unread: true, ..Settings::default() };
        let cancel = Cancel::default();
        let levels = |scope: &Scope| Settings { levels: scope.levels(), ..settings.clone() };
        let checker = |paper: &Paper, scope: &Scope| check(paper, &levels(scope), &cancel);
        self.run(text, &checker, &settings)
    }

    /// The sentences that the documents imply, whatever the order in which they are read.
    pub(super) fn implied(&self) -> Result<Vec<Implied>, Vec<Failure>> {
        let gathered: Mutex<BTreeMap<String, Implications>> = Mutex::default();
        let cancel = Cancel::default();
        let checker = |paper: &Paper, _: &Scope| {
            let own = Implications::of(paper, &cancel);
            let key = paper.documents.iter().map(|source| source.path.as_str()).collect::<Vec<_>>().join("\n");
            gathered.lock().unwrap_or_else(PoisonError::into_inner).entry(key).or_default().add(own);
            Analysis { documents: paper.documents.iter().map(|_| DocumentAnalysis::default()).collect() }
        };
        // With a configuration, so that paths are those from its folder.
        self.run(Some(""), &checker, &Settings::default())?;
        let mut all = Implications::default();
        let gathered = gathered.into_inner().unwrap_or_else(PoisonError::into_inner);
        gathered.into_values().for_each(|own| all.add(own));
        Ok(all.sentences())
    }

    fn run(&self, text: Option<&str>, checker: &Checker, settings: &Settings) -> Result<Reports, Vec<Failure>> {
        let mut scopes = Scopes::new(None);
        let mut disk: Box<dyn Texts> = Box::new(Disk);
        if let Some(text) = text {
            let text = Text { text: text.into(), marked: false };
            scopes.suppose(configuration::read_as(text, &self.place, configuration::FILE_NAME)?);
            disk = Box::new(DiskWithProject { folder: self.place.parent().map(PathBuf::from).unwrap_or_default() });
        }
        let paths = [self.arguments.folder.clone()];
        let (listed, mut failures) = files::find(&paths, Host::Latex, &mut |file| scopes.admits(file));
        listed.iter().for_each(|file| drop(scopes.enter(&file.path)));
        if !scopes.failures().is_empty() {
            return Err(scopes.failures().to_vec());
        }
        let progress = Progress::new(listed.len(), !self.arguments.no_progress);
        let run = Run { checker, mend: false, scopes: &scopes, progress: &progress };
        let mut files = batch::configurations(&scopes, settings);
        let mut taker = |mut file: FileReport| {
            // Which steps a declaration helps to prove is no change of what is found.
            file.statistics.steps = Steps::default();
            file.steps.clear();
            files.push(file);
            true
        };
        let outcome = self.pool.install(|| batch::check(&listed, &*disk, &run, &mut taker));
        progress.finish();
        failures.extend(outcome.failures);
        Ok(Reports { files, failures })
    }
}

/// How reports differ.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub(super) struct Changes {
    /// Findings that are gone.
    gone: usize,
    /// Findings that are new.
    new: usize,
    /// Files that are read otherwise.
    files: usize,
}

impl Changes {
    pub(super) fn any(self) -> bool {
        self != Self::default()
    }

    /// In words: `takes away 2 findings and adds 1`.
    pub(super) fn words(self) -> String {
        let counted = |count: usize| format!("{count} {}", if count == 1 { "finding" } else { "findings" });
        match (self.gone, self.new) {
            (0, 0) if self.files == 1 => "changes how 1 file is read".to_owned(),
            (0, 0) => format!("changes how {} files are read", self.files),
            (gone, 0) => format!("takes away {}", counted(gone)),
            (0, new) => format!("adds {}", counted(new)),
            (gone, new) => format!("takes away {} and adds {}", counted(gone), counted(new)),
        }
    }
}

impl Reports {
    /// What is otherwise in other reports.
    pub(super) fn changes(&self, other: &Self) -> Changes {
        let mut changes = Changes::default();
        let (own, others) = (by_path(&self.files), by_path(&other.files));
        for path in own.keys().chain(others.keys().filter(|path| !own.contains_key(*path))) {
            let (before, after) = (own.get(path), others.get(path));
            if before == after {
                continue;
            }
            changes.files += 1;
            let findings = |file: Option<&&FileReport>| file.map(|file| file.findings.clone()).unwrap_or_default();
            let (before, after) = (findings(before), findings(after));
            changes.gone += missing(&before, &after);
            changes.new += missing(&after, &before);
        }
        changes
    }
}

fn by_path(files: &[FileReport]) -> BTreeMap<&str, &FileReport> {
    files.iter().map(|file| (file.path.as_str(), file)).collect()
}

/// How many of these findings the others lack. Both are in the order of their places.
fn missing(these: &[Finding], others: &[Finding]) -> usize {
    let mut left = others.iter().peekable();
    let key = |finding: &Finding| (finding.span, finding.rule, finding.message.clone());
    let absent = |finding: &&Finding| {
        while left.next_if(|other| key(other) < key(finding)).is_some() {}
        left.next_if(|other| other == finding).is_none()
    };
    these.iter().filter(absent).count()
}
