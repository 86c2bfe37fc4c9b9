//! Every request of an editor, over the protocol: what is asked for comes, in the right shape and place.
//!
//! What is answered is tested where it is made, in the checker; here one answer of each kind stands for the others.

#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::indexing_slicing)]

mod client;
mod run;

use std::fs;

use client::{Client, rich, rules, uri};
use run::{Folder, SLIP};
use serde_json::{Value, json};

/// A page of the shell paper, in letters of up to four bytes.
const PAGE: &str = r"\documentclass{article}
\newcommand{\strain}[1]{E_{#1}}
% indexwise: i j k l run from 1 to 3; i j k l are cartesian; S_{ij} is symmetric
\begin{document}
𝔸 The stress does the work
\begin{equation}\label{eq:work}
  W = S_{ij} \strain{ij}
\end{equation}
and from \eqref{eq:work} follows
\begin{align}\label{eq:chain}
  P &= S_{ij} \partial_i v_j \\
    &= S_{ji} \partial_j v_i \\
    &= S_{ij} \partial_j v_i
\end{align}
\end{document}
";

/// A session with one open text.
struct Session {
    client: Client,
    name: String,
    text: String,
    folder: Folder,
}

impl Session {
    fn new(capabilities: &Value, text: &str) -> Self {
        Self::with(capabilities, text, json!({}))
    }

    fn with(capabilities: &Value, text: &str, settings: Value) -> Self {
        let folder = Folder::new(&[("a.tex", text.as_bytes())]);
        let mut client = Client::session_with(folder.path(), capabilities, "serve", settings);
        let name = uri(&folder.path().join("a.tex"));
        client.open(&name, "latex", text);
        client.diagnostics(&name);
        Self { client, name, text: text.to_owned(), folder }
    }

    /// The position of the end of a text that stands once, in bytes.
    #[track_caller]
    fn after(&self, words: &str) -> Value {
        let at = self.text.find(words).expect("the words") + words.len();
        let line_start = self.text[..at].rfind('\n').map_or(0, |end| end + 1);
        json!({"line": self.text[..at].matches('\n').count(), "character": at - line_start})
    }

    #[track_caller]
    fn at(&mut self, method: &str, words: &str, more: Value) -> Value {
        let mut params = json!({"textDocument": {"uri": self.name}, "position": self.after(words)});
        params.as_object_mut().unwrap().extend(more.as_object().unwrap().clone());
        self.client.result(method, params)
    }

    #[track_caller]
    fn of_document(&mut self, method: &str) -> Value {
        self.client.result(method, json!({"textDocument": {"uri": self.name}}))
    }

    fn end(self) {
        assert_eq!(self.client.end(), 0);
    }
}

/// What stands at a range of a text, in bytes.
fn text_at<'t>(text: &'t str, range: &Value) -> &'t str {
    let offset = |position: &Value| {
        let line = position["line"].as_u64().unwrap() as usize;
        let start: usize = text.split_inclusive('\n').take(line).map(str::len).sum();
        start + position["character"].as_u64().unwrap() as usize
    };
    &text[offset(&range["start"])..offset(&range["end"])]
}

/// How often every text stands in a list of ranges.
fn texts<'t>(text: &'t str, ranges: &Value, at: &str) -> Vec<&'t str> {
    ranges.as_array().unwrap().iter().map(|one| text_at(text, one.pointer(at).unwrap())).collect()
}

#[test]
fn hovering_tells_of_an_index_in_the_form_that_is_taken() {
    for (capabilities, kind) in [(rich(), "markdown"), (json!({"general": {"positionEncodings": ["utf-8"]}}), "")] {
        let mut session = Session::new(&capabilities, PAGE);
        let hover = session.at("textDocument/hover", "W = S_{", json!({}));
        let contents = &hover["contents"];
        let told = if kind.is_empty() { contents.as_str() } else { contents["value"].as_str() };
        assert_eq!(contents["kind"].as_str().unwrap_or_default(), kind);
        assert_eq!(text_at(PAGE, &hover["range"]), "i");
        assert!(told.unwrap().contains('S'), "{hover}");
        assert_eq!(session.at("textDocument/hover", "The str", json!({})), Value::Null);
        session.end();
    }
}

#[test]
fn an_index_lights_up_with_its_partner() {
    let mut session = Session::new(&rich(), PAGE);
    let lights = session.at("textDocument/documentHighlight", "P &= S_{", json!({}));
    assert_eq!(texts(PAGE, &lights, "/range"), ["i", "i"]);
    session.end();
}

