//! The charges P_r of a lifted Q₁, singular states included, together with the potential they
//! imply (formulas §2 and §3).

use super::field::Field;
use super::graded::Graded;
use super::poly::{Poly, binomial, ratio};
use super::potential::Potential;
use num_bigint::BigInt;
use num_rational::BigRational;

/// P_r and W of one state.
pub struct Charges {
    /// P_r at index r (index 0 unused): P₁ through the last order, P_r as far as W needs it.
    pub charges: Vec<Graded>,
    /// W from these charges.
    pub potential: Potential,
}

/// What is special about a state with one-loop roots ±½.
struct Singular {
    /// ½ + c is the exact root near ½.
    c: Graded,
    /// G, without the factor 1/W(1+c).
    ratio: Graded,
    /// The number of orders wanted in the end.
    orders: usize,
}

/// The charges from Q₁ (a series of polynomials in v, orders 0 … `orders`−1).
///
/// # Errors
/// Names the quantity that has no inverse; this never happens for a physical state.
pub fn charges(field: &Field, length: usize, q1: &Graded, orders: usize) -> Result<Charges, String> {
    let half = ratio(1, 2);
    let plus = q1.map(|q| q.shift(&-half.clone())).coefficients(2); // around −½: enters S⁺
    let minus = q1.map(|q| q.shift(&half)).coefficients(2); // around +½: enters S⁻
    let zero = (plus[0].leading().is_zero(), minus[0].leading().is_zero());
    if zero.0 != zero.1 {
        return Err("Q1 vanishes at one of v = ±1/2 only".into());
    }
    if !zero.0 {
        let sums = regular(field, &plus, &minus, orders)?;
        let potential = Potential::new(field, length, &sums, orders);
        return Ok(Charges { charges: sums, potential });
    }
    let (c, left) = split(field, &minus, orders)?;
    let (_, right) = split(field, &plus, orders)?;
    let sums = regular(field, &right, &left, orders)?;
    let numerator = evaluate(field, &minus, &Graded::constant(Poly::one()).add(&c), orders);
    let denominator = evaluate(field, &right, &c, orders);
    let inverse = denominator.inverse(field, orders).ok_or("Q1 has a double root at v = -1/2")?;
    let singular = Singular { ratio: numerator.mul(field, &inverse, orders), c, orders };
    // W through order n needs the charges through order n − 3 only, so each round gains three orders.
    let mut known = orders.min(3);
    let mut potential = Potential::new(field, length, &[], known);
    loop {
        let corrected = singular.correct(field, &sums, &potential, known)?;
        if known == orders {
            return Ok(Charges { charges: corrected, potential });
        }
        known = orders.min(known + 3);
        potential = Potential::new(field, length, &corrected, known);
    }
}

/// How many orders of P_r are needed when P₁ is needed below `orders`: C_{1r} starts at h^{r+1}.
fn needed(r: usize, orders: usize) -> usize {
    if r == 1 { orders } else { orders.saturating_sub(r + 1) }
}

/// P_r = Σ_i y_{r,i} h^i (S⁺_{r+2i} − S⁻_{r+2i}), with Y^{−r} = Σ_i y_{r,i} h^i w^{−r−2i} and
/// S_m = −[w^{m−1}] A'/A, where A is Q₁ (or what is left of it) around −½ for S⁺, ½ for S⁻.
fn regular(field: &Field, plus: &[Graded], minus: &[Graded], orders: usize) -> Result<Vec<Graded>, String> {
    let count = 2 * orders;
    let s_minus = logarithmic(field, minus, count, orders)?;
    // For an even or odd polynomial the two differ by signs only.
    let mirrored = plus.len() == minus.len()
        && plus
            .iter()
            .zip(minus)
            .enumerate()
            .all(|(j, (a, b))| *a == b.scale(&ratio(if (j + plus.len()).is_multiple_of(2) { -1 } else { 1 }, 1)));
    let s_plus = if mirrored {
        s_minus.iter().enumerate().map(|(k, s)| s.scale(&ratio(if k % 2 == 0 { -1 } else { 1 }, 1))).collect()
    } else {
        logarithmic(field, plus, count, orders)?
    };
    let mut charges = vec![Graded::zero()];
    for r in 1..orders.max(2) {
        let limit = needed(r, orders);
        let mut charge = Graded::zero();
        for i in 0..limit {
            let k = r + 2 * i - 1;
            let top = r + 2 * i;
            let sign = if i % 2 == 0 { r as i64 } else { -(r as i64) };
            let y = BigRational::new(binomial(top as i64, i) * sign, BigInt::from(top));
            let difference = s_minus[k].sub(&s_plus[k]);
            charge = charge.add(&difference.times_h(i, limit).scale(&y));
        }
        charges.push(charge);
    }
    Ok(charges)
}

