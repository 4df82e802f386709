//! Second route: the same lift and finite-size term directly over the number field, without primes.

use super::orbit;
use super::{NoCheckpoint, Request, image};
use crate::algebra::graded::Grading;
use crate::algebra::number_field::NumberField;
use crate::algebra::poly;
use crate::algebra::ring::Ring;
use crate::chain::spectrum;
use crate::family::Family;
use crate::observer::Silent;
use rug::{Integer, Rational};

/// Everything that is reconstructed from primes equals what exact arithmetic over K gives: γ_n, the finite-size
/// term, and the pair of Baxter polynomials of the certificate.
fn check(length: usize, magnons: usize) {
    let family = Family::new(length, magnons).unwrap();
    let request = Request { certificate: true, ..Request::new(family, length) };
    let grading = Grading::new(length - 1);
    for orbit in &spectrum(family, &Silent).unwrap() {
        let modular = orbit::lift(&request, orbit, &grading, None, &NoCheckpoint, &Silent).unwrap();
        let rational = |p: &[Integer]| p.iter().map(Rational::from).collect::<Vec<_>>();
        let field = NumberField::new(rational(&orbit.field));
        let start = orbit.image(&field, |p| field.element(&rational(p))).unwrap();
        let (lift, elements) = image::elements(&request, orbit, &grading, &field, &start).unwrap();
        assert_eq!(lift.singular, modular.singular, "{}", orbit.label);
        assert_eq!(modular.values.len(), elements.len() * orbit.degree(), "{}", orbit.label);
        for (i, (element, values)) in elements.iter().zip(modular.values.chunks(orbit.degree())).enumerate() {
            let values: Vec<Vec<Rational>> = values.iter().map(|c| field.constant(c)).collect();
            assert_eq!(poly::evaluate(&field, &values, &start.omega), *element, "{}: number {i}", orbit.label);
        }
        let mut pair = modular.pair.chunks(orbit.members());
        for entry in 0..grading.len() {
            for (poly, size) in [(&lift.q1, magnons + 1), (&lift.q2, length - magnons + 2)] {
                for j in 0..size {
                    let element = poly[entry].get(j).cloned().unwrap_or_default();
                    assert_eq!(field.coefficients(&element), pair.next().unwrap(), "{}: entry {entry}", orbit.label);
                }
            }
        }
        assert!(pair.next().is_none());
    }
}

#[test]
fn number_field_route_4_2() {
    check(4, 2);
}

#[test]
fn number_field_route_6_3() {
    check(6, 3);
}

#[test]
fn number_field_route_7_3() {
    check(7, 3);
}

#[test]
fn number_field_route_8_3() {
    check(8, 3);
}

#[test]
fn number_field_route_8_4() {
    check(8, 4);
}
