//! Dense polynomials over a ring: coefficient slices, constant term first.

use super::ring::Ring;

/// The polynomial without leading zeros.
pub fn trim<R: Ring>(ring: &R, mut a: Vec<R::Elem>) -> Vec<R::Elem> {
    while a.last().is_some_and(|c| ring.is_zero(c)) {
        a.pop();
    }
    a
}

/// a + b, trimmed.
pub fn add<R: Ring>(ring: &R, a: &[R::Elem], b: &[R::Elem]) -> Vec<R::Elem> {
    let (long, short) = if a.len() >= b.len() { (a, b) } else { (b, a) };
    let sum = long.iter().enumerate().map(|(i, c)| short.get(i).map_or_else(|| c.clone(), |d| ring.add(c, d)));
    trim(ring, sum.collect())
}

/// a − b, trimmed.
pub fn sub<R: Ring>(ring: &R, a: &[R::Elem], b: &[R::Elem]) -> Vec<R::Elem> {
    let negative: Vec<_> = b.iter().map(|c| ring.neg(c)).collect();
    add(ring, a, &negative)
}

/// a · b, untrimmed; len(a)·len(b) multiplications.
pub fn mul<R: Ring>(ring: &R, a: &[R::Elem], b: &[R::Elem]) -> Vec<R::Elem> {
    if a.is_empty() || b.is_empty() {
        return Vec::new();
    }
    mul_truncated(ring, a, b, a.len() + b.len() - 1)
}

/// a · b without the coefficients from `length` on.
pub fn mul_truncated<R: Ring>(ring: &R, a: &[R::Elem], b: &[R::Elem], length: usize) -> Vec<R::Elem> {
    let mut acc = ring.accumulator();
    (0..length)
        .map(|k| {
            for i in (k + 1).saturating_sub(b.len())..a.len().min(k + 1) {
                ring.accumulate(&mut acc, &a[i], &b[k - i]);
            }
            ring.collect(&mut acc)
        })
        .collect()
}

/// 1/a as a power series with `length` terms, or `None` when a(0) is no unit.
pub fn series_inverse<R: Ring>(ring: &R, a: &[R::Elem], length: usize) -> Option<Vec<R::Elem>> {
    let start = ring.inverse(a.first()?)?;
    let mut result: Vec<R::Elem> = vec![start.clone()];
    let mut acc = ring.accumulator();
    for k in 1..length {
        for i in 1..a.len().min(k + 1) {
            ring.accumulate(&mut acc, &a[i], &result[k - i]);
        }
        let sum = ring.collect(&mut acc);
        result.push(ring.neg(&ring.mul(&sum, &start)));
    }
    result.truncate(length);
    Some(result)
}

/// The value at a point.
pub fn evaluate<R: Ring>(ring: &R, a: &[R::Elem], point: &R::Elem) -> R::Elem {
    a.iter().rev().fold(ring.zero(), |value, c| ring.add(&ring.mul(&value, point), c))
}

/// The value at a constant.
pub fn evaluate_scalar<R: Ring>(ring: &R, a: &[R::Elem], point: &R::Scalar) -> R::Elem {
    a.iter().rev().fold(ring.zero(), |value, c| ring.add(&ring.scale(&value, point), c))
}

/// The derivative.
pub fn derivative<R: Ring>(ring: &R, a: &[R::Elem]) -> Vec<R::Elem> {
    a.iter().enumerate().skip(1).map(|(i, c)| ring.scale(c, &ring.ratio(i as i64, 1))).collect()
}

/// a(v + c) for a constant c: Horner's scheme, len²/2 multiplications by the constant.
pub fn shift<R: Ring>(ring: &R, a: &[R::Elem], c: &R::Scalar) -> Vec<R::Elem> {
    let mut result = a.to_vec();
    for start in 0..result.len() {
        for i in (start..result.len() - 1).rev() {
            let carried = ring.scale(&result[i + 1], c);
            result[i] = ring.add(&result[i], &carried);
        }
    }
    result
}

/// The quotient of a by v − c for a constant c (the remainder a(c) is dropped).
pub fn divide_by_root<R: Ring>(ring: &R, a: &[R::Elem], c: &R::Scalar) -> Vec<R::Elem> {
    let mut quotient = vec![ring.zero(); a.len().saturating_sub(1)];
    let mut carried = ring.zero();
    for i in (1..a.len()).rev() {
        carried = ring.add(&ring.scale(&carried, c), &a[i]);
        quotient[i - 1] = carried.clone();
    }
    quotient
}

/// a modulo a monic polynomial, untrimmed.
pub fn remainder<R: Ring>(ring: &R, a: &[R::Elem], monic: &[R::Elem]) -> Vec<R::Elem> {
    let degree = monic.len() - 1;
    let mut rest = a.to_vec();
    while rest.len() > degree {
        let Some(lead) = rest.pop() else { break };
        if ring.is_zero(&lead) {
            continue;
        }
        let base = rest.len() - degree;
        for (i, c) in monic[..degree].iter().enumerate() {
            rest[base + i] = ring.sub(&rest[base + i], &ring.mul(&lead, c));
        }
    }
    rest
}

/// 1/a modulo f over a field, by the extended Euclidean algorithm; `None` when gcd(a, f) ≠ 1.
/// About 2 deg(f)² multiplications and deg(f) inversions.
pub fn inverse_modulo<R: Ring>(ring: &R, a: &[R::Elem], f: &[R::Elem]) -> Option<Vec<R::Elem>> {
    let (mut r0, mut r1) = (f.to_vec(), trim(ring, a.to_vec()));
    let (mut s0, mut s1): (Vec<R::Elem>, Vec<R::Elem>) = (Vec::new(), vec![ring.one()]);
    while r1.len() > 1 {
        // Make r1 monic, then divide.
        let lead = ring.inverse(r1.last()?)?;
        r1 = r1.iter().map(|c| ring.mul(c, &lead)).collect();
        s1 = s1.iter().map(|c| ring.mul(c, &lead)).collect();
        let (quotient, rest) = divide(ring, &r0, &r1);
        let next = sub(ring, &s0, &mul(ring, &quotient, &s1));
        (r0, r1) = (r1, rest);
        (s0, s1) = (s1, next);
    }
    let unit = ring.inverse(r1.first()?)?;
    Some(s1.iter().map(|c| ring.mul(c, &unit)).collect())
}

/// Quotient and trimmed remainder of a by a monic polynomial.
pub fn divide<R: Ring>(ring: &R, a: &[R::Elem], monic: &[R::Elem]) -> (Vec<R::Elem>, Vec<R::Elem>) {
    let degree = monic.len() - 1;
    let mut rest = a.to_vec();
    let mut quotient = vec![ring.zero(); (a.len() + 1).saturating_sub(monic.len())];
    while rest.len() > degree {
        let Some(lead) = rest.pop() else { break };
        let base = rest.len() - degree;
        if !ring.is_zero(&lead) {
            for (i, c) in monic[..degree].iter().enumerate() {
                rest[base + i] = ring.sub(&rest[base + i], &ring.mul(&lead, c));
            }
        }
        quotient[base] = lead;
    }
    (quotient, trim(ring, rest))
}
