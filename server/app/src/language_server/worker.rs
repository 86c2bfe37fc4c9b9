//! The worker: one thread that owns all that changes, and loops over what happens.
//!
//! It makes changes to texts at once, and does nothing else that lasts: papers are read, steps judged and questions
//! answered by pools of threads, from pictures that never change (`reading.rs`). What comes back counts only if nothing
//! has moved meanwhile (`papers.rs`). Which texts make up a paper is `grouping.rs`, what the client is sent is
//! `publishing.rs`.
//!
//! Traps: events that wait are all taken before anything is started, so that a burst of changes costs one reading. The
//! judging of steps has a thread of its own, so that it never delays findings about balance.

#[cfg(test)]
mod tests;

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};
use std::sync::Arc;
use std::sync::mpsc::{Receiver, RecvTimeoutError, SyncSender, TryRecvError};
use std::time::{Duration, Instant};

use indexwise_checker::paper::{Cancel, StepMode};
use rayon::ThreadPool;
use serde_json::Value;
use tokio::sync::oneshot;
use tower_lsp::lsp_types::{Diagnostic, MessageType, TextDocumentContentChangeEvent, Url};

use super::capabilities::Client;
use super::carrying::carried;
use super::disk::RememberedDisk;
use super::documents::{self, Document};
use super::event::{Event, Question, Refusal};
use super::grouping::Touched;
use super::looking::Look;
use super::outbox::{Note, Outbox};
use super::papers::{Held, PaperState};
use super::reading::{self, Judged, OpenText, Order, Picture};
use super::settings::Settings;
use crate::configuration::Scopes;
use crate::panics;
use crate::project::PaperKey;

/// After a change nothing is read before so long a silence: editors send what belongs together in pieces.
pub const SILENCE: Duration = Duration::from_millis(2);

/// Steps are judged only after so long a silence: who types on would throw them away.
const SILENCE_BEFORE_STEPS: Duration = Duration::from_millis(150);

/// A first reading that lasts longer is shown as work in progress.
const PATIENCE: Duration = Duration::from_millis(500);

/// The worker.
pub struct Worker {
    pub(super) events: SyncSender<Event>,
    pub(super) outbox: Arc<Outbox>,
    pub(super) client: Client,
    pub(super) settings: Arc<Settings>,
    pub(super) disk: Arc<RememberedDisk>,
    pub(super) scopes: Scopes,
    pub(super) documents: BTreeMap<Url, Document>,
    pub(super) papers: Vec<PaperState>,
    /// The paper that each open text is checked in.
    pub(super) keys: BTreeMap<Url, PaperKey>,
    /// What is wrong with configurations.
    pub(super) wrong: Vec<String>,
    /// What was told of the sentences of configurations.
    pub(super) configurations: BTreeMap<Url, Vec<Diagnostic>>,
    /// What else went wrong, so that it is said once.
    pub(super) told: Vec<String>,
    folder: PathBuf,
    /// Reads papers and answers questions.
    pool: Arc<ThreadPool>,
    /// Judges steps.
    judges: Arc<ThreadPool>,
    works: u64,
}

impl Worker {
    /// A worker with nothing to do yet.
    pub fn new(events: SyncSender<Event>, outbox: Arc<Outbox>, pool: ThreadPool, judges: ThreadPool) -> Self {
        Self {
            events,
            outbox,
            client: Client::default(),
            settings: Arc::default(),
            disk: Arc::default(),
            scopes: Scopes::default(),
            documents: BTreeMap::new(),
            papers: Vec::new(),
            keys: BTreeMap::new(),
            wrong: Vec::new(),
            configurations: BTreeMap::new(),
            told: Vec::new(),
            folder: PathBuf::new(),
            pool: Arc::new(pool),
            judges: Arc::new(judges),
            works: 0,
        }
    }

