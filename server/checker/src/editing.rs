//! What an editor asks, without a protocol: each question is one function from a paper and a place to plain data.
//!
//! The command line asks the same functions. Nothing here reports a finding; what cannot be answered is said with
//! its reason.

mod commands;
pub mod highlight;
pub mod hover;
mod indices;
mod kernels;
mod labels;
mod parts;
pub mod references;
pub mod rename;
pub mod tokens;
#[cfg(test)]
mod trying;
mod under;
pub mod write_out;
