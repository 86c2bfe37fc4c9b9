//! Prints how every statement of a file is read: each unit with its score, and the letters out of balance.
//!
//! `cargo run -p indexwise-checker --example readings -- FILE [LINE]`. For people who tune the inference.

use std::sync::Arc;

use indexwise_checker::paper::{Paper, Source, readings};
use indexwise_grammar::hosts::Host;

fn main() {
    let mut arguments = std::env::args().skip(1);
    let path = arguments.next().unwrap_or_default();
    let line: Option<usize> = arguments.next().and_then(|line| line.parse().ok());
    let text = match std::fs::read_to_string(&path) {
        Ok(text) => text,
        Err(error) => return eprintln!("{path}: {error}"),
    };
    let host = match path.rsplit('.').next() {
        Some("md" | "qmd" | "Rmd") => Host::Markdown,
        Some("inote") => Host::Note,
        _ => Host::Latex,
    };
    let paper = Paper { documents: vec![Source { path, text: Arc::from(text.as_str()), host }], ..Paper::default() };
    for (span, words) in readings(&paper) {
        let at = text.get(..span.start as usize).map_or(0, |before| before.matches('\n').count()) + 1;
        if span.is_empty() || line.is_none_or(|line| line.abs_diff(at) < 3) {
            println!("{at}: {}\n{words}", span.of(&text).split_whitespace().collect::<Vec<_>>().join(" "));
        }
    }
}
