//! The printed decimals of `states`, checked by exact sign changes of the minimal polynomial.

use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::{One, Signed, Zero};

/// A number as printed: its value and the half unit of its last digit (0 when exact).
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Printed {
    /// The value of the digits.
    pub value: BigRational,
    /// Half a unit in the last place; 0 for integers and fractions.
    pub half: BigRational,
}

impl Printed {
    /// Reads "-12.50" or an exact rational; `None` for anything else.
    pub fn parse(text: &str) -> Option<Printed> {
        if let Some((whole, fraction)) = text.split_once('.') {
            let unit = num_traits::pow(BigInt::from(10), fraction.len());
            let digits: BigInt = format!("{whole}{fraction}").parse().ok()?;
            let half = BigRational::new(BigInt::one(), &unit * 2);
            return Some(Printed { value: BigRational::new(digits, unit), half });
        }
        Some(Printed { value: text.parse().ok()?, half: BigRational::zero() })
    }
}

fn evaluate(f: &[BigRational], at: &BigRational) -> BigRational {
    f.iter().rev().fold(BigRational::zero(), |value, c| value * at + c)
}

/// The range of f on [low, high] by interval Horner: not sharp, but certain.
fn range(f: &[BigRational], low: &BigRational, high: &BigRational) -> (BigRational, BigRational) {
    f.iter().rev().fold((BigRational::zero(), BigRational::zero()), |(a, b), c| {
        let products = [&a * low, &a * high, &b * low, &b * high];
        let least = products.iter().min().cloned().unwrap_or_default();
        let most = products.iter().max().cloned().unwrap_or_default();
        (least + c, most + c)
    })
}

/// Checks the decimals of all real embeddings: each ω within half a unit of a root of `minimal`, as
/// many distinct roots as its degree, each one-loop value within half a unit of `one_loop`(ω), sorted.
///
/// # Errors
/// The first decimal that is wrong.
pub fn check_states(
    minimal: &[BigRational],
    one_loop: &[BigRational],
    states: &[(String, String)],
) -> Result<(), String> {
    let mut printed = Vec::new();
    for (omega, value) in states {
        let (Some(omega_printed), Some(value_printed)) = (Printed::parse(omega), Printed::parse(value)) else {
            return Err(format!("\"{omega}\" or \"{value}\" is not a number"));
        };
        check_state(minimal, one_loop, &omega_printed, &value_printed)
            .map_err(|what| format!("state omega = {omega}, one loop = {value}: {what}"))?;
        printed.push((omega_printed, value_printed));
    }
    for (i, (a, _)) in printed.iter().enumerate() {
        for (b, _) in &printed[..i] {
            if (&a.value - &b.value).abs() < &a.half + &b.half || a == b {
                return Err("two states have the same omega".into());
            }
        }
    }
    if printed.windows(2).any(|pair| pair[0].1.value > pair[1].1.value) {
        return Err("the states are not sorted by one-loop value".into());
    }
    Ok(())
}

fn check_state(
    minimal: &[BigRational],
    one_loop: &[BigRational],
    omega: &Printed,
    value: &Printed,
) -> Result<(), String> {
    let (mut low, mut high) = (&omega.value - &omega.half, &omega.value + &omega.half);
    let (at_low, at_high) = (evaluate(minimal, &low), evaluate(minimal, &high));
    if minimal.len() == 2 {
        let root = -&minimal[0];
        if root < low || root > high {
            return Err(format!("omega is {root}"));
        }
        (low, high) = (root.clone(), root);
    } else if (&at_low * &at_high).is_positive() || at_low.is_zero() || at_high.is_zero() {
        return Err("no root of the minimal polynomial rounds to this omega".into());
    }
    let negative_below = at_low.is_negative();
    // Halve until the range of γ₁ lies inside or outside the interval that rounds to the printed value.
    for _ in 0..4096 {
        let (least, most) = range(one_loop, &low, &high);
        let (from, to) = (&value.value - &value.half, &value.value + &value.half);
        if least >= from && most <= to {
            return Ok(());
        }
        if most < from || least > to {
            return Err("the one-loop value is wrong".into());
        }
        let middle = (&low + &high) / BigRational::from(BigInt::from(2));
        let at_middle = evaluate(minimal, &middle);
        if at_middle.is_zero() || at_middle.is_negative() != negative_below {
            high = middle;
        } else {
            low = middle;
        }
    }
    Err("the one-loop value is too close to a rounding boundary to decide".into())
}

#[cfg(test)]
mod tests {
    use super::check_states;
    use crate::audit::poly::ratio;
    use num_rational::BigRational;

    fn states(list: &[(&str, &str)]) -> Vec<(String, String)> {
        list.iter().map(|(a, b)| (a.to_string(), b.to_string())).collect()
    }

    /// ω² = 2, γ₁ = 3 + ω: √2 = 1.41421356…
    #[test]
    fn square_root_of_two() {
        let minimal: Vec<BigRational> = [-2, 0, 1].map(|c| ratio(c, 1)).to_vec();
        let one_loop: Vec<BigRational> = [3, 1].map(|c| ratio(c, 1)).to_vec();
        let check = |list| check_states(&minimal, &one_loop, &states(list));
        check(&[("-1.41421", "1.5857864"), ("1.4142", "4.414213562")]).unwrap();
        assert!(check(&[("-1.41422", "1.58579")]).unwrap_err().contains("no root"));
        assert!(check(&[("-1.41421", "1.58578")]).unwrap_err().contains("one-loop value"));
        assert!(check(&[("1.41421", "4.4142"), ("-1.41421", "1.5858")]).unwrap_err().contains("sorted"));
        assert!(check(&[("1.41421", "4.4142"), ("1.4142", "4.4142")]).unwrap_err().contains("same omega"));
    }

    #[test]
    fn rational_states() {
        let minimal = [ratio(-12, 1), ratio(1, 1)];
        let one_loop = [ratio(12, 1)];
        assert!(check_states(&minimal, &one_loop, &states(&[("12", "12.000")])).is_ok());
        assert!(check_states(&minimal, &one_loop, &states(&[("12", "12.001")])).is_err());
        assert!(check_states(&minimal, &one_loop, &states(&[("13", "12.000")])).is_err());
    }
}
