//! Runs the built program in a folder of its own.

#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic, dead_code)]

use std::fs;
use std::io::Write;
use std::path::Path;
use std::process::{Command, Output, Stdio};

/// A formula in which one term of the right side has not the free index of the others.
pub const SLIP: &str = r"\[ A_i = B^j C_{ij} + D_i + E_k \]";

/// A folder with files, and what the program is to be run with.
pub struct Folder(tempfile::TempDir);

/// What the program answered.
#[derive(Debug, PartialEq, Eq)]
pub struct Answer {
    /// The exit status.
    pub status: i32,
    /// Standard output.
    pub out: String,
    /// Standard error.
    pub err: String,
}

impl Folder {
    /// A project with these files.
    pub fn new(files: &[(&str, &[u8])]) -> Self {
        let folder = tempfile::tempdir().unwrap();
        fs::create_dir(folder.path().join(".git")).unwrap();
        for (name, bytes) in files {
            let path = folder.path().join(name);
            fs::create_dir_all(path.parent().unwrap()).unwrap();
            fs::write(path, bytes).unwrap();
        }
        Self(folder)
    }

    /// Where it is.
    pub fn path(&self) -> &Path {
        self.0.path()
    }

    /// The bytes of a file.
    pub fn read(&self, name: &str) -> Vec<u8> {
        fs::read(self.path().join(name)).unwrap()
    }

    /// The program, ready to be run here.
    pub fn command(&self, line: &str) -> Command {
        let mut command = Command::new(env!("CARGO_BIN_EXE_indexwise"));
        command.current_dir(self.path()).args(line.split_whitespace()).env_remove("NO_COLOR").stdin(Stdio::null());
        command
    }

    /// Runs the program with a line of arguments.
    pub fn run(&self, line: &str) -> Answer {
        answer(self.command(line).output().unwrap())
    }

    /// Runs it with a text on standard input.
    pub fn run_with_input(&self, line: &str, input: &[u8]) -> Answer {
        let mut command = self.command(line);
        command.stdin(Stdio::piped()).stdout(Stdio::piped()).stderr(Stdio::piped());
        let mut child = command.spawn().unwrap();
        child.stdin.take().unwrap().write_all(input).unwrap();
        answer(child.wait_with_output().unwrap())
    }
}

fn answer(output: Output) -> Answer {
    Answer {
        status: output.status.code().expect("the program was killed"),
        out: String::from_utf8(output.stdout).unwrap(),
        err: String::from_utf8(output.stderr).unwrap(),
    }
}
