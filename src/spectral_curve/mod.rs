//! Loops past the wrapping order: the quantum spectral curve solved order by order at high precision
//! for one state at a time, and its digits recognised as exact values. [`extend::extend`] is the way in.

pub mod basis;
mod columns;
pub mod extend;
pub mod frame;
mod gluing;
pub mod input;
mod laurent;
pub mod mzv;
pub mod one_loop;
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
