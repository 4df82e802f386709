//! An orbit of a record, rewritten in a paper's coupling, and the choice of the state an entry means.

use super::expression::Expression;
use super::numeric::{self, Decimal};
use super::reference::{Entry, Part};
use super::value::{self, Element, Field, Value};
use crate::record::{Coefficient, Orbit, Record, Status, Term};
use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::{One, Signed, Zero};
use rug::Rational;

/// The largest degree of a minimal polynomial accepted in a selector.
const DEGREE: usize = 128;

/// An orbit in the coupling x = c g²: γ_n → γ_n/cⁿ, and ω → ω/c when ω is γ₁.
pub struct Scaled<'a> {
    orbit: &'a Orbit,
    coupling: BigRational,
    /// Scale of ω: c, or 1 when ω is another charge.
    omega_scale: BigRational,
    minimal: Vec<BigRational>,
}

/// What an orbit knows about one coefficient.
pub enum Known {
    /// Exact.
    Exact(Value),
    /// Only decimals, one for each state: (value, unit of the last digit).
    Numbers(Vec<(BigRational, BigRational)>),
}

impl<'a> Scaled<'a> {
    /// The orbit in the coupling with constant c.
    ///
    /// # Errors
    /// A minimal polynomial that is not one (a checked record has none such).
    pub fn new(orbit: &'a Orbit, coupling: &BigRational) -> Result<Scaled<'a>, String> {
        let omega_scale = if orbit.generator == "gamma_1" { coupling.clone() } else { BigRational::one() };
        let degree = orbit.degree();
        let bad = || format!("{}: the minimal polynomial of the record is damaged", orbit.label);
        let mut minimal = Vec::new();
        for (index, text) in orbit.minimal_polynomial.iter().enumerate() {
            let coefficient: BigRational = text.parse().map_err(|_| bad())?;
            minimal.push(coefficient / omega_scale.pow((degree - index) as i32));
        }
        if degree == 0 || !minimal[degree].is_one() {
            return Err(bad());
        }
        Ok(Scaled { orbit, coupling: coupling.clone(), omega_scale, minimal })
    }

    /// The record's orbit.
    pub fn orbit(&self) -> &Orbit {
        self.orbit
    }

    /// The field, at a state (for the signs of square roots) if one is chosen.
    pub fn field(&self, state: Option<usize>) -> Field {
        Field { minimal: self.minimal.clone(), larger: state.map(|state| self.is_larger(state)) }
    }

    /// Whether ω at this state is the largest of the orbit.
    fn is_larger(&self, state: usize) -> bool {
        let omegas: Vec<Option<BigRational>> =
            self.orbit.states.iter().map(|s| decimal(&s.omega).map(|(v, _)| v)).collect();
        omegas.iter().all(|other| *other <= omegas[state])
    }

    /// ω at a state to the given number of bits.
    ///
    /// # Errors
    /// The record's decimals do not lead to a root.
    pub fn omega(&self, state: usize, bits: u32) -> Result<Decimal, String> {
        if self.orbit.degree() == 1 {
            let value = rug::Float::with_val(bits + 64, numeric::rational(&-self.minimal[0].clone()));
            let error = rug::Float::with_val(bits, value.abs_ref()) >> bits;
            return Ok(Decimal { value, error });
        }
        let text = &self.orbit.states.get(state).ok_or("the record has no such state")?.omega;
        let (start, _) = decimal(text).ok_or("the record's decimals of omega cannot be read")?;
        let start: Rational = numeric::rational(&(start / &self.omega_scale));
        numeric::root(&self.minimal, &start, bits)
    }

    /// Record terms in this coupling, at order n.
    fn convert(&self, terms: &[Term], order: usize) -> Result<Value, String> {
        let factor = self.coupling.pow(-(order as i32));
        let mut converted = Value::new();
        for (zeta, element) in value::from_terms(terms)? {
            let element: Element =
                element.iter().enumerate().map(|(i, c)| c * &factor * self.omega_scale.pow(i as i32)).collect();
            converted.insert(zeta, element);
        }
        Ok(converted)
    }

    /// γ₁.
    pub fn one_loop(&self) -> Option<Element> {
        if let Some(coefficient) = self.orbit.coefficient(1)
            && !coefficient.terms.is_empty()
        {
            let mut value = self.convert(&coefficient.terms, 1).ok()?;
            return Some(value.remove(&Vec::new()).unwrap_or_else(|| vec![BigRational::zero(); self.orbit.degree()]));
        }
        (self.orbit.generator == "gamma_1").then(|| self.field(None).omega())
    }

    /// The asked part of γ_n.
    ///
    /// # Errors
    /// The reason why the record does not have it.
    pub fn known(&self, order: usize, part: Part, length: usize) -> Result<Known, String> {
        let coefficient = self
            .orbit
            .coefficient(order)
            .ok_or_else(|| format!("{} has no coefficient at loop {order}", self.orbit.label))?;
        let complete = || {
            if coefficient.status == Status::Asymptotic {
                return Err(format!("the record has only the asymptotic part at loop {order}; compute it complete"));
            }
            if coefficient.status == Status::Numeric {
                self.numbers(coefficient)
            } else {
                Ok(Known::Exact(self.convert(&coefficient.terms, order)?))
            }
        };
        let asymptotic = || match (&coefficient.parts, coefficient.status) {
            (Some(parts), _) => Ok(Known::Exact(self.convert(&parts.asymptotic, order)?)),
            (None, Status::Asymptotic) => Ok(Known::Exact(self.convert(&coefficient.terms, order)?)),
            (None, _) if order < length => complete(),
            (None, _) => Err(format!("the record does not split loop {order} into its parts")),
        };
        let free = |known: Known| match known {
            Known::Exact(value) => Ok(Known::Exact(value::zeta_free(&value))),
            Known::Numbers(_) => Err(format!("the record has only decimals at loop {order}, and no terms to separate")),
        };
        match part {
            Part::Complete => complete(),
            Part::ZetaFree => free(complete()?),
            Part::Asymptotic => asymptotic(),
            Part::AsymptoticZetaFree => free(asymptotic()?),
            Part::FiniteSize => match &coefficient.parts {
                Some(parts) => Ok(Known::Exact(self.convert(&parts.finite_size, order)?)),
                None if order < length => Ok(Known::Exact(Value::new())),
                None => Err(format!("the record does not give the finite-size part at loop {order}")),
            },
        }
    }

    fn numbers(&self, coefficient: &Coefficient) -> Result<Known, String> {
        let factor = self.coupling.pow(-(coefficient.order as i32));
        let numbers: Option<Vec<_>> = coefficient
            .numbers
            .iter()
            .map(|text| decimal(text).map(|(v, unit)| (v * &factor, unit * &factor)))
            .collect();
        numbers.map(Known::Numbers).ok_or_else(|| "a decimal of the record cannot be read".to_string())
    }
}

/// A decimal or rational of a record: (value, unit of its last digit; zero when exact).
fn decimal(text: &str) -> Option<(BigRational, BigRational)> {
    if let Some((whole, fraction)) = text.split_once('.') {
        let digits: BigInt = format!("{whole}{fraction}").parse().ok()?;
        let unit = BigRational::new(BigInt::one(), BigInt::from(10).pow(u32::try_from(fraction.len()).ok()?));
        return Some((BigRational::from(digits) * &unit, unit));
    }
    let value = match text.split_once('/') {
        Some((n, d)) => {
            let d: BigInt = d.parse().ok().filter(|d: &BigInt| !d.is_zero())?;
            BigRational::new(n.parse().ok()?, d)
        }
        None => BigRational::from(text.parse::<BigInt>().ok()?),
    };
    Some((value, BigRational::zero()))
}

/// A choice: orbit (position among the scaled ones) and the state within it, if the entry says which.
pub type Choice = (usize, Option<usize>);

/// The orbits of the record in the entry's coupling, and which of their states the entry means.
///
/// # Errors
/// A selector that cannot be evaluated, in words.
pub fn select<'a>(record: &'a Record, entry: &Entry) -> Result<(Vec<Scaled<'a>>, Vec<Choice>), String> {
    let orbits =
        record.orbits.iter().map(|orbit| Scaled::new(orbit, &entry.coupling)).collect::<Result<Vec<_>, _>>()?;
    let polynomial = entry.minimal_polynomial.as_ref().map(monic).transpose()?;
    let mut choices = Vec::new();
    for (index, orbit) in orbits.iter().enumerate() {
        if entry.label.as_ref().is_some_and(|label| *label != orbit.orbit.label)
            || polynomial.as_ref().is_some_and(|polynomial| *polynomial != orbit.minimal)
        {
            continue;
        }
        match &entry.one_loop {
            None => choices.push((index, (orbit.orbit.degree() == 1).then_some(0))),
            Some(wanted) => {
                for state in 0..orbit.orbit.degree() {
                    if has_one_loop(orbit, state, wanted)? {
                        choices.push((index, Some(state)));
                    }
                }
            }
        }
    }
    Ok((orbits, choices))
}

