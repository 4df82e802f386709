//! `loopladder export`: tables and the page.

use super::Console;
use crate::error::{Error, Result};
use crate::record::{Record, read_all, write_atomically};
use crate::report::coupling::Coupling;
use crate::report::export::{Column, Format, Options, export};
use std::ops::RangeInclusive;
use std::path::PathBuf;

/// The formats.
#[derive(Clone, Copy, Debug, clap::ValueEnum)]
enum Target {
    /// A document that compiles as it is
    Latex,
    /// Tables for notes
    Markdown,
    /// Long form, one rational number to a row
    Csv,
    /// The records themselves
    Json,
    /// One self-contained page with sorting, filtering and pictures
    Html,
}

/// Tables of results: LaTeX, Markdown, CSV, JSON, or a web page.
#[derive(clap::Args)]
#[command(after_help = "Examples:\n  \
    loopladder export results --format html --out table.html\n  \
    loopladder export results/L08M04.json --format latex --loops 1-5 --coupling lambda/8pi^2 --out table.tex\n  \
    loopladder export results --format csv > coefficients.csv")]
pub struct Arguments {
    /// A result record, or a directory of them
    results: PathBuf,
    /// The format
    #[arg(long, value_enum)]
    format: Target,
    /// Write this file instead of standard output
    #[arg(long, value_name = "FILE")]
    out: Option<PathBuf>,
    /// The coupling: lambda/16pi^2, lambda/8pi^2, lambda/4pi^2, lambda/pi^2 or lambda
    #[arg(long, value_name = "COUPLING", default_value = "lambda/16pi^2", value_parser = super::reading::coupling)]
    coupling: Coupling,
    /// Loop orders, one (3) or a range (1-5)
    #[arg(long, value_name = "RANGE", value_parser = range)]
    loops: Option<RangeInclusive<usize>>,
    /// Columns of LaTeX and Markdown tables: exact, number, parts, status (all when absent)
    #[arg(long, value_name = "COLUMN", value_delimiter = ',', value_parser = column)]
    columns: Vec<Column>,
    /// Significant digits of the numbers
    #[arg(long, value_name = "D", default_value_t = 12)]
    digits: usize,
    /// LaTeX: the tables only, to be included in a document
    #[arg(long)]
    fragment: bool,
}

fn range(text: &str) -> std::result::Result<RangeInclusive<usize>, String> {
    let (from, to) = text.split_once('-').unwrap_or((text, text));
    match (from.parse::<usize>(), to.parse::<usize>()) {
        (Ok(from), Ok(to)) if from >= 1 && from <= to => Ok(from..=to),
        _ => Err("give a loop order (3) or an ascending range (1-5), from 1 on".to_string()),
    }
}

fn column(text: &str) -> std::result::Result<Column, String> {
    Column::ALL
        .into_iter()
        .find(|(_, word)| *word == text)
        .map(|(column, _)| column)
        .ok_or_else(|| format!("not a column; give some of {}", Column::ALL.map(|(_, word)| word).join(", ")))
}

/// Runs the command.
///
/// # Errors
/// Unreadable records, options that do not fit the format, or a file that cannot be written.
pub fn run(arguments: &Arguments, console: &Console) -> Result<()> {
    if arguments.digits == 0 || arguments.digits > 1000 {
        return Err(Error::input(format!("--digits {}: give a number of digits between 1 and 1000", arguments.digits)));
    }
    let records: Vec<Record> = read_all(&arguments.results)?.into_iter().map(|(_, record)| record).collect();
    let mut options = Options {
        coupling: arguments.coupling,
        digits: arguments.digits,
        fragment: arguments.fragment,
        ..Options::default()
    };
    if let Some(loops) = &arguments.loops {
        options.loops = loops.clone();
    }
    if !arguments.columns.is_empty() {
        options.columns.clone_from(&arguments.columns);
    }
    let format = match arguments.format {
        Target::Latex => Format::Latex,
        Target::Markdown => Format::Markdown,
        Target::Csv => Format::Csv,
        Target::Json => Format::Json,
        Target::Html => Format::Html,
    };
    let text = export(&records, format, &options)?;
    match &arguments.out {
        None => console.result(&text),
        Some(path) => {
            write_atomically(path, text.as_bytes())?;
            console.message(&format!("wrote {}", path.display()));
            Ok(())
        }
    }
}
