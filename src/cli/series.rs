//! `loopladder series`: the loop coefficients of one family.

use super::{Console, Progress, in_pool, interrupt};
use crate::engine::{self, Checkpoint, NoCheckpoint, Request};
use crate::error::{Error, Result};
use crate::family::Family;
use crate::report::coupling::Coupling;
use crate::report::text;
use crate::scan::{Journal, parse_size};
use std::path::PathBuf;
use std::time::Duration;

/// Exact loop coefficients of every primary of the family (L, M)
#[derive(clap::Args)]
#[command(after_help = "Example: loopladder series 8 3 --loops 5")]
pub struct Arguments {
    /// The length L of the trace
    length: usize,
    /// The number M of magnons, 0 to L/2
    magnons: usize,
    /// The highest loop order; L when not given. Loops past L come from the spectral curve
    #[arg(long, value_name = "N")]
    loops: Option<usize>,
    /// At loop L give only the asymptotic part, labelled as such
    #[arg(long)]
    incomplete: bool,
    /// Only the orbit of this label, such as L8M3-1
    #[arg(long, value_name = "LABEL")]
    state: Option<String>,
    /// Text for people, or the JSON record
    #[arg(long, value_enum, default_value_t = Format::Text)]
    format: Format,
    /// The coupling of the text output: lambda/16pi^2, lambda/8pi^2, lambda/4pi^2, lambda/pi^2 or lambda
    #[arg(long, value_name = "COUPLING", value_parser = super::reading::coupling, default_value = "lambda/16pi^2")]
    coupling: Coupling,
    /// Also write the certificate for `audit` to this file
    #[arg(long, value_name = "FILE")]
    certificate: Option<PathBuf>,
    /// Memory bound for the computation, such as 512M or 2G
    #[arg(long, value_name = "SIZE")]
    memory: Option<String>,
    /// Keep finished stages of a long computation in this file, and go on from them
    #[arg(long, value_name = "FILE")]
    keep: Option<PathBuf>,
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
/// A bad request or a failing computation.
pub fn run(arguments: &Arguments, console: &Console) -> Result<()> {
    let family = Family::new(arguments.length, arguments.magnons)?;
    let request = Request {
        family,
        loops: arguments.loops.unwrap_or(family.length),
        incomplete: arguments.incomplete,
        orbit: arguments.state.clone(),
        certificate: arguments.certificate.is_some(),
    };
    request.check()?;
    interrupt::listen(Duration::from_millis(1500))?;
    let progress = Progress::new(console);
    let memory = arguments.memory.as_deref().map(parse_size).transpose()?;
    let journal = arguments.keep.as_deref().map(|path| Journal::open(path, &format!("series {family}")));
    let checkpoint: &dyn Checkpoint = journal.as_ref().map_or(&NoCheckpoint, |journal| journal);
    let outcome = in_pool(arguments.threads, || engine::compute(&request, memory, checkpoint, &progress));
    progress.finish();
    let outcome = outcome?;
    if let Some(journal) = journal {
        journal.remove();
    }
    if let Some(path) = &arguments.certificate {
        let Some(certificate) = &outcome.certificate else {
            return Err(Error::input(format!(
                "family {family} is protected and needs no certificate; leave out --certificate"
            )));
        };
        crate::record::write_atomically(path, certificate.to_json().as_bytes())?;
    }
    let printed = match arguments.format {
        Format::Json => outcome.record.to_json(),
        Format::Text => text::series(
            &outcome.record,
            &text::Style { colour: console.colour, coupling: arguments.coupling, ..text::Style::default() },
        )?,
    };
    console.result(&printed)
}
