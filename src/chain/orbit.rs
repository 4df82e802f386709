//! A Galois orbit of primaries with its exact one-loop data.

use crate::algebra::poly;
use crate::algebra::ring::Ring;
use crate::error::{Error, Result};
use crate::family::Family;
use crate::record::Parity;
use rug::Integer;

/// An even charge used as the generator ω of the field of the anomalous dimensions.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Generator {
    /// γ₁.
    Gamma1,
    /// q₄, where γ₁ does not generate the field.
    Charge4,
    /// γ₁ + q₄, where neither does.
    Sum,
}

impl Generator {
    /// The name written into records.
    pub fn name(self) -> &'static str {
        match self {
            Generator::Gamma1 => "gamma_1",
            Generator::Charge4 => "q_4",
            Generator::Sum => "gamma_1 + q_4",
        }
    }
}

/// One orbit over K = Q[x]/g.
///
/// Numbers of K are stored as n(x)/g'(x) with integer polynomials n: every algebraic integer of K has
/// that form, and the numerators are far smaller than coefficients in powers of x.
#[derive(Clone, Debug)]
pub struct Orbit {
    /// The family.
    pub family: Family,
    /// "L8M3-1".
    pub label: String,
    /// Symmetric: K = Q(ω), x = ω. Paired: K is a quadratic extension of Q(ω).
    pub parity: Parity,
    /// g: monic, irreducible, constant first.
    pub field: Vec<Integer>,
    /// What ω is.
    pub generator: Generator,
    /// The minimal polynomial of ω.
    pub minimal: Vec<Integer>,
    /// Numerator of ω.
    pub omega: Vec<Integer>,
    /// Numerator of γ₁.
    pub gamma_1: Vec<Integer>,
    /// Numerators of T_j, T(v) = Σ T_j (v − ½)^j, j = 0 … L.
    pub transfer: Vec<Vec<Integer>>,
}

/// The one-loop data of an orbit in a ring to which K maps.
#[derive(Clone, Debug)]
pub struct OneLoopImage<E> {
    /// ω.
    pub omega: E,
    /// γ₁.
    pub gamma_1: E,
    /// T(v), constant first, L + 1 coefficients.
    pub transfer: Vec<E>,
}

impl Orbit {
    /// The degree of ω.
    pub fn degree(&self) -> usize {
        self.minimal.len() - 1
    }

    /// The number of primaries in the orbit.
    pub fn members(&self) -> usize {
        self.field.len() - 1
    }

    /// The one-loop data in `ring`, given the image of integer polynomials in x.
    ///
    /// # Errors
    /// g'(x) maps to no unit (a prime that divides the discriminant).
    pub fn image<R: Ring>(
        &self,
        ring: &R,
        polynomial: impl Fn(&[Integer]) -> R::Elem,
    ) -> Result<OneLoopImage<R::Elem>> {
        let derivative: Vec<Integer> =
            self.field.iter().enumerate().skip(1).map(|(i, c)| Integer::from(c * i as u32)).collect();
        let Some(inverse) = ring.inverse(&polynomial(&derivative)) else {
            return Err(Error::undefined(format!(
                "orbit {}: the derivative of the minimal polynomial is no unit in this ring; use another prime",
                self.label
            )));
        };
        let map = |numerator: &[Integer]| ring.mul(&polynomial(numerator), &inverse);
        let coefficients: Vec<R::Elem> = self.transfer.iter().map(|numerator| map(numerator)).collect();
        Ok(OneLoopImage {
            omega: map(&self.omega),
            gamma_1: map(&self.gamma_1),
            transfer: poly::shift(ring, &coefficients, &ring.ratio(-1, 2)),
        })
    }
}
