//! The engine against published values, each with its source beside it, and against closed formulas;
//! structure of the coefficients; determinism. Coupling g² = λ/(16π²) unless said otherwise.
//!
//! Sources: BJ Bajnok, Janik, arXiv:0807.0399 · BHJL Bajnok, Hegedus, Janik, Lukowski, arXiv:0906.4062 ·
//! BKS Beisert, Kristjansen, Staudacher, hep-th/0303060 · BDS Beisert, Dippel, Staudacher, hep-th/0405001 ·
//! BO Beccaria, Ortix, JHEP 09 (2006) 016 · FSSZ Fiamberti, Santambrogio, Sieg, Zanon, arXiv:0712.3522 ·
//! FSS Fiamberti, Santambrogio, Sieg, arXiv:0908.0234.

use loopladder::algebra::number_field::NumberField;
use loopladder::algebra::poly;
use loopladder::algebra::rationals::Rationals;
use loopladder::algebra::ring::Ring;
use loopladder::engine::{Checkpoint, NoCheckpoint, Request, compute};
use loopladder::error::Result;
use loopladder::family::Family;
use loopladder::observer::Silent;
use loopladder::record::{Orbit, Parity, Record, Status, Term, Zeta};
use rug::{Integer, Rational};
use std::collections::HashMap;
use std::sync::Mutex;
use std::sync::atomic::{AtomicUsize, Ordering};

fn record(length: usize, magnons: usize, loops: usize) -> Record {
    let family = Family::new(length, magnons).unwrap();
    compute(&Request::new(family, loops), None, &NoCheckpoint, &Silent).unwrap().record
}

fn orbit<'a>(record: &'a Record, minimal: &[&str], parity: Parity) -> &'a Orbit {
    let found: Vec<&Orbit> =
        record.orbits.iter().filter(|orbit| orbit.minimal_polynomial == *minimal && orbit.parity == parity).collect();
    assert_eq!(found.len(), 1, "one orbit with minimal polynomial {minimal:?}");
    found[0]
}

/// A rational value for each zeta product that occurs, as "-2496 + 576 z3 - 1440 z5", for orbits of degree 1.
fn written(terms: &[Term]) -> String {
    let mut text = String::new();
    for term in terms {
        let [value] = term.value.as_slice() else { panic!("a value of degree 1") };
        let product: String = term
            .zeta
            .iter()
            .map(|zeta| match zeta {
                Zeta::Single(k) => format!(" z{k}"),
                Zeta::Multiple(_) => panic!("multiple zeta values do not occur here"),
            })
            .collect();
        let (sign, size) = value.strip_prefix('-').map_or(("+", value.as_str()), |size| ("-", size));
        text += &match (text.is_empty(), sign) {
            (true, "+") => format!("{size}{product}"),
            (true, _) => format!("-{size}{product}"),
            (false, sign) => format!(" {sign} {size}{product}"),
        };
    }
    text
}

fn rational(text: &str) -> Rational {
    text.parse().unwrap()
}

/// The coefficients of 1, ω, … of one zeta product in γ_n; zeros when it is absent.
fn coefficient(terms: &[Term], zeta: &[u32], degree: usize) -> Vec<Rational> {
    let product: Vec<Zeta> = zeta.iter().copied().map(Zeta::Single).collect();
    terms
        .iter()
        .find(|term| term.zeta == product)
        .map_or_else(|| vec![Rational::new(); degree], |term| term.value.iter().map(|c| rational(c)).collect())
}

fn terms(orbit: &Orbit, order: usize) -> &[Term] {
    let coefficient = orbit.coefficient(order).unwrap();
    assert_eq!(coefficient.status, Status::Exact);
    &coefficient.terms
}

#[test]
fn konishi() {
    let record = record(4, 2, 4);
    let state = orbit(&record, &["-12", "1"], Parity::Symmetric);
    // Loops 1–3: BKS; loop 4: FSSZ.
    let expected = ["12", "-48", "336", "-2496 + 576 z3 - 1440 z5"];
    for (order, expected) in expected.into_iter().enumerate() {
        assert_eq!(written(terms(state, order + 1)), expected, "loop {}", order + 1);
    }
    let parts = state.coefficient(4).unwrap().parts.as_ref().unwrap();
    // The finite-size part: BJ. The asymptotic part: BHJL (also BES).
    assert_eq!(written(&parts.finite_size), "324 + 864 z3 - 1440 z5");
    assert_eq!(written(&parts.asymptotic), "-2820 - 288 z3");
}

