//! Proofs that a polynomial is irreducible over Q.
//!
//! First the degrees of the factors modulo small primes: the degree of a rational factor must be a
//! sum of some of them at every prime. Where that leaves a possibility, Zassenhaus: lift the factors
//! modulo one prime beyond the Mignotte bound and try every subset.

use super::field::integral;
use super::modular::{Modular, Prime};
use num_bigint::BigInt;
use num_integer::Integer as _;
use num_rational::BigRational;
use num_traits::{One, Signed, Zero};

/// The outcome for one polynomial.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Irreducibility {
    /// Irreducible, and why.
    Proved(String),
    /// Has a proper factor.
    Reducible(String),
    /// No proof was found within the bounds.
    Unproved(String),
}

/// Squarefree images looked at before the second method.
const IMAGES: usize = 24;
/// The largest number of modular factors whose subsets are tried.
const FACTORS: usize = 18;

/// Decides whether a monic polynomial (constant term first, degree ≥ 1) is irreducible over Q.
pub fn irreducible(polynomial: &[BigRational]) -> Irreducibility {
    let (f, _) = integral(polynomial);
    let degree = f.len() - 1;
    if degree == 1 {
        return Irreducibility::Proved("degree 1".into());
    }
    let mut possible = vec![true; degree + 1];
    let mut used = Vec::new();
    let mut best: Option<(Prime, Vec<(usize, Modular)>, usize)> = None;
    let mut images = 0;
    for p in (3u64..2000).filter(|&n| (2..n).take_while(|d| d * d <= n).all(|d| n % d != 0)) {
        let p = Prime(p);
        let image = p.reduce(&f);
        if !p.squarefree(&image) {
            continue;
        }
        images += 1;
        let parts = p.by_degree(&image);
        let count = parts.iter().map(|(d, part)| (part.len() - 1) / d).sum();
        let mut sums = vec![false; degree + 1];
        sums[0] = true;
        for (d, part) in &parts {
            for _ in 0..(part.len() - 1) / d {
                for k in (*d..=degree).rev() {
                    sums[k] |= sums[k - d];
                }
            }
        }
        let before = possible.clone();
        possible.iter_mut().zip(&sums).for_each(|(a, b)| *a &= b);
        if before != possible {
            used.push(p.0.to_string());
        }
        if possible[1..degree].iter().all(|&open| !open) {
            return Irreducibility::Proved(format!("factor degrees modulo {}", used.join(", ")));
        }
        if best.as_ref().is_none_or(|(_, _, least)| count < *least) {
            best = Some((p, parts, count));
        }
        if images == IMAGES {
            break;
        }
    }
    match best {
        None => Irreducibility::Unproved("no prime below 2000 has a squarefree image".into()),
        Some((_, _, count)) if count > FACTORS => {
            Irreducibility::Unproved(format!("at least {count} factors modulo every prime tried"))
        }
        Some((p, parts, _)) => subsets(&f, p, &parts),
    }
}

/// Zassenhaus: every product of a subset of the lifted factors is tried as a divisor.
fn subsets(f: &[BigInt], p: Prime, parts: &[(usize, Modular)]) -> Irreducibility {
    let modular: Vec<Modular> = parts.iter().flat_map(|(d, part)| p.split(part, *d)).collect();
    // Mignotte: the coefficients of a factor are below 2^degree × the sum of |coefficients|.
    let size = f.iter().fold(BigInt::zero(), |sum, c| sum + c.abs());
    let bound = (size << f.len()) + 1;
    let (lifted, modulus) = lift(f, p, &modular, &(bound * 2));
    let count = lifted.len();
    for mask in 1u32..(1 << (count - 1)) {
        // The last factor is never chosen: of two complementary subsets one lacks it.
        let mut product = vec![BigInt::one()];
        for (_, factor) in lifted.iter().enumerate().filter(|(i, _)| mask >> i & 1 == 1) {
            product = multiply(&product, factor, &modulus);
        }
        let half = &modulus / 2;
        for c in &mut product {
            if *c > half {
                *c -= &modulus;
            }
        }
        if divides(&product, f) {
            return Irreducibility::Reducible(format!("a factor of degree {}", product.len() - 1));
        }
    }
    Irreducibility::Proved(format!("the {count} factors modulo {}, lifted, have no subset dividing it", p.0))
}

