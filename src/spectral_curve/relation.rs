//! Integer relations by lattice reduction.

use crate::algebra::flint::lattice::reduce;
use rug::{Float, Integer, Rational};

/// value = Σ coefficients · basis, found and confirmed.
#[derive(Clone, Debug)]
pub struct Relation {
    /// One rational for each basis number.
    pub coefficients: Vec<Rational>,
    /// Decimal digits by which the agreement exceeds what some relation with coefficients of this
    /// size would reach by chance.
    pub spare_digits: f64,
}

/// Digits kept out of the fit, to be predicted by it.
const RESERVED: f64 = 30.0;

/// Seeks c₀ value + Σ c_i basis_i = 0 in integers, `value` being known to within `error`.
///
/// The lattice is reduced with [`RESERVED`] digits fewer than known. The shortest vector counts as a
/// relation when it holds with all digits; with C the largest |c|, n + 1 numbers and agreement to
/// within ρ, the (2C+1)^{n+1} candidates reach ρ/(C·largest number) by chance, which gives the
/// spare digits: log₁₀(C·largest/ρ) − (n+1) log₁₀(2C+1). Cost: one reduction in n + 2 dimensions.
pub fn relation(value: &Float, error: &Float, basis: &[Float]) -> Option<Relation> {
    let known = -(error.get_exp()?);
    let fit = known - (RESERVED * std::f64::consts::LOG2_10) as i32;
    if fit < 32 {
        return None;
    }
    let bits = value.prec().max(known.unsigned_abs() + 64);
    let numbers: Vec<&Float> = std::iter::once(value).chain(basis).collect();
    let n = numbers.len();
    let rows: Vec<Vec<Integer>> = numbers
        .iter()
        .enumerate()
        .map(|(i, number)| {
            let scaled = (Float::with_val(bits, *number) << fit).to_integer().unwrap_or_default();
            (0..n).map(|j| Integer::from(i32::from(i == j))).chain([scaled]).collect()
        })
        .collect();
    let reduced = reduce(&rows);
    let vector = reduced.iter().min_by_key(|row| row.iter().map(|x| Integer::from(x * x)).sum::<Integer>())?;
    if vector[0] == 0 {
        return None;
    }
    let mut sum = Float::new(bits);
    let mut largest = Float::new(53);
    for (c, number) in vector.iter().zip(&numbers) {
        sum += Float::with_val(bits, *number * c);
        let size = Float::with_val(53, number.abs_ref());
        if size > largest {
            largest = size;
        }
    }
    let allowed = Float::with_val(53, error * &vector[0]).abs();
    let reached = Float::with_val(53, sum.abs_ref());
    if reached > Float::with_val(53, &allowed * 4u32) {
        return None;
    }
    let top = vector[..n].iter().map(|c| Integer::from(c.abs_ref())).max()?;
    let log = |x: &Float| Float::with_val(53, x.log10_ref()).to_f64();
    let size = Float::with_val(53, &top);
    let candidates = Float::with_val(53, Integer::from(&top * 2u32) + 1u32);
    let spare = log(&size) + log(&largest) - log(&allowed) - n as f64 * log(&candidates);
    let denominator = -vector[0].clone();
    let coefficients = vector[1..n].iter().map(|c| Rational::from((c.clone(), denominator.clone()))).collect();
    Some(Relation { coefficients, spare_digits: spare })
}

#[cfg(test)]
mod tests {
    use super::{Float, Rational, relation};

    fn numbers(bits: u32) -> Vec<Float> {
        [1u32, 3, 5, 7]
            .into_iter()
            .map(|k| if k == 1 { Float::with_val(bits, 1) } else { Float::with_val(bits, Float::zeta_u(k)) })
            .collect()
    }

    #[test]
    fn finds_a_planted_relation_and_no_other() {
        let basis = numbers(600);
        let planted =
            [Rational::from((-2496, 1)), Rational::from((1153, 2)), Rational::from((-1440, 7)), Rational::new()];
        let mut value = Float::new(600);
        for (c, b) in planted.iter().zip(&basis) {
            value += Float::with_val(600, b * c);
        }
        let error = Float::with_val(53, Float::i_exp(1, -400));
        let found = relation(&value, &error, &basis).unwrap();
        assert_eq!(found.coefficients, planted);
        assert!(found.spare_digits > 80.0, "{}", found.spare_digits);
        // √2 is no small combination: either nothing, or nothing to spare.
        let other = Float::with_val(600, 2).sqrt();
        assert!(relation(&other, &error, &basis).is_none_or(|r| r.spare_digits < 30.0));
    }
}
