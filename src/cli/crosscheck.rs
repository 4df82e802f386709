//! `loopladder crosscheck`: three loops against direct diagonalisation.

use super::{Console, Progress, in_pool, interrupt};
use crate::crosscheck;
use crate::engine::{self, NoCheckpoint, Request};
use crate::error::{Error, Kind, Result};
use crate::family::Family;
use crate::record;
use std::path::PathBuf;
use std::time::Duration;

/// Compare loops 1 to 3 of a family with direct diagonalisation of the dilatation operator
///
/// An independent route: the operators D2, D4, D6 act on all cyclic states, and the exact characteristic polynomial of
/// their sum, order by order in the coupling, must have the coefficients of every orbit as roots. No Bethe or Baxter
/// equation, no prime and no floating-point number is involved. Needs L >= 4. Exit code 0: everything agrees; 1:
/// something differs or is missing.
#[derive(clap::Args)]
#[command(
    after_help = "Examples:\n  loopladder crosscheck 8 3\n  loopladder crosscheck 8 3 --record results/L08M03.json"
)]
pub struct Arguments {
    /// The length L of the trace
    length: usize,
    /// The number M of magnons, 0 to L/2
    magnons: usize,
    /// The highest loop order compared, 1 to 3
    #[arg(long, value_name = "N", default_value_t = crosscheck::LOOPS)]
    loops: usize,
    /// Check this stored record instead of computing the family
    #[arg(long, value_name = "FILE")]
    record: Option<PathBuf>,
    /// Text for people, or JSON
    #[arg(long, value_enum, default_value_t = Format::Text)]
    format: Format,
    /// Threads; all cores when not given
    #[arg(long, value_name = "T")]
    threads: Option<usize>,
}

#[derive(Clone, Copy, clap::ValueEnum)]
enum Format {
    Text,
    Json,
}

/// Runs the command.
///
/// # Errors
/// A bad request, a failing computation, or a negative result when something differs.
pub fn run(arguments: &Arguments, console: &Console) -> Result<()> {
    let family = Family::new(arguments.length, arguments.magnons)?;
    crosscheck::check(family, arguments.loops)?;
    let stored = arguments.record.as_deref().map(record::read).transpose()?;
    if let Some(stored) = &stored
        && (stored.length, stored.magnons) != (family.length, family.magnons)
    {
        return Err(Error::input(format!(
            "the record is of family ({}, {}) and {family} was asked for; give the record's family",
            stored.length, stored.magnons
        )));
    }
    interrupt::listen(Duration::from_millis(1500))?;
    let progress = Progress::new(console);
    let report = in_pool(arguments.threads, || {
        let record = match stored {
            Some(stored) => stored,
            None => engine::compute(&Request::new(family, arguments.loops), None, &NoCheckpoint, &progress)?.record,
        };
        crosscheck::crosscheck(&record, arguments.loops, &progress)
    });
    progress.finish();
    let report = report?;
    console.result(&match arguments.format {
        Format::Json => report.to_json(),
        Format::Text => report.text(),
    })?;
    if report.agrees() {
        return Ok(());
    }
    let differing = report.orbits.iter().filter(|orbit| !orbit.agrees).count();
    Err(Error::new(
        Kind::Negative,
        format!(
            "crosscheck: family {family} and direct diagonalisation disagree ({differing} of {} orbits differ, {} of {} primaries are compared); {}",
            report.orbits.len(),
            report.primaries_in_record,
            report.primaries_even + report.primaries_odd,
            if arguments.record.is_some() { "compute the record again" } else { "please report this family" }
        ),
    ))
}