fn multiply(f: &[BigInt], g: &[BigInt], modulus: &BigInt) -> Vec<BigInt> {
    let mut result = vec![BigInt::zero(); f.len() + g.len() - 1];
    for (i, a) in f.iter().enumerate() {
        for (j, b) in g.iter().enumerate() {
            result[i + j] += a * b;
        }
    }
    result.into_iter().map(|c| c.mod_floor(modulus)).collect()
}

/// Whether the monic g divides f.
fn divides(g: &[BigInt], f: &[BigInt]) -> bool {
    let mut rest = f.to_vec();
    while rest.len() >= g.len() {
        let Some(top) = rest.pop() else { break };
        let start = rest.len() + 1 - g.len();
        for (target, c) in rest[start..].iter_mut().zip(g) {
            *target -= &top * c;
        }
    }
    rest.iter().all(Zero::is_zero)
}

/// Hensel lifting of all factors together, one power of p at a time, until the modulus exceeds `bound`.
fn lift(f: &[BigInt], p: Prime, factors: &[Modular], bound: &BigInt) -> (Vec<Vec<BigInt>>, BigInt) {
    let inverses: Vec<Modular> = (0..factors.len())
        .map(|i| {
            let others = factors.iter().enumerate().filter(|(j, _)| *j != i);
            let product = others.fold(vec![1], |product, (_, g)| p.divide(&p.product(&product, g), &factors[i]).1);
            p.inverse_modulo(&product, &factors[i])
        })
        .collect();
    let mut lifted: Vec<Vec<BigInt>> = factors.iter().map(|g| g.iter().map(|c| BigInt::from(*c)).collect()).collect();
    let mut modulus = BigInt::from(p.0);
    while modulus <= *bound {
        let next = &modulus * p.0;
        let product = lifted.iter().fold(vec![BigInt::one()], |product, g| multiply(&product, g, &next));
        let error: Vec<BigInt> = f.iter().zip(&product).map(|(a, b)| (a - b).mod_floor(&next) / &modulus).collect();
        let error = p.reduce(&error);
        for ((g, small), inverse) in lifted.iter_mut().zip(factors).zip(&inverses) {
            let step = p.divide(&p.product(&error, inverse), small).1;
            for (target, c) in g.iter_mut().zip(step) {
                *target += &modulus * c;
            }
        }
        modulus = next;
    }
    (lifted, modulus)
}

#[cfg(test)]
mod tests {
    use super::{Irreducibility, irreducible};
    use crate::audit::poly::ratio;

    fn decide(coefficients: &[i64]) -> Irreducibility {
        irreducible(&coefficients.iter().map(|&c| ratio(c, 1)).collect::<Vec<_>>())
    }

    #[test]
    fn by_degrees_modulo_primes() {
        // L = 8, M = 4 (BO).
        let Irreducibility::Proved(how) = decide(&[-1600, 464, -40, 1]) else { panic!("not proved") };
        assert!(how.starts_with("factor degrees"), "{how}");
    }

    /// x⁴ + 1 and x⁸ − 40x⁶ + 352x⁴ − 960x² + 576 (minimal polynomial of √2+√3+√5) are reducible
    /// modulo every prime: textbook examples where only the second method helps.
    #[test]
    fn by_subsets() {
        for f in [&[1, 0, 0, 0, 1][..], &[576, 0, -960, 0, 352, 0, -40, 0, 1]] {
            let Irreducibility::Proved(how) = decide(f) else { panic!("not proved") };
            assert!(how.contains("subset"), "{how}");
        }
    }

    #[test]
    fn reducible_polynomials_are_found_out() {
        // (x²+1)(x²+2), (x−3)(x+5), x⁴ + 4 = (x²+2x+2)(x²−2x+2), x², (x²+x+1/2)(x−1/3).
        for f in [&[2, 0, 3, 0, 1][..], &[-15, 2, 1], &[4, 0, 0, 0, 1]] {
            assert!(matches!(decide(f), Irreducibility::Reducible(_)), "{f:?}");
        }
        assert!(matches!(decide(&[0, 0, 1]), Irreducibility::Unproved(_)));
        let rational = [ratio(-1, 6), ratio(1, 6), ratio(2, 3), ratio(1, 1)];
        assert!(matches!(irreducible(&rational), Irreducibility::Reducible(_)));
    }
}
