//! Zeta values and multiple zeta values as intervals of any width.
//!
//! A multiple zeta value ζ_{a,b,…} = Σ_{k₁>k₂>…} k₁^{−a} k₂^{−b} … is the iterated integral from 0
//! to 1 of the word x₀^{a−1} x₁ x₀^{b−1} x₁ …, x₀ = dt/t, x₁ = dt/(1−t), outermost letter first.
//! Cut the path at ½ and reflect the upper half by t → 1−t, which exchanges x₀ and x₁ and reverses
//! the word (Hölder convolution; Borwein, Bradley, Broadhurst, Lisonek, math/9910045):
//!   ζ(w) = Σ_{w = uv} Li_{dual(u)}(½) · Li_v(½),
//! and every Li(½) is a nested sum of positive terms that falls like 2^{−n}. Cost: O(bits · weight²)
//! interval operations.

use super::interval::Interval;
use crate::record::Zeta;
use rug::{Float, Rational, float::Round};
use std::cell::RefCell;
use std::collections::HashMap;

/// Zeta values computed so far, by argument and precision.
#[derive(Default)]
pub struct Constants {
    known: RefCell<HashMap<(Zeta, u32), Interval>>,
}

impl Constants {
    /// The value of one factor to about `bits` bits.
    pub fn value(&self, zeta: &Zeta, bits: u32) -> Interval {
        let key = (zeta.clone(), bits);
        if let Some(known) = self.known.borrow().get(&key) {
            return known.clone();
        }
        let value = match zeta {
            Zeta::Single(k) => Interval::zeta(*k, bits),
            Zeta::Multiple(arguments) => multiple(arguments, bits),
        };
        self.known.borrow_mut().insert(key, value.clone());
        value
    }

    /// The value of a product.
    pub fn product(&self, factors: &[Zeta], bits: u32) -> Interval {
        factors.iter().fold(Interval::from_rational(&Rational::from(1), bits), |product, zeta| {
            product.mul(&self.value(zeta, bits))
        })
    }
}

/// ζ_{a,b,…}, a ≥ 2.
fn multiple(arguments: &[u32], bits: u32) -> Interval {
    // true stands for x₁.
    let mut word = Vec::new();
    for &argument in arguments {
        word.extend(std::iter::repeat_n(false, argument.saturating_sub(1) as usize));
        word.push(true);
    }
    let mut sum = Interval::zero(bits);
    for cut in 0..=word.len() {
        let dual: Vec<bool> = word[..cut].iter().rev().map(|letter| !letter).collect();
        sum = sum.add(&polylogarithm_at_half(&dual, bits).mul(&polylogarithm_at_half(&word[cut..], bits)));
    }
    sum
}

/// The iterated integral of `word` from 0 to ½; the word is empty or ends in x₁.
fn polylogarithm_at_half(word: &[bool], bits: u32) -> Interval {
    let one = Interval::from_rational(&Rational::from(1), bits);
    if word.is_empty() {
        return one;
    }
    // Exponents s₁, s₂, … of Σ_{n₁>n₂>…} 2^{−n₁} n₁^{−s₁} n₂^{−s₂} ….
    let mut exponents = Vec::new();
    let mut run = 1u32;
    for &letter in word {
        if letter {
            exponents.push(run);
            run = 1;
        } else {
            run += 1;
        }
    }
    let depth = exponents.len();
    let last = bits + 16 * depth as u32 + 8;
    // inner[d] = Σ over n_{d+1} < n of the nested sum that starts at level d+1; inner[depth] = 1.
    let mut inner = vec![Interval::zero(bits); depth];
    inner.push(one.clone());
    let mut power = one.clone();
    let half = Interval::from_rational(&Rational::from((1, 2)), bits);
    let mut sum = Interval::zero(bits);
    for n in 1..=last {
        power = power.mul(&half);
        let inverse = Interval::from_rational(&Rational::from((1, n)), bits);
        // Ascending levels: level d uses the sums below n of level d+1, not yet updated for n.
        for level in 0..depth {
            let mut term = inner[level + 1].clone();
            for _ in 0..exponents[level] {
                term = term.mul(&inverse);
            }
            if level == 0 {
                sum = sum.add(&term.mul(&power));
            } else {
                inner[level] = inner[level].add(&term);
            }
        }
    }
    // The terms beyond `last` are below 2^{−n} n^{depth−1} each, and that falls by 3/4 or faster.
    let next = Float::with_val(64, last + 1);
    let mut tail = Float::with_val(64, 4) >> (last + 1);
    for _ in 1..depth {
        tail = Float::with_val_round(64, &tail * &next, Round::Up).0;
    }
    sum.add(&Interval::between(Float::new(bits), tail))
}

#[cfg(test)]
mod tests {
    use super::Constants;
    use crate::record::Zeta::{Multiple, Single};
    use rug::Rational;

    /// Euler: ζ_{2,1} = ζ3; stuffle product: ζ3 ζ5 = ζ_{3,5} + ζ_{5,3} + ζ8; depth 3 by the stuffle
    /// product ζ3 ζ_{5,3} = ζ_{3,5,3} + 2 ζ_{5,3,3} + ζ_{8,3} + ζ_{5,6}.
    #[test]
    fn identities_between_values() {
        let constants = Constants::default();
        let value = |zeta| constants.value(&zeta, 200);
        assert!(value(Multiple(vec![2, 1])).sub(&value(Single(3))).has_zero());
        let sum = value(Multiple(vec![3, 5])).add(&value(Multiple(vec![5, 3]))).add(&value(Single(8)));
        let difference = constants.product(&[Single(3), Single(5)], 200).sub(&sum);
        assert!(difference.has_zero() && difference.width() < 1e-50, "{difference:?}");
        let two = super::Interval::from_rational(&Rational::from(2), 200);
        let sum = value(Multiple(vec![3, 5, 3]))
            .add(&two.mul(&value(Multiple(vec![5, 3, 3]))))
            .add(&value(Multiple(vec![8, 3])))
            .add(&value(Multiple(vec![5, 6])));
        let difference = constants.product(&[Single(3), Multiple(vec![5, 3])], 200).sub(&sum);
        assert!(difference.has_zero() && difference.width() < 1e-50, "{difference:?}");
    }

    /// ζ3 is Apéry's constant 1.2020569031595942853997…; ζ_{5,3} = 0.037707672984847544…  (from memory;
    /// supported by the identities above).
    #[test]
    fn values() {
        let constants = Constants::default();
        assert_eq!(constants.value(&Single(3), 120).decimal(23).as_deref(), Some("1.2020569031595942853997"));
        assert_eq!(constants.value(&Multiple(vec![5, 3]), 120).decimal(17).as_deref(), Some("0.037707672984847544"));
    }
}
