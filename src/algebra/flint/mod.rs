//! Safe wrappers around the FLINT functions used. This folder holds the only `unsafe` of the crate.
//!
//! FLINT: Fast Library for Number Theory (C library, LGPL). Every wrapper owns what it initialises
//! and clears it on drop; no FLINT object leaves this folder.

pub mod dense;
mod factor;
mod fmpz;
pub mod lattice;
mod rational;
mod roots;

pub use factor::factor;
pub use rational::{Remaindering, reconstruct, reconstruct_small_denominator};
pub use roots::{Enclosure, complex_roots, real_roots};
