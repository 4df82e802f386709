//! Multiple zeta values ζ_{a,b,…} = Σ_{k₁>k₂>…} k₁^{−a} k₂^{−b} … to any number of digits.
//!
//! The iterated integral over 0 < t < 1 is cut at t = ½: ζ(w) = Σ_{w = uv} I(ũ) I(v), where ũ is the
//! dual word (reversed, letters exchanged) and I(v) = Σ_{k₁>k₂>…} 2^{−k₁} k₁^{−a} … for the word of
//! a, b, …; one bit per term, so the cost is linear in bits² for each of the weight + 1 cuts.

use rug::{Float, Integer};

/// The value to `bits` bits (a few guard bits more are carried).
///
/// The first argument must be at least 2 and none may be 0; otherwise the sum diverges and NaN is returned.
pub fn multiple_zeta(arguments: &[u32], bits: u32) -> Float {
    if arguments.is_empty() || arguments[0] < 2 || arguments.contains(&0) {
        return Float::with_val(bits, rug::float::Special::Nan);
    }
    if let [single] = arguments {
        return Float::with_val(bits, Float::zeta_u(*single));
    }
    // Letters: false = dt/t, true = dt/(1−t), outermost first.
    let word: Vec<bool> = arguments.iter().flat_map(|&a| (1..a).map(|_| false).chain([true])).collect();
    let guard = bits + 32;
    let mut sum = Integer::new();
    for cut in 0..=word.len() {
        let dual: Vec<bool> = word[..cut].iter().rev().map(|letter| !letter).collect();
        sum += (at_half(&dual, guard) * at_half(&word[cut..], guard)) >> guard;
    }
    Float::with_val(bits, sum) >> guard
}

/// I(word) at ½ times 2^bits, rounded down; the empty word gives 1.
fn at_half(word: &[bool], bits: u32) -> Integer {
    let one = Integer::from(1) << bits;
    if word.is_empty() {
        return one;
    }
    let mut exponents = Vec::new();
    let mut run = 0u32;
    for &letter in word {
        run += 1;
        if letter {
            exponents.push(run);
            run = 0;
        }
    }
    // inner[i] = Σ over k > k_{i+1} > … of the factors from the i-th on.
    let depth = exponents.len();
    let mut inner = vec![Integer::new(); depth + 1];
    inner[depth] = one;
    let mut total = Integer::new();
    for k in 1..=bits {
        for i in 0..depth {
            let mut term = inner[i + 1].clone();
            for _ in 0..exponents[i] {
                term /= k;
            }
            if i == 0 {
                total += term >> k;
            } else {
                inner[i] += term;
            }
        }
    }
    total
}

#[cfg(test)]
mod tests {
    use super::{Float, multiple_zeta};

    fn close(a: &Float, b: &Float) -> bool {
        Float::with_val(200, a - b).abs() < Float::with_val(200, Float::i_exp(1, -180))
    }

    /// Euler: ζ_{2,1} = ζ3; ζ_{3,1} = ζ4/4; and the stuffle product
    /// ζ5 ζ3 = ζ_{5,3} + ζ_{3,5} + ζ8, ζ3 ζ_{5,3} = ζ_{3,5,3} + 2ζ_{5,3,3} + ζ_{8,3} + ζ_{5,6}.
    #[test]
    fn euler_and_stuffle_relations() {
        let z = |arguments: &[u32]| multiple_zeta(arguments, 200);
        assert!(close(&z(&[2, 1]), &z(&[3])));
        assert!(close(&z(&[3, 1]), &(z(&[4]) / 4u32)));
        assert!(close(&(z(&[5]) * z(&[3])), &(z(&[5, 3]) + z(&[3, 5]) + z(&[8]))));
        let right = z(&[3, 5, 3]) + 2u32 * z(&[5, 3, 3]) + z(&[8, 3]) + z(&[5, 6]);
        assert!(close(&(z(&[3]) * z(&[5, 3])), &right));
        assert!(multiple_zeta(&[1, 3], 100).is_nan());
    }
}
