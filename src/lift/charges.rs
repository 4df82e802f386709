//! The charges P_r = Σ_k [Y(v_k+½)^{−r} − Y(v_k−½)^{−r}] from Q₁, singular roots included (formulas §3).

use super::GradedPolynomial;
use super::potential::Potential;
use crate::algebra::graded::{Graded, Series};
use crate::algebra::poly;
use crate::algebra::ring::Ring;
use crate::error::{Error, Result};
use crate::family::Family;
use rug::{Integer, Rational};

/// Whether the one-loop Q₁ vanishes at v = ½ (and, for a cyclic state, at −½).
pub fn is_singular<R: Ring>(ring: &R, q1: &[R::Elem]) -> bool {
    ring.is_zero(&poly::evaluate_scalar(ring, q1, &ring.ratio(1, 2)))
}

/// P_r for r = 1, 2, … with everything needed through h^`top`: P_1 through h^`top`, and P_r as far as
/// the dressing phase uses it later.
///
/// Even charges of symmetric states vanish. Graded multiplications: about M·top² / 2 at decreasing
/// order for the power sums, and L·top more for singular states.
///
/// # Errors
/// A non-unit where a physical state over a field has a unit.
pub fn charges<R: Ring>(
    graded: &Graded<'_, R>,
    family: Family,
    q1: &GradedPolynomial<R>,
    potential: &Potential<R>,
    top: usize,
    singular: bool,
    symmetric: bool,
) -> Result<Vec<Series<R>>> {
    let ring = graded.base();
    let (plus, minus, correction) = if singular {
        let upper = Root::split(graded, q1, 1)?;
        let lower = if symmetric { upper.mirrored(graded) } else { Root::split(graded, q1, -1)? };
        // S⁻ omits the root near ½, S⁺ the one near −½.
        let minus = power_sums(graded, &upper.rest, 1, top)?;
        let plus = if symmetric { mirror(graded, &minus) } else { power_sums(graded, &lower.rest, -1, top)? };
        (plus, minus, Some(Correction::new(graded, q1, potential, &upper, &lower)?))
    } else {
        let minus = power_sums(graded, &columns(graded, q1, family.magnons + 1), 1, top)?;
        let plus = if symmetric {
            mirror(graded, &minus)
        } else {
            power_sums(graded, &columns(graded, q1, family.magnons + 1), -1, top)?
        };
        (plus, minus, None)
    };
    // The dressing phase three orders later uses P_r for r up to top + 2.
    let count = top + 2;
    let mut result = Vec::with_capacity(count);
    for r in 1..=count {
        if symmetric && r % 2 == 0 {
            result.push(graded.zero());
            continue;
        }
        let mut sum = graded.zero();
        for (i, weight) in inverse_power(r, top).into_iter().enumerate() {
            let Some((a, b)) = plus.get(r + 2 * i - 1).zip(minus.get(r + 2 * i - 1)) else { break };
            let part = graded.times_monomial(&graded.sub(a, b), i, &[], &ring.scalar(&weight));
            sum = graded.add(&sum, &part);
        }
        if let Some(correction) = &correction {
            sum = graded.sub(&sum, &correction.at(graded, potential, family, r, top));
        }
        result.push(sum);
    }
    Ok(result)
}

/// The coefficients y_i of Y^{−r} = Σ_i y_i h^i w^{−r−2i}: y_i = (−1)^i r/(r+i) binom(r+2i−1, i).
fn inverse_power(r: usize, top: usize) -> Vec<Rational> {
    (0..=top)
        .map(|i| {
            let binomial = Integer::from(Integer::binomial_u((r + 2 * i - 1) as u32, i as u32));
            let value = Rational::from((binomial * r as u32, (r + i) as u32));
            if i % 2 == 0 { value } else { -value }
        })
        .collect()
}

/// The coefficients of v^j as graded series.
fn columns<R: Ring>(graded: &Graded<'_, R>, poly: &GradedPolynomial<R>, count: usize) -> Vec<Series<R>> {
    (0..count)
        .map(|j| poly.iter().map(|row| row.get(j).cloned().unwrap_or_else(|| graded.base().zero())).collect())
        .collect()
}