#[test]
fn references_and_definitions_lead_through_the_paper() {
    let mut session = Session::new(&rich(), PAGE);
    let all = json!({"context": {"includeDeclaration": true}});
    let found = session.at("textDocument/references", "\\eqref{eq:wo", all);
    assert_eq!(texts(PAGE, &found, "/range"), ["eq:work", "eq:work"]);
    let found = session.at("textDocument/definition", "W = S_{ij} \\stra", json!({}));
    assert_eq!(found[0]["uri"], session.name);
    assert_eq!(found[0]["range"]["start"]["line"], 1);
    session.end();
}

#[test]
fn a_dummy_is_renamed_in_its_term_and_a_collision_refused() {
    let mut session = Session::new(&rich(), PAGE);
    let prepared = session.at("textDocument/prepareRename", "P &= S_{", json!({}));
    assert_eq!((prepared["placeholder"].as_str(), text_at(PAGE, &prepared["range"])), (Some("i"), "i"));
    let edit = session.at("textDocument/rename", "P &= S_{", json!({"newName": "k"}));
    let edits = &edit["documentChanges"][0]["edits"];
    assert_eq!(texts(PAGE, edits, "/range"), ["i", "i"]);
    let params = json!({"textDocument": {"uri": session.name}, "position": session.after("P &= S_{"), "newName": "j"});
    let refused = session.client.request("textDocument/rename", params);
    assert_eq!(refused["error"]["code"], -32803);
    assert!(refused["error"]["message"].as_str().unwrap().contains('j'), "{refused}");
    session.end();
}

#[test]
fn tokens_stand_on_their_letters_and_a_range_has_those_of_the_whole() {
    let mut session = Session::new(&rich(), PAGE);
    let whole = session.of_document("textDocument/semanticTokens/full");
    let (mut line, mut column) = (0, 0);
    let mut letters = Vec::new();
    for token in whole["data"].as_array().unwrap().chunks(5) {
        let number = |at: usize| token[at].as_u64().unwrap();
        column = if number(0) == 0 { column + number(1) } else { number(1) };
        line += number(0);
        let range = json!({"start": {"line": line, "character": column},
            "end": {"line": line, "character": column + number(2)}});
        letters.push((text_at(PAGE, &range), number(3)));
    }
    assert!(letters.contains(&("S", 3)) && letters.contains(&("i", 1)), "{letters:?}");
    let range = json!({"start": {"line": 0, "character": 0}, "end": {"line": 99, "character": 0}});
    let params = json!({"textDocument": {"uri": session.name}, "range": range});
    assert_eq!(session.client.result("textDocument/semanticTokens/range", params), whole);
    session.end();
}

#[test]
fn completion_owes_what_the_left_side_has() {
    let text = "\\[ A_i = B^j C_{ij} + D_ \\]\n";
    let mut session = Session::new(&rich(), text);
    let list = session.at("textDocument/completion", "D_", json!({}));
    let first = &list["items"][0];
    assert_eq!(first["textEdit"]["newText"], "i", "{list}");
    session.end();
}

#[test]
fn hints_are_given_to_those_who_want_them() {
    for (wanted, some) in [(true, true), (false, false)] {
        let mut session = Session::with(&rich(), "\\[ A_i = B^j C_{ij} + D_i \\]\n", json!({"inlayHints": wanted}));
        let range = json!({"start": {"line": 0, "character": 0}, "end": {"line": 9, "character": 0}});
        let params = json!({"textDocument": {"uri": session.name}, "range": range});
        let hints = session.client.result("textDocument/inlayHint", params);
        assert_eq!(!hints.as_array().unwrap().is_empty(), some, "{hints}");
        session.end();
    }
}

#[test]
fn a_derivation_is_checked_by_its_lens() {
    let mut session = Session::new(&rich(), PAGE);
    let lenses = session.of_document("textDocument/codeLens");
    let command = &lenses[0]["command"];
    assert_eq!(command["command"], "indexwise.checkDerivation", "{lenses}");
    let params = json!({"command": command["command"], "arguments": command["arguments"]});
    session.client.result("workspace/executeCommand", params);
    let edit = session
        .client
        .wait("an edit", |client| client.asked.iter().find(|asked| asked["method"] == "workspace/applyEdit").cloned());
    let edit = &edit["params"]["edit"]["documentChanges"][0]["edits"][0];
    session.client.change(&session.name.clone(), json!([{"range": edit["range"], "text": edit["newText"]}]));
    // The verdicts are asked for again when they are there.
    session.client.wait("lenses to be asked for", |client| {
        client.asked.iter().any(|asked| asked["method"] == "workspace/codeLens/refresh").then_some(())
    });
    let lenses = session.of_document("textDocument/codeLens");
    assert!(lenses[0]["command"]["title"].as_str().unwrap().contains("verified"), "{lenses}");
    session.end();
}

