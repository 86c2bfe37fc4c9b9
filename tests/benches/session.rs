//! What an editor waits for: the language server over its real standard input and output, on generated papers.
//!
//! Run with `cargo build --release -p indexwise && cargo bench -p indexwise-tests --bench session`. The program is the
//! one that was built beside this bench, or the one that `INDEXWISE_PROGRAM` names; arguments are sizes in bytes.
//!
//! Every size is gone through `ROUNDS` times, each in a process of its own, and of every figure the least is printed:
//! whatever else the machine does only adds. Times are those of the client, from the first byte written to the last
//! byte read, so that the JSON of both sides, the pipes, and the silence that the server waits for before it reads
//! (`SILENCE` in `worker.rs`, 2 ms) are all in them. Memory is what `/proc` tells, on Linux alone.

#![allow(clippy::expect_used)]

use std::fs;
use std::io::{BufRead, BufReader, Read, Write};
use std::path::{Path, PathBuf};
use std::process::{Child, ChildStdin, ChildStdout, Command, Stdio};
use std::time::{Duration, Instant};

use indexwise_grammar::hosts::{Host, scan};
use indexwise_grammar::lines::{Lines, Utf16Column};
use indexwise_grammar::macros::Macros;
use indexwise_tests::generate;
use serde_json::{Value, json};

/// Sizes of the papers in bytes.
const SIZES: [usize; 3] = [100_000, 1_000_000, 5_000_000];

/// The seed of all papers.
const SEED: u64 = 1;

/// Sessions for each size.
const ROUNDS: usize = 3;

/// Keystrokes, and questions of each kind, in a session.
const TIMES: usize = 200;

/// Letters that are typed, one after another, and taken out again.
const LETTERS: [&str; 4] = ["a", "h", "k", "b"];

/// So long the session rests before what is measured next, that steps are judged by then.
const REST: Duration = Duration::from_millis(1500);

fn main() {
    let sizes: Vec<usize> = std::env::args().filter_map(|argument| argument.parse().ok()).collect();
    let sizes = if sizes.is_empty() { SIZES.to_vec() } else { sizes };
    let columns: Vec<Figures> = sizes.iter().map(|bytes| best(*bytes)).collect();
    print(&sizes, &columns);
}

