//! The one-loop pair of Baxter polynomials from the transfer-matrix eigenvalue (formulas §1).

use crate::algebra::ring::Ring;
use crate::error::{Error, Result};
use crate::family::Family;
use rug::Rational;

/// Q₁ (monic, degree M) and Q₂ (monic, degree L − M + 1, no v^M term), coefficients of v^j.
#[derive(Clone, Debug, PartialEq)]
pub struct Pair<E> {
    /// Q₁: M + 1 coefficients.
    pub q1: Vec<E>,
    /// Q₂: L − M + 2 coefficients.
    pub q2: Vec<E>,
}

/// Solves T Q = (v+½)^L Q(v−1) + (v−½)^L Q(v+1) from the top coefficient down.
///
/// With T = Σ t_j v^j, the coefficient of v^{L+j−2} gives (j−M)(L+1−M−j) q_j in terms of higher ones,
/// where only the integer factor is divided by; about L²/2 ring multiplications for each polynomial.
///
/// # Errors
/// A check failure when the equation has no polynomial solution, so that T cannot be an eigenvalue.
pub fn one_loop<R: Ring>(ring: &R, family: Family, transfer: &[R::Elem]) -> Result<Pair<R::Elem>> {
    let Family { length, magnons } = family;
    let q1 = solve(ring, family, transfer, magnons)?;
    let q2 = solve(ring, family, transfer, length - magnons + 1)?;
    Ok(Pair { q1, q2 })
}

fn solve<R: Ring>(ring: &R, family: Family, transfer: &[R::Elem], degree: usize) -> Result<Vec<R::Elem>> {
    let Family { length, magnons } = family;
    let columns: Vec<Vec<R::Scalar>> = (0..=degree).map(|i| shifts(ring, length, i)).collect();
    let mut q = vec![ring.zero(); degree + 1];
    q[degree] = ring.one();
    // Coefficient of v^k of T Q − (v+½)^L Q(v−1) − (v−½)^L Q(v+1), from the q_i known so far.
    let residual = |q: &[R::Elem], k: usize| {
        let mut acc = ring.accumulator();
        for (i, c) in q.iter().enumerate() {
            if k >= i && k - i <= length {
                ring.accumulate(&mut acc, &transfer[k - i], c);
            }
        }
        let mut sum = ring.collect(&mut acc);
        for (c, column) in q.iter().zip(&columns) {
            if let Some(weight) = column.get(k) {
                sum = ring.sub(&sum, &ring.scale(c, weight));
            }
        }
        sum
    };
    for j in (0..degree).rev() {
        let factor = (j as i64 - magnons as i64) * (length as i64 + 1 - magnons as i64 - j as i64);
        if j + length < 2 {
            continue;
        }
        let rest = residual(&q, length + j - 2);
        if factor != 0 {
            q[j] = ring.scale(&rest, &ring.ratio(-1, factor));
        }
    }
    for k in 0..=length + degree {
        if !ring.is_zero(&residual(&q, k)) {
            return Err(Error::check(format!(
                "family {family}: the Baxter equation has no polynomial solution of degree {degree}; please report this family"
            )));
        }
    }
    Ok(q)
}

/// Coefficients of (v+½)^L (v−1)^i + (v−½)^L (v+1)^i.
fn shifts<R: Ring>(ring: &R, length: usize, i: usize) -> Vec<R::Scalar> {
    let mut sum = vec![Rational::new(); length + i + 1];
    for (a, b) in [((1, 2), (-1, 1)), ((-1, 2), (1, 1))] {
        let left = binomial_power(Rational::from(a), length);
        let right = binomial_power(Rational::from(b), i);
        for (x, c) in left.iter().enumerate() {
            for (y, d) in right.iter().enumerate() {
                sum[x + y] += Rational::from(c * d);
            }
        }
    }
    sum.iter().map(|c| ring.scalar(c)).collect()
}

/// Coefficients of (v + c)^n.
pub fn binomial_power(c: Rational, n: usize) -> Vec<Rational> {
    use rug::Integer;
    use rug::ops::Pow;
    (0..=n)
        .map(|k| {
            let binomial = Integer::from(Integer::binomial_u(n as u32, k as u32));
            Rational::from(Rational::from((&c).pow((n - k) as i32)) * binomial)
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::{Pair, one_loop};
    use crate::algebra::number_field::NumberField;
    use crate::chain::spectrum;
    use crate::family::Family;
    use crate::observer::Silent;
    use rug::Rational;

    /// L = 6, M = 3: Q = v³ − v/4, a singular state (formulas §1).
    #[test]
    fn the_singular_state_of_length_six() {
        let family = Family { length: 6, magnons: 3 };
        let orbit = &spectrum(family, &Silent).unwrap()[0];
        let field = NumberField::new(orbit.field.iter().map(Rational::from).collect());
        let image = orbit.image(&field, |p| field.element(&p.iter().map(Rational::from).collect::<Vec<_>>())).unwrap();
        let Pair { q1, q2 } = one_loop(&field, family, &image.transfer).unwrap();
        let constant = |n, d| if n == 0 { vec![] } else { vec![Rational::from((n, d))] };
        assert_eq!(q1, vec![constant(0, 1), constant(-1, 4), constant(0, 1), constant(1, 1)]);
        assert_eq!(q2.len(), 5);
        assert!(q2[3].is_empty());
    }
}
