//! Decimals of exact values at one state, with an error bound, for printed reference values.

use super::expression::Expression;
use super::value::{Element, Value};
use crate::record::Zeta;
use num_rational::BigRational;
use num_traits::Zero;
use rug::{Float, Integer, Rational};

/// A number and a bound on its error.
#[derive(Clone, Debug)]
pub struct Decimal {
    /// The approximation.
    pub value: Float,
    /// |approximation − truth| is at most this.
    pub error: Float,
}

/// The exact rational as the C library's type.
pub fn rational(value: &BigRational) -> Rational {
    let convert = |n: &num_bigint::BigInt| Integer::from_str_radix(&n.to_str_radix(16), 16).unwrap_or_default();
    Rational::from((convert(value.numer()), convert(value.denom())))
}

/// A real root of `minimal` (constant first, monic) near `start`, to `bits` bits by Newton's method;
/// the error bound is degree · |f/f'| at the end, within which a root must lie.
///
/// # Errors
/// No convergence, which means that `start` is not close to a simple root.
pub fn root(minimal: &[BigRational], start: &Rational, bits: u32) -> Result<Decimal, String> {
    let working = bits + 64;
    let coefficients: Vec<Float> = minimal.iter().map(|c| Float::with_val(working, rational(c))).collect();
    let mut x = Float::with_val(working, start);
    for _ in 0..64 {
        let mut f = Float::new(working);
        let mut slope = Float::new(working);
        for c in coefficients.iter().rev() {
            slope = slope * &x + &f;
            f = f * &x + c;
        }
        let step = Float::with_val(working, &f / &slope);
        if !step.is_finite() {
            break;
        }
        x -= &step;
        let size = Float::with_val(working, x.abs_ref()) + 1u32;
        if Float::with_val(working, step.abs_ref()) < size.clone() >> (bits + 8) {
            let error = size >> bits;
            return Ok(Decimal { value: x, error });
        }
    }
    Err("the decimals of omega in the record are not close to a root of its minimal polynomial".into())
}

/// An exact value at the state with this ω, with the error that ω and rounding cause.
///
/// # Errors
/// A multiple zeta value occurs, which this module does not evaluate.
pub fn evaluate(value: &Value, omega: &Decimal, bits: u32) -> Result<Decimal, String> {
    let mut sum = Float::new(bits);
    let mut size = Float::new(bits);
    let mut slack = Float::new(bits);
    for (zeta, element) in value {
        let mut product = Float::with_val(bits, 1);
        for factor in zeta {
            match factor {
                Zeta::Single(k) => product *= Float::with_val(bits, Float::zeta_u(*k)),
                Zeta::Multiple(_) => return Err("a multiple zeta value, which is compared only exactly".into()),
            }
        }
        let (part, part_size, part_slope) = horner(element, &omega.value, bits);
        sum += Float::with_val(bits, &part * &product);
        size += Float::with_val(bits, &part_size * &product);
        slack += part_slope * &product;
    }
    // Rounding: at most a few hundred operations, each relative 2^-bits; ω's error times the slope.
    let error = (size >> (bits - 12)) + slack * &omega.error * 2u32;
    Ok(Decimal { value: sum, error })
}

/// An expression as a number (for messages: no error bound); `None` for multiple zeta values or a
/// division by zero.
pub fn expression(source: &Expression, omega: Option<&Float>, bits: u32) -> Option<Float> {
    match source {
        Expression::Number { value, .. } => Some(Float::with_val(bits, rational(value))),
        Expression::Omega => omega.map(|omega| Float::with_val(bits, omega)),
        Expression::Zeta(Zeta::Single(k)) => Some(Float::with_val(bits, Float::zeta_u(*k))),
        Expression::Zeta(Zeta::Multiple(_)) => None,
        Expression::Root(value) => Some(Float::with_val(bits, rational(value)).sqrt()),
        Expression::Minus(inner) => expression(inner, omega, bits).map(|value| -value),
        Expression::Sum(parts) => {
            let mut sum = Float::new(bits);
            for part in parts {
                sum += expression(part, omega, bits)?;
            }
            Some(sum)
        }
        Expression::Product(parts) => {
            let mut product = Float::with_val(bits, 1);
            for (part, divide) in parts {
                let factor = expression(part, omega, bits)?;
                if *divide {
                    product /= factor;
                } else {
                    product *= factor;
                }
            }
            product.is_finite().then_some(product)
        }
        Expression::Power(base, exponent) => {
            let base = expression(base, omega, bits)?;
            Some(Float::with_val(bits, rug::ops::Pow::pow(base, *exponent)))
        }
    }
}

