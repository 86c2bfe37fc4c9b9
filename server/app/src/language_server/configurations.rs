//! What is wrong with the sentences of configuration files, shown in those files.
//!
//! They are read as they stand on the disk, whenever files may have changed. Said only to clients that are sent
//! diagnostics: one that asks does so for documents that it has open, and these are none.

use std::collections::BTreeMap;

use indexwise_checker::paper::{StepMode, problems};
use indexwise_grammar::lines::Lines;
use tower_lsp::lsp_types::{Diagnostic, PublishDiagnosticsParams, Url};

use super::convert::{Places, diagnostic};
use super::worker::Worker;
use crate::configuration::{Configuration, Scope};

impl Worker {
    /// Tells what is wrong now, where that is not what was told.
    pub(super) fn tell_of_configurations(&mut self) {
        if self.client.pulls {
            return;
        }
        let mut now = BTreeMap::new();
        for configuration in self.scopes.with_conventions() {
            if let Ok(uri) = Url::from_file_path(&configuration.path) {
                let found = self.found_in(configuration, &uri);
                now.insert(uri, found);
            }
        }
        let before = std::mem::replace(&mut self.configurations, now.clone());
        for uri in before.keys().filter(|uri| !now.contains_key(*uri)) {
            self.outbox.publish(PublishDiagnosticsParams { uri: uri.clone(), diagnostics: Vec::new(), version: None });
        }
        for (uri, diagnostics) in now {
            let told = before.get(&uri).map_or(&[][..], Vec::as_slice);
            if told != diagnostics {
                self.outbox.publish(PublishDiagnosticsParams { uri, diagnostics, version: None });
            }
        }
    }

    fn found_in(&self, configuration: &Configuration, uri: &Url) -> Vec<Diagnostic> {
        let mut findings = problems(&configuration.conventions);
        let mut settings = self.settings.in_scope(&Scope::default(), StepMode::Off);
        settings.levels.splice(0..0, configuration.levels.iter().cloned());
        settings.settle(&mut findings);
        let text: &str = &configuration.text.text;
        let lines = Lines::new(text);
        let places = Places { text, lines: &lines, encoding: self.client.encoding };
        let pages = self.settings.pages.as_deref();
        findings.iter().map(|finding| diagnostic(finding, &places, uri, &self.client, pages)).collect()
    }
}
