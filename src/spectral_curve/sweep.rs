//! From large v down to v = ½: Q_a(j−½+x) = Q_a(j+½+x) + p_a S(j+x), S = s^{−L'} Σ_b p^b Q_b(j+½+x).

use super::frame::{Frame, partner, raising_is_negative};
use super::laurent::{Laurent, divide_by_variable};
use crate::algebra::flint::dense::{Run, Scalar};
use rayon::prelude::*;

/// What is stored at one point j for one solution i: the Taylor coefficients of Q₁ … Q₄ at j + ½ and
/// of S at j, one after the other.
pub type Block<S> = Vec<S>;

/// One order at all points: `blocks[j − 1][i]`, and the values at v = ½.
pub struct Orders<S> {
    /// The number of Taylor coefficients.
    pub len: usize,
    /// The blocks.
    pub blocks: Vec<[Block<S>; 4]>,
    /// `end[i][a]` = Taylor coefficients of Q_{a|i} at v = ½.
    pub end: [[Vec<S>; 4]; 4],
}

/// The leading-order p_a as Taylor polynomials at every point: `[j − 1][a]`.
pub struct LeadingPoints<S>(Vec<[Vec<S>; 4]>);

impl<S: Scalar> LeadingPoints<S> {
    /// Expands p_a at order 0 at all points.
    pub fn new(frame: &Frame, lowered: &[Laurent<S>; 4]) -> LeadingPoints<S> {
        let degrees = frame.degrees();
        LeadingPoints(
            (1..=frame.points)
                .into_par_iter()
                .map(|j| {
                    std::array::from_fn(|a| {
                        if degrees[a] < 0 {
                            Vec::new()
                        } else {
                            lowered[a].taylor(j, degrees[a] as usize + 1, frame.bits)
                        }
                    })
                })
                .collect(),
        )
    }
}

/// Contributions of lower orders to S and to the four equations, at all points, as blocks: the first
/// four parts of a block hold what is added to Q_a, the last one what is added to S.
///
/// `raised[m − 1][b]`, `lowered[m − 1][a]` are the functions at order m; `earlier[n − m]` the solution.
/// Cost: 8 n (points) len²/2 multiplications for each i.
pub fn sources<S: Scalar>(
    frame: &Frame,
    n: usize,
    len: usize,
    raised: &[[Laurent<S>; 4]],
    lowered: &[[Laurent<S>; 4]],
    earlier: &[Orders<S>],
) -> Vec<[Block<S>; 4]> {
    (1..=frame.points)
        .into_par_iter()
        .map(|j| {
            let mut blocks: [Block<S>; 4] = std::array::from_fn(|_| S::zeros(5 * len));
            for m in 1..=n {
                let before = &earlier[n - m];
                for a in 0..4 {
                    let up = &raised[m - 1][a];
                    let down = &lowered[m - 1][a];
                    let up = if up.is_zero() { None } else { Some(up.taylor(j, len, frame.bits)) };
                    let down = if down.is_zero() { None } else { Some(down.taylor(j, len, frame.bits)) };
                    for (block, old) in blocks.iter_mut().zip(&before.blocks[j - 1]) {
                        for t in 0..len {
                            let bits = frame.bits_at(j, t);
                            if let Some(up) = &up {
                                block[4 * len + t].dot(
                                    false,
                                    Run::forward(up, 0),
                                    Run::backward(old, a * before.len + t),
                                    t + 1,
                                    bits,
                                );
                            }
                            if let Some(down) = &down {
                                block[a * len + t].dot(
                                    false,
                                    Run::forward(down, 0),
                                    Run::backward(old, 4 * before.len + t),
                                    t + 1,
                                    bits,
                                );
                            }
                        }
                    }
                }
            }
            blocks
        })
        .collect()
}

/// Carries the values at v = N + ½ (`start[i][a]`) down to v = ½, with the given sources, which are
/// replaced by the solution.
pub fn sweep<S: Scalar>(
    frame: &Frame,
    leading: &LeadingPoints<S>,
    len: usize,
    start: [[Vec<S>; 4]; 4],
    mut blocks: Vec<[Block<S>; 4]>,
) -> Orders<S> {
    let mut columns: [Vec<&mut Block<S>>; 4] = std::array::from_fn(|_| Vec::with_capacity(blocks.len()));
    for block in &mut blocks {
        for (column, part) in columns.iter_mut().zip(block.iter_mut()) {
            column.push(part);
        }
    }
    let work: Vec<(Vec<&mut Block<S>>, [Vec<S>; 4])> = columns.into_iter().zip(start).collect();
    let ends: Vec<[Vec<S>; 4]> =
        work.into_par_iter().map(|(column, start)| sweep_one(frame, leading, len, start, column)).collect();
    let mut ends = ends.into_iter();
    let end = std::array::from_fn(|_| ends.next().unwrap_or_else(|| std::array::from_fn(|_| Vec::new())));
    Orders { len, blocks, end }
}

fn sweep_one<S: Scalar>(
    frame: &Frame,
    leading: &LeadingPoints<S>,
    len: usize,
    start: [Vec<S>; 4],
    column: Vec<&mut Block<S>>,
) -> [Vec<S>; 4] {
    let mut q = start;
    for (index, block) in column.into_iter().enumerate().rev() {
        let j = index + 1;
        let p = &leading.0[index];
        let mut s = S::zeros(len);
        for b in 0..4 {
            let factor = &p[partner(b)];
            for t in 0..len {
                let count = factor.len().min(t + 1);
                s[t].dot(
                    raising_is_negative(b),
                    Run::forward(factor, 0),
                    Run::backward(&q[b], t),
                    count,
                    frame.bits_at(j, t),
                );
            }
        }
        for _ in 0..frame.wrap() {
            divide_by_variable(&mut s, j, frame.bits);
        }
        for (t, entry) in s.iter_mut().enumerate() {
            entry.add(&block[4 * len + t], frame.bits_at(j, t));
        }
        for (a, series) in q.iter_mut().enumerate() {
            for t in 0..len {
                let bits = frame.bits_at(j, t);
                let mut next = series[t].clone();
                next.add(&block[a * len + t], bits);
                let count = p[a].len().min(t + 1);
                next.dot(false, Run::forward(&p[a], 0), Run::backward(&s, t), count, bits);
                block[a * len + t] = std::mem::replace(&mut series[t], next);
            }
        }
        for (t, entry) in s.into_iter().enumerate() {
            block[4 * len + t] = entry;
        }
    }
    q
}
