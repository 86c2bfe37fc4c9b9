//! The order of what is typed: after any number of edits the server is where a fresh one would be.
//!
//! Edits are random with a fixed seed. `INDEXWISE_TESTS=full` makes many more of them.

#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::indexing_slicing)]

mod client;
mod run;

use client::{Client, counting, uri};
use run::Folder;
use serde_json::{Value, json};

/// Edits in the comparison with a fresh server: for each encoding and kind of document.
const EDITS: usize = 40;
const EDITS_IN_FULL: usize = 2300;

/// Edits that nothing waits for.
const RAPID: usize = 2000;

/// What is typed or deleted: structure that opens and closes, indices, line ends, letters of up to four bytes.
const PIECES: [&str; 24] = [
    "",
    "",
    "",
    "i",
    "k",
    "_j",
    "^k",
    "_{ij}",
    "$",
    "\n",
    "\r\n",
    "\r",
    " ",
    "é",
    "𝔸",
    "𝔸_i",
    "\\mu",
    "{",
    "}",
    "%",
    " = ",
    "\n\n$ A_i = B^j C_{ij} + D_i + E_k $\n\n",
    "\\nabla_i ",
    "\u{2028}",
];

const LATEX: &str = "\\newcommand{\\vel}[1]{v_{#1}}\r\nThe waves 𝔸:\r\n\\begin{equation}\\label{eq:é}\r\n  \
    A_i = B^j C_{ij} + D_i + E_k\r\n\\end{equation}\r\nand $\\vel{i} = \\delta_i^j v_j$, $T^{ab}{}_{;b} = 0$.\r\n";
const MARKDOWN: &str = "# Wellen 𝔸\n\nIt holds $A_i = B^j C_{ij} + D_i + E_k$ — é.\n\n$$\nS^{ab} u_a = q^b + p_a\n$$\n";
const NOTE: &str =
    "conventions\n  i j k run from 1 to 3\n\nDie Fläche 𝔸:\n\n  A_i = B_j C_ij + D_i + E_k\n  w_i = S_ij v_j\n";

/// Numbers that look random; the generator is Knuth's MMIX one, from memory.
struct Random(u64);

impl Random {
    fn below(&mut self, bound: usize) -> usize {
        self.0 = self.0.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        (self.0 >> 33) as usize % bound
    }
}

/// The position of an offset, counted from the start.
fn position(text: &str, offset: usize, encoding: &str) -> Value {
    let before = &text[..offset];
    let mut line = 0;
    let mut start = 0;
    let bytes = before.as_bytes();
    for (at, byte) in bytes.iter().enumerate() {
        // The text after the offset decides whether a carriage return at the end stands alone.
        let pair = *byte == b'\r' && text.as_bytes().get(at + 1) == Some(&b'\n');
        if *byte == b'\n' || *byte == b'\r' && !pair {
            line += 1;
            start = at + 1;
        }
    }
    let column = &before[start..];
    let character = match encoding {
        "utf-8" => column.len(),
        "utf-16" => column.encode_utf16().count(),
        _ => column.chars().count(),
    };
    json!({"line": line, "character": character})
}

/// A place between two characters that a position can name.
fn place(text: &str, random: &mut Random) -> usize {
    loop {
        let at = random.below(text.len() + 1);
        if text.is_char_boundary(at) && !is_in_pair(text, at) {
            return at;
        }
    }
}

/// Between a carriage return and its line feed there is no position.
fn is_in_pair(text: &str, at: usize) -> bool {
    text[..at].ends_with('\r') && text[at..].starts_with('\n')
}

/// Makes a random edit, and says it as a change.
fn edit(text: &mut String, random: &mut Random, encoding: &str) -> Value {
    let start = place(text, random);
    let rest: Vec<usize> = text[start..].char_indices().map(|(at, _)| start + at).chain([text.len()]).collect();
    let mut end = rest[random.below(rest.len().min(4))];
    if is_in_pair(text, end) {
        end += 1;
    }
    // A text that grows too long makes the test slow, one that shrinks to nothing makes it empty.
    let piece = if text.len() > 1500 { "" } else { PIECES[random.below(PIECES.len())] };
    let change = json!({"range": {"start": position(text, start, encoding), "end": position(text, end, encoding)},
        "text": piece});
    text.replace_range(start..end, piece);
    change
}

/// What a session knows of a text.
fn known(client: &mut Client, name: &str, places: &[Value]) -> Value {
    let diagnostics = client.diagnostics(name);
    let document = json!({"uri": name});
    let tokens = client.result("textDocument/semanticTokens/full", json!({"textDocument": document}));
    let hovers: Vec<Value> = places
        .iter()
        .map(|place| client.result("textDocument/hover", json!({"textDocument": document, "position": place})))
        .collect();
    json!({"diagnostics": diagnostics, "tokens": tokens, "hovers": hovers})
}

