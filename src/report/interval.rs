//! Real intervals with outward rounding: what makes every printed digit certain.

use rug::float::{Constant, Round};
use rug::ops::{DivFromRound as _, Pow};
use rug::{Float, Integer, Rational};

/// A closed interval that contains the number meant.
#[derive(Clone, Debug)]
pub struct Interval {
    lo: Float,
    hi: Float,
}

impl Interval {
    /// The interval between two bounds.
    pub fn between(lo: Float, hi: Float) -> Interval {
        if lo <= hi { Interval { lo, hi } } else { Interval { lo: hi, hi: lo } }
    }

    /// The tightest interval around a rational.
    pub fn from_rational(value: &Rational, bits: u32) -> Interval {
        Interval {
            lo: Float::with_val_round(bits, value, Round::Down).0,
            hi: Float::with_val_round(bits, value, Round::Up).0,
        }
    }

    /// The interval between two rationals.
    pub fn from_bounds(lo: &Rational, hi: &Rational, bits: u32) -> Interval {
        Interval {
            lo: Float::with_val_round(bits, lo, Round::Down).0,
            hi: Float::with_val_round(bits, hi, Round::Up).0,
        }
    }

    /// π.
    pub fn pi(bits: u32) -> Interval {
        Interval {
            lo: Float::with_val_round(bits, Constant::Pi, Round::Down).0,
            hi: Float::with_val_round(bits, Constant::Pi, Round::Up).0,
        }
    }

    /// ζ(k), k ≥ 2.
    pub fn zeta(k: u32, bits: u32) -> Interval {
        Interval {
            lo: Float::with_val_round(bits, Float::zeta_u(k), Round::Down).0,
            hi: Float::with_val_round(bits, Float::zeta_u(k), Round::Up).0,
        }
    }

    /// Zero.
    pub fn zero(bits: u32) -> Interval {
        Interval { lo: Float::new(bits), hi: Float::new(bits) }
    }

    /// The lower bound.
    pub fn lo(&self) -> &Float {
        &self.lo
    }

    /// The upper bound.
    pub fn hi(&self) -> &Float {
        &self.hi
    }

    /// A number in the middle, rounded to nearest.
    pub fn middle(&self) -> Float {
        let bits = self.lo.prec();
        Float::with_val(bits, &self.lo + &self.hi) / 2u32
    }

    /// An upper bound of the width.
    pub fn width(&self) -> Float {
        Float::with_val_round(self.lo.prec(), &self.hi - &self.lo, Round::Up).0
    }

    /// Whether zero lies inside.
    pub fn has_zero(&self) -> bool {
        self.lo <= 0 && self.hi >= 0
    }

    /// Sum.
    #[must_use]
    pub fn add(&self, other: &Interval) -> Interval {
        let bits = self.lo.prec().max(other.lo.prec());
        Interval {
            lo: Float::with_val_round(bits, &self.lo + &other.lo, Round::Down).0,
            hi: Float::with_val_round(bits, &self.hi + &other.hi, Round::Up).0,
        }
    }

    /// Difference.
    #[must_use]
    pub fn sub(&self, other: &Interval) -> Interval {
        let bits = self.lo.prec().max(other.lo.prec());
        Interval {
            lo: Float::with_val_round(bits, &self.lo - &other.hi, Round::Down).0,
            hi: Float::with_val_round(bits, &self.hi - &other.lo, Round::Up).0,
        }
    }

    /// Product.
    #[must_use]
    pub fn mul(&self, other: &Interval) -> Interval {
        let bits = self.lo.prec().max(other.lo.prec());
        let pairs = [(&self.lo, &other.lo), (&self.lo, &other.hi), (&self.hi, &other.lo), (&self.hi, &other.hi)];
        let rounded = |round| pairs.map(|(a, b)| Float::with_val_round(bits, a * b, round).0);
        Interval { lo: least(rounded(Round::Down)), hi: greatest(rounded(Round::Up)) }
    }

