//! The command line: what may be said, and the answer when something else was said.
//!
//! clap's own messages run over several lines; a bad option gets one clear line here, like every other trouble.

use indexwise_checker::paper::StepMode;
use std::ffi::OsString;
use std::path::PathBuf;

use clap::error::ErrorKind;
use clap::{Args, Parser, Subcommand, ValueEnum};
use clap_complete::Shell;
use indexwise_grammar::hosts::Host;

use crate::output::{self, Status, complain};

/// Checks documents written in tensor index notation.
#[derive(Debug, Parser)]
#[command(name = "indexwise", version, arg_required_else_help = true)]
pub struct Arguments {
    /// What to do.
    #[command(subcommand)]
    pub command: Command,
}

/// The commands.
#[derive(Debug, Subcommand)]
pub enum Command {
    /// Check files or folders and report what is wrong with their indices
    ///
    /// The nearest file indexwise.toml upwards from a document, within its repository, sets the levels of rules, further
    /// files with macros, and which files of a folder are checked. A file that is named as a PATH is always checked.
    Check(CheckArguments),
    /// Serve an editor: the language server on standard input and output
    Serve(ServeArguments),
    /// Write the contraction at a place out over its range
    ///
    /// With the place on a summed letter that letter's sum is written out, elsewhere in a term all sums of the term. The
    /// range is the one that is declared, else a customary one. Terms that vanish by symmetry are left out and listed, and
    /// those that coincide are collected.
    WriteOut(WriteOutArguments),
    /// Write a commented indexwise.toml from what the documents of a folder imply
    ///
    /// Each sentence is tried: one that leaves all findings as they are is put in force, any other is written as a
    /// comment that says what it would change. A file that is there already is never written over.
    Init(InitArguments),
    /// Explain a rule, or list the rules
    Explain(ExplainArguments),
    /// Print a completion script for a shell
    Completions(CompletionsArguments),
}

/// `check`.
#[derive(Debug, Args)]
pub struct CheckArguments {
    /// Files or folders (default: the current folder); "-" reads standard input and needs --host
    #[arg(value_name = "PATH")]
    pub paths: Vec<PathBuf>,
    /// The form of the report
    #[arg(long, value_enum, default_value_t = ReportKind::Text)]
    pub report: ReportKind,
    /// Write the report to this file instead of standard output
    #[arg(long, value_name = "FILE")]
    pub output: Option<PathBuf>,
    /// Apply the fixes that can be applied without a person's judgement
    #[arg(long)]
    pub fix: bool,
    /// With --fix: show what would be done, and write nothing
    #[arg(long, requires = "fix")]
    pub dry_run: bool,
    /// Add the symbol table of each document: kernels with their slots, symmetries and uses, and letters that mean more
    /// than one thing (in the reports text, json and json-lines; lines has no place for it)
    #[arg(long)]
    pub symbols: bool,
    /// Count hints, too, for the exit status
    #[arg(long)]
    pub strict: bool,
    /// Only these rules, separated by commas, also those that an indexwise.toml switches off
    #[arg(long, value_name = "RULE", value_delimiter = ',')]
    pub only: Vec<String>,
    /// Not these rules, separated by commas, whatever an indexwise.toml says of them
    #[arg(long, value_name = "RULE", value_delimiter = ',')]
    pub without: Vec<String>,
    /// Take the conventions of this file (a .toml: its table "conventions"; else a plain list) instead of
    /// those that the files indexwise.toml declare
    #[arg(long, value_name = "FILE")]
    pub conventions: Option<PathBuf>,
    /// Which steps of derivations are verified: those that a document asks for (auto), all, or none (off)
    #[arg(long, value_enum, default_value_t = StepsName::Auto)]
    pub steps: StepsName,
    /// How many papers are checked at a time (default: one for each processor)
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u16).range(1..=256))]
    pub jobs: Option<u16>,
    /// Do not show progress
    #[arg(long)]
    pub no_progress: bool,
    /// What standard input holds
    #[arg(long, value_enum)]
    pub host: Option<HostName>,
}

/// `serve`.
#[derive(Debug, Args)]
pub struct ServeArguments {
    /// How many threads take and send messages
    #[arg(long, value_name = "N", default_value_t = 2, value_parser = clap::value_parser!(u8).range(1..=64))]
    pub threads: u8,
    /// Serve on standard input and output, as is done anyway: some editors say so
    #[arg(long, hide = true)]
    pub stdio: bool,
}

/// `write-out`.
#[derive(Debug, Args)]
pub struct WriteOutArguments {
    /// The place; lines and columns count from 1, columns in characters (Unicode scalars)
    #[arg(value_name = "FILE:LINE:COLUMN")]
    pub place: OsString,
    /// Print only the sum, in one way of writing
    #[arg(long = "as", value_enum, value_name = "WAY")]
    pub way: Option<Way>,
    /// Take the conventions of this file (a .toml: its table "conventions"; else a plain list) instead of
    /// those that the files indexwise.toml declare
    #[arg(long, value_name = "FILE")]
    pub conventions: Option<PathBuf>,
}

/// The ways of writing a formula.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum Way {
    /// For a LaTeX or Markdown document
    Latex,
    /// For people who read a terminal
    Unicode,
    /// For a plain note
    Note,
}

/// `init`.
#[derive(Debug, Args)]
pub struct InitArguments {
    /// The folder (default: the current one)
    #[arg(value_name = "FOLDER", default_value = ".", hide_default_value = true)]
    pub folder: PathBuf,
    /// Print the file instead of writing it
    #[arg(long)]
    pub dry_run: bool,
    /// How many papers are checked at a time (default: one for each processor)
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u16).range(1..=256))]
    pub jobs: Option<u16>,
    /// Do not show progress
    #[arg(long)]
    pub no_progress: bool,
}

