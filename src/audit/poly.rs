//! Polynomials in one variable over a number field, as integers over one common denominator.
//!
//! A coefficient is a list of integers, the coordinates in powers of the integral generator of the
//! [`Field`](super::field::Field), without trailing zeros: a rational coefficient has one entry, zero
//! has none. So a rational polynomial costs what it would cost over Q, and one gcd per polynomial
//! replaces one per rational.

use num_bigint::BigInt;
use num_integer::Integer as _;
use num_rational::BigRational;
use num_traits::{One, Signed, Zero};

/// Σ_j (Σ_k `coefficients[j][k]` y^k) v^j / `denominator`, in lowest terms: comparable with `==`.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Poly {
    coefficients: Vec<Vec<BigInt>>,
    denominator: BigInt,
}

/// gcd with a division first, which matters when one argument is much longer.
pub fn gcd(a: &BigInt, b: &BigInt) -> BigInt {
    let (long, short) = if a.bits() < b.bits() { (b, a) } else { (a, b) };
    if short.is_zero() { long.abs() } else { (long % short).gcd(short) }
}

/// The least common multiple of positive numbers.
pub fn lcm(a: &BigInt, b: &BigInt) -> BigInt {
    if a == b { a.clone() } else { a / gcd(a, b) * b }
}

impl Poly {
    /// From coordinates over a denominator, brought to lowest terms.
    pub fn new(mut coefficients: Vec<Vec<BigInt>>, denominator: BigInt) -> Poly {
        for coefficient in &mut coefficients {
            while coefficient.last().is_some_and(Zero::is_zero) {
                coefficient.pop();
            }
        }
        while coefficients.last().is_some_and(Vec::is_empty) {
            coefficients.pop();
        }
        let mut content = denominator.clone();
        for entry in coefficients.iter().flatten() {
            if content.is_one() {
                break;
            }
            if !entry.is_zero() {
                content = gcd(&content, entry);
            }
        }
        if coefficients.is_empty() {
            return Poly { coefficients, denominator: BigInt::one() };
        }
        if denominator.is_negative() {
            content = -content;
        }
        if !content.is_one() {
            for entry in coefficients.iter_mut().flatten() {
                *entry /= &content;
            }
        }
        Poly { coefficients, denominator: denominator / content }
    }

    /// 0.
    pub fn zero() -> Poly {
        Poly { coefficients: Vec::new(), denominator: BigInt::one() }
    }

    /// 1.
    pub fn one() -> Poly {
        Poly::integer(1)
    }

    /// An integer constant.
    pub fn integer(value: i64) -> Poly {
        Poly::new(vec![vec![BigInt::from(value)]], BigInt::one())
    }

    /// A rational constant.
    pub fn rational(value: &BigRational) -> Poly {
        Poly::new(vec![vec![value.numer().clone()]], value.denom().clone())
    }

    /// A polynomial with rational coefficients, constant term first.
    pub fn from_rationals(values: &[BigRational]) -> Poly {
        let denominator = values.iter().fold(BigInt::one(), |d, value| lcm(&d, value.denom()));
        let scaled = values.iter().map(|value| vec![value.numer() * (&denominator / value.denom())]).collect();
        Poly::new(scaled, denominator)
    }

    /// Σ_j c_j v^j from constants c_j.
    pub fn from_constants(constants: &[Poly]) -> Poly {
        let denominator = constants.iter().fold(BigInt::one(), |d, c| lcm(&d, &c.denominator));
        let scaled = constants
            .iter()
            .map(|c| {
                let factor = &denominator / &c.denominator;
                c.coefficients.first().map_or(Vec::new(), |entries| entries.iter().map(|e| e * &factor).collect())
            })
            .collect();
        Poly::new(scaled, denominator)
    }

    /// The coordinates of the coefficients.
    pub fn coefficients(&self) -> &[Vec<BigInt>] {
        &self.coefficients
    }

    /// The denominator, positive.
    pub fn denominator(&self) -> &BigInt {
        &self.denominator
    }

    /// Whether this is 0.
    pub fn is_zero(&self) -> bool {
        self.coefficients.is_empty()
    }

    /// One more than the degree; 0 for the zero polynomial.
    pub fn len(&self) -> usize {
        self.coefficients.len()
    }

    /// The coefficient of v^j as a constant.
    pub fn coefficient(&self, j: usize) -> Poly {
        match self.coefficients.get(j) {
            Some(entries) => Poly::new(vec![entries.clone()], self.denominator.clone()),
            None => Poly::zero(),
        }
    }

