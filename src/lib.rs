//! Loopladder: exact weak-coupling anomalous dimensions of the SU(2) sector of planar N=4 super
//! Yang–Mills theory, for whole families of operators. DEVELOPERS.md has the architecture.

pub mod algebra;
pub mod audit;
pub mod baxter;
pub mod chain;
pub mod cli;
pub mod compare;
pub mod crosscheck;
pub mod engine;
pub mod error;
pub mod family;
pub mod finite_size;
pub mod lift;
pub mod observer;
pub mod record;
pub mod report;
pub mod scan;
pub mod spectral_curve;
pub mod state;
