//! The laws every ring must satisfy, as one reusable suite for tests.

use super::ring::Ring;
use rug::Rational;

/// Panics unless the commutative ring laws, the constants, the accumulator and the inverses hold
/// for these three elements.
pub fn check<R: Ring>(ring: &R, a: &R::Elem, b: &R::Elem, c: &R::Elem) {
    let (zero, one) = (ring.zero(), ring.one());
    assert!(ring.is_zero(&zero) && !ring.is_zero(&one));
    assert_eq!(ring.add(a, &zero), *a, "zero is neutral");
    assert_eq!(ring.mul(a, &one), *a, "one is neutral");
    assert_eq!(ring.mul(a, &zero), zero, "zero absorbs");
    assert_eq!(ring.add(a, b), ring.add(b, a), "addition commutes");
    assert_eq!(ring.mul(a, b), ring.mul(b, a), "multiplication commutes");
    assert_eq!(ring.add(&ring.add(a, b), c), ring.add(a, &ring.add(b, c)), "addition associates");
    assert_eq!(ring.mul(&ring.mul(a, b), c), ring.mul(a, &ring.mul(b, c)), "multiplication associates");
    assert_eq!(ring.mul(a, &ring.add(b, c)), ring.add(&ring.mul(a, b), &ring.mul(a, c)), "distributive law");
    assert_eq!(ring.sub(a, a), zero, "subtraction");
    assert_eq!(ring.add(a, &ring.neg(a)), zero, "negation");
    assert_eq!(ring.sub(a, b), ring.add(a, &ring.neg(b)), "subtraction is adding the negative");
    let third = ring.ratio(-7, 3);
    assert_eq!(ring.scale(a, &third), ring.mul(a, &ring.constant(&third)), "scaling is multiplying by a constant");
    let three = ring.scalar(&Rational::from(3));
    assert_eq!(ring.scale(&ring.constant(&third), &three), ring.integer(-7), "constants follow the rationals");
    let mut acc = ring.accumulator();
    for _ in 0..300 {
        ring.accumulate(&mut acc, a, b);
        ring.accumulate(&mut acc, b, c);
    }
    let sum = ring.add(&ring.mul(a, b), &ring.mul(b, c));
    assert_eq!(ring.collect(&mut acc), ring.mul(&ring.integer(300), &sum), "accumulating is adding products");
    assert!(ring.is_zero(&ring.collect(&mut acc)), "a collected accumulator is empty");
    assert_eq!(ring.power(a, 5), ring.mul(a, &ring.mul(&ring.mul(a, a), &ring.mul(a, a))), "powers");
    if let Some(inverse) = ring.inverse(a) {
        assert_eq!(ring.mul(a, &inverse), one, "inverse");
    }
    assert!(ring.inverse(&zero).is_none(), "zero has no inverse");
}
