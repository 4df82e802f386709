//! The lift of a one-loop pair is unique: at every order of h the corrections solve the same L × L
//! linear system (formulas §3), and its determinant is shown not to vanish.

use super::field::Field;
use super::modular::{Modular, Prime};
use super::poly::{Poly, ratio};

/// Primes tried; the first with a root of the field's polynomial decides unless the determinant
/// happens to vanish there.
const TRIALS: usize = 400;

/// Whether the system for δQ₁ (v⁰ … v^{M−1}) and δQ₂ (v⁰ … v^{L−M} without v^M) is shown to be
/// invertible: its image under K → F_p, y → a root of the minimal polynomial, has a nonzero
/// determinant, so it has one itself. `false` says that no such prime was found.
pub fn unique_lift(field: &Field, q1: &Poly, q2: &Poly) -> bool {
    let columns = system(field, q1, q2);
    let size = columns.len();
    let minimal = field.minimal();
    let primes =
        (1_000_003u64..).step_by(2).filter(|&n| (3..).step_by(2).take_while(|d| d * d <= n).all(|d| n % d != 0));
    for p in primes.take(TRIALS).map(Prime) {
        let image = p.reduce(&minimal);
        if !p.squarefree(&image) {
            continue;
        }
        let Some(root) = root(p, &image) else { continue };
        let rows: Option<Vec<Modular>> =
            (0..size).map(|i| columns.iter().map(|column| image_of(p, root, column, i)).collect()).collect();
        if rows.is_some_and(|rows| invertible(p, rows)) {
            return true;
        }
    }
    false
}

/// v-polynomials Q₁⁺δQ₂⁻ − … for each unknown.
fn system(field: &Field, q1: &Poly, q2: &Poly) -> Vec<Poly> {
    let half = |p: &Poly, n: i64| p.shift(&ratio(n, 2));
    let (m, top) = (q1.len() - 1, q2.len() - 1);
    let first = (0..m).map(|j| {
        let power = Poly::one().times_power(j);
        field.dot(&[(&half(&power, 1), &half(q2, -1)), (&half(&power, -1).negate(), &half(q2, 1))], usize::MAX)
    });
    let second = (0..top).filter(|&j| j != m).map(|j| {
        let power = Poly::one().times_power(j);
        field.dot(&[(&half(q1, 1), &half(&power, -1)), (&half(q1, -1).negate(), &half(&power, 1))], usize::MAX)
    });
    first.chain(second).collect()
}

/// A root of a squarefree polynomial modulo p.
fn root(p: Prime, f: &[u64]) -> Option<u64> {
    let (degree, linear) = p.by_degree(f).into_iter().next()?;
    if degree != 1 {
        return None;
    }
    let factor = p.split(&linear, 1).into_iter().next()?;
    Some(p.sub(0, *factor.first()?))
}

/// The coefficient of v^i at y = root; `None` when p divides the denominator.
fn image_of(p: Prime, root: u64, poly: &Poly, i: usize) -> Option<u64> {
    let denominator = p.residue(poly.denominator());
    let entries = poly.coefficients().get(i).map_or(&[][..], Vec::as_slice);
    let value = entries.iter().rev().fold(0, |value, c| (p.mul(value, root) + p.residue(c)) % p.0);
    (denominator != 0).then(|| p.mul(value, p.inverse(denominator)))
}

fn invertible(p: Prime, mut rows: Vec<Modular>) -> bool {
    for k in 0..rows.len() {
        let Some(pivot) = (k..rows.len()).find(|&i| rows[i][k] != 0) else { return false };
        rows.swap(k, pivot);
        let inverse = p.inverse(rows[k][k]);
        let row = rows[k].clone();
        for other in &mut rows[k + 1..] {
            let factor = p.mul(other[k], inverse);
            for (target, entry) in other.iter_mut().zip(&row).skip(k) {
                *target = p.sub(*target, p.mul(factor, *entry));
            }
        }
    }
    true
}

#[cfg(test)]
mod tests {
    use super::unique_lift;
    use crate::audit::field::Field;
    use crate::audit::poly::{Poly, ratio};

    #[test]
    fn a_physical_state_has_one_lift_and_a_degenerate_pair_has_not() {
        let field = Field::new(&[ratio(-12, 1), ratio(1, 1)]);
        let q1 = Poly::from_rationals(&[ratio(1, 12), ratio(0, 1), ratio(1, 1)]);
        let q2 = Poly::from_rationals(&[ratio(0, 1), ratio(-1, 4), ratio(0, 1), ratio(1, 1)]);
        assert!(unique_lift(&field, &q1, &q2));
        // Common roots ½ and −½ make the left side vanish at v = 0 whatever the corrections are.
        let common = Poly::from_rationals(&[ratio(-1, 4), ratio(0, 1), ratio(1, 1)]);
        assert!(!unique_lift(&field, &common, &common.times_power(1)));
    }
}
