//! The language server as a client sees it: life cycle, errors, texts, diagnostics.

#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::indexing_slicing)]

mod client;
mod run;

use std::fs;

use client::{Client, counting, pulling, rich, rules, uri};
use run::{Folder, SLIP};
use serde_json::{Value, json};

/// A fresh folder without files.
fn folder() -> Folder {
    Folder::new(&[])
}

#[test]
fn a_session_ends_as_it_should_while_standard_input_stays_open() {
    let folder = folder();
    assert_eq!(Client::session(folder.path(), &rich()).end(), 0);
}

#[test]
fn exit_alone_and_the_end_of_the_stream_are_told_by_the_status() {
    let folder = folder();
    let mut client = Client::session(folder.path(), &rich());
    client.notify("exit", Value::Null);
    assert_eq!(client.status(), 1);
    let mut client = Client::session(folder.path(), &rich());
    client.hang_up();
    assert_eq!(client.status(), 1);
    let mut client = Client::start(folder.path(), "serve --stdio");
    client.send(&json!({"jsonrpc": "2.0", "method": "exit"}));
    assert_eq!(client.status(), 1);
}

#[cfg(unix)]
#[test]
fn the_server_ends_with_the_process_that_started_it() {
    let folder = folder();
    let mut parent = std::process::Command::new("sleep").arg("600").spawn().unwrap();
    let mut client = Client::start(folder.path(), "serve");
    client.request("initialize", json!({"processId": parent.id(), "rootUri": null, "capabilities": {}}));
    parent.kill().unwrap();
    parent.wait().unwrap();
    assert_eq!(client.status(), 1);
}

#[test]
fn messages_out_of_order_get_the_errors_of_the_protocol() {
    let folder = folder();
    let mut client = Client::start(folder.path(), "serve");
    let code = |answer: &Value| answer["error"]["code"].as_i64();
    let hover = json!({"textDocument": {"uri": "file:///a.tex"}, "position": {"line": 0, "character": 0}});
    assert_eq!(code(&client.request("textDocument/hover", hover.clone())), Some(-32002));
    assert_eq!(code(&client.request("shutdown", Value::Null)), Some(-32002));
    // What is told too early is passed over.
    client.open("file:///a.tex", "latex", SLIP);
    assert!(client.initialize(folder.path(), &rich(), &json!({}))["result"].is_object());
    assert_eq!(code(&client.initialize(folder.path(), &rich(), &json!({}))), Some(-32600));
    assert_eq!(client.result("textDocument/hover", hover.clone()), Value::Null);
    assert_eq!(client.result("shutdown", json!({})), Value::Null);
    assert_eq!(code(&client.request("textDocument/hover", hover)), Some(-32600));
    client.notify("exit", Value::Null);
    assert_eq!(client.status(), 0);
}

#[test]
fn unknown_and_malformed_messages_get_an_error_and_the_session_goes_on() {
    let folder = folder();
    let mut client = Client::session(folder.path(), &rich());
    let answer = client.request("indexwise/sing", json!({}));
    assert_eq!(answer["error"]["code"], -32601);
    client.notify("$/sing", json!({}));
    client.notify("indexwise/sing", json!({}));
    let answer = client.request("textDocument/hover", json!({"textDocument": 3}));
    assert_eq!(answer["error"]["code"], -32602);
    for (bytes, code) in [
        (&b"Content-Length: 7\r\n\r\n{\"json\""[..], -32700),
        (b"Content-Length: 3\r\n\r\n\"\xff\"", -32700),
        (b"nonsense\r\n\r\n", -32700),
    ] {
        client.send_bytes(bytes);
        // Nonsense is told of when the next header is found.
        let id = client.ask("textDocument/hover", json!({}));
        assert_eq!(client.refusal(), code);
        client.answer(id);
    }
    client.send(&json!([{"jsonrpc": "2.0", "id": 1, "method": "shutdown"}]));
    assert_eq!(client.refusal(), -32600);
    client.send(&json!({"jsonrpc": "2.0", "id": 7000, "params": {}}));
    assert_eq!(client.answer(7000)["error"]["code"], -32600);
    client.send(&json!({"jsonrpc": "2.0", "id": 7001, "method": 3}));
    assert_eq!(client.answer(7001)["error"]["code"], -32600);
    client.send(&json!({"jsonrpc": "2.0", "id": 99_999, "result": null}));
    let deep = format!("{}{}", "[".repeat(100_000), "]".repeat(100_000));
    client.send_bytes(format!("Content-Length: {}\r\n\r\n{deep}", deep.len()).as_bytes());
    assert_eq!(client.refusal(), -32700);
    assert_eq!(client.end(), 0);
}

