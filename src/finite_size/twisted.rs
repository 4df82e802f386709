//! The twisted one-loop solution near a singular state, as a power series in τ = ρ − 1 (formulas §5, NW).

use crate::algebra::graded::{Graded, Grading};
use crate::algebra::linear;
use crate::algebra::poly;
use crate::algebra::ring::Ring;
use crate::baxter::binomial_power;
use crate::error::{Error, Result};
use crate::family::Family;
use rug::{Integer, Rational};

/// Q = (v−½−c)(v+½−c−δ)R(v) with δ = c^L G; every number is a series in τ, coefficient by coefficient.
#[derive(Clone, Debug)]
pub struct TwistedRoots<E> {
    /// c = O(τ).
    pub c: Vec<E>,
    /// G.
    pub g: Vec<E>,
    /// R, monic of degree M − 2.
    pub r: Vec<Vec<E>>,
}

/// (1 + τ)^n as a series with `len` terms, for any integer n.
pub fn twist_power<R: Ring>(ring: &R, exponent: i64, len: usize) -> Vec<R::Elem> {
    let mut weight = Rational::from(1);
    (0..len)
        .map(|k| {
            let value = ring.constant(&ring.scalar(&weight));
            weight *= Rational::from((exponent - k as i64, k as i64 + 1));
            value
        })
        .collect()
}

/// Solves the three equations of formulas §5 through τ^`order`, from the one-loop Q₁.
///
/// The Jacobian at τ = 0 is inverted once, and each step of the iteration gains one order, at a precision
/// that grows with it. About order³/6 · 2LM multiplications.
///
/// # Errors
/// A non-unit where a physical state over a field has a unit.
pub fn solve<R: Ring>(ring: &R, family: Family, q1: &[R::Elem], order: usize) -> Result<TwistedRoots<R::Elem>> {
    let at = |poly: &[R::Elem], n: i64, d: i64| poly::evaluate_scalar(ring, poly, &ring.ratio(n, d));
    let non_unit = |what: &str| {
        Error::undefined(format!(
            "family {family}: {what} is no unit, as it is for every physical singular state over a field; use another prime"
        ))
    };
    let r0 = poly::divide_by_root(ring, &poly::divide_by_root(ring, q1, &ring.ratio(1, 2)), &ring.ratio(-1, 2));
    let inverse = ring.inverse(&at(&r0, -1, 2)).ok_or_else(|| non_unit("R(-1/2)"))?;
    let g0 = ring.mul(&ring.scale(&at(&r0, 3, 2), &ring.ratio(-2, 1)), &inverse);
    let jacobian = jacobian(ring, family, &r0, &g0);
    let inverse =
        linear::inverse(ring, &jacobian).ok_or_else(|| non_unit("the Jacobian of the twisted Bethe equations"))?;
    let mut roots = TwistedRoots { c: vec![ring.zero()], g: vec![g0], r: r0.iter().map(|c| vec![c.clone()]).collect() };
    for step in 1..=order {
        let grading = Grading::plain(step);
        let series = Graded::new(ring, &grading);
        for number in [&mut roots.c, &mut roots.g].into_iter().chain(&mut roots.r) {
            number.push(ring.zero());
        }
        let errors: Vec<R::Elem> = equations(&series, family, &roots).iter().map(|e| e[step].clone()).collect();
        let change = linear::apply(ring, &inverse, &errors);
        let unknowns = [&mut roots.c, &mut roots.g].into_iter().chain(&mut roots.r);
        for (number, delta) in unknowns.zip(&change) {
            number[step] = ring.neg(delta);
        }
    }
    Ok(roots)
}

