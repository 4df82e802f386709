//! What a record must satisfy beyond having the right keys.

use super::{COUPLING, Coefficient, Orbit, Parity, Record, SCHEMA, Status, Term, Zeta};
use crate::error::{Error, Result};
use num_bigint::BigInt;
use num_integer::Integer as _;
use num_traits::{One, Signed, Zero};

/// Whether `text` is a rational in lowest terms, written the one way records write it:
/// no "+", no leading zeros, no denominator 1, zero as "0".
pub fn canonical_rational(text: &str) -> bool {
    let canonical_integer = |digits: &str, signed: bool| {
        let body = if signed { digits.strip_prefix('-').unwrap_or(digits) } else { digits };
        !body.is_empty()
            && body.bytes().all(|b| b.is_ascii_digit())
            && (body == "0" || !body.starts_with('0'))
            && digits != "-0"
    };
    match text.split_once('/') {
        None => canonical_integer(text, true),
        Some((numerator, denominator)) => {
            if !canonical_integer(numerator, true) || !canonical_integer(denominator, false) {
                return false;
            }
            let (Ok(n), Ok(d)) = (numerator.parse::<BigInt>(), denominator.parse::<BigInt>()) else { return false };
            !n.is_zero() && d > BigInt::one() && n.abs().gcd(&d).is_one()
        }
    }
}

impl Record {
    /// Checks everything that the keys alone do not: canonical numbers, shapes, order, counts.
    ///
    /// # Errors
    /// An input error naming `origin`, the place, the rule and the remedy.
    pub fn check(&self, origin: &str) -> Result<()> {
        let refuse = |what: String| {
            Err(Error::input(format!("{origin}: {what}; the record is damaged or was edited, so compute it again")))
        };
        if self.schema == 0 || self.schema > SCHEMA {
            return refuse(format!("schema {} is not among 1 to {SCHEMA}", self.schema));
        }
        if self.coupling != COUPLING {
            return refuse(format!("the coupling is \"{}\" and must be \"{COUPLING}\"", self.coupling));
        }
        let family = crate::family::Family::new(self.length, self.magnons)
            .map_err(|error| error.within(format!("{origin}: not a family")))?;
        if family.primaries() != self.primaries {
            return refuse(format!(
                "{} primaries, and the necklace formula gives {}",
                self.primaries,
                family.primaries()
            ));
        }
        let members = self.orbits.iter().fold(0usize, |sum, orbit| sum.saturating_add(orbit.members));
        if self.whole() && members != self.primaries {
            return refuse(format!("the members of the orbits add up to {members}, not to {}", self.primaries));
        }
        if members > self.primaries {
            return refuse(format!("the members of the orbits add up to {members}, more than {}", self.primaries));
        }
        for (index, orbit) in self.orbits.iter().enumerate() {
            let prefix = format!("L{}M{}-", self.length, self.magnons);
            let number = orbit.label.strip_prefix(&prefix).and_then(|n| n.parse::<usize>().ok());
            if number.is_none_or(|n| n <= index) {
                return refuse(format!("orbit {} is labelled \"{}\"", index + 1, orbit.label));
            }
            if let Err(what) = check_orbit(orbit, self.loops, self.schema) {
                return refuse(format!("orbit {}: {what}", orbit.label));
            }
        }
        Ok(())
    }

    /// Whether all orbits are present (a record restricted to one orbit keeps that orbit's own label).
    fn whole(&self) -> bool {
        let prefix = format!("L{}M{}-", self.length, self.magnons);
        self.orbits.is_empty()
            || self.orbits.len() > 1
            || self.orbits[0].members == self.primaries
            || self.orbits.iter().any(|orbit| !orbit.label.starts_with(&prefix))
    }
}

