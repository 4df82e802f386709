//! The Baxter pair order by order in the coupling (formulas §2, §3).
//!
//! Q₁⁺Q₂⁻ − Q₁⁻Q₂⁺ = (2M−L−1) W(v; h) with the polynomial potential W, which depends on the state
//! through the charges P_r of lower orders. At each order the same L × L linear system is solved
//! for every zeta product separately.

pub mod charges;
pub mod potential;
pub mod wronskian;

use crate::algebra::graded::{Graded, Grading, Series};
use crate::algebra::ring::Ring;
use crate::baxter::Pair;
use crate::error::Result;
use crate::family::Family;
use potential::Potential;
use wronskian::Wronskian;

/// A polynomial in v with graded coefficients, entry by entry of the grading: `poly[entry][j]` is the
/// coefficient of v^j. An entry without any coefficient is an empty vector.
pub type GradedPolynomial<R> = Vec<Vec<<R as Ring>::Elem>>;

/// The dressing coefficients first act at h³, so charges are needed this many orders late.
const DELAY: usize = 3;

/// What the lift gives.
#[derive(Debug)]
pub struct Lift<R: Ring> {
    /// Q₁ through h^{loops−1}.
    pub q1: GradedPolynomial<R>,
    /// Q₂ through h^{loops−1}.
    pub q2: GradedPolynomial<R>,
    /// P_r, r = 1, 2, …; `charges[r−1]`. Only P₁ is complete through h^{loops−1}.
    pub charges: Vec<Series<R>>,
    /// Whether v = ±½ are roots at one loop.
    pub singular: bool,
}

impl<R: Ring> Lift<R> {
    /// γ = 2h P₁: the asymptotic γ_n as one number for each zeta product of `grading.products(n−1)`.
    pub fn anomalous_dimension<'a>(
        &'a self,
        ring: &R,
        grading: &'a Grading,
        order: usize,
    ) -> Vec<(&'a [u32], R::Elem)> {
        let two = ring.ratio(2, 1);
        grading
            .products(order - 1)
            .iter()
            .zip(grading.entries(order - 1))
            .map(|(product, entry)| (product.as_slice(), ring.scale(&self.charges[0][entry], &two)))
            .collect()
    }
}

/// Lifts the one-loop pair through h^N, N the order of the grading, so that γ is known through N + 1
/// loops; N ≤ L − 1 (formulas §3). `symmetric` states use half the unknowns.
///
/// Ring multiplications: about L³/3 once, L² for each zeta product, and for each pair of entries of
/// the grading (M+1)(L−M+2); halved or better for symmetric states.
///
/// # Errors
/// The linear system or a charge meets a non-unit: a bad prime, or a state that is not physical.
pub fn lift<R: Ring>(
    ring: &R,
    family: Family,
    grading: &Grading,
    pair: &Pair<R::Elem>,
    symmetric: bool,
) -> Result<Lift<R>> {
    let graded = Graded::new(ring, grading);
    let mut wronskian = Wronskian::new(ring, family, grading, pair, symmetric)?;
    let singular = charges::is_singular(ring, &pair.q1);
    let mut potential = Potential::new(&graded, family, &[]);
    for order in 1..=grading.order() {
        if order.is_multiple_of(DELAY) {
            let charges = charges::charges(&graded, family, &wronskian.q1, &potential, order - 1, singular, symmetric)?;
            potential = Potential::new(&graded, family, &charges);
        }
        wronskian.solve(grading, order, &potential);
    }
    let charges = charges::charges(&graded, family, &wronskian.q1, &potential, grading.order(), singular, symmetric)?;
    Ok(Lift { q1: wronskian.q1, q2: wronskian.q2, charges, singular })
}