#[test]
fn length_five() {
    let record = record(5, 2, 5);
    let state = orbit(&record, &["-8", "1"], Parity::Symmetric);
    // Loops 1–3: BKS; loop 4: BDS with the dressing phase of BES; loop 5: FSS.
    let expected = ["8", "-24", "136", "-920 - 128 z3", "6664 + 1152 z3 + 3840 z5 - 2240 z7"];
    for (order, expected) in expected.into_iter().enumerate() {
        assert_eq!(written(terms(state, order + 1)), expected, "loop {}", order + 1);
    }
}

/// BO eq. 4.17, in λ/(8π²): 6, −9, 63/2, −621/4, 7047/8 without the dressing phase, which first brings ζ3
/// at loop 5 for this state.
#[test]
fn length_six_three_magnons() {
    let record = record(6, 3, 6);
    let state = orbit(&record, &["-12", "1"], Parity::Symmetric);
    assert!(state.singular);
    for (order, printed) in ["6", "-9", "63/2", "-621/4", "7047/8"].into_iter().enumerate() {
        let value = coefficient(terms(state, order + 1), &[], 1).remove(0);
        assert_eq!(value >> (order as u32 + 1), rational(printed), "loop {}", order + 1);
    }
    // No paper at hand prints these; the asymptotic one was checked through twisted Bethe equations.
    assert_eq!(written(terms(state, 5)), "28188 - 288 z3");
    assert_eq!(written(terms(state, 6)), "-339012 + 7776 z3 + 12096 z5 - 18144 z9");
}

/// BKS (from memory), in λ/(8π²).
#[test]
fn length_seven() {
    let two = record(7, 2, 3);
    let three = record(7, 3, 3);
    for (state, printed) in [
        (orbit(&two, &["-4", "1"], Parity::Symmetric), ["2", "-3/2", "37/16"]),
        (orbit(&two, &["-12", "1"], Parity::Symmetric), ["6", "-21/2", "555/16"]),
        (orbit(&three, &["-10", "1"], Parity::Paired), ["5", "-15/2", "25"]),
    ] {
        for (order, printed) in printed.into_iter().enumerate() {
            assert_eq!(terms(state, order + 1).len(), 1);
            let value = coefficient(terms(state, order + 1), &[], 1).remove(0);
            assert_eq!(value >> (order as u32 + 1), rational(printed), "{}, loop {}", state.label, order + 1);
        }
    }
}

/// BO eqs. 4.26–4.28: printed decimals in λ/(8π²), without the dressing phase; each must be met within
/// one unit of its last printed digit.
#[test]
fn length_eight_four_magnons() {
    let printed: [[&str; 5]; 3] = [
        ["3.24559", "-1.88899", "1.2772", "1.0331", "-8.2996"],
        ["5.45222", "-7.94042", "31.2193", "-159.093", "896.064"],
        ["11.3022", "-22.1706", "79.5035", "-352.94", "1777.24"],
    ];
    let record = record(8, 4, 5);
    // ω³ − 40ω² + 464ω − 1600: BO.
    let states = orbit(&record, &["-1600", "464", "-40", "1"], Parity::Symmetric);
    for (state, printed) in states.states.iter().zip(&printed) {
        // Twenty certain places of ω leave all printed digits certain.
        let omega = decimal(&state.omega).0;
        for (order, printed) in printed.iter().enumerate() {
            let value = coefficient(terms(states, order + 1), &[], 3);
            let value = poly::evaluate(&Rationals, &value, &omega) >> (order as u32 + 1);
            let (expected, unit) = decimal(printed);
            let distance = Rational::from(&value - &expected).abs();
            assert!(distance <= unit, "loop {}: {} is not {printed}", order + 1, value.to_f64());
        }
    }
    assert_eq!(states.states.len(), 3);
}

