//! The sum over mirror bound states and the integral over their rapidity, exactly (formulas §5).
//!
//! With s and t independent, a = s − t, A = Q(s+½), B = Q(s−½), C = Q(t+½), D = Q(t−½):
//!  𝒯(ζ) = (a+1)BC − ζ a AC − ζ⁻¹ a BD + (a−1)AD,  N = 𝒯(ζ_L) 𝒯(ζ_R).
//! ζ_L = ζ_R = 1 is the undeformed chain. In the β-deformed chain with Bethe equations multiplied by
//! κ = ρ^L on their left side, ζ_L = ρ^{−M} and ζ_R = ρ^{−(L−M)}; its Q is an input too.

use crate::algebra::poly;
use crate::algebra::ring::Ring;
use crate::error::{Error, Result};
use rug::{Integer, Rational};

/// All parts of the sum.
#[derive(Clone, Debug, PartialEq)]
pub struct Sum<E> {
    /// The part without zeta values.
    pub constant: E,
    /// Coefficients of ζ(1), ζ(2), …, ζ(2L−1). With ζ_L = ζ_R = 1 and a cyclic state the even ones, the first
    /// and the last vanish; otherwise those of ζ(1) may stand for a divergent sum only if they vanish.
    pub zetas: Vec<E>,
}

/// −Σ_a ∫ du/π 𝒯_a(ζ_L) 𝒯_a(ζ_R) / [(u²+a²/4)^L q_{a+1} q_{a−1} q_{1−a} q_{−a−1}], exactly, for Q with
/// Q(±½) units. About 10 L² ring multiplications.
///
/// # Errors
/// Q(½), Q(−½) or a twist is no unit.
pub fn twisted_sum<R: Ring>(
    ring: &R,
    length: usize,
    q: &[R::Elem],
    zeta_left: &R::Elem,
    zeta_right: &R::Elem,
) -> Result<Sum<R::Elem>> {
    let non_unit = || {
        Error::undefined(
            "the finite-size sum needs Q(1/2), Q(-1/2) and the twists invertible; a singular state needs the twist limit",
        )
    };
    let up = poly::shift(ring, q, &ring.ratio(1, 2));
    let down = poly::shift(ring, q, &ring.ratio(-1, 2));
    let ratio = Ratio::new(ring, &up, &down, length).ok_or_else(non_unit)?;
    let twist = Twist::new(ring, zeta_left, zeta_right).ok_or_else(non_unit)?;
    let zetas = zeta_part(ring, length, &ratio, &twist);
    let constant = constant_part(ring, length, &up, &down, &twist).ok_or_else(non_unit)?;
    Ok(Sum { constant, zetas })
}

/// X = A/B and 1/X as power series.
pub(super) struct Ratio<E> {
    pub(super) direct: Vec<E>,
    pub(super) inverse: Vec<E>,
}

impl<E: Clone> Ratio<E> {
    /// Through s^{L−1}.
    pub(super) fn new<R: Ring<Elem = E>>(ring: &R, up: &[E], down: &[E], length: usize) -> Option<Ratio<E>> {
        let over = |a: &[E], b: &[E]| {
            let inverse = poly::series_inverse(ring, b, length)?;
            Some(poly::mul_truncated(ring, a, &inverse, length))
        };
        Some(Ratio { direct: over(up, down)?, inverse: over(down, up)? })
    }
}

/// The symmetric functions of the twists that enter.
pub(super) struct Twist<E> {
    left: E,
    right: E,
    /// ζ_L + ζ_R.
    sum: E,
    /// 1/ζ_L + 1/ζ_R.
    inverse_sum: E,
    /// ζ_L ζ_R.
    product: E,
    /// 1/(ζ_L ζ_R).
    inverse_product: E,
    /// ζ_L/ζ_R + ζ_R/ζ_L.
    ratio: E,
}

impl<E> Twist<E> {
    pub(super) fn new<R: Ring<Elem = E>>(ring: &R, left: &E, right: &E) -> Option<Twist<E>> {
        let (l, r) = (ring.inverse(left)?, ring.inverse(right)?);
        Some(Twist {
            left: ring.add(left, &ring.zero()),
            right: ring.add(right, &ring.zero()),
            sum: ring.add(left, right),
            inverse_sum: ring.add(&l, &r),
            product: ring.mul(left, right),
            inverse_product: ring.mul(&l, &r),
            ratio: ring.add(&ring.mul(left, &r), &ring.mul(right, &l)),
        })
    }
}

