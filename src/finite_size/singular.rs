//! The finite-size term of singular states: the limit of vanishing twist (formulas §5, NW).
//!
//! With Q = (v−½−c)(v+½−e)R, e = c + δ and δ = c^L G, nearly everything is regular at τ = 0:
//! * X = A/B = (s−c)/(s−e) · X̃ with X̃ regular, and (s−c)/(s−e) = 1 − Σ δ s^i e^{−i−1} → 1 − G s^{L−1} through
//!   s^{L−1}, so that the zeta part has a limit of its own;
//! * s^{k−L}A mod B is regular, because its value e^{k−L}A(e) at s = e contains A(e) = δ R(e+½);
//! * only 1/((t−c)²(t−e)) in the constant part has poles in τ, up to τ^{−L−2}; they cancel against the counterterms.

use super::FiniteSize;
use super::odd_zetas;
use super::sum::{Ratio, Twist, numerator, residues, zeta_part};
use super::twisted::{TwistedRoots, counterterm, solve, twist_power};
use crate::algebra::graded::{Graded, Grading};
use crate::algebra::poly;
use crate::algebra::ring::Ring;
use crate::baxter::Pair;
use crate::error::{Error, Result};
use crate::family::Family;

/// The finite-size term of a singular state. The constant contains the counterterms
/// 2(−1)^L G c^{−L} + b_L G²/c, so that γ_L = (asymptotic value by the singular formula) + this.
///
/// # Errors
/// Negative powers of τ, or zeta values, that do not cancel (a check); a non-unit.
pub fn leading<R: Ring>(ring: &R, family: Family, pair: &Pair<R::Elem>) -> Result<FiniteSize<R::Elem>> {
    // [t^{L−1}] reaches τ^{−L−2}, and c/τ loses one order.
    let order = family.length + 3;
    let roots = solve(ring, family, &pair.q1, order)?;
    let zetas = zetas(ring, family, &roots)?;
    let constant = constant(ring, family, &roots, order)?;
    Ok(FiniteSize { constant, zetas })
}

fn non_unit(family: Family) -> Error {
    Error::undefined(format!(
        "family {family}: a number in the twist limit is no unit, as it is for every physical singular state over a field; use another prime"
    ))
}

/// The zeta part at τ = 0.
fn zetas<R: Ring>(ring: &R, family: Family, roots: &TwistedRoots<R::Elem>) -> Result<Vec<R::Elem>> {
    let length = family.length;
    let r: Vec<R::Elem> = roots.r.iter().map(|c| c[0].clone()).collect();
    let linear = |root: i64| vec![ring.integer(-root), ring.one()];
    let up = poly::mul(ring, &linear(-1), &poly::shift(ring, &r, &ring.ratio(1, 2)));
    let down = poly::mul(ring, &linear(1), &poly::shift(ring, &r, &ring.ratio(-1, 2)));
    let mut ratio = Ratio::new(ring, &up, &down, length).ok_or_else(|| non_unit(family))?;
    let g = &roots.g[0];
    let correction = |series: &[R::Elem]| ring.mul(g, &series[0]);
    let (direct, inverse) = (correction(&ratio.direct), correction(&ratio.inverse));
    ratio.direct[length - 1] = ring.sub(&ratio.direct[length - 1], &direct);
    ratio.inverse[length - 1] = ring.add(&ratio.inverse[length - 1], &inverse);
    let one = ring.one();
    let twist = Twist::new(ring, &one, &one).ok_or_else(|| non_unit(family))?;
    odd_zetas(ring, family, zeta_part(ring, length, &ratio, &twist))
}