    /// Works until the session ends.
    pub fn run(mut self, events: &Receiver<Event>) {
        loop {
            let event = match self.next_due() {
                None => events.recv().map_err(|_| RecvTimeoutError::Disconnected),
                Some(due) => events.recv_timeout(due.saturating_duration_since(Instant::now())),
            };
            match event {
                Ok(Event::Shutdown) | Err(RecvTimeoutError::Disconnected) => return,
                Ok(event) => self.take_caught(event),
                Err(RecvTimeoutError::Timeout) => {}
            }
            loop {
                match events.try_recv() {
                    Ok(Event::Shutdown) | Err(TryRecvError::Disconnected) => return,
                    Ok(event) => self.take_caught(event),
                    Err(TryRecvError::Empty) => break,
                }
            }
            self.start_what_is_due();
        }
    }

    /// When something is to be done without anything happening.
    fn next_due(&self) -> Option<Instant> {
        let due = self.papers.iter().flat_map(|paper| {
            let reading = paper.due.filter(|_| paper.reading.is_none());
            let judging = paper.steps_due.filter(|_| paper.judging.is_none());
            let lasts = self.client.progress && paper.is_first_read();
            [reading, judging, lasts.then(|| paper.since + PATIENCE)]
        });
        due.flatten().min()
    }

    /// A panic here would be a bug of ours; what happened is lost, and the session goes on.
    fn take_caught(&mut self, event: Event) {
        if let Err(cause) = panics::caught(|| self.take(event)) {
            self.trouble(&format!("internal error: {cause}"));
        }
    }

    fn take(&mut self, event: Event) {
        match event {
            Event::Begin { client, folder, settings } => {
                (self.client, self.folder) = (client, folder);
                self.set(&settings);
            }
            Event::Ready => self.ready(),
            Event::Open { uri, language, version, text } => self.open(uri, &language, version, &text),
            Event::Change { uri, version, changes } => self.change(&uri, version, &changes),
            Event::Close(uri) => {
                if let Some(document) = self.documents.remove(&uri) {
                    self.regroup(&Touched::Text(uri, document.path));
                }
            }
            Event::Files => self.regroup(&Touched::Everything),
            Event::Settings(section) if section.is_null() && self.client.has_settings => {
                self.outbox.put(Note::AskSettings);
            }
            Event::Settings(section) | Event::SettingsAnswered(section) => self.set(&section),
            Event::Ask(question) => self.ask(question),
            Event::AskAll(task) => self.ask_all(task),
            Event::Apply(label, edit) => self.outbox.put(Note::Apply(label, *edit)),
            Event::Read { key, revision, result, memory } => {
                if let Some(paper) = self.papers.iter_mut().find(|paper| paper.key == key) {
                    paper.memory = memory;
                }
                self.was_read(&key, revision, result);
            }
            Event::Verdicts { key, revision, result } => self.was_judged(&key, revision, result),
            Event::Trouble(cause) => self.trouble(&cause),
            Event::Shutdown => {}
        }
    }

    fn ready(&self) {
        let registrations = super::registrations(&self.client);
        if !registrations.is_empty() {
            self.outbox.put(Note::Register(registrations));
        }
        if self.client.has_settings {
            self.outbox.put(Note::AskSettings);
        }
    }

    /// Says once what went wrong, and logs it every time.
    pub(super) fn trouble(&mut self, cause: &str) {
        self.outbox.put(Note::Log(MessageType::ERROR, cause.to_owned()));
        if !self.told.iter().any(|told| told == cause) {
            self.told.push(cause.to_owned());
            self.outbox.put(Note::Show(MessageType::ERROR, cause.to_owned()));
        }
    }

    fn set(&mut self, section: &Value) {
        let (settings, wrong) = Settings::read(section);
        for cause in wrong {
            self.outbox.put(Note::Show(MessageType::WARNING, cause));
        }
        if settings == *self.settings {
            return;
        }
        self.settings = Arc::new(settings);
        let now = Instant::now();
        self.papers.iter_mut().for_each(|paper| paper.moved(now));
    }

    fn open(&mut self, uri: Url, language: &str, version: i32, text: &str) {
        let path = documents::path_of(&uri, &self.folder);
        let host = documents::host(language, &path);
        self.documents.insert(uri.clone(), Document::new(uri.clone(), path.clone(), host, version, text));
        self.regroup(&Touched::Text(uri, path));
    }

