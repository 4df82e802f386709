//! The polynomial potential W(w; h) with the dressing phase (formulas §2, §3).

use crate::algebra::graded::{Graded, Series};
use crate::algebra::ring::Ring;
use crate::family::Family;
use rug::{Integer, Rational};

/// W = Σ_j e_j(h) p_{L−j}(w; h), where exp D = Σ_j e_j Y^{−j}, p_n = Yⁿ + (−h/Y)ⁿ and p₀ is replaced by 1.
///
/// Valid through h^{L−1}; there j ≤ L − 2, since e_j is O(h^{j+1}) for j ≥ 1.
#[derive(Debug)]
pub struct Potential<R: Ring> {
    /// e_j, j = 0, 1, …: W contains e_j Y^{L−j}.
    pub modes: Vec<Series<R>>,
    /// `polynomial[entry][k]`: coefficient of w^k.
    polynomial: Vec<Vec<R::Elem>>,
    zero: R::Elem,
}

impl<R: Ring> Potential<R> {
    /// The potential for the charges P_r = `charges[r−1]` (those not given count as zero), correct as far
    /// as they are: through three orders more.
    pub fn new(graded: &Graded<'_, R>, family: Family, charges: &[Series<R>]) -> Potential<R> {
        let ring = graded.base();
        let grading = graded.grading();
        let exponent = exponent(graded, charges);
        // E = exp D as a series in 1/Y: j e_j = Σ_{i=1}^{j} i d_i e_{j−i}.
        let mut modes = vec![graded.one()];
        for j in 1..=exponent.len().min(family.length) {
            let scaled: Vec<Series<R>> =
                (1..=j).map(|i| graded.scale(&exponent[i - 1], &ring.ratio(i as i64, j as i64))).collect();
            let terms: Vec<_> = (1..=j).map(|i| (&scaled[i - 1], &modes[j - i])).collect();
            modes.push(graded.sum_of_products(&terms, grading.order()));
        }
        let length = family.length;
        let mut polynomial = vec![vec![ring.zero(); length + 1]; grading.len()];
        for (j, mode) in modes.iter().enumerate() {
            for (i, weight) in power_sum(length - j).into_iter().enumerate() {
                if i > grading.order() {
                    break;
                }
                let part = graded.times_monomial(mode, i, &[], &ring.scalar(&Rational::from(weight)));
                for (row, c) in polynomial.iter_mut().zip(&part) {
                    if !ring.is_zero(c) {
                        let k = length - j - 2 * i;
                        row[k] = ring.add(&row[k], c);
                    }
                }
            }
        }
        Potential { modes, polynomial, zero: ring.zero() }
    }

    /// The coefficient of w^k in one entry of the grading.
    pub fn coefficient(&self, entry: usize, k: usize) -> &R::Elem {
        self.polynomial[entry].get(k).unwrap_or(&self.zero)
    }

    /// The polynomial in w, entry by entry.
    pub fn polynomial(&self) -> &[Vec<R::Elem>] {
        &self.polynomial
    }
}

/// The coefficients c_i of p_n = Σ_i c_i h^i w^{n−2i} = Yⁿ + (−h/Y)ⁿ (n ≥ 1), and 1 for n = 0.
fn power_sum(n: usize) -> Vec<Integer> {
    (0..=n / 2)
        .map(|i| {
            if n == 0 {
                return Integer::from(1);
            }
            let binomial = Integer::from(Integer::binomial_u((n - i) as u32, i as u32));
            binomial * n as u32 / (n - i) as u32
        })
        .collect()
}

/// d_j with D = Σ_j d_j Y^{−j}: D = 2 Σ_{r<s, r+s odd} (−1)^{(r+s−1)/2} C_rs [P_s Y^{−r} − P_r Y^{−s}].
fn exponent<R: Ring>(graded: &Graded<'_, R>, charges: &[Series<R>]) -> Vec<Series<R>> {
    let ring = graded.base();
    let order = graded.grading().order();
    let mut exponent = vec![graded.zero(); order.saturating_sub(1)];
    for s in 2..order {
        for r in (1..s).filter(|r| (r + s) % 2 == 1 && r + s <= order) {
            let sign = if ((r + s - 1) / 2) % 2 == 0 { 2 } else { -2 };
            for (n, coefficient) in dressing(r, s, order) {
                let weight = Rational::from(coefficient * sign);
                let zeta = [(r + s + 2 * n) as u32];
                let mut add = |target: usize, source: usize, weight: Rational| {
                    if let Some(charge) = charges.get(source - 1) {
                        let part = graded.times_monomial(charge, r + s + n, &zeta, &ring.scalar(&weight));
                        exponent[target - 1] = graded.add(&exponent[target - 1], &part);
                    }
                };
                add(r, s, weight.clone());
                add(s, r, -weight);
            }
        }
    }
    exponent
}

/// The dressing coefficient C_rs = Σ_n c_n ζ(r+s+2n) h^{r+s+n} through h^`order`: pairs (n, c_n) with
/// c_n = 2(−1)^{(s−r−1)/2+n} (r+s+2n)! (r+s+2n−1)! / [n! (r+n)! (s+n)! (r+s+n)!] (BES, VV).
pub fn dressing(r: usize, s: usize, order: usize) -> Vec<(usize, Rational)> {
    let factorial = |n: usize| Integer::from(Integer::factorial(n as u32));
    (0..=order.saturating_sub(r + s))
        .map(|n| {
            let sum = r + s + 2 * n;
            let numerator = factorial(sum) * factorial(sum - 1) * 2;
            let denominator = factorial(n) * factorial(r + n) * factorial(s + n) * factorial(r + s + n);
            let value = Rational::from((numerator, denominator));
            (n, if ((s - r - 1) / 2 + n).is_multiple_of(2) { value } else { -value })
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::power_sum;

    /// p₅ = w⁵ + 5hw³ + 5h²w from p_{n+1} = w p_n + h p_{n−1}.
    #[test]
    fn power_sums() {
        assert_eq!(power_sum(5), [1, 5, 5]);
        assert_eq!(power_sum(2), [1, 2]);
        assert_eq!(power_sum(0), [1]);
    }
}