/// The constant part with its counterterms, in the limit.
fn constant<R: Ring>(ring: &R, family: Family, roots: &TwistedRoots<R::Elem>, order: usize) -> Result<R::Elem> {
    let Family { length, magnons } = family;
    let grading = Grading::plain(order);
    let series = Graded::new(ring, &grading);
    let fail = || non_unit(family);
    let TwistedRoots { c, g, r } = roots;
    let delta = series.mul(&series.power(c, length), g);
    let e = series.add(c, &delta);
    let one = series.one();
    let linear = |root: &Vec<R::Elem>| vec![series.neg(root), series.one()];
    let mul = |a: &[Vec<R::Elem>], b: &[Vec<R::Elem>]| poly::mul(&series, a, b);
    let r_up = poly::shift(&series, r, &ring.ratio(1, 2));
    let r_down = poly::shift(&series, r, &ring.ratio(-1, 2));
    // A = (s−c)(s+1−e)R(s+½) and B = (s−e)·B̃, B̃ = (s−1−c)R(s−½).
    let a_rest = mul(&linear(&series.sub(&e, &one)), &r_up);
    let b_rest = mul(&linear(&series.add(c, &one)), &r_down);
    let up = mul(&linear(c), &a_rest);
    let down = mul(&linear(&e), &b_rest);
    let unit = series.inverse(&b_rest[0]).ok_or_else(fail)?;
    let at_e = series.inverse(&poly::evaluate(&series, &b_rest, &e)).ok_or_else(fail)?;
    // ρ_k = u + B̃ (ρ_k(e) − u(e))/B̃(e), where u = s^{k−L}A mod B̃ and ρ_k(e) = e^{k−L} δ R(e+½).
    let scale = Scale::new(ring, c, &e).ok_or_else(fail)?;
    let value_at_e = {
        // δ/e^L = G (c/e)^L.
        let quotient = series.mul(&scale.c(&series), &scale.inverse_e(&series));
        let start = series.mul(&series.power(&quotient, length), g);
        series.mul(&start, &poly::evaluate(&series, &r_up, &e))
    };
    let mut powers = residues(&series, length, &up, &b_rest, &unit);
    let mut wanted = value_at_e;
    for power in &mut powers {
        let gap = series.sub(&wanted, &poly::evaluate(&series, power, &e));
        let factor = series.mul(&gap, &at_e);
        power.resize(b_rest.len(), series.zero());
        for (x, b) in power.iter_mut().zip(&b_rest) {
            *x = series.add(x, &series.mul(&factor, b));
        }
        wanted = series.mul(&wanted, &e);
    }
    let left = twist_power(ring, -(magnons as i64), order + 1);
    let right = twist_power(ring, magnons as i64 - length as i64, order + 1);
    let twist = Twist::new(&series, &left, &right).ok_or_else(fail)?;
    let top = numerator(&series, length, &powers, &up, &down, &twist);
    let truncated = |a: &[Vec<R::Elem>], b: &[Vec<R::Elem>]| poly::mul_truncated(&series, a, b, length);
    let regular = truncated(&truncated(&a_rest, &a_rest), &b_rest);
    let inverse = poly::series_inverse(&series, &regular, length).ok_or_else(fail)?;
    let f = truncated(&top, &inverse);
    // [t^m] 1/((t−c)²(t−e)) = −τ^{−m−3} S_m, S_m = S_{m−1}/ê + (m+1) ĉ^{−m−2}/ê, c = τĉ, e = τê.
    let sign = if length.is_multiple_of(2) { 2 } else { -2 };
    let mut limit = Laurent::new(ring, length + 2);
    let (c_inverse, e_inverse) = (scale.inverse_c(&series), scale.inverse_e(&series));
    let mut c_power = series.mul(&c_inverse, &c_inverse);
    let mut s = series.zero();
    for m in 0..length {
        let own = series.scale(&c_power, &ring.ratio(m as i64 + 1, 1));
        s = series.mul(&series.add(&s, &own), &e_inverse);
        limit.add(ring, m + 3, &series.scale(&series.mul(&f[length - 1 - m], &s), &ring.ratio(-sign, 1)));
        c_power = series.mul(&c_power, &c_inverse);
    }
    let pole = series.mul(g, &series.power(&c_inverse, length));
    limit.add(ring, length, &series.scale(&pole, &ring.ratio(sign, 1)));
    let square = series.mul(&series.mul(g, g), &c_inverse);
    limit.add(ring, 1, &series.scale(&square, &ring.scalar(&counterterm(length))));
    limit.value(ring, family)
}

/// ĉ = c/τ and ê = e/τ with their inverses.
struct Scale<E> {
    c: Vec<E>,
    c_inverse: Vec<E>,
    e_inverse: Vec<E>,
}

impl<E: Clone> Scale<E> {
    fn new<R: Ring<Elem = E>>(ring: &R, c: &[E], e: &[E]) -> Option<Scale<E>> {
        let shorter = Grading::plain(c.len() - 2);
        let series = Graded::new(ring, &shorter);
        let divided = |x: &[E]| x[1..].to_vec();
        Some(Scale { c: divided(c), c_inverse: series.inverse(&divided(c))?, e_inverse: series.inverse(&divided(e))? })
    }

    // One order is lost by the division; the missing last coefficient is never used below.
    fn padded<R: Ring<Elem = E>>(series: &Graded<'_, R>, x: &[E]) -> Vec<E> {
        let mut x = x.to_vec();
        x.push(series.base().zero());
        x
    }
    fn c<R: Ring<Elem = E>>(&self, series: &Graded<'_, R>) -> Vec<E> {
        Self::padded(series, &self.c)
    }
    fn inverse_c<R: Ring<Elem = E>>(&self, series: &Graded<'_, R>) -> Vec<E> {
        Self::padded(series, &self.c_inverse)
    }
    fn inverse_e<R: Ring<Elem = E>>(&self, series: &Graded<'_, R>) -> Vec<E> {
        Self::padded(series, &self.e_inverse)
    }
}

/// A sum of series with poles in τ up to a given order, of which only τ^{≤0} is kept.
struct Laurent<E> {
    depth: usize,
    /// Coefficients of τ^{−depth} … τ⁰.
    coefficients: Vec<E>,
}

impl<E> Laurent<E> {
    fn new<R: Ring<Elem = E>>(ring: &R, depth: usize) -> Laurent<E> {
        Laurent { depth, coefficients: (0..=depth).map(|_| ring.zero()).collect() }
    }

    /// Adds τ^{−pole} · series.
    fn add<R: Ring<Elem = E>>(&mut self, ring: &R, pole: usize, series: &[E]) {
        let start = self.depth - pole;
        for (slot, x) in self.coefficients[start..].iter_mut().zip(series) {
            *slot = ring.add(slot, x);
        }
    }

    /// The limit τ → 0.
    fn value<R: Ring<Elem = E>>(mut self, ring: &R, family: Family) -> Result<E> {
        let last = self.coefficients.pop();
        match last {
            Some(value) if self.coefficients.iter().all(|c| ring.is_zero(c)) => Ok(value),
            _ => Err(Error::check(format!(
                "family {family}: poles in the twist do not cancel in the finite-size term of a singular state; please report this family"
            ))),
        }
    }
}