    fn change(&mut self, uri: &Url, version: i32, changes: &[TextDocumentContentChangeEvent]) {
        let Some(document) = self.documents.get_mut(uri) else {
            return self.trouble(&format!("{uri} was changed and is not open"));
        };
        let replaced: Vec<_> = changes.iter().map(|change| document.apply(change, self.client.encoding)).collect();
        document.version = version;
        let (path, due) = (document.path.clone(), Instant::now() + SILENCE);
        for paper in self.papers.iter_mut().filter(|paper| paper.holds(&path)) {
            paper.move_held(&path, &replaced);
            paper.moved(due);
        }
    }

    fn start_what_is_due(&mut self) {
        let now = Instant::now();
        let is_due = |due: Option<Instant>| due.is_some_and(|due| due <= now);
        for at in 0..self.papers.len() {
            let Some(paper) = self.papers.get(at) else { return };
            // A question that waits needs no silence.
            let due = is_due(paper.due) || paper.due.is_some() && !paper.held.is_empty();
            let reads = due && paper.reading.is_none();
            let judges = is_due(paper.steps_due) && paper.judging.is_none();
            let lasts = self.client.progress && paper.is_first_read() && paper.since + PATIENCE <= now;
            if reads {
                self.start_reading(at);
            }
            if judges {
                self.start_judging(at);
            }
            if lasts {
                self.show_progress(at);
            }
        }
    }

    fn start_reading(&mut self, at: usize) {
        let open = self.open_texts();
        let (settings, client, disk) = (self.settings.clone(), self.client, self.disk.clone());
        let Some(paper) = self.papers.get_mut(at) else { return };
        let (key, scope, revision, cancel) = (paper.key.clone(), paper.scope.clone(), paper.now(), Cancel::default());
        paper.due = None;
        paper.reading = Some((revision, cancel.clone()));
        let memory = std::mem::take(&mut paper.memory);
        let events = self.events.clone();
        self.pool.spawn(move || {
            let order = Order { key, scope, settings, client, open, disk };
            let (result, memory) = reading::read(&order, *memory, &cancel);
            let result = result.map(|picture| picture.map(Box::new));
            // When the worker is gone the session has ended.
            let _ = events.send(Event::Read { key: order.key, revision, result, memory: Box::new(memory) });
        });
    }

    pub(super) fn open_texts(&mut self) -> Vec<OpenText> {
        let texts = self.documents.values_mut().map(|document| OpenText {
            uri: document.uri.clone(),
            path: document.path.clone(),
            version: document.version,
            text: document.text(),
        });
        texts.collect()
    }

    fn start_judging(&mut self, at: usize) {
        let Some(paper) = self.papers.get_mut(at) else { return };
        paper.steps_due = None;
        let Some(known) = paper.current().cloned() else { return };
        let (key, revision, cancel) = (paper.key.clone(), paper.now(), Cancel::default());
        paper.judging = Some((revision, cancel.clone()));
        let events = self.events.clone();
        self.judges.spawn(move || {
            let result = known.picture.judge(&cancel);
            let _ = events.send(Event::Verdicts { key, revision, result });
        });
    }

    fn show_progress(&mut self, at: usize) {
        let Some(paper) = self.papers.get_mut(at) else { return };
        let (ends, ended) = oneshot::channel();
        paper.progress = Some(ends);
        self.works += 1;
        let name = paper.key.root.file_name().unwrap_or_default().to_string_lossy().into_owned();
        self.outbox.put(Note::Work(format!("indexwise-{}", self.works), format!("Reading {name}"), ended));
    }

    fn was_read(&mut self, key: &PaperKey, revision: u64, result: Result<Option<Box<Picture>>, String>) {
        let Some(at) = self.papers.iter().position(|paper| paper.key == *key) else { return };
        let Some(paper) = self.papers.get_mut(at) else { return };
        paper.reading = None;
        if paper.now() != revision {
            return;
        }
        let picture = match result {
            Ok(Some(picture)) => Arc::new(*picture),
            Ok(None) => return paper.due = Some(Instant::now()),
            Err(cause) => {
                std::mem::take(&mut paper.held).into_iter().for_each(|held| held.refuse(Refusal::Unknown));
                paper.progress = None;
                return self.trouble(&cause);
            }
        };
        let elsewhere = paper.asked.replace(picture.asked.clone()).is_some_and(|before| before != picture.asked);
        let judges = self.settings.steps != StepMode::Off;
        let before = paper.known.as_ref().filter(|(_, known)| judges && known.picture.settings == picture.settings);
        let analysis = match before {
            Some((_, before)) => carried(before, &picture),
            None => picture.balance.clone(),
        };
        let judged = Judged { analysis, picture, complete: !judges };
        let before = paper.known.replace((revision, judged));
        paper.progress = None;
        paper.steps_due = judges.then(|| Instant::now() + SILENCE_BEFORE_STEPS);
        self.publish(at);
        self.answer_held(at);
        // A picture is large, and whoever waits for the new one need not wait until the old one is cleared away.
        self.pool.spawn(move || drop(before));
        if elsewhere {
            self.regroup(&Touched::Nothing);
        }
    }

