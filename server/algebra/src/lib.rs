//! Exact arithmetic for index notation: numbers, and nothing else.
//!
//! This crate knows no text, no documents and no floating point. Two kinds of exact numbers stand here:
//!
//! - `field`: residues modulo a safe prime near 2^61, in which a claim about fields is evaluated at a random
//!   point, with signs, roots and an imaginary unit that behave as the real ones do;
//! - `rational`: fractions, in which a counterexample is evaluated again, so that it can be read and believed.
//!
//! Symbols are judged without numbers by `symmetry`, groups of signed permutations of the slots of a tensor, and
//! `normal_form`, the one form that a monomial has among all those that symmetries and renaming make of it.
//!
//! `draws` gives the pseudo-random numbers that points are made of.

#![deny(clippy::float_arithmetic)]

pub mod draws;
pub mod field;
pub mod normal_form;
pub mod rational;
pub mod symmetry;
