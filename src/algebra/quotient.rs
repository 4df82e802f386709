//! F_p[x]/f: the modular image of a number field Q[x]/f.
//!
//! It is a field only when f stays irreducible modulo p; otherwise a non-zero element may fail to
//! have an inverse, and the caller drops that prime.

use super::poly;
use super::prime_field::PrimeField;
use super::ring::Ring;
use rug::Rational;
use smallvec::SmallVec;

/// F_p[x]/f for a monic f of degree d ≥ 1.
///
/// Elements are coefficient vectors of length d, and zero is the empty vector. A product costs d²
/// word multiplications, a reduction d² more, which sums of products pay once.
#[derive(Clone, Debug)]
pub struct Quotient {
    field: PrimeField,
    degree: usize,
    modulus: Vec<u64>,
    /// x^{d+k} mod f for k = 0 … d−2, row by row.
    reductions: Vec<u64>,
}

/// Coefficients of 1, x, …, x^{d−1}; empty for zero.
pub type Residues = SmallVec<[u64; 4]>;

/// Columns of an unreduced sum of products and the number of products in a column.
pub struct Columns {
    sums: Vec<u128>,
    count: usize,
}

/// Products of two elements below 2⁶⁰ that fit into 128 bits, after a folded start worth 16.
const CAPACITY: usize = 255;
const FOLDED: usize = 16;

impl Quotient {
    /// The ring F_p[x]/f; `modulus` holds the coefficients of f, constant first, monic.
    pub fn new(field: PrimeField, modulus: Vec<u64>) -> Quotient {
        let degree = modulus.len() - 1;
        debug_assert!(degree >= 1 && modulus[degree] == field.one());
        let mut reductions = Vec::with_capacity(degree.saturating_sub(1) * degree);
        let mut row: Vec<u64> = modulus[..degree].iter().map(|c| field.neg(c)).collect();
        for _ in 1..degree {
            reductions.extend_from_slice(&row);
            let carry = row[degree - 1];
            for i in (0..degree).rev() {
                let below = if i == 0 { 0 } else { row[i - 1] };
                row[i] = field.sub(&below, &field.mul(&carry, &modulus[i]));
            }
        }
        Quotient { field, degree, modulus, reductions }
    }

    /// d.
    pub fn degree(&self) -> usize {
        self.degree
    }

    /// F_p.
    pub fn field(&self) -> &PrimeField {
        &self.field
    }

    /// The element with these coefficients (any number of them, reduced modulo f).
    pub fn element(&self, coefficients: &[u64]) -> Residues {
        let rest = poly::remainder(&self.field, coefficients, &self.modulus);
        self.normalise(rest.into_iter())
    }

    /// The coefficients of 1, x, …, x^{d−1}, all d of them.
    pub fn coefficients(&self, a: &Residues) -> Vec<u64> {
        if a.is_empty() { vec![0; self.degree] } else { a.to_vec() }
    }

    fn normalise(&self, coefficients: impl Iterator<Item = u64>) -> Residues {
        let mut result: Residues = coefficients.collect();
        if result.iter().all(|c| *c == 0) {
            result.clear();
        } else {
            result.resize(self.degree, 0);
        }
        result
    }

    fn fold(&self, acc: &mut Columns) {
        for sum in &mut acc.sums {
            *sum = self.field.fold(*sum);
        }
        acc.count = FOLDED;
    }
}

impl Ring for Quotient {
    type Elem = Residues;
    type Scalar = u64;
    type Acc = Columns;

    fn zero(&self) -> Residues {
        Residues::new()
    }
    fn one(&self) -> Residues {
        self.constant(&self.field.one())
    }
    fn scalar(&self, value: &Rational) -> u64 {
        self.field.scalar(value)
    }
    fn constant(&self, value: &u64) -> Residues {
        self.normalise(std::iter::once(*value))
    }
    #[inline(always)]
    fn is_zero(&self, a: &Residues) -> bool {
        a.is_empty()
    }
    fn add(&self, a: &Residues, b: &Residues) -> Residues {
        match (a.is_empty(), b.is_empty()) {
            (true, _) => b.clone(),
            (_, true) => a.clone(),
            _ => self.normalise(a.iter().zip(b).map(|(x, y)| self.field.add(x, y))),
        }
    }
    fn sub(&self, a: &Residues, b: &Residues) -> Residues {
        match (a.is_empty(), b.is_empty()) {
            (true, _) => self.neg(b),
            (_, true) => a.clone(),
            _ => self.normalise(a.iter().zip(b).map(|(x, y)| self.field.sub(x, y))),
        }
    }
    fn neg(&self, a: &Residues) -> Residues {
        a.iter().map(|x| self.field.neg(x)).collect()
    }
    fn mul(&self, a: &Residues, b: &Residues) -> Residues {
        let mut acc = self.accumulator();
        self.accumulate(&mut acc, a, b);
        self.collect(&mut acc)
    }
    fn scale(&self, a: &Residues, c: &u64) -> Residues {
        if *c == 0 { Residues::new() } else { a.iter().map(|x| self.field.mul(x, c)).collect() }
    }
    fn inverse(&self, a: &Residues) -> Option<Residues> {
        let inverse = poly::inverse_modulo(&self.field, a, &self.modulus)?;
        Some(self.normalise(inverse.into_iter()))
    }
    fn accumulator(&self) -> Columns {
        Columns { sums: vec![0; 2 * self.degree - 1], count: 0 }
    }
    #[inline]
    fn accumulate(&self, acc: &mut Columns, a: &Residues, b: &Residues) {
        if a.is_empty() || b.is_empty() {
            return;
        }
        let d = self.degree;
        if acc.count + d > CAPACITY {
            self.fold(acc);
        }
        acc.count += d;
        for (i, x) in a.iter().enumerate() {
            let x = u128::from(*x);
            for (sum, y) in acc.sums[i..i + d].iter_mut().zip(b.iter()) {
                *sum += x * u128::from(*y);
            }
        }
    }
    fn collect(&self, acc: &mut Columns) -> Residues {
        if acc.count == 0 {
            return Residues::new();
        }
        let d = self.degree;
        acc.count = 0;
        let field = &self.field;
        let mut low: SmallVec<[u128; 8]> = acc.sums[..d].iter().map(|sum| field.fold(*sum)).collect();
        let mut load = FOLDED;
        for (k, sum) in acc.sums[d..].iter().enumerate() {
            let high = u128::from(field.reduce(*sum));
            if load == CAPACITY {
                low.iter_mut().for_each(|sum| *sum = field.fold(*sum));
                load = FOLDED;
            }
            load += 1;
            for (sum, r) in low.iter_mut().zip(&self.reductions[k * d..(k + 1) * d]) {
                *sum += high * u128::from(*r);
            }
        }
        acc.sums.iter_mut().for_each(|sum| *sum = 0);
        self.normalise(low.into_iter().map(|sum| field.reduce(sum)))
    }
}
