//! Are the states distinct, are they mirror pairs, and are they all? Exact, from the one-loop Q.

use super::field::{Field, solve_integer};
use super::modular::{Modular, Prime};
use super::poly::{Poly, binomial, lcm, ratio};
use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::{One, Zero};

/// 2⁶¹ − 1. A difference or a nonzero discriminant modulo a prime is one over Q as well.
const PRIME: Prime = Prime((1 << 61) - 1);
/// Combinations Σ_j (j+1)^e q_j of the coefficients of Q, one for each exponent.
const EXPONENTS: std::ops::Range<u32> = 1..5;

/// The characteristic polynomials, modulo a prime, of several combinations of the coefficients of Q.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Fingerprint {
    polynomials: Vec<Modular>,
}

/// Σ_j (j+1)^e q_j over the coefficients of Q below the leading one; mirrored: of (−1)^M Q(−v).
fn combination(q: &Poly, exponent: u32, mirrored: bool) -> Poly {
    let top = q.len().saturating_sub(1);
    let parts: Vec<(BigRational, Poly)> = (0..top)
        .map(|j| {
            let weight = BigRational::from(num_traits::pow(BigInt::from(j + 1), exponent as usize));
            let odd = mirrored && (top - j) % 2 == 1;
            (if odd { -weight } else { weight }, q.coefficient(j))
        })
        .collect();
    Poly::combine(&parts.iter().map(|(w, p)| (w.clone(), p)).collect::<Vec<_>>())
}

impl Fingerprint {
    /// Of the orbit of `q` over K; `None` in the freak case that the prime divides a denominator.
    pub fn new(field: &Field, q: &Poly) -> Option<Fingerprint> {
        let polynomials = EXPONENTS.map(|e| characteristic(field, &combination(q, e, false))).collect::<Option<_>>()?;
        Some(Fingerprint { polynomials })
    }

    /// Whether the coefficients of Q are shown to generate K, so that all embeddings of K are
    /// different states.
    pub fn generates(&self) -> bool {
        self.polynomials.iter().any(|chi| PRIME.squarefree(chi))
    }
}

/// The characteristic polynomial of a constant modulo the prime, from the traces of its powers.
fn characteristic(field: &Field, t: &Poly) -> Option<Modular> {
    let p = PRIME;
    let d = field.degree();
    let minimal = p.reduce(&field.minimal());
    let denominator = p.residue(t.denominator());
    if denominator == 0 {
        return None;
    }
    let inverse = p.inverse(denominator);
    let entries = t.coefficients().first().map_or(&[][..], Vec::as_slice);
    let t: Modular = entries.iter().map(|c| p.mul(p.residue(c), inverse)).collect();
    // Newton's identities turn power sums into elementary symmetric functions and back.
    let sign = |k: usize, value: u64| if k.is_multiple_of(2) { value } else { p.sub(0, value) };
    let mut elementary = vec![0; d + 1];
    for (k, e) in elementary.iter_mut().enumerate() {
        *e = sign(k, minimal[d - k]);
    }
    let mut traces = vec![d as u64];
    for k in 1..d {
        let mut sum = sign(k + 1, p.mul(k as u64, elementary[k]));
        for i in 1..k {
            sum = (sum + sign(i + 1, p.mul(elementary[i], traces[k - i]))) % p.0;
        }
        traces.push(sum);
    }
    let mut power: Modular = vec![1];
    let mut sums = vec![d as u64];
    for _ in 0..d {
        power = p.divide(&p.product(&power, &t), &minimal).1;
        sums.push(power.iter().zip(&traces).fold(0, |sum, (c, trace)| (sum + p.mul(*c, *trace)) % p.0));
    }
    let mut symmetric = vec![1];
    for k in 1..=d {
        let total = (1..=k).fold(0, |sum, i| (sum + sign(i + 1, p.mul(symmetric[k - i], sums[i]))) % p.0);
        symmetric.push(p.mul(total, p.inverse(k as u64)));
    }
    Some((0..=d).map(|j| sign(d - j, symmetric[d - j])).collect())
}

