//! What leaves the process: the exit status, lines on standard error, text on standard output.
//!
//! A reader that goes away (`indexwise check | head`) is no error, so nothing here uses `println!`, which
//! panics on a closed pipe.

use std::io::{self, Write};
use std::process::ExitCode;

/// How a command ended.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Status {
    /// Nothing to report at the chosen strictness.
    Clean,
    /// Findings.
    Findings,
    /// Something could not be done.
    Trouble,
}

impl From<Status> for ExitCode {
    fn from(status: Status) -> Self {
        Self::from(match status {
            Status::Clean => 0,
            Status::Findings => 1,
            Status::Trouble => 2,
        })
    }
}

/// One line on standard error.
pub fn complain(line: &str) {
    // Nobody is left to tell when standard error is closed.
    let _ = writeln!(io::stderr().lock(), "indexwise: {}", printable(line));
}

/// A text on standard output.
pub fn print(text: &str) -> Status {
    let mut out = io::stdout().lock();
    match gone_is_fine(out.write_all(text.as_bytes()).and_then(|()| out.flush())) {
        Ok(()) => Status::Clean,
        Err(error) => {
            complain(&format!("standard output: {}", cause(&error)));
            Status::Trouble
        }
    }
}

/// A reader that went away has seen what it wanted.
pub fn gone_is_fine(result: io::Result<()>) -> io::Result<()> {
    match result {
        Err(error) if error.kind() == io::ErrorKind::BrokenPipe => Ok(()),
        other => other,
    }
}

/// The cause of an error in plain words, without the number of the operating system.
pub fn cause(error: &io::Error) -> String {
    match error.kind() {
        io::ErrorKind::NotFound => "not found".into(),
        io::ErrorKind::PermissionDenied => "permission denied".into(),
        io::ErrorKind::IsADirectory => "is a folder".into(),
        _ => {
            let text = error.to_string();
            let end = text.find(" (os error").unwrap_or(text.len());
            text.get(..end).unwrap_or_default().to_lowercase()
        }
    }
}

/// The text with control characters replaced, so that a path or a formula cannot speak to the terminal and
/// stays on its line. Tabs are kept.
pub fn printable(text: &str) -> String {
    text.chars().map(|c| if c.is_control() && c != '\t' { '\u{fffd}' } else { c }).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_cause_has_no_number() {
        assert_eq!(cause(&io::Error::from(io::ErrorKind::NotFound)), "not found");
        let other = cause(&io::Error::from_raw_os_error(28));
        assert!(!other.contains("os error") && !other.is_empty(), "{other}");
    }

    #[test]
    fn control_characters_do_not_reach_the_terminal() {
        assert_eq!(printable("a\u{1b}[31m\tb\n"), "a\u{fffd}[31m\tb\u{fffd}");
    }
}
