//! Exact arithmetic for index notation: numbers, and nothing else.
//!
//! This crate knows no text, no documents and no floating point. The road from below:
//!
//! - `field`, `rational`: residues modulo a safe prime near 2^61, in which a claim about fields is evaluated at
//!   a random point, with signs, roots and an imaginary unit that behave as the real ones do; and fractions, in
//!   which a counterexample is evaluated again, so that it can be read and believed. `number` is what the rest
//!   asks of either; `draws` gives the pseudo-random numbers that points are made of;
//! - `jet`: fields about a point, as truncated Taylor polynomials;
//! - `tensor`, `contraction`, `matrix`: arrays of jets with slots, and their products, planned before they are
//!   evaluated;
//! - `symbols`: delta, generalised delta and epsilon;
//! - `geometry`, `sample`: what follows from a metric, and random fields with symmetries;
//! - `expression`: claims as data, over fields, metrics and derivatives;
//! - `evaluation`: their values at a random point;
//! - `verdict`: whether two of them are equal: with how little chance of error, or a counterexample.
//!
//! Symbols are judged without numbers by `symmetry`, groups of signed permutations of the slots of a tensor, and
//! `normal_form`, the one form that a monomial has among all those that symmetries and renaming make of it.
//! Where there is no value, `trouble` says why.
//!
//! # Example
//!
//! The divergence of the Einstein tensor vanishes, for a random metric in four dimensions about a random point:
//!
//! ```
//! use indexwise_algebra::draws::Draws;
//! use indexwise_algebra::field::{FIRST, Residue};
//! use indexwise_algebra::geometry::{Geometry, Level, Signs};
//! use indexwise_algebra::jet::{Order, Ring};
//! use indexwise_algebra::sample;
//! use indexwise_algebra::trouble::Trouble;
//!
//! # fn main() -> Result<(), Trouble> {
//! let ring = Ring::new(4, 3)?;
//! let metric = sample::metric::<Residue<FIRST>>(&ring, Order::of_base(3), 1, &mut Draws::from_seed(1))?;
//! let space = Geometry::new(metric, Signs::default())?;
//! let einstein = space.raised(&space.einstein()?, 0)?;
//! let divergence = space.covariant(&einstein, &[Level::Up, Level::Down])?.trace(0, 2)?;
//! assert!(divergence.vanishes()?);
//! assert!(!einstein.vanishes()?);
//! # Ok(())
//! # }
//! ```

#![deny(clippy::float_arithmetic)]

pub mod contraction;
pub mod draws;
pub mod evaluation;
pub mod expression;
pub mod field;
pub mod geometry;
pub mod jet;
#[cfg(test)]
mod laws;
pub mod matrix;
pub mod normal_form;
pub mod number;
pub mod rational;
pub mod sample;
pub mod symbols;
pub mod symmetry;
pub mod tensor;
pub mod trouble;
pub mod verdict;
