//! Power series in the coupling h with zeta values as independent symbols; coefficients are
//! polynomials (or constants) over K.

use super::field::Field;
use super::poly::Poly;
use num_rational::BigRational;
use num_traits::One;
use rayon::prelude::{IntoParallelIterator, ParallelIterator};
use std::collections::BTreeMap;

/// A product of odd zeta values: arguments ascending, repeated for powers.
pub type Monomial = Vec<u32>;

/// Σ h^n ζ-monomial × polynomial; no zero entries.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Graded {
    terms: BTreeMap<(usize, Monomial), Poly>,
}

impl Graded {
    /// 0.
    pub fn zero() -> Graded {
        Graded::default()
    }

    /// h^order × monomial × polynomial.
    pub fn term(order: usize, monomial: Monomial, poly: Poly) -> Graded {
        let mut result = Graded::zero();
        result.set(order, monomial, poly);
        result
    }

    /// A polynomial at h⁰.
    pub fn constant(poly: Poly) -> Graded {
        Graded::term(0, Monomial::new(), poly)
    }

    /// Replaces one entry.
    pub fn set(&mut self, order: usize, monomial: Monomial, poly: Poly) {
        if poly.is_zero() {
            self.terms.remove(&(order, monomial));
        } else {
            self.terms.insert((order, monomial), poly);
        }
    }

    /// The entries in order.
    pub fn terms(&self) -> impl Iterator<Item = (&(usize, Monomial), &Poly)> {
        self.terms.iter()
    }

    /// The entries at one order.
    pub fn order(&self, order: usize) -> BTreeMap<Monomial, Poly> {
        self.terms
            .range((order, Vec::new())..(order + 1, Vec::new()))
            .map(|((_, m), p)| (m.clone(), p.clone()))
            .collect()
    }

    /// The entry at h⁰ without zeta values.
    pub fn leading(&self) -> Poly {
        self.terms.get(&(0, Monomial::new())).cloned().unwrap_or_else(Poly::zero)
    }

    /// Every entry through a linear map.
    pub fn map(&self, f: impl Fn(&Poly) -> Poly) -> Graded {
        let mut result = Graded::zero();
        for ((order, monomial), poly) in &self.terms {
            result.set(*order, monomial.clone(), f(poly));
        }
        result
    }

    /// Multiple by a rational.
    pub fn scale(&self, factor: &BigRational) -> Graded {
        self.map(|poly| poly.scale(factor))
    }

    /// Multiple by h^k, keeping orders below `orders`.
    pub fn times_h(&self, k: usize, orders: usize) -> Graded {
        let kept = self.terms.iter().filter(|((order, _), _)| order + k < orders);
        Graded { terms: kept.map(|((order, m), p)| ((order + k, m.clone()), p.clone())).collect() }
    }

    /// Orders below `orders`.
    pub fn truncate(&self, orders: usize) -> Graded {
        self.times_h(0, orders)
    }

    /// Σ (rational) × (series).
    pub fn combine(parts: &[(BigRational, &Graded)]) -> Graded {
        let mut lists: BTreeMap<&(usize, Monomial), Vec<(BigRational, &Poly)>> = BTreeMap::new();
        for (factor, part) in parts {
            for (key, poly) in &part.terms {
                lists.entry(key).or_default().push((factor.clone(), poly));
            }
        }
        let mut result = Graded::zero();
        for ((order, monomial), list) in lists {
            result.set(*order, monomial.clone(), Poly::combine(&list));
        }
        result
    }

    /// Sum.
    pub fn add(&self, other: &Graded) -> Graded {
        Graded::combine(&[(BigRational::one(), self), (BigRational::one(), other)])
    }

    /// Difference.
    pub fn sub(&self, other: &Graded) -> Graded {
        Graded::combine(&[(BigRational::one(), self), (-BigRational::one(), other)])
    }

    /// Σ a·b over the pairs, orders below `orders`; entries of the result in parallel.
    pub fn dot(field: &Field, pairs: &[(&Graded, &Graded)], orders: usize) -> Graded {
        let mut lists: BTreeMap<(usize, Monomial), Vec<(&Poly, &Poly)>> = BTreeMap::new();
        for (a, b) in pairs {
            for ((n, left), p) in &a.terms {
                for ((m, right), q) in &b.terms {
                    if n + m >= orders {
                        break;
                    }
                    lists.entry((n + m, merge(left, right))).or_default().push((p, q));
                }
            }
        }
        let lists: Vec<_> = lists.into_iter().collect();
        let products: Vec<_> = lists.into_par_iter().map(|(key, list)| (key, field.dot(&list, usize::MAX))).collect();
        Graded { terms: products.into_iter().filter(|(_, poly)| !poly.is_zero()).collect() }
    }

    /// a·b, orders below `orders`.
    pub fn mul(&self, field: &Field, other: &Graded, orders: usize) -> Graded {
        Graded::dot(field, &[(self, other)], orders)
    }

    /// 1/a for a series of constants, orders below `orders`; `None` when the leading one has no inverse.
    pub fn inverse(&self, field: &Field, orders: usize) -> Option<Graded> {
        let first = Graded::constant(field.inverse(&self.leading())?);
        let rest = self.sub(&Graded::constant(self.leading())).mul(field, &first, orders);
        // 1/(f(1+ρ)) = f⁻¹ Σ (−ρ)^k, by doubling the number of correct orders: x ← x + x(1 − a x).
        let minus = rest.scale(&-BigRational::one());
        let one = Graded::constant(Poly::one());
        let mut geometric = one.clone();
        let mut correct = 1;
        while correct < orders {
            correct = (2 * correct).min(orders);
            let residue = Graded::dot(field, &[(&minus, &geometric)], correct).add(&one).sub(&geometric);
            geometric = geometric.add(&geometric.mul(field, &residue, correct));
        }
        Some(geometric.mul(field, &first, orders))
    }

    /// The coefficients of v⁰, v¹, … as series of constants, at least `length` of them.
    pub fn coefficients(&self, length: usize) -> Vec<Graded> {
        let length = self.terms.values().map(Poly::len).max().unwrap_or(0).max(length);
        (0..length).map(|j| self.map(|poly| poly.coefficient(j))).collect()
    }

    /// p(a) at a series a of constants.
    pub fn at(&self, field: &Field, a: &Graded, orders: usize) -> Graded {
        let mut value = Graded::zero();
        for coefficient in self.coefficients(0).iter().rev() {
            value = value.mul(field, a, orders).add(&coefficient.truncate(orders));
        }
        value
    }
}

/// The product of two monomials.
pub fn merge(left: &[u32], right: &[u32]) -> Monomial {
    let mut product: Monomial = left.iter().chain(right).copied().collect();
    product.sort_unstable();
    product
}

#[cfg(test)]
mod tests {
    use super::Graded;
    use crate::audit::field::Field;
    use crate::audit::poly::{Poly, ratio};

    #[test]
    fn inverse_of_a_series() {
        let field = Field::new(&[ratio(-2, 1), ratio(0, 1), ratio(1, 1)]);
        let root = field.element(&[ratio(0, 1), ratio(1, 1)]);
        let a = Graded::constant(root.clone()).add(&Graded::term(1, vec![], Poly::integer(3))).add(&Graded::term(
            3,
            vec![3],
            root.clone(),
        ));
        let inverse = a.inverse(&field, 7).unwrap();
        assert_eq!(a.mul(&field, &inverse, 7), Graded::constant(Poly::one()));
        // At h⁶ the square of ζ3 must appear.
        assert!(inverse.order(6).contains_key(&vec![3, 3]));
    }
}
