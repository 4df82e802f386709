//! What a scan needs from whoever computes: the engine, or an invented calculator in tests.

use crate::engine::{Checkpoint, Cost};
use crate::error::Result;
use crate::family::Family;
use crate::observer::Observer;
use crate::record::{Parity, Record};

/// One call to the calculator.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Job {
    /// (L, M).
    pub family: Family,
    /// Through this loop order.
    pub loops: usize,
    /// Only the orbit with this label; `None`: all.
    pub orbit: Option<String>,
    /// Whether a certificate is wanted.
    pub certificate: bool,
}

/// What a job gives.
pub struct Product {
    /// The record.
    pub record: Record,
    /// The certificate's JSON text, when asked for and when there is one.
    pub certificate: Option<String>,
}

/// An orbit of a family, as far as a filter looks at it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct OrbitOutline {
    /// "L8M3-1".
    pub label: String,
    /// Degree of its field.
    pub degree: usize,
    /// Symmetric or paired.
    pub parity: Parity,
}

/// Computes families. Parallelism is whatever rayon pool it is called in; results must not depend on it.
pub trait Calculator: Send + Sync {
    /// The highest loop order to which the family's coefficients are complete.
    fn complete_through(&self, family: Family) -> usize;

    /// An estimate of what a family costs. Must be the same on every machine: shards rely on it.
    fn cost(&self, family: Family, loops: usize, certificate: bool) -> Cost;

    /// The orbits of a family, without their coefficients.
    ///
    /// # Errors
    /// Whatever the spectrum fails with.
    fn orbits(&self, family: Family, observer: &dyn Observer) -> Result<Vec<OrbitOutline>>;

    /// Computes one job within `memory` bytes.
    ///
    /// # Errors
    /// Whatever the computation fails with; interrupted when the observer says so.
    fn compute(
        &self,
        job: &Job,
        memory: Option<u64>,
        checkpoint: &dyn Checkpoint,
        observer: &dyn Observer,
    ) -> Result<Product>;
}