/// Coefficients of ζ(1) … ζ(2L−1): 2(−1)^L Σ_{i+j=2L−1−k} binom(i−L, L−1−j) H_ij, where N/(ABCD) = Σ H_ij s^i t^j.
///
/// With X = A/B in s and Z = C/D in t, N/(ABCD) = τ(ζ_L)τ(ζ_R)/(XZ) with τ(ζ) = (a+1)Z − ζaXZ − a/ζ + (a−1)X:
/// nine products of a series in s and one in t, times 1, a or a².
pub(super) fn zeta_part<R: Ring>(ring: &R, length: usize, x: &Ratio<R::Elem>, twist: &Twist<R::Elem>) -> Vec<R::Elem> {
    let (x, y) = (&x.direct, &x.inverse);
    let n = length;
    let two = ring.ratio(2, 1);
    let unit = |i: usize| i == 0;
    let mut constant = vec![vec![ring.zero(); n]; n];
    let mut linear = constant.clone();
    let mut square = constant.clone();
    let scaled = |c: &R::Elem, series: &[R::Elem]| -> Vec<R::Elem> { series.iter().map(|s| ring.mul(c, s)).collect() };
    let (sum_x, sum_y) = (scaled(&twist.sum, x), scaled(&twist.inverse_sum, y));
    let (product_x, product_y) = (scaled(&twist.product, x), scaled(&twist.inverse_product, y));
    let mut acc = ring.accumulator();
    for i in 0..n {
        for j in 0..n {
            let (yx, xy) = (ring.mul(&y[i], &x[j]), ring.mul(&x[i], &y[j]));
            let both = ring.add(&yx, &xy);
            // 1: Z/X − 2 + X/Z.
            let corner = if unit(i) && unit(j) { ring.sub(&both, &ring.integer(2)) } else { both.clone() };
            constant[i][j] = corner;
            // a: 2Z/X − σZ − ζ̄/X + σX + ζ̄/Z − 2X/Z.
            let mut first = ring.scale(&ring.sub(&yx, &xy), &two);
            // a²: Z/X + X/Z − σ(Z + X) − ζ̄(1/X + 1/Z) + 2 + ratio + ΠXZ + 1/(ΠXZ).
            ring.accumulate(&mut acc, &product_x[i], &x[j]);
            ring.accumulate(&mut acc, &product_y[i], &y[j]);
            let mut second = ring.add(&both, &ring.collect(&mut acc));
            if unit(i) {
                first = ring.add(&first, &ring.sub(&sum_y[j], &sum_x[j]));
                second = ring.sub(&second, &ring.add(&sum_x[j], &sum_y[j]));
            }
            if unit(j) {
                first = ring.add(&first, &ring.sub(&sum_x[i], &sum_y[i]));
                second = ring.sub(&second, &ring.add(&sum_x[i], &sum_y[i]));
            }
            if unit(i) && unit(j) {
                second = ring.add(&second, &ring.add(&ring.integer(2), &twist.ratio));
            }
            linear[i][j] = first;
            square[i][j] = second;
        }
    }
    let sign = if length.is_multiple_of(2) { 2 } else { -2 };
    (1..2 * length)
        .map(|k| {
            let total = 2 * length - 1 - k;
            let mut result = ring.zero();
            for i in 0..n {
                let Some(j) = total.checked_sub(i).filter(|j| *j < n) else { continue };
                // H_ij from the shifts by powers of a = s − t.
                let mut h = constant[i][j].clone();
                if i >= 1 {
                    h = ring.add(&h, &linear[i - 1][j]);
                }
                if j >= 1 {
                    h = ring.sub(&h, &linear[i][j - 1]);
                }
                if i >= 2 {
                    h = ring.add(&h, &square[i - 2][j]);
                }
                if i >= 1 && j >= 1 {
                    h = ring.sub(&h, &ring.scale(&square[i - 1][j - 1], &two));
                }
                if j >= 2 {
                    h = ring.add(&h, &square[i][j - 2]);
                }
                // binom(i−L, m) = (−1)^m binom(L−i+m−1, m), m = L−1−j.
                let m = length - 1 - j;
                let binomial = Integer::from(Integer::binomial_u((length - i + m - 1) as u32, m as u32));
                let weight = Rational::from(binomial * if m.is_multiple_of(2) { sign } else { -sign });
                result = ring.add(&result, &ring.scale(&h, &ring.scalar(&weight)));
            }
            result
        })
        .collect()
}

