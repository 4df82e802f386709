//! From residues modulo many primes to exact numbers, with a check at fresh primes.
//!
//! All but the last [`FRESH`] primes determine a candidate; it is accepted only if it reproduces the
//! residues at the fresh ones, so that a wrong candidate passes with probability about 2^{−120}.

use super::flint::{self, Remaindering};
use super::prime_field::PrimeField;
use super::ring::Ring;
use rayon::iter::{IndexedParallelIterator, IntoParallelRefMutIterator, ParallelIterator};
use rug::{Integer, Rational};

/// How many primes are kept for the check.
pub const FRESH: usize = 2;

/// Whether n/d has this residue: n ≡ residue·d, with d a unit.
fn agrees(field: &PrimeField, candidate: &Rational, residue: u64) -> bool {
    let denominator = field.image(candidate.denom());
    denominator != 0 && field.image(candidate.numer()) == field.mul(&field.element(residue), &denominator)
}

/// A vector of numbers known modulo more and more primes.
#[derive(Debug, Default)]
pub struct Reconstruction {
    fields: Vec<PrimeField>,
    images: Vec<Vec<u64>>,
    values: Vec<Option<Rational>>,
}

impl Reconstruction {
    /// Adds the ordinary residues modulo one prime; every call must give equally many.
    pub fn push(&mut self, field: PrimeField, residues: Vec<u64>) {
        if self.fields.is_empty() {
            self.values = vec![None; residues.len()];
        }
        debug_assert_eq!(residues.len(), self.values.len());
        self.fields.push(field);
        self.images.push(residues);
    }

    /// The number of primes so far.
    pub fn primes(&self) -> usize {
        self.fields.len()
    }

    /// Tries to reconstruct as rationals what is still unknown; returns how many numbers remain unknown.
    pub fn attempt(&mut self) -> usize {
        self.attempt_with(|residue, modulus| {
            // Most numbers come with small denominators (see the driver) and need half the primes then.
            let bits = 16 + modulus.significant_bits() / 8;
            let small = flint::reconstruct_small_denominator(residue, modulus, bits);
            small.into_iter().chain(flint::reconstruct(residue, modulus)).collect()
        })
    }

    /// As [`Reconstruction::attempt`] for integers, which need half as many primes.
    pub fn attempt_integers(&mut self) -> usize {
        self.attempt_with(|residue, _| vec![Rational::from(residue)])
    }

    fn attempt_with(&mut self, candidates: impl Fn(&Integer, &Integer) -> Vec<Rational> + Sync) -> usize {
        let Some(used) = self.fields.len().checked_sub(FRESH).filter(|used| *used > 0) else {
            return self.values.len().max(1);
        };
        let primes: Vec<u64> = self.fields[..used].iter().map(PrimeField::modulus).collect();
        let modulus = primes.iter().fold(Integer::from(1), |m, p| m * *p);
        let tree = Remaindering::new(primes);
        let (fields, images) = (&self.fields, &self.images);
        self.values.par_iter_mut().with_min_len(16).enumerate().for_each(|(i, value)| {
            if value.is_some() {
                return;
            }
            let residues: Vec<u64> = images[..used].iter().map(|image| image[i]).collect();
            let residue = tree.combine(&residues);
            *value = candidates(&residue, &modulus).into_iter().find(|candidate| {
                (used..fields.len()).all(|k| agrees(&fields[k], candidate, images[k][i]))
            });
        });
        self.values.iter().filter(|value| value.is_none()).count()
    }

    /// The numbers, once [`Reconstruction::attempt`] has returned 0.
    pub fn finish(self) -> Option<Vec<Rational>> {
        self.values.into_iter().collect()
    }
}
