//! One line for each finding, in the form that compilers and editors share:
//! `file:line:column: severity: message [rule]`.

use std::io::{self, Write};

use super::FileReport;
use super::places::Places;
use crate::output::printable;

/// Writes the lines.
pub fn write(files: &[FileReport], out: &mut dyn Write) -> io::Result<()> {
    for file in files.iter().filter(|file| !file.findings.is_empty()) {
        let places = Places::new(&file.text);
        let path = printable(&file.path);
        for finding in &file.findings {
            let place = places.start(finding.span);
            let (severity, message) = (finding.severity.word(), printable(&finding.message));
            writeln!(out, "{path}:{}:{}: {severity}: {message} [{}]", place.line, place.column, finding.rule)?;
        }
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::super::samples::{SHELL, file};
    use super::*;

    #[test]
    fn a_finding_is_one_line() {
        let mut out = Vec::new();
        write(&[file("shell.tex", SHELL, true)], &mut out).unwrap();
        let want = "shell.tex:3:43: error: k is free on the left (down) but the right has m [free-index-mismatch]\n";
        assert_eq!(String::from_utf8(out).unwrap(), want);
    }
}
