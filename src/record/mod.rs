//! The result record: one JSON object for one family, the only thing that reports, scans, audits
//! and comparisons see.
//!
//! Schema 1 holds exact and asymptotic coefficients; schema 2 adds coefficients from the spectral
//! curve (`recognised`, `numeric`) and multiple zeta values. Exact numbers are strings in lowest
//! terms ("-9/2"); a missing coefficient is absent, never 0. Unknown keys are refused on reading,
//! and [`Record::check`] refuses what the keys alone do not exclude.

mod certificate;
mod check;
mod file;

pub use certificate::{CERTIFICATE, Certificate, CertificateOrbit, CertificateOrder, CertificateTerm, Element};
pub use check::canonical_rational;
pub use file::{file_name, read, read_all, write_atomically};

use serde::{Deserialize, Serialize};

/// The coupling of every record: γ = Σ γ_n g^{2n}, "n loops" = g^{2n}.
pub const COUPLING: &str = "g^2 = lambda/(16 pi^2)";

/// The highest schema number written and read.
pub const SCHEMA: u32 = 2;

/// The name and version written into records.
pub const PROGRAM: &str = concat!("loopladder ", env!("CARGO_PKG_VERSION"));

/// All primaries of one family.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Record {
    /// 1, or 2 when a coefficient comes from the spectral curve.
    pub schema: u32,
    /// Program and version that wrote it.
    pub program: String,
    /// L.
    pub length: usize,
    /// M.
    pub magnons: usize,
    /// Always [`COUPLING`].
    pub coupling: String,
    /// The highest loop order present.
    pub loops: usize,
    /// The number of primaries of the family.
    pub primaries: usize,
    /// Galois orbits, sorted by degree, then by minimal polynomial from the leading coefficient down.
    pub orbits: Vec<Orbit>,
}

/// One Galois orbit of primaries.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Orbit {
    /// "L8M3-1": family and position.
    pub label: String,
    /// Symmetric, or mirror pairs with equal γ_n.
    pub parity: Parity,
    /// Primaries in the orbit: degree, or twice the degree when paired.
    pub members: usize,
    /// Whether v = ±½ are Bethe roots at one loop.
    pub singular: bool,
    /// Minimal polynomial of ω, constant term first, monic.
    pub minimal_polynomial: Vec<String>,
    /// What ω is: "gamma_1", or the charge used.
    pub generator: String,
    /// γ_n, ascending in n; an absent order is unknown.
    pub coefficients: Vec<Coefficient>,
    /// The real embeddings, sorted by one-loop anomalous dimension.
    pub states: Vec<State>,
}

/// Behaviour under v → −v.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Parity {
    /// Q is even or odd.
    Symmetric,
    /// The members come as mirror pairs.
    Paired,
}

/// How much is known of a coefficient.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Status {
    /// Complete at this order and exact.
    Exact,
    /// The finite-size term is missing.
    Asymptotic,
    /// Exact form recognised from digits, with spare digits left over (schema 2).
    Recognised,
    /// Certain digits only (schema 2).
    Numeric,
}

/// γ_n.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Coefficient {
    /// n.
    #[serde(rename = "loop")]
    pub order: usize,
    /// What is known.
    pub status: Status,
    /// The exact value; an exact zero is one term of value zero.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub terms: Vec<Term>,
    /// Present where the asymptotic equations and the finite-size term both contribute.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub parts: Option<Parts>,
    /// Digits beyond what the fit consumed; only with `recognised`.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub spare_digits: Option<u32>,
    /// Decimals in the order of `states`; only with `numeric`.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub numbers: Vec<String>,
}

/// The two contributions at loop L.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Parts {
    /// From the asymptotic equations.
    pub asymptotic: Vec<Term>,
    /// The leading finite-size (wrapping) term.
    pub finite_size: Vec<Term>,
}

/// (element of Q(ω)) × (product of zeta values).
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Term {
    /// The factors, ascending; ζ3²ζ5 is [3, 3, 5]; ζ3 ζ_{5,3} is [3, [5, 3]].
    pub zeta: Vec<Zeta>,
    /// Coefficients of 1, ω, ω², …; as many as the degree of ω.
    pub value: Vec<String>,
}

/// A single zeta value ζ(k), or a multiple zeta value ζ_{a,b,…} with k₁ > k₂ > … (schema 2).
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize, Deserialize)]
#[serde(untagged)]
pub enum Zeta {
    /// ζ(k).
    Single(u32),
    /// ζ_{a,b,…} = Σ_{k₁>k₂>…} k₁^{−a} k₂^{−b} ….
    Multiple(Vec<u32>),
}

/// One real embedding of ω.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct State {
    /// ω as a decimal (as an exact integer or rational when the degree is 1).
    pub omega: String,
    /// γ₁ as a decimal; every digit certain, the last one rounded.
    pub one_loop: String,
}

impl Orbit {
    /// The degree of ω.
    pub fn degree(&self) -> usize {
        self.minimal_polynomial.len().saturating_sub(1)
    }

    /// γ_n, where known.
    pub fn coefficient(&self, order: usize) -> Option<&Coefficient> {
        self.coefficients.iter().find(|coefficient| coefficient.order == order)
    }

    /// The number n such that γ_1 … γ_n are all present and complete (everything but `asymptotic`).
    pub fn complete_through(&self) -> usize {
        (1..)
            .take_while(|&order| {
                self.coefficient(order).is_some_and(|coefficient| coefficient.status != Status::Asymptotic)
            })
            .count()
    }
}

impl Record {
    /// The JSON text, ending in a newline.
    pub fn to_json(&self) -> String {
        let mut text = serde_json::to_string_pretty(self).unwrap_or_default();
        text.push('\n');
        text
    }

    /// Reads and checks JSON text; `origin` names it in errors.
    ///
    /// # Errors
    /// Text that is not JSON, unknown or missing keys, or anything [`Record::check`] refuses.
    pub fn from_json(text: &str, origin: &str) -> crate::error::Result<Record> {
        let record: Record = serde_json::from_str(text).map_err(|cause| {
            crate::error::Error::input(format!(
                "{origin}: not a result record of schema 1 to {SCHEMA}; compute it again with `loopladder series` or `scan`"
            ))
            .because(cause)
        })?;
        record.check(origin)?;
        Ok(record)
    }
}
