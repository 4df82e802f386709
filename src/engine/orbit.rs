//! One orbit from images to exact numbers: batches of primes, until everything is reconstructed and
//! confirmed.

use super::checkpoint::Checkpoint;
use super::image::{self, Image};
use super::{Request, cost, denominator};
use crate::algebra::graded::Grading;
use crate::algebra::prime_field::PrimeField;
use crate::algebra::reconstruct::Reconstruction;
use crate::chain::Orbit;
use crate::error::{Error, Result};
use crate::observer::{Event, Observer};
use rayon::iter::{IntoParallelIterator, ParallelIterator};
use rug::Rational;
use std::sync::atomic::{AtomicUsize, Ordering};

/// An orbit with its exact numbers, laid out as in [`Image`].
#[derive(Debug)]
pub struct Lifted<'a> {
    /// The orbit.
    pub orbit: &'a Orbit,
    /// Whether ±½ are roots at one loop.
    pub singular: bool,
    /// Laid out as [`Image::values`], without the weights.
    pub values: Vec<Rational>,
    /// See [`Image::pair`].
    pub pair: Vec<Rational>,
}

/// Primes in the first batch; later ones grow by a quarter. Fixed, so that nothing depends on the machine.
const FIRST_BATCH: usize = 6;

/// Reconstructs an orbit.
///
/// # Errors
/// Interruption, a checkpoint that cannot be written, or images that contradict each other.
pub fn lift<'a>(
    request: &Request,
    orbit: &'a Orbit,
    grading: &Grading,
    memory: Option<u64>,
    checkpoint: &dyn Checkpoint,
    observer: &dyn Observer,
) -> Result<Lifted<'a>> {
    let family = request.family.to_string();
    let mut numbers = Reconstruction::default();
    let mut singular = None;
    let mut split = 0;
    let mut next = 0;
    let mut batch = FIRST_BATCH;
    let parallel = cost::parallel_primes(request, orbit, grading, memory, observer)?;
    loop {
        let range = next..next + batch;
        next = range.end;
        let planned =
            Event::Planned { family: family.clone(), orbit: orbit.label.clone(), unit: "primes", total: next };
        observer.event(planned);
        for (index, image) in images(request, orbit, grading, range, parallel, checkpoint, observer)? {
            let Some(image) = image else { continue };
            if *singular.get_or_insert(image.singular) != image.singular {
                return Err(Error::check(format!(
                    "orbit {}: whether v = 1/2 is a Bethe root differs between primes; please report this family",
                    orbit.label
                )));
            }
            split = image.values.len();
            let mut residues = image.values;
            residues.extend(image.pair);
            numbers.push(PrimeField::nth(index), residues);
        }
        observer.proceed()?;
        if numbers.primes() == 0 && next > 4 * FIRST_BATCH {
            return Err(Error::check(format!(
                "orbit {}: every prime tried is a bad one, so the one-loop data must be wrong; please report this family",
                orbit.label
            )));
        }
        if numbers.attempt() == 0 {
            break;
        }
        batch = (next / 4).max(4);
    }
    let mut values = numbers.finish().unwrap_or_default();
    let pair = values.split_off(split);
    let values = denominator::restore(orbit, &values, &denominator::orders(request, grading))?;
    Ok(Lifted { orbit, singular: singular.unwrap_or(false), values, pair })
}

/// The images of a range of primes, each from the checkpoint where it is there.
fn images(
    request: &Request,
    orbit: &Orbit,
    grading: &Grading,
    range: std::ops::Range<usize>,
    parallel: usize,
    checkpoint: &dyn Checkpoint,
    observer: &dyn Observer,
) -> Result<Vec<(usize, Option<Image>)>> {
    let subject = format!(
        "{}-loops{}{}{}",
        orbit.label,
        request.loops,
        if request.incomplete { "a" } else { "" },
        if request.certificate { "c" } else { "" },
    );
    let finished = AtomicUsize::new(range.start);
    let advance = || {
        observer.event(Event::Advanced {
            family: request.family.to_string(),
            orbit: orbit.label.clone(),
            unit: "primes",
            done: finished.fetch_add(1, Ordering::Relaxed) + 1,
        });
    };
    let one = |index: usize| {
        observer.proceed()?;
        let key = format!("{subject}-prime{index}");
        if let Some(image) = checkpoint.load(&key).and_then(|bytes| decode(&bytes)) {
            advance();
            return Ok((index, image));
        }
        let image = image::image(request, orbit, grading, PrimeField::nth(index))?;
        checkpoint.store(&key, &encode(image.as_ref()))?;
        advance();
        Ok((index, image))
    };
    let indices: Vec<usize> = range.collect();
    let mut images = Vec::with_capacity(indices.len());
    for chunk in indices.chunks(parallel) {
        let part: Vec<Result<(usize, Option<Image>)>> = chunk.to_vec().into_par_iter().map(one).collect();
        images.extend(part.into_iter().collect::<Result<Vec<_>>>()?);
    }
    Ok(images)
}

/// Words: 0 for a bad prime, or 1 + singular, then the number of values, and all residues.
fn encode(image: Option<&Image>) -> Vec<u8> {
    let words: Vec<u64> = match image {
        None => vec![0],
        Some(image) => [1 + u64::from(image.singular), image.values.len() as u64]
            .into_iter()
            .chain(image.values.iter().chain(&image.pair).copied())
            .collect(),
    };
    words.iter().flat_map(|word| word.to_le_bytes()).collect()
}

/// The opposite of [`encode`]; `None` when the bytes are something else.
fn decode(bytes: &[u8]) -> Option<Option<Image>> {
    let (chunks, rest) = bytes.as_chunks::<8>();
    let words: Vec<u64> = chunks.iter().map(|chunk| u64::from_le_bytes(*chunk)).collect();
    match words.as_slice() {
        [0] if rest.is_empty() => Some(None),
        [flag @ 1..=2, count, residues @ ..] if rest.is_empty() => {
            let (values, pair) = residues.split_at_checked(usize::try_from(*count).ok()?)?;
            Some(Some(Image { singular: *flag == 2, values: values.to_vec(), pair: pair.to_vec() }))
        }
        _ => None,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn work_units_come_back_as_they_were() {
        let image = Image { singular: true, values: vec![1, u64::MAX, 3], pair: vec![7] };
        let bytes = encode(Some(&image));
        assert_eq!(decode(&bytes), Some(Some(image)));
        assert_eq!(decode(&encode(None)), Some(None));
        for cut in (0..bytes.len()).filter(|cut| *cut != bytes.len() - 8) {
            assert_eq!(decode(&bytes[..cut]), None, "{cut}");
        }
    }
}