/// The left sides of the equations for the roots near ½ and −½, and of that modulo R.
fn equations<R: Ring>(series: &Graded<'_, R>, family: Family, roots: &TwistedRoots<R::Elem>) -> Vec<Vec<R::Elem>> {
    let Family { length, .. } = family;
    let ring = series.base();
    let len = series.grading().len();
    let constant = |n: i64, d: i64| series.constant(&ring.ratio(n, d));
    let kappa = twist_power(ring, length as i64, len);
    let TwistedRoots { c, g, r } = roots;
    let c_power = series.power(c, length - 1);
    let cg = series.mul(&c_power, g);
    let delta = series.mul(&cg, c);
    let e = series.add(c, &delta);
    let r_at = |offset: &Vec<R::Elem>, n: i64, d: i64| poly::evaluate(series, r, &series.add(offset, &constant(n, d)));
    let two = series.sub(&constant(2, 1), &delta);
    let first = series.add(
        &series.mul(
            &series.mul(&kappa, &series.power(&series.add(c, &series.one()), length)),
            &series.mul(g, &r_at(c, -1, 2)),
        ),
        &series.mul(&two, &r_at(c, 3, 2)),
    );
    let second = series.add(
        &series.mul(&series.power(&series.sub(&e, &series.one()), length), &series.mul(g, &r_at(&e, 1, 2))),
        &series.mul(
            &series.mul(&kappa, &series.power(&series.add(&series.one(), &cg), length)),
            &series.mul(&two, &r_at(&e, -3, 2)),
        ),
    );
    let mut all = vec![first, second];
    let degree = r.len() - 1;
    if degree > 0 {
        // κ(v+½)^L Q(v−1) + (v−½)^L Q(v+1) modulo R.
        let part = |side: i64, weight: &Vec<R::Elem>| {
            let mut residue = poly::remainder(series, &poly::shift(series, r, &ring.ratio(-side, 1)), r);
            residue.resize(degree, series.zero());
            // Q(v∓1) = (v ∓ 1 − ½ − c)(v ∓ 1 + ½ − e) R(v∓1).
            let roots = [series.add(c, &constant(2 * side + 1, 2)), series.add(&e, &constant(2 * side - 1, 2))];
            for root in &roots {
                residue = times_linear(series, &residue, &series.neg(root), r);
            }
            for _ in 0..length {
                residue = times_linear(series, &residue, &constant(side, 2), r);
            }
            residue.iter().map(|x| series.mul(weight, x)).collect::<Vec<_>>()
        };
        let (below, above) = (part(1, &kappa), part(-1, &series.one()));
        all.extend(below.iter().zip(&above).map(|(a, b)| series.add(a, b)));
    }
    all
}

/// p·(v + x) modulo a monic polynomial, for p of lower degree.
fn times_linear<S: Ring>(ring: &S, p: &[S::Elem], x: &S::Elem, monic: &[S::Elem]) -> Vec<S::Elem> {
    let top = &p[p.len() - 1];
    (0..p.len())
        .map(|i| {
            let mut sum = ring.sub(&ring.mul(x, &p[i]), &ring.mul(top, &monic[i]));
            if i > 0 {
                sum = ring.add(&sum, &p[i - 1]);
            }
            sum
        })
        .collect()
}

