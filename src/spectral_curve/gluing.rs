//! The conditions on the cut |v| ~ g, order by order.
//!
//! F_i = Σ_a p_+^a Q_{a|i}(½+v) with p_+ = poly(v) + Σ c_k (−s)^k, F̄_i = Σ_a π^a p_−^a Q*_{a|i}(½−v) with
//! p_− = poly(v) + Σ c_k G^k s^{−k}, both expanded in G and s through v = s − G/s. A term G^x s^y has
//! degree x + y; order n of the solution enters from degree n on.

use super::frame::{Frame, partner, raising_is_negative};
use super::laurent::Functions;
use crate::algebra::flint::dense::{Real, Run, Scalar};
use rug::Integer;

/// v-expansions of the building blocks of F_i and F̄_i for one i.
pub struct Side<S> {
    /// `regular[n][t]`: Σ_a poly^a Q_a at G^n v^t.
    pub regular: Vec<Vec<S>>,
    /// `pole[n][k][t]`: Σ_a c^a_k Q_a at G^n v^t.
    pub pole: Vec<Vec<Vec<S>>>,
}

/// F and F̄ for all i.
pub struct Cut<S> {
    /// F_i.
    pub plus: [Side<S>; 4],
    /// F̄_i.
    pub bar: [Side<S>; 4],
}

/// Q_{a|i}(½ + x) order by order: `[order][i][a][t]`.
pub type Ends<S> = [[[Vec<S>; 4]; 4]];

/// (−1)^t times the complex conjugates: the coefficients of Q*(½ − v).
pub fn mirrored<S: Scalar>(series: &[S]) -> Vec<S> {
    series
        .iter()
        .enumerate()
        .map(|(t, value)| {
            let mut result = value.conj();
            if t % 2 == 1 {
                result.negate();
            }
            result
        })
        .collect()
}

/// π^b = (−1)^{d}, d the degree of the lowered function behind the upper index b.
pub fn reflection_is_negative(frame: &Frame, b: usize) -> bool {
    frame.degrees()[partner(b)].rem_euclid(2) == 1
}

impl<S: Scalar> Side<S> {
    fn new(orders: usize) -> Side<S> {
        Side { regular: vec![Vec::new(); orders + 1], pole: vec![vec![Vec::new(); orders + 1]; orders + 1] }
    }
}

impl<S: Scalar> Cut<S> {
    /// Nothing known yet.
    pub fn new(frame: &Frame) -> Cut<S> {
        Cut {
            plus: std::array::from_fn(|_| Side::new(frame.orders)),
            bar: std::array::from_fn(|_| Side::new(frame.orders)),
        }
    }

    /// Enters everything of stage n: the regular part at order n, and the k-th pole at order n − k.
    pub fn update(&mut self, frame: &Frame, n: usize, functions: &Functions<S>, ends: &Ends<S>) {
        for i in 0..4 {
            for bar in [false, true] {
                let side = if bar { &mut self.bar[i] } else { &mut self.plus[i] };
                let len = ends[n][i][0].len();
                side.regular[n] = S::zeros(len);
                for m in 0..=n {
                    for b in 0..4 {
                        let factor = &functions.polynomial[partner(b)][m];
                        let (series, negative) = prepared(frame, &ends[n - m][i][b], b, bar);
                        for t in 0..len.min(series.len()) {
                            let count = factor.len().min(t + 1);
                            side.regular[n][t].dot(
                                negative,
                                Run::forward(factor, 0),
                                Run::backward(&series, t),
                                count,
                                frame.bits,
                            );
                        }
                    }
                }
                for k in 1..=n {
                    let order = n - k;
                    let len = ends[order][i][0].len();
                    side.pole[order][k] = S::zeros(len);
                    for m in 0..=order {
                        for b in 0..4 {
                            let factor = &functions.pole[partner(b)][m][k];
                            if factor.is_zero() {
                                continue;
                            }
                            let (series, negative) = prepared(frame, &ends[order - m][i][b], b, bar);
                            for t in 0..len.min(series.len()) {
                                let mut term = series[t].mul(factor, frame.bits);
                                if negative {
                                    term.negate();
                                }
                                side.pole[order][k][t].add(&term, frame.bits);
                            }
                        }
                    }
                }
            }
        }
    }

    /// The coefficient of G^x s^y in F_i.
    pub fn plus_at(&self, frame: &Frame, i: usize, x: i64, y: i64) -> S {
        let mut sum = S::zero();
        let side = &self.plus[i];
        for order in 0..=x.min(x + y) {
            let b = x - order;
            add_binomial(&mut sum, &side.regular[order as usize], b, y + 2 * b, false, frame.bits);
            for k in 1..=x + y - order {
                add_binomial(
                    &mut sum,
                    &side.pole[order as usize][k as usize],
                    b,
                    y - k + 2 * b,
                    k % 2 == 1,
                    frame.bits,
                );
            }
        }
        sum
    }

    /// The coefficient of G^x s^y in F̄_i.
    pub fn bar_at(&self, frame: &Frame, i: usize, x: i64, y: i64) -> S {
        let mut sum = S::zero();
        let side = &self.bar[i];
        for order in 0..=x {
            let b = x - order;
            add_binomial(&mut sum, &side.regular[order as usize], b, y + 2 * b, false, frame.bits);
            for k in 1..=x - order {
                let b = x - order - k;
                add_binomial(&mut sum, &side.pole[order as usize][k as usize], b, y + k + 2 * b, false, frame.bits);
            }
        }
        sum
    }
}

/// The series to use for upper index b, and whether it enters with a minus sign.
fn prepared<S: Scalar>(frame: &Frame, series: &[S], b: usize, bar: bool) -> (Vec<S>, bool) {
    if bar {
        (mirrored(series), raising_is_negative(b) != reflection_is_negative(frame, b))
    } else {
        (series.to_vec(), raising_is_negative(b))
    }
}

/// Adds ± (−1)^b binom(t, b) series[t]: the s^{t−2b} G^b part of v^t.
pub fn add_binomial<S: Scalar>(sum: &mut S, series: &[S], b: i64, t: i64, negative: bool, bits: i64) {
    if b < 0 || t < b || series.is_empty() {
        return;
    }
    let value = &series[t as usize];
    if value.is_zero() {
        return;
    }
    let weight = Real::from_scaled(&Integer::from(Integer::binomial_u(t as u32, b as u32)), 0);
    let mut term = value.scale(&weight, bits);
    if negative != (b % 2 == 1) {
        term.negate();
    }
    sum.add(&term, bits);
}