/// What was measured, by its name; milliseconds, or megabytes.
type Figures = Vec<(&'static str, f64)>;

fn best(bytes: usize) -> Figures {
    let text = generate::document(SEED, bytes);
    let mut rounds = (0..ROUNDS).map(|_| session(&text));
    let first = rounds.next().unwrap_or_default();
    rounds.fold(first, |best, round| {
        best.into_iter().zip(round).map(|((name, one), (_, other))| (name, one.min(other))).collect()
    })
}

fn print(sizes: &[usize], columns: &[Figures]) {
    print!("{:<34}", "milliseconds, or MB");
    sizes.iter().for_each(|bytes| print!("{:>12}", format!("{} kB", bytes / 1000)));
    sizes.windows(2).for_each(|pair| print!("{:>20}", format!("{} kB : {} kB", pair[1] / 1000, pair[0] / 1000)));
    println!();
    let rows = columns.first().map_or(0, Vec::len);
    for row in 0..rows {
        let figures: Vec<f64> = columns.iter().map(|column| column[row].1).collect();
        print!("{:<34}", columns[0][row].0);
        figures.iter().for_each(|figure| print!("{figure:>12.2}"));
        figures.windows(2).for_each(|pair| print!("{:>20.2}", pair[1] / pair[0]));
        println!();
    }
}

/// One session with a paper.
fn session(text: &str) -> Figures {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("paper.tex");
    fs::write(&path, text).expect("a paper");
    let uri = format!("file://{}", path.display());
    let mut server = Server::start(folder.path());
    let open = server.open(&uri, text);
    std::thread::sleep(REST);
    let at_rest = server.memory("VmRSS:");
    let places = places(text);
    let keys = server.keystrokes(&uri, &places[places.len() / 2]);
    std::thread::sleep(REST);
    let hover = server.questions("textDocument/hover", &uri, &places);
    let completion = server.questions("textDocument/completion", &uri, &places);
    let (typed, peak) = (server.memory("VmRSS:"), server.memory("VmHWM:"));
    server.end();
    vec![
        ("open to first diagnostics", open),
        ("keystroke to diagnostics, median", percentile(&keys, 50)),
        ("keystroke to diagnostics, 99 %", percentile(&keys, 99)),
        ("hover, median", percentile(&hover, 50)),
        ("hover, 99 %", percentile(&hover, 99)),
        ("completion, median", percentile(&completion, 50)),
        ("completion, 99 %", percentile(&completion, 99)),
        ("memory when opened (MB)", at_rest),
        ("memory after typing (MB)", typed),
        ("memory at its peak (MB)", peak),
    ]
}

/// The time that so many percent stay below or at.
fn percentile(times: &[f64], percent: usize) -> f64 {
    let mut times = times.to_vec();
    times.sort_by(f64::total_cmp);
    times[(times.len() * percent).div_ceil(100).max(1) - 1]
}

/// Places behind an opening brace of a script, in `TIMES` formulas all over the text.
fn places(text: &str) -> Vec<Value> {
    let regions = scan(text, Host::Latex, &Macros::default()).regions;
    let lines = Lines::new(text);
    let scripts =
        regions.iter().filter_map(|region| Some(region.body.start + region.body.of(text).find("_{")? as u32 + 2));
    let scripts: Vec<u32> = scripts.collect();
    let place = |at: usize| {
        let (line, Utf16Column(character)) = lines.in_utf16(text, scripts[at * scripts.len() / TIMES]);
        json!({"line": line, "character": character})
    };
    (0..TIMES).map(place).collect()
}

/// A language server and the two streams to it.
struct Server {
    child: Child,
    input: ChildStdin,
    output: BufReader<ChildStdout>,
    asked: usize,
}

impl Server {
    fn start(folder: &Path) -> Self {
        let mut command = Command::new(program());
        let command = command.arg("serve").current_dir(folder).stdin(Stdio::piped()).stdout(Stdio::piped());
        let mut child = command.spawn().expect("the program: cargo build --release -p indexwise");
        let (input, output) = (child.stdin.take().expect("input"), child.stdout.take().expect("output"));
        let mut server = Self { child, input, output: BufReader::new(output), asked: 0 };
        let capabilities = json!({"textDocument": {
            "publishDiagnostics": {"relatedInformation": true, "versionSupport": true, "dataSupport": true},
            "hover": {"contentFormat": ["markdown"]},
        }});
        let root = format!("file://{}", folder.display());
        server.ask("initialize", &json!({"processId": null, "rootUri": root, "capabilities": capabilities}));
        server.tell("initialized", &json!({}));
        server
    }

    /// Opens a paper; the time to its diagnostics.
    fn open(&mut self, uri: &str, text: &str) -> f64 {
        let document = json!({"uri": uri, "languageId": "latex", "version": 1, "text": text});
        let params = json!({"textDocument": document});
        let since = Instant::now();
        self.tell("textDocument/didOpen", &params);
        self.diagnostics(1);
        milliseconds(since)
    }

    /// Types letters at a place and takes them out again, each as soon as the diagnostics of the last have come.
    fn keystrokes(&mut self, uri: &str, place: &Value) -> Vec<f64> {
        let mut after = place.clone();
        after["character"] = json!(place["character"].as_u64().unwrap_or_default() + 1);
        let keystroke = |at: usize| {
            let (end, text) =
                if at.is_multiple_of(2) { (place, LETTERS[at / 2 % LETTERS.len()]) } else { (&after, "") };
            let version = at + 2;
            let changes = json!([{"range": {"start": place, "end": end}, "text": text}]);
            let params = json!({"textDocument": {"uri": uri, "version": version}, "contentChanges": changes});
            let since = Instant::now();
            self.tell("textDocument/didChange", &params);
            self.diagnostics(version);
            milliseconds(since)
        };
        (0..TIMES).map(keystroke).collect()
    }

    /// Asks the same at every place.
    fn questions(&mut self, method: &str, uri: &str, places: &[Value]) -> Vec<f64> {
        let question = |place: &Value| {
            let params = json!({"textDocument": {"uri": uri}, "position": place});
            let since = Instant::now();
            let answer = self.ask(method, &params);
            let lasted = milliseconds(since);
            assert!(answer.is_object(), "{method} has no answer: {answer}");
            lasted
        };
        places.iter().map(question).collect()
    }

    /// Waits for the diagnostics of a version.
    fn diagnostics(&mut self, version: usize) {
        while self.read()["params"]["version"] != json!(version) {}
    }

    fn tell(&mut self, method: &str, params: &Value) {
        self.send(&json!({"jsonrpc": "2.0", "method": method, "params": params}));
    }

    /// The result of a request.
    fn ask(&mut self, method: &str, params: &Value) -> Value {
        self.asked += 1;
        self.send(&json!({"jsonrpc": "2.0", "id": self.asked, "method": method, "params": params}));
        loop {
            let mut message = self.read();
            if message["id"] == json!(self.asked) {
                return message["result"].take();
            }
        }
    }

    fn send(&mut self, message: &Value) {
        let body = message.to_string();
        let message = format!("Content-Length: {}\r\n\r\n{body}", body.len());
        self.input.write_all(message.as_bytes()).and_then(|()| self.input.flush()).expect("a server that reads");
    }

    fn read(&mut self) -> Value {
        let mut length = 0;
        loop {
            let mut line = String::new();
            self.output.read_line(&mut line).expect("a server that writes");
            assert!(!line.is_empty(), "the server has ended");
            match line.trim_end().strip_prefix("Content-Length: ") {
                Some(number) => length = number.parse().expect("a length"),
                None if line.trim_end().is_empty() => break,
                None => {}
            }
        }
        let mut body = vec![0; length];
        self.output.read_exact(&mut body).expect("a whole message");
        serde_json::from_slice(&body).expect("JSON")
    }

    /// A line of the process's state, in megabytes; no number where there is no such thing.
    fn memory(&self, name: &str) -> f64 {
        let status = fs::read_to_string(format!("/proc/{}/status", self.child.id())).unwrap_or_default();
        let line = status.lines().find_map(|line| line.strip_prefix(name));
        let kilobytes = line.and_then(|line| line.trim().trim_end_matches(" kB").parse::<f64>().ok());
        kilobytes.map_or(f64::NAN, |number| number * 1024.0 / 1e6)
    }

    fn end(mut self) {
        self.ask("shutdown", &Value::Null);
        self.tell("exit", &Value::Null);
        self.child.wait().expect("an end");
    }
}

fn milliseconds(since: Instant) -> f64 {
    since.elapsed().as_secs_f64() * 1e3
}

/// The program: benches stand in `deps` below it.
fn program() -> PathBuf {
    let beside = || std::env::current_exe().ok()?.ancestors().nth(2).map(|folder| folder.join("indexwise"));
    std::env::var_os("INDEXWISE_PROGRAM").map(PathBuf::from).or_else(beside).expect("a program")
}
