//! `indexwise serve`: the language server on standard input and output.
//!
//! Exit status 0 if the client ended the session by `shutdown` and `exit`, 1 if it ended in any other way (as the
//! protocol has it), 2 if the server could not begin.

use crate::arguments::ServeArguments;
use crate::language_server;
use crate::output::Status;

/// Runs the command.
pub fn run(arguments: &ServeArguments) -> Status {
    match language_server::run(arguments.threads.into()) {
        Ok(true) => Status::Clean,
        Ok(false) => Status::Findings,
        Err(failure) => {
            failure.tell();
            Status::Trouble
        }
    }
}