    fn was_judged(
        &mut self,
        key: &PaperKey,
        revision: u64,
        result: Result<Option<indexwise_checker::paper::Analysis>, String>,
    ) {
        let Some(at) = self.papers.iter().position(|paper| paper.key == *key) else { return };
        let Some(paper) = self.papers.get_mut(at) else { return };
        paper.judging = None;
        let current = paper.now() == revision;
        let Some((_, known)) = paper.known.as_mut().filter(|_| current) else { return };
        match result {
            Ok(Some(analysis)) => {
                (known.analysis, known.complete) = (Arc::new(analysis), true);
                self.publish(at);
                self.refresh();
            }
            Ok(None) => {}
            Err(cause) => self.trouble(&cause),
        }
    }

    /// What depends on verdicts is asked for again.
    fn refresh(&self) {
        if self.client.refreshes_lenses {
            self.outbox.put(Note::RefreshLenses);
        }
        if self.client.refreshes_hints && self.settings.hints {
            self.outbox.put(Note::RefreshHints);
        }
    }

    fn ask(&mut self, question: Question) {
        let Some(document) = self.documents.get(&question.uri) else {
            return (question.task)(Err(Refusal::Unknown));
        };
        let places = question.places.iter().map(|place| document.offset(*place, self.client.encoding));
        let held = Held { offsets: places.collect(), path: document.path.clone(), question };
        let Some(at) = self.paper_of(&held.path) else { return held.refuse(Refusal::Unknown) };
        let Some(paper) = self.papers.get_mut(at) else { return held.refuse(Refusal::Unknown) };
        let waits = paper.reading.is_some() || paper.due.is_some();
        paper.held.push(held);
        if paper.current().is_some() {
            self.answer_held(at);
        } else if !waits {
            // The paper could not be read, and nothing has changed since.
            std::mem::take(&mut paper.held).into_iter().for_each(|held| held.refuse(Refusal::Unknown));
        }
    }

    /// The paper that an open text is checked in.
    fn paper_of(&self, path: &Path) -> Option<usize> {
        let key =
            self.documents.values().find(|document| document.path == path).and_then(|one| self.keys.get(&one.uri))?;
        self.papers.iter().position(|paper| paper.key == *key)
    }

    fn answer_held(&mut self, at: usize) {
        let Some(paper) = self.papers.get_mut(at) else { return };
        let Some(judged) = paper.current().cloned() else { return };
        for held in std::mem::take(&mut paper.held) {
            let Some(document) = judged.picture.document(&held.path) else {
                held.refuse(Refusal::Unknown);
                continue;
            };
            let Held { question, offsets, .. } = held;
            let look = Look {
                judged: judged.clone(),
                document,
                uri: question.uri,
                offsets,
                revision: paper.revision.clone(),
                at: paper.now(),
            };
            let events = self.events.clone();
            self.pool.spawn(move || {
                if let Err(cause) = panics::caught(|| (question.task)(Ok(look))) {
                    let _ = events.send(Event::Trouble(format!("internal error while answering: {cause}")));
                }
            });
        }
    }

    fn ask_all(&self, task: super::event::AllTask) {
        let known = self.papers.iter().filter_map(|paper| Some(paper.known.as_ref()?.1.clone())).collect();
        let events = self.events.clone();
        self.pool.spawn(move || {
            if let Err(cause) = panics::caught(|| task(known)) {
                let _ = events.send(Event::Trouble(format!("internal error while answering: {cause}")));
            }
        });
    }
}
