//! Complex rectangles: pairs of real intervals.

use crate::report::interval::Interval;
use rug::{Float, Rational, float::Round};

/// re + i im.
#[derive(Clone, Debug)]
pub struct Rectangle {
    /// The real part.
    pub re: Interval,
    /// The imaginary part.
    pub im: Interval,
}

impl Rectangle {
    /// A rational.
    pub fn rational(value: &Rational, bits: u32) -> Rectangle {
        Rectangle { re: Interval::from_rational(value, bits), im: Interval::zero(bits) }
    }

    /// Sum.
    #[must_use]
    pub fn add(&self, other: &Rectangle) -> Rectangle {
        Rectangle { re: self.re.add(&other.re), im: self.im.add(&other.im) }
    }

    /// Difference.
    #[must_use]
    pub fn sub(&self, other: &Rectangle) -> Rectangle {
        Rectangle { re: self.re.sub(&other.re), im: self.im.sub(&other.im) }
    }

    /// Product.
    #[must_use]
    pub fn mul(&self, other: &Rectangle) -> Rectangle {
        Rectangle {
            re: self.re.mul(&other.re).sub(&self.im.mul(&other.im)),
            im: self.re.mul(&other.im).add(&self.im.mul(&other.re)),
        }
    }

    /// Quotient; the whole plane when the divisor may be zero.
    #[must_use]
    pub fn div(&self, other: &Rectangle) -> Rectangle {
        let norm = other.re.mul(&other.re).add(&other.im.mul(&other.im));
        let zero = Interval::zero(norm.lo().prec());
        let conjugate = Rectangle { re: other.re.clone(), im: zero.sub(&other.im) };
        let product = self.mul(&conjugate);
        Rectangle { re: product.re.div(&norm), im: product.im.div(&norm) }
    }

    /// The point in the middle.
    #[must_use]
    pub fn middle(&self) -> Rectangle {
        let point = |part: &Interval| Interval::between(part.middle(), part.middle());
        Rectangle { re: point(&self.re), im: point(&self.im) }
    }

    /// Bounds of the absolute value, below and above.
    pub fn size(&self) -> (Float, Float) {
        let bits = self.re.lo().prec();
        let ends = |part: &Interval| {
            let (a, b) = (part.lo().clone().abs(), part.hi().clone().abs());
            let least = if part.has_zero() { Float::new(bits) } else { a.clone().min(&b) };
            (least, a.max(&b))
        };
        let ((a, b), (c, d)) = (ends(&self.re), ends(&self.im));
        (
            Float::with_val_round(bits, a.hypot_ref(&c), Round::Down).0,
            Float::with_val_round(bits, b.hypot_ref(&d), Round::Up).0,
        )
    }

    /// Σ c_j z^j.
    pub fn horner(coefficients: &[Rectangle], at: &Rectangle) -> Rectangle {
        let bits = at.re.lo().prec();
        let zero = Rectangle { re: Interval::zero(bits), im: Interval::zero(bits) };
        coefficients.iter().rev().fold(zero, |value, c| value.mul(at).add(c))
    }
}
