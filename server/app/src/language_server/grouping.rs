//! Which open texts make up which papers, under which configuration.
//!
//! Asked again whenever a text is opened or closed, files may have changed, or a text asks for other files than
//! before; not while somebody types. A configuration that cannot be read is told of, and the last one that could be
//! holds on: nobody wants to see other findings while a file is being edited.

use std::collections::BTreeMap;
use std::path::PathBuf;
use std::time::Instant;

use tower_lsp::lsp_types::{MessageType, PublishDiagnosticsParams, Url};

use super::event::Refusal;
use super::outbox::Note;
use super::papers::PaperState;
use super::worker::Worker;
use crate::configuration::Scopes;
use crate::panics;
use crate::project::{Overlay, PaperKey, Roots};

/// What may have changed.
pub enum Touched {
    /// Any file: every paper is read again.
    Everything,
    /// A text was opened or closed: the papers that it is part of are read again.
    Text(Url, PathBuf),
    /// No text, only what they ask for.
    Nothing,
}

impl Worker {
    /// Finds the papers anew.
    pub(super) fn regroup(&mut self, touched: &Touched) {
        self.enter_scopes();
        let keys = self.keys_of_all();
        let before = std::mem::replace(&mut self.keys, keys);
        // What is not read yet does not know its parts; so the paper that the text belonged to, and now does, counts too.
        let meets = |paper: &PaperState, now: &BTreeMap<Url, PaperKey>| match touched {
            Touched::Everything => true,
            Touched::Nothing => false,
            Touched::Text(uri, path) => {
                paper.holds(path) || before.get(uri) == Some(&paper.key) || now.get(uri) == Some(&paper.key)
            }
        };
        let now = Instant::now();
        let mut papers = std::mem::take(&mut self.papers);
        let mut gone = Vec::new();
        for (uri, key) in &self.keys {
            if self.papers.iter().any(|paper| paper.key == *key) {
                continue;
            }
            let path = self.documents.get(uri).map(|document| document.path.clone()).unwrap_or_default();
            let scope = self.scopes.of(&path);
            match papers.iter().position(|paper| paper.key == *key) {
                Some(at) => {
                    let mut paper = papers.swap_remove(at);
                    paper.scope = scope;
                    if meets(&paper, &self.keys) {
                        paper.moved(now);
                    }
                    self.papers.push(paper);
                }
                None => self.papers.push(PaperState::new(key.clone(), scope, now)),
            }
        }
        papers.iter().for_each(|paper| gone.extend(paper.shown.keys().cloned()));
        self.take_over(papers);
        for uri in gone {
            self.withdraw(&uri);
        }
    }

    /// Questions about texts whose paper is another one now wait for that.
    fn take_over(&mut self, before: Vec<PaperState>) {
        for mut paper in before {
            for held in std::mem::take(&mut paper.held) {
                let key = self.keys.get(&held.question.uri);
                match self.papers.iter_mut().find(|paper| Some(&paper.key) == key) {
                    Some(paper) => paper.held.push(held),
                    None => held.refuse(Refusal::Unknown),
                }
            }
        }
    }

    /// Takes the diagnostics of a document back that no paper shows any more.
    fn withdraw(&self, uri: &Url) {
        let shown = self.papers.iter().any(|paper| paper.shown.contains_key(uri));
        if !shown && !self.client.pulls {
            let nothing = PublishDiagnosticsParams { uri: uri.clone(), diagnostics: Vec::new(), version: None };
            self.outbox.publish(nothing);
        }
    }

    fn enter_scopes(&mut self) {
        let mut scopes = Scopes::default();
        for document in self.documents.values() {
            scopes.enter(&document.path);
        }
        let failures: Vec<String> = scopes.failures().iter().map(|failure| failure.0.clone()).collect();
        for failure in failures.iter().filter(|failure| !self.wrong.contains(failure)) {
            self.outbox.put(Note::Show(MessageType::ERROR, failure.clone()));
        }
        let whole = failures.is_empty();
        self.wrong = failures;
        if whole {
            self.scopes = scopes;
            self.tell_of_configurations();
        } else {
            // Folders that are new have at least what can be read.
            self.scopes.adopt(scopes);
        }
    }

    fn keys_of_all(&mut self) -> BTreeMap<Url, PaperKey> {
        let open = self.open_texts();
        let disk = self.disk.clone();
        let mut texts = Overlay::new(&*disk);
        for one in &open {
            texts.lay(one.path.clone(), one.text.clone());
        }
        let roots = Roots::new(&texts);
        let mut keys = BTreeMap::new();
        let mut troubles = Vec::new();
        for document in self.documents.values() {
            let on_disk = document.uri.scheme() == "file";
            let key = panics::caught(|| roots.paper_of(&document.path, document.host, on_disk));
            match key {
                Ok(key) => drop(keys.insert(document.uri.clone(), key)),
                Err(cause) => troubles.push(format!("internal error while reading {}: {cause}", document.uri)),
            }
        }
        for trouble in troubles {
            self.trouble(&trouble);
        }
        keys
    }
}