/// S_m = Σ_k (v_k − side/2)^{−m}, m = 1 … 2·top+2 (the last one for P₂), as far as h^{top−(m−1)/2}, for
/// the roots of `poly`:
/// S_m = −[w^{m−1}] q'(w)/q(w) with q(w) = poly(side/2 + w).
fn power_sums<R: Ring>(graded: &Graded<'_, R>, poly: &[Series<R>], side: i64, top: usize) -> Result<Vec<Series<R>>> {
    let shifted = poly::shift(graded, poly, &graded.base().ratio(side, 2));
    let Some(unit) = graded.inverse(&shifted[0]) else {
        return Err(Error::undefined(
            "a Baxter polynomial without its singular roots vanishes at v = 1/2 or -1/2, which it does for no physical state over a field; use another prime",
        ));
    };
    let q: Vec<Series<R>> = shifted.iter().skip(1).map(|c| graded.mul(c, &unit)).collect();
    // m q_m = Σ_{i=1}^{m} s_i q_{m−i} with q_0 = 1, and S_m = −s_m.
    let mut sums: Vec<Series<R>> = Vec::with_capacity(2 * top + 2);
    for m in 1..=2 * top + 2 {
        let terms: Vec<_> = (1..m).filter_map(|i| q.get(m - i - 1).map(|c| (&sums[i - 1], c))).collect();
        // `sums` holds S = −s, so the products already carry the sign of m q_m's counterpart.
        let products = graded.sum_of_products(&terms, top - (m - 1) / 2);
        let own = q.get(m - 1).map(|c| graded.scale(c, &graded.base().ratio(m as i64, 1)));
        let total = match own {
            Some(own) => graded.add(&own, &products),
            None => products,
        };
        sums.push(graded.neg(&total));
    }
    Ok(sums)
}

/// The sums at the other side of a symmetric state: S⁺_m = (−1)^m S⁻_m.
fn mirror<R: Ring>(graded: &Graded<'_, R>, sums: &[Series<R>]) -> Vec<Series<R>> {
    sums.iter().enumerate().map(|(i, s)| if i % 2 == 0 { graded.neg(s) } else { s.clone() }).collect()
}

/// Q₁ = (v − side/2 − c)·rest with c = O(h).
struct Root<R: Ring> {
    offset: Series<R>,
    rest: Vec<Series<R>>,
}

impl<R: Ring> Root<R> {
    /// Splits off the root near side/2, entry by entry: with X = Q₁[e] + Σ c[a] rest[b] over lower a and b,
    /// c[e] = −X(side/2)/rest[0](side/2) and rest[e] = (X + c[e] rest[0])/(v − side/2).
    fn split(graded: &Graded<'_, R>, q1: &GradedPolynomial<R>, side: i64) -> Result<Root<R>> {
        let ring = graded.base();
        let grading = graded.grading();
        let point = ring.ratio(side, 2);
        let size = q1[0].len();
        let start = poly::divide_by_root(ring, &q1[0], &point);
        let Some(unit) = ring.inverse(&poly::evaluate_scalar(ring, &start, &point)) else {
            return Err(Error::undefined(
                "a singular root v = 1/2 or -1/2 is a double root, which it is for no physical state over a field; use another prime",
            ));
        };
        let mut offset = graded.zero();
        let mut rest: Vec<Vec<R::Elem>> = vec![Vec::new(); grading.len()];
        rest[0] = start.clone();
        let mut acc = ring.accumulator();
        for entry in 1..grading.len() {
            let pairs: Vec<(usize, usize)> = grading
                .pairs(entry)
                .iter()
                .map(|(a, b)| (*a as usize, *b as usize))
                .filter(|(a, b)| *a != entry && !ring.is_zero(&offset[*a]) && !rest[*b].is_empty())
                .collect();
            if pairs.is_empty() && q1[entry].is_empty() {
                continue;
            }
            let mut x: Vec<R::Elem> = (0..size)
                .map(|j| {
                    for (a, b) in &pairs {
                        if let Some(c) = rest[*b].get(j) {
                            ring.accumulate(&mut acc, &offset[*a], c);
                        }
                    }
                    let sum = ring.collect(&mut acc);
                    q1[entry].get(j).map_or_else(|| sum.clone(), |c| ring.add(&sum, c))
                })
                .collect();
            let value = poly::evaluate_scalar(ring, &x, &point);
            let shift = ring.neg(&ring.mul(&value, &unit));
            for (target, c) in x.iter_mut().zip(&start) {
                *target = ring.add(target, &ring.mul(&shift, c));
            }
            offset[entry] = shift;
            rest[entry] = poly::divide_by_root(ring, &x, &point);
        }
        Ok(Root { offset, rest: columns(graded, &rest, size - 1) })
    }

