//! From decimals at all embeddings of an orbit to coefficients in powers of ω.

use super::relation::relation;
use rug::{Float, Integer, Rational};

/// The field Q(ω) of an orbit, through its power sums Tr ω^k.
pub struct Traces {
    degree: usize,
    sums: Vec<Rational>,
}

impl Traces {
    /// From the monic minimal polynomial, constant first (Newton's identities).
    pub fn new(minimal: &[Rational]) -> Traces {
        let degree = minimal.len() - 1;
        let mut sums: Vec<Rational> = vec![Rational::from(degree as u32)];
        for k in 1..=2 * degree {
            // p_k = −Σ_{i=1}^{min(k, d)} e_i p_{k−i}, with k e_k in the last place when k ≤ d; e_i = minimal[d − i].
            let mut sum = Rational::new();
            for i in 1..=k.min(degree) {
                let term = if i == k { Rational::from(k as u32) } else { sums[k - i].clone() };
                sum -= Rational::from(&minimal[degree - i] * &term);
            }
            sums.push(sum);
        }
        Traces { degree, sums }
    }

    /// Tr(x ω^m), m = 0 … d − 1, for x = Σ value_k ω^k.
    pub fn of(&self, value: &[Rational]) -> Vec<Rational> {
        (0..self.degree)
            .map(|m| value.iter().enumerate().map(|(k, c)| Rational::from(c * &self.sums[k + m])).sum())
            .collect()
    }

    /// The x with these traces; None only if the polynomial has a repeated root.
    fn solve(&self, traces: &[Rational]) -> Option<Vec<Rational>> {
        let d = self.degree;
        let mut rows: Vec<Vec<Rational>> =
            (0..d).map(|m| (0..d).map(|k| self.sums[m + k].clone()).chain([traces[m].clone()]).collect()).collect();
        for column in 0..d {
            let pivot = (column..d).find(|&row| !rows[row][column].is_zero())?;
            rows.swap(column, pivot);
            let inverse = Rational::from(rows[column][column].recip_ref());
            rows[column].iter_mut().for_each(|x| *x *= &inverse);
            let source = rows[column].clone();
            for (_, target) in rows.iter_mut().enumerate().filter(|(row, _)| *row != column) {
                let factor = target[column].clone();
                target.iter_mut().zip(&source).for_each(|(x, y)| *x -= Rational::from(&factor * y));
            }
        }
        Some(rows.into_iter().map(|mut row| row.pop().unwrap_or_default()).collect())
    }

    /// Recognises γ_n from its values at all real embeddings. Each trace Tr(γ_n ω^m) is a rational
    /// combination of the basis; returns the coefficients `[basis][power of ω]` and the least spare digits.
    pub fn recognise(
        &self,
        omegas: &[Float],
        values: &[Float],
        errors: &[Float],
        basis: &[Float],
    ) -> Option<(Vec<Vec<Rational>>, f64)> {
        let bits = values[0].prec();
        let mut spare = f64::INFINITY;
        let mut traces = vec![Vec::new(); basis.len()];
        for m in 0..self.degree {
            let (mut value, mut error) = (Float::new(bits), Float::new(53));
            for ((omega, x), e) in omegas.iter().zip(values).zip(errors) {
                let power = rug::ops::Pow::pow(Float::with_val(bits, omega), m as u32);
                error += Float::with_val(53, &power * e).abs();
                value += power * x;
            }
            let found = relation(&value, &error, basis)?;
            spare = spare.min(found.spare_digits);
            traces.iter_mut().zip(found.coefficients).for_each(|(list, c)| list.push(c));
        }
        let coefficients = traces.iter().map(|list| self.solve(list)).collect::<Option<Vec<_>>>()?;
        Some((coefficients, spare))
    }

    /// log₁₀ of the largest integer in the integer relations that `coefficients` ([basis][power]) make.
    pub fn height(&self, coefficients: &[Vec<Rational>]) -> f64 {
        let traces: Vec<Vec<Rational>> = coefficients.iter().map(|value| self.of(value)).collect();
        (0..self.degree)
            .map(|m| {
                let denominator = traces.iter().fold(Integer::from(1), |lcm, list| lcm.lcm(list[m].denom()));
                let top = traces
                    .iter()
                    .map(|list| Rational::from(&list[m] * &denominator).abs().numer().clone())
                    .chain([denominator.clone()])
                    .max()
                    .unwrap_or_default();
                Float::with_val(53, top).log10().to_f64()
            })
            .fold(0.0, f64::max)
    }
}

#[cfg(test)]
mod tests {
    use super::{Float, Rational, Traces};

    /// ω³ − 40ω² + 464ω − 1600 (L = 8, M = 4, formulas §1): planted coefficients come back.
    #[test]
    fn a_planted_combination_is_recognised() {
        let minimal: Vec<Rational> = [-1600, 464, -40, 1].map(Rational::from).to_vec();
        let traces = Traces::new(&minimal);
        let bits = 700;
        let omegas: Vec<Float> = [6.5, 10.9, 22.6]
            .into_iter()
            .map(|start| {
                let mut x = Float::with_val(bits, start);
                for _ in 0..60 {
                    let f = ((x.clone() - 40u32) * &x + 464u32) * &x - 1600u32;
                    let slope = (x.clone() * 3u32 - 80u32) * &x + 464u32;
                    x -= f / slope;
                }
                x
            })
            .collect();
        assert_eq!(traces.of(&[Rational::new(), Rational::from(1), Rational::new()])[0], 40);
        let basis = [Float::with_val(bits, 1), Float::with_val(bits, Float::zeta_u(3))];
        let planted = vec![
            vec![Rational::from((7, 2)), Rational::from(-3), Rational::from((5, 16))],
            vec![Rational::from(12), Rational::new(), Rational::from((-1, 4))],
        ];
        let values: Vec<Float> = omegas
            .iter()
            .map(|omega| {
                let at = |list: &[Rational]| list.iter().rev().fold(Float::new(bits), |sum, c| sum * omega + c);
                at(&planted[0]) + at(&planted[1]) * &basis[1]
            })
            .collect();
        let errors = vec![Float::with_val(53, Float::i_exp(1, -500)); 3];
        let (found, spare) = traces.recognise(&omegas, &values, &errors, &basis).unwrap();
        assert_eq!(found, planted);
        assert!(spare > 80.0);
        assert!(traces.height(&planted) > 1.0);
    }
}
