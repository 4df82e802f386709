//! The spectral curve on one state, and the lattice reduction of one coefficient.
//! `cargo bench --bench spectral_curve`, on one thread: RAYON_NUM_THREADS=1.

use criterion::{Criterion, criterion_group, criterion_main};
use loopladder::algebra::flint::dense::{Complex, Real, Scalar};
use loopladder::chain::spectrum;
use loopladder::family::Family;
use loopladder::observer::Silent;
use loopladder::record::Parity;
use loopladder::spectral_curve::basis::basis;
use loopladder::spectral_curve::frame::Frame;
use loopladder::spectral_curve::one_loop::of_orbit;
use loopladder::spectral_curve::relation::relation;
use loopladder::spectral_curve::solver::Solver;
use rug::Float;
use std::hint::black_box;

fn solve<S: Scalar>(length: usize, magnons: usize, orders: usize, digits: u32) -> Real {
    let family = Family { length, magnons };
    let orbit = spectrum(family, &Silent).expect("spectrum").swap_remove(0);
    let state = of_orbit(&orbit, digits + 60).expect("decimals").swap_remove(0);
    let mut solver =
        Solver::<S>::new(Frame::new(family, orbit.parity == Parity::Symmetric, orders, digits), &state).expect("state");
    for _ in 0..orders {
        solver.advance(None).expect("order");
    }
    solver.gamma()[orders].clone()
}

fn curve(c: &mut Criterion) {
    let mut group = c.benchmark_group("spectral curve");
    group.sample_size(10);
    group.bench_function("L = 4, M = 2, 6 loops, 100 digits", |b| b.iter(|| solve::<Real>(black_box(4), 2, 6, 100)));
    group.bench_function("L = 6, M = 3, 5 loops, 50 digits", |b| b.iter(|| solve::<Real>(black_box(6), 3, 5, 50)));
    group.bench_function("L = 7, M = 3, pair, 3 loops, 30 digits", |b| {
        b.iter(|| solve::<Complex>(black_box(7), 3, 3, 30))
    });
    let numbers: Vec<Float> = basis(8).iter().map(|element| element.value(1200)).collect();
    let value = numbers
        .iter()
        .enumerate()
        .fold(Float::new(1200), |sum, (i, x)| sum + Float::with_val(1200, x * (1000 * i as i64 - 7777)));
    let error = Float::with_val(53, Float::i_exp(1, -800));
    group.bench_function("relation among 20 numbers at 240 digits", |b| {
        b.iter(|| relation(black_box(&value), &error, &numbers))
    });
    group.finish();
}

criterion_group!(benches, curve);
criterion_main!(benches);
