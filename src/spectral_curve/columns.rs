//! The gluing conditions as linear equations: what each unknown changes, and what is known so far.

use super::frame::{partner, raising_is_negative};
use super::gluing::{add_binomial, mirrored, reflection_is_negative};
use super::solver::Solver;
use super::unknowns::Unknown;
use crate::algebra::flint::dense::{Real, Run, Scalar};
use rug::Rational;

/// The effect of one unknown of a stage.
pub(super) struct Column<S> {
    unknown: Unknown,
    /// The phase of the unknown.
    one: S,
    /// Change of Σ p^a Q_a at order n, by i and power of v.
    plus: Vec<Vec<S>>,
    /// The same for F̄.
    bar: Vec<Vec<S>>,
    /// Changes of c_{a,k} at order n − k.
    poles: Vec<Pole<S>>,
}

struct Pole<S> {
    bar: bool,
    i: usize,
    k: i64,
    series: Vec<S>,
}

impl<S: Scalar> Solver<S> {
    pub(super) fn response_index(&self, a: usize, exponent: i64) -> usize {
        self.responses
            .iter()
            .position(|response| (response.a, response.exponent) == (a, exponent))
            .unwrap_or(usize::MAX)
    }

    /// How γ_n enters: A₃ through its derivative, A₁ likewise, both at h = 0, halved.
    pub(super) fn gamma_weights(&self) -> [(usize, Real); 2] {
        let bits = self.frame.bits;
        let half = |value: &Rational| Real::from_rational(&Rational::from(value / 2u32), bits);
        [
            (self.response_index(2, self.frame.degrees()[2]), half(&self.third[1])),
            (self.response_index(0, -1), half(&self.first[1])),
        ]
    }

    /// (left side − right side) of an equation at G^x s^y from everything entered so far.
    pub(super) fn value_at(&self, equation: usize, x: i64, y: i64) -> S {
        let frame = &self.frame;
        let (bits, wrap) = (frame.bits, frame.wrap() as i64);
        let mut sum = self.cut.plus_at(frame, equation, x, y);
        for column in 2..4 {
            for (r, rho) in self.rho[equation][column - 2].iter().enumerate().filter(|(_, rho)| !rho.is_zero()) {
                sum.add_mul(rho, &self.cut.plus_at(frame, column, x - r as i64, y), bits);
            }
        }
        let right: &[(usize, &[S])] =
            if equation == 0 { &[(2, &self.alpha)] } else { &[(3, &self.beta), (2, &self.delta)] };
        for (i, list) in right {
            for (r, factor) in list.iter().enumerate().filter(|(_, factor)| !factor.is_zero()) {
                sum.sub(&factor.mul(&self.cut.bar_at(frame, *i, x - wrap - r as i64, y + wrap), bits), bits);
            }
        }
        sum
    }

    pub(super) fn column(&self, unknown: Unknown) -> Column<S> {
        let bits = self.frame.bits;
        let mut one = S::from_real(&Real::from_i64(1));
        one.turn(unknown.phase(&self.frame));
        let powers = match unknown {
            Unknown::Power { a, exponent } => vec![(self.response_index(a, exponent), one.clone())],
            Unknown::Gamma => {
                self.gamma_weights().into_iter().map(|(index, weight)| (index, S::from_real(&weight))).collect()
            }
            _ => Vec::new(),
        };
        let mut column = Column { unknown, one, plus: Vec::new(), bar: Vec::new(), poles: Vec::new() };
        if powers.is_empty() {
            return column;
        }
        let len = self.frame.wrap() + 1;
        for bar in [false, true] {
            for i in 0..4 {
                let mut sum = S::zeros(len);
                for (index, factor) in &powers {
                    let response = &self.responses[*index];
                    let prepare = |series: &[S]| if bar { mirrored(series) } else { series.to_vec() };
                    for b in 0..4 {
                        // p^b times the change of Q_b.
                        let change: Vec<S> = response.end[i][b].iter().map(|value| value.mul(factor, bits)).collect();
                        let change = prepare(&change);
                        let p = &self.functions.polynomial[partner(b)][0];
                        let negative = raising_is_negative(b) != (bar && reflection_is_negative(&self.frame, b));
                        for t in 0..len {
                            sum[t].dot(
                                negative,
                                Run::forward(p, 0),
                                Run::backward(&change, t),
                                p.len().min(t + 1),
                                bits,
                            );
                        }
                    }
                    // The change of p^b times Q_b.
                    let b = partner(response.a);
                    let negative = raising_is_negative(b) != (bar && reflection_is_negative(&self.frame, b));
                    let mut factor = factor.clone();
                    if negative {
                        factor.negate();
                    }
                    let zero = prepare(&self.orders[0].end[i][b]);
                    if response.exponent >= 0 {
                        for t in response.exponent as usize..len {
                            sum[t].add_mul(&zero[t - response.exponent as usize], &factor, bits);
                        }
                    } else {
                        let series = zero.iter().map(|value| value.mul(&factor, bits)).collect();
                        column.poles.push(Pole { bar, i, k: -response.exponent, series });
                    }
                }
                if bar { column.bar.push(sum) } else { column.plus.push(sum) }
            }
        }
        column
    }

