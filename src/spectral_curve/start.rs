//! The leading order from the one-loop Baxter pair (Q, R).
//!
//! Solve 𝒢⁺ − 𝒢⁻ = Q/(v²−¼), so 𝒢 = −q/v + polynomial with q = Q(½); ℋ likewise from R; then
//! K = 𝒢⁻R − ℋ⁻Q is a polynomial, and p₂, p₃/A₃, p₄ at zero coupling are the monic versions of
//! (X⁺ − X⁻)/v for X = Q, R, K; p₁ = 0.

use super::frame::Frame;
use crate::algebra::flint::dense::{Real, Scalar};
use crate::error::{Error, Result};

/// Coefficients, constant term first.
type Poly<S> = Vec<S>;

/// p₂, p₃/A₃ and p₄ at zero coupling, monic, as coefficients of v^j.
///
/// # Errors
/// A check failure when the pair is not cyclic or the quotients are not polynomials of the right degree.
pub fn leading_polynomials<S: Scalar>(frame: &Frame, q: &[S], r: &[S]) -> Result<[Poly<S>; 3]> {
    let bits = frame.bits;
    let (g, g_pole) = antidifference(q, frame)?;
    let (h, h_pole) = antidifference(r, frame)?;
    // K = 𝒢⁻R − ℋ⁻Q; the poles at v = ½: −(q R − r Q)/(v − ½), a polynomial.
    let mut pole = product(r, std::slice::from_ref(&g_pole), bits);
    subtract(&mut pole, &product(q, std::slice::from_ref(&h_pole), bits), bits);
    let (mut k, remainder) = divide_linear(&pole, 1, bits);
    small(&remainder, &pole, frame, "the residue of K at v = 1/2")?;
    k.iter_mut().for_each(Scalar::negate);
    let mut regular = product(&shift_half(&g, -1, bits), r, bits);
    subtract(&mut regular, &product(&shift_half(&h, -1, bits), q, bits), bits);
    add(&mut k, &regular, bits);
    let degrees = frame.degrees();
    let take = |x: &[S], degree: i64| -> Result<Poly<S>> {
        let mut difference = shift_half(x, 1, bits);
        subtract(&mut difference, &shift_half(x, -1, bits), bits);
        small(&difference[0], &difference, frame, "X(1/2) - X(-1/2)")?;
        let mut quotient: Poly<S> = difference[1..=(degree as usize + 1).min(difference.len() - 1)].to_vec();
        if quotient.len() != degree as usize + 1 {
            return Err(Error::check(format!(
                "spectral curve at L = {}, M = {}: a leading polynomial has too low a degree; the one-loop pair is not that of a primary",
                frame.length, frame.magnons
            )));
        }
        let top = quotient[degree as usize].clone();
        let inverse = inverse(&top, bits);
        for entry in &mut quotient {
            *entry = entry.mul(&inverse, bits);
        }
        quotient[degree as usize] = S::from_real(&Real::from_i64(1));
        if frame.step == 2 {
            for (j, entry) in quotient.iter_mut().enumerate().filter(|(j, _)| (degree - *j as i64) % 2 != 0) {
                let one = S::from_real(&Real::from_i64(1));
                small(entry, &[one], frame, &format!("coefficient {j} of the wrong parity"))?;
                *entry = S::zero();
            }
        }
        Ok(quotient)
    };
    Ok([take(q, degrees[1])?, take(r, degrees[2])?, take(&k, degrees[3])?])
}

/// 1/x for complex or real x.
pub fn inverse<S: Scalar>(x: &S, bits: i64) -> S {
    let norm = x.mul(&x.conj(), bits);
    let factor = Real::from_i64(1).div(norm.re(), bits);
    x.conj().scale(&factor, bits)
}

