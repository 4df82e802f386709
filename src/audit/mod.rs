//! The independent checker of records.
//!
//! From a record and its certificate it re-derives every exact number by plain arithmetic over the
//! number field of each orbit (`num-bigint`, `num-rational`), sharing no code with the engine beyond
//! the record itself. Finding the lifted pair is the expensive part and is never repeated: that the
//! certificate's pair satisfies the Wronskian relation is checked instead, and that no other pair can.

mod charges;
mod decimals;
mod field;
mod finite_size;
mod graded;
mod irreducible;
mod modular;
mod orbit;
mod poly;
mod potential;
mod report;
#[cfg(test)]
mod sample;
mod spectrum;
#[cfg(test)]
mod tests;
mod unique;

pub use report::{Audit, Finding, Findings, OrbitAudit, Verdict};

use crate::record::{Certificate, Orbit, Parity, Record, Status};
use num_bigint::BigInt;
use num_rational::BigRational;
use orbit::{Outcome, Subject, audit_orbit, rationals};
use rayon::prelude::{IntoParallelRefIterator, ParallelIterator};

/// Audits a record (already read and checked) against its certificate, if there is one.
///
/// Orbits in parallel, in whatever rayon pool this is called. Cost: for each orbit of degree d about
/// L²/2 products of polynomials in v of degree M and L−M+1, each with d² products of long integers.
pub fn audit(record: &Record, certificate: Option<&Certificate>) -> Audit {
    let mut family = Findings::default();
    let certificate = certificate.filter(|c| {
        let same = (c.length, c.magnons) == (record.length, record.magnons);
        if !same {
            family.refuted(format!("the certificate is for family ({}, {})", c.length, c.magnons));
        }
        same
    });
    let find = |orbit: &Orbit| certificate.and_then(|c| c.orbits.iter().find(|other| other.label == orbit.label));
    let outcomes: Vec<Outcome> = record
        .orbits
        .par_iter()
        .map(|orbit| {
            let (length, magnons) = (record.length, record.magnons);
            audit_orbit(&Subject { length, magnons, orbit, certificate: find(orbit) })
        })
        .collect();
    if let Some(extra) =
        certificate.iter().flat_map(|c| &c.orbits).find(|c| record.orbits.iter().all(|o| o.label != c.label))
    {
        family.refuted(format!("the certificate has an orbit {} that the record lacks", extra.label));
    }
    count(&mut family, record);
    order(&mut family, record);
    distinct(&mut family, record, &outcomes);
    heading(&mut family, record);
    let orbits = outcomes.into_iter().map(|outcome| outcome.audit).collect();
    Audit { length: record.length, magnons: record.magnons, family, orbits }
}

/// As many primaries as the necklace formula gives.
fn count(family: &mut Findings, record: &Record) {
    let expected = spectrum::primaries(record.length, record.magnons);
    family.check(
        BigInt::from(record.primaries) == expected,
        format!("{} primaries, the necklace formula gives {expected}", record.primaries),
    );
    let members: usize = record.orbits.iter().map(|orbit| orbit.members).sum();
    if members < record.primaries {
        family.open(format!("the orbits present hold {members} of {} primaries", record.primaries));
    } else {
        family.check(members == record.primaries, format!("the orbits hold {members} primaries"));
    }
}

/// Sorted by degree, then minimal polynomial from the leading coefficient down, then symmetric first;
/// labels count in that order.
fn order(family: &mut Findings, record: &Record) {
    let key = |orbit: &Orbit| {
        let mut polynomial: Vec<BigRational> = rationals(&orbit.minimal_polynomial);
        polynomial.reverse();
        (orbit.degree(), polynomial, orbit.parity == Parity::Paired)
    };
    family.check(record.orbits.is_sorted_by_key(key), "the orbits are sorted");
    let members: usize = record.orbits.iter().map(|orbit| orbit.members).sum();
    if members == record.primaries {
        let label = |index: usize| format!("L{}M{}-{}", record.length, record.magnons, index + 1);
        let fine = record.orbits.iter().enumerate().all(|(index, orbit)| orbit.label == label(index));
        family.check(fine, "the labels count the orbits");
    }
}

/// No two orbits are the same states.
fn distinct(family: &mut Findings, record: &Record, outcomes: &[Outcome]) {
    let all: Option<Vec<_>> = outcomes.iter().map(|outcome| outcome.fingerprint.as_ref()).collect();
    let Some(all) = all else {
        if record.magnons == 0 {
            family.check(record.orbits.len() <= 1, "one protected state");
        } else {
            family.open("not shown that the orbits are distinct: certificates are missing");
        }
        return;
    };
    for (i, a) in all.iter().enumerate() {
        for (j, b) in all[..i].iter().enumerate() {
            if a == b {
                family
                    .refuted(format!("{} and {} are the same states", record.orbits[j].label, record.orbits[i].label));
                return;
            }
        }
    }
    family.proved("the orbits are distinct");
}

/// `loops` and `schema` say what is in the record.
fn heading(family: &mut Findings, record: &Record) {
    let coefficients = || record.orbits.iter().flat_map(|orbit| &orbit.coefficients);
    let last = coefficients().map(|c| c.order).max().unwrap_or(0);
    family.check(record.loops == last, format!("the highest loop present is {last}"));
    let late = coefficients().any(|c| matches!(c.status, Status::Recognised | Status::Numeric));
    family.check(record.schema == if late { 2 } else { 1 }, format!("schema {}", record.schema));
}
