//! `loopladder compare`: published values against records.

use super::Console;
use crate::compare::{self, Reference};
use crate::error::{Error, Kind, Result};
use crate::record;
use std::path::PathBuf;

/// Compare results with published (or draft) values, exactly
#[derive(clap::Args)]
#[command(after_help = "\
A reference file is TOML with one [[entry]] for each value:

  coupling = \"lambda/(16 pi^2)\"         # the paper's; entries may name their own
  [[entry]]
  family = [8, 4]                       # L, M
  one_loop = \"5.45222\"                  # which state; or label, or minimal_polynomial
  loop = 2                              # or values = [...] for loops 1, 2, ...
  value = \"-7.94042\"                    # or exact: \"-2496 + 576 zeta(3) - 1440 zeta(5)\"
  part = \"complete\"                     # asymptotic, finite-size, zeta-free, asymptotic zeta-free
  citation = \"...\"

Everything in an entry is in the coupling it names; w stands for omega in that coupling. Exit code:
0 when nothing differs, 1 when something does (or, with --require-all, is not in the results).

Example: loopladder compare out/ demo-data/literature.toml")]
pub struct Arguments {
    /// A record file, or a directory of records written by `loopladder scan`
    results: PathBuf,
    /// The reference file (TOML)
    reference: PathBuf,
    /// How to print the answers
    #[arg(long, value_enum, default_value_t = Format::Text)]
    format: Format,
    /// Fail also when a value is not in the results
    #[arg(long)]
    require_all: bool,
}

/// How to print.
#[derive(Clone, Copy, Debug, PartialEq, Eq, clap::ValueEnum)]
enum Format {
    /// For people
    Text,
    /// For programs
    Json,
}

/// Runs the command.
///
/// # Errors
/// Unreadable files, broken entries, and (kind `Negative`) values that differ.
pub fn run(arguments: &Arguments, console: &Console) -> Result<()> {
    let reference = Reference::read(&arguments.reference)?;
    let records = record::read_all(&arguments.results)?;
    let records: Vec<&record::Record> = records.iter().map(|(_, record)| record).collect();
    let comparison = compare::run(&records, reference)?;
    console.result(&match arguments.format {
        Format::Text => compare::plain(&comparison, console.colour),
        Format::Json => compare::json(&comparison),
    })?;
    let tally = comparison.tally();
    if tally.differs > 0 {
        return Err(Error::new(
            Kind::Negative,
            format!("{} of {} values differ from the records", tally.differs, comparison.answers.len()),
        ));
    }
    if arguments.require_all && tally.missing > 0 {
        return Err(Error::new(
            Kind::Negative,
            format!(
                "{} of {} values are not in the results; compute more families or loops",
                tally.missing,
                comparison.answers.len()
            ),
        ));
    }
    Ok(())
}
