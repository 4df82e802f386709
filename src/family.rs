//! Operator families (L, M) and the number of their primaries (formulas §0).

use crate::error::{Error, Result};
use rug::Integer;
use std::fmt;

/// The largest length accepted; beyond it nothing here is feasible and a typo is likelier.
pub const LONGEST: usize = 200;

/// Single traces of `length` scalars, `magnons` of them of the second flavour.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct Family {
    /// L, the number of fields in the trace.
    pub length: usize,
    /// M, the number of fields of the second flavour, 0 ≤ M ≤ L/2.
    pub magnons: usize,
}

impl Family {
    /// The family (L, M), checked.
    ///
    /// # Errors
    /// L < 2, L above [`LONGEST`], M > L/2, or M = 1 (which has no primary).
    pub fn new(length: usize, magnons: usize) -> Result<Family> {
        let family = Family { length, magnons };
        if length < 2 {
            return Err(Error::input(format!(
                "family {family}: the length L = {length} is below 2, and a single trace of SU(N) needs at least two fields; give L >= 2"
            )));
        }
        if length > LONGEST {
            return Err(Error::input(format!(
                "family {family}: the length L = {length} is above the largest length accepted, {LONGEST}; give a smaller L"
            )));
        }
        if 2 * magnons > length {
            return Err(Error::input(format!(
                "family {family}: M = {magnons} is more than L/2 = {}; highest-weight states have M <= L/2, so exchange the two flavours and give M = {}",
                length as f64 / 2.0,
                length.saturating_sub(magnons)
            )));
        }
        if magnons == 1 {
            return Err(Error::input(format!(
                "family {family}: one magnon (M = 1) with zero total momentum is a descendant of the protected state, so the family has no primary; give M = 0 or M >= 2"
            )));
        }
        Ok(family)
    }

    /// The number of primaries, necklaces(L, M) − necklaces(L, M−1).
    pub fn primaries(&self) -> Integer {
        let all = necklaces(self.length, self.magnons);
        if self.magnons == 0 { all } else { all - necklaces(self.length, self.magnons - 1) }
    }

    /// Whether the family is the protected one, M = 0.
    pub fn is_protected(&self) -> bool {
        self.magnons == 0
    }
}

impl fmt::Display for Family {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "({}, {})", self.length, self.magnons)
    }
}

/// The number of two-colour necklaces with `length` beads, `magnons` of the second colour:
/// (1/L) Σ_{d | gcd(L, M)} φ(d) binom(L/d, M/d) (Burnside's lemma).
pub fn necklaces(length: usize, magnons: usize) -> Integer {
    if length == 0 {
        return Integer::from(1);
    }
    let common = gcd(length, magnons);
    let mut sum = Integer::new();
    for d in (1..=common).filter(|d| common.is_multiple_of(*d)) {
        let choices = Integer::from(Integer::binomial_u((length / d) as u32, (magnons / d) as u32));
        sum += choices * totient(d);
    }
    sum / length as u32
}

fn gcd(a: usize, b: usize) -> usize {
    if b == 0 { a } else { gcd(b, a % b) }
}

fn totient(n: usize) -> u32 {
    (1..=n).filter(|&k| gcd(k, n) == 1).count() as u32
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Counts of primaries: formulas §6 (necklace formula; L = 6 also BO).
    #[test]
    fn counts_of_primaries() {
        for (length, counts) in [
            (4, vec![1]),
            (5, vec![1]),
            (6, vec![2, 1]),
            (7, vec![2, 2]),
            (8, vec![3, 3, 3]),
            (9, vec![3, 6, 4]),
            (10, vec![4, 7, 10, 4]),
            (12, vec![5, 13, 24, 23, 14]),
        ] {
            for (index, count) in counts.into_iter().enumerate() {
                assert_eq!(Family::new(length, index + 2).unwrap().primaries(), count);
            }
        }
        assert_eq!(Family::new(7, 0).unwrap().primaries(), 1);
    }

    #[test]
    fn bad_families_are_refused_with_the_rule_and_the_remedy() {
        for (length, magnons, rule) in
            [(1, 0, "below 2"), (201, 2, "largest length"), (6, 4, "M <= L/2"), (6, 1, "descendant")]
        {
            let error = Family::new(length, magnons).unwrap_err();
            assert_eq!(error.exit_code(), 2);
            assert!(error.to_string().contains(rule), "{error}");
        }
    }
}