fn check_orbit(orbit: &Orbit, loops: usize, schema: u32) -> std::result::Result<(), String> {
    let degree = orbit.degree();
    if degree == 0 || orbit.minimal_polynomial.last().map(String::as_str) != Some("1") {
        return Err("the minimal polynomial is not monic of degree at least 1".into());
    }
    if let Some(bad) = orbit.minimal_polynomial.iter().find(|c| !canonical_rational(c)) {
        return Err(format!("\"{bad}\" in the minimal polynomial is not a rational in lowest terms"));
    }
    let multiple = if orbit.parity == Parity::Paired { 2 } else { 1 };
    if orbit.members != degree * multiple {
        return Err(format!("{} members at degree {degree} and parity {:?}", orbit.members, orbit.parity));
    }
    if orbit.states.len() != degree {
        return Err(format!("{} states at degree {degree}", orbit.states.len()));
    }
    for state in &orbit.states {
        if ![&state.omega, &state.one_loop].into_iter().all(|text| is_number(text)) {
            return Err(format!("state \"{}\", \"{}\" is not a pair of numbers", state.omega, state.one_loop));
        }
    }
    let mut last = 0;
    for coefficient in &orbit.coefficients {
        if coefficient.order <= last || coefficient.order > loops {
            return Err(format!("loop {} is out of order or above {loops}", coefficient.order));
        }
        last = coefficient.order;
        check_coefficient(coefficient, degree, schema).map_err(|what| format!("loop {}: {what}", coefficient.order))?;
    }
    Ok(())
}

fn check_coefficient(coefficient: &Coefficient, degree: usize, schema: u32) -> std::result::Result<(), String> {
    let late = matches!(coefficient.status, Status::Recognised | Status::Numeric);
    if late && schema < 2 {
        return Err(format!("status {:?} needs schema 2", coefficient.status));
    }
    if (coefficient.status == Status::Recognised) != coefficient.spare_digits.is_some() {
        return Err("spare_digits belongs to status recognised, and only there".into());
    }
    let numeric = coefficient.status == Status::Numeric;
    if numeric != coefficient.terms.is_empty() || numeric == coefficient.numbers.is_empty() {
        return Err("a numeric coefficient has numbers and no terms, every other one terms and no numbers".into());
    }
    if numeric && (coefficient.numbers.len() != degree || coefficient.numbers.iter().any(|n| !is_number(n))) {
        return Err("numbers are not one decimal for each state".into());
    }
    check_terms(&coefficient.terms, degree, schema)?;
    if let Some(parts) = &coefficient.parts {
        check_terms(&parts.asymptotic, degree, schema)?;
        check_terms(&parts.finite_size, degree, schema)?;
    }
    Ok(())
}

fn check_terms(terms: &[Term], degree: usize, schema: u32) -> std::result::Result<(), String> {
    for (index, term) in terms.iter().enumerate() {
        if term.value.len() != degree {
            return Err(format!("a value has {} entries at degree {degree}", term.value.len()));
        }
        if let Some(bad) = term.value.iter().find(|v| !canonical_rational(v)) {
            return Err(format!("\"{bad}\" is not a rational in lowest terms"));
        }
        if !term.zeta.is_sorted() {
            return Err("the zeta arguments are not ascending".into());
        }
        for zeta in &term.zeta {
            let fine = match zeta {
                Zeta::Single(k) => k % 2 == 1 && *k >= 3,
                Zeta::Multiple(arguments) => {
                    schema >= 2 && arguments.len() >= 2 && arguments[0] >= 2 && !arguments.contains(&0)
                }
            };
            // A product with an even single zeta (ζ5 ζ8 beside a multiple zeta value) exists from double wrapping on.
            let even = schema >= 2 && matches!(zeta, Zeta::Single(k) if *k >= 2);
            if !fine && !even {
                return Err(format!("{zeta:?} is not an argument of a zeta value"));
            }
        }
        if terms[..index].iter().any(|earlier| earlier.zeta == term.zeta) {
            return Err("two terms have the same zeta product".into());
        }
    }
    Ok(())
}

/// A rational in lowest terms or a plain decimal such as -12.50.
fn is_number(text: &str) -> bool {
    let decimal = |text: &str| {
        let body = text.strip_prefix('-').unwrap_or(text);
        body.split_once('.').is_some_and(|(whole, fraction)| {
            !whole.is_empty()
                && !fraction.is_empty()
                && whole.bytes().chain(fraction.bytes()).all(|b| b.is_ascii_digit())
        })
    };
    canonical_rational(text) || decimal(text)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn rationals_have_one_spelling() {
        for good in ["0", "-9/2", "12", "1/3"] {
            assert!(canonical_rational(good), "{good}");
        }
        for bad in ["", "-", "-0", "+1", "01", "2/4", "3/1", "0/5", "1/-2", "1/0", "1.5", "1/02"] {
            assert!(!canonical_rational(bad), "{bad}");
        }
    }
}
