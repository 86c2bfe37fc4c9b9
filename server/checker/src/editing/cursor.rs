//! For tests: small documents whose cursor is the sign `‸`, twice for a selection.

#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::indexing_slicing)]

use std::sync::Arc;

use indexwise_grammar::hosts::Host;
use indexwise_grammar::span::Span;

use crate::paper::{Cancel, DocumentAnalysis, Paper, Settings, Source, View};

/// The sign, right before the character that the cursor stands on.
pub(super) const CURSOR: char = '‸';

/// A document with a selection in it.
pub(super) struct Placed {
    pub view: View,
    pub text: String,
    pub selection: Span,
}

impl Placed {
    #[track_caller]
    pub fn new(text: &str, host: Host) -> Self {
        let signs: Vec<usize> = text.match_indices(CURSOR).map(|(at, _)| at).collect();
        let (first, second) = match signs.as_slice() {
            [one] => (*one, *one),
            [one, two] => (*one, two - CURSOR.len_utf8()),
            _ => panic!("one cursor or two: {text}"),
        };
        let text = text.replace(CURSOR, "");
        Self { view: view(&text, host), text, selection: Span::new(first, second) }
    }

    pub const fn at(&self) -> u32 {
        self.selection.start
    }

    pub fn analysis(&self) -> DocumentAnalysis {
        analysis(&self.view)
    }
}

/// A view of one text.
pub(super) fn view(text: &str, host: Host) -> View {
    View::of(&paper_of(&[(host, text)], &[]), &Cancel::default())
}

pub(super) fn analysis(view: &View) -> DocumentAnalysis {
    view.judge(&Settings::default(), &Cancel::default()).documents.remove(0)
}

/// A paper of documents and styles.
pub(super) fn paper_of(documents: &[(Host, &str)], styles: &[&str]) -> Paper {
    let source =
        |number: usize, host: Host, text: &str| Source { path: format!("sheet-{number}"), text: Arc::from(text), host };
    let documents = documents.iter().enumerate().map(|(number, (host, text))| source(number, *host, text));
    let styles = styles.iter().enumerate().map(|(number, text)| source(number, Host::Latex, text));
    Paper { documents: documents.collect(), styles: styles.collect(), ..Paper::default() }
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
