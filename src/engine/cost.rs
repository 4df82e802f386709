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
    /// Bytes for each further prime at the same time.
    pub further: u64,
}

/// Memory of the program itself, the spectrum and the reconstruction.
const BASE: u64 = 30 << 20;

/// The cost law: seconds = 5.9·10⁻⁶ E^0.74 (S^3.1 + (0.8 P)^3.1) for loops < L, and 2.6 times that at
/// loop L, where E is the number of entries of a series through the order (see [`Grading`]), S the
/// number of symmetric primaries and P the number of the others: each of the two groups is one orbit as
/// a rule. Fitted to 35 measured runs (L = 9 … 20, M = 2 … 6, 0.02 s … 42 s) on a core of 2026; the runs
/// above 1 s agree within a factor 1.7.
pub fn cost(family: Family, loops: usize) -> Cost {
    if family.is_protected() {
        return Cost { seconds: 1e-3, bytes: BASE, further: 0 };
    }
    let primaries = family.primaries().to_f64();
    let symmetric = symmetric_primaries(family).min(primaries);
    let paired = primaries - symmetric;
    let entries = entries(loops.clamp(1, family.length) - 1);
    let last = if loops >= family.length { 2.6 } else { 1.0 };
    let seconds = 5.9e-6 * entries.powf(0.74) * last * (symmetric.powf(3.1) + (0.8 * paired).powf(3.1));
    let further = prime_bytes(entries, family.length as f64, symmetric.max(paired)).min(1e18) as u64;
    Cost { seconds: 2e-3 + seconds, bytes: BASE + further, further }
}

/// The number of primaries that are symmetric under v → −v: the trace of parity on the primaries, that
/// is |a(L, M) − a(L, M−1)| with a the number of necklaces equal to their mirror image.
fn symmetric_primaries(family: Family) -> f64 {
    let choose = |n: usize, k: usize| rug::Integer::from(rug::Integer::binomial_u(n as u32, k as u32));
    let mirror = |magnons: usize| match (family.length % 2, magnons % 2) {
        (1, _) => choose(family.length / 2, magnons / 2),
        (_, 0) => choose(family.length / 2, magnons / 2),
        _ => choose(family.length / 2 - 1, magnons / 2),
    };
    match family.magnons {
        0 => 1.0,
        magnons => (mirror(magnons) - mirror(magnons - 1)).abs().to_f64(),
    }
}

/// The number of entries of a series through h^`order`, counted without making them: for each power of
/// h the zeta products of no higher cost, that is partitions into parts of at least 3.
fn entries(order: usize) -> f64 {
    let mut products = vec![0.0; order + 1];
    products[0] = 1.0;
    for part in 3..=order {
        for cost in part..=order {
            products[cost] += products[cost - part];
        }
    }
    products.iter().enumerate().map(|(cost, count)| count * (order + 1 - cost) as f64).sum()
}

/// What a lift holds for one prime: the pair and its shifts, charges, power sums, potential; and the
/// linear system. Measured: 3.6 MB for 4.8 MB estimated at (13, 4).
fn prime_bytes(entries: f64, length: f64, degree: f64) -> f64 {
    (entries * 10.0 * (length + 4.0) + 3.0 * length * length) * (8.0 * degree + 24.0)
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
    let each = prime_bytes(grading.len() as f64, request.family.length as f64, orbit.members() as f64) as u64;
    let base = BASE;
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

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn entries_are_counted_as_the_grading_makes_them() {
        for order in 0..16 {
            assert_eq!(entries(order), Grading::new(order).len() as f64, "{order}");
        }
        // And far beyond what could be made: the longest families answer at once.
        assert!(entries(199) > 1e9 && cost(Family::new(200, 100).unwrap(), 200).seconds > 1e9);
    }

    /// The spectrum itself tells which orbits are symmetric.
    #[test]
    fn symmetric_primaries_are_counted_as_the_spectrum_finds_them() {
        for (length, magnons) in (4..=10).flat_map(|length| (2..=length / 2).map(move |magnons| (length, magnons))) {
            let family = Family::new(length, magnons).unwrap();
            let orbits = crate::chain::spectrum(family, &crate::observer::Silent).unwrap();
            let found: usize = orbits
                .iter()
                .filter(|orbit| orbit.parity == crate::record::Parity::Symmetric)
                .map(Orbit::members)
                .sum();
            assert_eq!(symmetric_primaries(family), found as f64, "{family}");
        }
    }
}
