//! The real embeddings of an orbit as decimals, every digit certain.

use crate::algebra::flint::{self, Enclosure};
use crate::algebra::number_field::NumberField;
use crate::algebra::ring::Ring;
use crate::chain::Orbit;
use crate::error::{Error, Result};
use crate::record::State;
use rug::{Integer, Rational};

/// Decimal places printed.
const PLACES: u32 = 20;

/// One state for each real embedding of ω, sorted by one-loop anomalous dimension.
///
/// # Errors
/// A root that is not real, or a decimal that stays undecided at very high precision.
pub fn states(orbit: &Orbit) -> Result<Vec<State>> {
    let energy = one_loop_in_omega(orbit)?;
    let mut bits = 128;
    while bits <= 1 << 16 {
        let roots = flint::real_roots(&orbit.minimal, bits)?;
        let found: Option<Vec<(Rational, State)>> = roots
            .iter()
            .map(|root| {
                let value = evaluate(&energy, root);
                let omega = if orbit.degree() == 1 {
                    Integer::from(-&orbit.minimal[0]).to_string()
                } else {
                    decimal(root, PLACES)?
                };
                Some((value.low.clone(), State { omega, one_loop: decimal(&value, PLACES)? }))
            })
            .collect();
        if let Some(mut found) = found {
            found.sort_by(|a, b| a.0.cmp(&b.0));
            return Ok(found.into_iter().map(|(_, state)| state).collect());
        }
        bits *= 2;
    }
    Err(Error::bound(format!(
        "orbit {}: the decimals of its states are undecided at {bits} bits; please report this family",
        orbit.label
    )))
}

/// γ₁ as a polynomial in ω.
fn one_loop_in_omega(orbit: &Orbit) -> Result<Vec<Rational>> {
    let rational = |p: &[Integer]| p.iter().map(Rational::from).collect::<Vec<_>>();
    let field = NumberField::new(rational(&orbit.field));
    let image = orbit.image(&field, |p| field.element(&rational(p)))?;
    if orbit.generator == crate::chain::orbit::Generator::Gamma1 {
        return Ok(vec![Rational::new(), Rational::from(1)]);
    }
    // γ₁ = Σ c_i ω^i: a linear system over Q in powers of x.
    let degree = orbit.degree();
    let mut power = field.one();
    let mut columns = Vec::new();
    for _ in 0..degree {
        columns.push(field.coefficients(&power));
        power = field.mul(&power, &image.omega);
    }
    let right = field.coefficients(&image.gamma_1);
    let rows: Vec<Vec<Rational>> =
        (0..right.len()).map(|i| columns.iter().map(|column| column[i].clone()).collect()).collect();
    match crate::algebra::linear::solve(&crate::algebra::rationals::Rationals, &rows, &right) {
        crate::algebra::linear::Solution::Unique(x) => Ok(x),
        _ => Err(Error::check(format!("orbit {}: gamma_1 is not in the field of the generator", orbit.label))),
    }
}

/// Interval evaluation by Horner's scheme.
pub fn evaluate(polynomial: &[Rational], point: &Enclosure) -> Enclosure {
    let mut value = Enclosure { low: Rational::new(), high: Rational::new() };
    for c in polynomial.iter().rev() {
        let corners = [
            Rational::from(&value.low * &point.low),
            Rational::from(&value.low * &point.high),
            Rational::from(&value.high * &point.low),
            Rational::from(&value.high * &point.high),
        ];
        let (mut low, mut high) = (corners[0].clone(), corners[0].clone());
        for corner in &corners[1..] {
            if *corner < low {
                low = corner.clone();
            }
            if *corner > high {
                high = corner.clone();
            }
        }
        value = Enclosure { low: low + c, high: high + c };
    }
    value
}

/// The decimal with `places` digits after the point to which every number of the interval rounds (half away
/// from zero), or `None` when they differ.
pub fn decimal(value: &Enclosure, places: u32) -> Option<String> {
    let scale = Integer::from(Integer::u_pow_u(10, places));
    let rounded = |x: &Rational| Rational::from(x * &scale).round().into_numer_denom().0;
    let (low, high) = (rounded(&value.low), rounded(&value.high));
    if low != high {
        return None;
    }
    let sign = if low < 0 { "-" } else { "" };
    let digits = format!("{:0>width$}", low.abs().to_string(), width = places as usize + 1);
    let (whole, fraction) = digits.split_at(digits.len() - places as usize);
    Some(format!("{sign}{whole}.{fraction}"))
}
