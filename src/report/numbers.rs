//! The numbers behind an orbit's exact coefficients, every printed digit certain.
//!
//! A coefficient is a sum of (polynomial in ω) × (product of zeta values). It is evaluated on
//! enclosures of ω and of the zeta values; while the enclosure of the result does not round to one
//! decimal of the length asked, the precision is doubled. A value that is an exact rational is
//! rounded exactly, so that no tie can keep the loop going.

use super::coupling::Coupling;
use super::interval::{Interval, decimal_exponent, parse_number, round_decimal};
use super::roots::{Root, evaluate_interval, minimal_polynomial, rationals, roots};
use super::zeta::Constants;
use crate::error::{Error, Result};
use crate::record::{Coefficient, Orbit, Status, Term};
use rug::Rational;
use std::cell::RefCell;
use std::collections::HashMap;

/// The precision beyond which no further digits are tried.
const MOST_BITS: u32 = 1 << 20;

/// An orbit ready for evaluation.
pub struct Numbers<'a> {
    orbit: &'a Orbit,
    constants: &'a Constants,
    polynomial: Vec<Rational>,
    roots: Vec<Root>,
    enclosures: RefCell<HashMap<(usize, u32), Interval>>,
}

impl<'a> Numbers<'a> {
    /// Prepares an orbit.
    ///
    /// # Errors
    /// A check error when the states' decimals are not the roots of the minimal polynomial.
    pub fn new(orbit: &'a Orbit, constants: &'a Constants) -> Result<Numbers<'a>> {
        Ok(Numbers {
            orbit,
            constants,
            polynomial: minimal_polynomial(orbit)?,
            roots: roots(orbit)?,
            enclosures: RefCell::default(),
        })
    }

    /// The number of real embeddings.
    pub fn states(&self) -> usize {
        self.roots.len()
    }

    /// ω of a state (index from 0).
    pub fn omega(&self, state: usize, bits: u32) -> Interval {
        if let Some(known) = self.enclosures.borrow().get(&(state, bits)) {
            return known.clone();
        }
        let value = self.roots[state].enclose(&self.polynomial, bits);
        self.enclosures.borrow_mut().insert((state, bits), value.clone());
        value
    }

    /// The value of a sum of terms in a state.
    ///
    /// # Errors
    /// A value that is not a rational number.
    pub fn terms(&self, terms: &[Term], state: usize, bits: u32) -> Result<Interval> {
        let omega = self.omega(state, bits);
        let mut sum = Interval::zero(bits);
        for term in terms {
            let value = evaluate_interval(&rationals(&term.value, &self.orbit.label)?, &omega, bits);
            sum = sum.add(&value.mul(&self.constants.product(&term.zeta, bits)));
        }
        Ok(sum)
    }

    /// γ_n in a state; for a coefficient known by digits only, what those digits allow.
    ///
    /// # Errors
    /// As [`Numbers::terms`]; digits that are missing or unreadable.
    pub fn coefficient(&self, coefficient: &Coefficient, state: usize, bits: u32) -> Result<Interval> {
        if coefficient.status != Status::Numeric {
            return self.terms(&coefficient.terms, state, bits);
        }
        let (value, unit) = self.digits(coefficient, state)?;
        Ok(Interval::from_bounds(&(value.clone() - &unit), &(value + &unit), bits))
    }

    fn digits(&self, coefficient: &Coefficient, state: usize) -> Result<(Rational, Rational)> {
        coefficient.numbers.get(state).and_then(|text| parse_number(text)).ok_or_else(|| {
            Error::input(format!(
                "orbit {}, loop {}: no readable number for state {}; compute the record again",
                self.orbit.label,
                coefficient.order,
                state + 1
            ))
        })
    }

    /// The coefficient of loop `coefficient.order` in the given coupling, to `digits` significant
    /// digits (a number known to fewer is given with those).
    ///
    /// # Errors
    /// As [`Numbers::coefficient`]; a bound error when no precision settles the digits.
    pub fn decimal(
        &self,
        coefficient: &Coefficient,
        state: usize,
        digits: usize,
        coupling: Coupling,
    ) -> Result<String> {
        if coefficient.status != Status::Numeric {
            return self.terms_decimal(&coefficient.terms, coefficient.order, state, digits, coupling);
        }
        let (value, unit) = self.digits(coefficient, state)?;
        let known = (decimal_exponent(&value) - decimal_exponent(&unit)).max(0) as usize;
        let bits = bits_for(digits.max(known));
        let number = self.coefficient(coefficient, state, bits)?.mul(&coupling.scale(coefficient.order, bits));
        (1..=digits.min(known + 1)).rev().find_map(|digits| number.decimal(digits)).ok_or_else(|| {
            Error::check(format!(
                "orbit {}, loop {}: not one digit of the number of state {} is certain; compute the record with more digits",
                self.orbit.label,
                coefficient.order,
                state + 1
            ))
        })
    }

    /// A sum of terms at loop `order` in the given coupling, to `digits` significant digits
    /// (an integer as it is).
    ///
    /// # Errors
    /// As [`Numbers::decimal`].
    pub fn terms_decimal(
        &self,
        terms: &[Term],
        order: usize,
        state: usize,
        digits: usize,
        coupling: Coupling,
    ) -> Result<String> {
        if coupling != Coupling::Lambda
            && let Some(exact) = self.rational(terms)?
        {
            let exact = exact * coupling.factor(order);
            if exact.is_integer() {
                return Ok(exact.to_string());
            }
            return Ok(round_decimal(&exact, digits as i64 - 1 - decimal_exponent(&exact)));
        }
        let mut bits = bits_for(digits);
        while bits <= MOST_BITS {
            let number = self.terms(terms, state, bits)?.mul(&coupling.scale(order, bits));
            if let Some(text) = number.decimal(digits) {
                return Ok(text);
            }
            bits *= 2;
        }
        Err(Error::bound(format!(
            "orbit {}, loop {order}: {digits} digits of the number of state {} are not settled at {MOST_BITS} bits; ask for fewer digits",
            self.orbit.label,
            state + 1
        )))
    }

    /// ω of a state to `digits` significant digits.
    ///
    /// # Errors
    /// As [`Numbers::decimal`].
    pub fn omega_decimal(&self, state: usize, digits: usize) -> Result<String> {
        let mut value = vec!["0".to_string(); self.polynomial.len() - 1];
        if value.len() == 1 {
            let exact = -self.polynomial[0].clone();
            if exact.is_integer() {
                return Ok(exact.to_string());
            }
            return Ok(round_decimal(&exact, digits as i64 - 1 - decimal_exponent(&exact)));
        }
        value[1] = "1".to_string();
        self.terms_decimal(&[Term { zeta: Vec::new(), value }], 1, state, digits, Coupling::Over16PiSquared)
    }

    /// The value as an exact rational, when it is one in every embedding: no zeta value with a
    /// coefficient other than 0 and no power of ω (1, ω, …, ω^{d−1} are independent over Q).
    fn rational(&self, terms: &[Term]) -> Result<Option<Rational>> {
        let mut sum = Rational::new();
        for term in terms {
            let value = rationals(&term.value, &self.orbit.label)?;
            if value.iter().skip(1).any(|v| !v.is_zero()) {
                return Ok(None);
            }
            let Some(first) = value.first().filter(|v| !v.is_zero()) else { continue };
            if !term.zeta.is_empty() {
                return Ok(None);
            }
            sum += first;
        }
        Ok(Some(sum))
    }
}

