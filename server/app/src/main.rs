//! The binary: arguments -> command -> exit status.
//!
//! Everything that can go wrong ends as one line on standard error and exit status 2; a panic too, which would
//! be a bug of ours (`panics.rs`).

mod arguments;
mod batch;
mod commands;
mod configuration;
mod files;
mod language_server;
mod mend;
mod nearest;
mod output;
mod panics;
mod progress;
mod project;
mod reports;

use std::ffi::OsString;
use std::process::ExitCode;

use arguments::{Arguments, Command};
use output::{Status, complain};

fn main() -> ExitCode {
    panics::keep_quiet();
    let status = panics::caught(|| run(std::env::args_os())).unwrap_or_else(|cause| {
        complain(&format!("internal error: {cause}"));
        Status::Trouble
    });
    status.into()
}

fn run(words: impl Iterator<Item = OsString>) -> Status {
    let arguments = match arguments::read(words) {
        Ok(arguments) => arguments,
        Err(answer) => return answer.give(),
    };
    match arguments.command {
        Command::Check(check) => commands::check::run(&check),
        Command::Serve(serve) => commands::serve::run(&serve),
        Command::WriteOut(place) => commands::write_out::run(&place),
        Command::Init(init) => commands::init::run(&init),
        Command::Explain(explain) => commands::explain::run(explain.rule.as_deref()),
        Command::Completions(completions) => commands::completions::run(completions.shell),
    }
}

/// The command line as clap knows it, for the completions.
pub(crate) fn command_line() -> clap::Command {
    <Arguments as clap::CommandFactory>::command()
}
