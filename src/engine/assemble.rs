//! From exact numbers to the record and the certificate.

use super::Request;
use super::image::wants_finite_size;
use super::orbit::Lifted;
use super::states;
use crate::algebra::graded::Grading;
use crate::algebra::number_field::NumberField;
use crate::chain::Orbit;
use crate::error::Result;
use crate::family::Family;
use crate::record::{
    CERTIFICATE, COUPLING, Certificate, CertificateOrbit, CertificateOrder, CertificateTerm, Coefficient, PROGRAM,
    Parity, Parts, Record, State, Status, Term, Zeta,
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

/// The certificate of a family.
pub fn certificate(request: &Request, grading: &Grading, lifted: &[Lifted<'_>]) -> Result<Certificate> {
    let orbits = lifted.iter().map(|one| certificate_orbit(grading, one)).collect::<Result<Vec<_>>>()?;
    Ok(Certificate {
        certificate: CERTIFICATE,
        length: request.family.length,
        magnons: request.family.magnons,
        loops: request.loops,
        orbits,
    })
}

fn certificate_orbit(grading: &Grading, lifted: &Lifted<'_>) -> Result<CertificateOrbit> {
    let orbit = lifted.orbit;
    let size = orbit.members();
    let Family { length, magnons } = orbit.family;
    let (first, second) = (magnons + 1, length - magnons + 2);
    let block = (first + second) * size;
    let mut pair = Vec::with_capacity(grading.order() + 1);
    for order in 0..=grading.order() {
        let mut terms = Vec::new();
        for (entry, product) in grading.entries(order).zip(grading.products(order)) {
            let numbers = &lifted.pair[entry * block..(entry + 1) * block];
            if numbers.iter().all(Rational::is_zero) {
                continue;
            }
            let mut elements =
                numbers.chunks(size).map(|element| element.iter().map(Rational::to_string).collect::<Vec<String>>());
            terms.push(CertificateTerm {
                zeta: product.clone(),
                q1: elements.by_ref().take(first).collect(),
                q2: elements.collect(),
            });
        }
        pair.push(CertificateOrder { order, terms });
    }
    let field: Vec<Rational> = orbit.field.iter().map(Rational::from).collect();
    let number_field = NumberField::new(field);
    let rational = |p: &[Integer]| p.iter().map(Rational::from).collect::<Vec<_>>();
    let image = orbit.image(&number_field, |p| number_field.element(&rational(p)))?;
    Ok(CertificateOrbit {
        label: orbit.label.clone(),
        field: orbit.field.iter().map(Integer::to_string).collect(),
        omega: number_field.coefficients(&image.omega).iter().map(Rational::to_string).collect(),
        pair,
    })
}
