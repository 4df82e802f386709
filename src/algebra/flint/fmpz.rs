//! FLINT integers and integer polynomials as owned values, and their conversion from and to GMP.

use flint3_sys::{
    fmpz, fmpz_clear, fmpz_get_ui_array, fmpz_init, fmpz_neg, fmpz_poly_clear, fmpz_poly_degree,
    fmpz_poly_get_coeff_fmpz, fmpz_poly_init, fmpz_poly_set_coeff_fmpz, fmpz_poly_struct, fmpz_set_ui_array, fmpz_sgn,
    fmpz_size,
};
use rug::Integer;
use rug::integer::Order;

/// An owned FLINT integer.
pub(super) struct Fmpz(fmpz);

impl Fmpz {
    pub(super) fn new() -> Fmpz {
        let mut value: fmpz = 0;
        // SAFETY: initialises the integer it is given.
        unsafe { fmpz_init(&mut value) };
        Fmpz(value)
    }

    pub(super) fn from_integer(integer: &Integer) -> Fmpz {
        let mut value = Fmpz::new();
        let words: Vec<u64> = integer.to_digits(Order::Lsf);
        if !words.is_empty() {
            // SAFETY: `words` holds as many limbs as stated; the target is initialised.
            unsafe { fmpz_set_ui_array(&mut value.0, words.as_ptr(), words.len() as i64) };
            if *integer < 0 {
                // SAFETY: in-place negation is allowed.
                unsafe { fmpz_neg(&mut value.0, &value.0) };
            }
        }
        value
    }

    pub(super) fn to_integer(&self) -> Integer {
        to_integer(&self.0)
    }

    pub(super) fn as_ptr(&self) -> *const fmpz {
        &self.0
    }

    pub(super) fn as_mut_ptr(&mut self) -> *mut fmpz {
        &mut self.0
    }
}

impl Drop for Fmpz {
    fn drop(&mut self) {
        // SAFETY: initialised in `new`, cleared once.
        unsafe { fmpz_clear(&mut self.0) };
    }
}

/// A FLINT integer as a GMP one.
pub(super) fn to_integer(value: &fmpz) -> Integer {
    // SAFETY: reads an initialised integer.
    let (size, sign) = unsafe { (fmpz_size(value), fmpz_sgn(value)) };
    if sign == 0 {
        return Integer::new();
    }
    let mut words = vec![0u64; size as usize];
    // SAFETY: the array has the size that FLINT just gave; |value| is written (sign is separate).
    unsafe {
        let mut magnitude = Fmpz::new();
        flint3_sys::fmpz_abs(magnitude.as_mut_ptr(), value);
        fmpz_get_ui_array(words.as_mut_ptr(), size as i64, magnitude.as_ptr());
    }
    let magnitude = Integer::from_digits(&words, Order::Lsf);
    if sign < 0 { -magnitude } else { magnitude }
}

/// An owned FLINT integer polynomial.
pub(super) struct FmpzPoly(fmpz_poly_struct);

impl FmpzPoly {
    pub(super) fn from_integers(coefficients: &[Integer]) -> FmpzPoly {
        let mut poly = fmpz_poly_struct::default();
        // SAFETY: initialises the structure it is given.
        unsafe { fmpz_poly_init(&mut poly) };
        let mut poly = FmpzPoly(poly);
        for (i, c) in coefficients.iter().enumerate() {
            let c = Fmpz::from_integer(c);
            // SAFETY: both are initialised; FLINT grows the polynomial.
            unsafe { fmpz_poly_set_coeff_fmpz(&mut poly.0, i as i64, c.as_ptr()) };
        }
        poly
    }

    pub(super) fn as_ptr(&self) -> *const fmpz_poly_struct {
        &self.0
    }
}

impl Drop for FmpzPoly {
    fn drop(&mut self) {
        // SAFETY: initialised in `from_integers`, cleared once.
        unsafe { fmpz_poly_clear(&mut self.0) };
    }
}

/// The coefficients of a FLINT polynomial, constant first.
pub(super) fn to_integers(poly: &fmpz_poly_struct) -> Vec<Integer> {
    // SAFETY: reads an initialised polynomial.
    let degree = unsafe { fmpz_poly_degree(poly) };
    (0..=degree)
        .map(|i| {
            let mut c = Fmpz::new();
            // SAFETY: as above; an index up to the degree exists.
            unsafe { fmpz_poly_get_coeff_fmpz(c.as_mut_ptr(), poly, i) };
            c.to_integer()
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::{Fmpz, Integer};
    use proptest::prelude::{any, prop, proptest};

    proptest! {
        #[test]
        fn integers_survive_the_round_trip(words in prop::collection::vec(any::<u64>(), 0..5), negative in any::<bool>()) {
            let mut integer = Integer::from_digits(&words, rug::integer::Order::Lsf);
            if negative { integer = -integer; }
            assert_eq!(Fmpz::from_integer(&integer).to_integer(), integer);
        }
    }
}
