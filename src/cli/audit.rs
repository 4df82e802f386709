//! `loopladder audit`: checks records against their certificates.

use super::Console;
use crate::audit::{Audit, Verdict, audit};
use crate::error::{Error, Kind, Result};
use crate::record::{Certificate, Record, read_all};
use std::path::{Path, PathBuf};

/// Prove or refute every exact number of stored results, independently of how they were computed.
///
/// For every orbit, from the certificate beside the record (L08M03.certificate.json beside L08M03.json): the minimal
/// polynomial is irreducible, the lifted Baxter pair satisfies the Wronskian relation with the long-range potential,
/// every coefficient follows from it, the finite-size term included, the printed decimals are right, the states are
/// distinct and as many as the necklace formula says. Exit code 0: everything proved; 1: something refuted, or
/// something not covered.
#[derive(clap::Args)]
#[command(after_help = "Examples:\n  loopladder audit results/\n  loopladder audit results/L08M03.json --verbose")]
pub struct Arguments {
    /// A record, or a directory of records.
    pub path: PathBuf,
    /// The certificate of the record (default: the file beside it).
    #[arg(long, value_name = "FILE")]
    pub certificate: Option<PathBuf>,
    /// List what is proved as well.
    #[arg(long, short)]
    pub verbose: bool,
}

/// Runs the command.
///
/// # Errors
/// Unreadable files, and a negative result when anything is refuted or not covered.
pub fn run(arguments: &Arguments, console: &Console) -> Result<()> {
    if arguments.certificate.is_some() && arguments.path.is_dir() {
        return Err(Error::input(
            "--certificate names one file, but a directory is to be audited; give one record or drop --certificate",
        ));
    }
    let records = read_all(&arguments.path)?;
    let mut counts = [0usize; 3];
    for (path, record) in &records {
        let certificate = certificate_for(path, arguments.certificate.as_deref())?;
        let result = audit(record, certificate.as_ref());
        console.result(&format!(
            "{}: {}\n{}",
            path.display(),
            heading(record, &result),
            result.text(arguments.verbose)
        ))?;
        counts[result.verdict() as usize] += 1;
    }
    let [proved, open, refuted] = counts;
    let total = records.len();
    if refuted > 0 {
        return Err(Error::new(
            Kind::Negative,
            format!("audit: {refuted} of {total} records REFUTED; the lines above say where; compute them again"),
        ));
    }
    if open > 0 {
        return Err(Error::new(
            Kind::Negative,
            format!(
                "audit: nothing is refuted, but {open} of {total} records are not covered in full; the lines above say what is missing"
            ),
        ));
    }
    console.result(&format!("{proved} of {total} records proved\n"))
}

fn heading(record: &Record, audit: &Audit) -> String {
    let what = match audit.verdict() {
        Verdict::Proved => "proved",
        Verdict::NotCovered => "not covered in full",
        Verdict::Refuted => "REFUTED",
    };
    format!("{what} ({} primaries, loops through {})", record.primaries, record.loops)
}

/// The certificate given, or the one beside the record if it exists.
fn certificate_for(path: &Path, given: Option<&Path>) -> Result<Option<Certificate>> {
    if let Some(given) = given {
        return Certificate::read(given).map(Some);
    }
    let beside = path.with_extension("certificate.json");
    if beside.exists() { Certificate::read(&beside).map(Some) } else { Ok(None) }
}