fn bits_for(digits: usize) -> u32 {
    (digits as f64 * std::f64::consts::LOG2_10) as u32 + 64
}

#[cfg(test)]
mod tests {
    use super::super::coupling::Coupling;
    use super::super::testing;
    use super::super::zeta::Constants;
    use super::Numbers;
    use crate::record::Record;

    fn numbers(record: &Record, loops: usize, digits: usize, coupling: Coupling) -> Vec<Vec<String>> {
        let constants = Constants::default();
        let orbit = &record.orbits[0];
        let numbers = Numbers::new(orbit, &constants).unwrap();
        let of = |state| {
            (1..=loops)
                .map(|n| numbers.decimal(orbit.coefficient(n).unwrap(), state, digits, coupling).unwrap())
                .collect()
        };
        (0..numbers.states()).map(of).collect()
    }

    /// Beccaria, Ortix, JHEP 09 (2006) 016, eqs. 4.26–4.28, in the coupling lambda/8pi^2 (the ζ-free
    /// part, so through three loops the whole).
    #[test]
    fn cubic_orbit_against_published_numbers() {
        let computed = numbers(&testing::cubic(), 3, 6, Coupling::Over8PiSquared);
        let published =
            [["3.24559", "-1.88899", "1.2772"], ["5.45222", "-7.94042", "31.2193"], ["11.3022", "-22.1706", "79.5035"]];
        for (computed, published) in computed.iter().zip(published) {
            for (computed, published) in computed.iter().zip(published) {
                let error = computed.parse::<f64>().unwrap() - published.parse::<f64>().unwrap();
                let places = published.split_once('.').map_or(0, |(_, fraction)| fraction.len());
                assert!(error.abs() <= 0.6 * 10f64.powi(-(places as i32)), "{computed} is not {published}");
            }
        }
    }

    /// −2496 + 576ζ3 − 1440ζ5, from ζ3 = 1.2020569031595942854…, ζ5 = 1.0369277551433699263…:
    /// −3296.79118918677…; and 10 further digits do not change the first ones.
    #[test]
    fn digits_do_not_depend_on_how_many_are_asked_for() {
        let short = numbers(&testing::konishi(), 4, 15, Coupling::Over16PiSquared)[0][3].clone();
        let long = numbers(&testing::konishi(), 4, 60, Coupling::Over16PiSquared)[0][3].clone();
        let by_hand = -2496.0 + 576.0 * 1.202_056_903_159_594_3 - 1440.0 * 1.036_927_755_143_369_9;
        assert!((short.parse::<f64>().unwrap() - by_hand).abs() < 1e-11, "{short} {by_hand}");
        assert_eq!(long[..14], short[..14]);
        assert_eq!(long.len(), 62);
    }

    #[test]
    fn a_damaged_decimal_is_refused() {
        let mut record = testing::cubic();
        record.orbits[0].states[1].omega = "10.95".to_string();
        let constants = Constants::default();
        let error = Numbers::new(&record.orbits[0], &constants).err().unwrap();
        assert!(error.to_string().contains("not a root"), "{error}");
    }
}
