//! The certificate: the lifted Baxter pairs of a family, stored beside its record, from which
//! `audit` re-derives every exact coefficient.
//!
//! Checking that a pair satisfies the Wronskian relation costs a few multiplications; finding it
//! costs the whole computation. Exact numbers are strings in lowest terms, as in the record.

use super::canonical_rational;
use crate::error::{Error, Result};
use crate::family::Family;
use serde::{Deserialize, Serialize};
use std::path::Path;

/// The certificate format written and read.
pub const CERTIFICATE: u32 = 1;

/// One element of K = Q\[x\]/field: the coefficients of 1, x, x², …; as many as the degree.
pub type Element = Vec<String>;

/// The lifted Baxter pairs of the orbits of one family.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Certificate {
    /// The format, [`CERTIFICATE`].
    pub certificate: u32,
    /// L.
    pub length: usize,
    /// M.
    pub magnons: usize,
    /// The pairs reach order h^{loops−1}; at most L.
    pub loops: usize,
    /// The orbits, in the order of the record.
    pub orbits: Vec<CertificateOrbit>,
}

/// The pair of one orbit.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct CertificateOrbit {
    /// The label of the orbit in the record.
    pub label: String,
    /// Minimal polynomial of x over Q, constant term first, monic. Symmetric orbits: x = ω. Pairs: degree 2d.
    pub field: Vec<String>,
    /// ω as a polynomial in x.
    pub omega: Element,
    /// Q₁ and Q₂ at h⁰, h¹, …, h^{loops−1}.
    pub pair: Vec<CertificateOrder>,
}

/// Q₁ and Q₂ at one order of the coupling.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct CertificateOrder {
    /// n of hⁿ.
    pub order: usize,
    /// One entry for each zeta monomial present; a monomial with zero everywhere is absent.
    pub terms: Vec<CertificateTerm>,
}

/// The part of Q₁ and Q₂ at one order that multiplies one zeta monomial.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct CertificateTerm {
    /// Odd arguments, ascending, repeated for powers.
    pub zeta: Vec<u32>,
    /// Coefficient of v^j, j = 0 … M.
    pub q1: Vec<Element>,
    /// Coefficient of v^j, j = 0 … L−M+1.
    pub q2: Vec<Element>,
}

impl Certificate {
    /// The JSON text (compact: certificates are long and read by programs), ending in a newline.
    pub fn to_json(&self) -> String {
        let mut text = serde_json::to_string(self).unwrap_or_default();
        text.push('\n');
        text
    }

    /// Reads and checks JSON text; `origin` names it in errors.
    ///
    /// # Errors
    /// Text that is not JSON, unknown or missing keys, or anything [`Certificate::check`] refuses.
    pub fn from_json(text: &str, origin: &str) -> Result<Certificate> {
        let certificate: Certificate = serde_json::from_str(text).map_err(|cause| {
            Error::input(format!(
                "{origin}: not a certificate of format {CERTIFICATE}; compute it again with `loopladder series --certificate`"
            ))
            .because(cause)
        })?;
        certificate.check(origin)?;
        Ok(certificate)
    }

    /// Reads one certificate.
    ///
    /// # Errors
    /// The file cannot be read, or is not a valid certificate.
    pub fn read(path: &Path) -> Result<Certificate> {
        let text = std::fs::read_to_string(path).map_err(|cause| {
            Error::io(
                format!("cannot read the certificate {}; check the path and its permissions", path.display()),
                cause,
            )
        })?;
        Certificate::from_json(&text, &path.display().to_string())
    }

    /// The name of a family's certificate inside a results directory: `L08M03.certificate.json`.
    pub fn file_name(family: Family) -> String {
        format!("L{:02}M{:02}.certificate.json", family.length, family.magnons)
    }

    /// Checks everything that the keys alone do not: canonical numbers, shapes, orders, normalisation.
    ///
    /// # Errors
    /// An input error naming `origin`, the place, the rule and the remedy.
    pub fn check(&self, origin: &str) -> Result<()> {
        let refuse = |what: String| {
            Err(Error::input(format!(
                "{origin}: {what}; the certificate is damaged or was edited, so compute it again"
            )))
        };
        if self.certificate != CERTIFICATE {
            return refuse(format!("format {} is not {CERTIFICATE}", self.certificate));
        }
        Family::new(self.length, self.magnons).map_err(|error| error.within(format!("{origin}: not a family")))?;
        if self.loops > self.length {
            return refuse(format!("{} loops are more than the length {}", self.loops, self.length));
        }
        for (index, orbit) in self.orbits.iter().enumerate() {
            if self.orbits[..index].iter().any(|earlier| earlier.label == orbit.label) {
                return refuse(format!("orbit {} occurs twice", orbit.label));
            }
            if let Err(what) = self.check_orbit(orbit) {
                return refuse(format!("orbit {}: {what}", orbit.label));
            }
        }
        Ok(())
    }