/// Shows that v → −v maps the orbit of `q` to itself by an automorphism x → s of K other than the
/// identity that fixes `omega`: the members are mirror pairs with equal γ_n.
///
/// # Errors
/// What is not as claimed.
pub fn mirror_pairs(field: &Field, q: &Poly, omega: &Poly) -> Result<(), String> {
    let y = field.generator();
    let image = [y.negate()].into_iter().chain(solve_mirror(field, q)).find(|s| {
        let minimal = Poly::from_rationals(&field.minimal().into_iter().map(BigRational::from).collect::<Vec<_>>());
        field.at(&minimal, s).is_zero() && is_mirror(field, q, s)
    });
    match image {
        None => Err("no automorphism of the field maps Q(v) to its mirror image".into()),
        Some(s) if s == y => Err("Q(v) is its own mirror image".into()),
        Some(s) if apply(field, omega, &s) != *omega => Err("omega differs between mirror images".into()),
        Some(_) => Ok(()),
    }
}

/// A constant as a polynomial in y, at another value of y.
fn apply(field: &Field, constant: &Poly, s: &Poly) -> Poly {
    let entries = constant.coefficients().first().cloned().unwrap_or_default();
    let polynomial = Poly::new(entries.into_iter().map(|e| vec![e]).collect(), constant.denominator().clone());
    field.at(&polynomial, s)
}

fn is_mirror(field: &Field, q: &Poly, s: &Poly) -> bool {
    let top = q.len().saturating_sub(1);
    (0..top).all(|j| {
        let c = q.coefficient(j);
        apply(field, &c, s) == if (top - j) % 2 == 1 { c.negate() } else { c }
    })
}

/// Candidates for the image of y: with y = f(t) for a generating combination t of the coefficients
/// of Q, the image is f at the same combination of the mirrored coefficients.
fn solve_mirror<'a>(field: &'a Field, q: &'a Poly) -> impl Iterator<Item = Poly> + 'a {
    EXPONENTS.filter_map(move |e| {
        let d = field.degree();
        let t = combination(q, e, false);
        let mut powers = vec![Poly::one()];
        for k in 1..d {
            powers.push(field.mul(&powers[k - 1], &t));
        }
        let y = field.generator();
        let all: Vec<&Poly> = powers.iter().chain([&y]).collect();
        let common = all.iter().fold(BigInt::one(), |c, p| lcm(&c, p.denominator()));
        let entry = |p: &Poly, i: usize| {
            let value = p.coefficients().first().and_then(|entries| entries.get(i)).cloned();
            value.unwrap_or_default() * (&common / p.denominator())
        };
        let rows = (0..d).map(|i| all.iter().map(|p| entry(p, i)).collect()).collect();
        let (solution, denominator) = solve_integer(rows)?;
        let f = Poly::new(solution.into_iter().map(|c| vec![c]).collect(), denominator);
        Some(field.at(&f, &combination(q, e, true)))
    })
}

/// The transfer matrix eigenvalue in powers of v − ½:
/// T(v) = [Q₁(v+1)Q₂(v−1) − Q₁(v−1)Q₂(v+1)]/(2M−L−1). Its constant term is the one-site shift.
pub fn transfer(field: &Field, length: usize, magnons: usize, q1: &Poly, q2: &Poly) -> Poly {
    let (low, high) = (ratio(-1, 2), ratio(3, 2));
    let factor = 2 * magnons as i64 - length as i64 - 1;
    let pairs = [(&q1.shift(&high), &q2.shift(&low)), (&q1.shift(&low).negate(), &q2.shift(&high))];
    field.dot(&pairs, usize::MAX).scale(&ratio(1, factor))
}

/// The even charge a generator is named after, from T(v) = 1 + a₁(v−½) + …: γ₁ = 2(L − a₁) and
/// q₄ = ½ d³/dv³ log T at v = ½ = 3a₃ − 3a₁a₂ + a₁³, which is the operator
/// Σ_k ([P_k,[P_{k+1},P_{k+2}]] + 2P_k − P_{k,k+2}). `None` for an unknown name.
pub fn charge(field: &Field, length: usize, transfer: &Poly, name: &str) -> Option<Poly> {
    let [a, b, c] = [1, 2, 3].map(|k| transfer.coefficient(k));
    let gamma = Poly::integer(length as i64).sub(&a).scale(&ratio(2, 1));
    let rest = field.mul(&a, &a).sub(&b.scale(&ratio(3, 1)));
    let fourth = c.scale(&ratio(3, 1)).add(&field.mul(&a, &rest));
    match name {
        "gamma_1" => Some(gamma),
        "q_4" => Some(fourth),
        "gamma_1 + q_4" => Some(gamma.add(&fourth)),
        _ => None,
    }
}

