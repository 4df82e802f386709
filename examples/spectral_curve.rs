//! Times the spectral curve on one state and prints the digits it finds:
//! `cargo run --release --example spectral_curve -- L M orbit loops digits`, orbits counted from 1;
//! the first real embedding is used. THREADS sets the number of threads (default 1).

use loopladder::algebra::flint::dense::{Complex, Real};
use loopladder::chain::spectrum;
use loopladder::family::Family;
use loopladder::observer::Silent;
use loopladder::record::Parity;
use loopladder::spectral_curve::frame::Frame;
use loopladder::spectral_curve::one_loop::of_orbit;
use loopladder::spectral_curve::solver::Solver;
use rug::Float;

fn main() {
    let arguments: Vec<usize> = std::env::args().skip(1).filter_map(|text| text.parse().ok()).collect();
    let [length, magnons, orbit, loops, digits] = arguments[..] else { panic!("give L M orbit loops digits") };
    let threads = std::env::var("THREADS").ok().and_then(|text| text.parse().ok()).unwrap_or(1);
    rayon::ThreadPoolBuilder::new().num_threads(threads).build_global().expect("threads");
    let family = Family::new(length, magnons).expect("family");
    let orbit = spectrum(family, &Silent).expect("spectrum").swap_remove(orbit - 1);
    let complex = orbit.parity == Parity::Paired || std::env::var("COMPLEX").is_ok();
    let frame = Frame::new(family, !complex, loops, digits as u32);
    let state = of_orbit(&orbit, frame.bits as u32 / 3).expect("decimals").swap_remove(0);
    println!("{}, omega = {:.20}: {frame:?}", state.label, state.omega);
    if complex {
        run(|| Solver::<Complex>::new(frame.clone(), &state).map(|s| Box::new(s) as Box<dyn Steps>), loops)
    } else {
        run(|| Solver::<Real>::new(frame.clone(), &state).map(|s| Box::new(s) as Box<dyn Steps>), loops)
    }
}

trait Steps {
    fn step(&mut self) -> (Float, f64);
}

impl<S: loopladder::algebra::flint::dense::Scalar> Steps for Solver<S> {
    fn step(&mut self) -> (Float, f64) {
        self.advance(None).expect("order");
        (self.gamma().last().expect("value").to_float(3000), *self.consistency().last().expect("value"))
    }
}

fn run(make: impl Fn() -> loopladder::error::Result<Box<dyn Steps>>, loops: usize) {
    let start = std::time::Instant::now();
    let mut solver = make().expect("state");
    println!("set up: {:.2} s", start.elapsed().as_secs_f64());
    for n in 1..=loops {
        let (gamma, digits) = solver.step();
        println!(
            "{n} {:.1} digits {:.2} s  {}",
            digits,
            start.elapsed().as_secs_f64(),
            gamma.to_string_radix(10, Some(80))
        );
    }
}
