//! What every symbol means, and on what evidence.
//!
//! `declared` reads what the author says, `built_in` holds the trade's habits, `inferred` what the document shows.

pub mod built_in;
pub mod declared;
pub mod inferred;
