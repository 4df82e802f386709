//! The stages of a family, separately: spectrum, one lift and one finite-size term modulo one prime, and whole
//! families. `cargo bench`; the finite-size term is to be held against the lift of the same family.

use criterion::{BatchSize, Criterion, criterion_group, criterion_main};
use loopladder::algebra::graded::Grading;
use loopladder::algebra::prime_field::PrimeField;
use loopladder::algebra::quotient::Quotient;
use loopladder::baxter;
use loopladder::chain::{Orbit, spectrum};
use loopladder::engine::{NoCheckpoint, Request, compute};
use loopladder::family::Family;
use loopladder::observer::Silent;
use loopladder::record::Parity;
use loopladder::{finite_size, lift};
use std::hint::black_box;
use std::time::Duration;

fn largest_orbit(length: usize, magnons: usize) -> Orbit {
    let family = Family::new(length, magnons).expect("a family");
    let orbits = spectrum(family, &Silent).expect("a spectrum");
    orbits.into_iter().max_by_key(Orbit::members).expect("an orbit")
}

fn stages(criterion: &mut Criterion) {
    for (length, magnons) in [(8, 4), (10, 4), (10, 5), (12, 5), (12, 6)] {
        let family = Family::new(length, magnons).expect("a family");
        let mut group = criterion.benchmark_group(format!("({length}, {magnons})"));
        group.sample_size(10).measurement_time(Duration::from_secs(2));
        group.bench_function("spectrum", |b| b.iter(|| spectrum(family, &Silent).expect("a spectrum")));
        let orbit = largest_orbit(length, magnons);
        let field = PrimeField::nth(0);
        let ring = Quotient::new(field, orbit.field.iter().map(|c| field.image(c)).collect());
        let start = orbit
            .image(&ring, |p| ring.element(&p.iter().map(|c| field.image(c)).collect::<Vec<u64>>()))
            .expect("a good prime");
        let grading = Grading::new(length - 2);
        let symmetric = orbit.parity == Parity::Symmetric;
        let pair = baxter::one_loop(&ring, family, &start.transfer).expect("a pair");
        let run = || lift::lift(&ring, family, &grading, &pair, symmetric).expect("a lift");
        group.bench_function("lift through loop L-1, one prime", |b| b.iter(run));
        let singular = run().singular;
        let name = if singular { "finite-size term (singular), one prime" } else { "finite-size term, one prime" };
        group.bench_function(name, |b| {
            b.iter(|| finite_size::leading(&ring, family, &pair, singular).expect("a term"));
        });
        group.finish();
    }
}

fn families(criterion: &mut Criterion) {
    let mut group = criterion.benchmark_group("whole family through loop L-1");
    group.sample_size(10).measurement_time(Duration::from_secs(3));
    for (length, magnons) in [(8, 4), (10, 5), (12, 6)] {
        let family = Family::new(length, magnons).expect("a family");
        group.bench_function(format!("({length}, {magnons})"), |b| {
            b.iter_batched(
                || Request::new(family, length - 1),
                |request| black_box(compute(&request, None, &NoCheckpoint, &Silent).expect("a record")),
                BatchSize::SmallInput,
            );
        });
    }
    group.finish();
}

criterion_group!(benches, stages, families);
criterion_main!(benches);