#[test]
fn a_message_that_is_too_large_is_refused_and_not_kept() {
    let folder = folder();
    let mut client = Client::session(folder.path(), &rich());
    let length = (96 << 20) + 1;
    client.send_bytes(format!("Content-Length: {length}\r\n\r\n").as_bytes());
    let piece = vec![b' '; 1 << 20];
    (0..length / piece.len()).for_each(|_| client.send_bytes(&piece));
    client.send_bytes(&piece[..length % piece.len()]);
    assert_eq!(client.refusal(), -32600);
    assert_eq!(client.end(), 0);
}

#[test]
fn findings_are_published_with_all_that_a_client_takes() {
    let folder = folder();
    let mut client =
        Client::session_with(folder.path(), &rich(), "serve", json!({"rulePages": "https://example.org/rules"}));
    let name = uri(&folder.path().join("a.tex"));
    client.open(&name, "latex", SLIP);
    let diagnostics = client.diagnostics(&name);
    assert_eq!(rules(&diagnostics), ["free-index-mismatch"]);
    let found = &diagnostics[0];
    assert_eq!(found["source"], "indexwise");
    assert_eq!(found["severity"], 1);
    assert_eq!(found["range"]["start"], json!({"line": 0, "character": SLIP.find("k \\]").unwrap()}));
    assert_eq!(found["codeDescription"]["href"], "https://example.org/rules/free-index-mismatch.md");
    assert_eq!(found["data"]["rule"], "free-index-mismatch");
    assert_eq!(found["relatedInformation"][0]["location"]["uri"], name);
    assert_eq!(client.end(), 0);
}

#[test]
fn a_poor_client_gets_only_what_it_announces() {
    let folder = folder();
    let mut client = Client::session(folder.path(), &json!({}));
    let name = uri(&folder.path().join("a.tex"));
    client.open(&name, "latex", SLIP);
    let diagnostics = client.diagnostics(&name);
    let fields: Vec<&String> = diagnostics[0].as_object().unwrap().keys().collect();
    assert_eq!(fields, ["code", "message", "range", "severity", "source"]);
    assert_eq!(client.asked, [] as [Value; 0]);
    assert_eq!(client.end(), 0);
}

#[test]
fn diagnostics_are_pushed_or_pulled_and_never_both() {
    let folder = folder();
    let mut client = Client::session(folder.path(), &pulling());
    let name = uri(&folder.path().join("a.tex"));
    client.open(&name, "latex", SLIP);
    let ask = json!({"textDocument": {"uri": name}});
    let report = client.result("textDocument/diagnostic", ask.clone());
    assert_eq!(report["kind"], "full");
    assert_eq!(rules(report["items"].as_array().unwrap()), ["free-index-mismatch"]);
    let again = json!({"textDocument": {"uri": name}, "previousResultId": report["resultId"]});
    assert_eq!(client.result("textDocument/diagnostic", again)["kind"], "unchanged");
    let all = client.result("workspace/diagnostic", json!({"previousResultIds": []}));
    assert_eq!(all["items"][0]["uri"], name);
    assert_eq!(all["items"][0]["version"], 1);
    client.replace(&name, "");
    assert_eq!(client.result("textDocument/diagnostic", ask)["items"], json!([]));
    assert!(client.published(&name).is_none());
    assert_eq!(client.end(), 0);

    let mut client = Client::session(folder.path(), &rich());
    client.open(&name, "latex", SLIP);
    client.diagnostics(&name);
    assert!(client.answers_nothing("textDocument/diagnostic", &name));
    assert_eq!(client.end(), 0);
}

