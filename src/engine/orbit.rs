//! One orbit from images to exact numbers: batches of primes, until everything is reconstructed and
//! confirmed.

use super::checkpoint::Checkpoint;
use super::image::{self, Image};
use super::{Request, cost};
use crate::algebra::graded::Grading;
use crate::algebra::prime_field::PrimeField;
use crate::algebra::reconstruct::Reconstruction;
use crate::chain::Orbit;
use crate::error::{Error, Result};
use crate::observer::{Event, Observer};
use rayon::iter::{IntoParallelIterator, ParallelIterator};
use rug::Rational;

/// An orbit with its exact numbers, laid out as in [`Image`].
#[derive(Debug)]
pub struct Lifted<'a> {
    /// The orbit.
    pub orbit: &'a Orbit,
    /// Whether ±½ are roots at one loop.
    pub singular: bool,
    /// See [`Image::values`].
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
        observer.event(Event::Advanced {
            family: family.clone(),
            orbit: orbit.label.clone(),
            unit: "primes",
            done: numbers.primes(),
        });
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
    Ok(Lifted { orbit, singular: singular.unwrap_or(false), values, pair })
}

/// The images of a range of primes, from the checkpoint where they are there.
fn images(
    request: &Request,
    orbit: &Orbit,
    grading: &Grading,
    range: std::ops::Range<usize>,
    parallel: usize,
    checkpoint: &dyn Checkpoint,
    observer: &dyn Observer,
) -> Result<Vec<(usize, Option<Image>)>> {
    let key = format!(
        "{}-loops{}{}{}-primes{}-{}",
        orbit.label,
        request.loops,
        if request.incomplete { "a" } else { "" },
        if request.certificate { "c" } else { "" },
        range.start,
        range.end
    );
    if let Some(images) = checkpoint.load(&key).and_then(|bytes| decode(&bytes, range.clone())) {
        return Ok(images);
    }
    let indices: Vec<usize> = range.collect();
    let mut images = Vec::with_capacity(indices.len());
    for chunk in indices.chunks(parallel) {
        let part: Vec<Result<(usize, Option<Image>)>> = chunk
            .to_vec()
            .into_par_iter()
            .map(|index| {
                observer.proceed()?;
                Ok((index, image::image(request, orbit, grading, PrimeField::nth(index))?))
            })
            .collect();
        images.extend(part.into_iter().collect::<Result<Vec<_>>>()?);
    }
    checkpoint.store(&key, &encode(&images))?;
    Ok(images)
}

/// Words: for each prime 0 (bad) or 1 + singular, then the two lengths and the residues.
fn encode(images: &[(usize, Option<Image>)]) -> Vec<u8> {
    let mut words: Vec<u64> = Vec::new();
    for (_, image) in images {
        match image {
            None => words.push(0),
            Some(image) => {
                words.extend([1 + u64::from(image.singular), image.values.len() as u64, image.pair.len() as u64]);
                words.extend(&image.values);
                words.extend(&image.pair);
            }
        }
    }
    words.iter().flat_map(|word| word.to_le_bytes()).collect()
}

fn decode(bytes: &[u8], range: std::ops::Range<usize>) -> Option<Vec<(usize, Option<Image>)>> {
    let words: Vec<u64> = bytes
        .chunks_exact(8)
        .map(|chunk| chunk.try_into().map(u64::from_le_bytes))
        .collect::<std::result::Result<_, _>>()
        .ok()?;
    let mut words = words.into_iter();
    let mut images = Vec::new();
    for index in range {
        let image = match words.next()? {
            0 => None,
            flag => {
                let (values, pair) = (words.next()? as usize, words.next()? as usize);
                let mut take = |n: usize| -> Option<Vec<u64>> {
                    let part: Vec<u64> = words.by_ref().take(n).collect();
                    (part.len() == n).then_some(part)
                };
                Some(Image { singular: flag == 2, values: take(values)?, pair: take(pair)? })
            }
        };
        images.push((index, image));
    }
    words.next().is_none().then_some(images)
}
