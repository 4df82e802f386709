//! All primaries of a family as Galois orbits.
//!
//! The cyclic highest-weight states carry a family of commuting operators. A combination C of local
//! charges that separates them is found; its characteristic polynomial χ comes from Krylov
//! sequences modulo primes. The recurrence must have as many terms as the necklace formula has
//! states, so no state can be lost; where it has fewer, the next combination is tried. The
//! irreducible factors of χ are the orbits, and the transfer matrix is expressed over each.

use super::charges::{self, Sparse};
use super::krylov::{self, Transposed};
use super::necklace::{Necklaces, exchange};
use super::orbit::{Generator, Orbit};
use super::transfer;
use crate::algebra::flint;
use crate::algebra::linear::{self, Solution};
use crate::algebra::poly;
use crate::algebra::prime_field::PrimeField;
use crate::algebra::quotient::{Quotient, Residues};
use crate::algebra::reconstruct::Reconstruction;
use crate::algebra::ring::Ring;
use crate::error::{Error, Result};
use crate::family::Family;
use crate::observer::{Event, Observer};
use crate::record::Parity;
use rayon::iter::{IntoParallelIterator, IntoParallelRefIterator, IntoParallelRefMutIterator, ParallelIterator};
use rug::Integer;
use std::cmp::Ordering;
use std::sync::OnceLock;

/// More primaries than this are refused: exact orbits of that size are out of reach.
pub const MOST_PRIMARIES: usize = 1500;

/// Weights of (γ₁, q₃, q₄, T(3/2)) in the separating charge, tried in this order: local charges first, which
/// are sparse and have small eigenvalues, then with the transfer matrix, which separates what they do not.
const COMBINATIONS: [[i64; 4]; 4] = [[1, 1, 0, 0], [1, 1, 1, 0], [1, 1, 0, 1], [3, 5, 7, 2]];

/// All primaries of a family with M ≥ 2, sorted and labelled as records are.
///
/// # Errors
/// The family is too large, no charge separates the states, or a check failed.
pub fn spectrum(family: Family, observer: &dyn Observer) -> Result<Vec<Orbit>> {
    let count = family.primaries().to_usize().unwrap_or(usize::MAX);
    if family.length > 120 || count > MOST_PRIMARIES {
        return Err(Error::bound(format!(
            "family {family} has {} primaries, more than the {MOST_PRIMARIES} (or the 120 sites) that the exact spectrum handles; choose a smaller family",
            family.primaries()
        )));
    }
    if count == 0 {
        return Ok(Vec::new());
    }
    observer.event(Event::Stage { family: family.to_string(), stage: "chain spectrum" });
    let chain = Chain::new(family, count);
    for combination in COMBINATIONS {
        observer.proceed()?;
        if let Some(orbits) = chain.orbits(combination, observer)? {
            return finish(family, count, orbits);
        }
    }
    Err(Error::check(format!(
        "family {family}: no combination of local charges tried separates its {count} primaries, so a state could be lost; please report this family"
    )))
}

/// Sorts, labels and counts.
fn finish(family: Family, count: usize, mut orbits: Vec<Orbit>) -> Result<Vec<Orbit>> {
    let members: usize = orbits.iter().map(Orbit::members).sum();
    if members != count {
        return Err(Error::check(format!(
            "family {family}: {members} primaries were found and the necklace formula gives {count}; please report this family"
        )));
    }
    orbits.sort_by(|a, b| {
        let down = |x: &[Integer], y: &[Integer]| x.iter().rev().cmp(y.iter().rev());
        a.degree()
            .cmp(&b.degree())
            .then_with(|| down(&a.minimal, &b.minimal))
            .then_with(|| (a.parity == Parity::Paired).cmp(&(b.parity == Parity::Paired)))
            .then_with(|| down(&a.field, &b.field))
            .then_with(|| {
                a.transfer
                    .iter()
                    .zip(&b.transfer)
                    .map(|(x, y)| down(x, y))
                    .find(|o| o.is_ne())
                    .unwrap_or(Ordering::Equal)
            })
    });
    for (i, orbit) in orbits.iter_mut().enumerate() {
        orbit.label = format!("L{}M{}-{}", family.length, family.magnons, i + 1);
    }
    Ok(orbits)
}

