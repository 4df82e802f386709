//! Sums of the weak-coupling series at finite coupling, with an error estimate.
//!
//! γ(h) = Σ γ_n hⁿ, h = g², has its nearest singularity at h = −1/16, where the cut h ≤ −1/16 of
//! the dispersion relation √(1 + 16 h sin²(p/2)) begins; so the partial sums converge for g < 1/4
//! only. Three sums are made from the same coefficients γ_1 … γ_N:
//!
//! - the partial sum;
//! - Padé approximants [m/n] in h with m + n = N, m and n as equal as possible, of the whole γ
//!   (which starts at h, so that [m/n] has m ≥ 1); one with a pole on [0, h] is set aside;
//! - the conformal map z = (√(1+16h) − 1)/(√(1+16h) + 1), h = z/(4(1−z)²), which sends the plane
//!   without the cut to the unit disc: γ = Σ c_k z^k, cut after k = N, converges for every g ≥ 0 as
//!   far as the cut is the only singularity.
//!
//! The value is the mapped sum. Its error estimate is the larger of |c_N z^N| and |c_{N−1} z^N| (the
//! last term, and the one before it moved on by a factor z, so that an accidental zero of c_N does
//! not count as precision), plus the largest distance of a Padé approximant without a pole on
//! [0, h], divided by 1 − z for the terms after it; and on top what the uncertain digits of the
//! coefficients contribute. It is an estimate, not a bound.

use super::interval::Interval;
use rug::Float;

/// A Padé approximant of γ.
#[derive(Clone, Debug)]
pub struct Pade {
    /// Degree of the numerator.
    pub numerator: usize,
    /// Degree of the denominator.
    pub denominator: usize,
    /// Its value, absent if the approximant does not exist or has a pole on [0, h].
    pub value: Option<Float>,
}

/// The sums at one coupling.
#[derive(Clone, Debug)]
pub struct Sums {
    /// N: how many loops went in.
    pub loops: usize,
    /// z at this coupling.
    pub z: Float,
    /// Partial sum.
    pub partial: Float,
    /// Padé approximants.
    pub pade: Vec<Pade>,
    /// The mapped sum: the value.
    pub mapped: Float,
    /// The error estimate of `mapped`.
    pub error: Float,
}

/// Where the partial sums stop converging.
pub const RADIUS_G: f64 = 0.25;

/// The bits used for N loops and `digits` digits.
pub fn bits_for(loops: usize, digits: usize) -> u32 {
    128 + (digits as u32) * 4 + 24 * loops as u32
}

/// Sums the series `gamma` = γ_1, γ_2, … at h ≥ 0. Cost: O(N³) operations on floats.
pub fn sum(gamma: &[Interval], h: &Float) -> Sums {
    let bits = h.prec();
    let loops = gamma.len();
    let middle: Vec<Float> = gamma.iter().map(|value| Float::with_val(bits, value.middle())).collect();
    let partial = horner(&middle, h) * h;
    let z = conformal(h);
    let table = mapped_powers(loops, bits);
    // c_k = Σ_n γ_n [z^k] h(z)^n.
    let coefficient = |k: usize| {
        (1..=k).fold(Float::new(bits), |sum, n| sum + Float::with_val(bits, &middle[n - 1] * &table[n - 1][k]))
    };
    let c: Vec<Float> = (1..=loops).map(coefficient).collect();
    let mapped = horner(&c, &z) * &z;
    let pade = approximants(&middle, h);
    let mut last = Float::new(bits);
    for term in c.iter().rev().take(2) {
        last = last.max(&Float::with_val(bits, term.abs_ref()));
    }
    let mut power = Float::with_val(bits, 1);
    for _ in 0..loops {
        power *= &z;
    }
    let mut error = last * power;
    let mut spread = Float::new(bits);
    for value in pade.iter().filter_map(|pade| pade.value.as_ref()) {
        spread = spread.max(&Float::with_val(bits, value - &mapped).abs());
    }
    error += spread;
    error /= Float::with_val(bits, 1) - &z;
    for (n, value) in gamma.iter().enumerate() {
        // The weight of γ_n in the mapped sum: Σ_k [z^k] h(z)^n z^k, all positive.
        let weight = horner(&table[n][1..], &z) * &z;
        error += Float::with_val(bits, value.width()) * weight;
    }
    Sums { loops, z, partial, pade, mapped, error }
}

