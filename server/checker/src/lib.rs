//! Meaning and judgement: what every index is, and what is wrong with it.
//!
//! One pipeline (`paper::check`) serves the command line, the language server and the tests. Nothing here
//! reads a file, prints or knows a protocol.

pub mod finding;
pub mod paper;
pub mod rules;
