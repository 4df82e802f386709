//! The unknowns of one order, and their linear effect on the gluing conditions.

use super::frame::Frame;
use crate::algebra::flint::dense::Scalar;

/// One real unknown of stage n.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Unknown {
    /// γ_n.
    Gamma,
    /// a_{a,j} at order n (j ≥ 0) or c_{a,k} at order n − k (exponent −k).
    Power {
        /// The index a, from 0.
        a: usize,
        /// The exponent of v.
        exponent: i64,
    },
    /// α at order n.
    Alpha,
    /// β at order n − 1.
    Beta,
    /// δ at order n.
    Delta,
    /// ρ_{rc}: row 0 or 1, column 2 or 3 (from 0); order n or n − 1.
    Rho {
        /// The equation.
        row: usize,
        /// The solution mixed in.
        column: usize,
        /// 0 or 1: order n or n − 1.
        lag: usize,
    },
}

impl Unknown {
    /// The unknown is real times i to this power.
    pub fn phase(self, frame: &Frame) -> i64 {
        let l = frame.length;
        match self {
            Unknown::Gamma | Unknown::Alpha | Unknown::Beta => 0,
            Unknown::Power { a, exponent } => frame.degrees()[a] - exponent,
            Unknown::Delta => 1,
            Unknown::Rho { row: 0, column: 2, .. } | Unknown::Rho { row: 1, column: 3, .. } => l,
            Unknown::Rho { row: 0, .. } => l - 1,
            Unknown::Rho { .. } => l + 1,
        }
    }

    /// All unknowns of stage n, outside the gauge a_{4,L−M−1} = a_{4,M−2} = a_{3,M−2} = c_{4,1} = 0.
    pub fn of_stage(frame: &Frame, n: usize) -> Vec<Unknown> {
        let symmetric = frame.step == 2;
        let even = frame.length % 2 == 0;
        let mut list = Vec::new();
        if n >= 2 {
            list.push(Unknown::Gamma);
        }
        if n >= 1 {
            list.extend(Unknown::powers(frame, n).into_iter().map(|(a, exponent)| Unknown::Power { a, exponent }));
        }
        list.push(Unknown::Alpha);
        if !symmetric {
            list.push(Unknown::Delta);
        }
        if n >= 1 {
            list.push(Unknown::Beta);
        }
        let rho = [(0, 2, 0), (1, 2, 0), (0, 3, 1), (1, 3, 1)];
        list.extend(
            rho.into_iter()
                .filter(|&(row, column, lag)| n >= lag && (!symmetric || even == ((row == 0) == (column == 2))))
                .map(|(row, column, lag)| Unknown::Rho { row, column, lag }),
        );
        list
    }

    /// The powers v^exponent of p_a that are free at stage n: (a, exponent).
    pub fn powers(frame: &Frame, n: usize) -> Vec<(usize, i64)> {
        let degrees = frame.degrees();
        let gauge = [(3, degrees[2]), (3, degrees[1]), (2, degrees[1]), (3, -1), (0, -1)];
        (0..4)
            .flat_map(|a| (-(n as i64)..degrees[a].max(0)).map(move |exponent| (a, exponent)))
            .filter(|&(a, exponent)| (degrees[a] - exponent) % frame.step == 0 && !gauge.contains(&(a, exponent)))
            .collect()
    }
}

/// A system of linear equations in real unknowns: every row holds the coefficients and the constant,
/// Σ coefficient · unknown + constant = 0.
pub struct System<R> {
    /// The rows.
    pub rows: Vec<Vec<R>>,
}

/// The solution of an overdetermined system.
pub struct Solution<R> {
    /// The unknowns.
    pub values: Vec<R>,
    /// log₂ of the largest left-over constant, relative to the largest constant.
    pub inconsistency: i64,
}

impl System<crate::algebra::flint::dense::Real> {
    /// Adds a complex equation as its real and imaginary parts, a real one as it is.
    pub fn push<S: Scalar>(&mut self, row: &[S]) {
        self.rows.push(row.iter().map(|entry| entry.re().clone()).collect());
        if S::COMPLEX {
            self.rows.push(row.iter().map(Scalar::im).collect());
        }
    }

    /// Gaussian elimination with the largest pivot of each column; None when a column has no pivot.
    /// Cost rows · columns² multiplications.
    pub fn solve(mut self, columns: usize, bits: i64) -> Option<Solution<crate::algebra::flint::dense::Real>> {
        use crate::algebra::flint::dense::Real;
        let size = self.rows.iter().map(|row| row[columns].magnitude()).max().unwrap_or(0);
        for column in 0..columns {
            let before = (0..self.rows.len()).map(|r| self.rows[r][column].magnitude()).max().unwrap_or(0);
            let pivot = (column..self.rows.len()).max_by_key(|&r| self.rows[r][column].magnitude())?;
            let found = self.rows[pivot][column].magnitude();
            if found < before - bits + 40 || self.rows[pivot][column].is_zero() {
                return None;
            }
            self.rows.swap(column, pivot);
            let (head, tail) = self.rows.split_at_mut(column + 1);
            let pivot_row = &head[column];
            let inverse = Real::from_i64(1).div(&pivot_row[column], bits);
            for row in tail.iter_mut().filter(|row| !row[column].is_zero()) {
                let mut factor = row[column].mul(&inverse, bits);
                factor.negate();
                for c in column..=columns {
                    row[c].add_mul(&pivot_row[c], &factor, bits);
                }
                row[column] = Real::zero();
            }
        }
        let left = self.rows[columns..].iter().map(|row| row[columns].magnitude()).max().unwrap_or(i64::MIN / 4);
        let mut values: Vec<Real> = Real::zeros(columns);
        for column in (0..columns).rev() {
            let row = &self.rows[column];
            let mut sum = row[columns].clone();
            for c in column + 1..columns {
                sum.add_mul(&row[c], &values[c], bits);
            }
            sum.negate();
            values[column] = sum.div(&row[column], bits);
        }
        Some(Solution { values, inconsistency: left - size })
    }
}