    /// Σ (rational) × (polynomial).
    pub fn combine(parts: &[(BigRational, &Poly)]) -> Poly {
        let denominator = parts.iter().fold(BigInt::one(), |d, (q, p)| lcm(&d, &(q.denom() * &p.denominator)));
        let mut sum: Vec<Vec<BigInt>> = Vec::new();
        for (factor, part) in parts {
            let multiple = factor.numer() * (&denominator / (factor.denom() * &part.denominator));
            if sum.len() < part.len() {
                sum.resize(part.len(), Vec::new());
            }
            for (target, entries) in sum.iter_mut().zip(&part.coefficients) {
                if target.len() < entries.len() {
                    target.resize(entries.len(), BigInt::zero());
                }
                for (t, e) in target.iter_mut().zip(entries) {
                    *t += e * &multiple;
                }
            }
        }
        Poly::new(sum, denominator)
    }

    /// Sum.
    pub fn add(&self, other: &Poly) -> Poly {
        Poly::combine(&[(BigRational::one(), self), (BigRational::one(), other)])
    }

    /// Difference.
    pub fn sub(&self, other: &Poly) -> Poly {
        Poly::combine(&[(BigRational::one(), self), (-BigRational::one(), other)])
    }

    /// Multiple by a rational.
    pub fn scale(&self, factor: &BigRational) -> Poly {
        Poly::combine(&[(factor.clone(), self)])
    }

    /// The negative.
    pub fn negate(&self) -> Poly {
        self.scale(&-BigRational::one())
    }

    /// Multiple by v^k.
    pub fn times_power(&self, k: usize) -> Poly {
        if self.is_zero() {
            return Poly::zero();
        }
        let mut coefficients = vec![Vec::new(); k];
        coefficients.extend(self.coefficients.iter().cloned());
        Poly { coefficients, denominator: self.denominator.clone() }
    }

    /// d/dv.
    pub fn derivative(&self) -> Poly {
        let coefficients = self.coefficients.iter().enumerate().skip(1);
        let scaled = coefficients.map(|(j, entries)| entries.iter().map(|e| e * j).collect()).collect();
        Poly::new(scaled, self.denominator.clone())
    }

    /// p(v + a).
    pub fn shift(&self, a: &BigRational) -> Poly {
        // Horner with p(v + n/m) m^k scaled to integers: the coefficient of v^j gains m^j at the end.
        let (n, m) = (a.numer(), a.denom());
        let top = self.len().saturating_sub(1);
        let mut work = self.coefficients.clone();
        let mut power = BigInt::one();
        for entries in work.iter_mut().rev() {
            entries.iter_mut().for_each(|e| *e *= &power);
            power *= m;
        }
        for start in 0..top {
            for j in (start..top).rev() {
                let (low, high) = work.split_at_mut(j + 1);
                let (target, source) = (&mut low[j], &high[0]);
                if target.len() < source.len() {
                    target.resize(source.len(), BigInt::zero());
                }
                for (t, s) in target.iter_mut().zip(source) {
                    *t += s * n;
                }
            }
        }
        let mut power = BigInt::one();
        for entries in &mut work {
            entries.iter_mut().for_each(|e| *e *= &power);
            power *= m;
        }
        let mut denominator = self.denominator.clone();
        for _ in 0..top {
            denominator *= m;
        }
        Poly::new(work, denominator)
    }

    /// p(a) at a rational point.
    pub fn at(&self, a: &BigRational) -> Poly {
        let mut value = Poly::zero();
        for j in (0..self.len()).rev() {
            value = value.scale(a).add(&self.coefficient(j));
        }
        value
    }

    /// p(−v).
    pub fn mirror(&self) -> Poly {
        let mut result = self.clone();
        for entries in result.coefficients.iter_mut().skip(1).step_by(2) {
            entries.iter_mut().for_each(|e| *e = -std::mem::take(e));
        }
        result
    }
}

/// The rational n/d.
pub fn ratio(n: i64, d: i64) -> BigRational {
    BigRational::new(BigInt::from(n), BigInt::from(d))
}

/// binom(n, k) for any integer n and k ≥ 0.
pub fn binomial(n: i64, k: usize) -> BigInt {
    let mut value = BigInt::one();
    for i in 0..k as i64 {
        value = value * (n - i) / (i + 1);
    }
    value
}

#[cfg(test)]
mod tests {
    use super::{Poly, binomial, ratio};
    use num_bigint::BigInt;

    #[test]
    fn shifting_agrees_with_evaluation() {
        let p = Poly::from_rationals(&[ratio(1, 3), ratio(-2, 1), ratio(5, 4), ratio(1, 1)]);
        let shifted = p.shift(&ratio(-3, 2));
        for point in [ratio(0, 1), ratio(7, 5), ratio(-4, 1)] {
            assert_eq!(shifted.at(&point), p.at(&(point - ratio(3, 2))));
        }
        assert_eq!(p.shift(&ratio(1, 2)).shift(&ratio(-1, 2)), p);
    }

    #[test]
    fn binomials_of_negative_numbers() {
        assert_eq!(binomial(-3, 2), BigInt::from(6));
        assert_eq!(binomial(5, 2), BigInt::from(10));
        assert_eq!(binomial(2, 3), BigInt::from(0));
    }
}
