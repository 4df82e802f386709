//! The transfer matrix T = tr₀ Π_k (x + P_{0k}), x = v − ½, acting on cyclic states (formulas §1).

use super::necklace::{Configuration, Necklaces};
use std::collections::HashMap;

/// T_j ψ for j = 0 … L, where T = Σ T_j x^j: the action on a cyclic state given on necklaces.
///
/// Site by site on functions of the sector's configurations together with the auxiliary spin;
/// about 2 · binom(L+1, M) · L² integer additions, as many 16-byte integers / L of memory.
pub fn apply(necklaces: &Necklaces, state: &[i128]) -> Vec<Vec<i128>> {
    let length = necklaces.family().length;
    let mut result = vec![vec![0i128; necklaces.len()]; length + 1];
    for spin in [0, 1] {
        add_trace_part(necklaces, state, spin, &mut result);
    }
    result
}

/// Adds the part of the trace with auxiliary spin `spin` at both ends.
fn add_trace_part(necklaces: &Necklaces, state: &[i128], spin: Configuration, result: &mut [Vec<i128>]) {
    let length = necklaces.family().length;
    let width = length + 1;
    // A word holds the chain in its low bits and the auxiliary spin in bit `length`.
    let words = words_with(width, necklaces.family().magnons + spin as usize);
    let index: HashMap<Configuration, usize> = words.iter().enumerate().map(|(i, w)| (*w, i)).collect();
    // F(word) = Σ_j F_j x^j, starting from ψ where the auxiliary spin is right.
    let mut values = vec![0i128; words.len() * width];
    for (i, word) in words.iter().enumerate() {
        if word >> length == spin {
            values[i * width] = state[necklaces.position(word & !(1 << length))];
        }
    }
    for site in (0..length).rev() {
        // Degrees after this step are at most length − site.
        let top = length - site;
        for (i, word) in words.iter().enumerate() {
            let (here, auxiliary) = ((word >> site) & 1, word >> length);
            if here == auxiliary {
                // The exchange changes nothing: multiply by x + 1.
                let own = &mut values[i * width..i * width + top + 1];
                for j in (1..=top).rev() {
                    own[j] += own[j - 1];
                }
            } else if auxiliary == 0 {
                // A pair of words that the exchange maps to each other.
                let partner = index[&(word ^ (1 << site) ^ (1 << length))];
                for j in (0..=top).rev() {
                    let (a, b) = (values[i * width + j], values[partner * width + j]);
                    let below = j.checked_sub(1);
                    let (a_below, b_below) =
                        below.map_or((0, 0), |k| (values[i * width + k], values[partner * width + k]));
                    values[i * width + j] = a_below + b;
                    values[partner * width + j] = b_below + a;
                }
            }
        }
    }
    for (row, representative) in necklaces.representatives().iter().enumerate() {
        let start = index[&(representative | (spin << length))] * width;
        for (j, target) in result.iter_mut().enumerate() {
            target[row] += values[start + j];
        }
    }
}

/// All words of `width` bits with `ones` bits set, ascending.
fn words_with(width: usize, ones: usize) -> Vec<Configuration> {
    if ones == 0 {
        return vec![0];
    }
    if ones > width {
        return Vec::new();
    }
    let limit: Configuration = 1 << width;
    let mut word: Configuration = (1 << ones) - 1;
    let mut list = Vec::new();
    while word < limit {
        list.push(word);
        // Gosper's step to the next word with as many ones.
        let low = word & word.wrapping_neg();
        let carried = word + low;
        word = (((carried ^ word) >> 2) / low) | carried;
    }
    list
}
