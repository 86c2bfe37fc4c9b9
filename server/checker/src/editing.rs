//! What an editor asks, without a protocol: each question is one function from a paper and a place to plain data.
//!
//! The command line asks the same functions. Nothing here reports a finding; what cannot be answered is said with
//! its reason.

mod indices;
mod parts;
pub mod tokens;
#[cfg(test)]
mod trying;
pub mod write_out;
