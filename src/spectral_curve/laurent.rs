//! The functions P_a order by order: P_a = s^{−L'/2} p_a, p_a = Σ a_{a,j} v^j + Σ c_{a,k} (G/s)^k.

use super::frame::{Frame, partner, raising_is_negative};
use crate::algebra::flint::dense::{Real, Scalar};
use rug::{Integer, Rational};

/// A Laurent polynomial Σ_e c_e v^{top − e·step}.
#[derive(Clone)]
pub struct Laurent<S> {
    /// The highest exponent.
    pub top: i64,
    /// The distance between exponents.
    pub step: i64,
    /// The coefficients, from the highest exponent down.
    pub coefficients: Vec<S>,
}

impl<S: Scalar> Laurent<S> {
    /// Zero, with room for the exponents top … low.
    fn zero(top: i64, low: i64, step: i64) -> Laurent<S> {
        let len = if low > top { 0 } else { ((top - low) / step + 1) as usize };
        Laurent { top, step, coefficients: S::zeros(len) }
    }

    /// Adds to the coefficient of v^exponent, which must have room.
    fn add(&mut self, exponent: i64, value: &S, bits: i64) {
        let index = ((self.top - exponent) / self.step) as usize;
        self.coefficients[index].add(value, bits);
    }

    /// Whether every coefficient is zero.
    pub fn is_zero(&self) -> bool {
        self.coefficients.iter().all(Scalar::is_zero)
    }

    /// The first `len` Taylor coefficients at v = j, j ≥ 1; cost (terms · len) word-size operations.
    pub fn taylor(&self, j: usize, len: usize, bits: i64) -> Vec<S> {
        let mut series = S::zeros(len);
        for (index, c) in self.coefficients.iter().enumerate().rev() {
            series[0].add(c, bits);
            if index > 0 {
                for _ in 0..self.step {
                    divide_by_variable(&mut series, j, bits);
                }
            }
        }
        for _ in 0..self.top.max(0) {
            multiply_by_variable(&mut series, j, bits);
        }
        for _ in 0..(-self.top).max(0) {
            divide_by_variable(&mut series, j, bits);
        }
        series
    }
}

/// Divides a power series in x by j + x.
pub fn divide_by_variable<S: Scalar>(series: &mut [S], j: usize, bits: i64) {
    for t in 0..series.len() {
        let (done, rest) = series.split_at_mut(t);
        if let Some(before) = done.last() {
            rest[0].sub(before, bits);
        }
        rest[0].div_small(j as i64, bits);
    }
}

/// Multiplies a power series in x by j + x.
pub fn multiply_by_variable<S: Scalar>(series: &mut [S], j: usize, bits: i64) {
    for t in (0..series.len()).rev() {
        let (low, high) = series.split_at_mut(t);
        high[0].mul_small(j as i64, bits);
        if let Some(before) = low.last() {
            high[0].add(before, bits);
        }
    }
}

/// The coefficient of t^j in C(t)^{−p}, where s = v C(G/v²): (−1)^j p/(p+j) binom(p+2j−1, j) for p ≥ 1.
pub fn power_of_s(p: usize, j: usize) -> Integer {
    if j == 0 {
        return Integer::from(1);
    }
    if p == 0 {
        return Integer::new();
    }
    let choices = Integer::from(Integer::binomial_u((p + 2 * j - 1) as u32, j as u32));
    let value = choices * p as u32 / (p + j) as u32;
    if j.is_multiple_of(2) { value } else { -value }
}

/// All coefficients of the four functions, order by order.
pub struct Functions<S> {
    /// polynomial[a][order][j] = coefficient of v^j.
    pub polynomial: [Vec<Vec<S>>; 4],
    /// pole[a][order][k] = coefficient of (G/s)^k (k = 0 unused).
    pub pole: [Vec<Vec<S>>; 4],
}

impl<S: Scalar> Functions<S> {
    /// All zero, through the frame's last order.
    pub fn new(frame: &Frame) -> Functions<S> {
        let degrees = frame.degrees();
        let orders = frame.orders;
        Functions {
            polynomial: std::array::from_fn(|a| (0..=orders).map(|_| S::zeros((degrees[a] + 1) as usize)).collect()),
            pole: std::array::from_fn(|_| (0..=orders).map(|_| S::zeros(orders + 1)).collect()),
        }
    }

    /// p_a at order G^m as a Laurent polynomial in v.
    pub fn lowered(&self, frame: &Frame, a: usize, m: usize) -> Laurent<S> {
        let degree = frame.degrees()[a];
        let low = if m == 0 { degree.min(0) } else { -(2 * m as i64) };
        let mut result = Laurent::zero(degree, low, frame.step);
        let matches = |exponent: i64| (degree - exponent).rem_euclid(frame.step) == 0;
        for (j, value) in self.polynomial[a][m].iter().enumerate().filter(|(j, _)| matches(*j as i64)) {
            result.add(j as i64, value, frame.bits);
        }
        for k in (1..=m).filter(|&k| matches(-(k as i64))) {
            for l in 0..=m - k {
                let value = self.pole[a][m - k - l][k].scale(&Real::from_scaled(&power_of_s(k, l), 0), frame.bits);
                result.add(-((k + 2 * l) as i64), &value, frame.bits);
            }
        }
        result
    }

    /// s^{−L'} p^b (upper index) at order G^m as a Laurent polynomial in v.
    pub fn raised(&self, frame: &Frame, b: usize, m: usize) -> Laurent<S> {
        let a = partner(b);
        let wrap = frame.wrap();
        let top = frame.degrees()[a] - wrap as i64;
        let mut result = Laurent::zero(top, -((wrap + 2 * m + 2) as i64), frame.step);
        for l in 0..=m {
            let weight = Real::from_scaled(&power_of_s(wrap, l), 0);
            let part = self.lowered(frame, a, m - l);
            for (e, value) in part.coefficients.iter().enumerate() {
                let exponent = part.top - e as i64 * part.step - (wrap + 2 * l) as i64;
                result.add(exponent, &value.scale(&weight, frame.bits), frame.bits);
            }
        }
        if raising_is_negative(b) {
            result.coefficients.iter_mut().for_each(Scalar::negate);
        }
        result
    }
}

/// A₃ and A₁ of the normalisation as polynomials in h = γ/2: coefficients of h⁰ … h⁴.
pub fn leading_coefficients(frame: &Frame) -> ([Rational; 5], [Rational; 5]) {
    let (l, m) = (frame.length, frame.magnons);
    let product = |factors: [(i64, i64); 4], divisor: i64| {
        let mut poly: Vec<Rational> = vec![Rational::from((1, divisor))];
        for (constant, slope) in factors {
            let mut next = vec![Rational::new(); poly.len() + 1];
            for (power, c) in poly.iter().enumerate() {
                next[power] += Rational::from(c * constant);
                next[power + 1] += Rational::from(c * slope);
            }
            poly = next;
        }
        std::array::from_fn(|power| poly[power].clone())
    };
    let third = product([(1 - m, -1), (-m, -1), (l - m + 1, 1), (l - m, 1)], (1 - m) * (l - 2 * m + 1) * (l - m));
    let first = product([(l - 1, 1), (l, 1), (1, 1), (0, 1)], -(l - 1) * (l - m) * (m - 1));
    (third, first)
}
