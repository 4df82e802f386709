//! The engine against values from an independent program: whole families with L ≤ 12, computed by
//! `tests/baseline/series.gp` in PARI/GP (exact number-field arithmetic, no modular images, its own
//! spectrum), stored in `tests/reference`.

use loopladder::engine::{NoCheckpoint, Request, compute};
use loopladder::family::Family;
use loopladder::observer::Silent;
use loopladder::record::{Coefficient, Parity, Status, Term, Zeta};
use serde::Deserialize;
use std::collections::BTreeMap;
use std::path::PathBuf;

/// One file of `tests/reference`.
#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct Reference {
    length: usize,
    magnons: usize,
    orbits: Vec<ReferenceOrbit>,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct ReferenceOrbit {
    parity: Parity,
    members: usize,
    singular: bool,
    generator: String,
    minimal_polynomial: Vec<String>,
    /// γ_1 … γ_L, the last one without the finite-size term.
    gamma: Vec<Vec<Term>>,
    /// The finite-size term at order h^L.
    finite_size: Vec<Term>,
}

/// Zeta product → coefficients of 1, ω, …; zeros left out.
type Value = BTreeMap<Vec<Zeta>, Vec<String>>;

fn value(terms: &[Term]) -> Value {
    let mut value = Value::new();
    for term in terms.iter().filter(|term| term.value.iter().any(|c| c != "0")) {
        assert!(value.insert(term.zeta.clone(), term.value.clone()).is_none(), "a zeta product occurs twice");
    }
    value
}

/// What both programs say of an orbit, in a form that can be compared and sorted.
#[derive(Debug, PartialEq, Eq, PartialOrd, Ord)]
struct Statement {
    minimal_polynomial: Vec<String>,
    paired: bool,
    members: usize,
    singular: bool,
    gamma: Vec<Value>,
    finite_size: Value,
}

fn reference(length: usize, magnons: usize) -> Reference {
    let path =
        PathBuf::from(env!("CARGO_MANIFEST_DIR")).join(format!("tests/reference/L{length:02}M{magnons:02}.json"));
    let text = std::fs::read_to_string(&path).unwrap_or_else(|cause| panic!("{}: {cause}", path.display()));
    let reference: Reference =
        serde_json::from_str(&text).unwrap_or_else(|cause| panic!("{}: {cause}", path.display()));
    assert_eq!((reference.length, reference.magnons), (length, magnons));
    reference
}

fn of_reference(orbit: ReferenceOrbit) -> Statement {
    assert_eq!(orbit.generator, "gamma_1");
    Statement {
        minimal_polynomial: orbit.minimal_polynomial,
        paired: orbit.parity == Parity::Paired,
        members: orbit.members,
        singular: orbit.singular,
        gamma: orbit.gamma.iter().map(|terms| value(terms)).collect(),
        finite_size: value(&orbit.finite_size),
    }
}

fn of_engine(length: usize, orbit: loopladder::record::Orbit) -> Statement {
    assert_eq!(orbit.generator, "gamma_1", "{}", orbit.label);
    assert_eq!(orbit.states.len(), orbit.degree(), "{}", orbit.label);
    assert_eq!(orbit.complete_through(), length, "{}", orbit.label);
    let asymptotic = |coefficient: &Coefficient| {
        assert_eq!(coefficient.status, Status::Exact);
        match &coefficient.parts {
            None => value(&coefficient.terms),
            Some(parts) => value(&parts.asymptotic),
        }
    };
    let last = orbit.coefficient(length).and_then(|coefficient| coefficient.parts.as_ref());
    let parts = last.unwrap_or_else(|| panic!("{}: no parts at loop {length}", orbit.label));
    Statement {
        paired: orbit.parity == Parity::Paired,
        members: orbit.members,
        singular: orbit.singular,
        gamma: orbit.coefficients.iter().map(asymptotic).collect(),
        finite_size: value(&parts.finite_size),
        minimal_polynomial: orbit.minimal_polynomial,
    }
}

/// Every γ_n, n = 1 … L, of every orbit of the family, both parts at loop L, parity, singular roots,
/// minimal polynomials and counts.
fn check(length: usize, magnons: usize) {
    let family = Family::new(length, magnons).unwrap();
    let record = compute(&Request::new(family, length), None, &NoCheckpoint, &Silent).unwrap().record;
    assert_eq!(family.primaries(), record.primaries);
    assert_eq!(record.orbits.iter().map(|orbit| orbit.members).sum::<usize>(), record.primaries);
    let mut ours: Vec<Statement> = record.orbits.into_iter().map(|orbit| of_engine(length, orbit)).collect();
    let mut theirs: Vec<Statement> = reference(length, magnons).orbits.into_iter().map(of_reference).collect();
    ours.sort();
    theirs.sort();
    assert_eq!(ours.len(), theirs.len(), "({length}, {magnons}): number of orbits");
    for (ours, theirs) in ours.iter().zip(&theirs) {
        let place = format!("({length}, {magnons}), minimal polynomial {:?}", theirs.minimal_polynomial);
        assert_eq!(ours.minimal_polynomial, theirs.minimal_polynomial, "{place}");
        assert_eq!(ours.gamma.len(), theirs.gamma.len(), "{place}");
        for (order, (ours, theirs)) in ours.gamma.iter().zip(&theirs.gamma).enumerate() {
            assert_eq!(ours, theirs, "{place}, loop {}", order + 1);
        }
        assert_eq!(ours.finite_size, theirs.finite_size, "{place}, finite-size term");
        assert_eq!(ours, theirs, "{place}");
    }
}

#[test]
fn lengths_through_nine() {
    for length in 4..=9 {
        for magnons in 2..=length / 2 {
            check(length, magnons);
        }
    }
}

#[test]
fn length_ten() {
    for magnons in 2..=5 {
        check(10, magnons);
    }
}

#[test]
fn length_eleven() {
    for magnons in 2..=5 {
        check(11, magnons);
    }
}

/// (12, 3) has two orbits of the same minimal polynomial, one symmetric and one paired; (12, 5) mirror
/// pairs with ω of degree 9; (12, 4) and (12, 6) have orbits of degree 10.
#[test]
fn length_twelve() {
    for magnons in 2..=6 {
        check(12, magnons);
    }
}

/// The files themselves: as many primaries and coefficients as there must be.
#[test]
fn reference_files_are_complete() {
    for length in 4..=12 {
        for magnons in 2..=length / 2 {
            let reference = reference(length, magnons);
            let members: usize = reference.orbits.iter().map(|orbit| orbit.members).sum();
            assert_eq!(Family::new(length, magnons).unwrap().primaries(), members);
            for orbit in &reference.orbits {
                assert_eq!(orbit.gamma.len(), length);
            }
        }
    }
}
