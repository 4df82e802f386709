//! The solver and the driver against published values.

use super::basis::product_value;
use super::extend::{Extension, Request, Stages, decimal, extend};
use super::frame::Frame;
use super::input::OneLoop;
use super::one_loop::of_orbit;
use super::solver::Solver;
use crate::algebra::flint::dense::{Complex, Real, Scalar};
use crate::chain::spectrum;
use crate::error::{Kind, Result};
use crate::family::Family;
use crate::observer::Silent;
use crate::record::{Coefficient, Orbit, Parity, State, Status, Term, Zeta};
use rug::{Float, Rational};
use std::collections::HashMap;
use std::sync::Mutex;

const KONISHI: Family = Family { length: 4, magnons: 2 };

/// Konishi by hand: roots u = ±1/(2√3), so Q = v² + 1/12; R = v³ − v/4 solves Q⁺R⁻ − Q⁻R⁺ = −v⁴.
fn konishi(digits: u32) -> OneLoop {
    let bits = 4 * digits + 64;
    let real = |list: &[(i64, i64)]| -> Vec<(Float, Float)> {
        list.iter().map(|&(n, d)| (Float::with_val(bits, Rational::from((n, d))), Float::new(bits))).collect()
    };
    OneLoop {
        length: 4,
        magnons: 2,
        parity: Parity::Symmetric,
        label: "L4M2-1".into(),
        omega: Float::with_val(bits, 12),
        gamma1: Float::with_val(bits, 12),
        transfer: real(&[(1, 8), (0, 1), (-3, 1), (0, 1), (2, 1)]),
        q: real(&[(1, 12), (0, 1), (1, 1)]),
        r: real(&[(0, 1), (-1, 4), (0, 1), (1, 1)]),
    }
}

fn terms(list: &[(&[u32], &str)]) -> Vec<Term> {
    list.iter()
        .map(|(zeta, value)| Term {
            zeta: zeta.iter().map(|&k| Zeta::Single(k)).collect(),
            value: vec![value.to_string()],
        })
        .collect()
}

fn exact(order: usize, list: &[(&[u32], &str)]) -> Coefficient {
    Coefficient {
        order,
        status: Status::Exact,
        terms: terms(list),
        parts: None,
        spare_digits: None,
        numbers: Vec::new(),
    }
}

/// Konishi through four loops (FSSZ, arXiv:0712.3522).
fn konishi_orbit() -> Orbit {
    Orbit {
        label: "L4M2-1".into(),
        parity: Parity::Symmetric,
        members: 1,
        singular: false,
        minimal_polynomial: vec!["-12".into(), "1".into()],
        generator: "gamma_1".into(),
        coefficients: vec![
            exact(1, &[(&[], "12")]),
            exact(2, &[(&[], "-48")]),
            exact(3, &[(&[], "336")]),
            exact(4, &[(&[], "-2496"), (&[3], "576"), (&[5], "-1440")]),
        ],
        states: vec![State { omega: "12".into(), one_loop: "12.00000000000000000000".into() }],
    }
}

fn extend_konishi(
    orbit: &Orbit,
    loops: usize,
    digits: Option<u32>,
    memory: Option<u64>,
    stages: &Stages,
) -> Result<Extension> {
    let one_loop = |digits| Ok(vec![konishi(digits)]);
    extend(&Request { family: KONISHI, orbit, one_loop: &one_loop, loops, digits, memory }, stages, &Silent)
}

const NOTHING_KEPT: Stages = Stages { load: &|_| None, store: &|_, _| Ok(()) };

/// γ₅: BHJL, arXiv:0906.4062. γ₆: arXiv:1209.0791, 1209.0749 (from memory).
#[test]
fn konishi_through_six_loops() {
    let extension = extend_konishi(&konishi_orbit(), 6, None, None, &NOTHING_KEPT).unwrap();
    let [fifth, sixth] = &extension.coefficients[..] else { panic!("two coefficients") };
    let expected = [
        terms(&[(&[], "15168"), (&[3], "6912"), (&[3, 3], "-5184"), (&[5], "-8640"), (&[7], "30240")]),
        terms(&[
            (&[], "-7680"),
            (&[3], "-262656"),
            (&[3, 3], "-20736"),
            (&[3, 5], "155520"),
            (&[5], "112320"),
            (&[7], "75600"),
            (&[9], "-489888"),
        ]),
    ];
    for (found, expected) in [fifth, sixth].into_iter().zip(expected) {
        assert_eq!(found.status, Status::Recognised);
        assert_eq!(found.terms, expected);
        assert!(found.spare_digits.unwrap() >= 30);
    }
    assert!(extension.agreement > 80.0);
}

