//! Multi-precision numbers for long numerical recursions: FLINT floats without error bounds, laid
//! out contiguously so that scalar products of (strided) runs of them are one FLINT call.
//!
//! Nothing here tracks rounding errors; whoever uses it checks the outcome otherwise (the spectral
//! curve: by the consistency of an overdetermined system). Results are rounded towards zero to the
//! number of bits given to each operation.

use super::fmpz::Fmpz;
use flint3_sys::{
    acb_approx_dot, acb_clear, acb_init, acb_struct, arb_approx_dot, arb_clear, arb_init, arb_struct, arb_swap,
    arf_abs_bound_lt_2exp_si, arf_add, arf_div, arf_div_si, arf_get_fmpz_2exp, arf_is_zero, arf_mul_2exp_si,
    arf_mul_rnd_down, arf_mul_si, arf_neg, arf_rnd_t_ARF_RND_DOWN as DOWN, arf_set, arf_set_fmpz_2exp, arf_sub,
};
use rug::{Float, Integer, Rational};

/// A real number.
#[repr(transparent)]
pub struct Real(arb_struct);

/// A complex number.
#[repr(transparent)]
pub struct Complex(acb_struct);

// SAFETY: an arb owns its mantissa; the wrappers never share it.
unsafe impl Send for Real {}
// SAFETY: shared references only read.
unsafe impl Sync for Real {}
// SAFETY: as for `Real`.
unsafe impl Send for Complex {}
// SAFETY: as for `Real`.
unsafe impl Sync for Complex {}

/// A run of entries of a slice: start, start + step, start + 2·step, ….
pub struct Run<'a, T> {
    /// What the run is taken from.
    pub from: &'a [T],
    /// The first entry.
    pub start: usize,
    /// The distance between entries.
    pub step: isize,
}

impl<'a, T> Run<'a, T> {
    /// The run of consecutive entries from `start` on.
    pub fn forward(from: &'a [T], start: usize) -> Run<'a, T> {
        Run { from, start, step: 1 }
    }

    /// The run of consecutive entries from `start` down.
    pub fn backward(from: &'a [T], start: usize) -> Run<'a, T> {
        Run { from, start, step: -1 }
    }

    fn pointer(&self, len: usize) -> *const T {
        let last = self.start as isize + (len as isize - 1) * self.step;
        assert!(self.start < self.from.len() && last >= 0 && (last as usize) < self.from.len(), "run inside its slice");
        &self.from[self.start]
    }
}

/// What the solver needs of its numbers; `bits` is the working precision of each operation.
pub trait Scalar: Clone + Send + Sync + 'static {
    /// Whether the numbers have an imaginary part.
    const COMPLEX: bool;
    /// Zero.
    fn zero() -> Self;
    /// A real number.
    fn from_real(value: &Real) -> Self;
    /// A number from its parts; real numbers ignore the imaginary part.
    fn from_parts(re: &Real, im: &Real) -> Self;
    /// The real part.
    fn re(&self) -> &Real;
    /// The imaginary part.
    fn im(&self) -> Real;
    /// The complex conjugate.
    fn conj(&self) -> Self;
    /// Whether it is exactly zero.
    fn is_zero(&self) -> bool;
    /// Adds.
    fn add(&mut self, other: &Self, bits: i64);
    /// Subtracts.
    fn sub(&mut self, other: &Self, bits: i64);
    /// Changes the sign.
    fn negate(&mut self);
    /// The product.
    fn mul(&self, other: &Self, bits: i64) -> Self;
    /// Multiplies by a word-size integer: cost linear in the precision.
    fn mul_small(&mut self, factor: i64, bits: i64);
    /// Divides by a word-size integer: cost linear in the precision.
    fn div_small(&mut self, divisor: i64, bits: i64);
    /// Multiplies by 2^e exactly.
    fn shift(&mut self, e: i64);
    /// Adds (or subtracts) Σ x y over two runs of `len` entries.
    fn dot(&mut self, subtract: bool, x: Run<Self>, y: Run<Self>, len: usize, bits: i64);
    /// The same with real first factors.
    fn dot_real(&mut self, subtract: bool, x: Run<Real>, y: Run<Self>, len: usize, bits: i64);
    /// An e with |self| < 2^e (very negative for zero).
    fn magnitude(&self) -> i64;
    /// Multiplies by i^k; for real numbers k must be even.
    fn turn(&mut self, k: i64);

    /// The product with a real number.
    fn scale(&self, factor: &Real, bits: i64) -> Self {
        let mut result = Self::zero();
        result.dot_real(
            false,
            Run::forward(std::slice::from_ref(factor), 0),
            Run::forward(std::slice::from_ref(self), 0),
            1,
            bits,
        );
        result
    }

    /// Adds a product.
    fn add_mul(&mut self, x: &Self, y: &Self, bits: i64) {
        self.dot(false, Run::forward(std::slice::from_ref(x), 0), Run::forward(std::slice::from_ref(y), 0), 1, bits);
    }

    /// A vector of zeros.
    fn zeros(len: usize) -> Vec<Self> {
        (0..len).map(|_| Self::zero()).collect()
    }
}

impl Real {
    /// An integer.
    pub fn from_i64(value: i64) -> Real {
        Real::from_scaled(&Integer::from(value), 0)
    }

