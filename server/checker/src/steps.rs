//! Steps: whether one line of a derivation follows from the one before, decided by the algebra.
//!
//! A statement is lowered to expressions (`lowering.rs`) in the world of the document (`world.rs`); `claims.rs` says
//! which of its relations claim something; the algebra judges, and `report.rs` turns verdicts into findings, and
//! `repairs.rs` looks for what would make a step hold. What
//! cannot be lowered is undecided with its reason, never guessed.

mod claims;
mod conventions;
mod defaults;
mod lowering;
mod repairs;
mod report;
mod standing;
mod telling;
mod verdicts;
mod words;
mod world;

pub use claims::{Asked, Step, steps_of};
pub use lowering::{Lowering, Way};
pub use repairs::Source;
pub use report::{Granted, LabelledGiven, StepJudge};
pub use verdicts::Verdicts;
pub use world::Surroundings;

#[cfg(test)]
mod tests;
