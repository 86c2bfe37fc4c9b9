//! What an editor asks, without a protocol: each question is one function from a paper and a place to plain data.
//!
//! The command line asks the same functions. Nothing here reports a finding; what cannot be answered is said with
//! its reason.

pub mod actions;
pub mod completion;
#[cfg(test)]
mod cursor;
pub mod folding;
pub mod hints;
pub mod ledger_view;
pub mod lenses;
mod letters;
pub mod outline;
mod rows;
mod saying;
mod spots;
pub mod write_out;
