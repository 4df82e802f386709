//! Characteristic polynomials of D₂ + h D₄ + h² D₆ over Z[h]/h^{H+1}, exactly.

use super::dilatation::Sector;
use crate::error::{Error, Result};
use crate::observer::Observer;
use rayon::iter::{IndexedParallelIterator, IntoParallelRefMutIterator, ParallelIterator};
use rug::Integer;
use rug::ops::DivRounding;

/// A truncated series in h: coefficients of 1, h, …, h^H.
pub type Series = Vec<Integer>;

/// A polynomial in x with series coefficients, constant first.
pub type Polynomial = Vec<Series>;

/// det(x − D₂ − h D₄ − h² D₆) modulo h^{`order` + 1}, by the recursion of Faddeev and LeVerrier; the last step
/// must give the zero matrix (Cayley–Hamilton), which is checked.
///
/// n² · (non-zero entries) · 3(H+1) products of a word and an integer, for n states.
///
/// # Errors
/// Interruption, or the check fails.
pub fn characteristic(sector: &Sector, order: usize, observer: &dyn Observer) -> Result<Polynomial> {
    let size = sector.len();
    let zero = || vec![Integer::new(); order + 1];
    let mut result = vec![zero(); size + 1];
    result[size][0] = Integer::from(1);
    // M_k, column by column; M_1 = 1.
    let mut matrix: Vec<Vec<Series>> = vec![vec![zero(); size]; size];
    for (i, column) in matrix.iter_mut().enumerate() {
        column[i][0] = Integer::from(1);
    }
    for k in 1..=size {
        observer.proceed()?;
        matrix.par_iter_mut().for_each(|column| *column = product(sector, column, order));
        let mut coefficient = zero();
        for (i, column) in matrix.iter().enumerate() {
            coefficient.iter_mut().zip(&column[i]).for_each(|(sum, x)| *sum -= x);
        }
        // A trace that k does not divide could only come from a mistake here; it would show in the check.
        coefficient.iter_mut().for_each(|c| *c = std::mem::take(c).div_floor(Integer::from(k)));
        matrix.par_iter_mut().enumerate().for_each(|(i, column)| {
            column[i].iter_mut().zip(&coefficient).for_each(|(x, c)| *x += c);
        });
        result[size - k] = coefficient;
    }
    if matrix.iter().flatten().flatten().any(|x| !x.is_zero()) {
        return Err(Error::check(
            "the characteristic polynomial of the dilatation operator does not annihilate it; please report this family",
        ));
    }
    Ok(result)
}

fn product(sector: &Sector, column: &[Series], order: usize) -> Vec<Series> {
    sector
        .rows
        .iter()
        .map(|row| {
            let mut sum = vec![Integer::new(); order + 1];
            for (k, weights) in row {
                for (shift, weight) in weights.iter().enumerate().filter(|(_, weight)| **weight != 0) {
                    for (target, x) in sum.iter_mut().skip(shift).zip(&column[*k]) {
                        *target += x * *weight;
                    }
                }
            }
            sum
        })
        .collect()
}

/// a/b for monic polynomials, or `None` when b does not divide a modulo h^{H+1}.
pub fn quotient(a: &Polynomial, b: &Polynomial) -> Option<Polynomial> {
    let degree = b.len() - 1;
    let mut rest = a.clone();
    let mut quotient = vec![Series::new(); (a.len()).checked_sub(degree)?];
    while rest.len() > degree {
        let lead = rest.pop()?;
        let base = rest.len() - degree;
        for (i, c) in b[..degree].iter().enumerate() {
            for (n, x) in lead.iter().enumerate() {
                for (m, y) in c.iter().enumerate().take(lead.len() - n) {
                    rest[base + i][n + m] -= Integer::from(x * y);
                }
            }
        }
        quotient[base] = lead;
    }
    rest.iter().flatten().all(Integer::is_zero).then_some(quotient)
}

#[cfg(test)]
mod tests {
    use super::{Integer, Polynomial, characteristic, quotient};
    use crate::crosscheck::dilatation::{Reversal, Sector};
    use crate::family::Family;
    use crate::observer::Silent;

    fn polynomial(rows: &[&[i64]]) -> Polynomial {
        rows.iter().map(|row| row.iter().copied().map(Integer::from).collect()).collect()
    }

    /// L = 4, M = 2: the protected state and 12 − 48h + 336h² (BKS), both even.
    #[test]
    fn konishi() {
        let family = Family { length: 4, magnons: 2 };
        let even = characteristic(&Sector::new(family, Reversal::Even), 2, &Silent).unwrap();
        assert_eq!(even, polynomial(&[&[0, 0, 0], &[-12, 48, -336], &[1, 0, 0]]));
        let odd = characteristic(&Sector::new(family, Reversal::Odd), 2, &Silent).unwrap();
        assert_eq!(odd, polynomial(&[&[1, 0, 0]]));
    }

    #[test]
    fn division() {
        // (x − 1 − h)(x − 2 + h) = x² − 3x + 2 + h − h².
        let product = polynomial(&[&[2, 1, -1], &[-3, 0, 0], &[1, 0, 0]]);
        let factor = polynomial(&[&[-1, -1, 0], &[1, 0, 0]]);
        assert_eq!(quotient(&product, &factor), Some(polynomial(&[&[-2, 1, 0], &[1, 0, 0]])));
        let other = polynomial(&[&[-1, 1, 0], &[1, 0, 0]]);
        assert_eq!(quotient(&product, &other), None);
        assert_eq!(quotient(&factor, &product), None);
    }

    /// p(D₂) v = 0 for a vector v, in rational arithmetic.
    #[test]
    fn the_polynomial_annihilates_the_matrix() {
        use crate::algebra::{linear, rationals::Rationals};
        use rug::Rational;
        for (length, magnons, reversal) in [(7, 3, Reversal::Even), (7, 3, Reversal::Odd), (8, 4, Reversal::Even)] {
            let sector = Sector::new(Family { length, magnons }, reversal);
            let polynomial = characteristic(&sector, 0, &Silent).unwrap();
            let rows: Vec<Vec<Rational>> = (0..sector.len())
                .map(|i| {
                    let mut row = vec![Rational::new(); sector.len()];
                    for (j, weights) in &sector.rows[i] {
                        row[*j] = Rational::from(weights[0]);
                    }
                    row
                })
                .collect();
            let mut vector: Vec<Rational> = (1..=sector.len()).map(|i| Rational::from(i * i % 7)).collect();
            let mut sum = vec![Rational::new(); sector.len()];
            for c in &polynomial {
                sum.iter_mut().zip(&vector).for_each(|(s, v)| *s += Rational::from(v * &c[0]));
                vector = linear::apply(&Rationals, &rows, &vector);
            }
            assert!(sum.iter().all(Rational::is_zero), "({length}, {magnons})");
        }
    }
}