/// z = (√(1+16h) − 1)/(√(1+16h) + 1).
pub fn conformal(h: &Float) -> Float {
    let bits = h.prec();
    let root = (Float::with_val(bits, h * 16u32) + 1u32).sqrt();
    Float::with_val(bits, &root - 1u32) / (root + 1u32)
}

/// Σ a_k x^k.
fn horner(a: &[Float], x: &Float) -> Float {
    a.iter().rev().fold(Float::new(x.prec()), |value, coefficient| value * x + coefficient)
}

/// Row n−1: the coefficients of z⁰ … z^loops in h(z)ⁿ, h(z) = Σ_{k≥1} (k/4) z^k.
fn mapped_powers(loops: usize, bits: u32) -> Vec<Vec<Float>> {
    let base: Vec<Float> = (0..=loops).map(|k| Float::with_val(bits, k) / 4u32).collect();
    let mut rows = vec![base.clone()];
    for n in 1..loops {
        let previous = &rows[n - 1];
        let row = (0..=loops)
            .map(|k| (0..=k).fold(Float::new(bits), |sum, i| sum + Float::with_val(bits, &previous[i] * &base[k - i])))
            .collect();
        rows.push(row);
    }
    rows
}

/// The approximants used: those with m + n = N in the order of |m − n|, until one (N even) or two
/// (N odd) have a value; those without one are kept too, so that a reader sees they were tried.
fn approximants(gamma: &[Float], h: &Float) -> Vec<Pade> {
    let loops = gamma.len();
    let wanted = 1 + loops % 2;
    let mut degrees: Vec<usize> = (1..=loops).collect();
    degrees.sort_by_key(|&numerator| ((2 * numerator).abs_diff(loops), numerator));
    let mut tried = Vec::new();
    for numerator in degrees.into_iter().filter(|_| loops > 1).take(4) {
        let denominator = loops - numerator;
        if denominator == 0 || tried.iter().filter(|pade: &&Pade| pade.value.is_some()).count() == wanted {
            break;
        }
        tried.push(Pade { numerator, denominator, value: pade(gamma, numerator, denominator, h) });
    }
    tried
}

/// The value at h of the approximant P/Q of Σ_{k≥1} γ_k h^k with the given degrees, Q(0) = 1.
fn pade(gamma: &[Float], numerator: usize, denominator: usize, h: &Float) -> Option<Float> {
    let bits = h.prec();
    let series = |k: isize| if k >= 1 { gamma[k as usize - 1].clone() } else { Float::new(bits) };
    // Σ_{j=1}^{n} q_j s_{m+i−j} = −s_{m+i}, i = 1 … n.
    let mut rows: Vec<Vec<Float>> = (1..=denominator)
        .map(|i| {
            let mut row: Vec<Float> =
                (1..=denominator).map(|j| series((numerator + i) as isize - j as isize)).collect();
            row.push(-series((numerator + i) as isize));
            row
        })
        .collect();
    let mut q = vec![Float::with_val(bits, 1)];
    q.extend(solve(&mut rows)?);
    let p: Vec<Float> = (0..=numerator)
        .map(|k| {
            (0..=k.min(denominator))
                .fold(Float::new(bits), |sum, j| sum + Float::with_val(bits, &q[j] * series(k as isize - j as isize)))
        })
        .collect();
    // A pole between 0 and h makes the value meaningless.
    const SAMPLES: u32 = 256;
    let free = (1..=SAMPLES).all(|k| horner(&q, &(Float::with_val(bits, h * k) / SAMPLES)) > 0);
    free.then(|| horner(&p, h) / horner(&q, h))
}

/// Gaussian elimination with row pivots; `None` when a pivot is lost to rounding.
fn solve(rows: &mut [Vec<Float>]) -> Option<Vec<Float>> {
    let n = rows.len();
    for column in 0..n {
        let bits = rows[column][column].prec();
        let pivot = (column..n).max_by(|&a, &b| {
            let size = |row: usize| Float::with_val(bits, rows[row][column].abs_ref());
            size(a).partial_cmp(&size(b)).unwrap_or(std::cmp::Ordering::Equal)
        })?;
        rows.swap(column, pivot);
        let scale = rows[column].iter().map(|v| v.get_exp().unwrap_or(i32::MIN / 2)).max()?;
        if rows[column][column].get_exp().unwrap_or(i32::MIN / 2) < scale - bits as i32 / 2 {
            return None;
        }
        for row in 0..n {
            if row == column {
                continue;
            }
            let factor = Float::with_val(bits, &rows[row][column] / &rows[column][column]);
            for k in column..=n {
                let change = Float::with_val(bits, &factor * &rows[column][k]);
                rows[row][k] -= change;
            }
        }
    }
    Some((0..n).map(|row| Float::with_val(rows[row][row].prec(), &rows[row][n] / &rows[row][row])).collect())
}

