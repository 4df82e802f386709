//! Factorisation over the integers (FLINT: Zassenhaus with van Hoeij's knapsack by lattice reduction).

use super::fmpz::{FmpzPoly, to_integers};
use flint3_sys::{fmpz_poly_factor, fmpz_poly_factor_clear, fmpz_poly_factor_init, fmpz_poly_factor_struct};
use rug::Integer;

/// The irreducible factors of positive degree with their multiplicities; content and sign are dropped.
pub fn factor(coefficients: &[Integer]) -> Vec<(Vec<Integer>, usize)> {
    let poly = FmpzPoly::from_integers(coefficients);
    let mut factors = fmpz_poly_factor_struct::default();
    // SAFETY: the structure is initialised, filled by FLINT, read within its stated length, cleared once.
    unsafe {
        fmpz_poly_factor_init(&mut factors);
        fmpz_poly_factor(&mut factors, poly.as_ptr());
        let result = (0..factors.num as usize)
            .map(|i| (to_integers(&*factors.p.add(i)), *factors.exp.add(i) as usize))
            .collect();
        fmpz_poly_factor_clear(&mut factors);
        result
    }
}

#[cfg(test)]
mod tests {
    use super::{Integer, factor};

    #[test]
    fn factors_come_with_multiplicities() {
        // (x − 3)² (x² + 1)
        let poly: Vec<Integer> = [9, -6, 10, -6, 1].into_iter().map(Integer::from).collect();
        let mut factors = factor(&poly);
        factors.sort();
        assert_eq!(factors.len(), 2);
        assert!(factors.contains(&(vec![Integer::from(-3), Integer::from(1)], 2)));
        assert!(factors.contains(&(vec![Integer::from(1), Integer::new(), Integer::from(1)], 1)));
    }
}
