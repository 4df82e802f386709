//! Loops past the wrapping order for one orbit, with timings:
//! `cargo run --release --example past_wrapping -- L M orbit loops [digits]`, orbits counted from 1.
//! THREADS sets the number of threads (default 1).

use loopladder::chain::spectrum;
use loopladder::engine::{NoCheckpoint, Request, compute};
use loopladder::family::Family;
use loopladder::observer::{Event, Observer, Silent};
use loopladder::spectral_curve::extend::{Request as Extend, Stages, extend};
use loopladder::spectral_curve::one_loop::of_orbit;

struct Printer(std::time::Instant);

impl Observer for Printer {
    fn event(&self, event: Event) {
        match event {
            Event::Remark { text } => println!("{text}"),
            Event::Advanced { done, .. } => println!("  {done} at {:.1} s", self.0.elapsed().as_secs_f64()),
            _ => {}
        }
    }
}

fn main() {
    let arguments: Vec<usize> = std::env::args().skip(1).filter_map(|text| text.parse().ok()).collect();
    let [length, magnons, orbit, loops, ref rest @ ..] = arguments[..] else { panic!("give L M orbit loops [digits]") };
    let threads = std::env::var("THREADS").ok().and_then(|text| text.parse().ok()).unwrap_or(1);
    rayon::ThreadPoolBuilder::new().num_threads(threads).build_global().expect("threads");
    let family = Family::new(length, magnons).expect("family");
    let start = std::time::Instant::now();
    let record = compute(&Request::new(family, length), None, &NoCheckpoint, &Silent).expect("exact").record;
    println!("exact part: {:.2} s", start.elapsed().as_secs_f64());
    let one = spectrum(family, &Silent).expect("spectrum").swap_remove(orbit - 1);
    let exact = record.orbits.iter().find(|candidate| candidate.label == one.label).expect("orbit");
    let start = std::time::Instant::now();
    let request = Extend {
        family,
        orbit: exact,
        one_loop: &|digits| of_orbit(&one, digits),
        loops,
        digits: rest.first().map(|&digits| digits as u32),
        memory: None,
    };
    let stages = Stages { load: &|_| None, store: &|_, _| Ok(()) };
    let extension = extend(&request, &stages, &Printer(start)).expect("extension");
    println!(
        "{:.1} s; consistency {:.0} digits, agreement {:.0} digits",
        start.elapsed().as_secs_f64(),
        extension.consistency,
        extension.agreement
    );
    for coefficient in &extension.coefficients {
        println!("{}", serde_json::to_string(coefficient).expect("json"));
    }
}
