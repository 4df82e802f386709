//! Expansions at large v: Q_{a|i} = Σ_k Σ_j B_{a,k,j} v^{z_a−k} l_j, l_j = log^j v / j!.
//!
//! In symmetric form, δQ_a = −P_a P^b μQ_b with δ = 2 sinh(∂/2), μ = cosh(∂/2) (valid since
//! P_a P^a = 0). On v^{z+ε}, whose ε^j coefficient is v^z l_j, both act by binomials:
//! μ v^{z+ε} = Σ_r 4^{−r} binom(z+ε, 2r) v^{z+ε−2r}, and δ has (f+ε)/(2r+1) times these at the same
//! source, f the exponent reached. With S = s^{−L'} Σ_b p^b μQ_b the equation
//! at v^{z_a−1−k} reads M B_j + B_{j+1} = −(everything known), see [`super::pivots`].

use super::frame::Frame;
use super::laurent::Laurent;
use super::pivots::Pivot;
use crate::algebra::flint::dense::{Real, Run, Scalar};

/// One order of one solution i: entries indexed [log power j][k], k in units of the frame's step.
pub struct Tail<S> {
    /// B for each a.
    pub b: [Vec<Vec<S>>; 4],
    /// The coefficients of μQ_a.
    pub mu: [Vec<Vec<S>>; 4],
    /// The coefficients of S.
    pub s: Vec<Vec<S>>,
}

/// Sources: what lower orders contribute to S and to each equation, same indexing.
pub struct Sources<S> {
    /// To S.
    pub s: Vec<Vec<S>>,
    /// To P_a S.
    pub r: [Vec<Vec<S>>; 4],
}

fn table<S: Scalar>(logs: usize, terms: usize) -> Vec<Vec<S>> {
    (0..=logs).map(|_| S::zeros(terms + 1)).collect()
}

impl<S: Scalar> Sources<S> {
    /// No sources.
    pub fn new(frame: &Frame, logs: usize) -> Sources<S> {
        Sources { s: table(logs, frame.terms), r: std::array::from_fn(|_| table(logs, frame.terms)) }
    }
}

impl<S: Scalar> Tail<S> {
    /// All zero.
    pub fn new(frame: &Frame, logs: usize) -> Tail<S> {
        Tail {
            b: std::array::from_fn(|_| table(logs, frame.terms)),
            mu: std::array::from_fn(|_| table(logs, frame.terms)),
            s: table(logs, frame.terms),
        }
    }

    /// Adds factor · other.
    pub fn add_scaled(&mut self, other: &Tail<S>, factor: &S, bits: i64) {
        let pairs = self
            .b
            .iter_mut()
            .zip(&other.b)
            .chain(self.mu.iter_mut().zip(&other.mu))
            .chain(std::iter::once((&mut self.s, &other.s)));
        for (mine, theirs) in pairs {
            for (row, source) in mine.iter_mut().zip(theirs) {
                for (entry, value) in row.iter_mut().zip(source).filter(|(_, value)| !value.is_zero()) {
                    entry.add_mul(value, factor, bits);
                }
            }
        }
    }
}

/// Adds Σ_e c_e · source shifted by e to the target: the product of a Laurent polynomial (relative to
/// its leading power) and an expansion.
pub fn add_product<S: Scalar>(target: &mut [Vec<S>], factor: &Laurent<S>, source: &[Vec<S>], frame: &Frame, n: usize) {
    let len = factor.coefficients.len();
    if len == 0 || factor.is_zero() {
        return;
    }
    for (row, values) in target.iter_mut().zip(source) {
        for (k, entry) in row.iter_mut().enumerate() {
            let count = len.min(k + 1);
            entry.dot(
                false,
                Run::forward(&factor.coefficients, 0),
                Run::backward(values, k),
                count,
                frame.bits_of_term(k, n),
            );
        }
    }
}

