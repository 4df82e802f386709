//! Published values against records, exactly.
//!
//! A [`Reference`] holds entries as a paper prints them, each in the paper's own coupling; [`run`]
//! answers for each whether the records agree exactly, agree to the printed digits, differ, or do
//! not contain the value.

pub mod coupling;
pub mod expression;
mod judge;
mod numeric;
mod reference;
mod state;
mod text;
pub mod value;

pub use judge::{Answer, Difference, Verdict};
pub use reference::{Entry, Part, Reference};
pub use text::{json, plain};

use crate::error::{Error, Result};
use crate::record::Record;

/// A finished comparison.
pub struct Comparison {
    /// What was compared.
    pub reference: Reference,
    /// One answer for each entry.
    pub answers: Vec<Answer>,
}

/// How many entries got which answer.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Tally {
    /// Agree exactly.
    pub exact: usize,
    /// Agree to the printed digits.
    pub digits: usize,
    /// Differ.
    pub differs: usize,
    /// Not in the results.
    pub missing: usize,
}

impl Comparison {
    /// The counts.
    pub fn tally(&self) -> Tally {
        let mut tally = Tally::default();
        for answer in &self.answers {
            match answer.verdict {
                Verdict::Exact => tally.exact += 1,
                Verdict::Digits => tally.digits += 1,
                Verdict::Differs(_) => tally.differs += 1,
                Verdict::Missing(_) => tally.missing += 1,
            }
        }
        tally
    }
}

/// Holds every entry against the records. The cost is negligible beside computing a record.
///
/// # Errors
/// An entry that cannot be evaluated (for example a division by zero); the message names it.
pub fn run(records: &[&Record], reference: Reference) -> Result<Comparison> {
    let mut answers = Vec::with_capacity(reference.entries.len());
    for entry in &reference.entries {
        let answer = judge::judge(records, entry).map_err(|what| {
            Error::input(format!(
                "reference entry {}, family {}, loop {}: {what}; correct the entry",
                entry.number, entry.family, entry.order
            ))
        })?;
        answers.push(answer);
    }
    Ok(Comparison { reference, answers })
}
