//! The eigenvalues of a commuting charge from the sequence u·Cⁱψ modulo a prime: Krylov vectors of
//! sparse matrices and the Berlekamp–Massey algorithm (Massey, IEEE Trans. IT 15 (1969) 122).

use super::charges::Sparse;
use crate::algebra::poly;
use crate::algebra::prime_field::PrimeField;
use crate::algebra::ring::Ring;

/// A sparse matrix prepared for row vectors modulo primes: its transpose.
#[derive(Debug)]
pub struct Transposed {
    columns: Vec<Vec<(usize, i64)>>,
}

impl Transposed {
    /// The transpose of `matrix`.
    pub fn new(matrix: &Sparse) -> Transposed {
        let mut columns = vec![Vec::new(); matrix.rows().len()];
        for (i, row) in matrix.rows().iter().enumerate() {
            for (column, weight) in row {
                columns[*column].push((i, *weight));
            }
        }
        Transposed { columns }
    }

    /// The row vector times the matrix, on ordinary residues; one reduction for each entry.
    fn step(&self, modulus: u64, vector: &[u64]) -> Vec<u64> {
        self.columns
            .iter()
            .map(|column| {
                let sum: i128 = column.iter().map(|(i, weight)| i128::from(vector[*i]) * i128::from(*weight)).sum();
                sum.rem_euclid(i128::from(modulus)) as u64
            })
            .collect()
    }
}

/// The sequences u·Cⁱφ, i = 0 … count−1, for each vector φ, as field elements.
pub fn moments(
    field: &PrimeField,
    charge: &Transposed,
    functional: &[i64],
    vectors: &[Vec<u64>],
    counts: &[usize],
) -> Vec<Vec<u64>> {
    let modulus = field.modulus();
    let mut row: Vec<u64> = functional.iter().map(|u| u.rem_euclid(modulus as i64) as u64).collect();
    let longest = counts.iter().copied().max().unwrap_or(0);
    let mut result: Vec<Vec<u64>> = counts.iter().map(|count| Vec::with_capacity(*count)).collect();
    for i in 0..longest {
        for ((sequence, vector), count) in result.iter_mut().zip(vectors).zip(counts) {
            if i < *count {
                let mut sum = field.accumulator();
                for (a, b) in row.iter().zip(vector) {
                    // `vector` is in Montgomery form and `row` is not: the product is an ordinary residue.
                    field.accumulate(&mut sum, a, b);
                }
                sequence.push(field.element(field.collect(&mut sum)));
            }
        }
        if i + 1 < longest {
            row = charge.step(modulus, &row);
        }
    }
    result
}

/// The shortest linear recurrence of a sequence, as the monic polynomial χ with
/// Σ_k χ_k s_{i+k} = 0 for all i; deg χ · len multiplications.
pub fn recurrence(field: &PrimeField, sequence: &[u64]) -> Vec<u64> {
    // `current` and `previous` are connection polynomials 1 + c₁z + ….
    let (mut current, mut previous) = (vec![field.one()], vec![field.one()]);
    let (mut length, mut gap, mut last) = (0usize, 1usize, field.one());
    for n in 0..sequence.len() {
        let mut sum = field.accumulator();
        for (i, c) in current.iter().enumerate().take(n + 1) {
            field.accumulate(&mut sum, c, &sequence[n - i]);
        }
        let discrepancy = field.collect(&mut sum);
        if discrepancy == 0 {
            gap += 1;
            continue;
        }
        let factor = match field.inverse(&last) {
            Some(inverse) => field.mul(&discrepancy, &inverse),
            None => unreachable!("only non-zero discrepancies are kept"),
        };
        let mut updated = current.clone();
        updated.resize(updated.len().max(previous.len() + gap), 0);
        for (i, c) in previous.iter().enumerate() {
            updated[i + gap] = field.sub(&updated[i + gap], &field.mul(&factor, c));
        }
        if 2 * length <= n {
            length = n + 1 - length;
            previous = std::mem::replace(&mut current, updated);
            last = discrepancy;
            gap = 1;
        } else {
            current = updated;
            gap += 1;
        }
    }
    current.resize(length + 1, 0);
    current.reverse();
    current
}

/// The numerator n(z) of Σ s_i z^{−i−1} = n(z)/χ(z): the eigenvalue of an operator whose sequence is s
/// is n(x)/n₀(x) at each root x of χ, n₀ belonging to the sequence of the start vector.
pub fn numerator(field: &PrimeField, sequence: &[u64], recurrence: &[u64]) -> Vec<u64> {
    let degree = recurrence.len() - 1;
    let mut sum = field.accumulator();
    let coefficients = (0..degree)
        .map(|k| {
            for i in 0..degree - k {
                field.accumulate(&mut sum, &sequence[i], &recurrence[k + i + 1]);
            }
            field.collect(&mut sum)
        })
        .collect();
    poly::trim(field, coefficients)
}

#[cfg(test)]
mod tests {
    use super::{PrimeField, numerator, recurrence};
    use crate::algebra::ring::Ring;

    #[test]
    fn fibonacci() {
        let field = PrimeField::nth(0);
        let mut sequence = vec![field.integer(0), field.integer(1)];
        for i in 2..12 {
            let next = field.add(&sequence[i - 1], &sequence[i - 2]);
            sequence.push(next);
        }
        let chi = recurrence(&field, &sequence);
        assert_eq!(chi, vec![field.integer(-1), field.integer(-1), field.one()]);
        assert_eq!(numerator(&field, &sequence, &chi), vec![field.one()]);
    }
}