    /// Quotient. The divisor must not contain zero; if it does, the result is the whole line.
    #[must_use]
    pub fn div(&self, other: &Interval) -> Interval {
        let bits = self.lo.prec().max(other.lo.prec());
        if other.has_zero() {
            return Interval {
                lo: Float::with_val(bits, rug::float::Special::NegInfinity),
                hi: Float::with_val(bits, rug::float::Special::Infinity),
            };
        }
        let pairs = [(&self.lo, &other.lo), (&self.lo, &other.hi), (&self.hi, &other.lo), (&self.hi, &other.hi)];
        let rounded = |round| {
            pairs.map(|(a, b)| {
                let mut quotient = Float::with_val(bits, b);
                // b is at most `bits` long, so this copy is exact and only the division rounds.
                let _ = quotient.div_from_round(a, round);
                quotient
            })
        };
        Interval { lo: least(rounded(Round::Down)), hi: greatest(rounded(Round::Up)) }
    }

    /// The common part, if any.
    pub fn meet(&self, other: &Interval) -> Option<Interval> {
        let lo = if self.lo >= other.lo { &self.lo } else { &other.lo };
        let hi = if self.hi <= other.hi { &self.hi } else { &other.hi };
        (lo <= hi).then(|| Interval { lo: lo.clone(), hi: hi.clone() })
    }

    /// The decimal with `significant` digits (or all digits of the integer part, if those are
    /// more) to which every number of the interval rounds; `None` if there is no such decimal.
    pub fn decimal(&self, significant: usize) -> Option<String> {
        let (lo, hi) = (self.lo.to_rational()?, self.hi.to_rational()?);
        let size = if Rational::from(lo.abs_ref()) > Rational::from(hi.abs_ref()) { &lo } else { &hi };
        let fraction = significant as i64 - 1 - decimal_exponent(size);
        let (below, above) = (round_decimal(&lo, fraction), round_decimal(&hi, fraction));
        (below == above).then_some(below)
    }
}

fn least(values: [Float; 4]) -> Float {
    values.into_iter().reduce(|a, b| if a <= b { a } else { b }).unwrap_or_default_zero()
}

fn greatest(values: [Float; 4]) -> Float {
    values.into_iter().reduce(|a, b| if a >= b { a } else { b }).unwrap_or_default_zero()
}

trait OrZero {
    fn unwrap_or_default_zero(self) -> Float;
}

impl OrZero for Option<Float> {
    fn unwrap_or_default_zero(self) -> Float {
        self.unwrap_or_else(|| Float::new(53))
    }
}

/// e with 10^e ≤ |x| < 10^{e+1}; 0 for zero.
pub fn decimal_exponent(x: &Rational) -> i64 {
    if x.is_zero() {
        return 0;
    }
    let size = Rational::from(x.abs_ref());
    let bits = size.numer().significant_bits() as i64 - size.denom().significant_bits() as i64;
    let mut e = (bits as f64 * std::f64::consts::LOG10_2).floor() as i64;
    while power_of_ten(e) > size {
        e -= 1;
    }
    while power_of_ten(e + 1) <= size {
        e += 1;
    }
    e
}

fn power_of_ten(e: i64) -> Rational {
    let power = Rational::from(Integer::from(10).pow(e.unsigned_abs() as u32));
    if e < 0 { power.recip() } else { power }
}

/// x rounded (half away from zero) to `fraction` digits after the point, never fewer than 0; in
/// the form 1.23e-9 when more than six zeros would follow the point.
pub fn round_decimal(x: &Rational, fraction: i64) -> String {
    let fraction = fraction.max(0);
    let e = decimal_exponent(x);
    if !x.is_zero() && e < -7 && fraction + e >= 0 {
        let mantissa = round_decimal(&(x.clone() * power_of_ten(-e)), fraction + e);
        return format!("{mantissa}e{e}");
    }
    let scaled = x.clone() * power_of_ten(fraction);
    let digits = scaled.round().numer().clone();
    let sign = if digits < 0 { "-" } else { "" };
    let mut text = digits.abs().to_string();
    if fraction > 0 {
        while text.len() <= fraction as usize {
            text.insert(0, '0');
        }
        text.insert(text.len() - fraction as usize, '.');
    }
    format!("{sign}{text}")
}

