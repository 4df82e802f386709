//! Q[x]/f, exactly: the slow second route against which the modular images are held.

use super::poly;
use super::rationals::Rationals;
use super::ring::Ring;
use rug::Rational;

/// Q[x]/f for a monic irreducible f of degree d ≥ 1. Elements are coefficient vectors without
/// trailing zeros; a product costs 2d² rational multiplications.
#[derive(Clone, Debug)]
pub struct NumberField {
    modulus: Vec<Rational>,
}

impl NumberField {
    /// The field; `modulus` holds the coefficients of f, constant first, monic.
    pub fn new(modulus: Vec<Rational>) -> NumberField {
        NumberField { modulus }
    }

    /// d.
    pub fn degree(&self) -> usize {
        self.modulus.len() - 1
    }

    /// The element with these coefficients, reduced modulo f.
    pub fn element(&self, coefficients: &[Rational]) -> Vec<Rational> {
        poly::trim(&Rationals, poly::remainder(&Rationals, coefficients, &self.modulus))
    }

    /// All d coefficients.
    pub fn coefficients(&self, a: &[Rational]) -> Vec<Rational> {
        let mut full = a.to_vec();
        full.resize(self.degree(), Rational::new());
        full
    }
}

impl Ring for NumberField {
    type Elem = Vec<Rational>;
    type Scalar = Rational;
    type Acc = Vec<Rational>;

    fn zero(&self) -> Vec<Rational> {
        Vec::new()
    }
    fn one(&self) -> Vec<Rational> {
        vec![Rational::from(1)]
    }
    fn scalar(&self, value: &Rational) -> Rational {
        value.clone()
    }
    fn constant(&self, value: &Rational) -> Vec<Rational> {
        poly::trim(&Rationals, vec![value.clone()])
    }
    fn is_zero(&self, a: &Vec<Rational>) -> bool {
        a.is_empty()
    }
    fn add(&self, a: &Vec<Rational>, b: &Vec<Rational>) -> Vec<Rational> {
        poly::add(&Rationals, a, b)
    }
    fn sub(&self, a: &Vec<Rational>, b: &Vec<Rational>) -> Vec<Rational> {
        poly::sub(&Rationals, a, b)
    }
    fn neg(&self, a: &Vec<Rational>) -> Vec<Rational> {
        a.iter().map(|c| Rational::from(-c)).collect()
    }
    fn mul(&self, a: &Vec<Rational>, b: &Vec<Rational>) -> Vec<Rational> {
        self.element(&poly::mul(&Rationals, a, b))
    }
    fn scale(&self, a: &Vec<Rational>, c: &Rational) -> Vec<Rational> {
        if c.is_zero() { Vec::new() } else { a.iter().map(|x| Rational::from(x * c)).collect() }
    }
    fn inverse(&self, a: &Vec<Rational>) -> Option<Vec<Rational>> {
        poly::inverse_modulo(&Rationals, a, &self.modulus).map(|inverse| poly::trim(&Rationals, inverse))
    }
    fn accumulator(&self) -> Vec<Rational> {
        Vec::new()
    }
    fn accumulate(&self, acc: &mut Vec<Rational>, a: &Vec<Rational>, b: &Vec<Rational>) {
        let product = poly::mul(&Rationals, a, b);
        *acc = poly::add(&Rationals, acc, &product);
    }
    fn collect(&self, acc: &mut Vec<Rational>) -> Vec<Rational> {
        self.element(&std::mem::take(acc))
    }
}
