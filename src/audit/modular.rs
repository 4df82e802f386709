//! Polynomials over F_p for p < 2⁶²: what irreducibility and distinctness need, no more.
//! A polynomial is a list of residues, constant term first, without trailing zeros.

use num_bigint::BigInt;
use num_integer::Integer as _;
use num_traits::ToPrimitive;

/// Arithmetic modulo a prime.
#[derive(Clone, Copy, Debug)]
pub struct Prime(pub u64);

/// A polynomial over F_p.
pub type Modular = Vec<u64>;

fn trim(mut f: Modular) -> Modular {
    while f.last() == Some(&0) {
        f.pop();
    }
    f
}

impl Prime {
    /// The residue of an integer.
    pub fn residue(self, value: &BigInt) -> u64 {
        value.mod_floor(&BigInt::from(self.0)).to_u64().unwrap_or(0)
    }

    /// a·b.
    pub fn mul(self, a: u64, b: u64) -> u64 {
        (u128::from(a) * u128::from(b) % u128::from(self.0)) as u64
    }

    /// a − b.
    pub fn sub(self, a: u64, b: u64) -> u64 {
        if a >= b { a - b } else { a + self.0 - b }
    }

    /// 1/a for a ≠ 0, by Fermat.
    pub fn inverse(self, a: u64) -> u64 {
        let (mut base, mut exponent, mut result) = (a, self.0 - 2, 1);
        while exponent > 0 {
            if exponent & 1 == 1 {
                result = self.mul(result, base);
            }
            base = self.mul(base, base);
            exponent >>= 1;
        }
        result
    }

    /// The residues of a polynomial.
    pub fn reduce(self, f: &[BigInt]) -> Modular {
        trim(f.iter().map(|c| self.residue(c)).collect())
    }

    /// f − g.
    pub fn difference(self, f: &[u64], g: &[u64]) -> Modular {
        let get = |h: &[u64], i: usize| h.get(i).copied().unwrap_or(0);
        trim((0..f.len().max(g.len())).map(|i| self.sub(get(f, i), get(g, i))).collect())
    }

    /// f·g.
    pub fn product(self, f: &[u64], g: &[u64]) -> Modular {
        let mut result = vec![0; (f.len() + g.len()).saturating_sub(1)];
        for (i, a) in f.iter().enumerate() {
            for (j, b) in g.iter().enumerate() {
                result[i + j] = (result[i + j] + self.mul(*a, *b)) % self.0;
            }
        }
        trim(result)
    }

    /// Quotient and remainder by g ≠ 0.
    pub fn divide(self, f: &[u64], g: &[u64]) -> (Modular, Modular) {
        let mut rest = f.to_vec();
        if rest.len() < g.len() {
            return (Vec::new(), trim(rest));
        }
        let lead = self.inverse(g[g.len() - 1]);
        let mut quotient = vec![0; rest.len() + 1 - g.len()];
        for k in (0..quotient.len()).rev() {
            let factor = self.mul(rest[k + g.len() - 1], lead);
            quotient[k] = factor;
            for (j, c) in g.iter().enumerate() {
                rest[k + j] = self.sub(rest[k + j], self.mul(factor, *c));
            }
        }
        rest.truncate(g.len() - 1);
        (trim(quotient), trim(rest))
    }

    fn monic(self, f: Modular) -> Modular {
        let Some(&lead) = f.last() else { return f };
        let inverse = self.inverse(lead);
        f.into_iter().map(|c| self.mul(c, inverse)).collect()
    }

    /// The monic greatest common divisor.
    pub fn gcd(self, f: &[u64], g: &[u64]) -> Modular {
        let (mut a, mut b) = (f.to_vec(), g.to_vec());
        while !b.is_empty() {
            let r = self.divide(&a, &b).1;
            a = std::mem::replace(&mut b, r);
        }
        self.monic(a)
    }

    /// Whether f has no repeated factor.
    pub fn squarefree(self, f: &[u64]) -> bool {
        let derivative = f.iter().enumerate().skip(1).map(|(k, c)| self.mul(*c, k as u64 % self.0)).collect();
        self.gcd(f, &trim(derivative)).len() == 1
    }

