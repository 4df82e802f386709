//! Certified enclosures of the roots of integer polynomials (FLINT/Arb ball arithmetic).

use super::fmpz::{Fmpz, FmpzPoly};
use crate::error::{Error, Result};
use flint3_sys::{
    _acb_vec_clear, _acb_vec_init, acb_is_real, arb_fmpz_poly_complex_roots, arb_get_interval_fmpz_2exp, arb_struct,
};
use rug::{Integer, Rational};

/// An interval [low, high] that contains a real number.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Enclosure {
    /// The lower end.
    pub low: Rational,
    /// The upper end.
    pub high: Rational,
}

/// Enclosures (real part, imaginary part) of all complex roots of a squarefree polynomial, accurate
/// to about `bits` bits relative to each root; real roots have imaginary part exactly zero and come
/// first, ascending.
pub fn complex_roots(coefficients: &[Integer], bits: u32) -> Vec<(Enclosure, Enclosure)> {
    let degree = coefficients.len().saturating_sub(1);
    if degree == 0 {
        return Vec::new();
    }
    let poly = FmpzPoly::from_integers(coefficients);
    // SAFETY: room for as many roots as the degree says; entries are read within it; cleared once.
    unsafe {
        let roots = _acb_vec_init(degree as i64);
        arb_fmpz_poly_complex_roots(roots, poly.as_ptr(), 0, i64::from(bits));
        let result = (0..degree)
            .map(|i| {
                let root = &*roots.add(i);
                let imaginary = if acb_is_real(root) != 0 {
                    Enclosure { low: Rational::new(), high: Rational::new() }
                } else {
                    enclosure(&root.imag)
                };
                (enclosure(&root.real), imaginary)
            })
            .collect();
        _acb_vec_clear(roots, degree as i64);
        result
    }
}

/// Enclosures of the roots of a squarefree polynomial all of whose roots are real, ascending.
///
/// # Errors
/// A check failure when a root is not real.
pub fn real_roots(coefficients: &[Integer], bits: u32) -> Result<Vec<Enclosure>> {
    let mut roots = Vec::new();
    for (real, imaginary) in complex_roots(coefficients, bits) {
        if !imaginary.low.is_zero() || !imaginary.high.is_zero() {
            return Err(Error::check(format!(
                "the polynomial with coefficients {coefficients:?} has a root that is not real, and eigenvalues of the Hermitian one-loop mixing matrix are real; please report this family"
            )));
        }
        roots.push(real);
    }
    roots.sort_by(|a, b| a.low.cmp(&b.low));
    Ok(roots)
}

fn enclosure(ball: &arb_struct) -> Enclosure {
    let (mut low, mut high, mut exponent) = (Fmpz::new(), Fmpz::new(), Fmpz::new());
    // SAFETY: all four are initialised; the ball is finite (a root enclosure).
    unsafe { arb_get_interval_fmpz_2exp(low.as_mut_ptr(), high.as_mut_ptr(), exponent.as_mut_ptr(), ball) };
    let exponent = exponent.to_integer().to_i32().unwrap_or(0);
    let scaled = |end: &Fmpz| Rational::from(end.to_integer()) << exponent;
    Enclosure { low: scaled(&low), high: scaled(&high) }
}

#[cfg(test)]
mod tests {
    use super::{Integer, Rational, complex_roots, real_roots};

    #[test]
    fn roots_are_enclosed() {
        // x² − 2, and x² + 1.
        let two: Vec<Integer> = [-2, 0, 1].into_iter().map(Integer::from).collect();
        let roots = real_roots(&two, 100).unwrap();
        for root in &roots {
            let (a, b) = (Rational::from(root.low.square_ref()), Rational::from(root.high.square_ref()));
            assert!((a <= 2 && b >= 2) || (b <= 2 && a >= 2));
            assert!(Rational::from(&root.high - &root.low) < Rational::from((1, 1u64 << 63)));
        }
        let unit: Vec<Integer> = [1, 0, 1].into_iter().map(Integer::from).collect();
        assert!(real_roots(&unit, 64).is_err());
        assert_eq!(complex_roots(&unit, 64).len(), 2);
    }
}
