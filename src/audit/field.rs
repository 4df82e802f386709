//! The number field K = Q\[x\]/f of an orbit: products, inverses, linear systems.
//!
//! Inside, the generator is y = D x, with D the common denominator of f, so that its minimal
//! polynomial is monic with integer coefficients and products need no division.

use super::poly::{Poly, lcm};
use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::{One, Signed, Zero};

/// K = Q\[x\]/f; a field once f is proved irreducible, a ring in any case.
pub struct Field {
    degree: usize,
    /// The minimal polynomial of y without its leading 1.
    modulus: Vec<BigInt>,
    /// D in y = D x.
    scale: BigInt,
}

/// The monic integer polynomial D^d f(y/D), constant term first, and D.
pub fn integral(polynomial: &[BigRational]) -> (Vec<BigInt>, BigInt) {
    let scale = polynomial.iter().fold(BigInt::one(), |d, c| lcm(&d, c.denom()));
    let degree = polynomial.len().saturating_sub(1);
    let scaled = polynomial
        .iter()
        .enumerate()
        .map(|(k, c)| (c * BigRational::from(num_traits::pow(scale.clone(), degree - k))).to_integer())
        .collect();
    (scaled, scale)
}

impl Field {
    /// K from the monic polynomial f, constant term first, of degree at least 1.
    pub fn new(polynomial: &[BigRational]) -> Field {
        let (mut modulus, scale) = integral(polynomial);
        modulus.pop();
        Field { degree: modulus.len(), modulus, scale }
    }

    /// The degree of K over Q.
    pub fn degree(&self) -> usize {
        self.degree
    }

    /// The minimal polynomial of y, constant term first.
    pub fn minimal(&self) -> Vec<BigInt> {
        let mut minimal = self.modulus.clone();
        minimal.push(BigInt::one());
        minimal
    }

    /// y.
    pub fn generator(&self) -> Poly {
        Poly::new(vec![self.reduce(vec![BigInt::zero(), BigInt::one()])], BigInt::one())
    }

    /// Σ c_k x^k as a constant.
    pub fn element(&self, coordinates: &[BigRational]) -> Poly {
        let mut power = BigInt::one();
        let mut scaled = Vec::with_capacity(coordinates.len());
        for c in coordinates {
            scaled.push(c / BigRational::from(power.clone()));
            power *= &self.scale;
        }
        let denominator = scaled.iter().fold(BigInt::one(), |d, c| lcm(&d, c.denom()));
        let entries = scaled.iter().map(|c| c.numer() * (&denominator / c.denom())).collect();
        Poly::new(vec![self.reduce(entries)], denominator)
    }

    /// The coordinates of a constant in powers of x.
    pub fn coordinates(&self, constant: &Poly) -> Vec<BigRational> {
        let mut power = BigInt::one();
        let entries = constant.coefficients().first().map_or(&[][..], Vec::as_slice);
        let mut result = Vec::with_capacity(self.degree);
        for k in 0..self.degree {
            let entry = entries.get(k).cloned().unwrap_or_default();
            result.push(BigRational::new(entry * &power, constant.denominator().clone()));
            power *= &self.scale;
        }
        result
    }

    /// The remainder of Σ wide_k y^k modulo the minimal polynomial of y.
    fn reduce(&self, mut wide: Vec<BigInt>) -> Vec<BigInt> {
        while wide.len() > self.degree {
            let Some(top) = wide.pop() else { break };
            if top.is_zero() {
                continue;
            }
            let start = wide.len() - self.degree;
            for (target, m) in wide[start..].iter_mut().zip(&self.modulus) {
                if !m.is_zero() {
                    *target -= &top * m;
                }
            }
        }
        wide
    }

    /// Σ a·b over the pairs, modulo v^limit. One reduction modulo f and one gcd for the whole sum.
    pub fn dot(&self, pairs: &[(&Poly, &Poly)], limit: usize) -> Poly {
        let pairs: Vec<_> = pairs.iter().filter(|(a, b)| !a.is_zero() && !b.is_zero()).collect();
        let denominator = pairs.iter().fold(BigInt::one(), |d, (a, b)| lcm(&d, &(a.denominator() * b.denominator())));
        let length = pairs.iter().map(|(a, b)| a.len() + b.len() - 1).max().unwrap_or(0).min(limit);
        let mut sum: Vec<Vec<BigInt>> = vec![Vec::new(); length];
        for (a, b) in pairs {
            let (a, b) = if a.len() <= b.len() { (a, b) } else { (b, a) };
            let factor = &denominator / (a.denominator() * b.denominator());
            for (i, left) in a.coefficients().iter().enumerate() {
                for x in left.iter().enumerate().filter(|(_, x)| !x.is_zero()) {
                    let (k, x) = (x.0, if factor.is_one() { x.1.clone() } else { x.1 * &factor });
                    for (j, right) in b.coefficients().iter().enumerate().take(length.saturating_sub(i)) {
                        if right.is_empty() {
                            continue;
                        }
                        let target = &mut sum[i + j];
                        if target.len() < k + right.len() {
                            target.resize(k + right.len(), BigInt::zero());
                        }
                        for (t, y) in target[k..].iter_mut().zip(right) {
                            if !y.is_zero() {
                                *t += &x * y;
                            }
                        }
                    }
                }
            }
        }
        Poly::new(sum.into_iter().map(|wide| self.reduce(wide)).collect(), denominator)
    }

