//! The one trait that every algorithm here is written over.
//!
//! Rings are values: a modulus or a minimal polynomial is chosen at run time, and elements carry no
//! pointer back to their ring. Sums of products go through an accumulator, so that a ring may
//! postpone its reductions; that is where nearly all time is spent.

use rug::Rational;

/// A commutative ring with one that contains (most of) the rationals.
pub trait Ring: Sync {
    /// An element.
    type Elem: Clone + PartialEq + std::fmt::Debug + Send + Sync;
    /// The image of a rational constant, kept apart because multiplying by one is cheaper.
    type Scalar: Clone + Send + Sync;
    /// A sum of products that is not reduced yet.
    type Acc;

    /// 0.
    fn zero(&self) -> Self::Elem;
    /// 1.
    fn one(&self) -> Self::Elem;
    /// The image of a rational. Denominators here are products of small integers, which every ring
    /// used inverts; a modulus that divides one would be a programming error.
    fn scalar(&self, value: &Rational) -> Self::Scalar;
    /// A constant as an element.
    fn constant(&self, value: &Self::Scalar) -> Self::Elem;
    /// Whether the element is 0.
    fn is_zero(&self, a: &Self::Elem) -> bool;
    /// a + b.
    fn add(&self, a: &Self::Elem, b: &Self::Elem) -> Self::Elem;
    /// a − b.
    fn sub(&self, a: &Self::Elem, b: &Self::Elem) -> Self::Elem;
    /// −a.
    fn neg(&self, a: &Self::Elem) -> Self::Elem;
    /// a · b.
    fn mul(&self, a: &Self::Elem, b: &Self::Elem) -> Self::Elem;
    /// a · c for a constant c.
    fn scale(&self, a: &Self::Elem, c: &Self::Scalar) -> Self::Elem;
    /// 1/a, or `None` when a is no unit (in a field: when a is 0).
    fn inverse(&self, a: &Self::Elem) -> Option<Self::Elem>;

    /// An empty sum.
    fn accumulator(&self) -> Self::Acc;
    /// Adds a · b to the sum.
    fn accumulate(&self, acc: &mut Self::Acc, a: &Self::Elem, b: &Self::Elem);
    /// The sum as an element; the accumulator is empty again afterwards.
    fn collect(&self, acc: &mut Self::Acc) -> Self::Elem;

    /// The image of an integer.
    fn integer(&self, value: i64) -> Self::Elem {
        self.constant(&self.scalar(&Rational::from(value)))
    }

    /// The scalar n/d.
    fn ratio(&self, numerator: i64, denominator: i64) -> Self::Scalar {
        self.scalar(&Rational::from((numerator, denominator)))
    }

    /// a^n.
    fn power(&self, a: &Self::Elem, exponent: usize) -> Self::Elem {
        let mut result = self.one();
        let mut base = a.clone();
        let mut rest = exponent;
        while rest > 0 {
            if rest & 1 == 1 {
                result = self.mul(&result, &base);
            }
            rest >>= 1;
            if rest > 0 {
                base = self.mul(&base, &base);
            }
        }
        result
    }
}