    fn check_orbit(&self, orbit: &CertificateOrbit) -> std::result::Result<(), String> {
        let degree = orbit.field.len().saturating_sub(1);
        if degree == 0 || orbit.field.last().map(String::as_str) != Some("1") {
            return Err("the polynomial of the field is not monic of degree at least 1".into());
        }
        if let Some(bad) = orbit.field.iter().find(|c| !canonical_rational(c)) {
            return Err(format!("\"{bad}\" in the polynomial of the field is not a rational in lowest terms"));
        }
        check_element(&orbit.omega, degree)?;
        if orbit.pair.len() != self.loops {
            return Err(format!("{} orders for {} loops", orbit.pair.len(), self.loops));
        }
        for (index, order) in orbit.pair.iter().enumerate() {
            if order.order != index {
                return Err(format!("order {} where {index} belongs", order.order));
            }
            self.check_order(order, degree).map_err(|what| format!("order {index}: {what}"))?;
        }
        Ok(())
    }

    fn check_order(&self, order: &CertificateOrder, degree: usize) -> std::result::Result<(), String> {
        if order.order == 0 && (order.terms.len() != 1 || !order.terms[0].zeta.is_empty()) {
            return Err("the one-loop pair is exactly one term without zeta values".into());
        }
        for (index, term) in order.terms.iter().enumerate() {
            if !term.zeta.is_sorted() || term.zeta.iter().any(|k| k % 2 == 0 || *k < 3) {
                return Err(format!("{:?} is not an ascending list of odd numbers from 3 on", term.zeta));
            }
            if order.terms[..index].iter().any(|earlier| earlier.zeta == term.zeta) {
                return Err(format!("the zeta product {:?} occurs twice", term.zeta));
            }
            self.check_term(term, order.order == 0, degree)?;
        }
        Ok(())
    }

    /// Shapes, and the normalisation: both monic at h⁰, no v^M term in Q₂.
    fn check_term(&self, term: &CertificateTerm, first: bool, degree: usize) -> std::result::Result<(), String> {
        let (m, n) = (self.magnons, self.length - self.magnons + 1);
        if term.q1.len() != m + 1 || term.q2.len() != n + 1 {
            return Err(format!("{} and {} coefficients, not {} and {}", term.q1.len(), term.q2.len(), m + 1, n + 1));
        }
        for element in term.q1.iter().chain(&term.q2) {
            check_element(element, degree)?;
        }
        let is_constant =
            |element: &Element, constant: &str| element[0] == constant && element[1..].iter().all(|c| c == "0");
        let leading = if first { "1" } else { "0" };
        if !is_constant(&term.q1[m], leading) || !is_constant(&term.q2[n], leading) {
            return Err(format!("a leading coefficient is not {leading}"));
        }
        if !is_constant(&term.q2[m], "0") {
            return Err(format!("Q2 has a v^{m} term"));
        }
        Ok(())
    }
}

fn check_element(element: &Element, degree: usize) -> std::result::Result<(), String> {
    if element.len() != degree {
        return Err(format!("an element has {} entries at degree {degree}", element.len()));
    }
    match element.iter().find(|c| !canonical_rational(c)) {
        Some(bad) => Err(format!("\"{bad}\" is not a rational in lowest terms")),
        None => Ok(()),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// L = 4, M = 2 at one loop: Q₁ = v² + 1/12 (u² = 1/12, BDS), Q₂ = v³ − 3v/4 … from the Wronskian relation.
    fn sample() -> Certificate {
        let text = r#"{ "certificate": 1, "length": 4, "magnons": 2, "loops": 1, "orbits": [ {
            "label": "L4M2-1", "field": ["-12", "1"], "omega": ["12"], "pair": [ { "order": 0, "terms": [
            { "zeta": [], "q1": [["1/12"], ["0"], ["1"]], "q2": [["0"], ["1/2"], ["0"], ["1"]] } ] } ] } ] }"#;
        Certificate::from_json(text, "sample").unwrap()
    }

    #[test]
    fn a_certificate_survives_writing_and_reading() {
        let certificate = sample();
        assert_eq!(Certificate::from_json(&certificate.to_json(), "again").unwrap(), certificate);
    }

    #[test]
    fn damaged_certificates_are_refused_with_the_place() {
        type Damage = (&'static str, fn(&mut Certificate));
        let damages: [Damage; 8] = [
            ("format 2", |c| c.certificate = 2),
            ("more than the length", |c| c.loops = 5),
            ("orders for", |c| c.loops = 2),
            ("monic", |c| c.orbits[0].field[1] = "2".into()),
            ("lowest terms", |c| c.orbits[0].omega[0] = "24/2".into()),
            ("leading coefficient", |c| c.orbits[0].pair[0].terms[0].q1[2][0] = "2".into()),
            ("v^2 term", |c| c.orbits[0].pair[0].terms[0].q2[2][0] = "1".into()),
            ("without zeta", |c| c.orbits[0].pair[0].terms[0].zeta = vec![3]),
        ];
        for (what, damage) in damages {
            let mut certificate = sample();
            damage(&mut certificate);
            let message = certificate.check("sample").unwrap_err().to_string();
            assert!(message.contains(what) && message.contains("compute it again"), "{message}");
        }
        let mut text = sample().to_json();
        text = text.replacen("\"length\"", "\"extra\":1,\"length\"", 1);
        assert_eq!(Certificate::from_json(&text, "sample").unwrap_err().exit_code(), 2);
    }
}