#[test]
fn symbols_folds_and_selections_follow_the_document() {
    let mut session = Session::new(&rich(), PAGE);
    let symbols = session.of_document("textDocument/documentSymbol");
    let names: Vec<&str> = symbols.as_array().unwrap().iter().map(|one| one["name"].as_str().unwrap()).collect();
    assert!(names.contains(&"eq:work"), "{names:?}");
    let found = session.client.result("workspace/symbol", json!({"query": "WORK"}));
    assert_eq!(found[0]["name"], "eq:work");
    let folds = session.of_document("textDocument/foldingRange");
    assert!(!folds.as_array().unwrap().is_empty());
    let positions = [session.after("P &= S_{"), session.after("The str")];
    let params = json!({"textDocument": {"uri": session.name}, "positions": positions});
    let chosen = session.client.result("textDocument/selectionRange", params);
    assert_eq!(chosen.as_array().unwrap().len(), 2);
    assert_ne!(chosen[0]["parent"], Value::Null);
    session.end();
}

#[test]
fn commands_answer_and_unknown_ones_are_refused() {
    let mut session = Session::new(&rich(), PAGE);
    let place = json!({"textDocument": {"uri": session.name}, "position": session.after("W = S_{")});
    let mut run = |command: &str, argument: Value| {
        let params = json!({"command": command, "arguments": [argument]});
        session.client.request("workspace/executeCommand", params)
    };
    assert!(run("indexwise.writeOut", place.clone())["result"]["sum"]["latex"].as_str().unwrap().contains('+'));
    let page = run("indexwise.explain", json!("index-thrice"));
    assert!(page["result"]["markdown"].as_str().unwrap().contains("## Wrong"));
    let kernels = run("indexwise.symbolTable", place)["result"]["kernels"].take();
    assert!(kernels.as_array().unwrap().iter().any(|one| one["kernel"] == "S" && one["declared"] == true), "{kernels}");
    assert_eq!(run("indexwise.explain", json!("likeness"))["error"]["code"], -32602);
    assert_eq!(run("indexwise.sing", json!({}))["error"]["code"], -32602);
    assert_eq!(run("indexwise.writeOut", json!(3))["error"]["code"], -32602);
    session.end();
}

#[test]
fn the_ledger_of_a_statement_is_given() {
    let mut session = Session::new(&rich(), SLIP);
    let ledger = session.at("indexwise/ledger", "A_", json!({}));
    let rows = ledger["rows"].as_array().unwrap();
    assert_eq!(rows[0]["title"], "left side");
    assert_eq!(rows[0]["free"][0]["letter"], "i");
    assert!(rows.iter().any(|row| row["summed"][0]["letter"] == "j"), "{ledger}");
    assert_eq!(text_at(SLIP, &ledger["range"]), ledger["text"]);
    session.end();
}

#[test]
fn a_client_that_takes_commands_alone_has_its_fix_made() {
    let capabilities = json!({"workspace": {"applyEdit": true}});
    let mut session = Session::new(&capabilities, SLIP);
    let found = session.client.diagnostics(&session.name.clone())[0].clone();
    let params = json!({"textDocument": {"uri": session.name}, "range": found["range"],
        "context": {"diagnostics": [found], "only": ["quickfix"]}});
    let command = session.client.result("textDocument/codeAction", params)[0].clone();
    let params = json!({"command": command["command"], "arguments": command["arguments"]});
    assert_eq!(session.client.result("workspace/executeCommand", params), Value::Null);
    let asked = session
        .client
        .wait("an edit", |client| client.asked.iter().find(|asked| asked["method"] == "workspace/applyEdit").cloned());
    let edit = asked["params"]["edit"]["changes"][&session.name][0].clone();
    session.client.change(&session.name.clone(), json!([{"range": edit["range"], "text": edit["newText"]}]));
    assert_eq!(rules(&session.client.diagnostics(&session.name.clone())), [""; 0]);
    session.end();
}

#[test]
fn a_text_that_is_not_open_has_nothing_to_say() {
    let mut session = Session::new(&rich(), SLIP);
    let other = uri(session.folder.path()) + "/b.tex";
    fs::write(session.folder.path().join("b.tex"), SLIP).unwrap();
    let place = json!({"textDocument": {"uri": other}, "position": {"line": 0, "character": 3}});
    for method in ["textDocument/hover", "textDocument/documentHighlight", "textDocument/completion"] {
        assert_eq!(session.client.result(method, place.clone()), Value::Null, "{method}");
    }
    session.end();
}
