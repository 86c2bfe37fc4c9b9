//! What an editor asks, without a protocol: each question is one function from a paper and a place to plain data.
//!
//! The command line asks the same functions. Nothing here reports a finding; what cannot be answered is said with
//! its reason.

pub mod actions;
mod commands;
pub mod completion;
#[cfg(test)]
mod cursor;
pub mod folding;
pub mod highlight;
pub mod hints;
pub mod hover;
mod indices;
mod kernels;
mod labels;
pub mod ledger_view;
pub mod lenses;
mod letters;
pub mod outline;
mod parts;
pub mod references;
pub mod rename;
mod rows;
mod saying;
mod spots;
pub mod tokens;
mod under;
pub mod write_out;