#[test]
fn changes_are_made_where_the_client_counts_them() {
    // Letters of one, two, three and four bytes, the last a surrogate pair, and both kinds of line ends.
    let text = "é𝔸ℓ\r\n\\[ A_i = B_i + 𝔸_k \\]\r\nend";
    for (encoding, column) in [("utf-8", 20), ("utf-16", 18), ("utf-32", 17)] {
        let folder = folder();
        let mut client = Client::session(folder.path(), &counting(encoding));
        let name = uri(&folder.path().join("a.tex"));
        client.open(&name, "latex", text);
        let diagnostics = client.diagnostics(&name);
        assert_eq!(rules(&diagnostics), ["free-index-mismatch"], "{encoding}");
        let range = &diagnostics[0]["range"];
        assert_eq!(range["start"], json!({"line": 1, "character": column}), "{encoding}");
        // The letter to blame is put right at the place that the server names; a second change stands on the first.
        let line_end = json!({"line": 0, "character": 99});
        client.change(
            &name,
            json!([{"range": range, "text": "i"},
            {"range": {"start": line_end, "end": line_end}, "text": " 𝔸"}]),
        );
        assert_eq!(rules(&client.diagnostics(&name)), [""; 0], "{encoding}");
        assert_eq!(client.end(), 0);
    }
}

#[test]
fn parts_that_are_not_saved_count_as_they_stand_in_the_editor() {
    let main: &[u8] =
        b"\\documentclass{article}\\newcommand{\\vel}[1]{v_{#1}}\\begin{document}\\input{part}\\end{document}";
    let folder = Folder::new(&[("main.tex", main), ("part.tex", b"on the disk")]);
    let mut client = Client::session(folder.path(), &rich());
    let (root, part) = (uri(&folder.path().join("main.tex")), uri(&folder.path().join("part.tex")));
    client.open(&part, "latex", "$\\vel{i} = B^j C_{ij} + D_i + E_k$");
    let first = json!(client.diagnostics(&part));
    assert_eq!(first.as_array().unwrap().len(), 1);
    // The macro gets another meaning in the root, which is not saved either.
    client.open(&root, "latex", &String::from_utf8_lossy(main).replace("v_{#1}", "s"));
    client.wait("other findings", |client| (client.published(&part)?["diagnostics"] != first).then_some(()));
    // The root goes back to what is on the disk.
    client.notify("textDocument/didClose", json!({"textDocument": {"uri": root}}));
    client.wait("the first findings", |client| (client.published(&part)?["diagnostics"] == first).then_some(()));
    // A part that asks for another part is read with it at once.
    fs::write(folder.path().join("more.tex"), SLIP).unwrap();
    let more = uri(&folder.path().join("more.tex"));
    client.replace(&part, "\\input{more}");
    client.wait("the finding in the other part", |client| {
        (client.published(&more)?["diagnostics"].as_array()?.len() == 1).then_some(())
    });
    client.replace(&part, "nothing more");
    client.wait("no finding any more", |client| {
        client.published(&more)?["diagnostics"].as_array()?.is_empty().then_some(())
    });
    assert_eq!(client.end(), 0);
}

#[test]
fn parts_that_are_opened_while_their_paper_is_being_read_count_at_once() {
    let main: &[u8] = b"\\documentclass{article}\\begin{document}\\input{part}\\end{document}";
    for _ in 0..10 {
        let folder = Folder::new(&[("main.tex", main), ("part.tex", b"on the disk"), ("more.tex", b"on the disk")]);
        let mut client = Client::session(folder.path(), &rich());
        let name = |file: &str| uri(&folder.path().join(file));
        let (root, part, more) = (name("main.tex"), name("part.tex"), name("more.tex"));
        client.open(&root, "latex", &String::from_utf8_lossy(main));
        client.open(&part, "latex", SLIP);
        client.replace(&part, &format!("{SLIP} \\input{{more}}"));
        client.open(&more, "latex", SLIP);
        assert_eq!(client.diagnostics(&more).len(), 1);
        assert_eq!(client.diagnostics(&part).len(), 1);
        client.notify("textDocument/didClose", json!({"textDocument": {"uri": more}}));
        client.wait("what is on the disk", |client| {
            client.published(&more)?["diagnostics"].as_array()?.is_empty().then_some(())
        });
        assert_eq!(client.end(), 0);
    }
}

