//! The denominators that γ_n has in powers of ω, cleared before reconstruction.
//!
//! As in perturbation theory, γ_n divides by differences of one-loop eigenvalues 2n − 3 times; with μ the minimal
//! polynomial of ω, γ_n μ'(ω)^{2n−3} had no large denominator in any family computed (an observation, not a theorem:
//! reconstruction finds the number either way). That halves the number of primes needed.

use super::Request;
use super::image::wants_finite_size;
use crate::algebra::graded::Grading;
use crate::algebra::number_field::NumberField;
use crate::algebra::poly;
use crate::algebra::ring::Ring;
use crate::chain::Orbit;
use crate::error::{Error, Result};
use rug::{Integer, Rational};

/// The loop order of each number of an image, in the sequence of [`super::image::elements`].
pub fn orders(request: &Request, grading: &Grading) -> Vec<usize> {
    let mut orders: Vec<usize> =
        (1..=request.loops).flat_map(|n| std::iter::repeat_n(n, grading.products(n - 1).len())).collect();
    if wants_finite_size(request) {
        let length = request.family.length;
        orders.extend(std::iter::repeat_n(length, 1 + (2 * length - 3) / 2));
    }
    orders
}

/// μ'(ω)^{2n−3} for n = 0 … `loops` (1 for n < 2).
pub fn weights<R: Ring>(ring: &R, orbit: &Orbit, omega: &R::Elem, loops: usize) -> Vec<R::Elem> {
    let slope: Vec<R::Elem> = slope(orbit).iter().map(|c| ring.constant(&ring.scalar(&Rational::from(c)))).collect();
    let slope = poly::evaluate(ring, &slope, omega);
    let square = ring.mul(&slope, &slope);
    let mut weights = vec![ring.one(), ring.one(), slope];
    while weights.len() <= loops {
        weights.push(ring.mul(&weights[weights.len() - 1], &square));
    }
    weights
}

/// The coefficients of μ'.
fn slope(orbit: &Orbit) -> Vec<Integer> {
    orbit.minimal.iter().enumerate().skip(1).map(|(i, c)| Integer::from(c * i as u32)).collect()
}

/// Undoes the weights, exactly; deg(ω)² integer multiplications for each number.
///
/// # Errors
/// μ is not squarefree, which an irreducible polynomial is.
pub fn restore(orbit: &Orbit, values: &[Rational], orders: &[usize]) -> Result<Vec<Rational>> {
    let degree = orbit.degree();
    if degree == 1 {
        return Ok(values.to_vec());
    }
    let field = NumberField::new(orbit.minimal.iter().map(Rational::from).collect());
    let slope = field.element(&slope(orbit).iter().map(Rational::from).collect::<Vec<_>>());
    let inverse = field.inverse(&slope).ok_or_else(|| {
        Error::check(format!("orbit {}: its minimal polynomial is not squarefree; please report this family", orbit.label))
    })?;
    let inverse = Fraction::new(&field.coefficients(&inverse));
    let square = inverse.mul(&inverse, &orbit.minimal);
    let mut powers = vec![None, None, Some(inverse)];
    let mut result = Vec::with_capacity(values.len());
    for (value, order) in values.chunks(degree).zip(orders) {
        while powers.len() <= *order {
            let last = powers[powers.len() - 1].as_ref().map(|last: &Fraction| last.mul(&square, &orbit.minimal));
            powers.push(last);
        }
        match &powers[*order] {
            None => result.extend_from_slice(value),
            Some(power) => result.extend(Fraction::new(value).mul(power, &orbit.minimal).into_rationals()),
        }
    }
    Ok(result)
}

/// An element of Q[x]/μ as integer coefficients over one denominator, without common factor.
#[derive(Clone)]
struct Fraction {
    numerators: Vec<Integer>,
    denominator: Integer,
}

impl Fraction {
    fn new(coefficients: &[Rational]) -> Fraction {
        let denominator = coefficients.iter().fold(Integer::from(1), |lcm, c| lcm.lcm(c.denom()));
        let numerators =
            coefficients.iter().map(|c| Integer::from(&denominator / c.denom()) * c.numer()).collect();
        Fraction { numerators, denominator }
    }

    fn mul(&self, other: &Fraction, monic: &[Integer]) -> Fraction {
        let degree = monic.len() - 1;
        let mut product = vec![Integer::new(); 2 * degree - 1];
        for (i, a) in self.numerators.iter().enumerate() {
            for (j, b) in other.numerators.iter().enumerate() {
                product[i + j] += a * b;
            }
        }
        for top in (degree..product.len()).rev() {
            let lead = std::mem::take(&mut product[top]);
            for (i, c) in monic[..degree].iter().enumerate() {
                product[top - degree + i] -= &lead * c;
            }
        }
        product.truncate(degree);
        let mut denominator = Integer::from(&self.denominator * &other.denominator);
        let common = product.iter().fold(denominator.clone(), |gcd, c| gcd.gcd(c));
        if common != 1 {
            product.iter_mut().for_each(|c| c.div_exact_mut(&common));
            denominator.div_exact_mut(&common);
        }
        Fraction { numerators: product, denominator }
    }

    fn into_rationals(self) -> Vec<Rational> {
        let denominator = self.denominator;
        self.numerators.into_iter().map(|n| Rational::from((n, denominator.clone()))).collect()
    }
}