/// Derivatives of the equations with respect to c, G and the coefficients of R at τ = 0, where c = δ = 0
/// (δ and c^{L−1} do not contribute for L ≥ 3).
fn jacobian<R: Ring>(ring: &R, family: Family, r: &[R::Elem], g: &R::Elem) -> Vec<Vec<R::Elem>> {
    let length = family.length as i64;
    let degree = r.len() - 1;
    let sign = if length % 2 == 0 { 1 } else { -1 };
    let slope = poly::derivative(ring, r);
    let at = |poly: &[R::Elem], n: i64, d: i64| poly::evaluate_scalar(ring, poly, &ring.ratio(n, d));
    let times = |n: i64, a: &R::Elem| ring.scale(a, &ring.ratio(n, 1));
    let power = |n: i64, d: i64, j: usize| {
        use rug::ops::Pow;
        ring.scalar(&Rational::from(Rational::from((n, d)).pow(j as i32)))
    };
    let mut first = vec![
        ring.add(
            &ring.mul(g, &ring.add(&times(length, &at(r, -1, 2)), &at(&slope, -1, 2))),
            &times(2, &at(&slope, 3, 2)),
        ),
        at(r, -1, 2),
    ];
    let mut second = vec![
        ring.add(
            &ring.mul(g, &times(sign, &ring.sub(&at(&slope, 1, 2), &times(length, &at(r, 1, 2))))),
            &times(2, &at(&slope, -3, 2)),
        ),
        times(sign, &at(r, 1, 2)),
    ];
    for j in 0..degree {
        let first_entry = ring.add(&ring.scale(g, &power(-1, 2, j)), &times(2, &ring.constant(&power(3, 2, j))));
        let second_entry =
            ring.add(&times(sign, &ring.scale(g, &power(1, 2, j))), &times(2, &ring.constant(&power(-3, 2, j))));
        first.push(first_entry);
        second.push(second_entry);
    }
    let mut rows = vec![first, second];
    if degree == 0 {
        return rows;
    }
    let factor = |parts: &[(i64, i64, usize)]| -> Vec<R::Elem> {
        let product = parts.iter().fold(vec![Rational::from(1)], |product, (n, d, power)| {
            poly::mul(
                &crate::algebra::rationals::Rationals,
                &product,
                &binomial_power(Rational::from((*n, *d)), *power),
            )
        });
        product.iter().map(|c| ring.constant(&ring.scalar(c))).collect()
    };
    let length = family.length;
    // Q(v−1) = (v−3/2)(v−1/2)R(v−1) and Q(v+1) = (v+1/2)(v+3/2)R(v+1) with their weights.
    let lower = factor(&[(1, 2, length), (-3, 2, 1), (-1, 2, 1)]);
    let upper = factor(&[(-1, 2, length), (1, 2, 1), (3, 2, 1)]);
    let (r_down, r_up) = (poly::shift(ring, r, &ring.ratio(-1, 1)), poly::shift(ring, r, &ring.ratio(1, 1)));
    let whole = poly::add(ring, &poly::mul(ring, &lower, &r_down), &poly::mul(ring, &upper, &r_up));
    let (quotient, _) = poly::divide(ring, &whole, r);
    let reduce = |p: &[R::Elem]| {
        let mut rest = poly::remainder(ring, p, r);
        rest.resize(degree, ring.zero());
        rest
    };
    // dQ/dc = −2v R.
    let along_c = poly::add(
        ring,
        &poly::mul(ring, &factor(&[(1, 2, length), (-1, 1, 1)]), &r_down),
        &poly::mul(ring, &factor(&[(-1, 2, length), (1, 1, 1)]), &r_up),
    );
    let mut columns =
        vec![reduce(&along_c).iter().map(|x| times(-2, x)).collect::<Vec<_>>(), vec![ring.zero(); degree]];
    let (lower, upper, quotient) = (reduce(&lower), reduce(&upper), reduce(&quotient));
    for j in 0..degree {
        let monomial = |shift: i64| -> Vec<R::Elem> {
            binomial_power(Rational::from(shift), j).iter().map(|c| ring.constant(&ring.scalar(c))).collect()
        };
        let sum = poly::add(ring, &poly::mul(ring, &lower, &monomial(-1)), &poly::mul(ring, &upper, &monomial(1)));
        columns.push(reduce(&poly::sub(ring, &sum, &poly::mul(ring, &quotient, &monomial(0)))));
    }
    rows.extend((0..degree).map(|i| columns.iter().map(|column| column[i].clone()).collect()));
    rows
}

/// b_L = [h^{L−1}] Y^{2L−1}(1/s² + 1/s³) at w = 1, s = √(1+4h), Y = (1+s)/2.
pub fn counterterm(length: usize) -> Rational {
    let q = crate::algebra::rationals::Rationals;
    // 1/s = Σ binom(2n, n)(−h)^n.
    let inverse: Vec<Rational> = (0..length as u32)
        .map(|n| {
            let binomial = Rational::from(Integer::from(Integer::binomial_u(2 * n, n)));
            if n % 2 == 0 { binomial } else { -binomial }
        })
        .collect();
    let mul = |a: &[Rational], b: &[Rational]| poly::mul_truncated(&q, a, b, length);
    let square = mul(&inverse, &inverse);
    let cube = mul(&square, &inverse);
    let root = mul(&inverse, &[Rational::from(1), Rational::from(4)]);
    let y: Vec<Rational> = root.iter().enumerate().map(|(i, c)| (c.clone() + i32::from(i == 0)) / 2).collect();
    let power = (1..2 * length).fold(vec![Rational::from(1)], |power, _| mul(&power, &y));
    let sum: Vec<Rational> = square.iter().zip(&cube).map(|(a, b)| Rational::from(a + b)).collect();
    mul(&power, &sum).pop().unwrap_or_default()
}
