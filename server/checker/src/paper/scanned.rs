//! Scans that were made before the paper was read: whoever looks for the parts of a document has to scan it.
//!
//! A scan costs a good part of what an edit costs, and the second of the same text finds the same. It counts only for
//! the very text that it was made of, told by its address, and under no macros from elsewhere.

use std::sync::Arc;

use indexwise_grammar::hosts::{Host, Scan, scan};
use indexwise_grammar::macros::Macros;

use super::{Paper, Source};

/// A text with its scan under no macros.
#[derive(Clone, Debug)]
pub struct Scanned {
    text: Arc<str>,
    host: Host,
    scan: Arc<Scan>,
}

impl Scanned {
    /// Scans a text.
    pub fn new(text: Arc<str>, host: Host) -> Self {
        let scan = Arc::new(scan(&text, host, &Macros::default()));
        Self { text, host, scan }
    }

    /// What was found.
    pub fn scan(&self) -> &Scan {
        &self.scan
    }

    fn is_of(&self, source: &Source) -> bool {
        Arc::ptr_eq(&self.text, &source.text) && self.host == source.host
    }
}

impl Paper {
    /// The scan of a document of a number, with the macros in force at its start.
    pub(super) fn scan(&self, number: usize, source: &Source, shared: &Macros) -> Scan {
        let made = self.scans.get(number).and_then(Option::as_ref);
        match made.filter(|made| made.is_of(source) && *shared == Macros::default()) {
            Some(made) => made.scan().clone(),
            None => scan(&source.text, source.host, shared),
        }
    }
}
