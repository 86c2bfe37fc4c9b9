//! Claims that must come out right: identities that hold, corrupted ones that fail, and ones that no budget lasts
//! for. What holds is in every textbook; sources stand beside the less common ones.

#![allow(clippy::unwrap_used, clippy::panic, clippy::indexing_slicing)]

mod build;
mod failures;
mod forms;
mod givens;
mod hostile;
mod identities;
