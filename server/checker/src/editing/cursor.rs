//! For tests: small documents whose cursor is the sign `‸`, twice for a selection.

#![allow(clippy::panic)]

use std::sync::Arc;

use indexwise_grammar::hosts::Host;
use indexwise_grammar::span::Span;

use crate::paper::{Cancel, DocumentAnalysis, Paper, Settings, Source, View};

/// The sign, right before the character that the cursor stands on.
const CURSOR: char = '‸';

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

pub(super) fn view(text: &str, host: Host) -> View {
    let source = Source { path: "sheet".into(), text: Arc::from(text), host };
    View::of(&Paper { documents: vec![source], ..Paper::default() }, &Cancel::default())
}

pub(super) fn analysis(view: &View) -> DocumentAnalysis {
    view.judge(&Settings::default(), &Cancel::default()).documents.remove(0)
}
