//! What a family will cost, and how many primes fit into memory.

use super::Request;
use crate::algebra::graded::Grading;
use crate::chain::Orbit;
use crate::error::{Error, Result};
use crate::family::Family;
use crate::observer::{Event, Observer};

/// An estimate made before starting.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Cost {
    /// Seconds on one core of the machine the law was measured on.
    pub seconds: f64,
    /// Bytes of memory with one prime at a time.
    pub bytes: u64,
}

/// The cost law, for one orbit of all N primaries (the worst case): images ∝ N² word products for each
/// ring product, (entries of the grading)^1.3 · M(L−M) ring products for each, and as many primes as the
/// coefficients have words (∝ N · loops).
pub fn cost(family: Family, loops: usize) -> Cost {
    let primaries = family.primaries().to_f64().max(1.0);
    let order = loops.clamp(1, family.length) - 1;
    let entries = Grading::new(order).len() as f64;
    let (length, magnons) = (family.length as f64, family.magnons as f64);
    let products = entries.powf(1.5) * (magnons + 1.0) * (length - magnons + 2.0) / 2.0 + length.powi(3) / 4.0;
    let degree = primaries * 0.7;
    let primes = 6.0 + degree * loops as f64 / 6.0;
    let words = products * degree * degree;
    let krylov = primaries * primaries * length * primaries * 4e-9;
    Cost { seconds: 2e-3 + 2.0e-9 * words * primes + krylov, bytes: (20e6 + words.sqrt() * 800.0) as u64 }
}

/// How many primes may run side by side under the memory bound.
///
/// # Errors
/// Not even one prime fits.
pub fn parallel_primes(
    request: &Request,
    orbit: &Orbit,
    grading: &Grading,
    memory: Option<u64>,
    observer: &dyn Observer,
) -> Result<usize> {
    let Some(memory) = memory else { return Ok(usize::MAX) };
    let degree = orbit.members() as u64;
    let length = request.family.length as u64;
    // Series held by a lift: the pair and its shifts, charges, power sums, potential; and the linear system.
    let each = (grading.len() as u64 * 10 * (length + 4) + 3 * length * length) * (8 * degree + 24);
    let base = 30 << 20;
    let available = memory.saturating_sub(base) / rayon::current_num_threads().max(1) as u64;
    let fit = memory.saturating_sub(base) / each.max(1);
    if fit == 0 {
        return Err(Error::bound(format!(
            "orbit {}: one prime needs about {} MB and the memory bound is {} MB; give --memory at least {} MB",
            orbit.label,
            each >> 20,
            memory >> 20,
            (each + base) >> 20
        )));
    }
    if available < each {
        observer.event(Event::Remark {
            text: format!("orbit {}: the memory bound lowers the number of parallel primes to {fit}", orbit.label),
        });
    }
    Ok(fit as usize)
}
