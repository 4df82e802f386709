//! How the commands that need a record get one: from a file, or computed on the spot.

use super::{Console, Progress, in_pool, interrupt};
use crate::engine::{NoCheckpoint, Request, compute};
use crate::error::{Error, Result};
use crate::family::Family;
use crate::record::{Record, read};
use crate::report::coupling::Coupling;
use std::path::Path;
use std::time::Duration;

/// Output for people or for programs.
#[derive(Clone, Copy, Debug, PartialEq, Eq, clap::ValueEnum)]
pub enum Format {
    /// For people
    Text,
    /// For programs
    Json,
}

/// The record of `from`, or of the family computed now through `loops` (through L when absent).
///
/// # Errors
/// An unreadable file, a bad family, or a failed computation.
pub fn record_of(
    length: Option<usize>,
    magnons: Option<usize>,
    from: Option<&Path>,
    loops: Option<usize>,
    console: &Console,
) -> Result<Record> {
    match (from, length, magnons) {
        (Some(path), _, _) => read(path),
        (None, Some(length), Some(magnons)) => {
            let family = Family::new(length, magnons)?;
            let request = Request::new(family, loops.unwrap_or(length));
            request.check()?;
            interrupt::listen(Duration::from_millis(1500))?;
            let progress = Progress::new(console);
            let outcome = in_pool(None, || compute(&request, None, &NoCheckpoint, &progress));
            progress.finish();
            Ok(outcome?.record)
        }
        _ => Err(Error::input("no family: give the length L and the magnons M, or --from FILE with a record")),
    }
}

/// The coupling a word names, for clap.
///
/// # Errors
/// An unknown word; the message lists the known ones.
pub fn coupling(word: &str) -> std::result::Result<Coupling, String> {
    Coupling::from_word(word).ok_or_else(|| {
        let words: Vec<&str> = Coupling::ALL.iter().map(|coupling| coupling.word()).collect();
        format!("not a coupling known here; give one of {}", words.join(", "))
    })
}
