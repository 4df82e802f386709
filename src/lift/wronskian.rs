//! The Wronskian relation Q₁⁺Q₂⁻ − Q₁⁻Q₂⁺ = (2M−L−1) W, linearised order by order (formulas §3).

use super::GradedPolynomial;
use super::potential::Potential;
use crate::algebra::graded::Grading;
use crate::algebra::linear;
use crate::algebra::poly;
use crate::algebra::ring::Ring;
use crate::baxter::{Pair, binomial_power};
use crate::error::{Error, Result};
use crate::family::Family;
use rug::Rational;

/// The pair as far as it is lifted, its shifts, and the inverse of the linear system.
///
/// For a symmetric state Q₁⁻Q₂⁺(v) = (−1)^{L+1} (Q₁⁺Q₂⁻)(−v), so the relation reads 2 Q₁⁺Q₂⁻ = (2M−L−1) W
/// on the powers v^k with k ≡ L mod 2, and only those, and coefficients of the right parity, are kept.
pub struct Wronskian<'a, R: Ring> {
    ring: &'a R,
    family: Family,
    symmetric: bool,
    /// Q₁ and Q₂.
    pub q1: GradedPolynomial<R>,
    pub q2: GradedPolynomial<R>,
    /// Q₁(v+½), Q₁(v−½), Q₂(v+½), Q₂(v−½); for symmetric states only the first and the last.
    q1_up: GradedPolynomial<R>,
    q1_down: GradedPolynomial<R>,
    q2_up: GradedPolynomial<R>,
    q2_down: GradedPolynomial<R>,
    powers: Vec<usize>,
    unknowns: Vec<Unknown>,
    inverse: Vec<Vec<R::Elem>>,
}

/// The coefficient of v^j in δQ₁ or δQ₂.
#[derive(Clone, Copy)]
enum Unknown {
    First(usize),
    Second(usize),
}

