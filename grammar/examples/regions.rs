//! Prints where mathematics stands: for each file named, one JSON line with its path and the bodies of its formulas.
//!
//! The host follows from the suffix (`.tex`, `.ltx`, `.sty`; `.md`, `.qmd`, `.Rmd`; `.inote`). The comparison with
//! pandoc in `tests/references` reads this output.

use std::fmt::Write as _;
use std::io::Write as _;

use indexwise_grammar::hosts::{Host, scan};
use indexwise_grammar::macros::Macros;

fn main() -> std::io::Result<()> {
    let mut output = std::io::stdout().lock();
    for path in std::env::args().skip(1) {
        let Some(host) = host(&path) else { continue };
        let text = String::from_utf8_lossy(&std::fs::read(&path)?).into_owned();
        let formulas: Vec<String> =
            scan(&text, host, &Macros::default()).regions.iter().map(|region| quoted(region.body.of(&text))).collect();
        writeln!(output, "{{\"path\": {}, \"formulas\": [{}]}}", quoted(&path), formulas.join(", "))?;
    }
    Ok(())
}

fn host(path: &str) -> Option<Host> {
    match path.rsplit_once('.')?.1 {
        "tex" | "ltx" | "sty" => Some(Host::Latex),
        "md" | "qmd" | "Rmd" => Some(Host::Markdown),
        "inote" => Some(Host::Note),
        _ => None,
    }
}

/// A JSON string.
fn quoted(text: &str) -> String {
    let mut quoted = String::with_capacity(text.len() + 2);
    quoted.push('"');
    for letter in text.chars() {
        match letter {
            '"' | '\\' => quoted.extend(['\\', letter]),
            control if control < ' ' => _ = write!(quoted, "\\u{:04x}", control as u32),
            _ => quoted.push(letter),
        }
    }
    quoted.push('"');
    quoted
}