/// What does not depend on the prime: operators, the start vector ψ and its images.
struct Chain {
    family: Family,
    count: usize,
    necklaces: Necklaces,
    charges: [Sparse; 3],
    /// T(3/2), made when it is needed.
    transfer: OnceLock<Sparse>,
    functional: Vec<i64>,
    /// ψ, γ₁ψ, q₄ψ, T_0ψ, …, T_Lψ.
    vectors: Vec<Vec<Integer>>,
}

/// The sequences and the recurrence modulo one prime.
struct Image {
    field: PrimeField,
    recurrence: Vec<u64>,
    numerators: Vec<Vec<u64>>,
}

impl Chain {
    fn new(family: Family, count: usize) -> Chain {
        let necklaces = Necklaces::new(family);
        let charges = [charges::one_loop(&necklaces), charges::third(&necklaces), charges::fourth(&necklaces)];
        let mut random = Random(0x9e37_79b9_7f4a_7c15);
        let start = highest_weight_state(&necklaces, &mut random);
        let functional = (0..necklaces.len()).map(|_| (random.next() % 1000) as i64 + 1).collect();
        let mut vectors = vec![start.clone(), charges[0].apply(&start), charges[2].apply(&start)];
        vectors.extend(transfer::apply(&necklaces, &start));
        let vectors = vectors.into_iter().map(|v| v.into_iter().map(Integer::from).collect()).collect();
        Chain { family, count, necklaces, charges, transfer: OnceLock::new(), functional, vectors }
    }

    /// The orbits when this combination separates the states, `None` when it does not.
    fn orbits(&self, weights: [i64; 4], observer: &dyn Observer) -> Result<Option<Vec<Orbit>>> {
        if weights[3] != 0 && self.family.length > 60 {
            return Ok(None); // the entries of T(3/2) would not fit into a word
        }
        let mut parts: Vec<(i64, &Sparse)> = weights.into_iter().zip(&self.charges).collect();
        if weights[3] != 0 {
            parts.push((weights[3], self.transfer.get_or_init(|| charges::transfer(&self.necklaces))));
        }
        let charge = Transposed::new(&Sparse::combination(&parts));
        // A first prime tells whether the charge separates; only a fluke of the prime could deny it.
        let first = self.image(&charge, PrimeField::nth(0));
        if first.recurrence.len() != self.count + 1 {
            return Ok(None);
        }
        let mut images = vec![first];
        let mut characteristic = Reconstruction::default();
        characteristic.push(images[0].field, residues(&images[0].field, &images[0].recurrence));
        let mut wanted = 4 + self.count / 16;
        let mut next = 1;
        loop {
            self.extend(&charge, &mut images, &mut next, wanted, observer)?;
            for image in &images[characteristic.primes()..] {
                characteristic.push(image.field, residues(&image.field, &image.recurrence));
            }
            if characteristic.attempt_integers() == 0 {
                break;
            }
            wanted += 2 + wanted / 2;
        }
        let polynomial: Vec<Integer> =
            characteristic.finish().unwrap_or_default().into_iter().map(|c| c.into_numer_denom().0).collect();
        let factors = flint::factor(&polynomial);
        if factors.iter().any(|(_, multiplicity)| *multiplicity != 1) {
            return Ok(None);
        }
        let mut pending: Vec<Pending> = Vec::new();
        for (factor, _) in factors {
            pending.push(Pending::new(self, factor, &images[0])?);
        }
        loop {
            pending.par_iter_mut().filter(|orbit| !orbit.done).for_each(|orbit| orbit.advance(&images));
            if pending.iter().all(|orbit| orbit.done) {
                break;
            }
            wanted += 2 + wanted / 4;
            self.extend(&charge, &mut images, &mut next, wanted, observer)?;
        }
        pending.into_iter().map(|orbit| orbit.finish(self.family)).collect::<Result<Vec<_>>>().map(Some)
    }

