//! One paper as the worker knows it: how far its texts have moved, what is being done about it, what is known.
//!
//! The one idea: `revision` counts every change of anything that the paper is made of; a result counts only if it was
//! made at the present revision. One reading and one judging of steps go on at a time, and what they are too late for
//! is started again.

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};
use std::sync::Arc;
use std::sync::atomic::{AtomicU64, Ordering};
use std::time::Instant;

use indexwise_checker::paper::{Cancel, Memory};
use indexwise_grammar::hosts::ReferenceKind;
use tokio::sync::oneshot;
use tower_lsp::lsp_types::{Diagnostic, Url};

use super::documents::Replaced;
use super::event::{Question, Refusal};
use super::reading::Judged;
use crate::configuration::Scope;
use crate::project::PaperKey;

/// A question that waits for the paper to be read, with its places as offsets.
pub struct Held {
    /// The question.
    pub question: Question,
    /// Its document.
    pub path: PathBuf,
    /// Its places.
    pub offsets: Vec<u32>,
}

impl Held {
    /// Gives the question up.
    pub fn refuse(self, why: Refusal) {
        (self.question.task)(Err(why));
    }
}

/// A paper.
pub struct PaperState {
    /// Which.
    pub key: PaperKey,
    /// What holds for it.
    pub scope: Arc<Scope>,
    /// The state of its texts; questions on their way look at it, too.
    pub revision: Arc<AtomicU64>,
    /// When it is to be read.
    pub due: Option<Instant>,
    /// The reading that goes on.
    pub reading: Option<(u64, Cancel)>,
    /// What is kept from one reading to the next; the one that goes on has it.
    pub memory: Box<Memory>,
    /// When its steps are to be judged.
    pub steps_due: Option<Instant>,
    /// The judging that goes on.
    pub judging: Option<(u64, Cancel)>,
    /// The newest that is known, and at which revision.
    pub known: Option<(u64, Judged)>,
    /// What its documents ask for, as it was when papers were told apart.
    pub asked: Option<Vec<Vec<(ReferenceKind, String)>>>,
    /// Questions that wait.
    pub held: Vec<Held>,
    /// What the client was sent, with the version it was for.
    pub shown: BTreeMap<Url, (Option<i32>, Vec<Diagnostic>)>,
    /// Shown as work in progress as long as it stands.
    pub progress: Option<oneshot::Sender<()>>,
    /// Since when the first reading lasts.
    pub since: Instant,
}

impl PaperState {
    /// A paper that nothing is known of and that is to be read at once.
    pub fn new(key: PaperKey, scope: Arc<Scope>, now: Instant) -> Self {
        Self {
            key,
            scope,
            revision: Arc::default(),
            due: Some(now),
            reading: None,
            memory: Box::default(),
            steps_due: None,
            judging: None,
            known: None,
            asked: None,
            held: Vec::new(),
            shown: BTreeMap::new(),
            progress: None,
            since: now,
        }
    }

    /// The state of its texts.
    pub fn now(&self) -> u64 {
        self.revision.load(Ordering::Acquire)
    }

    /// Something that it is made of has changed.
    pub fn moved(&mut self, due: Instant) {
        self.revision.fetch_add(1, Ordering::AcqRel);
        self.due = Some(due);
        self.steps_due = None;
        for (_, cancel) in self.reading.iter().chain(&self.judging) {
            cancel.cancel();
        }
    }

    /// Whether it is being read for the first time, and nobody has been told.
    pub fn is_first_read(&self) -> bool {
        self.known.is_none() && self.reading.is_some() && self.progress.is_none()
    }

    /// Whether a file may be part of it: any may of one that has not been read yet.
    pub fn holds(&self, path: &Path) -> bool {
        let known = self.known.as_ref().is_none_or(|(_, known)| known.picture.files.iter().any(|file| file == path));
        known || self.key.root == path || self.key.appended.as_deref() == Some(path)
    }

    /// What is known of the present texts.
    pub fn current(&self) -> Option<&Judged> {
        self.known.as_ref().filter(|(revision, _)| *revision == self.now()).map(|(_, known)| known)
    }

    /// A document of it was changed: questions that wait move along or are given up.
    pub fn move_held(&mut self, path: &Path, replaced: &[Replaced]) {
        let (of_it, others): (Vec<Held>, Vec<Held>) =
            std::mem::take(&mut self.held).into_iter().partition(|held| held.path == path);
        self.held = others;
        for mut held in of_it {
            if !held.question.freshly {
                held.refuse(Refusal::Moved);
                continue;
            }
            for offset in &mut held.offsets {
                *offset = replaced.iter().fold(*offset, |offset, one| one.moved(offset));
            }
            self.held.push(held);
        }
    }
}

impl Drop for PaperState {
    /// Nobody waits for a paper that is no more.
    fn drop(&mut self) {
        for (_, cancel) in self.reading.iter().chain(&self.judging) {
            cancel.cancel();
        }
        self.revision.fetch_add(1, Ordering::AcqRel);
        std::mem::take(&mut self.held).into_iter().for_each(|held| held.refuse(Refusal::Moved));
    }
}
