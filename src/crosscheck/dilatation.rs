//! The dilatation operator through three loops on cyclic states of definite parity (formulas §4, BKS).
//!
//! With {n₁, n₂, …} := Σ_l P_{l+n₁, l+n₁+1} P_{l+n₂, l+n₂+1} … on the periodic chain of L ≥ 4 sites,
//!  D₂ = 2{} − 2{1},  D₄ = −8{} + 12{1} − 2({1,2} + {2,1}),
//!  D₆ = 60{} − 104{1} + 24({1,2} + {2,1}) + 4{1,3} − 4({1,2,3} + {3,2,1}),
//! the last one up to a similarity transformation, which no eigenvalue sees.

use crate::chain::charges::{Sparse, Word};
use crate::chain::necklace::{Configuration, Necklaces};
use crate::family::Family;

/// The shortest chain on which the three-loop operator fits.
pub const SHORTEST: usize = 4;

/// Behaviour of a cyclic state under reversal of the chain.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Reversal {
    /// ψ(reversed c) = ψ(c).
    Even,
    /// ψ(reversed c) = −ψ(c).
    Odd,
}

/// The matrices D₂, D₄, D₆ on one parity sector, in a basis of necklaces modulo reversal.
#[derive(Clone, Debug)]
pub struct Sector {
    /// For each row, the entries (column, [D₂, D₄, D₆]).
    pub rows: Vec<Vec<(usize, [i64; 3])>>,
}

impl Sector {
    /// The sector of the cyclic states of (L, M) with this behaviour, descendants included. Works for every
    /// 0 ≤ M ≤ L, M = 1 included.
    pub fn new(family: Family, reversal: Reversal) -> Sector {
        let necklaces = Necklaces::new(family);
        let matrices = operators(family.length).map(|words| Sparse::new(&necklaces, &words));
        let classes = Classes::new(&necklaces, reversal);
        let rows = classes
            .kept
            .iter()
            .map(|necklace| {
                let mut row: Vec<(usize, [i64; 3])> = Vec::new();
                for (k, matrix) in matrices.iter().enumerate() {
                    for (column, weight) in &matrix.rows()[*necklace] {
                        let Some((class, sign)) = classes.class[*column] else { continue };
                        let place = match row.iter().position(|(known, _)| *known == class) {
                            Some(place) => place,
                            None => {
                                row.push((class, [0; 3]));
                                row.len() - 1
                            }
                        };
                        row[place].1[k] += sign * weight;
                    }
                }
                row.retain(|(_, weights)| weights.iter().any(|w| *w != 0));
                row.sort_unstable();
                row
            })
            .collect();
        Sector { rows }
    }

    /// The number of states.
    pub fn len(&self) -> usize {
        self.rows.len()
    }
}

/// Necklaces modulo reversal: which represent a basis state, and where each one goes with which sign.
struct Classes {
    kept: Vec<usize>,
    class: Vec<Option<(usize, i64)>>,
}

impl Classes {
    fn new(necklaces: &Necklaces, reversal: Reversal) -> Classes {
        let length = necklaces.family().length;
        let mirror: Vec<usize> =
            necklaces.representatives().iter().map(|c| necklaces.position(reversed(*c, length))).collect();
        let mut kept = Vec::new();
        let mut class = vec![None; mirror.len()];
        for (i, &j) in mirror.iter().enumerate() {
            // An odd state vanishes on a necklace that is its own mirror image.
            if i > j || (i == j && reversal == Reversal::Odd) {
                continue;
            }
            let sign = if reversal == Reversal::Even { 1 } else { -1 };
            class[j] = Some((kept.len(), sign));
            class[i] = Some((kept.len(), 1));
            kept.push(i);
        }
        Classes { kept, class }
    }
}

fn reversed(configuration: Configuration, length: usize) -> Configuration {
    configuration.reverse_bits() >> (Configuration::BITS as usize - length)
}

/// The words of D₂, D₄ and D₆.
fn operators(length: usize) -> [Vec<Word>; 3] {
    let sum = |terms: &[(i64, &[usize])]| -> Vec<Word> {
        terms
            .iter()
            .flat_map(|(weight, numbers)| {
                (0..length)
                    .map(move |l| (*weight, numbers.iter().map(|n| ((l + n) % length, (l + n + 1) % length)).collect()))
            })
            .collect()
    };
    [
        sum(&[(2, &[]), (-2, &[1])]),
        sum(&[(-8, &[]), (12, &[1]), (-2, &[1, 2]), (-2, &[2, 1])]),
        sum(&[(60, &[]), (-104, &[1]), (24, &[1, 2]), (24, &[2, 1]), (4, &[1, 3]), (-4, &[1, 2, 3]), (-4, &[3, 2, 1])]),
    ]
}

#[cfg(test)]
mod tests {
    use super::{Configuration, Family, Necklaces, Reversal, Sector, Word, operators, reversed};
    use crate::chain::necklace::exchange;

    fn moved(configuration: Configuration, word: &Word) -> Configuration {
        word.1.iter().fold(configuration, |c, (i, j)| exchange(c, *i, *j))
    }

    /// The sectors together act as the whole operator does: on ψ = even part + odd part.
    #[test]
    fn sectors_make_up_the_operator() {
        for (length, magnons) in [(4, 2), (7, 3), (8, 4), (9, 3)] {
            let family = Family { length, magnons };
            let necklaces = Necklaces::new(family);
            let value = |c: u128| (necklaces.position(c) as i64 * 37 + 11) % 29;
            let part = |c: u128, sign: i64| value(c) + sign * value(reversed(c, length));
            for (reversal, sign) in [(Reversal::Even, 1), (Reversal::Odd, -1)] {
                let sector = Sector::new(family, reversal);
                let basis: Vec<u128> = necklaces
                    .representatives()
                    .iter()
                    .copied()
                    .filter(|c| {
                        let (i, j) = (necklaces.position(*c), necklaces.position(reversed(*c, length)));
                        i < j || (i == j && sign == 1)
                    })
                    .collect();
                assert_eq!(basis.len(), sector.len());
                for (k, words) in operators(length).iter().enumerate() {
                    for (row, c) in sector.rows.iter().zip(&basis) {
                        let direct: i64 = words.iter().map(|word| word.0 * part(moved(*c, word), sign)).sum();
                        let ours: i64 = row.iter().map(|(j, weights)| weights[k] * part(basis[*j], sign)).sum();
                        assert_eq!(direct, ours, "({length}, {magnons}) D_{}", 2 * k + 2);
                    }
                }
            }
        }
    }

    /// The protected state: every D annihilates the state without magnons.
    #[test]
    fn the_vacuum_is_protected() {
        for length in 4..9 {
            let sector = Sector::new(Family { length, magnons: 0 }, Reversal::Even);
            assert_eq!(sector.len(), 1);
            assert!(sector.rows[0].is_empty());
            assert_eq!(Sector::new(Family { length, magnons: 0 }, Reversal::Odd).len(), 0);
        }
    }
}
