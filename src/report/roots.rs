//! The embeddings of an orbit: real roots of the minimal polynomial, enclosed as tightly as asked.
//!
//! A record lists ω of each state as a decimal. Each is turned into an enclosure by an exact change
//! of sign of the minimal polynomial around it; as many disjoint enclosures as the degree prove that
//! they hold one root each. So a damaged decimal cannot go unnoticed.

use super::interval::{Interval, parse_number};
use crate::error::{Error, Result};
use crate::record::Orbit;
use rug::Rational;

/// One real root of a polynomial with rational coefficients, enclosed.
#[derive(Clone, Debug)]
pub struct Root {
    lo: Rational,
    hi: Rational,
}

/// The minimal polynomial of an orbit, constant term first.
///
/// # Errors
/// A coefficient that is not a rational.
pub fn minimal_polynomial(orbit: &Orbit) -> Result<Vec<Rational>> {
    rationals(&orbit.minimal_polynomial, &orbit.label)
}

/// Canonical rationals as numbers.
///
/// # Errors
/// Text that is not a rational; `label` names its place.
pub fn rationals(texts: &[String], label: &str) -> Result<Vec<Rational>> {
    texts
        .iter()
        .map(|text| {
            text.parse::<Rational>().map_err(|cause| {
                Error::input(format!("orbit {label}: \"{text}\" is not a rational number; compute the record again"))
                    .because(cause)
            })
        })
        .collect()
}

/// The value of a polynomial at a rational.
pub fn evaluate(polynomial: &[Rational], at: &Rational) -> Rational {
    polynomial.iter().rev().fold(Rational::new(), |value, coefficient| value * at + coefficient)
}

/// The value of a polynomial on an interval (Horner), an enclosure.
pub fn evaluate_interval(polynomial: &[Rational], at: &Interval, bits: u32) -> Interval {
    polynomial.iter().rev().fold(Interval::zero(bits), |value, c| value.mul(at).add(&Interval::from_rational(c, bits)))
}

/// The roots of an orbit's minimal polynomial in the order of its states.
///
/// # Errors
/// A check error when a state's decimal is not next to a root, or two states share one.
pub fn roots(orbit: &Orbit) -> Result<Vec<Root>> {
    let polynomial = minimal_polynomial(orbit)?;
    let damaged = |state: &str| {
        Error::check(format!(
            "orbit {}: the state ω = {state} is not a root of the minimal polynomial to the digits given; compute the record again",
            orbit.label
        ))
    };
    let mut found: Vec<Root> = Vec::with_capacity(orbit.states.len());
    for state in &orbit.states {
        let (value, unit) = parse_number(&state.omega).ok_or_else(|| damaged(&state.omega))?;
        let root = if evaluate(&polynomial, &value).is_zero() {
            Root { lo: value.clone(), hi: value }
        } else {
            let root = Root { lo: value.clone() - &unit, hi: value + &unit };
            let signs = evaluate(&polynomial, &root.lo).cmp0() as i8 * evaluate(&polynomial, &root.hi).cmp0() as i8;
            if signs >= 0 {
                return Err(damaged(&state.omega));
            }
            root
        };
        if found.iter().any(|other| root.lo <= other.hi && other.lo <= root.hi) {
            return Err(damaged(&state.omega));
        }
        found.push(root);
    }
    Ok(found)
}

impl Root {
    /// An enclosure of relative width about 2^{−bits}: interval Newton steps, with exact bisection
    /// as long as the derivative's enclosure contains zero.
    pub fn enclose(&self, polynomial: &[Rational], bits: u32) -> Interval {
        let work = bits + 32;
        let derivative: Vec<Rational> =
            polynomial.iter().enumerate().skip(1).map(|(k, c)| c.clone() * k as u32).collect();
        let (mut lo, mut hi) = (self.lo.clone(), self.hi.clone());
        let mut slope = evaluate_interval(&derivative, &Interval::from_bounds(&lo, &hi, work), work);
        while slope.has_zero() && lo < hi {
            let middle = (lo.clone() + &hi) / 2;
            let sign = evaluate(polynomial, &middle).cmp0();
            if sign == std::cmp::Ordering::Equal {
                return Interval::from_rational(&middle, work);
            }
            if sign == evaluate(polynomial, &lo).cmp0() {
                lo = middle
            } else {
                hi = middle
            }
            slope = evaluate_interval(&derivative, &Interval::from_bounds(&lo, &hi, work), work);
        }
        let mut enclosure = Interval::from_bounds(&lo, &hi, work);
        loop {
            let middle = enclosure.middle();
            let Some(exact) = middle.to_rational() else { return enclosure };
            let point = Interval::from_rational(&exact, work);
            // The value at the exact middle, rounded only once.
            let value = Interval::from_rational(&evaluate(polynomial, &exact), work);
            let slope = evaluate_interval(&derivative, &enclosure, work);
            if slope.has_zero() {
                return enclosure;
            }
            let Some(next) = point.sub(&value.div(&slope)).meet(&enclosure) else { return enclosure };
            let (old, new) = (enclosure.width(), next.width());
            enclosure = next;
            if new.is_zero() || new > old / 2u32 {
                return enclosure;
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::{Root, evaluate};
    use rug::{Float, Rational};

    #[test]
    fn square_root_of_two() {
        let polynomial = [Rational::from(-2), Rational::new(), Rational::from(1)];
        let root = Root { lo: Rational::from((-1, 10)), hi: Rational::from(10) };
        let enclosure = root.enclose(&polynomial, 300);
        assert_eq!(enclosure.decimal(30).as_deref(), Some("1.41421356237309504880168872421"));
        assert!(enclosure.width() < Float::with_val(64, 1) >> 300);
        assert!(evaluate(&polynomial, &enclosure.lo().to_rational().unwrap()) <= 0);
        assert!(evaluate(&polynomial, &enclosure.hi().to_rational().unwrap()) >= 0);
    }
}