/// The coefficients of a polynomial in ω, divided by the leading one.
fn monic(source: &Expression) -> Result<Vec<BigRational>, String> {
    // Modulo w^DEGREE: plain polynomial arithmetic below that degree.
    let mut modulus = vec![BigRational::zero(); DEGREE];
    modulus.push(BigRational::one());
    let mut value = value::evaluate(source, &Field { minimal: modulus, larger: None })?;
    let mut polynomial = value.remove(&Vec::new()).ok_or("the minimal polynomial is zero")?;
    while polynomial.last().is_some_and(BigRational::is_zero) {
        polynomial.pop();
    }
    if !value.is_empty() || polynomial.len() < 2 {
        return Err("the minimal polynomial is not a polynomial in w".into());
    }
    let top = polynomial[polynomial.len() - 1].clone();
    Ok(polynomial.into_iter().map(|c| c / &top).collect())
}

/// Whether γ₁ at this state is the wanted one: exactly, or to the printed digits.
fn has_one_loop(orbit: &Scaled<'_>, state: usize, wanted: &Expression) -> Result<bool, String> {
    let Some(found) = orbit.one_loop() else { return Ok(false) };
    let mut exact = Value::new();
    if found.iter().any(|c| !c.is_zero()) {
        exact.insert(Vec::new(), found);
    }
    if let Some((printed, unit)) = single_decimal(wanted) {
        let omega = orbit.omega(state, 256)?;
        let found = numeric::evaluate(&exact, &omega, 256)?;
        let printed = numeric::rational(&printed);
        let distance = (found.value - printed).abs();
        return Ok(distance <= numeric::rational(&unit));
    }
    match value::evaluate(wanted, &orbit.field(Some(state))) {
        Ok(wanted) => Ok(wanted == exact),
        // A square root outside this orbit's field: another orbit is meant.
        Err(_) if wanted.has_roots() => Ok(false),
        Err(what) => Err(format!("one_loop: {what}")),
    }
}

