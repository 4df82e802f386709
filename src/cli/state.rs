//! `loopladder state`: what the next calculation needs.

use super::reading::Format;
use super::{Console, Progress, in_pool, interrupt};
use crate::error::{Error, Result};
use crate::family::Family;
use crate::state::{Request, compute, text};
use std::time::Duration;

/// Baxter polynomials, transfer matrix, charges, Bethe roots and eigenoperator of one orbit.
#[derive(clap::Args)]
#[command(after_help = "Examples:\n  \
    loopladder state 6 3 L6M3-1\n  \
    loopladder state 8 4 L8M4-1 --loops 2 --digits 40 --format json")]
pub struct Arguments {
    /// L, the number of fields in the trace
    length: usize,
    /// M, the number of magnons
    magnons: usize,
    /// The orbit's label, as `series` prints it
    label: String,
    /// Baxter polynomials and charges through this loop order (h^(N-1))
    #[arg(long, value_name = "N", default_value_t = 2)]
    loops: usize,
    /// Significant digits of the Bethe roots
    #[arg(long, value_name = "D", default_value_t = 20)]
    digits: usize,
    /// What to print
    #[arg(long, value_enum, default_value = "text")]
    format: Format,
}

/// Runs the command.
///
/// # Errors
/// A bad family or label, or a failed computation.
pub fn run(arguments: &Arguments, console: &Console) -> Result<()> {
    let family = Family::new(arguments.length, arguments.magnons)?;
    if arguments.digits == 0 || arguments.digits > 1000 {
        return Err(Error::input(format!("--digits {}: give a number of digits between 1 and 1000", arguments.digits)));
    }
    let request = Request { family, label: arguments.label.clone(), loops: arguments.loops, digits: arguments.digits };
    interrupt::listen(Duration::from_millis(1500))?;
    let progress = Progress::new(console);
    let state = in_pool(None, || compute(&request, &progress));
    progress.finish();
    let state = state?;
    console.result(&match arguments.format {
        Format::Text => text(&state, 100),
        Format::Json => state.to_json(),
    })
}
