//! A scripted client: drives the built server over its standard input and output.
//!
//! It answers what the server asks, keeps what the server tells, and waits for what a test names, never longer than
//! `PATIENCE`; nothing here depends on how fast anything is.

#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, clippy::indexing_slicing, dead_code)]

use std::collections::HashMap;
use std::io::{BufRead, BufReader, Write};
use std::path::Path;
use std::process::{Child, ChildStdin, Command, Stdio};
use std::sync::mpsc::{Receiver, channel};
use std::time::{Duration, Instant};

use serde_json::{Value, json};

/// A server that has not answered for so long does not answer.
const PATIENCE: Duration = Duration::from_secs(120);

/// What happens when the server asks for a setting.
pub type Settings = Value;

/// A session.
pub struct Client {
    child: Child,
    input: Option<ChildStdin>,
    messages: Receiver<Value>,
    next: i64,
    answers: HashMap<i64, Value>,
    /// Every notification that came, in order.
    pub told: Vec<Value>,
    /// Every request that came, in order.
    pub asked: Vec<Value>,
    /// The settings that the server gets when it asks.
    pub settings: Settings,
    versions: HashMap<String, i64>,
}

/// What a client can do that can do everything.
pub fn rich() -> Value {
    json!({
        "general": {"positionEncodings": ["utf-8", "utf-16", "utf-32"]},
        "window": {"workDoneProgress": true},
        "workspace": {
            "applyEdit": true,
            "configuration": true,
            "didChangeConfiguration": {"dynamicRegistration": true},
            "didChangeWatchedFiles": {"dynamicRegistration": true},
            "workspaceEdit": {"documentChanges": true},
            "diagnostics": {"refreshSupport": true},
            "codeLens": {"refreshSupport": true},
            "inlayHint": {"refreshSupport": true},
            "semanticTokens": {"refreshSupport": true},
        },
        "textDocument": {
            "publishDiagnostics": {
                "relatedInformation": true, "codeDescriptionSupport": true, "dataSupport": true,
                "versionSupport": true, "tagSupport": {"valueSet": [1, 2]},
            },
            "hover": {"contentFormat": ["markdown", "plaintext"]},
            "codeAction": {
                "isPreferredSupport": true,
                "codeActionLiteralSupport": {"codeActionKind": {"valueSet": ["quickfix", "refactor", "source"]}},
            },
            "completion": {"completionItem": {"documentationFormat": ["markdown"], "snippetSupport": true}},
            "documentSymbol": {"hierarchicalDocumentSymbolSupport": true},
            "rename": {"prepareSupport": true},
        },
    })
}

/// What such a client can do that counts columns in one encoding.
pub fn counting(encoding: &str) -> Value {
    let mut capabilities = rich();
    capabilities["general"] = json!({"positionEncodings": [encoding]});
    capabilities
}

/// What such a client can do that asks for diagnostics.
pub fn pulling() -> Value {
    let mut capabilities = rich();
    capabilities["textDocument"]["diagnostic"] = json!({"dynamicRegistration": false});
    capabilities
}

impl Client {
    /// Starts the server with a line of arguments.
    pub fn start(folder: &Path, line: &str) -> Self {
        let mut command = Command::new(env!("CARGO_BIN_EXE_indexwise"));
        command.current_dir(folder).args(line.split_whitespace());
        let mut child =
            command.stdin(Stdio::piped()).stdout(Stdio::piped()).stderr(Stdio::inherit()).spawn().expect("the server");
        let (input, output) = (child.stdin.take(), child.stdout.take().expect("its output"));
        let (sender, messages) = channel();
        std::thread::spawn(move || {
            let mut output = BufReader::new(output);
            while let Some(message) = read(&mut output) {
                if sender.send(message).is_err() {
                    return;
                }
            }
        });
        Self {
            child,
            input,
            messages,
            next: 1,
            answers: HashMap::new(),
            told: Vec::new(),
            asked: Vec::new(),
            settings: json!({}),
            versions: HashMap::new(),
        }
    }