    /// base^exponent modulo f.
    fn power(self, base: &[u64], exponent: &BigInt, f: &[u64]) -> Modular {
        let mut result = self.divide(&[1], f).1;
        for bit in (0..exponent.bits()).rev() {
            result = self.divide(&self.product(&result, &result), f).1;
            if exponent.bit(bit) {
                result = self.divide(&self.product(&result, base), f).1;
            }
        }
        result
    }

    /// (degree, product of the irreducible factors of that degree) of a monic squarefree f.
    pub fn by_degree(self, f: &[u64]) -> Vec<(usize, Modular)> {
        let (mut rest, mut found) = (f.to_vec(), Vec::new());
        let mut frobenius = self.divide(&[0, 1], &rest).1;
        let mut degree = 0;
        while rest.len() > 1 {
            degree += 1;
            if 2 * degree > rest.len() - 1 {
                found.push((rest.len() - 1, rest));
                break;
            }
            frobenius = self.power(&frobenius, &BigInt::from(self.0), &rest);
            let factor = self.gcd(&rest, &self.difference(&frobenius, &[0, 1]));
            if factor.len() > 1 {
                rest = self.divide(&rest, &factor).0;
                frobenius = if rest.len() > 1 { self.divide(&frobenius, &rest).1 } else { Vec::new() };
                found.push((degree, factor));
            }
        }
        found
    }

    /// The irreducible factors of f, a product of distinct ones of the same degree (Cantor and
    /// Zassenhaus, p odd), with trial polynomials from a fixed sequence.
    pub fn split(self, f: &[u64], degree: usize) -> Vec<Modular> {
        let exponent: BigInt = (num_traits::pow(BigInt::from(self.0), degree) - 1) / 2;
        let (mut open, mut done) = (vec![f.to_vec()], Vec::new());
        let mut state = 1u64;
        while let Some(g) = open.pop() {
            if g.len() - 1 <= degree {
                done.push(g);
                continue;
            }
            let trial: Modular = (0..g.len() - 1)
                .map(|_| {
                    state = state.wrapping_mul(6364136223846793005).wrapping_add(1442695040888963407);
                    (state >> 20) % self.0
                })
                .collect();
            let power = self.power(&trim(trial), &exponent, &g);
            let h = self.gcd(&g, &self.difference(&power, &[1]));
            if h.len() > 1 && h.len() < g.len() {
                open.push(self.divide(&g, &h).0);
                open.push(h);
            } else {
                open.push(g);
            }
        }
        done
    }

    /// 1/g modulo f for coprime g and f.
    pub fn inverse_modulo(self, g: &[u64], f: &[u64]) -> Modular {
        let (mut a, mut b) = (f.to_vec(), self.divide(g, f).1);
        let (mut s, mut t): (Modular, Modular) = (Vec::new(), vec![1]);
        while b.len() > 1 {
            let (q, r) = self.divide(&a, &b);
            let next = self.difference(&s, &self.product(&q, &t));
            a = std::mem::replace(&mut b, r);
            s = std::mem::replace(&mut t, next);
        }
        let Some(&constant) = b.first() else { return Vec::new() };
        let inverse = self.inverse(constant);
        self.divide(&t.iter().map(|c| self.mul(*c, inverse)).collect::<Vec<_>>(), f).1
    }
}

#[cfg(test)]
mod tests {
    use super::Prime;

    #[test]
    fn factors_multiply_back() {
        let p = Prime(101);
        // x⁶ − 1 splits over F_101 as its roots of order dividing 6 allow.
        let f = vec![100, 0, 0, 0, 0, 0, 1];
        assert!(p.squarefree(&f));
        let mut product = vec![1];
        let mut count = 0;
        for (degree, part) in p.by_degree(&f) {
            for factor in p.split(&part, degree) {
                assert_eq!(factor.len(), degree + 1);
                product = p.product(&product, &factor);
                count += 1;
            }
        }
        assert_eq!((product, count), (f, 4));
    }

    #[test]
    fn inverses() {
        let p = Prime((1 << 61) - 1);
        let f = [5, 0, 3, 1];
        let g = [7, 2, 9];
        assert_eq!(p.divide(&p.product(&g, &p.inverse_modulo(&g, &f)), &f).1, [1]);
    }
}