/// (Σ c ωⁱ, Σ |c ωⁱ|, Σ i |c| (|ω|+1)^{i−1}).
fn horner(element: &Element, omega: &Float, bits: u32) -> (Float, Float, Float) {
    let near = Float::with_val(bits, omega.abs_ref()) + 1u32;
    let mut power = Float::with_val(bits, 1);
    let mut lower = Float::with_val(bits, 1);
    let (mut sum, mut size, mut slope) = (Float::new(bits), Float::new(bits), Float::new(bits));
    for (index, coefficient) in element.iter().enumerate() {
        if !coefficient.is_zero() {
            let c = Float::with_val(bits, rational(coefficient));
            let part = Float::with_val(bits, &c * &power);
            size += Float::with_val(bits, part.abs_ref());
            sum += part;
            if index > 0 {
                slope += c.abs() * &lower * index as u32;
            }
        }
        if index > 0 {
            lower *= &near;
        }
        power *= omega;
    }
    (sum, size, slope)
}

/// `digits` significant digits in plain or scientific notation.
pub fn text(value: &Float, digits: usize) -> String {
    if value.is_zero() {
        return "0".into();
    }
    let size = value.to_f64().abs();
    if (1e-4..1e15).contains(&size) {
        let before = if size >= 1.0 { size.log10().floor() as usize + 1 } else { 0 };
        let places = digits.saturating_sub(before);
        // Scale to an integer so that the rounding is done once, exactly.
        let scaled = Float::with_val(value.prec() + 64, value * Integer::from(Integer::u_pow_u(10, places as u32)));
        let Some((integer, _)) = scaled.to_integer_round(rug::float::Round::Nearest) else { return value.to_string() };
        let negative = integer < 0;
        let mut text = integer.abs().to_string();
        if places > 0 {
            while text.len() <= places {
                text.insert(0, '0');
            }
            text.insert(text.len() - places, '.');
        }
        return if negative { format!("-{text}") } else { text };
    }
    value.to_string_radix(10, Some(digits))
}

#[cfg(test)]
mod tests {
    use super::{evaluate, root, text};
    use crate::compare::value::{Field, evaluate as exact};
    use num_bigint::BigInt;
    use num_rational::BigRational;
    use rug::Rational;

    #[test]
    fn a_cubic_value_to_thirty_digits() {
        let minimal: Vec<BigRational> =
            [-1600, 464, -40, 1].iter().map(|&c| BigRational::from(BigInt::from(c))).collect();
        let omega = root(&minimal, &Rational::from((6491, 1000)), 160).unwrap();
        let field = Field { minimal, larger: None };
        let zero =
            exact(&crate::compare::expression::parse("w^3 - 40w^2 + 464w - 1600 + z3 - z3").unwrap(), &field).unwrap();
        assert!(zero.is_empty());
        let two = exact(&crate::compare::expression::parse("1 + w/w + z3*0").unwrap(), &field).unwrap();
        let found = evaluate(&two, &omega, 160).unwrap();
        assert_eq!(text(&found.value, 8), "2.0000000");
        assert!(found.error.to_f64() < 1e-30);
        let zeta = exact(&crate::compare::expression::parse("z3").unwrap(), &field).unwrap();
        // Apéry's constant, first digits.
        assert_eq!(text(&evaluate(&zeta, &omega, 160).unwrap().value, 20), "1.2020569031595942854");
    }

    #[test]
    fn a_start_far_from_any_root_is_refused() {
        let minimal: Vec<BigRational> = [1, 0, 1].iter().map(|&c| BigRational::from(BigInt::from(c))).collect();
        assert!(root(&minimal, &Rational::from(1), 128).is_err());
    }
}
