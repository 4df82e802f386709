//! Local commuting charges as sparse integer matrices on necklaces.
//!
//! With P_k := P_{k,k+1} on the periodic chain, the boost recursion Q_{n+1} = [Σ k P_k, Q_n] gives, up
//! to normalisation and lower charges,
//!  H = Σ 2(1 − P_k) (γ₁), q₃ = Σ (P_k P_{k+1} − P_{k+1} P_k) (odd under parity, imaginary eigenvalues),
//!  q₄ = Σ ([P_k,[P_{k+1},P_{k+2}]] + 2P_k − P_{k,k+2}) (even).
//! Source: the boost operator (Tetelman 1982; common practice for the Heisenberg chain).

use super::necklace::{Configuration, Necklaces, exchange};
use super::transfer;
use rayon::iter::{IntoParallelIterator, ParallelIterator};

/// One row for each necklace: the entries (column, weight) that are not zero.
#[derive(Clone, Debug)]
pub struct Sparse {
    rows: Vec<Vec<(usize, i64)>>,
}

/// A product of site exchanges, applied from the last to the first, with its weight.
pub(crate) type Word = (i64, Vec<(usize, usize)>);

impl Sparse {
    /// The matrix of Σ weight · word on cyclic states.
    ///
    /// (Aψ)(c) = Σ weight · ψ(word⁻¹ c), so a row follows each word's exchanges in the order written.
    pub(crate) fn new(necklaces: &Necklaces, words: &[Word]) -> Sparse {
        let rows = necklaces
            .representatives()
            .iter()
            .map(|c| {
                let mut row: Vec<(usize, i64)> = words
                    .iter()
                    .map(|(weight, word)| {
                        let moved: Configuration = word.iter().fold(*c, |c, (i, j)| exchange(c, *i, *j));
                        (necklaces.position(moved), *weight)
                    })
                    .collect();
                row.sort_unstable();
                row.dedup_by(|later, first| {
                    let same = later.0 == first.0;
                    if same {
                        first.1 += later.1;
                    }
                    same
                });
                row.retain(|(_, weight)| *weight != 0);
                row
            })
            .collect();
        Sparse { rows }
    }

    /// The rows.
    pub fn rows(&self) -> &[Vec<(usize, i64)>] {
        &self.rows
    }

    /// Σ weight · matrix.
    pub fn combination(parts: &[(i64, &Sparse)]) -> Sparse {
        let size = parts[0].1.rows.len();
        let rows = (0..size)
            .map(|i| {
                let mut row: std::collections::BTreeMap<usize, i64> = std::collections::BTreeMap::new();
                for (weight, matrix) in parts {
                    for (column, entry) in &matrix.rows[i] {
                        *row.entry(*column).or_default() += weight * entry;
                    }
                }
                row.into_iter().filter(|(_, weight)| *weight != 0).collect()
            })
            .collect();
        Sparse { rows }
    }

    /// The matrix times a vector of integers.
    pub fn apply(&self, vector: &[i128]) -> Vec<i128> {
        self.rows
            .iter()
            .map(|row| row.iter().map(|(column, weight)| i128::from(*weight) * vector[*column]).sum())
            .collect()
    }
}

fn sites(length: usize) -> impl Fn(usize, usize) -> (usize, usize) {
    move |k, d| (k % length, (k + d) % length)
}

/// γ₁ as an operator: 2 Σ (1 − P_k).
pub fn one_loop(necklaces: &Necklaces) -> Sparse {
    let length = necklaces.family().length;
    let bond = sites(length);
    let mut words: Vec<Word> = vec![(2 * length as i64, Vec::new())];
    words.extend((0..length).map(|k| (-2, vec![bond(k, 1)])));
    Sparse::new(necklaces, &words)
}

/// q₃ = Σ (P_k P_{k+1} − P_{k+1} P_k).
pub fn third(necklaces: &Necklaces) -> Sparse {
    let length = necklaces.family().length;
    let bond = sites(length);
    let words: Vec<Word> = (0..length)
        .flat_map(|k| [(1, vec![bond(k, 1), bond(k + 1, 1)]), (-1, vec![bond(k + 1, 1), bond(k, 1)])])
        .collect();
    Sparse::new(necklaces, &words)
}

/// q₄ = Σ ([P_k,[P_{k+1},P_{k+2}]] + 2P_k − P_{k,k+2}).
pub fn fourth(necklaces: &Necklaces) -> Sparse {
    let length = necklaces.family().length;
    let bond = sites(length);
    let words: Vec<Word> = (0..length)
        .flat_map(|k| {
            let (a, b, c) = (bond(k, 1), bond(k + 1, 1), bond(k + 2, 1));
            [
                (1, vec![a, b, c]),
                (-1, vec![a, c, b]),
                (-1, vec![b, c, a]),
                (1, vec![c, b, a]),
                (2, vec![a]),
                (-1, vec![bond(k, 2)]),
            ]
        })
        .collect();
    Sparse::new(necklaces, &words)
}

/// T(v) at v = 3/2, Σ_j T_j: not local, so its matrix is full; entries below 2^L.
pub fn transfer(necklaces: &Necklaces) -> Sparse {
    let size = necklaces.len();
    let columns: Vec<Vec<i64>> = (0..size)
        .into_par_iter()
        .map(|column| {
            let unit: Vec<i128> = (0..size).map(|i| i128::from(i == column)).collect();
            let parts = transfer::apply(necklaces, &unit);
            (0..size).map(|row| parts.iter().map(|part| part[row]).sum::<i128>() as i64).collect()
        })
        .collect();
    let rows = (0..size)
        .map(|row| (0..size).map(|column| (column, columns[column][row])).filter(|(_, weight)| *weight != 0).collect())
        .collect();
    Sparse { rows }
}

#[cfg(test)]
mod tests {
    use super::{fourth, one_loop, third};
    use crate::chain::necklace::Necklaces;
    use crate::chain::transfer as matrix;
    use crate::family::Family;

    /// All charges commute with each other and with every coefficient of the transfer matrix.
    #[test]
    fn charges_commute() {
        for (length, magnons) in [(6, 2), (6, 3), (7, 3), (8, 4), (9, 3)] {
            let necklaces = Necklaces::new(Family { length, magnons });
            let charges = [one_loop(&necklaces), third(&necklaces), fourth(&necklaces)];
            let state: Vec<i128> = (0..necklaces.len()).map(|i| (i * i * 7 + 3 * i + 1) as i128 % 23).collect();
            for a in &charges {
                for b in &charges {
                    assert_eq!(a.apply(&b.apply(&state)), b.apply(&a.apply(&state)));
                }
                let direct = matrix::apply(&necklaces, &a.apply(&state));
                let other = matrix::apply(&necklaces, &state);
                for (x, y) in direct.iter().zip(&other) {
                    assert_eq!(*x, a.apply(y), "({length}, {magnons})");
                }
            }
        }
    }
}
