//! Finished units of work inside a long family, kept by whoever can keep them.

use crate::error::Result;

/// A store of byte strings under short keys (letters, digits, "-"). Called from many threads.
pub trait Checkpoint: Sync {
    /// What was stored under `key`, if it is there and undamaged.
    fn load(&self, key: &str) -> Option<Vec<u8>>;

    /// Keeps `bytes` under `key`.
    ///
    /// # Errors
    /// The store cannot be written.
    fn store(&self, key: &str, bytes: &[u8]) -> Result<()>;
}

/// Keeps nothing.
pub struct NoCheckpoint;

impl Checkpoint for NoCheckpoint {
    fn load(&self, _key: &str) -> Option<Vec<u8>> {
        None
    }
    fn store(&self, _key: &str, _bytes: &[u8]) -> Result<()> {
        Ok(())
    }
}