/// A printed decimal standing alone: (value, unit of the last digit).
pub fn single_decimal(source: &Expression) -> Option<(BigRational, BigRational)> {
    match source {
        Expression::Number { value, places: Some(places) } => {
            let ten = BigRational::from(BigInt::from(10));
            Some((value.clone(), ten.pow(-*places)))
        }
        Expression::Minus(inner) => single_decimal(inner).map(|(value, unit)| (-value, unit)),
        _ => None,
    }
}

/// If some state has a γ₁ that is 2^k times the wanted one, that k (only for exact or single-decimal selectors).
pub fn misread_coupling(orbits: &[Scaled<'_>], wanted: &Expression) -> Option<i32> {
    let (value, unit) = match single_decimal(wanted) {
        Some(pair) => pair,
        None => match wanted {
            Expression::Number { value, .. } => (value.clone(), BigRational::zero()),
            _ => return None,
        },
    };
    for k in [1, -1, 2, -2, 3, -3, 4, -4] {
        let factor = BigRational::from(BigInt::from(2)).pow(k);
        for orbit in orbits {
            let Some(one_loop) = orbit.one_loop() else { continue };
            let exact = Value::from([(Vec::new(), one_loop)]);
            for state in 0..orbit.orbit.degree() {
                let Ok(omega) = orbit.omega(state, 128) else { continue };
                let Ok(found) = numeric::evaluate(&exact, &omega, 128) else { continue };
                let target = numeric::rational(&(&value * &factor));
                let tolerance = numeric::rational(&(&unit * &factor).abs()).to_f64().max(1e-25);
                if (found.value - target).abs().to_f64() <= tolerance {
                    return Some(k);
                }
            }
        }
    }
    None
}