    fn extend(
        &self,
        charge: &Transposed,
        images: &mut Vec<Image>,
        next: &mut usize,
        wanted: usize,
        observer: &dyn Observer,
    ) -> Result<()> {
        observer.proceed()?;
        let range = *next..*next + wanted.saturating_sub(images.len());
        *next = range.end;
        let fresh: Vec<Image> = range.into_par_iter().map(|k| self.image(charge, PrimeField::nth(k))).collect();
        // A prime at which two eigenvalues coincide gives a shorter recurrence and is dropped.
        images.extend(fresh.into_iter().filter(|image| image.recurrence.len() == self.count + 1));
        Ok(())
    }

    fn image(&self, charge: &Transposed, field: PrimeField) -> Image {
        let vectors: Vec<Vec<u64>> =
            self.vectors.iter().map(|vector| vector.iter().map(|c| field.image(c)).collect()).collect();
        let mut counts = vec![self.count; vectors.len()];
        counts[0] = 2 * self.count;
        let sequences = krylov::moments(&field, charge, &self.functional, &vectors, &counts);
        let recurrence = krylov::recurrence(&field, &sequences[0]);
        let numerators =
            sequences.iter().map(|sequence| krylov::numerator(&field, &sequence[..], &recurrence)).collect();
        Image { field, recurrence, numerators }
    }
}

fn residues(field: &PrimeField, elements: &[u64]) -> Vec<u64> {
    elements.iter().map(|c| field.residue(*c)).collect()
}

/// An orbit whose transfer matrix is being reconstructed.
struct Pending {
    factor: Vec<Integer>,
    parity: Parity,
    generator: Generator,
    degree: usize,
    used: usize,
    done: bool,
    numbers: Reconstruction,
}

/// The eigenvalues over F_p[x]/g.
struct Eigenvalues {
    ring: Quotient,
    gamma_1: Residues,
    charge_4: Residues,
    transfer: Vec<Residues>,
}

impl Eigenvalues {
    fn new(factor: &[Integer], image: &Image) -> Option<Eigenvalues> {
        let field = image.field;
        let ring = Quotient::new(field, factor.iter().map(|c| field.image(c)).collect());
        let start = ring.inverse(&ring.element(&image.numerators[0]))?;
        let mut values = image.numerators[1..].iter().map(|numerator| ring.mul(&ring.element(numerator), &start));
        let (gamma_1, charge_4) = (values.next()?, values.next()?);
        let transfer = values.collect();
        Some(Eigenvalues { ring, gamma_1, charge_4, transfer })
    }

    fn generator(&self, generator: Generator) -> Residues {
        match generator {
            Generator::Gamma1 => self.gamma_1.clone(),
            Generator::Charge4 => self.charge_4.clone(),
            Generator::Sum => self.ring.add(&self.gamma_1, &self.charge_4),
        }
    }

    /// Whether T(v) is (−1)^L T(−v).
    fn symmetric(&self) -> bool {
        let shifted = poly::shift(&self.ring, &self.transfer, &self.ring.ratio(-1, 2));
        let length = shifted.len() - 1;
        shifted.iter().enumerate().all(|(j, c)| (j + length) % 2 == 0 || self.ring.is_zero(c))
    }

    /// The minimal polynomial over F_p of an element, if its degree is `degree`, and its powers as rows.
    fn minimal(&self, element: &Residues, degree: usize) -> Option<(Vec<u64>, Vec<Vec<u64>>)> {
        let field = self.ring.field();
        let mut powers = vec![self.ring.one()];
        for k in 0..degree {
            powers.push(self.ring.mul(&powers[k], element));
        }
        let rows: Vec<Vec<u64>> = powers.iter().map(|power| self.ring.coefficients(power)).collect();
        let system: Vec<Vec<u64>> =
            (0..self.ring.degree()).map(|i| rows[..degree].iter().map(|row| row[i]).collect()).collect();
        match linear::solve(field, &system, &rows[degree]) {
            Solution::Unique(x) => {
                let mut minimal: Vec<u64> = x.iter().map(|c| field.neg(c)).collect();
                minimal.push(field.one());
                Some((minimal, system))
            }
            _ => None,
        }
    }
}