/// Without verdicts, which come when they come.
fn session(folder: &Folder, encoding: &str, line: &str) -> Client {
    let settings = json!({"steps": "off"});
    Client::session_with(folder.path(), &counting(encoding), line, settings)
}

#[track_caller]
fn edited_is_as_fresh(encoding: &str, language: &str, ending: &str, start: &str, seed: u64) {
    let full = std::env::var("INDEXWISE_TESTS").is_ok_and(|kind| kind == "full");
    let edits = if full { EDITS_IN_FULL } else { EDITS };
    let folder = Folder::new(&[]);
    let name = uri(&folder.path().join("a")) + ending;
    let mut random = Random(seed);
    let mut text = start.to_owned();
    let mut edited = session(&folder, encoding, "serve");
    let mut fresh = session(&folder, encoding, "serve");
    edited.open(&name, language, &text);
    let mut done = 0;
    while done < edits {
        let burst = 1 + random.below(6);
        let changes: Vec<Value> = (0..burst).map(|_| edit(&mut text, &mut random, encoding)).collect();
        done += burst;
        // Several changes in one message, or one message each.
        if random.below(2) == 0 {
            edited.change(&name, json!(changes));
        } else {
            changes.iter().for_each(|change| edited.change(&name, json!([change])));
        }
        if random.below(12) == 0 {
            fresh = session(&folder, encoding, "serve");
        }
        // What was published for a text of the same version before is not what is waited for.
        fresh.forget();
        fresh.open(&name, language, &text);
        let places: Vec<Value> = (0..3).map(|_| position(&text, place(&text, &mut random), encoding)).collect();
        let want = known(&mut fresh, &name, &places);
        assert_eq!(known(&mut edited, &name, &places), want, "{encoding} {language} after {done} edits: {text:?}");
        fresh.notify("textDocument/didClose", json!({"textDocument": {"uri": name}}));
    }
    assert_eq!(edited.end(), 0);
}

#[test]
fn an_edited_latex_document_is_as_a_fresh_one() {
    for (seed, encoding) in ["utf-8", "utf-16", "utf-32"].into_iter().enumerate() {
        edited_is_as_fresh(encoding, "latex", ".tex", LATEX, seed as u64);
    }
}

#[test]
fn an_edited_markdown_page_is_as_a_fresh_one() {
    for (seed, encoding) in ["utf-8", "utf-16", "utf-32"].into_iter().enumerate() {
        edited_is_as_fresh(encoding, "markdown", ".md", MARKDOWN, 10 + seed as u64);
    }
}

#[test]
fn an_edited_note_is_as_a_fresh_one() {
    for (seed, encoding) in ["utf-8", "utf-16", "utf-32"].into_iter().enumerate() {
        edited_is_as_fresh(encoding, "indexwise-note", ".inote", NOTE, 20 + seed as u64);
    }
}

/// Edits and requests as fast as they can be sent.
fn rapid(threads: usize) {
    let folder = Folder::new(&[]);
    let name = uri(&folder.path().join("a")) + ".tex";
    let encoding = "utf-16";
    let mut random = Random(threads as u64);
    let mut text = LATEX.to_owned();
    let mut client = session(&folder, encoding, &format!("serve --threads {threads}"));
    client.open(&name, "latex", &text);
    let mut asked = Vec::new();
    for number in 0..RAPID {
        let change = edit(&mut text, &mut random, encoding);
        client.change(&name, json!([change]));
        let at = position(&text, place(&text, &mut random), encoding);
        let document = json!({"uri": name});
        match number % 10 {
            0 => {
                asked.push((true, client.ask("textDocument/hover", json!({"textDocument": document, "position": at}))))
            }
            5 => {
                asked.push((false, client.ask("textDocument/semanticTokens/full", json!({"textDocument": document}))));
            }
            7 => {
                let id = client.ask("textDocument/semanticTokens/full", json!({"textDocument": document}));
                client.notify("$/cancelRequest", json!({"id": id}));
                asked.push((false, id));
            }
            _ => {}
        }
    }
    for (freshly, id) in asked {
        let answer = client.answer(id);
        let code = answer["error"]["code"].as_i64();
        // A hover is answered whatever comes after it; the rest may be told that the text has moved on, or is taken back.
        let right = code.is_none() || !freshly && matches!(code, Some(-32801 | -32800));
        assert!(right, "{answer}");
    }
    let places = [position(&text, place(&text, &mut random), encoding)];
    let found = known(&mut client, &name, &places);
    let mut fresh = session(&folder, encoding, "serve");
    fresh.open(&name, "latex", &text);
    assert_eq!(found, known(&mut fresh, &name, &places), "{text:?}");
    assert_eq!(client.end(), 0);
}

#[test]
fn rapid_edits_keep_their_order_on_one_thread() {
    rapid(1);
}

#[test]
fn rapid_edits_keep_their_order_on_four_threads() {
    rapid(4);
}
