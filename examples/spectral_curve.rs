//! Times the spectral curve on states with a known one-loop solution, and prints what it finds:
//! `cargo run --release --example spectral_curve -- L M n loops digits` for the two-magnon state
//! with mode number n, u = ½ cot(πn/(L−1)); `6 3 0 loops digits` for Q = v³ − v/4.

use loopladder::algebra::flint::dense::{Complex, Real};
use loopladder::family::Family;
use loopladder::record::Parity;
use loopladder::spectral_curve::frame::Frame;
use loopladder::spectral_curve::input::OneLoop;
use loopladder::spectral_curve::solver::Solver;
use rug::Float;
use rug::float::Constant;

fn main() {
    let arguments: Vec<usize> = std::env::args().skip(1).filter_map(|text| text.parse().ok()).collect();
    let [length, magnons, mode, loops, digits] = arguments[..] else { panic!("give L M n loops digits") };
    let threads = std::env::var("THREADS").ok().and_then(|text| text.parse().ok()).unwrap_or(1);
    rayon::ThreadPoolBuilder::new().num_threads(threads).build_global().expect("threads");
    let complex = std::env::var("COMPLEX").is_ok();
    let frame = Frame::new(Family { length, magnons }, !complex, loops, digits as u32);
    println!("{frame:?}");
    let state = state(length, magnons, mode, frame.bits as u32 + 64);
    if complex { run(|| Solver::<Complex>::new(frame.clone(), &state).map(|s| Box::new(s) as Box<dyn Steps>), loops) } else { run(|| Solver::<Real>::new(frame.clone(), &state).map(|s| Box::new(s) as Box<dyn Steps>), loops) }
}

trait Steps {
    fn step(&mut self) -> (Float, f64);
}

impl<S: loopladder::algebra::flint::dense::Scalar> Steps for Solver<S> {
    fn step(&mut self) -> (Float, f64) {
        self.advance().expect("order");
        (self.gamma().last().expect("value").to_float(3000), *self.consistency().last().expect("value"))
    }
}

fn run(make: impl Fn() -> loopladder::error::Result<Box<dyn Steps>>, loops: usize) {
    let start = std::time::Instant::now();
    let mut solver = make().expect("state");
    println!("set up: {:.2} s", start.elapsed().as_secs_f64());
    for n in 1..=loops {
        let (gamma, digits) = solver.step();
        println!("{n} {:.1} digits {:.2} s  {}", digits, start.elapsed().as_secs_f64(), gamma.to_string_radix(10, Some(80)));
    }
}

fn state(length: usize, magnons: usize, mode: usize, bits: u32) -> OneLoop {
    let zero = || Float::new(bits);
    let one = || Float::with_val(bits, 1);
    let (q, gamma1) = if magnons == 2 {
        let angle = Float::with_val(bits, Constant::Pi) * mode as u32 / (length as u32 - 1);
        let cot = Float::with_val(bits, angle.cot_ref());
        let sine = angle.sin();
        (vec![cot.square() / 4u32, zero(), one()], sine.square() * 16u32)
    } else {
        (vec![zero(), Float::with_val(bits, -0.25), zero(), one()], Float::with_val(bits, 12))
    };
    let r = second_solution(&q, length, bits);
    let pairs = |list: Vec<Float>| list.into_iter().map(|x| (x, zero())).collect();
    OneLoop {
        length,
        magnons,
        parity: Parity::Symmetric,
        label: format!("L{length}M{magnons}"),
        gamma1,
        transfer: Vec::new(),
        q: pairs(q),
        r: pairs(r),
    }
}

/// Q₂ from Q₁⁺Q₂⁻ − Q₁⁻Q₂⁺ = (2M−L−1) v^L, from the top coefficient down.
fn second_solution(q: &[Float], length: usize, bits: u32) -> Vec<Float> {
    let magnons = q.len() - 1;
    let degree = length + 1 - magnons;
    let wronskian = |r: &[Float]| -> Vec<Float> {
        let shift = |x: &[Float], sign: f64| -> Vec<Float> {
            let mut result = x.to_vec();
            for low in 0..result.len() {
                for j in (low..result.len() - 1).rev() {
                    let term = Float::with_val(bits, &result[j + 1] * (sign / 2.0));
                    result[j] += term;
                }
            }
            result
        };
        let mut product = vec![Float::new(bits); q.len() + r.len() - 1];
        for sign in [1.0, -1.0] {
            let (a, b) = (shift(q, sign), shift(r, -sign));
            for (i, x) in a.iter().enumerate() {
                for (j, y) in b.iter().enumerate() {
                    product[i + j] += Float::with_val(bits, x * y) * sign;
                }
            }
        }
        product
    };
    let mut r = vec![Float::new(bits); degree + 1];
    r[degree] = Float::with_val(bits, 1);
    // The v^k term of R changes the coefficient of v^{k+M−1} by M − k.
    for k in (0..degree).rev().filter(|&k| k != magnons) {
        let Some(place) = (k + magnons).checked_sub(1) else { continue };
        let wrong = wronskian(&r)[place].clone();
        r[k] = -wrong / (magnons as i64 - k as i64);
    }
    r
}
