//! Meaning and judgement: what every index is, and what is wrong with it.
//!
//! One pipeline (`paper::check`) serves the command line and the tests. Its stages: a
//! statement becomes a `sketch`, the paper's habits are counted (`conventions`), the cheapest `reading` that
//! balances is taken, the `ledger` holds the outcome and the `rules` report what is left. What an editor asks is answered in
//! `editing`. Nothing here reads a
//! file, prints or knows a protocol.

pub mod balance;
pub mod changes;
pub mod conventions;
pub mod editing;
pub mod finding;
pub mod ledger;
pub mod paper;
pub mod reading;
pub mod rules;
pub mod sketch;
pub mod steps;
pub mod symbols;
pub mod terms;
