//! Loops past L: each orbit of an exact record is continued by the spectral curve.

use super::Checkpoint;
use crate::chain::Orbit;
use crate::error::{Error, Result};
use crate::observer::{Event, Observer};
use crate::record::Record;
use crate::spectral_curve::extend::{Request, Stages, extend as continue_orbit};
use crate::spectral_curve::one_loop::of_orbit;

/// Adds the coefficients of loops L+1 … `loops` to every orbit. The spectral curve computes the lower loops too,
/// and must agree with the exact ones to all its digits; how far it does is told to the observer.
///
/// # Errors
/// A memory bound, a disagreement, or gluing conditions that do not hold.
pub fn extend(
    record: &mut Record,
    loops: usize,
    orbits: &[&Orbit],
    memory: Option<u64>,
    checkpoint: &dyn Checkpoint,
    observer: &dyn Observer,
) -> Result<()> {
    let family = orbits[0].family;
    observer.event(Event::Stage { family: family.to_string(), stage: "spectral curve" });
    let load = |key: &str| checkpoint.load(key);
    let store = |key: &str, bytes: &[u8]| checkpoint.store(key, bytes);
    for (target, orbit) in record.orbits.iter_mut().zip(orbits) {
        if target.label != orbit.label {
            return Err(Error::check(format!("orbit {} of the record stands where {} belongs", target.label, orbit.label)));
        }
        let one_loop = |digits: u32| of_orbit(orbit, digits);
        let request = Request { family, orbit: target, one_loop: &one_loop, loops, digits: None, memory };
        let extension = continue_orbit(&request, &Stages { load: &load, store: &store }, observer)?;
        observer.event(Event::Remark {
            text: format!(
                "orbit {}: gluing conditions hold to {:.0} digits, loops 1 to {} agree with the exact series to {:.0}",
                orbit.label, extension.consistency, family.length, extension.agreement
            ),
        });
        target.coefficients.extend(extension.coefficients);
    }
    record.schema = 2;
    record.loops = loops;
    Ok(())
}
