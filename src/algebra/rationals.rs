//! The rationals, exactly.

use super::ring::Ring;
use rug::Rational;

/// Q.
#[derive(Clone, Copy, Debug, Default)]
pub struct Rationals;

impl Ring for Rationals {
    type Elem = Rational;
    type Scalar = Rational;
    type Acc = Rational;

    fn zero(&self) -> Rational {
        Rational::new()
    }
    fn one(&self) -> Rational {
        Rational::from(1)
    }
    fn scalar(&self, value: &Rational) -> Rational {
        value.clone()
    }
    fn constant(&self, value: &Rational) -> Rational {
        value.clone()
    }
    fn is_zero(&self, a: &Rational) -> bool {
        a.is_zero()
    }
    fn add(&self, a: &Rational, b: &Rational) -> Rational {
        Rational::from(a + b)
    }
    fn sub(&self, a: &Rational, b: &Rational) -> Rational {
        Rational::from(a - b)
    }
    fn neg(&self, a: &Rational) -> Rational {
        Rational::from(-a)
    }
    fn mul(&self, a: &Rational, b: &Rational) -> Rational {
        Rational::from(a * b)
    }
    fn scale(&self, a: &Rational, c: &Rational) -> Rational {
        Rational::from(a * c)
    }
    fn inverse(&self, a: &Rational) -> Option<Rational> {
        (!a.is_zero()).then(|| Rational::from(a.recip_ref()))
    }
    fn accumulator(&self) -> Rational {
        Rational::new()
    }
    fn accumulate(&self, acc: &mut Rational, a: &Rational, b: &Rational) {
        *acc += Rational::from(a * b);
    }
    fn collect(&self, acc: &mut Rational) -> Rational {
        std::mem::take(acc)
    }
}