    /// Starts a session with these capabilities.
    pub fn session(folder: &Path, capabilities: &Value) -> Self {
        Self::session_with(folder, capabilities, "serve", json!({}))
    }

    /// Starts a session with these arguments and settings.
    pub fn session_with(folder: &Path, capabilities: &Value, line: &str, settings: Value) -> Self {
        let mut client = Self::start(folder, line);
        client.settings = settings.clone();
        let answer = client.initialize(folder, capabilities, &settings);
        assert!(answer["result"]["capabilities"].is_object(), "{answer}");
        client.notify("initialized", json!({}));
        client
    }

    /// The answer to `initialize`.
    pub fn initialize(&mut self, folder: &Path, capabilities: &Value, settings: &Value) -> Value {
        let root = uri(folder);
        let params = json!({"processId": std::process::id(), "rootUri": root, "capabilities": capabilities,
            "initializationOptions": settings, "workspaceFolders": [{"uri": root, "name": "paper"}]});
        self.request("initialize", params)
    }

    /// Sends bytes as they are.
    pub fn send_bytes(&mut self, bytes: &[u8]) {
        let input = self.input.as_mut().expect("an open input");
        // A server that has ended does not read; the test sees that in other ways.
        let _ = input.write_all(bytes).and_then(|()| input.flush());
    }

    /// Sends a message.
    pub fn send(&mut self, message: &Value) {
        let body = message.to_string();
        self.send_bytes(format!("Content-Length: {}\r\n\r\n{body}", body.len()).as_bytes());
    }

    /// Sends a notification.
    pub fn notify(&mut self, method: &str, params: Value) {
        self.send(&json!({"jsonrpc": "2.0", "method": method, "params": params}));
    }

    /// Sends a request; its number.
    pub fn ask(&mut self, method: &str, params: Value) -> i64 {
        let id = self.next;
        self.next += 1;
        self.send(&json!({"jsonrpc": "2.0", "id": id, "method": method, "params": params}));
        id
    }

    /// The answer to a request.
    #[track_caller]
    pub fn answer(&mut self, id: i64) -> Value {
        self.wait(&format!("the answer to {id}"), |client| client.answers.remove(&id))
    }

    /// Sends a request and waits for its answer.
    #[track_caller]
    pub fn request(&mut self, method: &str, params: Value) -> Value {
        let id = self.ask(method, params);
        self.answer(id)
    }

    /// Sends a request and waits for its result.
    #[track_caller]
    pub fn result(&mut self, method: &str, params: Value) -> Value {
        let mut answer = self.request(method, params);
        assert!(answer.get("error").is_none(), "{method}: {answer}");
        answer["result"].take()
    }

    /// Takes messages until something is there.
    #[track_caller]
    pub fn wait<T>(&mut self, what: &str, mut there: impl FnMut(&mut Self) -> Option<T>) -> T {
        let since = Instant::now();
        loop {
            if let Some(found) = there(self) {
                return found;
            }
            let left = PATIENCE.saturating_sub(since.elapsed());
            let message =
                self.messages.recv_timeout(left).unwrap_or_else(|_| panic!("{what} did not come: {:?}", self.told));
            self.take(message);
        }
    }

    /// Takes a message: keeps it, and answers it if it is a request.
    fn take(&mut self, message: Value) {
        let Some(method) = message["method"].as_str().map(str::to_owned) else {
            let id = message["id"].as_i64().unwrap_or(-1);
            self.answers.insert(id, message);
            return;
        };
        if message.get("id").is_none() {
            self.told.push(message);
            return;
        }
        let result = match method.as_str() {
            "workspace/configuration" => {
                let items = message["params"]["items"].as_array().unwrap();
                items.iter().map(|_| self.settings.clone()).collect()
            }
            "workspace/applyEdit" => json!({"applied": true}),
            _ => Value::Null,
        };
        self.send(&json!({"jsonrpc": "2.0", "id": message["id"], "result": result}));
        self.asked.push(message);
    }

