//! The long-range potential W(w; h) = Y^L exp D as a polynomial in w (formulas §2 and §3; BES, BS).

use super::field::Field;
use super::graded::Graded;
use super::poly::{Poly, binomial, ratio};
use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::One;

/// W = Σ_k w_k(h) Y^k with w_{L−k} = `weights[k]`.
pub struct Potential {
    /// L.
    pub length: usize,
    /// The power series of exp D in 1/Y.
    pub weights: Vec<Graded>,
}

fn factorial(n: usize) -> BigInt {
    (1..=n).fold(BigInt::one(), |product, k| product * k)
}

/// C_rs(h) below order `orders` (BES): 2(−1)^{(s−r−1)/2} Σ_n (−1)^n (r+s+2n)!(r+s+2n−1)! /
/// [n!(r+n)!(s+n)!(r+s+n)!] ζ(r+s+2n) h^{r+s+n}, for r < s with r + s odd.
pub fn dressing(r: usize, s: usize, orders: usize) -> Graded {
    let mut series = Graded::zero();
    for n in 0..orders.saturating_sub(r + s) {
        let k = r + s + 2 * n;
        let value = BigRational::new(
            factorial(k) * factorial(k - 1) * 2,
            factorial(n) * factorial(r + n) * factorial(s + n) * factorial(r + s + n),
        );
        let negative = (n + (s - r - 1) / 2) % 2 == 1;
        series.set(r + s + n, vec![k as u32], Poly::rational(&if negative { -value } else { value }));
    }
    series
}

/// The polynomial p_n = Y^n + (−h/Y)^n in w and h, for n ≥ 1: Σ_i n/(n−i) binom(n−i, i) h^i w^{n−2i}.
pub fn power_of_y(n: usize, orders: usize) -> Graded {
    let mut series = Graded::zero();
    for i in (0..=n / 2).take(orders) {
        let value = BigRational::new(binomial((n - i) as i64, i) * n, BigInt::from(n - i));
        series.set(i, Vec::new(), Poly::rational(&value).times_power(n - 2 * i));
    }
    series
}

impl Potential {
    /// Below order `orders`, from the charges P_r (`charges[r]`, index 0 unused) known below order
    /// `orders` − 3; missing charges count as zero.
    pub fn new(field: &Field, length: usize, charges: &[Graded], orders: usize) -> Potential {
        // D = Σ_k D_k Y^{−k}.
        let mut exponent = vec![Graded::zero(); orders.max(1)];
        for total in (3..orders).step_by(2) {
            for r in 1..=total / 2 {
                let s = total - r;
                let sign = if (total - 1) / 2 % 2 == 0 { 2 } else { -2 };
                let coupling = dressing(r, s, orders).scale(&ratio(sign, 1));
                for (index, other, sign) in [(r, s, 1), (s, r, -1)] {
                    if let Some(charge) = charges.get(other) {
                        let term = coupling.mul(field, charge, orders).scale(&ratio(sign, 1));
                        exponent[index] = exponent[index].add(&term);
                    }
                }
            }
        }
        // k E_k = Σ_j j D_j E_{k−j}.
        let scaled: Vec<Graded> = exponent.iter().enumerate().map(|(j, d)| d.scale(&ratio(j as i64, 1))).collect();
        let mut weights = vec![Graded::constant(Poly::one())];
        for k in 1..orders.min(length + 1) {
            let pairs: Vec<_> = (1..=k).map(|j| (&scaled[j], &weights[k - j])).collect();
            let next = Graded::dot(field, &pairs, orders).scale(&ratio(1, k as i64));
            weights.push(next);
        }
        Potential { length, weights }
    }

    /// W as a polynomial of degree L in w (Y^k → p_k, Y⁰ → 1), orders below `orders` ≤ L.
    pub fn polynomial(&self, field: &Field, orders: usize) -> Graded {
        let powers: Vec<Graded> = (0..self.weights.len())
            .map(|k| match self.length - k {
                0 => Graded::constant(Poly::one()),
                n => power_of_y(n, orders),
            })
            .collect();
        let pairs: Vec<_> = self.weights.iter().zip(&powers).collect();
        Graded::dot(field, &pairs, orders)
    }
}

#[cfg(test)]
mod tests {
    use super::{dressing, power_of_y};
    use crate::audit::graded::Graded;
    use crate::audit::poly::{Poly, ratio};

    /// C₁₂ = 2·3!·2!/(1!·2!·3!) ζ3 h³ − … = 2ζ3 h³ − 20 ζ5 h⁴ (the formula of BES evaluated by hand).
    #[test]
    fn leading_dressing_coefficient() {
        let expected = Graded::term(3, vec![3], Poly::integer(2)).add(&Graded::term(4, vec![5], Poly::integer(-20)));
        assert_eq!(dressing(1, 2, 5), expected);
    }

    /// p₃ = w³ + 3hw from the recursion p_{n+1} = w p_n + h p_{n−1}.
    #[test]
    fn third_power() {
        let w = Poly::from_rationals(&[ratio(0, 1), ratio(1, 1)]);
        let expected =
            Graded::constant(Poly::one().times_power(3)).add(&Graded::term(1, vec![], w.scale(&ratio(3, 1))));
        assert_eq!(power_of_y(3, 5), expected);
    }
}
