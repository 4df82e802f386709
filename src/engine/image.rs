//! One orbit modulo one prime: everything the record needs, as residues.

use super::{Request, denominator};
use crate::algebra::graded::Grading;
use crate::algebra::linear;
use crate::algebra::poly;
use crate::algebra::prime_field::PrimeField;
use crate::algebra::quotient::{Quotient, Residues};
use crate::algebra::ring::Ring;
use crate::baxter;
use crate::chain::Orbit;
use crate::chain::orbit::OneLoopImage;
use crate::error::{Error, Kind, Result};
use crate::finite_size;
use crate::lift::{self, Lift};
use crate::record::Parity;
use rug::Integer;

/// The residues of an orbit modulo one prime.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Image {
    /// Whether ±½ are roots at one loop.
    pub singular: bool,
    /// Coefficients of 1, ω, … of γ_n, loop by loop and zeta product by zeta product; at loop L, where the
    /// finite-size term is wanted, its constant and its ζ3, ζ5, … ζ(2L−3) follow. All times the weight of
    /// [`denominator::weights`].
    pub values: Vec<u64>,
    /// For the certificate: all coefficients of Q₁ and Q₂ in powers of x, entry by entry.
    pub pair: Vec<u64>,
}

/// The image modulo the prime of `field`, or `None` when the prime is a bad one for this orbit.
///
/// # Errors
/// A check that failed: a wrong state, not a bad prime.
pub fn image(request: &Request, orbit: &Orbit, grading: &Grading, field: PrimeField) -> Result<Option<Image>> {
    if orbit.members() == 1 {
        // K = Q: x is the rational root of g.
        let root = field.image(&Integer::from(-&orbit.field[0]));
        let integers = |p: &[Integer]| -> Vec<u64> { p.iter().map(|c| field.image(c)).collect() };
        let evaluate = |p: &[Integer]| poly::evaluate(&field, &integers(p), &root);
        over(request, orbit, grading, &field, &field, evaluate, |a: &u64| vec![*a])
    } else {
        let modulus: Vec<u64> = orbit.field.iter().map(|c| field.image(c)).collect();
        let ring = Quotient::new(field, modulus);
        let evaluate = |p: &[Integer]| ring.element(&p.iter().map(|c| field.image(c)).collect::<Vec<u64>>());
        over(request, orbit, grading, &field, &ring, evaluate, |a: &Residues| ring.coefficients(a))
    }
}

fn over<R: Ring>(
    request: &Request,
    orbit: &Orbit,
    grading: &Grading,
    field: &PrimeField,
    ring: &R,
    evaluate: impl Fn(&[Integer]) -> R::Elem,
    coefficients: impl Fn(&R::Elem) -> Vec<u64>,
) -> Result<Option<Image>> {
    let Ok(start) = orbit.image(ring, evaluate) else { return Ok(None) };
    let subfield = match orbit.parity {
        Parity::Symmetric => None,
        Parity::Paired => match Subfield::new(ring, field, &start.omega, orbit.degree(), &coefficients) {
            None => return Ok(None),
            found => found,
        },
    };
    let (lift, elements) = match elements(request, orbit, grading, ring, &start) {
        Ok(found) => found,
        // Elimination met a non-unit: possible only because F_p[x]/g need not be a field.
        Err(error) if error.kind() == Kind::Undefined => return Ok(None),
        Err(error) => return Err(error.within(format!("orbit {}", orbit.label))),
    };
    let mut values = Vec::with_capacity(elements.len() * orbit.degree());
    let weights = denominator::weights(ring, orbit, &start.omega, request.loops);
    for (element, order) in elements.iter().zip(denominator::orders(request, grading)) {
        let in_x = coefficients(&ring.mul(element, &weights[order]));
        let in_omega = match &subfield {
            None => in_x,
            Some(subfield) => match subfield.express(field, &in_x) {
                Some(in_omega) => in_omega,
                None => return Ok(None),
            },
        };
        values.extend(in_omega.iter().map(|c| field.residue(*c)));
    }
    let mut pair = Vec::new();
    if request.certificate {
        let sizes = [orbit.family.magnons + 1, orbit.family.length - orbit.family.magnons + 2];
        for entry in 0..grading.len() {
            for (poly, size) in [&lift.q1, &lift.q2].into_iter().zip(sizes) {
                for j in 0..size {
                    let element = poly[entry].get(j).cloned().unwrap_or_else(|| ring.zero());
                    pair.extend(coefficients(&element).iter().map(|c| field.residue(*c)));
                }
            }
        }
    }
    Ok(Some(Image { singular: lift.singular, values, pair }))
}

