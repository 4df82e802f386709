//! The command line: arguments become one validated request per command; no other stage sees clap.

mod audit;
mod census;
mod compare;
mod completions;
mod console;
mod crosscheck;
mod evaluate;
mod export;
pub mod interrupt;
mod manual;
mod plot;
mod progress;
mod reading;
mod scan;
mod series;
mod state;

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
enum Command {
    Series(series::Arguments),
    Census(census::Arguments),
    Scan(scan::Arguments),
    Audit(audit::Arguments),
    Compare(compare::Arguments),
    Crosscheck(crosscheck::Arguments),
    Evaluate(evaluate::Arguments),
    Export(export::Arguments),
    Plot(plot::Arguments),
    State(state::Arguments),
    Completions(completions::Arguments),
    Manual(manual::Arguments),
}

/// The whole command line, for completions and manual pages.
fn definition() -> clap::Command {
    Arguments::command()
}

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
    let console = Console::standard();
    match &arguments.command {
        Command::Series(arguments) => series::run(arguments, &console),
        Command::Census(arguments) => census::run(arguments, &console),
        Command::Scan(arguments) => scan::run(arguments, &console),
        Command::Audit(arguments) => audit::run(arguments, &console),
        Command::Compare(arguments) => compare::run(arguments, &console),
        Command::Crosscheck(arguments) => crosscheck::run(arguments, &console),
        Command::Evaluate(arguments) => evaluate::run(arguments, &console),
        Command::Export(arguments) => export::run(arguments, &console),
        Command::Plot(arguments) => plot::run(arguments, &console),
        Command::State(arguments) => state::run(&arguments, &console),
        Command::Completions(arguments) => completions::run(arguments, &console),
        Command::Manual(arguments) => manual::run(arguments, &console),
    }
}

/// Runs `work` in a pool of this many threads (all cores when not given), with its own observer.
///
/// # Errors
/// Zero or absurdly many threads, or what `work` fails with.
fn in_pool<T: Send>(threads: Option<usize>, work: impl FnOnce() -> Result<T> + Send) -> Result<T> {
    let count = threads.unwrap_or(0);
    if threads == Some(0) || count > 4096 {
        return Err(Error::input(format!(
            "--threads {count} is not between 1 and 4096; leave it out to use all cores"
        )));
    }
    let pool = rayon::ThreadPoolBuilder::new()
        .num_threads(count)
        .build()
        .map_err(|cause| Error::bound("cannot start the threads; give a smaller --threads").because(cause))?;
    pool.install(work)
}