/// A decimal as a rational, and one unit of its last place.
fn decimal(text: &str) -> (Rational, Rational) {
    let (whole, fraction) = text.split_once('.').unwrap();
    let unit = Rational::from((1, Integer::from(Integer::u_pow_u(10, fraction.len() as u32))));
    let digits: Integer = format!("{whole}{fraction}").parse().unwrap();
    (Rational::from(&unit * &digits), unit)
}

/// Two magnons, every L from 4 to 20, exactly (BKS, from memory): with s = sin(πn/(L−1)), c = cos(πn/(L−1)),
/// γ₁ = 16s², γ₂ = −256s⁴[1/4 + c²/(L−1)], γ₃ = 4096s⁶[1/8 + c²(3(L−2) + 2(L+4)c²)/(4(L−1)²)],
/// 0 < n < (L−1)/2. With s² = ω/16 they are polynomials in ω; and ω = 8 − 8cos(2πn/(L−1)) are all the
/// states exactly when (Π minimal polynomials)² times trivial factors is the Chebyshev polynomial T_{L−1} − 1.
#[test]
fn two_magnons_through_length_twenty() {
    let q = Rationals;
    for length in 4i32..=20 {
        let record = record(length as usize, 2, 3);
        let mut all = vec![Rational::from(1)];
        for orbit in &record.orbits {
            assert_eq!((orbit.generator.as_str(), orbit.parity), ("gamma_1", Parity::Symmetric));
            let minimal: Vec<Rational> = orbit.minimal_polynomial.iter().map(|c| rational(c)).collect();
            all = poly::mul(&q, &all, &minimal);
            let field = NumberField::new(minimal);
            let omega = field.element(&[Rational::new(), Rational::from(1)]);
            let sine = field.scale(&omega, &field.ratio(1, 16));
            let cosine = field.sub(&field.one(), &sine);
            let n = i64::from(length);
            let square = |x: &Vec<Rational>| field.mul(x, x);
            let two = field.add(&field.constant(&field.ratio(1, 4)), &field.scale(&cosine, &field.ratio(1, n - 1)));
            let second = field.scale(&field.mul(&square(&sine), &two), &field.ratio(-256, 1));
            let inner = field.add(&field.integer(3 * (n - 2)), &field.scale(&cosine, &field.ratio(2 * (n + 4), 1)));
            let inner = field.scale(&field.mul(&cosine, &inner), &field.ratio(1, 4 * (n - 1) * (n - 1)));
            let three = field.add(&field.constant(&field.ratio(1, 8)), &inner);
            let third = field.scale(&field.mul(&field.mul(&square(&sine), &sine), &three), &field.ratio(4096, 1));
            for (order, expected) in [omega, second, third].iter().enumerate() {
                let terms = terms(orbit, order + 1);
                assert_eq!(terms.len(), 1, "{}, loop {}", orbit.label, order + 1);
                assert_eq!(
                    coefficient(terms, &[], orbit.degree()),
                    field.coefficients(expected),
                    "{}, loop {}",
                    orbit.label,
                    order + 1
                );
            }
        }
        // The states: P(8 − 8x)² (x − 1) (x + 1 when L is odd) ∝ T_{L−1}(x) − 1.
        let substitution = [Rational::from(8), Rational::from(-8)];
        let in_x = all
            .iter()
            .rev()
            .fold(Vec::new(), |value, c| poly::add(&q, &poly::mul(&q, &value, &substitution), std::slice::from_ref(c)));
        let mut product = poly::mul(&q, &poly::mul(&q, &in_x, &in_x), &[Rational::from(-1), Rational::from(1)]);
        if length % 2 == 1 {
            product = poly::mul(&q, &product, &[Rational::from(1), Rational::from(1)]);
        }
        let (mut before, mut chebyshev) = (vec![Rational::from(1)], vec![Rational::new(), Rational::from(1)]);
        for _ in 2..length {
            let next = poly::sub(&q, &poly::mul(&q, &chebyshev, &[Rational::new(), Rational::from(2)]), &before);
            (before, chebyshev) = (chebyshev, next);
        }
        let target = poly::sub(&q, &chebyshev, &[Rational::from(1)]);
        let monic = |p: &[Rational]| -> Vec<Rational> {
            let p = poly::trim(&q, p.to_vec());
            p.iter().map(|c| Rational::from(c / p.last().unwrap())).collect()
        };
        assert_eq!(monic(&product), monic(&target), "L = {length}: the states");
    }
}