/// The numbers of the record over any ring: γ_n asymptotically, then the finite-size term.
pub fn elements<R: Ring>(
    request: &Request,
    orbit: &Orbit,
    grading: &Grading,
    ring: &R,
    start: &OneLoopImage<R::Elem>,
) -> Result<(Lift<R>, Vec<R::Elem>)> {
    let family = orbit.family;
    let pair = baxter::one_loop(ring, family, &start.transfer)?;
    let lift = lift::lift(ring, family, grading, &pair, orbit.parity == Parity::Symmetric)?;
    let mut elements = Vec::new();
    for order in 1..=request.loops {
        elements.extend(lift.anomalous_dimension(ring, grading, order).into_iter().map(|(_, value)| value));
    }
    if wants_finite_size(request) {
        let term = finite_size::leading(ring, family, &pair, lift.singular)?;
        elements.push(term.constant);
        elements.extend(term.zetas);
    }
    Ok((lift, elements))
}

/// Whether loop L is asked for, complete.
pub fn wants_finite_size(request: &Request) -> bool {
    request.loops == request.family.length && !request.incomplete
}

/// Q(ω) inside K modulo p: from coefficients in powers of x to coefficients in powers of ω.
struct Subfield {
    /// Rows of the powers of ω (as columns) that form an invertible square.
    rows: Vec<usize>,
    inverse: Vec<Vec<u64>>,
    columns: Vec<Vec<u64>>,
}

impl Subfield {
    fn new<R: Ring>(
        ring: &R,
        field: &PrimeField,
        omega: &R::Elem,
        degree: usize,
        coefficients: &impl Fn(&R::Elem) -> Vec<u64>,
    ) -> Option<Subfield> {
        let mut power = ring.one();
        let mut columns: Vec<Vec<u64>> = Vec::with_capacity(degree);
        for _ in 0..degree {
            columns.push(coefficients(&power));
            power = ring.mul(&power, omega);
        }
        let rows = independent_rows(field, &columns)?;
        let square: Vec<Vec<u64>> = rows.iter().map(|i| columns.iter().map(|column| column[*i]).collect()).collect();
        let inverse = linear::inverse(field, &square)?;
        Some(Subfield { rows, inverse, columns })
    }

    /// `None` when the number is not in Q(ω), which only a bad prime could cause.
    fn express(&self, field: &PrimeField, in_x: &[u64]) -> Option<Vec<u64>> {
        let right: Vec<u64> = self.rows.iter().map(|i| in_x[*i]).collect();
        let result = linear::apply(field, &self.inverse, &right);
        let consistent = (0..in_x.len()).all(|i| {
            let mut sum = field.accumulator();
            for (c, column) in result.iter().zip(&self.columns) {
                field.accumulate(&mut sum, c, &column[i]);
            }
            field.collect(&mut sum) == in_x[i]
        });
        consistent.then_some(result)
    }
}

/// As many row positions as there are columns, on which the columns are independent.
fn independent_rows(field: &PrimeField, columns: &[Vec<u64>]) -> Option<Vec<usize>> {
    let mut work = columns.to_vec();
    let mut rows = Vec::new();
    for c in 0..work.len() {
        let row = work[c].iter().position(|x| *x != 0)?;
        let unit = field.inverse(&work[c][row])?;
        let pivot = work[c].clone();
        for later in &mut work[c + 1..] {
            let factor = field.mul(&later[row], &unit);
            for (x, p) in later.iter_mut().zip(&pivot) {
                *x = field.sub(x, &field.mul(&factor, p));
            }
        }
        rows.push(row);
    }
    Some(rows)
}

/// Whether ±½ are Bethe roots at one loop, from the first prime that is not a bad one.
///
/// # Errors
/// A Baxter equation without solution, or nothing but bad primes.
pub fn is_singular(orbit: &Orbit) -> Result<bool> {
    for index in 0..8 {
        let field = PrimeField::nth(index);
        let ring = Quotient::new(field, orbit.field.iter().map(|c| field.image(c)).collect());
        let evaluate = |p: &[Integer]| ring.element(&p.iter().map(|c| field.image(c)).collect::<Vec<u64>>());
        if let Ok(start) = orbit.image(&ring, evaluate) {
            let pair = baxter::one_loop(&ring, orbit.family, &start.transfer)?;
            return Ok(lift::charges::is_singular(&ring, &pair.q1));
        }
    }
    Err(Error::check(format!("orbit {}: every prime tried is a bad one; please report this family", orbit.label)))
}