    /// The root near the other side of a symmetric state.
    fn mirrored(&self, graded: &Graded<'_, R>) -> Root<R> {
        let degree = self.rest.len() - 1;
        let flip = |(j, c): (usize, &Series<R>)| if (degree - j) % 2 == 0 { c.clone() } else { graded.neg(c) };
        Root { offset: graded.neg(&self.offset), rest: self.rest.iter().enumerate().map(flip).collect() }
    }
}

/// What singular roots add: P_r ← P_r − r G Σ_k w_k F_{k−r}(c).
struct Correction<R: Ring> {
    residue: Series<R>,
    /// F_n(c), n = 0, 1, … (F_0 = 0, F_1 = 1, F_{n+1} = c F_n + h F_{n−1}).
    ladder: Vec<Series<R>>,
}

impl<R: Ring> Correction<R> {
    /// G = Q₁(3/2+c) / [W(1+c) · (Q₁/(v+½−c'))(c−½)].
    fn new(
        graded: &Graded<'_, R>,
        q1: &GradedPolynomial<R>,
        potential: &Potential<R>,
        upper: &Root<R>,
        lower: &Root<R>,
    ) -> Result<Correction<R>> {
        let ring = graded.base();
        let order = graded.grading().order();
        let mut powers = vec![graded.one()];
        while powers.len() <= order {
            powers.push(graded.mul(&powers[powers.len() - 1], &upper.offset));
        }
        // A polynomial at point + c: its Taylor coefficients at the point times powers of c = O(h).
        let at = |poly: &[Series<R>], point: (i64, i64)| {
            let taylor = poly::shift(graded, poly, &ring.ratio(point.0, point.1));
            let terms: Vec<_> = taylor.iter().zip(&powers).collect();
            graded.sum_of_products(&terms, order)
        };
        let numerator = at(&columns(graded, q1, q1[0].len()), (3, 2));
        let width = potential.polynomial()[0].len();
        let weight = at(&columns(graded, &potential.polynomial().to_vec(), width), (1, 1));
        let denominator = graded.mul(&weight, &at(&lower.rest, (-1, 2)));
        let Some(inverse) = graded.inverse(&denominator) else {
            return Err(Error::undefined(
                "the correction for singular roots divides by a non-unit, which it does for no physical state over a field; use another prime",
            ));
        };
        let mut ladder = vec![graded.zero(), graded.one()];
        let one = ring.ratio(1, 1);
        while ladder.len() < width {
            let n = ladder.len() - 1;
            let next = graded.mul(&upper.offset, &ladder[n]);
            ladder.push(graded.add(&next, &graded.times_monomial(&ladder[n - 1], 1, &[], &one)));
        }
        Ok(Correction { residue: graded.mul(&numerator, &inverse), ladder })
    }

    /// r G Σ_k w_k F_{k−r}(c) for one r.
    fn at(&self, graded: &Graded<'_, R>, potential: &Potential<R>, family: Family, r: usize, top: usize) -> Series<R> {
        let terms: Vec<_> = potential
            .modes
            .iter()
            .enumerate()
            .filter_map(|(j, mode)| family.length.checked_sub(j + r).map(|n| (mode, &self.ladder[n])))
            .collect();
        let sum = graded.sum_of_products(&terms, top);
        graded.scale(&graded.mul(&self.residue, &sum), &graded.base().ratio(r as i64, 1))
    }
}
