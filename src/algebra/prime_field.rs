//! F_p for primes just below 2⁶⁰, in Montgomery form (Montgomery, Math. Comp. 44 (1985) 519).

use super::ring::Ring;
use rug::integer::IsPrime;
use rug::{Integer, Rational};
use std::sync::{Mutex, OnceLock};

/// The integers modulo a prime 2⁵⁹ < p < 2⁶⁰.
///
/// Elements are a·2⁶⁴ mod p. A product is below 2¹²⁰, so a 128-bit accumulator takes 2⁷ of them
/// before its top bit is set; only then it is folded.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct PrimeField {
    modulus: u64,
    /// −1/p mod 2⁶⁴.
    negative_inverse: u64,
    /// 2¹²⁸ mod p.
    square_of_radix: u64,
    /// 2⁶⁴ mod p, which is 1 in Montgomery form.
    radix: u64,
    /// floor(2⁶⁴ / p).
    quotient: u64,
}

impl PrimeField {
    /// The field of `modulus` elements, for a prime 2⁵⁹ < p < 2⁶⁰.
    pub fn new(modulus: u64) -> PrimeField {
        debug_assert!(modulus >> 59 == 1);
        // Newton iteration doubles the correct bits of 1/p mod 2^64; p itself is right to 3 bits.
        let mut inverse = modulus;
        for _ in 0..6 {
            inverse = inverse.wrapping_mul(2u64.wrapping_sub(modulus.wrapping_mul(inverse)));
        }
        let radix = ((1u128 << 64) % u128::from(modulus)) as u64;
        PrimeField {
            modulus,
            negative_inverse: inverse.wrapping_neg(),
            square_of_radix: (u128::from(radix) * u128::from(radix) % u128::from(modulus)) as u64,
            radix,
            quotient: ((1u128 << 64) / u128::from(modulus)) as u64,
        }
    }

    /// The field of the `index`-th prime of the engine, counted down from 2⁶⁰. The sequence is
    /// fixed, so that results cannot depend on the machine or on thread timing.
    pub fn nth(index: usize) -> PrimeField {
        static PRIMES: OnceLock<Mutex<Vec<u64>>> = OnceLock::new();
        let list = PRIMES.get_or_init(|| Mutex::new(Vec::new()));
        let mut list = list.lock().unwrap_or_else(std::sync::PoisonError::into_inner);
        while list.len() <= index {
            let mut candidate = list.last().copied().unwrap_or(1 << 60) - 1;
            while Integer::from(candidate).is_probably_prime(30) == IsPrime::No {
                candidate -= 1;
            }
            list.push(candidate);
        }
        PrimeField::new(list[index])
    }

    /// p.
    pub fn modulus(&self) -> u64 {
        self.modulus
    }

    /// T · 2⁻⁶⁴ mod p for T < p·2⁶⁴.
    #[inline(always)]
    fn redc(&self, t: u128) -> u64 {
        let m = (t as u64).wrapping_mul(self.negative_inverse);
        let r = ((t + u128::from(m) * u128::from(self.modulus)) >> 64) as u64;
        if r >= self.modulus { r - self.modulus } else { r }
    }

    /// Lowers a sum of any size below 2¹²⁸ to one below p·2⁶⁴ with the same residue.
    #[inline(always)]
    pub(crate) fn fold(&self, t: u128) -> u128 {
        let high = (t >> 64) as u64;
        let estimate = ((u128::from(high) * u128::from(self.quotient)) >> 64) as u64;
        let mut rest = high - estimate * self.modulus;
        if rest >= self.modulus {
            rest -= self.modulus;
        }
        if rest >= self.modulus {
            rest -= self.modulus;
        }
        (u128::from(rest) << 64) | u128::from(t as u64)
    }

    /// The element that a sum of products of elements stands for.
    #[inline(always)]
    pub(crate) fn reduce(&self, sum: u128) -> u64 {
        self.redc(self.fold(sum))
    }

    /// An ordinary residue as an element.
    pub fn element(&self, residue: u64) -> u64 {
        self.redc(u128::from(residue % self.modulus) * u128::from(self.square_of_radix))
    }

    /// An element as the ordinary residue 0 ≤ r < p.
    pub fn residue(&self, element: u64) -> u64 {
        self.redc(u128::from(element))
    }

    /// The image of an integer.
    pub fn image(&self, value: &Integer) -> u64 {
        self.element(value.mod_u64(self.modulus))
    }
}

/// Euclidean remainder by a 64-bit modulus.
trait ModU64 {
    fn mod_u64(&self, modulus: u64) -> u64;
}

impl ModU64 for Integer {
    fn mod_u64(&self, modulus: u64) -> u64 {
        use rug::ops::RemRounding;
        match self.to_i64() {
            Some(small) => small.rem_euclid(modulus as i64) as u64,
            None => Integer::from(self.rem_euc(Integer::from(modulus))).to_u64().unwrap_or(0),
        }
    }
}

impl Ring for PrimeField {
    type Elem = u64;
    type Scalar = u64;
    type Acc = u128;

    fn zero(&self) -> u64 {
        0
    }
    fn one(&self) -> u64 {
        self.radix
    }
    fn scalar(&self, value: &Rational) -> u64 {
        let numerator = self.image(value.numer());
        if *value.denom() == 1 {
            return numerator;
        }
        match self.inverse(&self.image(value.denom())) {
            Some(inverse) => self.mul(&numerator, &inverse),
            None => unreachable!("a denominator of small factors vanishes modulo a 60-bit prime"),
        }
    }
    fn constant(&self, value: &u64) -> u64 {
        *value
    }
    #[inline(always)]
    fn is_zero(&self, a: &u64) -> bool {
        *a == 0
    }
    #[inline(always)]
    fn add(&self, a: &u64, b: &u64) -> u64 {
        let sum = a + b;
        if sum >= self.modulus { sum - self.modulus } else { sum }
    }
    #[inline(always)]
    fn sub(&self, a: &u64, b: &u64) -> u64 {
        if a >= b { a - b } else { a + self.modulus - b }
    }
    #[inline(always)]
    fn neg(&self, a: &u64) -> u64 {
        if *a == 0 { 0 } else { self.modulus - a }
    }
    #[inline(always)]
    fn mul(&self, a: &u64, b: &u64) -> u64 {
        self.redc(u128::from(*a) * u128::from(*b))
    }
    #[inline(always)]
    fn scale(&self, a: &u64, c: &u64) -> u64 {
        self.mul(a, c)
    }
    fn inverse(&self, a: &u64) -> Option<u64> {
        if *a == 0 {
            return None;
        }
        // Extended Euclid on the ordinary residue; signs alternate, so magnitudes suffice.
        let (mut r0, mut r1) = (self.modulus, self.residue(*a));
        let (mut s0, mut s1) = (0i128, 1i128);
        while r1 != 0 {
            let q = r0 / r1;
            (r0, r1) = (r1, r0 - q * r1);
            (s0, s1) = (s1, s0 - i128::from(q) * s1);
        }
        Some(self.element(s0.rem_euclid(i128::from(self.modulus)) as u64))
    }
    #[inline(always)]
    fn accumulator(&self) -> u128 {
        0
    }
    #[inline(always)]
    fn accumulate(&self, acc: &mut u128, a: &u64, b: &u64) {
        *acc += u128::from(*a) * u128::from(*b);
        if *acc >> 127 != 0 {
            *acc = self.fold(*acc);
        }
    }
    #[inline(always)]
    fn collect(&self, acc: &mut u128) -> u64 {
        let sum = std::mem::take(acc);
        self.reduce(sum)
    }
}