    /// The answer to no request: an error whose number is null.
    #[track_caller]
    pub fn refusal(&mut self) -> i64 {
        let answer = self.wait("a refusal", |client| client.answers.remove(&-1));
        assert_eq!(answer["id"], Value::Null, "{answer}");
        answer["error"]["code"].as_i64().unwrap()
    }

    /// Opens a text.
    pub fn open(&mut self, uri: &str, language: &str, text: &str) {
        self.versions.insert(uri.to_owned(), 1);
        let document = json!({"uri": uri, "languageId": language, "version": 1, "text": text});
        self.notify("textDocument/didOpen", json!({"textDocument": document}));
    }

    /// Changes a text.
    pub fn change(&mut self, uri: &str, changes: Value) {
        let version = self.versions.get_mut(uri).expect("an open text");
        *version += 1;
        let document = json!({"uri": uri, "version": *version});
        self.notify("textDocument/didChange", json!({"textDocument": document, "contentChanges": changes}));
    }

    /// Puts a text in the place of another.
    pub fn replace(&mut self, uri: &str, text: &str) {
        self.change(uri, json!([{"text": text}]));
    }

    /// The diagnostics that were published last for the newest version of a text.
    #[track_caller]
    pub fn diagnostics(&mut self, uri: &str) -> Vec<Value> {
        let version = self.versions[uri];
        self.wait(&format!("diagnostics of {uri}, version {version}"), |client| {
            let published = client.published(uri)?;
            (published["version"] == version).then(|| published["diagnostics"].as_array().unwrap().clone())
        })
    }

    /// Forgets what was told. What is on its way has no version, since its text is closed.
    pub fn forget(&mut self) {
        self.told.clear();
    }

    /// What was published last for a text.
    pub fn published(&self, uri: &str) -> Option<&Value> {
        let published =
            |told: &&Value| told["method"] == "textDocument/publishDiagnostics" && told["params"]["uri"] == uri;
        self.told.iter().rev().find(published).map(|told| &told["params"])
    }

    /// Closes the session in the proper way; the exit status.
    pub fn end(mut self) -> i32 {
        assert_eq!(self.result("shutdown", Value::Null), Value::Null);
        self.notify("exit", Value::Null);
        self.status()
    }

    /// Closes standard input.
    pub fn hang_up(&mut self) {
        self.input = None;
    }

    /// Waits for the process to end; standard input stays as it is.
    #[track_caller]
    pub fn status(&mut self) -> i32 {
        let since = Instant::now();
        loop {
            if let Some(status) = self.child.try_wait().unwrap() {
                return status.code().expect("the server was killed");
            }
            assert!(since.elapsed() < PATIENCE, "the server does not end");
            std::thread::sleep(Duration::from_millis(5));
        }
    }
}

impl Drop for Client {
    fn drop(&mut self) {
        let _ = self.child.kill();
        let _ = self.child.wait();
    }
}

/// Reads a message; nothing at the end.
fn read(output: &mut impl BufRead) -> Option<Value> {
    let mut length = None;
    loop {
        let mut line = String::new();
        if output.read_line(&mut line).ok()? == 0 {
            return None;
        }
        match line.trim() {
            "" => break,
            field => {
                if let Some(number) = field.strip_prefix("Content-Length: ") {
                    length = number.parse().ok();
                }
            }
        }
    }
    let mut body = vec![0; length.expect("a length")];
    output.read_exact(&mut body).ok()?;
    Some(serde_json::from_slice(&body).expect("JSON"))
}

/// The name of a file.
pub fn uri(path: &Path) -> String {
    let path = path.canonicalize().unwrap_or_else(|_| path.to_owned());
    format!("file://{}", path.display())
}

/// The rules of diagnostics.
pub fn rules(diagnostics: &[Value]) -> Vec<&str> {
    diagnostics.iter().map(|one| one["code"].as_str().unwrap()).collect()
}

impl Client {
    /// Whether a question about a text is answered by an error or by nothing that is found.
    #[track_caller]
    pub fn answers_nothing(&mut self, method: &str, uri: &str) -> bool {
        self.request(method, json!({"textDocument": {"uri": uri}})).get("error").is_some()
    }
}
