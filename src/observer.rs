//! The one way by which computing code reports progress and learns that it should stop.
//!
//! Computing code never prints. It tells an [`Observer`] what it has done; the command-line layer
//! draws bars or log lines from that, and tests use [`Silent`].

use crate::error::{Error, Result};

/// What computing code reports.
#[derive(Clone, Debug)]
pub enum Event {
    /// A stage of a family begins ("chain spectrum", "lift", …).
    Stage { family: String, stage: &'static str },
    /// The number of work units (primes, orders, …) now expected for an orbit; an estimate that may grow.
    Planned { family: String, orbit: String, unit: &'static str, total: usize },
    /// Work units of an orbit that are finished, in all.
    Advanced { family: String, orbit: String, unit: &'static str, done: usize },
    /// An orbit is complete.
    OrbitDone { family: String, orbit: String, done: usize, total: usize },
    /// A remark a person should see (for example: "memory bound lowers the number of parallel primes to 3").
    Remark { text: String },
}

/// Receives progress and answers whether to go on. Called from many threads.
pub trait Observer: Sync {
    /// Something happened.
    fn event(&self, event: Event);

    /// Whether the user asked to stop.
    fn cancelled(&self) -> bool {
        false
    }

    /// `Ok` to go on, the "interrupted" error to stop: for use with `?` between work units.
    fn proceed(&self) -> Result<()> {
        if self.cancelled() { Err(Error::interrupted()) } else { Ok(()) }
    }
}

/// An observer that ignores everything and never cancels.
pub struct Silent;

impl Observer for Silent {
    fn event(&self, _event: Event) {}
}
