//! The leading finite-size term at order h^L from the one-loop Q, exactly over K (formulas §5; B06, BJ).
//!
//! With A±(s) = Q(s±½) and X = A⁻/A⁺ the integrand of §5 becomes, for a = s − t,
//! N/[A⁺A⁻(s) A⁺A⁻(t)] = [(a+1)X(s) − a − a X(s)X(t) + (a−1)X(t)]² / [X(s)X(t)],
//! so the zeta part needs the power series of X and 1/X only. In the constant, the residues at the
//! roots ρ of A⁻ give, with e(ρ) = A⁺(ρ)/[ρ^L A⁻'(ρ)] and for L ≥ 3,
//! 2(−1)^L [t^{L−1}] Σ_ρ e(ρ) { (ρ−t)²/[(1+t−ρ) X(t)] − (ρ−t−1) X(t) }.
//!
//! Singular states: on the twisted solution, Q = (v−½−c)(v+½−c−δ)R(v) with δ = c^L G, so
//! X = (s−c−δ)/(s−c) · B with B regular. [s^k] of the first factor is G c^{L−1−k} for k ≥ 1, of its
//! inverse −G c^{L−1−k} + O(c^{2L−2−k}): both stay finite for k ≤ L − 1, and at c = 0 only k = L − 1
//! survives. Among the roots of A⁻ only ρ = 1 + c gives poles. There (with V below, ρ₀ = c + δ, and the
//! first twisted equation for e) the first term in braces gives
//! 2(−1)^L G R(c−½)/[(1−δ)R(½+c)] · {V(ρ₀)/ρ₀^L − V_L}, V(ρ₀) = −(1−δ)R(ρ₀+½)/R(ρ₀−½),
//! and expanding in δ = c^L G: −2(−1)^L G {c^{−L} − L G/c + G[R'/R(½) − R'/R(−½)]} − 2(−1)^L G R(−½)/R(½) V_L.
//! Both poles cancel identically against the terms 2(−1)^L G c^{−L} + b_L G²/c of §5, because
//! b_L = −2(−1)^L L; the rest needs nothing but the untwisted state.

use super::field::Field;
use super::graded::Monomial;
use super::poly::{Poly, binomial, ratio};
use super::potential::power_of_y;
use num_rational::BigRational;
use num_traits::Zero;
use std::collections::BTreeMap;

/// Zeta monomial → element of K.
pub type ZetaSum = BTreeMap<Monomial, Poly>;

/// The finite-size term of the state with one-loop Baxter polynomial `q`, of length L ≥ 4.
///
/// For a singular state this is the limit that is to be added to the value of §3.
///
/// # Errors
/// Names the quantity without inverse or the cancellation that fails; neither happens for a physical state.
pub fn finite_size(field: &Field, length: usize, q: &Poly) -> Result<ZetaSum, String> {
    let half = ratio(1, 2);
    let singular = q.at(&half).is_zero() && q.at(&-half).is_zero();
    let pieces = if singular { Pieces::singular(field, length, q)? } else { Pieces::regular(field, length, q)? };
    let sign = ratio(if length.is_multiple_of(2) { 2 } else { -2 }, 1);
    let mut result = ZetaSum::new();
    result.insert(Monomial::new(), pieces.constant.scale(&sign));
    for (k, value) in zeta_part(field, length, &pieces.x, &pieces.inverse_x) {
        if k % 2 == 0 || k == 1 {
            if !value.is_zero() {
                return Err(format!("zeta({k}) does not cancel in the finite-size term"));
            }
        } else {
            result.insert(vec![k], value.scale(&sign));
        }
    }
    result.retain(|_, value| !value.is_zero());
    Ok(result)
}

/// What the two parts are made of.
struct Pieces {
    /// X modulo s^L.
    x: Poly,
    /// 1/X modulo s^L.
    inverse_x: Poly,
    /// The constant part without 2(−1)^L.
    constant: Poly,
}

/// [s^k] p/r.
fn quotient(field: &Field, p: &Poly, r: &Poly, limit: usize) -> Result<Poly, String> {
    let inverse = field.series_inverse(r, limit).ok_or("a value of Q at ±1/2 has no inverse")?;
    Ok(field.dot(&[(p, &inverse)], limit))
}