impl Pending {
    fn new(chain: &Chain, factor: Vec<Integer>, image: &Image) -> Result<Pending> {
        let size = factor.len() - 1;
        let failed = |what: &str| {
            Error::check(format!(
                "family {}: an orbit of {size} states {what}; please report this family",
                chain.family
            ))
        };
        let eigenvalues =
            Eigenvalues::new(&factor, image).ok_or_else(|| failed("is not reached by the start vector"))?;
        let parity = if eigenvalues.symmetric() { Parity::Symmetric } else { Parity::Paired };
        if parity == Parity::Paired && size % 2 == 1 {
            return Err(failed("is paired and of odd size"));
        }
        let degree = if parity == Parity::Paired { size / 2 } else { size };
        let generator = [Generator::Gamma1, Generator::Charge4, Generator::Sum]
            .into_iter()
            .find(|g| eigenvalues.minimal(&eigenvalues.generator(*g), degree).is_some())
            .ok_or_else(|| failed("has no generator among gamma_1, q_4 and their sum"))?;
        Ok(Pending { factor, parity, generator, degree, used: 0, done: false, numbers: Reconstruction::default() })
    }

    /// Takes in the images that came since the last call and tries to finish.
    fn advance(&mut self, images: &[Image]) {
        let fresh: Vec<(PrimeField, Option<Vec<u64>>)> =
            images[self.used..].par_iter().map(|image| (image.field, self.residues(image))).collect();
        self.used = images.len();
        for (field, residues) in fresh {
            if let Some(residues) = residues {
                self.numbers.push(field, residues);
            }
        }
        self.done = self.numbers.attempt_integers() == 0;
    }

    /// Everything to be reconstructed, modulo one prime: minimal polynomial of ω, then the numerators of
    /// ω, γ₁ and T_j over g' (over the minimal polynomial's derivative where x = ω).
    fn residues(&self, image: &Image) -> Option<Vec<u64>> {
        let field = image.field;
        let eigenvalues = Eigenvalues::new(&self.factor, image)?;
        let omega = eigenvalues.generator(self.generator);
        let (minimal, powers) = eigenvalues.minimal(&omega, self.degree)?;
        let mut result = residues(&field, &minimal);
        let elements = [&omega, &eigenvalues.gamma_1].into_iter().chain(&eigenvalues.transfer);
        if self.parity == Parity::Symmetric {
            let ring = Quotient::new(field, minimal.clone());
            let weight = ring.element(&poly::derivative(&field, &minimal));
            let change = linear::inverse(&field, &powers)?;
            for element in elements {
                let coefficients = linear::apply(&field, &change, &eigenvalues.ring.coefficients(element));
                let numerator = ring.mul(&ring.element(&coefficients), &weight);
                result.extend(residues(&field, &ring.coefficients(&numerator)));
            }
        } else {
            let ring = &eigenvalues.ring;
            let modulus: Vec<u64> = self.factor.iter().map(|c| field.image(c)).collect();
            let weight = ring.element(&poly::derivative(&field, &modulus));
            for element in elements {
                result.extend(residues(&field, &ring.coefficients(&ring.mul(element, &weight))));
            }
        }
        Some(result)
    }

