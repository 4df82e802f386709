//! Rings as values, and what is built over them.

pub mod flint;
pub mod graded;
pub mod laws;
pub mod linear;
pub mod number_field;
pub mod poly;
pub mod prime_field;
pub mod quotient;
pub mod rationals;
pub mod reconstruct;
pub mod ring;

#[cfg(test)]
mod tests;
