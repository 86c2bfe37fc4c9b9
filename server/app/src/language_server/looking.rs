//! A look: a judged picture, a document of it, and the offsets that a question is about.

use std::sync::Arc;
use std::sync::atomic::{AtomicU64, Ordering};

use indexwise_checker::paper::{DocumentAnalysis, View};
use indexwise_grammar::span::Span;
use tower_lsp::lsp_types::{Range, Url};

use super::capabilities::Client;
use super::convert::Places;
use super::reading::Judged;

/// What a question is answered from.
pub struct Look {
    /// The picture.
    pub judged: Judged,
    /// The document asked about.
    pub document: usize,
    /// As the client names it.
    pub uri: Url,
    /// The offsets asked about.
    pub offsets: Vec<u32>,
    /// The state of the paper's texts as it is.
    pub revision: Arc<AtomicU64>,
    /// The state that was looked at.
    pub at: u64,
}

impl Look {
    /// What was read.
    pub fn view(&self) -> &View {
        &self.judged.picture.view
    }

    /// What was found in the document.
    pub fn found(&self) -> Option<&DocumentAnalysis> {
        self.judged.found(self.document)
    }

    /// Whether the texts have moved on.
    pub fn has_moved(&self) -> bool {
        self.revision.load(Ordering::Acquire) != self.at
    }

    /// What the client can do.
    pub fn client(&self) -> &Client {
        &self.judged.picture.client
    }

    /// The first offset asked about.
    pub fn offset(&self) -> u32 {
        self.offsets.first().copied().unwrap_or_default()
    }

    /// The stretch asked about: from the first offset to the last.
    pub fn selection(&self) -> Span {
        let end = self.offsets.last().copied().unwrap_or_default();
        Span { start: self.offset().min(end), end: end.max(self.offset()) }
    }

    /// The whole document.
    pub fn whole(&self) -> Span {
        Span::new(0, self.view().text(self.document).len())
    }

    /// The places of the document.
    pub fn places(&self) -> Option<Places<'_>> {
        self.judged.picture.places(self.document)
    }

    /// A range of the document.
    pub fn range(&self, span: Span) -> Range {
        self.places().map(|places| places.range(span)).unwrap_or_default()
    }
}