    /// mantissa · 2^exponent, exactly.
    pub fn from_scaled(mantissa: &Integer, exponent: i64) -> Real {
        let mut result = Real::zero();
        let (m, e) = (Fmpz::from_integer(mantissa), Fmpz::from_integer(&Integer::from(exponent)));
        // SAFETY: all three are initialised.
        unsafe { arf_set_fmpz_2exp(&mut result.0.mid, m.as_ptr(), e.as_ptr()) };
        result
    }

    /// A rational number, rounded.
    pub fn from_rational(value: &Rational, bits: i64) -> Real {
        let mut result = Real::zero();
        let (n, d) = (Real::from_scaled(value.numer(), 0), Real::from_scaled(value.denom(), 0));
        // SAFETY: all three are initialised.
        unsafe { arf_div(&mut result.0.mid, &n.0.mid, &d.0.mid, bits, DOWN) };
        result
    }

    /// A finite MPFR number, exactly (anything else becomes zero).
    pub fn from_float(value: &Float) -> Real {
        value
            .to_integer_exp()
            .map_or_else(Real::zero, |(mantissa, exponent)| Real::from_scaled(&mantissa, i64::from(exponent)))
    }

    /// Mantissa and exponent: the value is mantissa · 2^exponent.
    pub fn to_scaled(&self) -> (Integer, i64) {
        let (mut m, mut e) = (Fmpz::new(), Fmpz::new());
        // SAFETY: all three are initialised.
        unsafe { arf_get_fmpz_2exp(m.as_mut_ptr(), e.as_mut_ptr(), &self.0.mid) };
        (m.to_integer(), e.to_integer().to_i64().unwrap_or(0))
    }

    /// As an MPFR number.
    pub fn to_float(&self, bits: u32) -> Float {
        let (mantissa, exponent) = self.to_scaled();
        Float::with_val(bits, mantissa) << i32::try_from(exponent).unwrap_or(i32::MIN / 2)
    }

    /// The quotient.
    pub fn div(&self, other: &Real, bits: i64) -> Real {
        let mut result = Real::zero();
        // SAFETY: all three are initialised.
        unsafe { arf_div(&mut result.0.mid, &self.0.mid, &other.0.mid, bits, DOWN) };
        result
    }
}

impl Drop for Real {
    fn drop(&mut self) {
        // SAFETY: initialised on construction, cleared once.
        unsafe { arb_clear(&mut self.0) };
    }
}

impl Drop for Complex {
    fn drop(&mut self) {
        // SAFETY: initialised on construction, cleared once.
        unsafe { acb_clear(&mut self.0) };
    }
}

impl Clone for Real {
    fn clone(&self) -> Real {
        let mut result = Real::zero();
        // SAFETY: both are initialised.
        unsafe { arf_set(&mut result.0.mid, &self.0.mid) };
        result
    }
}

impl Clone for Complex {
    fn clone(&self) -> Complex {
        let mut result = Complex::zero();
        // SAFETY: both are initialised.
        unsafe {
            arf_set(&mut result.0.real.mid, &self.0.real.mid);
            arf_set(&mut result.0.imag.mid, &self.0.imag.mid);
        }
        result
    }
}

/// The real part of an acb, which `Real` wraps transparently.
fn as_real(part: &arb_struct) -> &Real {
    // SAFETY: `Real` is a transparent wrapper of `arb_struct`.
    unsafe { &*std::ptr::from_ref(part).cast::<Real>() }
}

impl Scalar for Real {
    const COMPLEX: bool = false;

    fn zero() -> Real {
        let mut value = arb_struct::default();
        // SAFETY: initialises the number it is given.
        unsafe { arb_init(&mut value) };
        Real(value)
    }

    fn from_real(value: &Real) -> Real {
        value.clone()
    }

