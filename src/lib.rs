//! Loopladder: exact weak-coupling anomalous dimensions of the SU(2) sector of planar N=4 super
//! Yang–Mills theory, for whole families of operators. DEVELOPERS.md has the architecture.

pub mod algebra;
pub mod chain;
pub mod error;
pub mod family;
pub mod observer;
pub mod record;
pub mod cli;
pub mod spectral_curve;
