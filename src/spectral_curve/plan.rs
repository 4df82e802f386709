//! What to run for which orders, at how many digits, and what that takes.

use super::basis::{basis, last_with_basis};
use super::frame::Frame;
use super::traces::Traces;
use super::unknowns::Unknown;
use crate::error::{Error, Result};
use crate::family::Family;
use crate::record::{Orbit, Parity, Term};
use rug::Rational;

/// Digits that a numeric coefficient gets at least.
const NUMERIC_DIGITS: u32 = 70;
/// Digits beyond what the fit is expected to consume.
const MARGIN: f64 = 50.0;

/// Decimal digits by which the integers grow per order, at least.
const SLOPE: f64 = 1.5;

/// One run of the solver over all embeddings of an orbit.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Run {
    /// The first order taken from it.
    pub first: usize,
    /// The last order, through which the solver goes.
    pub last: usize,
    /// Digits.
    pub digits: u32,
    /// Whether its orders have a basis to be recognised in.
    pub recognise: bool,
}

/// Bytes and single-thread seconds of a run, estimated.
#[derive(Clone, Copy, Debug)]
pub struct Cost {
    /// Peak memory.
    pub bytes: u64,
    /// Seconds on one thread, all embeddings, good to a factor of about two.
    pub seconds: f64,
}

/// The runs for the orders first … loops of an orbit.
///
/// Orders with a basis share one run at the digits the last of them needs: basis size times the
/// expected size of the integers, extrapolated from the exact coefficients (which grow by about one
/// digit per order), plus a margin. Later orders get a second run at few digits.
pub fn runs(orbit: &Orbit, length: usize, first: usize, loops: usize, digits: Option<u32>) -> Vec<Run> {
    let recognisable = last_with_basis(length, loops);
    let mut runs = Vec::new();
    if recognisable >= first {
        let needed = digits.unwrap_or_else(|| needed_digits(orbit, recognisable));
        runs.push(Run { first, last: recognisable, digits: needed, recognise: true });
    }
    if loops > recognisable {
        let digits = digits.unwrap_or(NUMERIC_DIGITS);
        runs.push(Run { first: first.max(recognisable + 1), last: loops, digits, recognise: false });
    }
    runs
}

/// The digits with which the coefficient at `order` can be expected to be recognised.
fn needed_digits(orbit: &Orbit, order: usize) -> u32 {
    let size = basis(order).len() as f64 + 1.0;
    (size * (expected_height(orbit, order) + 0.31) + MARGIN).ceil() as u32
}

/// log₁₀ of the largest integer expected in the relations at `order`, extrapolated linearly from the
/// last exact coefficient.
fn expected_height(orbit: &Orbit, order: usize) -> f64 {
    let traces = Traces::new(&minimal_polynomial(orbit));
    let known: Vec<(usize, f64)> = orbit
        .coefficients
        .iter()
        .filter(|coefficient| !coefficient.terms.is_empty() && coefficient.order < order)
        .map(|coefficient| {
            (coefficient.order, traces.height(&coefficient.terms.iter().map(values).collect::<Vec<_>>()))
        })
        .collect();
    let Some(&(last, height)) = known.last() else { return 2.0 + SLOPE * order as f64 };
    let slope = known
        .first()
        .filter(|(first, _)| *first < last)
        .map_or(SLOPE, |(first, low)| (height - low) / (last - first) as f64);
    height + (order - last) as f64 * slope.max(SLOPE) + 1.0
}

/// The minimal polynomial of ω as rationals.
pub fn minimal_polynomial(orbit: &Orbit) -> Vec<Rational> {
    orbit.minimal_polynomial.iter().map(|text| rational(text)).collect()
}

/// The coefficients of a term in powers of ω.
pub fn values(term: &Term) -> Vec<Rational> {
    term.value.iter().map(|text| rational(text)).collect()
}

/// A rational of a checked record.
fn rational(text: &str) -> Rational {
    Rational::parse(text).map(Rational::from).unwrap_or_default()
}

/// What a run costs: everything at all points and orders is kept, which dominates the memory; the
/// seconds are a count of multiplications times their measured duration.
pub fn cost(family: Family, parity: Parity, embeddings: usize, run: &Run) -> Cost {
    let frame = Frame::new(family, parity == Parity::Symmetric, run.last, run.digits);
    let (planes, products) = if parity == Parity::Symmetric { (1.0, 1.0) } else { (2.0, 4.0) };
    let limbs = (frame.bits as f64 / 64.0).ceil();
    let each = 64.0 + 8.0 * limbs;
    let (points, terms) = (frame.points as f64, frame.terms as f64);
    let kept: f64 = (0..=run.last).map(|n| frame.window(n) as f64).sum();
    let responses = Unknown::powers(&frame, run.last).len() as f64 + 2.0;
    let logs: f64 = (0..=run.last).map(|n| n as f64 + 1.0).sum();
    let tails = (logs + 2.0 * responses) * 36.0 * terms;
    let bytes = (20.0 * points * kept + tails) * each * planes;
    let recursion: f64 =
        (1..run.last).map(|n| n as f64 * (frame.window(n) as f64).powi(2)).sum::<f64>() * 16.0 * points;
    let stride = 2.0 / frame.step as f64;
    let expansion: f64 =
        ((0..=run.last).map(|n| ((n + 1) * (n + 2)) as f64).sum::<f64>() + 6.0 * responses) * 16.0 * terms * terms
            / (2.0 * stride);
    // About 12 ns a limb up to 8 limbs, and the square of the length beyond, Karatsuba from 16 on.
    let multiplication = 3e-9 * limbs.powf(1.6) + 3e-8;
    Cost {
        bytes: bytes as u64,
        seconds: embeddings as f64 * (recursion * 0.35 + expansion * 0.35) * multiplication * products,
    }
}

/// Refuses a run that does not fit into `memory` bytes.
///
/// # Errors
/// A bound error that says what would be needed.
pub fn check_memory(family: Family, label: &str, run: &Run, needed: u64, memory: Option<u64>) -> Result<()> {
    let gib = |bytes: u64| bytes as f64 / f64::from(1u32 << 30);
    match memory {
        Some(limit) if needed > limit => Err(Error::bound(format!(
            "family {family}, orbit {label}: {} loops at {} digits need about {:.2} GiB of memory for the spectral curve, and the bound is {:.2} GiB; raise the memory bound, or ask for fewer loops or digits",
            run.last,
            run.digits,
            gib(needed),
            gib(limit)
        ))),
        _ => Ok(()),
    }
}