/// Refuses a number that should vanish.
fn small<S: Scalar>(value: &S, among: &[S], frame: &Frame, what: &str) -> Result<()> {
    let size = among.iter().map(Scalar::magnitude).max().unwrap_or(0).max(0);
    if value.magnitude() > size - frame.bits + frame.bits / 4 + 64 {
        return Err(Error::check(format!(
            "spectral curve at L = {}, M = {}: {what} does not vanish (about 2^{}); the one-loop pair is not that of a cyclic primary, or has too few digits",
            frame.length,
            frame.magnons,
            value.magnitude()
        )));
    }
    Ok(())
}

/// Polynomial part and −X(½) of the solution of F⁺ − F⁻ = X/(v² − ¼): F = −X(½)/v + polynomial.
fn antidifference<S: Scalar>(x: &[S], frame: &Frame) -> Result<(Poly<S>, S)> {
    let bits = frame.bits;
    let (first, value) = divide_linear(x, 1, bits);
    let (second, slope) = divide_linear(&first, -1, bits);
    small(&slope, x, frame, "Q(1/2) - Q(-1/2)")?;
    // F polynomial with F⁺ − F⁻ = second: from the top coefficient down.
    let mut rest = second;
    let mut f = S::zeros(rest.len() + 1);
    for degree in (0..rest.len()).rev() {
        let mut c = rest[degree].clone();
        c.div_small(degree as i64 + 1, bits);
        // (v+½)^{d} − (v−½)^{d} with d = degree + 1: 2 Σ_{odd i} binom(d, i) 2^{−i} v^{d−i}.
        let d = degree as i64 + 1;
        let mut choose = c.clone();
        for i in 1..=d {
            choose.mul_small(d - i + 1, bits);
            choose.div_small(i, bits);
            if i % 2 == 1 {
                let mut term = choose.clone();
                term.shift(1 - i);
                rest[(d - i) as usize].sub(&term, bits);
            }
        }
        f[d as usize] = c;
    }
    // The quotients: x = value' + (v − ½) first, first = slope + (v + ½) second.
    Ok((f, value))
}

/// Quotient and remainder on division by v − sign/2 (Horner).
fn divide_linear<S: Scalar>(x: &[S], sign: i64, bits: i64) -> (Poly<S>, S) {
    let mut quotient = S::zeros(x.len().saturating_sub(1));
    let mut carry = S::zero();
    for (j, c) in x.iter().enumerate().rev() {
        let mut next = carry.clone();
        next.shift(-1);
        next.mul_small(sign, bits);
        next.add(c, bits);
        if j > 0 {
            quotient[j - 1] = next.clone();
        }
        carry = next;
    }
    (quotient, carry)
}

/// X(v + sign/2).
pub(super) fn shift_half<S: Scalar>(x: &[S], sign: i64, bits: i64) -> Poly<S> {
    let mut result = x.to_vec();
    for lowest in 0..result.len() {
        for j in (lowest..result.len() - 1).rev() {
            let mut term = result[j + 1].clone();
            term.shift(-1);
            term.mul_small(sign, bits);
            result[j].add(&term, bits);
        }
    }
    result
}

pub(super) fn product<S: Scalar>(x: &[S], y: &[S], bits: i64) -> Poly<S> {
    let mut result = S::zeros((x.len() + y.len()).saturating_sub(1));
    for (i, a) in x.iter().enumerate() {
        for (j, b) in y.iter().enumerate() {
            result[i + j].add_mul(a, b, bits);
        }
    }
    result
}

fn subtract<S: Scalar>(x: &mut Poly<S>, y: &[S], bits: i64) {
    while x.len() < y.len() {
        x.push(S::zero());
    }
    for (a, b) in x.iter_mut().zip(y) {
        a.sub(b, bits);
    }
}

/// x ← x + y.
fn add<S: Scalar>(x: &mut Poly<S>, y: &[S], bits: i64) {
    let mut minus = y.to_vec();
    minus.iter_mut().for_each(Scalar::negate);
    subtract(x, &minus, bits);
}