#[test]
fn a_closed_text_has_no_diagnostics_any_more() {
    let folder = folder();
    let mut client = Client::session(folder.path(), &rich());
    let name = uri(&folder.path().join("a.tex"));
    client.open(&name, "latex", SLIP);
    client.diagnostics(&name);
    client.notify("textDocument/didClose", json!({"textDocument": {"uri": name}}));
    client.wait("nothing", |client| client.published(&name)?["diagnostics"].as_array()?.is_empty().then_some(()));
    assert_eq!(client.end(), 0);
}

#[test]
fn languages_are_told_apart_by_their_names() {
    let folder = folder();
    let mut client = Client::session(folder.path(), &rich());
    for (language, text, found) in [
        ("markdown", "A word.\n\n    \\[ A_i = B^j C_{ij} + D_i + E_k \\]\n\n$A_i = B^j C_{ij} + D_i + E_k$\n", 1),
        ("quarto", "$A_i = B^j C_{ij} + D_i + E_k$", 1),
        ("indexwise-note", "  A_i = B^j C_ij + D_i + E_k\n", 1),
        ("plaintex", SLIP, 1),
    ] {
        let name = format!("untitled:{language}");
        client.open(&name, language, text);
        assert_eq!(client.diagnostics(&name).len(), found, "{language}");
    }
    assert_eq!(client.end(), 0);
}

#[test]
fn settings_and_configuration_files_change_what_is_found() {
    let folder = folder();
    let mut client = Client::session(folder.path(), &rich());
    let name = uri(&folder.path().join("a.tex"));
    client.open(&name, "latex", SLIP);
    assert_eq!(client.diagnostics(&name).len(), 1);
    let wait_for = |client: &mut Client, count: usize, severity: u64| {
        client.wait("other diagnostics", |client| {
            let list = client.published(&name)?["diagnostics"].as_array()?;
            (list.len() == count && list.iter().all(|one| one["severity"] == severity)).then_some(())
        });
    };
    client.settings = json!({"rules": {"free-index-mismatch": "off"}});
    client.notify("workspace/didChangeConfiguration", json!({"settings": null}));
    wait_for(&mut client, 0, 0);
    client.settings = json!({});
    client.notify("workspace/didChangeConfiguration", json!({"settings": null}));
    wait_for(&mut client, 1, 1);
    let file = folder.path().join("indexwise.toml");
    fs::write(&file, "[rules]\nfree-index-mismatch = 'hint'\n").unwrap();
    let changed = json!({"changes": [{"uri": uri(&file), "type": 1}]});
    client.notify("workspace/didChangeWatchedFiles", changed.clone());
    wait_for(&mut client, 1, 4);
    // One that cannot be read is told of, and the last one holds.
    fs::write(&file, "[rules\n").unwrap();
    client.notify("workspace/didChangeWatchedFiles", changed);
    client.wait("a message", |client| {
        let shown = |told: &&Value| told["method"] == "window/showMessage";
        client.told.iter().find(shown).map(|told| assert!(told["params"]["message"].as_str().unwrap().contains("toml")))
    });
    client.replace(&name, &format!("{SLIP} "));
    assert_eq!(client.diagnostics(&name)[0]["severity"], 4);
    let registered = |method: &str| {
        client.asked.iter().any(|asked| {
            let all = asked["params"]["registrations"].as_array();
            all.is_some_and(|all| all.iter().any(|one| one["method"] == method))
        })
    };
    assert!(registered("workspace/didChangeWatchedFiles") && registered("workspace/didChangeConfiguration"));
    assert_eq!(client.end(), 0);
}

#[test]
fn what_is_wrong_with_a_configuration_is_shown_in_it() {
    let folder = Folder::new(&[("indexwise.toml", b"[conventions]\nlines = ['B_{ij} is marvellous']\n")]);
    let mut client = Client::session(folder.path(), &rich());
    let (name, file) = (uri(&folder.path().join("a.tex")), folder.path().join("indexwise.toml"));
    client.open(&name, "latex", SLIP);
    let found = client.wait("a finding", |client| client.published(&uri(&file)).cloned());
    assert_eq!(rules(found["diagnostics"].as_array().unwrap()), ["convention-unreadable"]);
    assert_eq!(found["diagnostics"][0]["range"]["start"], json!({"line": 1, "character": 20}));
    fs::remove_file(&file).unwrap();
    client.notify("workspace/didChangeWatchedFiles", json!({"changes": [{"uri": uri(&file), "type": 3}]}));
    client.wait("no finding", |client| {
        client.published(&uri(&file))?["diagnostics"].as_array()?.is_empty().then_some(())
    });
    assert_eq!(client.end(), 0);
}