/// Necklaces with `length` beads, `magnons` of them of the second colour, by counting the colourings
/// that each rotation fixes.
fn necklaces(length: usize, magnons: usize) -> BigInt {
    let mut sum = BigInt::zero();
    for rotation in 0..length {
        let cycles = num_integer::gcd(rotation, length);
        if (magnons * cycles).is_multiple_of(length) {
            sum += binomial(cycles as i64, magnons * cycles / length);
        }
    }
    sum / length
}

/// The number of primaries, necklaces(L, M) − necklaces(L, M−1).
pub fn primaries(length: usize, magnons: usize) -> BigInt {
    if magnons == 0 { BigInt::one() } else { necklaces(length, magnons) - necklaces(length, magnons - 1) }
}

#[cfg(test)]
mod tests {
    use super::{Fingerprint, PRIME, characteristic, charge, mirror_pairs, primaries, transfer};
    use crate::audit::field::Field;
    use crate::audit::poly::{Poly, ratio};
    use num_bigint::BigInt;

    /// Counts of primaries for L = 12, M = 2…6: 5, 13, 24, 23, 14 (necklace formula).
    #[test]
    fn counts() {
        let counts: Vec<BigInt> = (2..=6).map(|m| primaries(12, m)).collect();
        assert_eq!(counts, [5, 13, 24, 23, 14].map(BigInt::from));
    }

    /// L = 4, M = 2 with Q₁ = v² + 1/12: γ₁ = 12, and q₄ = L − Σ_k [(v_k+½)⁻³ − (v_k−½)⁻³]. With
    /// Q(½+w) = 1/3 + w + w² the sum of (v_k−½)⁻³ is p₃ of the reciprocal roots, whose symmetric functions are
    /// e₁ = −3, e₂ = 3: p₃ = e₁³ − 3e₁e₂ = 0, and the other sum is its negative. So q₄ = 4.
    #[test]
    fn charges_of_konishi() {
        let field = Field::new(&[ratio(-12, 1), ratio(1, 1)]);
        let q1 = Poly::from_rationals(&[ratio(1, 12), ratio(0, 1), ratio(1, 1)]);
        let q2 = Poly::from_rationals(&[ratio(0, 1), ratio(-1, 4), ratio(0, 1), ratio(1, 1)]);
        let t = transfer(&field, 4, 2, &q1, &q2);
        assert_eq!((t.len(), t.coefficient(0)), (5, Poly::one()));
        assert_eq!(charge(&field, 4, &t, "gamma_1"), Some(Poly::integer(12)));
        assert_eq!(charge(&field, 4, &t, "q_4"), Some(Poly::integer(4)));
        assert_eq!(charge(&field, 4, &t, "gamma_1 + q_4"), Some(Poly::integer(16)));
        assert_eq!(charge(&field, 4, &t, "gamma_2"), None);
    }

    #[test]
    fn characteristic_polynomials() {
        // x³ − x − 1 and t = x²: the characteristic polynomial is t³ − 2t² + t − 1 by hand.
        let field = Field::new(&[ratio(-1, 1), ratio(-1, 1), ratio(0, 1), ratio(1, 1)]);
        let t = field.element(&[ratio(0, 1), ratio(0, 1), ratio(1, 1)]);
        let p = PRIME.0;
        assert_eq!(characteristic(&field, &t).unwrap(), [p - 1, 1, p - 2, 1]);
    }

    /// Q = v² + y v + 1 over Q(y), y² = −3: a mirror pair; in the basis x = y + 1 the automorphism is x → 2 − x.
    #[test]
    fn pairs() {
        let field = Field::new(&[ratio(4, 1), ratio(-2, 1), ratio(1, 1)]);
        let y = field.element(&[ratio(-1, 1), ratio(1, 1)]);
        let q = Poly::from_constants(&[Poly::one(), y.clone(), Poly::one()]);
        assert_eq!(mirror_pairs(&field, &q, &Poly::integer(10)), Ok(()));
        assert!(mirror_pairs(&field, &q, &y).unwrap_err().contains("omega"));
        let symmetric = Poly::from_constants(&[y.clone(), Poly::zero(), Poly::one()]);
        assert!(mirror_pairs(&field, &symmetric, &Poly::integer(10)).is_err());
        assert!(Fingerprint::new(&field, &q).unwrap().generates());
        assert!(!Fingerprint::new(&field, &Poly::one().times_power(2)).unwrap().generates());
    }
}