/// Reads a canonical rational ("-9/2"), a decimal ("1.25") or one with an exponent ("1.2e-9")
/// exactly, with the size of one unit of its last digit (0 for an integer or a fraction).
pub fn parse_number(text: &str) -> Option<(Rational, Rational)> {
    if let Ok(exact) = text.parse::<Rational>() {
        return Some((exact, Rational::new()));
    }
    let (mantissa, exponent) = match text.split_once(['e', 'E']) {
        Some((mantissa, exponent)) => (mantissa, exponent.parse::<i64>().ok().filter(|e| e.abs() < 100_000)?),
        None => (text, 0),
    };
    let (whole, fraction) = mantissa.split_once('.').unwrap_or((mantissa, ""));
    let digits = format!("{whole}{fraction}");
    let body = digits.strip_prefix('-').unwrap_or(&digits);
    if body.is_empty() || !body.bytes().all(|b| b.is_ascii_digit()) || text.len() > 100_000 {
        return None;
    }
    let unit = power_of_ten(exponent - fraction.len() as i64);
    Some((Rational::from(digits.parse::<Integer>().ok()?) * unit.clone(), unit))
}

#[cfg(test)]
mod tests {
    use super::{Interval, decimal_exponent, parse_number, round_decimal};
    use rug::Rational;

    fn q(n: i64, d: i64) -> Rational {
        Rational::from((n, d))
    }

    #[test]
    fn decimals_round_half_away_from_zero() {
        assert_eq!(round_decimal(&q(1, 8), 2), "0.13");
        assert_eq!(round_decimal(&q(-1, 8), 2), "-0.13");
        assert_eq!(round_decimal(&q(999_999, 1000), 2), "1000.00");
        assert_eq!(round_decimal(&q(12, 1), 0), "12");
        assert_eq!(round_decimal(&q(1, 3_000_000_000), 13), "3.333e-10");
        assert_eq!(decimal_exponent(&q(1, 1000)), -3);
        assert_eq!(decimal_exponent(&q(999, 1)), 2);
        assert_eq!(decimal_exponent(&q(1000, 1)), 3);
    }

    #[test]
    fn only_certain_digits_are_printed() {
        let third = Interval::from_rational(&q(1, 3), 60);
        assert_eq!(third.decimal(10).as_deref(), Some("0.3333333333"));
        assert_eq!(third.decimal(40), None);
        let straddles = Interval::from_bounds(&q(4, 10), &q(6, 10), 60);
        assert_eq!(straddles.decimal(1), None);
    }

    #[test]
    fn operations_enclose() {
        let a = Interval::from_bounds(&q(-1, 3), &q(2, 3), 50);
        let b = Interval::from_bounds(&q(-5, 7), &q(-1, 7), 50);
        let product = a.mul(&b);
        assert!(*product.lo() <= -10.0 / 21.0 && *product.hi() >= 5.0 / 21.0);
        let quotient = a.div(&b);
        assert!(*quotient.lo() <= -14.0 / 3.0 && *quotient.hi() >= 7.0 / 3.0);
        assert!(b.div(&a).hi().is_infinite());
        assert_eq!(a.sub(&a).has_zero(), true);
    }

    #[test]
    fn numbers_are_read_exactly() {
        assert_eq!(parse_number("-12.50"), Some((q(-25, 2), q(1, 100))));
        assert_eq!(parse_number("-9/2"), Some((q(-9, 2), q(0, 1))));
        assert_eq!(parse_number("1.5e-3"), Some((q(3, 2000), q(1, 10_000))));
        assert_eq!(parse_number("-0.5"), Some((q(-1, 2), q(1, 10))));
        assert_eq!(parse_number("1.x"), None);
    }
}
