//! Loops past the wrapping order, from the quantum spectral curve.

pub mod frame;
mod gluing;
pub mod input;
mod laurent;
mod pivots;
pub mod solver;
mod start;
mod sweep;
mod tail;
mod unknowns;

#[cfg(test)]
mod tests;