impl Pieces {
    fn regular(field: &Field, length: usize, q: &Poly) -> Result<Pieces, String> {
        let (minus, plus) = (q.shift(&ratio(-1, 2)), q.shift(&ratio(1, 2)));
        let x = quotient(field, &minus, &plus, length)?;
        let inverse_x = quotient(field, &plus, &minus, length)?;
        let sums = RootSums::new(field, length, plus.sub(&minus), &minus, 0)?;
        let constant = sums.contribution(field, length, &x, &inverse_x);
        Ok(Pieces { x, inverse_x, constant })
    }

    fn singular(field: &Field, length: usize, q: &Poly) -> Result<Pieces, String> {
        let last = length - 1;
        // Q = (v² − ¼) R.
        let r = divide_exactly(&divide_exactly(q, &ratio(1, 2)), &ratio(-1, 2));
        let (minus, plus) = (r.shift(&ratio(-1, 2)), r.shift(&ratio(1, 2)));
        let linear = |a: i64| Poly::from_rationals(&[ratio(-a, 1), ratio(1, 1)]); // s − a
        let (below, above) = (field.mul(&linear(1), &minus), field.mul(&linear(-1), &plus));
        let b = quotient(field, &below, &above, length)?;
        let inverse_b = quotient(field, &above, &below, length)?;
        // G = −2R(3/2)/R(−½).
        let at_minus = r.at(&ratio(-1, 2));
        let at_plus = r.at(&ratio(1, 2));
        let none = "R(±1/2) has no inverse";
        let (over_minus, over_plus) = (field.inverse(&at_minus).ok_or(none)?, field.inverse(&at_plus).ok_or(none)?);
        let g = field.mul(&r.at(&ratio(3, 2)), &over_minus).scale(&ratio(-2, 1));
        let x = b.add(&field.mul(&g, &b.coefficient(0)).times_power(last));
        let inverse_x = inverse_b.sub(&field.mul(&g, &inverse_b.coefficient(0)).times_power(last));
        // Roots of R(s − ½): A⁺/A⁻' = (ρ+1)R(ρ+½)/[(ρ−1)R'(ρ−½)].
        let mut constant = if r.len() > 1 {
            let sums = RootSums::new(field, length, remainder(field, &above, &minus), &minus, 1)?;
            sums.contribution(field, length, &x, &inverse_x)
        } else {
            Poly::zero()
        };
        // Root ρ = 0: e = −G R(½)/R(−½), and (ρ−t)²/(1+t) /X + (1+t) X.
        let e = field.mul(&field.mul(&g, &at_plus), &over_minus).negate();
        let alternating: Vec<BigRational> = (0..length)
            .map(|k| match k {
                0 | 1 => BigRational::zero(),
                k => ratio(if k % 2 == 0 { 1 } else { -1 }, 1),
            })
            .collect();
        let geometric = Poly::from_rationals(&alternating);
        let sum = field.dot(&[(&geometric, &inverse_x), (&linear(-1), &x)], length).coefficient(last);
        constant = constant.add(&field.mul(&e, &sum));
        // Root ρ = 1 + c: what is left after the poles, e = −G R(−½)/R(½).
        let e = field.mul(&field.mul(&g, &at_minus), &over_plus).negate();
        let v = quotient(field, &field.mul(&field.mul(&linear(1), &linear(-1)), &plus), &minus, length + 1)?;
        let rest = x.coefficient(length - 2).add(&v.coefficient(length));
        constant = constant.add(&field.mul(&e, &rest));
        let slope = r.derivative();
        let logarithmic =
            field.mul(&slope.at(&ratio(1, 2)), &over_plus).sub(&field.mul(&slope.at(&ratio(-1, 2)), &over_minus));
        constant = constant.sub(&field.mul(&field.mul(&g, &g), &logarithmic));
        if !pole_coefficient(length).is_zero() {
            return Err("the simple pole of the twist limit does not cancel".into());
        }
        Ok(Pieces { x, inverse_x, constant })
    }
}

