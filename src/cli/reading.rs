//! How the commands that need a record get one: from a file, or computed on the spot.

use super::Console;
use crate::error::{Error, Result};
use crate::record::{Record, read};
use crate::report::coupling::Coupling;
use std::path::Path;

/// Output for people or for programs.
#[derive(Clone, Copy, Debug, PartialEq, Eq, clap::ValueEnum)]
pub enum Format {
    /// For people
    Text,
    /// For programs
    Json,
}

/// The record of `from`, or of the family computed now.
///
/// # Errors
/// An unreadable file, or a failed computation.
pub fn record_of(
    length: Option<usize>,
    magnons: Option<usize>,
    from: Option<&Path>,
    _loops: Option<usize>,
    _console: &Console,
) -> Result<Record> {
    match (from, length, magnons) {
        (Some(path), _, _) => read(path),
        _ => Err(Error::input(format!("family ({length:?}, {magnons:?}): give --from FILE with its record"))),
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