/// The coefficients of A'/A; the k-th below order `orders` − ⌊k/2⌋, which is all that is used.
fn logarithmic(field: &Field, a: &[Graded], count: usize, orders: usize) -> Result<Vec<Graded>, String> {
    let inverse = a[0].inverse(field, orders).ok_or("Q1(±1/2) has no inverse")?;
    let normalised: Vec<Graded> = a.iter().map(|c| c.mul(field, &inverse, orders)).collect();
    let negative: Vec<Graded> = normalised.iter().map(|c| c.scale(&ratio(-1, 1))).collect();
    let mut result: Vec<Graded> = Vec::with_capacity(count);
    for k in 0..count {
        let limit = orders.saturating_sub(k / 2);
        let pairs: Vec<_> = (1..=k.min(a.len() - 1)).map(|j| (&negative[j], &result[k - j])).collect();
        let mut next = Graded::dot(field, &pairs, limit);
        if let Some(top) = normalised.get(k + 1) {
            next = next.add(&top.truncate(limit).scale(&ratio(k as i64 + 1, 1)));
        }
        result.push(next);
    }
    Ok(result)
}

/// The root c = O(h) of Σ a_j w^j, and the quotient by (w − c).
fn split(field: &Field, a: &[Graded], orders: usize) -> Result<(Graded, Vec<Graded>), String> {
    let slope = field.inverse(&a[1].leading()).ok_or("Q1 has a double root at v = ±1/2")?;
    let step = Graded::constant(slope.negate());
    let mut c = Graded::zero();
    for known in 1..=orders {
        let value = evaluate(field, a, &c, known);
        c = c.add(&value.mul(field, &step, known));
    }
    let mut quotient = vec![Graded::zero(); a.len() - 1];
    let mut carry = Graded::zero();
    for j in (1..a.len()).rev() {
        carry = carry.mul(field, &c, orders).add(&a[j]);
        quotient[j - 1] = carry.clone();
    }
    Ok((c, quotient))
}

/// Σ a_j w^j at a series w.
fn evaluate(field: &Field, a: &[Graded], w: &Graded, orders: usize) -> Graded {
    let mut value = Graded::zero();
    for coefficient in a.iter().rev() {
        value = value.mul(field, w, orders).add(&coefficient.truncate(orders));
    }
    value
}

impl Singular {
    /// P_r − r G Σ_k w_k(h) F_{k−r}(c) over k − r ≥ 1, orders below `known`.
    fn correct(
        &self,
        field: &Field,
        sums: &[Graded],
        potential: &Potential,
        known: usize,
    ) -> Result<Vec<Graded>, String> {
        let point = Graded::constant(Poly::one()).add(&self.c);
        let value = potential.polynomial(field, known).at(field, &point, known);
        let inverse = value.inverse(field, known).ok_or("W(1) has no inverse")?;
        let g = self.ratio.mul(field, &inverse, known);
        let c = self.c.truncate(known);
        let mut f = vec![Graded::zero(), Graded::constant(Poly::one())];
        while f.len() <= potential.length {
            let n = f.len() - 1;
            f.push(f[n].mul(field, &c, known).add(&f[n - 1].times_h(1, known)));
        }
        let mut corrected = vec![Graded::zero()];
        for (r, sum) in sums.iter().enumerate().skip(1) {
            let limit = needed(r, self.orders).min(known);
            let pairs: Vec<_> = potential
                .weights
                .iter()
                .enumerate()
                .filter_map(|(j, weight)| (potential.length - j).checked_sub(r).map(|n| (weight, &f[n])))
                .collect();
            let total = Graded::dot(field, &pairs, limit).mul(field, &g, limit).scale(&ratio(-(r as i64), 1));
            corrected.push(sum.truncate(limit).add(&total));
        }
        Ok(corrected)
    }
}
