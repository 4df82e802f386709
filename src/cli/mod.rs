//! The command line: arguments become one validated request per command; no other stage sees clap.

mod console;
pub mod interrupt;
mod progress;

use crate::error::{Error, Result};
use clap::{CommandFactory as _, FromArgMatches as _, Parser, Subcommand};
use std::ffi::OsString;

pub use console::Console;
pub use progress::Progress;

/// Exact weak-coupling anomalous dimensions of the SU(2) sector of planar N=4 super Yang–Mills theory.
#[derive(Parser)]
#[command(name = "loopladder", version, max_term_width = 100)]
struct Arguments {
    #[command(subcommand)]
    command: Command,
}

/// One variant per command, one file per variant.
#[derive(Subcommand)]
enum Command {}

/// Runs the command that `words` (program name first) ask for.
///
/// # Errors
/// Whatever the command fails with; its kind decides the exit code.
pub fn run(words: impl IntoIterator<Item = OsString>) -> Result<()> {
    let matches = match Arguments::command().try_get_matches_from(words) {
        Ok(matches) => matches,
        Err(error) if !error.use_stderr() => {
            // --help and --version: to standard output, quietly if nobody reads it.
            let _ = error.print();
            return Ok(());
        }
        Err(error) => return Err(Error::input(error.to_string().trim_end().trim_start_matches("error: ").to_string())),
    };
    let arguments = Arguments::from_arg_matches(&matches)
        .map_err(|error| Error::input(error.to_string().trim_end().to_string()))?;
    let _console = Console::standard();
    match arguments.command {}
}
