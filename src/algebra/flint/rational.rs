//! Chinese remaindering over many word-size primes and rational reconstruction (FLINT: product
//! trees and half-gcd).

use super::fmpz::{Fmpz, to_integer};
use flint3_sys::{
    fmpq, fmpq_clear, fmpq_init, fmpq_reconstruct_fmpz, fmpq_reconstruct_fmpz_2, fmpz, fmpz_comb_clear, fmpz_comb_init, fmpz_comb_struct,
    fmpz_comb_temp_clear, fmpz_comb_temp_init, fmpz_comb_temp_struct, fmpz_multi_CRT_ui,
};
use rug::{Integer, Rational};

/// Chinese remaindering for a fixed list of primes.
pub struct Remaindering {
    comb: fmpz_comb_struct,
    /// FLINT keeps a pointer to the primes in some versions; they live as long as the tree.
    primes: Vec<u64>,
}

// SAFETY: the product tree is only read after construction.
unsafe impl Send for Remaindering {}
// SAFETY: as above; every call makes its own scratch space.
unsafe impl Sync for Remaindering {}

impl Remaindering {
    /// The product tree of distinct primes.
    pub fn new(primes: Vec<u64>) -> Remaindering {
        let mut comb = fmpz_comb_struct::default();
        // SAFETY: initialises the structure; the vector's buffer is not moved by moving the vector.
        unsafe { fmpz_comb_init(&mut comb, primes.as_ptr(), primes.len() as i64) };
        Remaindering { comb, primes }
    }

    /// The integer of least absolute value with these residues, one for each prime.
    pub fn combine(&self, residues: &[u64]) -> Integer {
        assert_eq!(residues.len(), self.primes.len(), "one residue for each prime");
        let mut temp = fmpz_comb_temp_struct::default();
        let mut output = Fmpz::new();
        // SAFETY: lengths checked above; scratch space made and cleared here.
        unsafe {
            fmpz_comb_temp_init(&mut temp, &self.comb);
            fmpz_multi_CRT_ui(output.as_mut_ptr(), residues.as_ptr(), &self.comb, &mut temp, 1);
            fmpz_comb_temp_clear(&mut temp);
        }
        output.to_integer()
    }
}

impl Drop for Remaindering {
    fn drop(&mut self) {
        // SAFETY: initialised in `new`, cleared once.
        unsafe { fmpz_comb_clear(&mut self.comb) };
    }
}

/// The rational n/d with n ≡ residue·d modulo `modulus`, d ≤ 2^`bits` and 2|n|d < modulus, if there is one.
pub fn reconstruct_small_denominator(residue: &Integer, modulus: &Integer, bits: u32) -> Option<Rational> {
    let denominator = Integer::from(1) << bits;
    let numerator = (Integer::from(modulus - 1u32) >> (bits + 1)).max(Integer::from(1));
    let (n, d) = (Fmpz::from_integer(&numerator), Fmpz::from_integer(&denominator));
    with_arguments(residue, modulus, |value, a, m| {
        // SAFETY: all pointers are to initialised values that outlive the call.
        unsafe { fmpq_reconstruct_fmpz_2(value, a, m, n.as_ptr(), d.as_ptr()) != 0 }
    })
}

/// The rational n/d with n ≡ residue·d modulo `modulus` and |n|, d ≤ √(modulus/2), if there is one.
pub fn reconstruct(residue: &Integer, modulus: &Integer) -> Option<Rational> {
    with_arguments(residue, modulus, |value, a, m| {
        // SAFETY: all pointers are to initialised values that outlive the call.
        unsafe { fmpq_reconstruct_fmpz(value, a, m) != 0 }
    })
}

fn with_arguments(
    residue: &Integer,
    modulus: &Integer,
    find: impl Fn(*mut fmpq, *const fmpz, *const fmpz) -> bool,
) -> Option<Rational> {
    use rug::ops::RemRounding;
    let reduced = Integer::from(residue.rem_euc(modulus));
    let (a, m) = (Fmpz::from_integer(&reduced), Fmpz::from_integer(modulus));
    let mut value = fmpq::default();
    // SAFETY: the rational is initialised, read if FLINT says it found one, and cleared once.
    unsafe {
        fmpq_init(&mut value);
        let found = find(&mut value, a.as_ptr(), m.as_ptr());
        let result = found.then(|| Rational::from((to_integer(&value.num), to_integer(&value.den))));
        fmpq_clear(&mut value);
        result
    }
}

#[cfg(test)]
mod tests {
    use super::{Integer, Rational, Remaindering, reconstruct};
    use crate::algebra::prime_field::PrimeField;
    use crate::algebra::ring::Ring;
    use proptest::prelude::{any, proptest};

    proptest! {
        #[test]
        fn a_rational_is_found_again_from_its_residues(n in any::<i64>(), d in 1u32..) {
            let value = Rational::from((n, d));
            let fields: Vec<PrimeField> = (0..3).map(PrimeField::nth).collect();
            let residues: Vec<u64> = fields.iter().map(|f| f.residue(f.scalar(&value))).collect();
            let primes: Vec<u64> = fields.iter().map(PrimeField::modulus).collect();
            let modulus = primes.iter().fold(Integer::from(1), |m, p| m * *p);
            let residue = Remaindering::new(primes).combine(&residues);
            assert_eq!(reconstruct(&residue, &modulus), Some(value));
        }
    }
}