#[cfg(test)]
mod tests {
    use super::super::interval::Interval;
    use super::super::numbers::Numbers;
    use super::super::testing;
    use super::super::zeta::Constants;
    use super::{Sums, sum};
    use crate::record::Record;
    use rug::{Float, Rational};

    const BITS: u32 = 400;

    fn rational(n: i64, d: i64) -> Rational {
        Rational::from((n, d))
    }

    fn sums(record: &Record, loops: usize, g: Rational) -> Sums {
        let constants = Constants::default();
        let orbit = &record.orbits[0];
        let numbers = Numbers::new(orbit, &constants).unwrap();
        let gamma: Vec<Interval> =
            (1..=loops).map(|n| numbers.coefficient(orbit.coefficient(n).unwrap(), 0, BITS).unwrap()).collect();
        sum(&gamma, &Float::with_val(BITS, g.square()))
    }

    /// Δ(0.1) − 4 and Δ(0.2) − 4 of (4, 2): arXiv:1504.06640 (from memory).
    fn published() -> [(Rational, Float); 2] {
        let number = |text| Float::with_val(BITS, Float::parse(text).unwrap());
        [
            (rational(1, 10), number("0.115506377945221056840042671851")),
            (rational(1, 5), number("0.418859880802350962250362876243")),
        ]
    }

    /// With the loops of the leading finite-size term: error below 5e-6 and 5e-3, and honest; with
    /// ten loops below 1e-9 and 1e-5; and honest for every number of loops in between.
    #[test]
    fn konishi_at_finite_coupling() {
        let record = testing::konishi_ten_loops();
        for ((g, exact), bounds) in published().into_iter().zip([[5e-6, 1e-9], [5e-3, 1e-5]]) {
            for loops in 2..=10 {
                let sums = sums(&record, loops, g.clone());
                let distance = Float::with_val(BITS, &sums.mapped - &exact).abs();
                assert!(
                    distance <= sums.error,
                    "{loops} loops at g = {g}: off by {distance:.3e}, said {:.3e}",
                    sums.error
                );
                if loops == 4 {
                    assert!(sums.error < bounds[0], "{:.3e}", sums.error);
                }
                if loops == 10 {
                    assert!(sums.error < bounds[1], "{:.3e}", sums.error);
                }
            }
        }
    }

    /// γ = √(1+16h) − 1 is (2z/(1−z)), whose mapped series is geometric; [m/n] reproduces h/(1+h).
    #[test]
    fn functions_known_in_closed_form() {
        let (mut binomial, mut coefficients) = (rational(1, 1), Vec::new());
        for n in 1..=12i64 {
            binomial *= rational(3 - 2 * n, 2 * n) * rational(16, 1);
            coefficients.push(Interval::from_rational(&binomial, BITS));
        }
        let sums = sum(&coefficients, &Float::with_val(BITS, 1));
        let exact = Float::with_val(BITS, 17).sqrt() - 1u32;
        let distance = Float::with_val(BITS, &sums.mapped - &exact).abs();
        assert!(distance < sums.error && sums.error < 0.1, "{distance:.3e} {:.3e}", sums.error);
        let geometric: Vec<Interval> =
            (0..6).map(|n| Interval::from_rational(&rational(if n % 2 == 0 { 1 } else { -1 }, 1), BITS)).collect();
        let sums = super::sum(&geometric[..2], &Float::with_val(BITS, 3));
        let value = sums.pade[0].value.clone().unwrap();
        assert!(Float::with_val(BITS, value - Float::with_val(BITS, 0.75)).abs() < 1e-100);
        // A degenerate approximant is reported as absent, and one with a pole on [0, h] too.
        assert!(super::sum(&geometric, &Float::with_val(BITS, 3)).pade[0].value.is_none());
        let poles: Vec<Interval> = (0..2).map(|_| Interval::from_rational(&rational(1, 1), BITS)).collect();
        assert!(super::sum(&poles, &Float::with_val(BITS, 3)).pade[0].value.is_none());
    }
}
