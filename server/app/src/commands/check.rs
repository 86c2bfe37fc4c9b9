//! `indexwise check`: finds the files, has them checked, mends if asked, reports.

use std::fs::File;
use std::io::{self, IsTerminal, Write};
use std::path::Path;
use std::time::Instant;

use indexwise_checker::finding::Severity;
use indexwise_checker::paper::{Cancel, Paper, Settings};
use indexwise_checker::rules::{RULES, find};
use indexwise_grammar::hosts::Host;

use crate::arguments::{CheckArguments, ReportKind};
use crate::batch::{self, Outcome, Run};
use crate::configuration::{Scope, Scopes};
use crate::files::{self, Failure, Listed};
use crate::mend::Mended;
use crate::nearest::nearest;
use crate::output::{Status, cause, gone_is_fine, printable};
use crate::progress::Progress;
use crate::project::Disk;
use crate::reports::text::Palette;
use crate::reports::{self, FileReport, Look};

/// Runs the command.
pub fn run(arguments: &CheckArguments) -> Status {
    match checked(arguments) {
        Ok(status) => status,
        Err(failure) => {
            failure.tell();
            Status::Trouble
        }
    }
}

fn checked(arguments: &CheckArguments) -> Result<Status, Failure> {
    let settings = settings(arguments)?;
    let input = arguments.host.map_or(Host::Latex, Host::from);
    let mut scopes = Scopes::new(arguments.conventions.as_deref());
    let (listed, failures) = files::find(&arguments.paths, input, &mut |file| scopes.admits(file));
    listed.iter().for_each(|file| drop(scopes.enter(&file.path)));
    if !scopes.failures().is_empty() {
        scopes.failures().iter().chain(&failures).for_each(Failure::tell);
        return Ok(Status::Trouble);
    }
    refuse_own_output(arguments.output.as_deref(), &listed, &scopes)?;
    let mut report = Report::begin(arguments)?;
    let mut outcome = check(arguments, &settings, &listed, &scopes, &mut report)?;
    outcome.failures.splice(0..0, failures);
    if arguments.fix && !arguments.dry_run {
        write_mended(&mut outcome, &mut report.files);
    }
    let written = report.end(&outcome.mended);
    outcome.failures.iter().for_each(Failure::tell);
    written?;
    Ok(if outcome.failures.is_empty() { report.status() } else { Status::Trouble })
}

fn check(
    arguments: &CheckArguments,
    settings: &Settings,
    listed: &[Listed],
    scopes: &Scopes,
    report: &mut Report,
) -> Result<Outcome, Failure> {
    // A report that grows on the terminal shows by itself how far the work has come.
    let speaks = report.streams && report.on_terminal;
    let progress = Progress::new(listed.len(), !(arguments.no_progress || speaks));
    let cancel = Cancel::default();
    let checker = |paper: &Paper, scope: &Scope| {
        let settings = Settings { levels: scope.levels(), ..settings.clone() };
        indexwise_checker::paper::check(paper, &settings, &cancel)
    };
    let run = Run { checker: &checker, mend: arguments.fix, scopes, progress: &progress };
    let mut taker = |file: FileReport| report.take(file);
    if !batch::configurations(scopes, settings).into_iter().all(&mut taker) {
        return Ok(Outcome::default());
    }
    let outcome = batch::pool(arguments.jobs)?.install(|| batch::check(listed, &Disk, &run, &mut taker));
    progress.finish();
    Ok(outcome)
}

/// What the checker is to look for.
fn settings(arguments: &CheckArguments) -> Result<Settings, Failure> {
    for name in arguments.only.iter().chain(&arguments.without) {
        if name.is_empty() {
            return Err(Failure("--only and --without: a rule's name is missing".into()));
        }
        if find(name).is_none() {
            return Err(Failure(unknown_rule(name)));
        }
    }
    Ok(Settings {
        only: arguments.only.clone(),
        without: arguments.without.clone(),
        // Off by default, it is on for those who ask for it by name.
        unread: arguments.only.iter().any(|name| name == "unread"),
        symbols: arguments.symbols && arguments.report != ReportKind::Lines,
        steps: arguments.steps.into(),
        levels: Vec::new(),
    })
}

/// What to say of a rule's name that is none.
pub fn unknown_rule(name: &str) -> String {
    match nearest(&name.to_ascii_lowercase(), RULES.iter().map(|rule| rule.name)) {
        Some(near) => format!("{name}: there is no such rule; the nearest is {near}"),
        None => format!("{name}: there is no such rule"),
    }
}

/// A report must not be written over a document, nor over what says how it is checked.
fn refuse_own_output(output: Option<&Path>, listed: &[Listed], scopes: &Scopes) -> Result<(), Failure> {
    let Some(path) = output else { return Ok(()) };
    let Ok(real) = path.canonicalize() else { return Ok(()) };
    if listed.iter().any(|file| file.path == real) {
        return Err(Failure::new(path.display(), "is checked, so the report cannot go there"));
    }
    if scopes.files().any(|file| file.canonicalize().is_ok_and(|file| file == real)) {
        return Err(Failure::new(path.display(), "is part of the configuration, so the report cannot go there"));
    }
    Ok(())
}

