//! `indexwise completions SHELL`: the script that a shell completes with.

use clap_complete::Shell;

use crate::output::{Status, print};

/// Prints the script.
pub fn run(shell: Shell) -> Status {
    // Into memory first: the generator panics on a writer that fails.
    let mut script = Vec::new();
    clap_complete::generate(shell, &mut crate::command_line(), "indexwise", &mut script);
    print(&String::from_utf8_lossy(&script))
}
