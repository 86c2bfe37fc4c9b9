//! The commands, one file each: arguments in, exit status out.

pub mod check;
pub mod completions;
pub mod explain;
pub mod init;
pub mod serve;
pub mod write_out;