    /// a·b.
    pub fn mul(&self, a: &Poly, b: &Poly) -> Poly {
        self.dot(&[(a, b)], usize::MAX)
    }

    /// p(a) at a constant a.
    pub fn at(&self, p: &Poly, a: &Poly) -> Poly {
        let mut value = Poly::zero();
        for j in (0..p.len()).rev() {
            value = self.mul(&value, a).add(&p.coefficient(j));
        }
        value
    }

    /// 1/a for a constant; `None` for 0 and for zero divisors. Cost: d³ products of integers.
    pub fn inverse(&self, a: &Poly) -> Option<Poly> {
        let entries = a.coefficients().first()?;
        // Columns: a·y^k; solve Σ z_k a y^k = 1.
        let mut columns = Vec::with_capacity(self.degree);
        let mut column = entries.clone();
        for _ in 0..self.degree {
            column.resize(self.degree, BigInt::zero());
            columns.push(column.clone());
            column.insert(0, BigInt::zero());
            column = self.reduce(column);
        }
        let mut rows: Vec<Vec<BigInt>> =
            (0..self.degree).map(|i| columns.iter().map(|column| column[i].clone()).collect()).collect();
        for (i, row) in rows.iter_mut().enumerate() {
            row.push(if i == 0 { a.denominator().clone() } else { BigInt::zero() });
        }
        let (solution, determinant) = solve_integer(rows)?;
        Some(Poly::new(vec![solution], determinant))
    }

    /// Power series 1/p modulo v^limit; `None` when the constant term has no inverse.
    pub fn series_inverse(&self, p: &Poly, limit: usize) -> Option<Poly> {
        let first = self.inverse(&p.coefficient(0))?;
        let minus: Vec<Poly> = (0..p.len()).map(|j| self.mul(&p.coefficient(j), &first).negate()).collect();
        let mut result = vec![first];
        for n in 1..limit {
            let pairs: Vec<_> =
                (1..=n.min(minus.len().saturating_sub(1))).map(|j| (&minus[j], &result[n - j])).collect();
            let next = self.dot(&pairs, usize::MAX);
            result.push(next);
        }
        result.truncate(limit);
        Some(Poly::from_constants(&result))
    }
}

/// Solves a square integer system with the right side as last column, fraction-free (Bareiss):
/// numerators and their common denominator.
pub fn solve_integer(mut rows: Vec<Vec<BigInt>>) -> Option<(Vec<BigInt>, BigInt)> {
    let n = rows.len();
    let mut previous = BigInt::one();
    for k in 0..n {
        let pivot = (k..n).find(|&i| !rows[i][k].is_zero())?;
        rows.swap(k, pivot);
        let row = rows[k].clone();
        for (i, other) in rows.iter_mut().enumerate() {
            if i == k {
                continue;
            }
            let factor = other[k].clone();
            for j in 0..=n {
                other[j] = (&row[k] * &other[j] - &factor * &row[j]) / &previous;
            }
        }
        previous = row[k].clone();
    }
    // Now every diagonal entry is the determinant (up to the sign of the row exchanges).
    let sign = if previous.is_negative() { -BigInt::one() } else { BigInt::one() };
    Some((rows.into_iter().map(|mut row| row.pop().unwrap_or_default() * &sign).collect(), previous.abs()))
}

#[cfg(test)]
mod tests {
    use super::{Field, solve_integer};
    use crate::audit::poly::{Poly, ratio};
    use num_bigint::BigInt;

    /// x³ − 40x² + 464x − 1600 (L = 8, M = 4; BO), and the same with x halved: not integral.
    fn fields() -> [Field; 2] {
        [
            Field::new(&[ratio(-1600, 1), ratio(464, 1), ratio(-40, 1), ratio(1, 1)]),
            Field::new(&[ratio(-1, 7), ratio(2, 3), ratio(-1, 2), ratio(1, 1)]),
        ]
    }

    #[test]
    fn inverses_and_coordinates() {
        for field in fields() {
            let coordinates = [ratio(1, 2), ratio(-3, 1), ratio(5, 7)];
            let a = field.element(&coordinates);
            assert_eq!(field.coordinates(&a), coordinates);
            assert_eq!(field.mul(&a, &field.inverse(&a).unwrap()), Poly::one());
            assert!(field.inverse(&Poly::zero()).is_none());
            let p = Poly::from_constants(&[a.clone(), Poly::integer(3), a.clone()]);
            let inverse = field.series_inverse(&p, 6).unwrap();
            assert_eq!(field.dot(&[(&p, &inverse)], 6), Poly::one());
        }
    }

    #[test]
    fn the_generator_is_a_root() {
        let [_, field] = fields();
        let x = field.element(&[ratio(0, 1), ratio(1, 1)]);
        let f = Poly::from_rationals(&[ratio(-1, 7), ratio(2, 3), ratio(-1, 2), ratio(1, 1)]);
        assert!(field.at(&f, &x).is_zero());
    }

    #[test]
    fn systems() {
        let rows = [[0, 2, 6], [3, 1, 9]].map(|row| row.map(BigInt::from).to_vec()).to_vec();
        let (solution, denominator) = solve_integer(rows).unwrap();
        assert_eq!(solution, [&denominator * 2, &denominator * 3]);
    }
}
