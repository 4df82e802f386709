//! `loopladder evaluate`: numbers at finite coupling.

use super::Console;
use super::reading::{Format, record_of};
use crate::error::{Error, Result};
use crate::report::finite::{Point, Selection, estimates, json, text};

/// Dimensions at finite coupling from the exact coefficients, with an error estimate.
#[derive(clap::Args)]
#[command(after_help = "Examples:\n  \
    loopladder evaluate 4 2 --at g=0.1\n  \
    loopladder evaluate --from results/L08M04.json --state L8M4-1:2 --at g=0.1,g=0.2 --format json")]
pub struct Arguments {
    /// L, the number of fields in the trace
    #[arg(required_unless_present = "from")]
    length: Option<usize>,
    /// M, the number of magnons
    #[arg(required_unless_present = "from")]
    magnons: Option<usize>,
    /// Read this result record instead of computing the family
    #[arg(long, value_name = "FILE", conflicts_with_all = ["length", "magnons"])]
    from: Option<std::path::PathBuf>,
    /// States: an orbit's label (L8M4-1), or one of its embeddings (L8M4-1:2); all when absent
    #[arg(long, value_name = "LABEL", value_delimiter = ',')]
    state: Vec<String>,
    /// Couplings: g=0.1, g^2=0.01, lambda=1.5, lambda/8pi^2=0.02; several with commas
    #[arg(long, value_name = "COUPLING", value_delimiter = ',', required = true)]
    at: Vec<String>,
    /// How many loops to use (all complete ones when absent)
    #[arg(long, value_name = "N")]
    loops: Option<usize>,
    /// Significant digits of every number (as many as the error calls for when absent)
    #[arg(long, value_name = "D")]
    digits: Option<usize>,
    /// What to print
    #[arg(long, value_enum, default_value = "text")]
    format: Format,
}

/// Runs the command.
///
/// # Errors
/// Bad arguments, an unreadable record, or a failed computation.
pub fn run(arguments: &Arguments, console: &Console) -> Result<()> {
    let points = arguments.at.iter().map(|text| Point::parse(text)).collect::<Result<Vec<_>>>()?;
    let selections = arguments.state.iter().map(|text| Selection::parse(text)).collect::<Result<Vec<_>>>()?;
    if let Some(digits) = arguments.digits.filter(|&digits| digits == 0 || digits > 1000) {
        return Err(Error::input(format!("--digits {digits}: give a number of digits between 1 and 1000")));
    }
    let record = record_of(arguments.length, arguments.magnons, arguments.from.as_deref(), arguments.loops, console)?;
    let found = estimates(&record, &selections, &points, arguments.loops, arguments.digits.unwrap_or(40))?;
    console.result(&match arguments.format {
        Format::Text => text(&found, arguments.digits),
        Format::Json => json(&found, arguments.digits),
    })
}
