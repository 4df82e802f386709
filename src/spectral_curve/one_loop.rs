//! The Baxter pair in decimals, from the transfer-matrix eigenvalue (formulas §1).

use super::input::OneLoop;
use super::start::{product, shift_half};
use crate::algebra::flint::complex_roots;
use crate::algebra::flint::dense::{Complex, Real, Scalar};
use crate::chain::Orbit;
use crate::error::{Error, Result};
use crate::record::Parity;
use rug::{Float, Integer, Rational};

/// One state for each real embedding of ω, sorted by γ₁, to about `digits` digits.
///
/// # Errors
/// Roots of the field's polynomial that do not match the parity of the orbit.
pub fn of_orbit(orbit: &Orbit, digits: u32) -> Result<Vec<OneLoop>> {
    let bits = (f64::from(digits) * std::f64::consts::LOG2_10) as u32
        + 64 * (orbit.field.len() as u32 + 1)
        + 8 * orbit.family.length as u32;
    let precision = i64::from(bits);
    let middle = |low: &Rational, high: &Rational| {
        Real::from_rational(&Rational::from(Rational::from(low + high) / 2u32), precision)
    };
    let derivative: Vec<Integer> =
        orbit.field.iter().enumerate().skip(1).map(|(i, c)| Integer::from(c * i as u32)).collect();
    let mut states: Vec<OneLoop> = Vec::new();
    for (re, im) in complex_roots(&orbit.field, bits) {
        let x = Complex::from_parts(&middle(&re.low, &re.high), &middle(&im.low, &im.high));
        let inverse = super::start::inverse(&horner(&derivative, &x, precision), precision);
        let image = |numerator: &[Integer]| horner(numerator, &x, precision).mul(&inverse, precision);
        let (omega, gamma_1) = (image(&orbit.omega), image(&orbit.gamma_1));
        let close = |state: &OneLoop| {
            let difference = Float::with_val(bits, &state.omega - omega.re().to_float(bits));
            difference.is_zero() || difference.get_exp().unwrap_or(0) < -(bits as i32) / 2
        };
        if omega.im().magnitude() > -precision / 2 || (orbit.parity == Parity::Symmetric && !im.low.is_zero()) {
            return Err(Error::check(format!(
                "orbit {}: a root of its field belongs to no real value of omega; please report this family",
                orbit.label
            )));
        }
        if states.iter().any(close) {
            continue;
        }
        let shifted: Vec<Complex> = orbit.transfer.iter().map(|numerator| image(numerator)).collect();
        let transfer = shift_half(&shifted, -1, precision);
        let q = first_solution(&transfer, orbit.family.length, orbit.family.magnons, precision);
        let r = second_solution(&q, orbit.family.length, precision);
        let pairs = |list: &[Complex]| list.iter().map(|c| (c.re().to_float(bits), c.im().to_float(bits))).collect();
        states.push(OneLoop {
            length: orbit.family.length,
            magnons: orbit.family.magnons,
            parity: orbit.parity,
            label: orbit.label.clone(),
            omega: omega.re().to_float(bits),
            gamma1: gamma_1.re().to_float(bits),
            transfer: pairs(&transfer),
            q: pairs(&q),
            r: pairs(&r),
        });
    }
    states.sort_by(|a, b| a.gamma1.total_cmp(&b.gamma1));
    Ok(states)
}

fn horner(poly: &[Integer], x: &Complex, bits: i64) -> Complex {
    poly.iter().rev().fold(Complex::zero(), |sum, c| {
        let mut next = sum.mul(x, bits);
        next.add(&Complex::from_real(&Real::from_scaled(c, 0)), bits);
        next
    })
}

/// Q monic of degree M with T Q = (v+½)^L Q(v−1) + (v−½)^L Q(v+1): the v^{L−2+k} coefficient
/// determines the v^k term, with factor (M−k)(L−M+1−k) up to sign, which never vanishes for k < M.
fn first_solution(transfer: &[Complex], length: usize, magnons: usize, bits: i64) -> Vec<Complex> {
    let power = |sign: i64| {
        let mut poly = Complex::zeros(length + 1);
        poly[length] = Complex::from_real(&Real::from_i64(1));
        shift_half(&poly, sign, bits)
    };
    let (up, down) = (power(1), power(-1));
    let excess = |q: &[Complex]| {
        let once = |sign: i64| shift_half(&shift_half(q, sign, bits), sign, bits);
        let mut sum = product(transfer, q, bits);
        for part in [product(&up, &once(-1), bits), product(&down, &once(1), bits)] {
            sum.iter_mut().zip(&part).for_each(|(a, b)| a.sub(b, bits));
        }
        sum
    };
    let mut q = Complex::zeros(magnons + 1);
    q[magnons] = Complex::from_real(&Real::from_i64(1));
    for k in (0..magnons).rev() {
        let wrong = excess(&q)[length - 2 + k].clone();
        let mut unit = Complex::zeros(magnons + 1);
        unit[k] = Complex::from_real(&Real::from_i64(1));
        let factor = excess(&unit)[length - 2 + k].clone();
        let mut value = wrong.mul(&super::start::inverse(&factor, bits), bits);
        value.negate();
        q[k] = value;
    }
    q
}

/// Q₂ monic of degree L − M + 1 without v^M term, from Q₁⁺Q₂⁻ − Q₁⁻Q₂⁺ = (2M−L−1) v^L: the v^k term
/// changes the coefficient of v^{k+M−1} by M − k.
fn second_solution(q: &[Complex], length: usize, bits: i64) -> Vec<Complex> {
    let magnons = q.len() - 1;
    let degree = length + 1 - magnons;
    let (plus, minus) = (shift_half(q, 1, bits), shift_half(q, -1, bits));
    let mut r = Complex::zeros(degree + 1);
    r[degree] = Complex::from_real(&Real::from_i64(1));
    for k in (0..degree).rev().filter(|&k| k != magnons) {
        let Some(place) = (k + magnons).checked_sub(1) else { continue };
        let mut wrong = product(&plus, &shift_half(&r, -1, bits), bits)[place].clone();
        wrong.sub(&product(&minus, &shift_half(&r, 1, bits), bits)[place], bits);
        wrong.div_small(k as i64 - magnons as i64, bits);
        r[k] = wrong;
    }
    r
}
