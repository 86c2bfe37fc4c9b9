//! What the tests of the questions share: a paper of one text, and the cursor `‸` in it.

#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::indexing_slicing)]

use std::sync::Arc;

use indexwise_grammar::hosts::Host;
use indexwise_grammar::span::Span;

use crate::finding::Edit;
use crate::paper::{Cancel, Paper, Source, View};

/// The sign of the cursor; the offset is that of what comes after it.
pub(super) const CURSOR: char = '‸';

/// A paper of documents and styles.
pub(super) fn paper_of(documents: &[(Host, &str)], styles: &[&str]) -> Paper {
    let source =
        |number: usize, host: Host, text: &str| Source { path: format!("sheet-{number}"), text: Arc::from(text), host };
    let documents = documents.iter().enumerate().map(|(number, (host, text))| source(number, *host, text));
    let styles = styles.iter().enumerate().map(|(number, text)| source(number, Host::Latex, text));
    Paper { documents: documents.collect(), styles: styles.collect(), ..Paper::default() }
}

/// A view of one text.
pub(super) fn view_of(host: Host, text: &str) -> View {
    View::of(&paper_of(&[(host, text)], &[]), &Cancel::default())
}

/// A text without its cursor, and where the cursor stood.
#[track_caller]
pub(super) fn with_cursor(text: &str) -> (String, u32) {
    let at = text.find(CURSOR).expect("a cursor");
    (text.replace(CURSOR, ""), u32::try_from(at).unwrap())
}

/// A text with every span put into `⟦..⟧`.
pub(super) fn marked(text: &str, spans: &[Span]) -> String {
    let mut spans = spans.to_vec();
    spans.sort_unstable();
    let (mut out, mut done) = (String::new(), 0);
    for span in spans {
        out.push_str(&text[done..span.start as usize]);
        out.push_str(&format!("⟦{}⟧", span.of(text)));
        done = span.end as usize;
    }
    out + &text[done..]
}

/// A text with edits made, which have to be in order and apart.
#[track_caller]
pub(super) fn edited(text: &str, edits: &[Edit]) -> String {
    let (mut out, mut done) = (String::new(), 0);
    for edit in edits {
        assert!(done <= edit.span.start as usize, "{edits:?}");
        out.push_str(&text[done..edit.span.start as usize]);
        out.push_str(&edit.text);
        done = edit.span.end as usize;
    }
    out + &text[done..]
}