    fn finish(self, family: Family) -> Result<Orbit> {
        let size = self.factor.len() - 1;
        let numbers = self.numbers.finish().ok_or_else(|| Error::check("an orbit was left unfinished"))?;
        let mut numbers = numbers.into_iter().map(|c| c.into_numer_denom().0);
        let minimal: Vec<Integer> = numbers.by_ref().take(self.degree + 1).collect();
        let mut take = || numbers.by_ref().take(size).collect::<Vec<Integer>>();
        let (omega, gamma_1) = (take(), take());
        let transfer = (0..=family.length).map(|_| take()).collect();
        let field = if self.parity == Parity::Symmetric { minimal.clone() } else { self.factor };
        Ok(Orbit {
            family,
            label: String::new(),
            parity: self.parity,
            field,
            generator: self.generator,
            minimal,
            omega,
            gamma_1,
            transfer,
        })
    }
}

/// A cyclic highest-weight state with integer entries and a part in every primary: the start of the spectrum.
pub fn start(necklaces: &Necklaces) -> Vec<i128> {
    highest_weight_state(necklaces, &mut Random(0x9e37_79b9_7f4a_7c15))
}

/// A cyclic highest-weight state with integer entries: valence bonds (M singlet pairs of sites, the
/// rest unexcited) in random places, summed over all shifts.
fn highest_weight_state(necklaces: &Necklaces, random: &mut Random) -> Vec<i128> {
    let Family { length, magnons } = necklaces.family();
    let mut state = vec![0i128; necklaces.len()];
    for _ in 0..12 {
        let mut sites: Vec<usize> = (0..length).collect();
        for i in (1..length).rev() {
            sites.swap(i, random.next() as usize % (i + 1));
        }
        let weight = (random.next() % 19) as i128 + 1;
        for choice in 0u64..1 << magnons {
            let mut configuration = 0;
            for pair in 0..magnons {
                configuration |= 1 << sites[2 * pair];
                if (choice >> pair) & 1 == 1 {
                    configuration = exchange(configuration, sites[2 * pair], sites[2 * pair + 1]);
                }
            }
            let sign = if choice.count_ones() % 2 == 0 { weight } else { -weight };
            state[necklaces.position(configuration)] += sign * symmetry(configuration, length);
        }
    }
    state
}

/// The number of shifts that leave a configuration as it is.
fn symmetry(configuration: u128, length: usize) -> i128 {
    let mut turned = configuration;
    let mut period = 0;
    loop {
        turned = super::necklace::rotate(turned, length);
        period += 1;
        if turned == configuration {
            return (length / period) as i128;
        }
    }
}

/// SplitMix64 (Steele, Lea, Flood 2014): fixed numbers that look random; any others would do.
struct Random(u64);

impl Random {
    fn next(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        z ^ (z >> 31)
    }
}

#[cfg(test)]
mod tests {
    use super::{Family, Integer, Parity, spectrum};
    use crate::observer::Silent;

    fn integers(list: &[i64]) -> Vec<Integer> {
        list.iter().copied().map(Integer::from).collect()
    }

    /// One-loop values of formulas §6 (BKS, BO).
    #[test]
    fn small_families() {
        let konishi = spectrum(Family { length: 4, magnons: 2 }, &Silent).unwrap();
        assert_eq!(konishi.len(), 1);
        assert_eq!(konishi[0].minimal, integers(&[-12, 1]));
        let seven = spectrum(Family { length: 7, magnons: 3 }, &Silent).unwrap();
        assert_eq!(seven.len(), 1);
        assert_eq!((seven[0].parity, &seven[0].minimal), (Parity::Paired, &integers(&[-10, 1])));
        let eight = spectrum(Family { length: 8, magnons: 4 }, &Silent).unwrap();
        assert_eq!(eight.len(), 1);
        assert_eq!(eight[0].minimal, integers(&[-1600, 464, -40, 1]));
    }

    /// L = 10, M = 5 holds γ₁ = 12 twice; both states must be there, apart (formulas §1).
    #[test]
    fn coinciding_energies_do_not_hide_states() {
        for magnons in 2..=5 {
            let family = Family { length: 10, magnons };
            let orbits = spectrum(family, &Silent).unwrap();
            let members: usize = orbits.iter().map(super::Orbit::members).sum();
            assert_eq!(family.primaries(), members);
        }
    }
}