    fn from_parts(re: &Real, _im: &Real) -> Real {
        re.clone()
    }

    fn re(&self) -> &Real {
        self
    }

    fn im(&self) -> Real {
        Real::zero()
    }

    fn conj(&self) -> Real {
        self.clone()
    }

    fn is_zero(&self) -> bool {
        // SAFETY: reads an initialised number.
        unsafe { arf_is_zero(&self.0.mid) != 0 }
    }

    fn add(&mut self, other: &Real, bits: i64) {
        // SAFETY: initialised; aliasing is allowed.
        unsafe { arf_add(&mut self.0.mid, &self.0.mid, &other.0.mid, bits, DOWN) };
    }

    fn sub(&mut self, other: &Real, bits: i64) {
        // SAFETY: initialised; aliasing is allowed.
        unsafe { arf_sub(&mut self.0.mid, &self.0.mid, &other.0.mid, bits, DOWN) };
    }

    fn negate(&mut self) {
        // SAFETY: initialised; aliasing is allowed.
        unsafe { arf_neg(&mut self.0.mid, &self.0.mid) };
    }

    fn mul(&self, other: &Real, bits: i64) -> Real {
        let mut result = Real::zero();
        // SAFETY: initialised.
        unsafe { arf_mul_rnd_down(&mut result.0.mid, &self.0.mid, &other.0.mid, bits) };
        result
    }

    fn mul_small(&mut self, factor: i64, bits: i64) {
        // SAFETY: initialised; aliasing is allowed.
        unsafe { arf_mul_si(&mut self.0.mid, &self.0.mid, factor, bits, DOWN) };
    }

    fn div_small(&mut self, divisor: i64, bits: i64) {
        // SAFETY: initialised; aliasing is allowed.
        unsafe { arf_div_si(&mut self.0.mid, &self.0.mid, divisor, bits, DOWN) };
    }

    fn shift(&mut self, e: i64) {
        // SAFETY: initialised; aliasing is allowed.
        unsafe { arf_mul_2exp_si(&mut self.0.mid, &self.0.mid, e) };
    }

    fn dot(&mut self, subtract: bool, x: Run<Real>, y: Run<Real>, len: usize, bits: i64) {
        if len == 0 {
            return;
        }
        let (xp, yp) = (x.pointer(len).cast::<arb_struct>(), y.pointer(len).cast::<arb_struct>());
        // SAFETY: `pointer` checked that both runs lie inside their slices; the exclusive borrow of the
        // accumulator keeps it apart from them. The initial value is subtracted from, or added to, in
        // place: FLINT allows it to be the result itself.
        unsafe {
            let target: *mut arb_struct = &mut self.0;
            arb_approx_dot(target, target, i32::from(subtract), xp, x.step as i64, yp, y.step as i64, len as i64, bits);
        }
    }

    fn dot_real(&mut self, subtract: bool, x: Run<Real>, y: Run<Real>, len: usize, bits: i64) {
        self.dot(subtract, x, y, len, bits);
    }

    fn magnitude(&self) -> i64 {
        if self.is_zero() {
            return i64::MIN / 4;
        }
        // SAFETY: reads an initialised number.
        unsafe { arf_abs_bound_lt_2exp_si(&self.0.mid) }
    }

    fn turn(&mut self, k: i64) {
        assert!(k % 2 == 0, "a real number turned by an odd power of i");
        if k.rem_euclid(4) == 2 {
            self.negate();
        }
    }
}

impl Scalar for Complex {
    const COMPLEX: bool = true;

    fn zero() -> Complex {
        let mut value = acb_struct::default();
        // SAFETY: initialises the number it is given.
        unsafe { acb_init(&mut value) };
        Complex(value)
    }

    fn from_real(value: &Real) -> Complex {
        Complex::from_parts(value, &Real::zero())
    }

    fn from_parts(re: &Real, im: &Real) -> Complex {
        let mut result = Complex::zero();
        // SAFETY: all are initialised.
        unsafe {
            arf_set(&mut result.0.real.mid, &re.0.mid);
            arf_set(&mut result.0.imag.mid, &im.0.mid);
        }
        result
    }

    fn re(&self) -> &Real {
        as_real(&self.0.real)
    }

    fn im(&self) -> Real {
        as_real(&self.0.imag).clone()
    }

    fn conj(&self) -> Complex {
        let mut result = self.clone();
        // SAFETY: initialised; aliasing is allowed.
        unsafe { arf_neg(&mut result.0.imag.mid, &result.0.imag.mid) };
        result
    }

    fn is_zero(&self) -> bool {
        as_real(&self.0.real).is_zero() && as_real(&self.0.imag).is_zero()
    }

