//! The driver: the only module that knows every exact stage. From a request to a record.
//!
//! For each Galois orbit the lift runs modulo many primes over F_p[x]/g; the coefficients γ_n, expressed
//! in powers of ω modulo p, are reconstructed as rationals and confirmed at fresh primes. (They are small;
//! the numbers in between, over the field, are huge: this is why images and not Q-arithmetic.)

mod assemble;
mod beyond;
mod checkpoint;
mod cost;
mod denominator;
mod image;
mod orbit;
mod states;
#[cfg(test)]
mod tests;

pub use checkpoint::{Checkpoint, NoCheckpoint};
pub use cost::{Cost, cost};

use crate::algebra::graded::Grading;
use crate::chain::{self, Orbit};
use crate::error::{Error, Result};
use crate::family::Family;
use crate::observer::{Event, Observer};
use crate::record::{Certificate, Record};
use rayon::iter::{IntoParallelIterator, IntoParallelRefIterator, ParallelIterator};
use std::sync::atomic::{AtomicUsize, Ordering};

/// What is asked for.
#[derive(Clone, Debug)]
pub struct Request {
    /// The family.
    pub family: Family,
    /// The highest loop order n. Through L the coefficients are exact; later ones come from the spectral curve.
    pub loops: usize,
    /// At loop L give the asymptotic part only, labelled as such, instead of the complete coefficient.
    pub incomplete: bool,
    /// Only the orbit of this label.
    pub orbit: Option<String>,
    /// Also make the certificate for the audit.
    pub certificate: bool,
}

/// More loops than this are refused: a typo is likelier.
pub const MOST_LOOPS: usize = 240;

impl Request {
    /// All orbits of a family through `loops`, complete, without a certificate.
    pub fn new(family: Family, loops: usize) -> Request {
        Request { family, loops, incomplete: false, orbit: None, certificate: false }
    }

    /// Refuses what cannot be answered.
    ///
    /// # Errors
    /// No loops at all, absurdly many, or an asymptotic part past the order where it has a meaning.
    pub fn check(&self) -> Result<()> {
        let Request { family, loops, .. } = self;
        if *loops == 0 {
            return Err(Error::input(format!("family {family}: 0 loops were asked for; ask for at least one")));
        }
        if *loops > MOST_LOOPS {
            return Err(Error::input(format!(
                "family {family}: {loops} loops were asked for, and the limit is {MOST_LOOPS}; ask for fewer"
            )));
        }
        if !family.is_protected() && *loops > family.length && self.incomplete {
            return Err(Error::input(format!(
                "family {family}: the asymptotic part was asked for at {loops} loops, and it exists through loop L = {} only; ask for at most {} loops, or leave out --incomplete",
                family.length, family.length
            )));
        }
        Ok(())
    }
}

/// What comes out.
#[derive(Debug)]
pub struct Outcome {
    /// The record.
    pub record: Record,
    /// The certificate, when it was asked for.
    pub certificate: Option<Certificate>,
}

/// Computes a family, in the rayon pool of the caller. `memory` (bytes) bounds the primes in parallel.
///
/// # Errors
/// A bad request, a bound, a failed check, an interruption, or a failing checkpoint store.
pub fn compute(
    request: &Request,
    memory: Option<u64>,
    checkpoint: &dyn Checkpoint,
    observer: &dyn Observer,
) -> Result<Outcome> {
    request.check()?;
    let family = request.family;
    let asked = request;
    let request = &Request { loops: asked.loops.min(family.length), ..asked.clone() };
    if family.is_protected() {
        return Ok(Outcome { record: assemble::protected(family, asked.loops), certificate: None });
    }
    let orbits = chain::spectrum(family, observer)?;
    let chosen: Vec<&Orbit> =
        orbits.iter().filter(|orbit| request.orbit.as_ref().is_none_or(|label| *label == orbit.label)).collect();
    if let (Some(label), true) = (&request.orbit, chosen.is_empty()) {
        let known: Vec<&str> = orbits.iter().map(|orbit| orbit.label.as_str()).collect();
        return Err(Error::input(format!(
            "family {family} has no orbit \"{label}\"; its orbits are {}",
            known.join(", ")
        )));
    }
    observer.event(Event::Stage { family: family.to_string(), stage: "lift" });
    let grading = Grading::new(request.loops.min(family.length) - 1);
    let finished = AtomicUsize::new(0);
    let lift = |index: usize| {
        let one = chosen[index];
        let lifted = orbit::lift(request, one, &grading, memory, checkpoint, observer)?;
        let done = finished.fetch_add(1, Ordering::Relaxed) + 1;
        observer.event(Event::OrbitDone {
            family: family.to_string(),
            orbit: one.label.clone(),
            done,
            total: chosen.len(),
        });
        Ok(lifted)
    };
    // Under a memory bound one orbit at a time, so that the bound on its primes is the bound on all.
    let results: Vec<Result<orbit::Lifted>> = match memory {
        None => (0..chosen.len()).into_par_iter().map(lift).collect(),
        Some(_) => (0..chosen.len()).map(lift).collect(),
    };
    let lifted = results.into_iter().collect::<Result<Vec<_>>>()?;
    let mut record = assemble::record(request, &grading, orbits.iter().map(Orbit::members).sum(), &lifted)?;
    if asked.loops > family.length {
        beyond::extend(&mut record, asked.loops, &chosen, memory, checkpoint, observer)?;
    }
    record
        .check("the record just computed")
        .map_err(|error| Error::check("an internal check failed").because(error))?;
    let certificate = if request.certificate { Some(assemble::certificate(request, &grading, &lifted)?) } else { None };
    Ok(Outcome { record, certificate })
}

/// The orbits of a family at one loop, without coefficients.
///
/// # Errors
/// As [`chain::spectrum`].
pub fn outline(family: Family, observer: &dyn Observer) -> Result<Vec<crate::record::Orbit>> {
    if family.is_protected() {
        return Ok(assemble::protected(family, 0).orbits);
    }
    let orbits = chain::spectrum(family, observer)?;
    orbits.par_iter().map(|orbit| assemble::bare(orbit, image::is_singular(orbit)?)).collect()
}