/// Numbers of primaries: necklace formula; L = 6 also BO. The records hold as many, by orbits and by states.
#[test]
fn counts_of_primaries() {
    for (length, counts) in [
        (4, vec![1]),
        (5, vec![1]),
        (6, vec![2, 1]),
        (7, vec![2, 2]),
        (8, vec![3, 3, 3]),
        (9, vec![3, 6, 4]),
        (10, vec![4, 7, 10, 4]),
        (12, vec![5, 13, 24, 23, 14]),
    ] {
        for (index, count) in counts.into_iter().enumerate() {
            let record = record(length, index + 2, 1);
            assert_eq!(record.primaries, count);
            let members: usize = record.orbits.iter().map(|orbit| orbit.members).sum();
            assert_eq!(members, count);
            for orbit in &record.orbits {
                let each = if orbit.parity == Parity::Paired { 2 } else { 1 };
                assert_eq!(orbit.members, each * orbit.degree());
                assert_eq!(orbit.states.len(), orbit.degree());
                // Formulas §1: every symmetric primary with odd M is singular.
                if orbit.parity == Parity::Symmetric && (index + 2) % 2 == 1 {
                    assert!(orbit.singular, "{}", orbit.label);
                }
            }
        }
    }
}

/// No even zeta values and no ζ(1) anywhere; loop n of the asymptotic part has weight at most 2n − 5; the
/// finite-size part has single zeta values only, through ζ(2L−3), whose coefficient is −γ₁² binom(2L−3, L−2)
/// (observed for every state so far, formulas §5).
#[test]
fn structure_of_the_coefficients() {
    for length in 4..=10 {
        for magnons in 2..=length / 2 {
            for orbit in record(length, magnons, length).orbits {
                structure(length, &orbit);
            }
        }
    }
}

fn structure(length: usize, orbit: &Orbit) {
    let weights = |term: &Term| -> Vec<u32> {
        term.zeta
            .iter()
            .map(|zeta| match zeta {
                Zeta::Single(k) => *k,
                Zeta::Multiple(_) => panic!("{}: a multiple zeta value", orbit.label),
            })
            .collect()
    };
    for coefficient in &orbit.coefficients {
        for term in &coefficient.terms {
            assert!(weights(term).iter().all(|k| k % 2 == 1 && *k >= 3), "{}: {:?}", orbit.label, term.zeta);
        }
        let asymptotic = coefficient.parts.as_ref().map_or(&coefficient.terms, |parts| &parts.asymptotic);
        for term in asymptotic {
            let weight: u32 = weights(term).iter().sum();
            assert!(weight == 0 || weight as usize + 5 <= 2 * coefficient.order, "{}: {:?}", orbit.label, term.zeta);
        }
    }
    let parts = orbit.coefficient(length).unwrap().parts.as_ref().unwrap();
    let top = 2 * length as u32 - 3;
    for term in &parts.finite_size {
        assert!(term.zeta.len() <= 1, "{}: a zeta product in the finite-size part", orbit.label);
        assert!(weights(term).iter().all(|k| *k <= top), "{}", orbit.label);
    }
    assert_eq!(orbit.generator, "gamma_1");
    let field = NumberField::new(orbit.minimal_polynomial.iter().map(|c| rational(c)).collect());
    let omega = field.element(&[Rational::new(), Rational::from(1)]);
    let binomial = Rational::from(-Integer::from(Integer::binomial_u(top, length as u32 - 2)));
    let expected = field.scale(&field.mul(&omega, &omega), &binomial);
    let found = coefficient(&parts.finite_size, &[top], orbit.degree());
    assert_eq!(found, field.coefficients(&expected), "{}: zeta({top})", orbit.label);
    // The sum of the parts is the coefficient, zeta product by zeta product.
    for term in &orbit.coefficient(length).unwrap().terms {
        let zeta = weights(term);
        let sum = poly::add(
            &Rationals,
            &coefficient(&parts.asymptotic, &zeta, orbit.degree()),
            &coefficient(&parts.finite_size, &zeta, orbit.degree()),
        );
        let whole = coefficient(terms(orbit, length), &zeta, orbit.degree());
        assert_eq!(poly::trim(&Rationals, whole), sum, "{}", orbit.label);
    }
}