/// `explain`.
#[derive(Debug, Args)]
pub struct ExplainArguments {
    /// The rule to explain; without it, all rules are listed
    pub rule: Option<String>,
}

/// `completions`.
#[derive(Debug, Args)]
pub struct CompletionsArguments {
    /// The shell
    pub shell: Shell,
}

/// The forms of a report.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum ReportKind {
    /// For people: the formula, its ledger, what is wrong
    Text,
    /// One line for each finding: `file:line:column: severity: message [rule]`
    Lines,
    /// One JSON document
    Json,
    /// One JSON object for each file, one a line
    JsonLines,
}

/// Which steps are verified.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum StepsName {
    /// Those that a document asks for, and those of notes
    Auto,
    /// Every chain of every document
    All,
    /// None
    Off,
}

impl From<StepsName> for StepMode {
    fn from(name: StepsName) -> Self {
        match name {
            StepsName::Auto => Self::Asked,
            StepsName::All => Self::All,
            StepsName::Off => Self::Off,
        }
    }
}

/// What standard input may hold.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum HostName {
    /// LaTeX
    Latex,
    /// Markdown
    Markdown,
    /// A plain note
    Note,
}

impl From<HostName> for Host {
    fn from(name: HostName) -> Self {
        match name {
            HostName::Latex => Self::Latex,
            HostName::Markdown => Self::Markdown,
            HostName::Note => Self::Note,
        }
    }
}

/// What is said instead of doing something: a help text, or what is wrong with the command line.
#[derive(Debug)]
pub enum Answer {
    /// Asked for, so it is no trouble.
    Help(String),
    /// The line for standard error.
    Wrong(String),
}

impl Answer {
    /// Says it.
    pub fn give(self) -> Status {
        match self {
            Self::Help(text) => output::print(&text),
            Self::Wrong(line) => {
                complain(&line);
                Status::Trouble
            }
        }
    }
}

/// Reads the words of the command line, the first of which is the program's name.
pub fn read(words: impl Iterator<Item = OsString>) -> Result<Arguments, Answer> {
    let arguments = Arguments::try_parse_from(words).map_err(|error| answer(&error))?;
    if let Command::Check(check) = &arguments.command {
        let reads_input = check.paths.iter().any(|path| path.as_os_str() == "-");
        if reads_input && check.host.is_none() {
            return Err(Answer::Wrong("-: say with --host latex, markdown or note what standard input holds".into()));
        }
        if !reads_input && check.host.is_some() {
            return Err(Answer::Wrong("--host: speaks of standard input, which is not among the paths (-)".into()));
        }
        if reads_input && check.fix {
            return Err(Answer::Wrong("--fix: cannot write to standard input".into()));
        }
    }
    Ok(arguments)
}

fn answer(error: &clap::Error) -> Answer {
    let text = error.render().to_string();
    match error.kind() {
        ErrorKind::DisplayHelp | ErrorKind::DisplayVersion => Answer::Help(text),
        ErrorKind::DisplayHelpOnMissingArgumentOrSubcommand => {
            Answer::Wrong("say what to do: check, write-out, init, explain or completions (see --help)".into())
        }
        _ => Answer::Wrong(one_line(&text)),
    }
}

/// The first paragraph and the tips of clap's message, without the usage that follows.
fn one_line(text: &str) -> String {
    let told = text.split("\nUsage:").next().unwrap_or_default();
    let pieces: Vec<&str> = told
        .lines()
        .map(str::trim)
        .filter(|line| !line.is_empty() && !line.starts_with("For more information"))
        .collect();
    let line = pieces.join("; ");
    line.strip_prefix("error: ").unwrap_or(&line).replace(":; ", ": ").replace("; [", " [")
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used, clippy::panic)]
    use super::*;

    fn words(line: &str) -> Result<Arguments, Answer> {
        read(std::iter::once("indexwise").chain(line.split(' ')).map(OsString::from))
    }

    #[track_caller]
    fn wrong(line: &str) -> String {
        match words(line) {
            Err(Answer::Wrong(text)) => text,
            other => panic!("{line}: {other:?}"),
        }
    }

    #[test]
    fn the_command_line_is_well_formed() {
        crate::command_line().debug_assert();
    }

    #[test]
    fn rules_are_separated_by_commas() {
        let Command::Check(check) = words("check --only a,b --without c a.tex").unwrap().command else {
            panic!("another command")
        };
        assert_eq!(check.only, ["a", "b"]);
        assert_eq!(check.without, ["c"]);
    }

    #[test]
    fn a_bad_option_is_told_in_one_line() {
        for line in ["check --repot text", "check --report xml", "check --jobs 0", "check --dry-run", "chek"] {
            let text = wrong(line);
            assert!(!text.contains('\n') && !text.starts_with("error"), "{text}");
        }
        assert!(wrong("check --repot text").contains("--report"));
    }

    #[test]
    fn standard_input_needs_a_host_and_cannot_be_fixed() {
        assert!(wrong("check -").contains("--host"));
        assert!(wrong("check --host note a.inote").contains("--host"));
        assert!(wrong("check --fix --host note -").contains("--fix"));
        assert!(words("check --host note -").is_ok());
    }

    #[test]
    fn help_is_no_trouble() {
        assert!(matches!(words("--help"), Err(Answer::Help(_))));
        assert!(matches!(words("--version"), Err(Answer::Help(_))));
    }
}