impl<'a, R: Ring> Wronskian<'a, R> {
    /// The relation at one loop, with its linearisation inverted: about L³ multiplications, an eighth of
    /// that for symmetric states.
    pub fn new(
        ring: &'a R,
        family: Family,
        grading: &Grading,
        pair: &Pair<R::Elem>,
        symmetric: bool,
    ) -> Result<Wronskian<'a, R>> {
        let Family { length, magnons } = family;
        let wanted = |j: usize, degree: usize| !symmetric || (degree - j).is_multiple_of(2);
        let powers: Vec<usize> = (0..length).filter(|k| wanted(*k, length)).collect();
        let mut unknowns: Vec<Unknown> = (0..magnons).filter(|j| wanted(*j, magnons)).map(Unknown::First).collect();
        let top = length - magnons + 1;
        unknowns.extend((0..top).filter(|j| *j != magnons && wanted(*j, top)).map(Unknown::Second));
        let mut columns = Vec::with_capacity(unknowns.len());
        let (up, down) = (ring.ratio(1, 2), ring.ratio(-1, 2));
        let empty = || vec![Vec::new(); grading.len()];
        let mut wronskian = Wronskian {
            ring,
            family,
            symmetric,
            q1: empty(),
            q2: empty(),
            q1_up: empty(),
            q1_down: empty(),
            q2_up: empty(),
            q2_down: empty(),
            powers,
            unknowns,
            inverse: Vec::new(),
        };
        wronskian.store(0, pair.q1.clone(), pair.q2.clone());
        let shifted = |poly: &[R::Elem], c: &R::Scalar| poly::shift(ring, poly, c);
        let (q1_up, q1_down) = (shifted(&pair.q1, &up), shifted(&pair.q1, &down));
        let (q2_up, q2_down) = (shifted(&pair.q2, &up), shifted(&pair.q2, &down));
        for unknown in &wronskian.unknowns {
            // δQ₁ = v^j gives (v+½)^j Q₂⁻ − (v−½)^j Q₂⁺; δQ₂ = v^j gives Q₁⁺ (v−½)^j − Q₁⁻ (v+½)^j.
            let (j, plus, minus) = match unknown {
                Unknown::First(j) => (*j, &q2_down, &q2_up),
                Unknown::Second(j) => (*j, &q1_down, &q1_up),
            };
            let sign = if matches!(unknown, Unknown::First(_)) { 1 } else { -1 };
            let powers = |c: (i32, i32)| -> Vec<R::Scalar> {
                binomial_power(Rational::from(c), j).iter().map(|c| ring.scalar(&Rational::from(c * sign))).collect()
            };
            let (forward, backward) = (powers((1, 2)), powers((-1, 2)));
            let column: Vec<R::Elem> = wronskian
                .powers
                .iter()
                .map(|k| {
                    let mut sum = ring.zero();
                    for i in 0..=j.min(*k) {
                        if let (Some(a), Some(b)) = (plus.get(k - i), minus.get(k - i)) {
                            sum = ring.add(&sum, &ring.scale(a, &forward[i]));
                            sum = ring.sub(&sum, &ring.scale(b, &backward[i]));
                        }
                    }
                    sum
                })
                .collect();
            columns.push(column);
        }
        let rows: Vec<Vec<R::Elem>> =
            (0..columns.len()).map(|i| columns.iter().map(|column| column[i].clone()).collect()).collect();
        wronskian.inverse = linear::inverse(ring, &rows).ok_or_else(|| {
            Error::undefined(format!(
                "family {family}: the linearised Wronskian relation cannot be inverted, as it can for every physical state over a field; use another prime"
            ))
        })?;
        Ok(wronskian)
    }

    /// Sets one entry of the pair and of its shifts.
    fn store(&mut self, entry: usize, q1: Vec<R::Elem>, q2: Vec<R::Elem>) {
        let (up, down) = (self.ring.ratio(1, 2), self.ring.ratio(-1, 2));
        self.q1_up[entry] = poly::shift(self.ring, &q1, &up);
        self.q2_down[entry] = poly::shift(self.ring, &q2, &down);
        if !self.symmetric {
            self.q1_down[entry] = poly::shift(self.ring, &q1, &down);
            self.q2_up[entry] = poly::shift(self.ring, &q2, &up);
        }
        self.q1[entry] = q1;
        self.q2[entry] = q2;
    }

    /// Solves order h^n, given all lower ones.
    pub fn solve(&mut self, grading: &Grading, order: usize, potential: &Potential<R>) {
        let Family { length, magnons } = self.family;
        let ring = self.ring;
        let weight = ring.ratio(2 * magnons as i64 - length as i64 - 1, if self.symmetric { 2 } else { 1 });
        for entry in grading.entries(order) {
            let product = self.products(grading, entry, &self.q1_up, &self.q2_down);
            let other = (!self.symmetric).then(|| self.products(grading, entry, &self.q1_down, &self.q2_up));
            let right: Vec<R::Elem> = self
                .powers
                .iter()
                .enumerate()
                .map(|(row, k)| {
                    let mut rest = ring.scale(potential.coefficient(entry, *k), &weight);
                    rest = ring.sub(&rest, &product[row]);
                    match &other {
                        Some(other) => ring.add(&rest, &other[row]),
                        // The linear system is the antisymmetrised one, twice the half kept here.
                        None => rest,
                    }
                })
                .collect();
            if right.iter().all(|c| ring.is_zero(c)) {
                continue;
            }
            let right = if self.symmetric {
                let two = ring.ratio(2, 1);
                right.iter().map(|c| ring.scale(c, &two)).collect()
            } else {
                right
            };
            let solution = linear::apply(ring, &self.inverse, &right);
            let mut q1 = vec![ring.zero(); magnons + 1];
            let mut q2 = vec![ring.zero(); length - magnons + 2];
            for (unknown, value) in self.unknowns.iter().zip(solution) {
                match unknown {
                    Unknown::First(j) => q1[*j] = value,
                    Unknown::Second(j) => q2[*j] = value,
                }
            }
            self.store(entry, q1, q2);
        }
    }

    /// The wanted powers of v in one entry of a product of two graded polynomials.
    fn products(
        &self,
        grading: &Grading,
        entry: usize,
        left: &GradedPolynomial<R>,
        right: &GradedPolynomial<R>,
    ) -> Vec<R::Elem> {
        let mut acc = self.ring.accumulator();
        let pairs: Vec<_> = grading
            .pairs(entry)
            .iter()
            .map(|(a, b)| (&left[*a as usize], &right[*b as usize]))
            .filter(|(a, b)| !a.is_empty() && !b.is_empty())
            .collect();
        self.powers
            .iter()
            .map(|k| {
                for (a, b) in &pairs {
                    for i in (k + 1).saturating_sub(b.len())..a.len().min(k + 1) {
                        self.ring.accumulate(&mut acc, &a[i], &b[k - i]);
                    }
                }
                self.ring.collect(&mut acc)
            })
            .collect()
    }
}
