//! Reads documents written in tensor index notation: text to tree, no meaning.
pub mod hosts;
pub mod lines;
pub mod macros;
pub mod span;