/// Every printed decimal is the root it stands for, rounded: the minimal polynomial changes sign within half a
/// unit of the last place, and there are as many different ones as its degree.
#[test]
fn decimals_are_certain() {
    for (length, magnons) in [(6, 2), (8, 4), (9, 3), (10, 4), (11, 5), (12, 4), (12, 5), (12, 6)] {
        for orbit in record(length, magnons, 1).orbits {
            let minimal: Vec<Rational> = orbit.minimal_polynomial.iter().map(|c| rational(c)).collect();
            let mut last = Rational::from(-1);
            for state in &orbit.states {
                if orbit.degree() == 1 {
                    assert!(poly::evaluate(&Rationals, &minimal, &rational(&state.omega)).is_zero());
                    continue;
                }
                assert_eq!(state.omega, state.one_loop, "{}", orbit.label);
                let (value, unit) = decimal(&state.omega);
                assert!(unit < Rational::from((1, 1_000_000_000_000_000_000u64)) && value > last, "{}", orbit.label);
                let half = unit / 2;
                let ends = [Rational::from(&value - &half), Rational::from(&value + &half)];
                let signs = ends.map(|end| poly::evaluate(&Rationals, &minimal, &end).cmp0());
                assert_ne!(signs[0], signs[1], "{}: {}", orbit.label, state.omega);
                last = value;
            }
            assert_eq!(orbit.states.len(), orbit.degree());
        }
    }
}

/// A store in memory that counts.
#[derive(Default)]
struct Memory {
    kept: Mutex<HashMap<String, Vec<u8>>>,
    loaded: AtomicUsize,
    stored: AtomicUsize,
}

impl Checkpoint for Memory {
    fn load(&self, key: &str) -> Option<Vec<u8>> {
        let found = self.kept.lock().unwrap().get(key).cloned();
        self.loaded.fetch_add(usize::from(found.is_some()), Ordering::Relaxed);
        found
    }
    fn store(&self, key: &str, bytes: &[u8]) -> Result<()> {
        self.stored.fetch_add(1, Ordering::Relaxed);
        self.kept.lock().unwrap().insert(key.into(), bytes.to_vec());
        Ok(())
    }
}

/// The same bytes, record and certificate, for one and two threads, with a store of finished work units, and
/// from that store alone.
#[test]
fn results_are_deterministic() {
    for (length, magnons) in [(8, 3), (8, 4), (9, 3), (10, 3)] {
        let family = Family::new(length, magnons).unwrap();
        let request = Request { certificate: true, ..Request::new(family, length) };
        let bytes = |threads: usize, store: &dyn Checkpoint| {
            let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().unwrap();
            let outcome = pool.install(|| compute(&request, None, store, &Silent)).unwrap();
            outcome.record.to_json() + &outcome.certificate.unwrap().to_json()
        };
        let one = bytes(1, &NoCheckpoint);
        assert_eq!(one, bytes(2, &NoCheckpoint), "{family}: one and two threads");
        let store = Memory::default();
        assert_eq!(one, bytes(2, &store), "{family}: with a store");
        let units = store.stored.load(Ordering::Relaxed);
        assert!(units > 0 && store.loaded.load(Ordering::Relaxed) == 0);
        assert_eq!(one, bytes(1, &store), "{family}: from the store");
        assert_eq!(store.stored.load(Ordering::Relaxed), units, "{family}: nothing was computed again");
        assert_eq!(store.loaded.load(Ordering::Relaxed), units);
        // Damaged units are computed again, not believed.
        store.kept.lock().unwrap().values_mut().for_each(|unit| unit.truncate(unit.len() / 2));
        assert_eq!(one, bytes(2, &store), "{family}: after damage to the store");
    }
}
