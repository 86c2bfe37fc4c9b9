//! An edited paper, checked with a memory of its earlier versions, is judged as by a fresh check.
//!
//! `INDEXWISE_TESTS=full` makes many more edits.

#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::indexing_slicing)]

use std::sync::Arc;

use indexwise_algebra::draws::Draws;
use indexwise_checker::paper::{Cancel, Memory, Paper, Settings, Source, StepMode, View, check};
use indexwise_grammar::hosts::Host;
use indexwise_tests::{documents_below, generate};

/// What authors type, one piece at a time, and what turns everything over.
const PIECES: &[&str] = &[
    "_i",
    "^i",
    "_{ij}",
    "^j",
    "k",
    "\\mu",
    "{",
    "}",
    "$",
    "$$",
    " ",
    "\n",
    "\n\n",
    "=",
    "+",
    "\\partial_k ",
    "u_i v^i",
    "\\[ A_{ij} = B_{ji} \\]",
    "$ T^{ab} = T^{ba} $",
    "% indexwise: skip this\n",
    "% indexwise: i j k run from 1 to 3\n",
    "% indexwise: A_{ij} is symmetric\n",
    "% indexwise: allow dummy-levels in this file\n",
    "\\def\\strain{E_{ij}}",
    "\\newcommand{\\w}[1]{w_{#1}}",
    "\\strain",
    "\\w{ij}",
    " no sum. ",
    " vanishes ",
    "torsion ",
    "\\label{eq:w}",
    "\\begin{align}",
    "\\end{align}",
    "&",
    "\\\\",
    "é",
    "𝔸",
    "\r\n",
    "conventions\n",
    "  E_ij = u_i,j\n",
    "<!-- indexwise: check this -->",
];

/// Draws an edit: some bytes at a place, on character boundaries, and what takes their place.
fn edit(draws: &mut Draws, text: &str) -> String {
    let boundary = |at: u64| (0..=at as usize).rev().find(|at| text.is_char_boundary(*at)).unwrap_or(0);
    let length = text.len() as u64;
    let start = boundary(draws.below(length + 1));
    let gone = [0, 0, 1, 1, 3, 12, 80][draws.below(7) as usize];
    let end = boundary((start as u64 + gone).min(length)).max(start);
    let new = match draws.below(8) {
        0 => String::new(),
        // A stretch of the text itself: a formula typed twice.
        1 => {
            let from = boundary(draws.below(length + 1));
            text[from..boundary((from as u64 + 60).min(length)).max(from)].to_owned()
        }
        _ => PIECES[draws.below(PIECES.len() as u64) as usize].to_owned(),
    };
    format!("{}{new}{}", &text[..start], &text[end..])
}

/// Edits the documents of a paper in turns and compares every version with a fresh check.
#[track_caller]
fn compare(seed: u64, mut texts: Vec<(Host, String)>, edits: usize, settings: &Settings) {
    let mut draws = Draws::from_seed(seed);
    let mut memory = Memory::default();
    for number in 0..edits {
        let source = |(at, (host, text)): (usize, &(Host, String))| Source {
            path: format!("sheet {at}"),
            text: Arc::from(text.as_str()),
            host: *host,
        };
        let paper = Paper { documents: texts.iter().enumerate().map(source).collect(), ..Paper::default() };
        let view = View::again(&paper, &mut memory, &Cancel::default());
        let found = view.judge_again(settings, &mut memory, &Cancel::default());
        let fresh = check(&paper, settings, &Cancel::default());
        for (found, fresh) in found.documents.iter().zip(&fresh.documents) {
            assert_eq!(found, fresh, "seed {seed}, edit {number}");
        }
        // Some versions in between are never judged, or only in part.
        for _ in 0..draws.below(3) {
            let at = draws.below(texts.len() as u64) as usize;
            texts[at].1 = edit(&mut draws, &texts[at].1);
            if draws.below(4) == 0 {
                let paper = Paper { documents: texts.iter().enumerate().map(source).collect(), ..Paper::default() };
                let view = View::again(&paper, &mut memory, &Cancel::default());
                let cancel = Cancel::default();
                cancel.cancel();
                if draws.below(2) == 0 {
                    let _ = view.judge_again(settings, &mut memory, &cancel);
                }
            }
        }
    }
}

fn edits(usual: usize) -> usize {
    if std::env::var("INDEXWISE_TESTS").is_ok_and(|length| length == "full") { usual * 40 } else { usual }
}

fn quiet() -> Settings {
    Settings { steps: StepMode::Off, ..Settings::default() }
}

#[test]
fn documents_of_every_kind_are_judged_as_by_a_fresh_check() {
    for (seed, (_, host, text)) in
        (1..).zip(documents_below("fixtures").into_iter().chain(documents_below("documents")))
    {
        compare(seed, vec![(host, text)], edits(8), &quiet());
    }
}

#[test]
fn papers_of_several_documents_share_their_habits() {
    let parts = |seed| (0..3).map(|part| (Host::Latex, generate::document(seed * 3 + part, 3000))).collect();
    for seed in 1..4 {
        compare(seed, parts(seed), edits(30), &quiet());
    }
}

#[test]
fn steps_and_symbols_are_told_as_by_a_fresh_check() {
    let settings = Settings { symbols: true, ..Settings::default() };
    for (seed, (path, host, text)) in (1..).zip(documents_below("fixtures")) {
        if path.to_string_lossy().contains("steps-cartesian") || host == Host::Note {
            compare(seed, vec![(host, text)], edits(2), &settings);
        }
    }
}