/// b_L + 2(−1)^L L, with b_L = [h^{L−1}] Y^{2L−1}(1/s² + 1/s³) at w = 1: zero if the poles cancel.
fn pole_coefficient(length: usize) -> BigRational {
    let power: Vec<BigRational> = {
        let series = power_of_y(2 * length - 1, length);
        let rational = Field::new(&[ratio(0, 1), ratio(1, 1)]);
        let mut values = vec![BigRational::zero(); length];
        for ((order, _), poly) in series.terms() {
            values[*order] = rational.coordinates(&poly.at(&ratio(1, 1)))[0].clone();
        }
        values
    };
    let mut sum = ratio(if length.is_multiple_of(2) { 2 } else { -2 }, 1) * ratio(length as i64, 1);
    let four = |k: usize| BigRational::from(num_traits::pow(num_bigint::BigInt::from(-4), k));
    let mut root = ratio(1, 1); // binom(−3/2, k), so that (1+4h)^{−3/2} = Σ root 4^k h^k
    for k in 0..length {
        let cube = &root * BigRational::from(num_traits::pow(num_bigint::BigInt::from(4), k));
        sum += &power[length - 1 - k] * (four(k) + cube);
        root = root * ratio(-3 - 2 * k as i64, 2) / ratio(k as i64 + 1, 1);
    }
    sum
}

/// p/(v − a) for a root a of p.
fn divide_exactly(p: &Poly, a: &BigRational) -> Poly {
    let mut quotient = Vec::with_capacity(p.len());
    let mut carry = Poly::zero();
    for j in (1..p.len()).rev() {
        carry = carry.scale(a).add(&p.coefficient(j));
        quotient.push(carry.clone());
    }
    quotient.reverse();
    Poly::from_constants(&quotient)
}

/// p modulo the monic polynomial m.
fn remainder(field: &Field, p: &Poly, m: &Poly) -> Poly {
    let mut p = p.clone();
    while p.len() >= m.len() {
        let top = p.coefficient(p.len() - 1);
        p = p.sub(&field.mul(&top, m).times_power(p.len() - m.len()));
    }
    p
}

/// Sums over the roots ρ of a monic polynomial m of φ(ρ)/m'(ρ) × simple functions of ρ. They are
/// read off [s^{deg m − 1}](… mod m), so they need no roots.
struct RootSums {
    /// Σ e ρ^n for n = 0, 1.
    moments: [Poly; 2],
    /// Σ e/(1−ρ)^{k+1} for k < L.
    reciprocal: Vec<Poly>,
}

impl RootSums {
    /// e(ρ) = φ(ρ)/[ρ^L (ρ−1)^p m'(ρ)].
    fn new(field: &Field, length: usize, phi: Poly, m: &Poly, p: usize) -> Result<RootSums, String> {
        let top = m.len() - 2;
        let invert = |a: i64| field.inverse(&m.at(&ratio(a, 1))).ok_or_else(|| "Q(±1/2) has no inverse".to_string());
        let (zero, one) = (invert(0)?, invert(1)?);
        // f/(s − a) mod m = (f − f(a)/m(a) m)/(s − a).
        let divide = |f: &Poly, a: i64, inverse: &Poly| {
            let factor = field.mul(&f.at(&ratio(a, 1)), inverse);
            divide_exactly(&f.sub(&field.mul(&factor, m)), &ratio(a, 1))
        };
        let mut f = phi;
        for _ in 0..length {
            f = divide(&f, 0, &zero);
        }
        for _ in 0..p {
            f = divide(&f, 1, &one);
        }
        let next = remainder(field, &f.times_power(1), m);
        let moments = [f.coefficient(top), next.coefficient(top)];
        let mut reciprocal = Vec::with_capacity(length);
        for _ in 0..length {
            f = divide(&f, 1, &one).negate();
            reciprocal.push(f.coefficient(top));
        }
        Ok(RootSums { moments, reciprocal })
    }

    /// [t^{L−1}] Σ e {(ρ−t)²/[(1+t−ρ) X(t)] − (ρ−t−1) X(t)}, where
    /// (ρ−t)²/(1+t−ρ) = 1/(1−ρ+t) + t − 1 − ρ.
    fn contribution(&self, field: &Field, length: usize, x: &Poly, inverse_x: &Poly) -> Poly {
        let [zeroth, first] = &self.moments;
        let mut series: Vec<Poly> =
            self.reciprocal.iter().enumerate().map(|(k, d)| if k % 2 == 0 { d.clone() } else { d.negate() }).collect();
        series[0] = series[0].sub(zeroth).sub(first);
        series[1] = series[1].add(zeroth);
        let series = Poly::from_constants(&series);
        let other = Poly::from_constants(&[zeroth.sub(first), zeroth.clone()]);
        field.dot(&[(&series, inverse_x), (&other, x)], length).coefficient(length - 1)
    }
}

