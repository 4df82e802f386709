//! Loops past the wrapping order, from the quantum spectral curve.

pub mod extend;
pub mod frame;
pub mod basis;
mod columns;
mod gluing;
pub mod input;
mod laurent;
pub mod one_loop;
pub mod mzv;
mod pivots;
pub mod plan;
pub mod relation;
mod resume;
pub mod solver;
mod start;
mod sweep;
mod tail;
pub mod traces;
mod unknowns;

#[cfg(test)]
mod tests;