/// γ₇: arXiv:1209.0791; γ₈ with Z₁₁: arXiv:1302.1135 (both from memory). About 12 s.
#[test]
#[ignore = "about 12 seconds of computing; run with --ignored"]
fn konishi_seven_and_eight_loops() {
    let extension = extend_konishi(&konishi_orbit(), 8, None, None, &NOTHING_KEPT).unwrap();
    let text = |order: usize| {
        let found = extension.coefficients.iter().find(|c| c.order == order).unwrap();
        assert_eq!(found.status, Status::Recognised);
        serde_json::to_string(&found.terms).unwrap()
    };
    let seventh = text(7);
    for (zeta, value) in
        [("[]", "-2135040"), ("[3]", "5230080"), ("[3,3,3]", "124416"), ("[3,7]", "-1935360"), ("[11]", "7318080")]
    {
        assert!(seventh.contains(&format!("{{\"zeta\":{zeta},\"value\":[\"{value}\"]}}")), "{zeta}: {seventh}");
    }
    let eighth = text(8);
    for (zeta, value) in [
        ("[]", "54408192"),
        ("[11]", "65929248/5"),
        ("[13]", "-106007616"),
        ("[[3,5,3]]", "684288/5"),
        ("[3,[5,3]]", "-684288/5"),
    ] {
        assert!(eighth.contains(&format!("{{\"zeta\":{zeta},\"value\":[\"{value}\"]}}")), "{zeta}: {eighth}");
    }
}

/// γ_1 … γ_n of the first state of the first orbit of the given parity.
fn numbers<S: Scalar>(family: Family, parity: Parity, orders: usize, digits: u32) -> Vec<Float> {
    let orbit = spectrum(family, &Silent).unwrap().into_iter().find(|orbit| orbit.parity == parity).unwrap();
    let frame = Frame::new(family, parity == Parity::Symmetric && !S::COMPLEX, orders, digits);
    let state = of_orbit(&orbit, digits + 60).unwrap().swap_remove(0);
    let mut solver = Solver::<S>::new(frame, &state).unwrap();
    for _ in 0..orders {
        solver.advance(None).unwrap();
    }
    solver.gamma()[1..].iter().map(|value| value.to_float(200)).collect()
}

fn assert_close(found: &Float, expected: &[(&[u32], &str)], digits: i32) {
    let mut sum = Float::new(200);
    for term in terms(expected) {
        sum += product_value(&term.zeta, 200) * Rational::parse(&term.value[0]).map(Rational::from).unwrap();
    }
    let error = Float::with_val(200, found - &sum).abs();
    assert!(
        error
            < Float::with_val(200, sum.abs_ref())
                * Float::with_val(200, rug::ops::Pow::pow(Float::with_val(200, 10), -digits)),
        "{found} against {sum}"
    );
}

/// L = 5: loops 2 and 5 FSS, arXiv:0908.0234; loop 6 found by an independent program.
#[test]
fn five_fields_through_six_loops() {
    let gamma = numbers::<Real>(Family { length: 5, magnons: 2 }, Parity::Symmetric, 6, 30);
    assert_close(&gamma[1], &[(&[], "-24")], 30);
    assert_close(&gamma[4], &[(&[], "6664"), (&[3], "1152"), (&[5], "3840"), (&[7], "-2240")], 30);
    let sixth: &[(&[u32], &str)] = &[
        (&[], "-49176"),
        (&[3], "-17152"),
        (&[5], "-19712"),
        (&[3, 3], "6144"),
        (&[7], "-67200"),
        (&[3, 5], "-7680"),
        (&[9], "64512"),
    ];
    assert_close(&gamma[5], sixth, 30);
}

/// L = 6, M = 3, a singular state (Bethe roots at v = ±½): BO (12, −36, 252).
#[test]
fn a_singular_state() {
    let gamma = numbers::<Real>(Family { length: 6, magnons: 3 }, Parity::Symmetric, 5, 25);
    assert_close(&gamma[1], &[(&[], "-36")], 25);
    assert_close(&gamma[2], &[(&[], "252")], 25);
    assert_close(&gamma[4], &[(&[], "28188"), (&[3], "-288")], 25);
}

