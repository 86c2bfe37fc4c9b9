//! `indexwise init`: writes an `indexwise.toml` from what the documents of a folder imply.
//!
//! The one idea: nothing changes by it. `trial.rs` checks the folder as if the file were there, text for text, and
//! only sentences that leave every report as it is are in force; the others stand in it as comments (`draft.rs`) with
//! what they would change. All sentences are tried together first, since mostly that settles it; one by one only
//! if not. Trap: a folder for which a configuration holds already is refused, since a nearer file would replace its
//! rules and its choice of files.

mod draft;
mod trial;

use std::path::{Path, PathBuf};

use indexwise_checker::conventions::implied::Implied;

use crate::arguments::InitArguments;
use crate::configuration::{FILE_NAME, Scopes};
use crate::files::{Failure, writing};
use crate::output::{self, Status, cause, printable};

use draft::{Draft, Line};
use trial::{Reports, Trial};

/// Runs the command.
pub fn run(arguments: &InitArguments) -> Status {
    match init(arguments) {
        Ok(status) => status,
        Err(failures) => {
            failures.iter().for_each(Failure::tell);
            Status::Trouble
        }
    }
}

fn init(arguments: &InitArguments) -> Result<Status, Vec<Failure>> {
    let path = free_place(&arguments.folder)?;
    let trial = Trial::new(arguments, path.real.clone())?;
    let before = trial.reports(None)?;
    let implied = trial.implied()?;
    let mut draft = Draft::default();
    let base = trial.reports(Some(&draft.text()))?;
    tell_of_project(&path.shown, before.changes(&base));
    settle(&trial, &base, implied, &mut draft)?;
    let text = draft.text();
    let status = if arguments.dry_run {
        output::print(&text)
    } else {
        writing::create(&path.real, text.as_bytes()).map_err(|error| vec![Failure::new(&path.shown, cause(&error))])?;
        output::print(&format!("{}: {}\n", printable(&path.shown), draft.summary()))
    };
    before.failures.iter().for_each(Failure::tell);
    Ok(if before.failures.is_empty() { status } else { Status::Trouble })
}

/// Where the file is to be.
struct Place {
    real: PathBuf,
    shown: String,
}

/// The place of the new file, unless there is one already or another holds for the folder.
fn free_place(folder: &Path) -> Result<Place, Vec<Failure>> {
    let fail = |path: &Path, cause: &str| Err(vec![Failure::new(path.display(), cause)]);
    let shown = if folder == Path::new(".") { PathBuf::from(FILE_NAME) } else { folder.join(FILE_NAME) };
    let real = match folder.canonicalize() {
        Ok(real) if real.is_dir() => real.join(FILE_NAME),
        Ok(_) => return fail(folder, "is not a folder"),
        Err(error) => return fail(folder, &cause(&error)),
    };
    // A link that leads nowhere is something, too.
    if real.symlink_metadata().is_ok() {
        return fail(&shown, "is there already, and is not written over");
    }
    let mut scopes = Scopes::new(None);
    scopes.enter(&real);
    if !scopes.failures().is_empty() {
        return Err(scopes.failures().to_vec());
    }
    match scopes.nearest(&real) {
        Some(outer) => {
            let cause = format!("{} holds here already; add to that one", outer.display());
            fail(folder, &cause)
        }
        None => Ok(Place { real, shown: shown.display().to_string() }),
    }
}

/// A file of this name makes its folder a project, within which parts are looked for: that alone may change findings.
fn tell_of_project(shown: &str, changes: trial::Changes) {
    if changes.any() {
        let words = "makes its folder one project, so that parts of papers are found otherwise";
        output::complain(&format!("{shown}: {words}; by that alone it {}", changes.words()));
    }
}

/// Puts each sentence into the draft: in force if all reports stay as they are, else as a comment.
fn settle(trial: &Trial, base: &Reports, implied: Vec<Implied>, draft: &mut Draft) -> Result<(), Vec<Failure>> {
    let mut whole = draft.clone();
    whole.lines.extend(implied.iter().cloned().map(Line::in_force));
    if implied.is_empty() || !base.changes(&trial.reports(Some(&whole.text()))?).any() {
        *draft = whole;
        return Ok(());
    }
    for sentence in implied {
        let mut tried = draft.clone();
        tried.lines.push(Line::in_force(sentence.clone()));
        let changes = base.changes(&trial.reports(Some(&tried.text()))?);
        if changes.any() {
            draft.lines.push(Line::left_out(sentence, changes.words()));
        } else {
            *draft = tried;
        }
    }
    Ok(())
}
