//! Records in the formats of other tools: LaTeX, Markdown, CSV, JSON, and one self-contained page.

mod csv;
mod html;
mod latex;
mod markdown;

use super::coupling::Coupling;
use super::expression::weight;
use super::numbers::Numbers;
use crate::error::{Error, Result};
use crate::record::{Coefficient, Orbit, Record, Status, Term};
use std::ops::RangeInclusive;

/// The formats.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Format {
    /// A document that compiles as it is (booktabs, longtable), or the tables alone.
    Latex,
    /// Tables for notes.
    Markdown,
    /// Long form, one number to a row.
    Csv,
    /// The records themselves.
    Json,
    /// One page without outside parts.
    Html,
}

/// What a table shows beside the loop order.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Column {
    /// The exact coefficient.
    Exact,
    /// Its number in each state.
    Number,
    /// The asymptotic and finite-size parts at loop L.
    Parts,
    /// How much is known: exact, asymptotic, recognised, numeric.
    Status,
}

impl Column {
    /// Every column with its word.
    pub const ALL: [(Column, &'static str); 4] =
        [(Column::Exact, "exact"), (Column::Number, "number"), (Column::Parts, "parts"), (Column::Status, "status")];
}

/// What is exported.
#[derive(Clone, Debug)]
pub struct Options {
    /// The coupling of the coefficients.
    pub coupling: Coupling,
    /// The loop orders.
    pub loops: RangeInclusive<usize>,
    /// The columns of LaTeX and Markdown tables.
    pub columns: Vec<Column>,
    /// Significant digits of numbers.
    pub digits: usize,
    /// LaTeX: the tables without a document around them.
    pub fragment: bool,
}

impl Default for Options {
    fn default() -> Options {
        Options {
            coupling: Coupling::default(),
            loops: 1..=usize::MAX,
            columns: Column::ALL.map(|(column, _)| column).to_vec(),
            digits: 12,
            fragment: false,
        }
    }
}

impl Options {
    fn shows(&self, column: Column) -> bool {
        self.columns.contains(&column)
    }
}

/// The records in a format.
///
/// # Errors
/// JSON in another coupling than the records' own; records whose decimals contradict them.
pub fn export(records: &[Record], format: Format, options: &Options) -> Result<String> {
    match format {
        Format::Latex => latex::document(records, options),
        Format::Markdown => markdown::document(records, options),
        Format::Csv => csv::table(records, options),
        Format::Html => html::page(records, options),
        Format::Json => json(records, options),
    }
}

fn json(records: &[Record], options: &Options) -> Result<String> {
    if options.coupling != Coupling::default() {
        return Err(Error::input(format!(
            "JSON in {}: result records hold coefficients in {} only; export them so, or take --format csv",
            options.coupling.word(),
            crate::record::COUPLING
        )));
    }
    let mut records = records.to_vec();
    for record in &mut records {
        record.loops = record.loops.min(*options.loops.end());
        for orbit in &mut record.orbits {
            orbit.coefficients.retain(|coefficient| options.loops.contains(&coefficient.order));
        }
    }
    let text = match records.as_slice() {
        [one] => one.to_json(),
        many => serde_json::to_string_pretty(many).unwrap_or_default() + "\n",
    };
    Ok(text)
}

/// The coefficients of an orbit inside the range of loops.
fn chosen<'a>(orbit: &'a Orbit, options: &'a Options) -> impl Iterator<Item = &'a Coefficient> {
    orbit.coefficients.iter().filter(|coefficient| options.loops.contains(&coefficient.order))
}

/// The numbers of a coefficient in every state.
fn numbers(coefficient: &Coefficient, of: &Numbers, options: &Options) -> Result<Vec<String>> {
    (0..of.states()).map(|state| of.decimal(coefficient, state, options.digits, options.coupling)).collect()
}

/// Terms by weight, those of value zero left out.
fn ordered(terms: &[Term]) -> Vec<Term> {
    let mut terms: Vec<Term> = terms.iter().filter(|term| term.value.iter().any(|v| v != "0")).cloned().collect();
    terms.sort_by(|a, b| (weight(&a.zeta), &a.zeta).cmp(&(weight(&b.zeta), &b.zeta)));
    terms
}

fn status(coefficient: &Coefficient) -> &'static str {
    match coefficient.status {
        Status::Exact => "exact",
        Status::Asymptotic => "asymptotic",
        Status::Recognised => "recognised",
        Status::Numeric => "numeric",
    }
}

/// How far an orbit's values are complete.
fn completeness(record: &Record, orbit: &Orbit) -> String {
    if record.magnons == 0 {
        return "protected: every coefficient is exactly zero".to_string();
    }
    format!("complete through loop {}", orbit.complete_through())
}

#[cfg(test)]
mod tests {
    use super::super::testing;
    use super::{Column, Format, Options, export};
    use crate::record::Record;
    use crate::report::coupling::Coupling;

    fn records() -> Vec<Record> {
        vec![testing::konishi(), testing::pair(), testing::cubic()]
    }

    /// One snapshot for each format (the page without its style, script and pictures).
    #[test]
    fn snapshots() {
        let options = Options::default();
        let of = |format| export(&records(), format, &options).unwrap();
        insta::assert_snapshot!("export_latex", of(Format::Latex));
        insta::assert_snapshot!("export_markdown", of(Format::Markdown));
        insta::assert_snapshot!("export_csv", of(Format::Csv));
        let page = of(Format::Html);
        let (from, to) = (page.find("<table").unwrap(), page.find("</table>").unwrap());
        insta::assert_snapshot!("export_html_table", &page[from..to]);
    }

    #[test]
    fn json_is_the_record_again() {
        let options = Options::default();
        let text = export(&records()[2..], Format::Json, &options).unwrap();
        assert_eq!(Record::from_json(&text, "test").unwrap(), testing::cubic());
        let list: Vec<Record> = serde_json::from_str(&export(&records(), Format::Json, &options).unwrap()).unwrap();
        assert_eq!(list, records());
        let options = Options { coupling: Coupling::Lambda, ..options };
        assert!(export(&records(), Format::Json, &options).unwrap_err().to_string().contains("csv"));
    }

    #[test]
    fn loop_range_columns_and_coupling() {
        let options = Options {
            loops: 2..=3,
            columns: vec![Column::Exact],
            coupling: Coupling::Over4PiSquared,
            ..Options::default()
        };
        insta::assert_snapshot!("export_markdown_options", export(&records(), Format::Markdown, &options).unwrap());
    }
}