    fn add(&mut self, other: &Complex, bits: i64) {
        // SAFETY: initialised; aliasing is allowed.
        unsafe {
            arf_add(&mut self.0.real.mid, &self.0.real.mid, &other.0.real.mid, bits, DOWN);
            arf_add(&mut self.0.imag.mid, &self.0.imag.mid, &other.0.imag.mid, bits, DOWN);
        }
    }

    fn sub(&mut self, other: &Complex, bits: i64) {
        // SAFETY: initialised; aliasing is allowed.
        unsafe {
            arf_sub(&mut self.0.real.mid, &self.0.real.mid, &other.0.real.mid, bits, DOWN);
            arf_sub(&mut self.0.imag.mid, &self.0.imag.mid, &other.0.imag.mid, bits, DOWN);
        }
    }

    fn negate(&mut self) {
        // SAFETY: initialised; aliasing is allowed.
        unsafe {
            arf_neg(&mut self.0.real.mid, &self.0.real.mid);
            arf_neg(&mut self.0.imag.mid, &self.0.imag.mid);
        }
    }

    fn mul(&self, other: &Complex, bits: i64) -> Complex {
        let mut result = Complex::zero();
        result.add_mul(self, other, bits);
        result
    }

    fn mul_small(&mut self, factor: i64, bits: i64) {
        // SAFETY: initialised; aliasing is allowed.
        unsafe {
            arf_mul_si(&mut self.0.real.mid, &self.0.real.mid, factor, bits, DOWN);
            arf_mul_si(&mut self.0.imag.mid, &self.0.imag.mid, factor, bits, DOWN);
        }
    }

    fn div_small(&mut self, divisor: i64, bits: i64) {
        // SAFETY: initialised; aliasing is allowed.
        unsafe {
            arf_div_si(&mut self.0.real.mid, &self.0.real.mid, divisor, bits, DOWN);
            arf_div_si(&mut self.0.imag.mid, &self.0.imag.mid, divisor, bits, DOWN);
        }
    }

    fn shift(&mut self, e: i64) {
        // SAFETY: initialised; aliasing is allowed.
        unsafe {
            arf_mul_2exp_si(&mut self.0.real.mid, &self.0.real.mid, e);
            arf_mul_2exp_si(&mut self.0.imag.mid, &self.0.imag.mid, e);
        }
    }

    fn dot(&mut self, subtract: bool, x: Run<Complex>, y: Run<Complex>, len: usize, bits: i64) {
        if len == 0 {
            return;
        }
        let (xp, yp) = (x.pointer(len).cast::<acb_struct>(), y.pointer(len).cast::<acb_struct>());
        // SAFETY: as in the real case.
        unsafe {
            let target: *mut acb_struct = &mut self.0;
            acb_approx_dot(target, target, i32::from(subtract), xp, x.step as i64, yp, y.step as i64, len as i64, bits);
        }
    }

    fn dot_real(&mut self, subtract: bool, x: Run<Real>, y: Run<Complex>, len: usize, bits: i64) {
        if len == 0 {
            return;
        }
        let (xp, yp) = (x.pointer(len).cast::<arb_struct>(), y.pointer(len).cast::<acb_struct>());
        // SAFETY: both runs lie inside their slices; real and imaginary parts of a run of complex
        // numbers are runs of real numbers of twice the step.
        unsafe {
            let (re, im): (*mut arb_struct, *mut arb_struct) = (&mut self.0.real, &mut self.0.imag);
            let (sub, xs, ys) = (i32::from(subtract), x.step as i64, 2 * y.step as i64);
            arb_approx_dot(re, re, sub, xp, xs, &(*yp).real, ys, len as i64, bits);
            arb_approx_dot(im, im, sub, xp, xs, &(*yp).imag, ys, len as i64, bits);
        }
    }

    fn magnitude(&self) -> i64 {
        as_real(&self.0.real).magnitude().max(as_real(&self.0.imag).magnitude())
    }

    fn turn(&mut self, k: i64) {
        // SAFETY: initialised; swapping the parts and negating in place are allowed.
        unsafe {
            if k.rem_euclid(2) == 1 {
                // i (x + i y) = −y + i x
                let (re, im): (*mut arb_struct, *mut arb_struct) = (&mut self.0.real, &mut self.0.imag);
                arb_swap(re, im);
                arf_neg(&mut self.0.real.mid, &self.0.real.mid);
            }
        }
        if k.rem_euclid(4) >= 2 {
            self.negate();
        }
    }
}