/// Writes what was mended. A file that cannot be written, or that was changed meanwhile, is left.
fn write_mended(outcome: &mut Outcome, files: &mut [FileReport]) {
    // Nothing is mended in configuration files.
    let documents = files.iter_mut().filter(|file| file.host.is_some());
    for (mended, file) in outcome.mended.iter_mut().zip(documents) {
        if mended.after == mended.before {
            // It may still read otherwise, because another file of its paper was mended.
            *file = mended.report.clone();
            continue;
        }
        let unchanged = files::read(&mended.path).and_then(|now| {
            if now == mended.before { Ok(()) } else { Err("was changed while it was being checked".to_owned()) }
        });
        let bytes = mended.after.bytes();
        let written =
            unchanged.and_then(|()| files::writing::replace(&mended.path, &bytes).map_err(|error| cause(&error)));
        match written {
            Ok(()) => *file = mended.report.clone(),
            Err(cause) => {
                outcome.failures.push(Failure::new(&mended.shown, format!("{cause}; the file is as it was")));
                mended.done.clear();
            }
        }
    }
}

/// The report in the making.
///
/// One with an object for each file is written while the work goes on; the others speak of all files at once, or
/// of what became of them when all were mended.
struct Report<'a> {
    arguments: &'a CheckArguments,
    since: Instant,
    out: Box<dyn Write + Send>,
    on_terminal: bool,
    streams: bool,
    written: io::Result<()>,
    /// Whether anything counts in files that are written already.
    found: bool,
    /// The files that are still to be written.
    files: Vec<FileReport>,
}

impl<'a> Report<'a> {
    fn begin(arguments: &'a CheckArguments) -> Result<Self, Failure> {
        let out: Box<dyn Write + Send> = match &arguments.output {
            Some(path) => Box::new(File::create(path).map_err(|error| Failure::new(path.display(), cause(&error)))?),
            None => Box::new(io::stdout()),
        };
        Ok(Self {
            arguments,
            since: Instant::now(),
            out,
            on_terminal: arguments.output.is_none() && io::stdout().is_terminal(),
            streams: arguments.report == ReportKind::JsonLines && !arguments.fix,
            written: Ok(()),
            found: false,
            files: Vec::new(),
        })
    }

    /// Takes what was found in a file; the answer is whether more is wanted.
    fn take(&mut self, file: FileReport) -> bool {
        if !self.streams {
            self.files.push(file);
            return true;
        }
        self.found |= self.counts(&file);
        let text = self.text(std::slice::from_ref(&file));
        self.write(&text);
        self.written.is_ok()
    }

    /// Writes what is not written yet; with `--fix`, first what was done. In a report for programs that would be
    /// out of place, so there it goes to standard error.
    fn end(&mut self, mended: &[Mended]) -> Result<(), Failure> {
        let told = tell_mended(mended, self.arguments.dry_run);
        if self.arguments.report == ReportKind::Text {
            self.write(told.as_bytes());
        } else {
            let _ = io::stderr().lock().write_all(told.as_bytes());
        }
        if !self.streams {
            let text = self.text(&self.files);
            self.write(&text);
        }
        let written = std::mem::replace(&mut self.written, Ok(()));
        let name = self.arguments.output.as_ref().map_or("standard output".into(), |path| path.display().to_string());
        gone_is_fine(written).map_err(|error| Failure::new(name, cause(&error)))
    }

    fn text(&self, files: &[FileReport]) -> Vec<u8> {
        let palette = Palette { coloured: self.on_terminal && colours_are_welcome() };
        let look = Look { kind: self.arguments.report, palette };
        let mut text = Vec::new();
        // Writing to memory does not fail.
        let _ = reports::write(files, look, self.since.elapsed(), &mut text);
        text
    }

    /// Writes, unless writing failed before.
    fn write(&mut self, text: &[u8]) {
        if self.written.is_ok() {
            self.written = self.out.write_all(text).and_then(|()| self.out.flush());
        }
    }

    /// Whether a file has something that counts at the chosen strictness.
    fn counts(&self, file: &FileReport) -> bool {
        file.findings.iter().any(|found| self.arguments.strict || found.severity != Severity::Hint)
    }

    fn status(&self) -> Status {
        if self.found || self.files.iter().any(|file| self.counts(file)) { Status::Findings } else { Status::Clean }
    }
}

/// The convention: any value of NO_COLOR but the empty one says no.
fn colours_are_welcome() -> bool {
    let refused = std::env::var_os("NO_COLOR").is_some_and(|value| !value.is_empty());
    !refused && std::env::var_os("TERM").is_none_or(|kind| kind != "dumb")
}

/// One line for each finding that was mended or left; with `--dry-run` also the lines that would change.
fn tell_mended(mended: &[Mended], dry_run: bool) -> String {
    let verb = if dry_run { "would mend" } else { "mended" };
    let mut lines = Vec::new();
    for file in mended {
        let path = printable(&file.shown);
        for done in &file.done {
            lines.push(format!("{verb} {path}:{}: {}", done.line, printable(&done.title)));
            if dry_run {
                lines.extend(done.old.lines().map(|line| format!("    - {}", printable(line))));
                lines.extend(done.new.lines().map(|line| format!("    + {}", printable(line))));
            }
        }
        let left = file.left.iter();
        lines.extend(
            left.map(|left| format!("left {path}:{}: {} ({})", left.line, printable(&left.message), left.reason)),
        );
    }
    if !lines.is_empty() {
        lines.push(String::new());
    }
    lines.iter().map(|line| format!("{line}\n")).collect()
}
