//! `loopladder plot`: pictures.

use super::Console;
use crate::error::{Error, Result};
use crate::record::{Record, read_all, write_atomically};
use crate::report::coupling::Coupling;
use crate::report::finite::Selection;
use crate::report::plot::{Kind, Request, png, svg};
use std::path::PathBuf;

/// What is drawn.
#[derive(Clone, Copy, Debug, clap::ValueEnum)]
enum What {
    /// γ of chosen states against g: partial sums, Padé, conformal map, radius of convergence
    Sums,
    /// γ of every state against g
    Spectrum,
    /// |γ_n|^(1/n) against n
    Growth,
}

/// Pictures of γ(g), of a spectrum, or of the growth of the coefficients.
#[derive(clap::Args)]
#[command(after_help = "Examples:\n  \
    loopladder plot results/L04M02.json --out konishi.svg\n  \
    loopladder plot results --kind spectrum --out spectrum.png\n  \
    loopladder plot results --kind growth --state L4M2-1,L6M3-1 --out growth.svg")]
pub struct Arguments {
    /// A result record, or a directory of them
    results: PathBuf,
    /// The file to write; its ending, .svg or .png, is the format
    #[arg(long, value_name = "FILE")]
    out: PathBuf,
    /// What is drawn
    #[arg(long, value_enum, default_value = "sums")]
    kind: What,
    /// States: an orbit's label (L8M4-1), or one of its embeddings (L8M4-1:2)
    #[arg(long, value_name = "LABEL", value_delimiter = ',')]
    state: Vec<String>,
    /// The largest g on the axis
    #[arg(long, value_name = "G", default_value_t = 0.4)]
    to: f64,
    /// The coupling on the axis: lambda/16pi^2 (shown as g), lambda/8pi^2, lambda/4pi^2, lambda/pi^2 or lambda
    #[arg(long, value_name = "COUPLING", default_value = "lambda/16pi^2", value_parser = super::reading::coupling)]
    coupling: Coupling,
}

/// Runs the command.
///
/// # Errors
/// Unreadable records, states that are not there, or a file that cannot be written.
pub fn run(arguments: &Arguments, console: &Console) -> Result<()> {
    let ending = arguments.out.extension().and_then(|e| e.to_str()).unwrap_or_default().to_lowercase();
    if ending != "svg" && ending != "png" {
        return Err(Error::input(format!(
            "{}: the ending says which format to write, and it must be .svg or .png",
            arguments.out.display()
        )));
    }
    let states = arguments.state.iter().map(|text| Selection::parse(text)).collect::<Result<Vec<_>>>()?;
    let records: Vec<Record> = read_all(&arguments.results)?.into_iter().map(|(_, record)| record).collect();
    let kind = match arguments.kind {
        What::Sums => Kind::Sums,
        What::Spectrum => Kind::Spectrum,
        What::Growth => Kind::Growth,
    };
    let picture = svg(&records, &Request { kind, states, largest: arguments.to, coupling: arguments.coupling })?;
    let bytes = if ending == "png" { png(&picture)? } else { picture.into_bytes() };
    write_atomically(&arguments.out, &bytes)?;
    console.message(&format!("wrote {}", arguments.out.display()));
    Ok(())
}