/// The coefficients of ζ(k) without 2(−1)^L: Σ over i, j ≤ L−1 with k = 2L−1−i−j of binom(i−L, L−1−j) H_ij.
fn zeta_part(field: &Field, length: usize, x: &Poly, inverse_x: &Poly) -> BTreeMap<u32, Poly> {
    let one = Poly::one();
    let series = [x, inverse_x, &one];
    const X: usize = 0;
    const INVERSE: usize = 1;
    const ONE: usize = 2;
    // The expanded square divided by X(s)X(t): polynomial in a, function of s, function of t.
    let terms: [([i64; 3], usize, usize); 9] = [
        ([1, 2, 1], X, INVERSE),
        ([1, -2, 1], INVERSE, X),
        ([0, 0, 1], INVERSE, INVERSE),
        ([0, 0, 1], X, X),
        ([-2, 0, 4], ONE, ONE),
        ([0, -2, -2], ONE, INVERSE),
        ([0, -2, -2], X, ONE),
        ([0, 2, -2], INVERSE, ONE),
        ([0, 2, -2], ONE, X),
    ];
    let constants: Vec<Vec<Poly>> = series.iter().map(|p| (0..length).map(|j| p.coefficient(j)).collect()).collect();
    // weights[k][(f, g, i, j)]: how often f_i g_j enters the coefficient of ζ(k).
    let mut weights: BTreeMap<u32, BTreeMap<(usize, usize, usize, usize), BigRational>> = BTreeMap::new();
    for i in 0..length {
        for j in 0..length {
            let weight = BigRational::from(binomial(i as i64 - length as i64, length - 1 - j));
            let list = weights.entry((2 * length - 1 - i - j) as u32).or_default();
            for (a, f, g) in &terms {
                // a = s − t: powers 1, s − t, s² − 2st + t².
                let steps = [(a[0], 0, 0), (a[1], 1, 0), (-a[1], 0, 1), (a[2], 2, 0), (-2 * a[2], 1, 1), (a[2], 0, 2)];
                for (factor, down_s, down_t) in steps {
                    if factor != 0 && i >= down_s && j >= down_t {
                        *list.entry((*f, *g, i - down_s, j - down_t)).or_default() += &weight * ratio(factor, 1);
                    }
                }
            }
        }
    }
    weights
        .into_iter()
        .map(|(k, list)| {
            let scaled: Vec<(Poly, &Poly)> = list
                .iter()
                .filter(|(_, weight)| !weight.is_zero())
                .map(|((f, g, i, j), weight)| (constants[*f][*i].scale(weight), &constants[*g][*j]))
                .collect();
            let pairs: Vec<_> = scaled.iter().map(|(a, b)| (a, *b)).collect();
            (k, field.dot(&pairs, usize::MAX))
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::{ZetaSum, finite_size, pole_coefficient};
    use crate::audit::field::Field;
    use crate::audit::poly::{Poly, ratio};
    use num_traits::Zero;

    fn sum(entries: &[(&[u32], i64)]) -> ZetaSum {
        entries.iter().map(|(zeta, value)| (zeta.to_vec(), Poly::integer(*value))).collect()
    }

    /// Konishi, wrapping part of four loops: 324 + 864ζ3 − 1440ζ5 (BJ, arXiv:0807.0399).
    /// One-loop Q = v² + 1/12 (BDS).
    #[test]
    fn konishi() {
        let field = Field::new(&[ratio(-12, 1), ratio(1, 1)]);
        let q = Poly::from_rationals(&[ratio(1, 12), ratio(0, 1), ratio(1, 1)]);
        let expected = sum(&[(&[], 324), (&[3], 864), (&[5], -1440)]);
        assert_eq!(finite_size(&field, 4, &q).unwrap(), expected);
    }

    /// L = 5: −128 − 512ζ3 + 2560ζ5 − 2240ζ7 (the five-loop value of FSS, arXiv:0908.0234, minus
    /// the asymptotic part). One-loop Q = v² + 1/4.
    #[test]
    fn length_five() {
        let field = Field::new(&[ratio(-8, 1), ratio(1, 1)]);
        let q = Poly::from_rationals(&[ratio(1, 4), ratio(0, 1), ratio(1, 1)]);
        let expected = sum(&[(&[], -128), (&[3], -512), (&[5], 2560), (&[7], -2240)]);
        assert_eq!(finite_size(&field, 5, &q).unwrap(), expected);
    }

    #[test]
    fn the_simple_pole_cancels_at_every_length() {
        assert!((4..40).all(|length| pole_coefficient(length).is_zero()));
    }
}