/// binom(f + 2r + ε, 2r) 4^{−r} for r = 1 … count, and the same over 2r + 1: rows [power of ε][r − 1].
fn binomials(f: i64, count: usize, logs: usize, bits: i64) -> (Vec<Vec<Real>>, Vec<Vec<Real>>) {
    let mut current: Vec<Real> = (0..=logs).map(|i| Real::from_i64(i64::from(i == 0))).collect();
    let (mut plain, mut divided) =
        (vec![Vec::with_capacity(count); logs + 1], vec![Vec::with_capacity(count); logs + 1]);
    for r in 1..=count as i64 {
        for factor in [f + 2 * r - 1, f + 2 * r] {
            for i in (0..=logs).rev() {
                let (low, high) = current.split_at_mut(i);
                high[0].mul_small(factor, bits);
                if let Some(before) = low.last() {
                    high[0].add(before, bits);
                }
            }
        }
        for (i, entry) in current.iter_mut().enumerate() {
            entry.div_small(2 * r * (2 * r - 1), bits);
            entry.shift(-2);
            plain[i].push(entry.clone());
            let mut over = entry.clone();
            over.div_small(2 * r + 1, bits);
            divided[i].push(over);
        }
    }
    (plain, divided)
}

/// What the leading order fixes: p_a and s^{−L'} p^b at G = 0, and the systems for each k.
pub struct Leading<'a, S> {
    /// p_a at order 0.
    pub lowered: &'a [Laurent<S>; 4],
    /// s^{−L'} p^b at order 0.
    pub raised: &'a [Laurent<S>; 4],
    /// The systems for this i.
    pub pivots: &'a [Pivot],
}

/// Solves one order of the expansion of solution i. `normalised` starts from the null vector at
/// k = 0 (order zero); otherwise everything is driven by the sources. Returns the expansion and the
/// magnitude (power of 2) of the largest violated solvability condition, relative to its entries.
/// Cost ∝ terms² · logs² multiplications at a precision falling with k.
pub fn solve<S: Scalar>(
    frame: &Frame,
    lead: &Leading<S>,
    i: usize,
    n: usize,
    logs: usize,
    sources: Sources<S>,
    normalised: bool,
) -> (Tail<S>, i64) {
    let mut tail = Tail::new(frame, logs);
    tail.s = sources.s;
    let mut rest = sources.r;
    let stride = (2 / frame.step) as usize;
    let mut violated = i64::MIN / 4;
    for (k, pivot) in lead.pivots.iter().enumerate() {
        let bits = frame.bits_of_term(k, n);
        // Contributions of earlier terms to μQ_a and to δQ_a.
        for a in 0..4 {
            let f = frame.exponent(i, a) - k as i64 * frame.step;
            let count = k / stride;
            if count == 0 {
                continue;
            }
            let (plain, divided) = binomials(f, count, logs, bits);
            let mut over = S::zeros(logs + 2);
            for j in 0..=logs {
                for power in 0..=logs - j {
                    let run = || Run { from: &tail.b[a][j + power], start: k - stride, step: -(stride as isize) };
                    tail.mu[a][j][k].dot_real(false, Run::forward(&plain[power], 0), run(), count, bits);
                    over[j].dot_real(false, Run::forward(&divided[power], 0), run(), count, bits);
                }
            }
            for j in 0..=logs {
                let mut term = over[j].clone();
                term.mul_small(f, bits);
                term.add(&over[j + 1], bits);
                rest[a][j][k].add(&term, bits);
            }
        }
        let mut above: Option<[S; 4]> = None;
        for j in (0..=logs).rev() {
            // S at this k, without B_k itself.
            let mut s = tail.s[j][k].clone();
            for b in 0..4 {
                let p = &lead.raised[b].coefficients;
                s.dot(false, Run::forward(p, 0), Run::backward(&tail.mu[b][j], k), p.len().min(k + 1), bits);
            }
            tail.s[j][k] = s;
            let mut rhs: [S; 4] = std::array::from_fn(|a| {
                let mut value = rest[a][j][k].clone();
                let p = &lead.lowered[a].coefficients;
                value.dot(false, Run::forward(p, 0), Run::backward(&tail.s[j], k), p.len().min(k + 1), bits);
                value.negate();
                value
            });
            if let Some((kernel, left)) = &pivot.kernel {
                let mut excess = S::zero();
                excess.dot_real(false, Run::forward(left, 0), Run::forward(&rhs, 0), 4, bits);
                match &mut above {
                    Some(b) => {
                        // Solvability fixes the part of B_{j+1} along the null vector.
                        excess.dot_real(true, Run::forward(left, 0), Run::forward(b, 0), 4, bits);
                        for a in 0..4 {
                            b[a].add(&excess.scale(&kernel[a], bits), bits);
                        }
                    }
                    None => {
                        let size = rhs.iter().map(Scalar::magnitude).max().unwrap_or(0);
                        if !excess.is_zero() {
                            violated = violated.max(excess.magnitude() - size.max(0) - (frame.bits - bits));
                        }
                    }
                }
            }
            if let Some(b) = above.take() {
                for a in 0..4 {
                    rhs[a].sub(&b[a], bits);
                }
                store(&mut tail, lead, b, j + 1, k, bits);
            }
            let mut value: [S; 4] = std::array::from_fn(|a| {
                let mut sum = S::zero();
                sum.dot_real(false, Run::forward(&pivot.inverse[a], 0), Run::forward(&rhs, 0), 4, bits);
                sum
            });
            if let (true, 0, 0, Some((kernel, _))) = (normalised, k, j, &pivot.kernel) {
                value = std::array::from_fn(|a| S::from_real(&kernel[a]));
            }
            above = Some(value);
        }
        if let Some(b) = above {
            store(&mut tail, lead, b, 0, k, bits);
        }
    }
    (tail, violated)
}

