//! `loopladder census`: how many primaries, in which orbits.

use super::{Console, Progress, in_pool, interrupt};
use crate::engine;
use crate::error::{Error, Result};
use crate::family::Family;
use crate::record;
use crate::scan::parse_range;
use std::fmt::Write;
use std::time::Duration;

/// Count the primaries of every family of the given lengths, and list their Galois orbits
#[derive(clap::Args)]
#[command(after_help = "Example: loopladder census 4-12")]
pub struct Arguments {
    /// A length or a range of lengths, such as 8 or 4-12
    lengths: String,
    /// Only this number of magnons
    #[arg(long, value_name = "M")]
    magnons: Option<usize>,
    /// Counts only, from the necklace formula: no orbits
    #[arg(long)]
    counts: bool,
    /// Threads; all cores when not given
    #[arg(long, value_name = "T")]
    threads: Option<usize>,
}

/// Runs the command; every family is printed as soon as it is known.
///
/// # Errors
/// A bad range or a failing computation.
pub fn run(arguments: &Arguments, console: &Console) -> Result<()> {
    let (first, last) = parse_range(&arguments.lengths)
        .map_err(|what| Error::input(format!("lengths \"{}\": {what}", arguments.lengths)))?;
    interrupt::listen(Duration::from_millis(1500))?;
    let progress = Progress::new(console);
    let mut any = false;
    for length in first..=last {
        for magnons in (2..=length / 2).filter(|m| arguments.magnons.is_none_or(|only| only == *m)) {
            let family = Family::new(length, magnons)?;
            let count = family.primaries();
            let mut text = format!("{family}  {count} {}\n", if count == 1 { "primary" } else { "primaries" });
            if !arguments.counts {
                for orbit in in_pool(arguments.threads, || engine::outline(family, &progress))? {
                    describe(&orbit, &mut text);
                }
            }
            console.result(&text)?;
            any = true;
        }
    }
    progress.finish();
    if any { Ok(()) } else { Err(Error::input("no family matches: families need 2 <= M <= L/2; give larger lengths")) }
}

fn describe(orbit: &record::Orbit, text: &mut String) {
    let parity = match orbit.parity {
        record::Parity::Symmetric => "symmetric",
        record::Parity::Paired => "paired",
    };
    let _ = writeln!(
        text,
        "  {:<11} degree {:<3} {parity}{}  {} = root of {}",
        orbit.label,
        orbit.degree(),
        if orbit.singular { ", singular" } else { "" },
        orbit.generator,
        crate::report::expression::Notation::Plain.minimal_polynomial(&orbit.minimal_polynomial)
    );
}
