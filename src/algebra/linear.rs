//! Linear systems over a ring, by elimination with unit pivots.

use super::ring::Ring;

/// What a linear system has.
#[derive(Clone, Debug, PartialEq)]
pub enum Solution<E> {
    /// Exactly one solution.
    Unique(Vec<E>),
    /// A family of solutions: one of them, and the number of free unknowns.
    Family(Vec<E>, usize),
    /// No solution.
    None,
    /// Elimination met a column of non-units that are not all zero (only over a ring that is no field).
    Undecided,
}

/// Solves `rows · x = right` by Gauss–Jordan elimination; rows·columns·rank multiplications.
pub fn solve<R: Ring>(ring: &R, rows: &[Vec<R::Elem>], right: &[R::Elem]) -> Solution<R::Elem> {
    let columns = rows.first().map_or(0, Vec::len);
    let mut work: Vec<Vec<R::Elem>> = rows
        .iter()
        .zip(right)
        .map(|(row, b)| row.iter().cloned().chain(std::iter::once(b.clone())).collect())
        .collect();
    let mut pivots: Vec<usize> = Vec::new();
    for column in 0..columns {
        let top = pivots.len();
        let found = (top..work.len()).find_map(|i| ring.inverse(&work[i][column]).map(|inverse| (i, inverse)));
        let Some((row, inverse)) = found else {
            if (top..work.len()).any(|i| !ring.is_zero(&work[i][column])) {
                return Solution::Undecided;
            }
            continue;
        };
        work.swap(top, row);
        for entry in &mut work[top][column..] {
            *entry = ring.mul(entry, &inverse);
        }
        let pivot = work[top].clone();
        for (i, other) in work.iter_mut().enumerate() {
            if i == top || ring.is_zero(&other[column]) {
                continue;
            }
            let factor = other[column].clone();
            for (entry, p) in other[column..].iter_mut().zip(&pivot[column..]) {
                *entry = ring.sub(entry, &ring.mul(&factor, p));
            }
        }
        pivots.push(column);
    }
    if work[pivots.len()..].iter().any(|row| !ring.is_zero(&row[columns])) {
        return Solution::None;
    }
    let mut x = vec![ring.zero(); columns];
    for (row, &column) in pivots.iter().enumerate() {
        x[column] = work[row][columns].clone();
    }
    if pivots.len() == columns { Solution::Unique(x) } else { Solution::Family(x, columns - pivots.len()) }
}

/// The inverse of a square matrix, or `None` when elimination finds no unit pivot; n³ multiplications.
pub fn inverse<R: Ring>(ring: &R, rows: &[Vec<R::Elem>]) -> Option<Vec<Vec<R::Elem>>> {
    let n = rows.len();
    let mut left = rows.to_vec();
    let mut right: Vec<Vec<R::Elem>> =
        (0..n).map(|i| (0..n).map(|j| if i == j { ring.one() } else { ring.zero() }).collect()).collect();
    for column in 0..n {
        let (row, unit) = (column..n).find_map(|i| ring.inverse(&left[i][column]).map(|unit| (i, unit)))?;
        left.swap(column, row);
        right.swap(column, row);
        for entry in left[column][column..].iter_mut().chain(right[column].iter_mut()) {
            *entry = ring.mul(entry, &unit);
        }
        let (pivot_left, pivot_right) = (left[column].clone(), right[column].clone());
        for i in (0..n).filter(|i| *i != column) {
            let factor = left[i][column].clone();
            if ring.is_zero(&factor) {
                continue;
            }
            for (entry, p) in left[i][column..].iter_mut().zip(&pivot_left[column..]) {
                *entry = ring.sub(entry, &ring.mul(&factor, p));
            }
            for (entry, p) in right[i].iter_mut().zip(&pivot_right) {
                if !ring.is_zero(p) {
                    *entry = ring.sub(entry, &ring.mul(&factor, p));
                }
            }
        }
    }
    Some(right)
}

/// rows · x; entries of a row times x go through one accumulator.
pub fn apply<R: Ring>(ring: &R, rows: &[Vec<R::Elem>], x: &[R::Elem]) -> Vec<R::Elem> {
    let mut acc = ring.accumulator();
    rows.iter()
        .map(|row| {
            for (a, b) in row.iter().zip(x) {
                ring.accumulate(&mut acc, a, b);
            }
            ring.collect(&mut acc)
        })
        .collect()
}