/// Enters B_{·,k,j} and completes μQ and S with it.
fn store<S: Scalar>(tail: &mut Tail<S>, lead: &Leading<S>, b: [S; 4], j: usize, k: usize, bits: i64) {
    for (a, value) in b.into_iter().enumerate() {
        tail.mu[a][j][k].add(&value, bits);
        if let Some(first) = lead.raised[a].coefficients.first() {
            tail.s[j][k].add_mul(first, &value, bits);
        }
        tail.b[a][j][k] = value;
    }
}

/// The first `len` Taylor coefficients of Q_a at v = N + ½.
pub fn at_far_point<S: Scalar>(frame: &Frame, b: &[Vec<S>], z: i64, len: usize, log: &Real) -> Vec<S> {
    let logs = b.len() - 1;
    let bits = frame.bits;
    let odd = 2 * frame.points as i64 + 1;
    // (log w)^i / i!
    let mut powers = vec![Real::from_i64(1)];
    for i in 1..=logs {
        let mut next = powers[i - 1].mul(log, bits);
        next.div_small(i as i64, bits);
        powers.push(next);
    }
    let mut result = S::zeros(len);
    for k in (0..=frame.terms).rev() {
        let e = z - k as i64 * frame.step;
        let column: Vec<S> = (0..=logs).map(|j| b[j][k].clone()).collect();
        let mixed: Vec<S> = (0..=logs)
            .map(|j| {
                let mut sum = S::zero();
                sum.dot_real(false, Run::forward(&powers, 0), Run::forward(&column, j), logs + 1 - j, bits);
                sum
            })
            .collect();
        // binom(e + ε, t), t running; and division of everything so far by w^step.
        let mut binomial: Vec<Real> = (0..=logs).map(|i| Real::from_i64(i64::from(i == 0))).collect();
        for (t, entry) in result.iter_mut().enumerate() {
            if k < frame.terms {
                for _ in 0..frame.step {
                    entry.div_small(odd, bits);
                    entry.shift(1);
                }
            }
            entry.dot_real(false, Run::forward(&binomial, 0), Run::forward(&mixed, 0), logs + 1, bits);
            for i in (0..=logs).rev() {
                let (low, high) = binomial.split_at_mut(i);
                high[0].mul_small(e - t as i64, bits);
                if let Some(before) = low.last() {
                    high[0].add(before, bits);
                }
            }
            binomial.iter_mut().for_each(|x| x.div_small(t as i64 + 1, bits));
        }
    }
    for (t, entry) in result.iter_mut().enumerate() {
        let power = z - t as i64;
        for _ in 0..power.max(0) {
            entry.mul_small(odd, bits);
            entry.shift(-1);
        }
        for _ in 0..(-power).max(0) {
            entry.div_small(odd, bits);
            entry.shift(1);
        }
    }
    result
}
