//! The leading finite-size (wrapping) term at order h^L (formulas §5; BJ, B06).

pub mod singular;
pub mod sum;
pub mod twisted;

use crate::algebra::ring::Ring;
use crate::baxter::Pair;
use crate::error::{Error, Result};
use crate::family::Family;

/// The leading finite-size term of one state.
#[derive(Clone, Debug, PartialEq)]
pub struct FiniteSize<E> {
    /// The part without zeta values.
    pub constant: E,
    /// Coefficients of ζ3, ζ5, …, ζ(2L−3).
    pub zetas: Vec<E>,
}

/// The finite-size term from the one-loop pair: for singular states the twist limit.
///
/// # Errors
/// Even zeta values, ζ(1) or ζ(2L−1) that do not cancel (a check), or a non-unit.
pub fn leading<R: Ring>(ring: &R, family: Family, pair: &Pair<R::Elem>, singular: bool) -> Result<FiniteSize<R::Elem>> {
    if singular {
        singular::leading(ring, family, pair)
    } else {
        let one = ring.one();
        let term = sum::twisted_sum(ring, family.length, &pair.q1, &one, &one)?;
        let zetas = odd_zetas(ring, family, term.zetas)?;
        Ok(FiniteSize { constant: term.constant, zetas })
    }
}

/// From the coefficients of ζ(1), ζ(2), …, ζ(2L−1) those of ζ3, ζ5, …, ζ(2L−3); the others must vanish.
pub(crate) fn odd_zetas<R: Ring>(ring: &R, family: Family, all: Vec<R::Elem>) -> Result<Vec<R::Elem>> {
    let mut kept = Vec::new();
    for (index, value) in all.into_iter().enumerate() {
        let k = index + 1;
        if k % 2 == 1 && k >= 3 && k + 3 <= 2 * family.length {
            kept.push(value);
        } else if !ring.is_zero(&value) {
            return Err(Error::check(format!(
                "family {family}: the finite-size term contains zeta({k}), which cancels for every state; please report this family"
            )));
        }
    }
    Ok(kept)
}
