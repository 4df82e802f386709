//! What a cross-check found, as JSON and as text.

use crate::record::Parity;
use serde::Serialize;
use std::fmt::Write;

/// The outcome for one family.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct Report {
    /// L.
    pub length: usize,
    /// M.
    pub magnons: usize,
    /// Loops compared.
    pub loops: usize,
    /// Primaries even under reversal of the chain, by diagonalisation.
    pub primaries_even: usize,
    /// Primaries odd under reversal of the chain, by diagonalisation.
    pub primaries_odd: usize,
    /// Primaries in the orbits that were compared.
    pub primaries_in_record: usize,
    /// One entry for each orbit of the record.
    pub orbits: Vec<OrbitReport>,
}

/// The outcome for one orbit.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct OrbitReport {
    /// "L8M3-1".
    pub label: String,
    /// As the record has it.
    pub parity: Parity,
    /// Primaries in the orbit.
    pub members: usize,
    /// Minimal polynomial of ω.
    pub minimal_polynomial: Vec<String>,
    /// What ω is.
    pub generator: String,
    /// Whether all loops compared agree exactly.
    pub agrees: bool,
    /// The number n such that loops 1 … n agree exactly.
    pub agrees_through: usize,
    /// What diagonalisation gives at the first loop that differs, where a single eigenvalue is meant.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub direct: Option<Direct>,
}

/// A coefficient that differs.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct Direct {
    /// The loop.
    #[serde(rename = "loop")]
    pub order: usize,
    /// Coefficients of 1, ω, … in the record.
    pub claimed: Vec<String>,
    /// Coefficients of 1, ω, … by diagonalisation.
    pub value: Vec<String>,
}

impl Report {
    /// Whether every orbit agrees and no primary is missing.
    pub fn agrees(&self) -> bool {
        self.complete() && self.orbits.iter().all(|orbit| orbit.agrees)
    }

    /// Whether the record has as many primaries as diagonalisation finds.
    pub fn complete(&self) -> bool {
        self.primaries_even + self.primaries_odd == self.primaries_in_record
    }

    /// The JSON text, ending in a newline.
    pub fn to_json(&self) -> String {
        let mut text = serde_json::to_string_pretty(self).unwrap_or_default();
        text.push('\n');
        text
    }

    /// The text for people: one line for each orbit.
    pub fn text(&self) -> String {
        let mut text = String::new();
        let _ = writeln!(
            text,
            "Family ({}, {}) by direct diagonalisation of the dilatation operator, {}, exactly\n{}: {} even and {} odd under reversal of the chain\n",
            self.length,
            self.magnons,
            if self.loops == 1 { "one loop".to_string() } else { format!("loops 1 to {}", self.loops) },
            count(self.primaries_even + self.primaries_odd, "primary", "primaries"),
            self.primaries_even,
            self.primaries_odd
        );
        for orbit in &self.orbits {
            let parity = match orbit.parity {
                Parity::Symmetric => "symmetric",
                Parity::Paired => "paired",
            };
            let _ = write!(
                text,
                "  {:<10} {parity:<9}  {:<12} ",
                orbit.label,
                count(orbit.members, "primary", "primaries")
            );
            if orbit.agrees {
                text += "agrees\n";
                continue;
            }
            let _ = writeln!(text, "DIFFERS at loop {}", orbit.agrees_through + 1);
            if let Some(direct) = &orbit.direct {
                let value = |coefficients: &[String]| match coefficients {
                    [value] => value.clone(),
                    _ => format!("[{}]", coefficients.join(", ")),
                };
                let powers = if direct.value.len() > 1 { " (coefficients of 1, w, w^2 ...)" } else { "" };
                let _ = writeln!(
                    text,
                    "             gamma_{}{powers} is {} by diagonalisation, and {} in the record",
                    direct.order,
                    value(&direct.value),
                    value(&direct.claimed)
                );
            }
        }
        let differing = self.orbits.iter().filter(|orbit| !orbit.agrees).count();
        text += "\n";
        if !self.complete() {
            let _ = writeln!(
                text,
                "{} compared, but diagonalisation finds {}",
                count(self.primaries_in_record, "primary", "primaries"),
                self.primaries_even + self.primaries_odd
            );
        }
        let _ = match (differing, self.orbits.len()) {
            (0, 1) => writeln!(text, "the orbit agrees exactly through loop {}", self.loops),
            (0, n) => writeln!(text, "all {n} orbits agree exactly through loop {}", self.loops),
            (n, total) => writeln!(text, "{n} of {} differ", count(total, "orbit", "orbits")),
        };
        text
    }
}

fn count(n: usize, one: &str, many: &str) -> String {
    format!("{n} {}", if n == 1 { one } else { many })
}
