//! What people read and use: couplings, text, tables, the page, plots, numbers at finite coupling.
//! Everything here sees result records only.

pub mod coupling;
pub mod export;
pub mod expression;
pub mod finite;
pub mod interval;
pub mod numbers;
pub mod plot;
pub mod resummation;
pub mod roots;
pub mod text;
pub mod zeta;

#[cfg(test)]
mod testing;