/// L = 7, M = 3, a mirror pair, complex arithmetic: 10, −30, 200 (BKS, from memory).
#[test]
fn a_pair() {
    let gamma = numbers::<Complex>(Family { length: 7, magnons: 3 }, Parity::Paired, 3, 20);
    assert_close(&gamma[1], &[(&[], "-30")], 20);
    assert_close(&gamma[2], &[(&[], "200")], 20);
}

/// The same state by the general (complex, no parity) and by the symmetric route.
#[test]
fn two_routes_agree() {
    let real = numbers::<Real>(KONISHI, Parity::Symmetric, 4, 20);
    let complex = numbers::<Complex>(KONISHI, Parity::Symmetric, 4, 20);
    for (a, b) in real.iter().zip(&complex) {
        assert!(Float::with_val(200, a - b).abs() < Float::with_val(200, a.abs_ref()) * 1e-20);
    }
}

/// The agreement of the overdetermined conditions reports an expansion that is too short.
#[test]
fn too_few_terms_are_noticed() {
    let run = |terms: usize| -> (f64, f64) {
        let mut frame = Frame::new(KONISHI, true, 4, 40);
        frame.terms = frame.terms * terms / 8;
        let mut solver = Solver::<Real>::new(frame, &konishi(100)).unwrap();
        for _ in 0..4 {
            if solver.advance(None).is_err() {
                return (0.0, 0.0);
            }
        }
        let error = Float::with_val(200, solver.gamma()[3].to_float(200) - 336u32).abs() / 336u32;
        (solver.consistency().iter().copied().fold(f64::INFINITY, f64::min), -error.log10().to_f64())
    };
    let (full, reached) = run(8);
    let (starved, poor) = run(2);
    assert!(full > 48.0 && reached > 40.0, "{full} {reached}");
    assert!(starved < 40.0, "{starved} {poor}");
    assert!(starved - 8.0 < poor, "claimed {starved}, reached {poor}");
}

#[test]
fn a_wrong_exact_coefficient_stops_everything() {
    let mut orbit = konishi_orbit();
    orbit.coefficients[3] = exact(4, &[(&[], "-2496"), (&[3], "576"), (&[5], "-1441")]);
    let error = extend_konishi(&orbit, 5, Some(30), None, &NOTHING_KEPT).unwrap_err();
    assert_eq!(error.kind(), Kind::Check);
    assert!(error.to_string().contains("loop 4"), "{error}");
}

#[test]
fn too_little_memory_is_said_before_starting() {
    let error = extend_konishi(&konishi_orbit(), 12, Some(2000), Some(1 << 30), &NOTHING_KEPT).unwrap_err();
    assert_eq!(error.kind(), Kind::Bound);
    assert!(error.to_string().contains("GiB"), "{error}");
}

#[test]
fn a_resumed_run_gives_the_same() {
    let kept: Mutex<HashMap<String, Vec<u8>>> = Mutex::new(HashMap::new());
    let store = |key: &str, bytes: &[u8]| {
        kept.lock().unwrap().insert(key.to_string(), bytes.to_vec());
        Ok(())
    };
    let load = |key: &str| kept.lock().unwrap().get(key).cloned();
    let stages = Stages { load: &load, store: &store };
    let first = extend_konishi(&konishi_orbit(), 5, Some(25), None, &stages).unwrap();
    assert_eq!(kept.lock().unwrap().len(), 5);
    // The last stage is lost and another one is damaged: both are computed again.
    kept.lock().unwrap().remove("curve-L4M2-1-1-5-25-5");
    kept.lock().unwrap().insert("curve-L4M2-1-1-5-25-3".into(), b"47.1\nff 2\n".to_vec());
    let second = extend_konishi(&konishi_orbit(), 5, Some(25), None, &stages).unwrap();
    assert_eq!(first.coefficients, second.coefficients);
    assert_eq!(kept.lock().unwrap().len(), 5);
    assert_eq!(first.coefficients[0].status, Status::Numeric);
    assert!(
        first.coefficients[0].numbers[0].starts_with("37519.4705591497859522069"),
        "{:?}",
        first.coefficients[0].numbers
    );
}

#[test]
fn decimals() {
    assert_eq!(decimal(&Float::with_val(100, -12.5), 5), "-12.500");
    assert_eq!(decimal(&Float::with_val(100, 0.0625), 3), "0.063");
    assert_eq!(decimal(&Float::with_val(100, 123456), 3), "123456.0");
}