    /// The coefficient of an unknown in an equation at G^x s^y.
    pub(super) fn column_at(&self, n: usize, column: &Column<S>, equation: usize, x: i64, y: i64) -> S {
        let frame = &self.frame;
        let (bits, wrap, n) = (frame.bits, frame.wrap() as i64, n as i64);
        let mut sum = S::zero();
        match column.unknown {
            Unknown::Alpha | Unknown::Beta | Unknown::Delta => {
                let (place, order, i) = match column.unknown {
                    Unknown::Alpha => (0, n, 2),
                    Unknown::Delta => (1, n, 2),
                    _ => (1, n - 1, 3),
                };
                if equation == place {
                    sum = self.cut.bar_at(frame, i, x - wrap - order, y + wrap).mul(&column.one, bits);
                    sum.negate();
                }
            }
            Unknown::Rho { row, column: i, lag } => {
                if equation == row {
                    sum = self.cut.plus_at(frame, i, x - n + lag as i64, y).mul(&column.one, bits);
                }
            }
            Unknown::Gamma | Unknown::Power { .. } => {
                let one = S::from_real(&Real::from_i64(1));
                let left = [(equation, &one), (2, &self.rho[equation][0][0]), (3, &self.rho[equation][1][0])];
                for (i, factor) in left.into_iter().filter(|(_, factor)| !factor.is_zero()) {
                    sum.add_mul(&self.plus_change(n, column, i, x, y), factor, bits);
                }
                let right: &[(usize, &S)] =
                    if equation == 0 { &[(2, &self.alpha[0])] } else { &[(3, &self.beta[0]), (2, &self.delta[0])] };
                for (i, factor) in right.iter().filter(|(_, factor)| !factor.is_zero()) {
                    sum.sub(&self.bar_change(n, column, *i, x - wrap, y + wrap).mul(factor, bits), bits);
                }
            }
        }
        sum
    }

    fn plus_change(&self, n: i64, column: &Column<S>, i: usize, x: i64, y: i64) -> S {
        let mut sum = S::zero();
        let b = x - n;
        add_binomial(&mut sum, &column.plus[i], b, y + 2 * b, false, self.frame.bits);
        for pole in column.poles.iter().filter(|pole| !pole.bar && pole.i == i) {
            let b = x - (n - pole.k);
            add_binomial(&mut sum, &pole.series, b, y - pole.k + 2 * b, pole.k % 2 == 1, self.frame.bits);
        }
        sum
    }

    fn bar_change(&self, n: i64, column: &Column<S>, i: usize, x: i64, y: i64) -> S {
        let mut sum = S::zero();
        let b = x - n;
        add_binomial(&mut sum, &column.bar[i], b, y + 2 * b, false, self.frame.bits);
        for pole in column.poles.iter().filter(|pole| pole.bar && pole.i == i) {
            add_binomial(&mut sum, &pole.series, b, y + pole.k + 2 * b, false, self.frame.bits);
        }
        sum
    }
}