/// 2(−1)^L [t^{L−1}] r(1+t, t)/(C²D) with r = N/(s^L A) mod B; `None` when Q(½) or Q(−½) is no unit.
fn constant_part<R: Ring>(
    ring: &R,
    length: usize,
    up: &[R::Elem],
    down: &[R::Elem],
    twist: &Twist<R::Elem>,
) -> Option<R::Elem> {
    let unit = ring.inverse(down.first()?)?;
    let powers = residues(ring, length, up, down, &unit);
    let numerator = numerator(ring, length, &powers, up, down, twist);
    let square = poly::mul_truncated(ring, up, up, length);
    let denominator = poly::mul_truncated(ring, &square, down, length);
    let inverse = poly::series_inverse(ring, &denominator, length)?;
    let mut acc = ring.accumulator();
    for (i, c) in numerator.iter().enumerate() {
        ring.accumulate(&mut acc, c, &inverse[length - 1 - i]);
    }
    let sign = if length.is_multiple_of(2) { 2 } else { -2 };
    Some(ring.scale(&ring.collect(&mut acc), &ring.ratio(sign, 1)))
}

/// s^{k−L} A mod B for k = 0, 1, 2, given 1/B(0): each division by s subtracts a multiple of B first.
/// deg(B)·L multiplications.
pub(super) fn residues<R: Ring>(
    ring: &R,
    length: usize,
    up: &[R::Elem],
    modulus: &[R::Elem],
    unit: &R::Elem,
) -> [Vec<R::Elem>; 3] {
    let degree = modulus.len() - 1;
    let mut current = poly::remainder(ring, up, modulus);
    current.resize(degree, ring.zero());
    let mut history = [Vec::new(), Vec::new(), Vec::new()];
    for step in 0..=length {
        if step + 2 >= length {
            history[length - step] = current.clone();
        }
        if step == length || degree == 0 {
            continue;
        }
        let factor = ring.mul(&current[0], unit);
        current = (0..degree)
            .map(|i| {
                let product = ring.mul(&factor, &modulus[i + 1]);
                current.get(i + 1).map_or_else(|| ring.neg(&product), |c| ring.sub(c, &product))
            })
            .collect();
    }
    history
}

/// Σ_k ρ_k(1+t) g_k(t) through t^{L−1}: modulo B, 𝒯(ζ) = A·(s α + β) with α = D − ζC and β = ζtC − (t+1)D.
pub(super) fn numerator<R: Ring>(
    ring: &R,
    length: usize,
    powers: &[Vec<R::Elem>; 3],
    up: &[R::Elem],
    down: &[R::Elem],
    twist: &Twist<R::Elem>,
) -> Vec<R::Elem> {
    let at = |poly: &[R::Elem], i: usize| poly.get(i).cloned().unwrap_or_else(|| ring.zero());
    let factors = |zeta: &R::Elem| -> (Vec<R::Elem>, Vec<R::Elem>) {
        let turned: Vec<R::Elem> = up.iter().map(|c| ring.mul(zeta, c)).collect();
        let alpha: Vec<R::Elem> = (0..up.len()).map(|i| ring.sub(&at(down, i), &turned[i])).collect();
        let beta = (0..=up.len())
            .map(|i| {
                let below = i.checked_sub(1).map_or_else(|| ring.zero(), |k| ring.sub(&turned[k], &at(down, k)));
                ring.sub(&below, &at(down, i))
            })
            .collect();
        (alpha, beta)
    };
    let (alpha_left, beta_left) = factors(&twist.left);
    let (alpha_right, beta_right) = factors(&twist.right);
    let mul = |a: &[R::Elem], b: &[R::Elem]| poly::mul_truncated(ring, a, b, length);
    let cross: Vec<R::Elem> =
        mul(&alpha_left, &beta_right).iter().zip(&mul(&beta_left, &alpha_right)).map(|(a, b)| ring.add(a, b)).collect();
    let weights = [mul(&beta_left, &beta_right), cross, mul(&alpha_left, &alpha_right)];
    let one = ring.ratio(1, 1);
    let mut total = vec![ring.zero(); length];
    for (power, weight) in powers.iter().zip(&weights) {
        let part = mul(&poly::shift(ring, power, &one), weight);
        for (sum, c) in total.iter_mut().zip(&part) {
            *sum = ring.add(sum, c);
        }
    }
    total
}
