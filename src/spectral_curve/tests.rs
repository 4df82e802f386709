use super::frame::Frame;
use super::input::OneLoop;
use super::solver::Solver;
use crate::algebra::flint::dense::Real;
use crate::family::Family;
use crate::record::Parity;
use rug::{Float, Rational};

/// Konishi (4,2): Q = v² − 1/12 ... by hand: T Q = (v+½)⁴Q(v−1) + (v−½)⁴Q(v+1).
fn konishi(bits: u32) -> OneLoop {
    let real = |list: &[(i64, i64)]| -> Vec<(Float, Float)> {
        list.iter().map(|&(n, d)| (Float::with_val(bits, Rational::from((n, d))), Float::new(bits))).collect()
    };
    // Roots u = ±1/(2√3), v² = −1/12: Q = v² + 1/12; R = v³ + b v with Q⁺R⁻ − Q⁻R⁺ = −v⁴.
    OneLoop {
        length: 4,
        magnons: 2,
        parity: Parity::Symmetric,
        label: "L4M2-1".into(),
        omega: Float::with_val(bits, 12),
        gamma1: Float::with_val(bits, 12),
        transfer: Vec::new(),
        q: real(&[(1, 12), (0, 1), (1, 1)]),
        r: real(&[(0, 1), (-1, 4), (0, 1), (1, 1)]),
    }
}

#[test]
fn konishi_first_loops() {
    let frame = Frame::new(Family { length: 4, magnons: 2 }, true, 6, 60);
    let state = konishi(frame.bits as u32 + 64);
    let start = std::time::Instant::now();
    let mut solver = Solver::<Real>::new(frame, &state).unwrap();
    for _ in 1..=6 {
        solver.advance(None).unwrap();
        eprintln!("{:?} {:?}", solver.gamma().last().unwrap().to_float(120), solver.consistency());
    }
    eprintln!("{:?}", start.elapsed());
}
