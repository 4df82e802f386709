//! The driver: the only module that knows every exact stage. From a request to a record.
//!
//! For each Galois orbit the lift runs modulo many primes over F_p[x]/g; the coefficients γ_n, expressed
//! in powers of ω modulo p, are reconstructed as rationals and confirmed at fresh primes. (They are small;
//! the numbers in between, over the field, are huge: this is why images and not Q-arithmetic.)

mod assemble;
mod checkpoint;
mod cost;
mod image;
mod orbit;
mod states;

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
    /// The highest loop order n; at most L.
    pub loops: usize,
    /// At loop L give the asymptotic part only, labelled as such, instead of the complete coefficient.
    pub incomplete: bool,
    /// Only the orbit of this label.
    pub orbit: Option<String>,
    /// Also make the certificate for the audit.
    pub certificate: bool,
}

impl Request {
    /// All orbits of a family through `loops`, complete, without a certificate.
    pub fn new(family: Family, loops: usize) -> Request {
        Request { family, loops, incomplete: false, orbit: None, certificate: false }
    }

    /// Refuses what cannot be answered.
    ///
    /// # Errors
    /// No loops at all, or more loops than the asymptotic equations and the leading finite-size term give.
    pub fn check(&self) -> Result<()> {
        let Request { family, loops, .. } = self;
        if *loops == 0 {
            return Err(Error::input(format!("family {family}: 0 loops were asked for; ask for at least one")));
        }
        if !family.is_protected() && *loops > family.length {
            return Err(Error::input(format!(
                "family {family}: {loops} loops were asked for, and with the leading finite-size term the exact series is complete through loop L = {}; ask for at most {}",
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
    if family.is_protected() {
        return Ok(Outcome { record: assemble::protected(family, request.loops), certificate: None });
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
    let record = assemble::record(request, &grading, orbits.iter().map(Orbit::members).sum(), &lifted)?;
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
