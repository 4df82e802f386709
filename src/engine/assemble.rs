//! From exact numbers to the record and the certificate.

use super::Request;
use super::image::wants_finite_size;
use super::orbit::Lifted;
use super::states;
use crate::algebra::graded::Grading;
use crate::chain::Orbit;
use crate::error::Result;
use crate::family::Family;
use crate::record::{
    COUPLING, Certificate, CertificateOrbit, CertificateOrder, CertificateTerm, Coefficient, PROGRAM, Parity, Parts, Record,
    State, Status, Term, Zeta,
};
use rug::{Integer, Rational};

/// The record of M = 0: one protected state, every coefficient zero.
pub fn protected(family: Family, loops: usize) -> Record {
    let zero = |order| Coefficient {
        order,
        status: Status::Exact,
        terms: vec![Term { zeta: Vec::new(), value: vec!["0".into()] }],
        parts: None,
        spare_digits: None,
        numbers: Vec::new(),
    };
    Record {
        schema: 1,
        program: PROGRAM.into(),
        length: family.length,
        magnons: 0,
        coupling: COUPLING.into(),
        loops,
        primaries: 1,
        orbits: vec![crate::record::Orbit {
            label: format!("L{}M0-1", family.length),
            parity: Parity::Symmetric,
            members: 1,
            singular: false,
            minimal_polynomial: vec!["0".into(), "1".into()],
            generator: "gamma_1".into(),
            coefficients: (1..=loops).map(zero).collect(),
            states: vec![State { omega: "0".into(), one_loop: format!("0.{}", "0".repeat(20)) }],
        }],
    }
}

/// The record of a family.
pub fn record(request: &Request, grading: &Grading, primaries: usize, lifted: &[Lifted<'_>]) -> Result<Record> {
    let orbits = lifted.iter().map(|one| orbit(request, grading, one)).collect::<Result<Vec<_>>>()?;
    Ok(Record {
        schema: 1,
        program: PROGRAM.into(),
        length: request.family.length,
        magnons: request.family.magnons,
        coupling: COUPLING.into(),
        loops: request.loops,
        primaries,
        orbits,
    })
}

/// A one-loop description without coefficients, as the census shows it.
pub fn bare(orbit: &Orbit, singular: bool) -> Result<crate::record::Orbit> {
    Ok(crate::record::Orbit {
        label: orbit.label.clone(),
        parity: orbit.parity,
        members: orbit.members(),
        singular,
        minimal_polynomial: orbit.minimal.iter().map(Integer::to_string).collect(),
        generator: orbit.generator.name().into(),
        coefficients: Vec::new(),
        states: states::states(orbit)?,
    })
}

fn orbit(request: &Request, grading: &Grading, lifted: &Lifted<'_>) -> Result<crate::record::Orbit> {
    let degree = lifted.orbit.degree();
    let length = request.family.length;
    let mut numbers = lifted.values.chunks(degree);
    let mut coefficients = Vec::with_capacity(request.loops);
    for order in 1..=request.loops {
        let asymptotic: Sum =
            grading.products(order - 1).iter().map(|product| (product.clone(), next(&mut numbers))).collect();
        let mut coefficient = Coefficient {
            order,
            status: if order < length { Status::Exact } else { Status::Asymptotic },
            terms: terms(&asymptotic, degree),
            parts: None,
            spare_digits: None,
            numbers: Vec::new(),
        };
        if order == length && wants_finite_size(request) {
            let mut finite: Sum = vec![(Vec::new(), next(&mut numbers))];
            finite.extend((3..=2 * length as u32 - 3).step_by(2).map(|k| (vec![k], next(&mut numbers))));
            let mut total = asymptotic.clone();
            for (product, value) in &finite {
                match total.iter_mut().find(|(known, _)| known == product) {
                    Some((_, sum)) => sum.iter_mut().zip(value).for_each(|(s, v)| *s += v),
                    None => total.push((product.clone(), value.clone())),
                }
            }
            coefficient.status = Status::Exact;
            coefficient.terms = terms(&total, degree);
            coefficient.parts =
                Some(Parts { asymptotic: terms(&asymptotic, degree), finite_size: terms(&finite, degree) });
        }
        coefficients.push(coefficient);
    }
    Ok(crate::record::Orbit { coefficients, ..bare(lifted.orbit, lifted.singular)? })
}

/// (zeta product, coefficients of 1, ω, …).
type Sum = Vec<(Vec<u32>, Vec<Rational>)>;

fn next<'a>(numbers: &mut impl Iterator<Item = &'a [Rational]>) -> Vec<Rational> {
    numbers.next().map(<[Rational]>::to_vec).unwrap_or_default()
}

/// The terms that are not zero, by length of the zeta product, then by its arguments; an exact zero is one
/// term of value zero.
fn terms(sum: &[(Vec<u32>, Vec<Rational>)], degree: usize) -> Vec<Term> {
    let mut kept: Vec<&(Vec<u32>, Vec<Rational>)> =
        sum.iter().filter(|(_, value)| value.iter().any(|c| !c.is_zero())).collect();
    kept.sort_by(|(a, _), (b, _)| (a.len(), a).cmp(&(b.len(), b)));
    if kept.is_empty() {
        return vec![Term { zeta: Vec::new(), value: vec!["0".into(); degree] }];
    }
    kept.into_iter()
        .map(|(product, value)| Term {
            zeta: product.iter().copied().map(Zeta::Single).collect(),
            value: value.iter().map(Rational::to_string).collect(),
        })
        .collect()
}