/// A sign got lost on the way.
const DERIVATION: &str = "conventions
  i j k l m run from 1 to 3
  i j k l m are cartesian
  u_i v_i are vectors

  q_i = epsilon_ijk epsilon_klm u_j v_l u_m
      = u_j v_i u_j + u_j v_j u_i
";

#[test]
fn verdicts_come_after_the_rest() {
    let folder = folder();
    let mut client = Client::session(folder.path(), &rich());
    let name = uri(&folder.path().join("a.inote"));
    client.open(&name, "indexwise-note", DERIVATION);
    client.wait("the verdict", |client| {
        let list = client.published(&name)?["diagnostics"].as_array()?;
        list.iter().any(|one| one["code"].as_str().unwrap().starts_with("step-")).then_some(())
    });
    let counts: Vec<usize> = client
        .told
        .iter()
        .filter(|told| told["method"] == "textDocument/publishDiagnostics")
        .map(|told| told["params"]["diagnostics"].as_array().unwrap().len())
        .collect();
    assert_eq!(counts.first(), Some(&0), "{counts:?}");
    // Where nobody touched it, the verdict holds on until it is found again; where somebody did, it is gone at once.
    let first = |client: &mut Client, version: u64| {
        client.diagnostics(&name);
        let of_version = |told: &&Value| told["params"]["version"] == version && told["params"]["uri"] == name;
        client.told.iter().find(of_version).map(|told| told["params"]["diagnostics"][0]["range"]["start"].clone())
    };
    client.replace(&name, &format!("A line before.\n\n{DERIVATION}"));
    assert_eq!(first(&mut client, 2).unwrap()["line"], 8);
    client.replace(&name, &DERIVATION.replace("u_j v_i u_j +", "u_j v_i u_j -"));
    assert_eq!(first(&mut client, 3), Some(Value::Null));
    client.settings = json!({"steps": "off"});
    client.notify("workspace/didChangeConfiguration", json!({"settings": null}));
    client.wait("none", |client| client.published(&name)?["diagnostics"].as_array()?.is_empty().then_some(()));
    assert_eq!(client.end(), 0);
}

#[test]
fn a_fix_makes_its_finding_go_away() {
    for (capabilities, versioned) in [(rich(), true), (poor_with_actions(), false)] {
        let folder = folder();
        let mut client = Client::session(folder.path(), &capabilities);
        let name = uri(&folder.path().join("a.tex"));
        client.open(&name, "latex", SLIP);
        let found = client.diagnostics(&name)[0].clone();
        let ask = json!({"textDocument": {"uri": name}, "range": found["range"],
            "context": {"diagnostics": [found], "only": ["quickfix"]}});
        let actions = client.result("textDocument/codeAction", ask);
        let action = &actions[0];
        assert_eq!(action["kind"], "quickfix");
        assert_eq!(action["diagnostics"][0]["code"], "free-index-mismatch");
        let edits = if versioned {
            assert_eq!(action["edit"]["documentChanges"][0]["textDocument"], json!({"uri": name, "version": 1}));
            action["edit"]["documentChanges"][0]["edits"].clone()
        } else {
            action["edit"]["changes"][&name].clone()
        };
        let changes: Vec<Value> = edits
            .as_array()
            .unwrap()
            .iter()
            .rev()
            .map(|edit| json!({"range": edit["range"], "text": edit["newText"]}))
            .collect();
        client.change(&name, json!(changes));
        assert_eq!(rules(&client.diagnostics(&name)), [""; 0]);
        let none = json!({"textDocument": {"uri": name}, "range": found["range"],
            "context": {"diagnostics": [], "only": ["source.organizeImports"]}});
        assert_eq!(client.result("textDocument/codeAction", none), json!([]));
        assert_eq!(client.end(), 0);
    }
}

fn poor_with_actions() -> Value {
    let kinds = json!({"codeActionKind": {"valueSet": ["quickfix"]}});
    json!({"textDocument": {"codeAction": {"codeActionLiteralSupport": kinds}}})
}
