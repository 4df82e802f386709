//! What an audit found.

use crate::record::Parity;
use std::fmt;

/// The outcome of one check, in order of gravity.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Verdict {
    /// Shown exactly.
    Proved,
    /// Neither shown nor contradicted.
    NotCovered,
    /// Contradicted.
    Refuted,
}

/// One check and its outcome.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Finding {
    /// The outcome.
    pub verdict: Verdict,
    /// What was checked, and what came out.
    pub text: String,
}

/// The findings about one thing.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Findings(pub Vec<Finding>);

impl Findings {
    /// Something shown.
    pub fn proved(&mut self, text: impl Into<String>) {
        self.0.push(Finding { verdict: Verdict::Proved, text: text.into() });
    }

    /// Something left open.
    pub fn open(&mut self, text: impl Into<String>) {
        self.0.push(Finding { verdict: Verdict::NotCovered, text: text.into() });
    }

    /// Something contradicted.
    pub fn refuted(&mut self, text: impl Into<String>) {
        self.0.push(Finding { verdict: Verdict::Refuted, text: text.into() });
    }

    /// Shown when `fine`, contradicted otherwise.
    pub fn check(&mut self, fine: bool, text: impl Into<String>) {
        if fine { self.proved(text) } else { self.refuted(text) }
    }

    /// The gravest outcome.
    pub fn verdict(&self) -> Verdict {
        self.0.iter().map(|finding| finding.verdict).max().unwrap_or(Verdict::Proved)
    }
}

/// The audit of one orbit.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct OrbitAudit {
    /// The label in the record.
    pub label: String,
    /// The parity in the record.
    pub parity: Parity,
    /// The members in the record.
    pub members: usize,
    /// γ₁ of the states as printed in the record.
    pub one_loop: Vec<String>,
    /// γ_1 … γ_n of every state are proved.
    pub through: usize,
    /// All checks.
    pub findings: Findings,
}

/// The audit of one record.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Audit {
    /// L.
    pub length: usize,
    /// M.
    pub magnons: usize,
    /// Checks about the record as a whole.
    pub family: Findings,
    /// One entry for each orbit.
    pub orbits: Vec<OrbitAudit>,
}

impl Audit {
    /// The gravest outcome.
    pub fn verdict(&self) -> Verdict {
        self.orbits
            .iter()
            .map(|orbit| orbit.findings.verdict())
            .max()
            .unwrap_or(Verdict::Proved)
            .max(self.family.verdict())
    }

    /// The report; `verbose` lists what is proved as well.
    pub fn text(&self, verbose: bool) -> String {
        let mut lines = Vec::new();
        for orbit in &self.orbits {
            lines.push(format!("  {orbit}"));
            lines.extend(orbit.findings.lines(verbose, "      "));
        }
        lines.push(format!("  family ({}, {}): {}", self.length, self.magnons, self.family.verdict()));
        lines.extend(self.family.lines(verbose, "      "));
        lines.join("\n") + "\n"
    }
}

impl Findings {
    fn lines(&self, verbose: bool, indent: &str) -> Vec<String> {
        let shown = self.0.iter().filter(|finding| verbose || finding.verdict != Verdict::Proved);
        shown.map(|finding| format!("{indent}{}: {}", finding.verdict, finding.text)).collect()
    }
}

impl fmt::Display for Verdict {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Verdict::Proved => "proved",
            Verdict::NotCovered => "not covered",
            Verdict::Refuted => "REFUTED",
        })
    }
}

impl fmt::Display for OrbitAudit {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let short =
            |text: &String| text.chars().take(text.find('.').map_or(usize::MAX, |dot| dot + 7)).collect::<String>();
        let states: Vec<String> = self.one_loop.iter().map(short).collect();
        let parity = match self.parity {
            Parity::Symmetric => "symmetric",
            Parity::Paired => "mirror pairs",
        };
        write!(
            f,
            "{}  {} {parity}, gamma_1 = {}: {}",
            self.label,
            self.members,
            states.join(", "),
            self.findings.verdict()
        )?;
        match (self.findings.verdict(), self.through) {
            (Verdict::Refuted, _) => Ok(()),
            (_, 0) => Ok(()),
            (Verdict::Proved, n) => write!(f, " through loop {n}"),
            (_, n) => write!(f, " in part, loops 1 to {n} proved"),
        }
    }
}
