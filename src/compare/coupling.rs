//! The coupling a paper uses, read from a formula such as "lambda/(8 pi^2)".

use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::{One, Signed, Zero};

/// c in x = c g², where x is the paper's coupling and g² = λ/(16π²) (formulas §0). Then the paper's
/// n-loop coefficient is γ_n / cⁿ.
///
/// Accepted: a product and quotient of rationals, λ ("lambda", "λ" or "g_YM^2 N") exactly once,
/// and π ("pi", "π") to the power −2 altogether; an optional left side "g^2 =" is skipped.
///
/// # Errors
/// What in the formula is not understood, or that it is not a rational multiple of λ/π².
pub fn parse(text: &str) -> Result<BigRational, String> {
    if text.len() > 400 {
        return Err("longer than 400 bytes".into());
    }
    let formula = text.rsplit('=').next().unwrap_or(text);
    let formula = formula.replace("g_YM^2 N", "lambda").replace("g_{YM}^2 N", "lambda").replace("g_YM^2*N", "lambda");
    let characters: Vec<char> = formula.chars().filter(|c| !c.is_whitespace()).collect();
    let mut reader = Reader { characters: &characters, at: 0 };
    let monomial = reader.product(0)?;
    if reader.at < characters.len() {
        return Err(format!("{:?} where the formula should end", characters[reader.at]));
    }
    if monomial.lambda != 1 || monomial.pi != -2 || !monomial.factor.is_positive() {
        return Err("not a positive rational times lambda/pi^2".into());
    }
    Ok(monomial.factor * BigRational::from(BigInt::from(16)))
}

/// The formula for x = c g², in lowest terms: c = 2 gives "lambda/(8 pi^2)".
pub fn formula(c: &BigRational) -> String {
    let factor = c / BigRational::from(BigInt::from(16));
    let lambda = if factor.numer().is_one() { "lambda".to_string() } else { format!("{} lambda", factor.numer()) };
    let pi = if factor.denom().is_one() { "pi^2".to_string() } else { format!("({} pi^2)", factor.denom()) };
    format!("{lambda}/{pi}")
}

struct Monomial {
    factor: BigRational,
    lambda: i32,
    pi: i32,
}

struct Reader<'a> {
    characters: &'a [char],
    at: usize,
}

impl Reader<'_> {
    fn peek(&self) -> Option<char> {
        self.characters.get(self.at).copied()
    }

    fn product(&mut self, depth: usize) -> Result<Monomial, String> {
        if depth > 8 {
            return Err("too many parentheses".into());
        }
        let mut all = Monomial { factor: BigRational::one(), lambda: 0, pi: 0 };
        let mut divide = false;
        loop {
            let part = self.power(depth)?;
            let sign = if divide { -1 } else { 1 };
            if divide && part.factor.is_zero() {
                return Err("a division by zero".into());
            }
            all.factor = if divide { all.factor / part.factor } else { all.factor * part.factor };
            all.lambda += sign * part.lambda;
            all.pi += sign * part.pi;
            match self.peek() {
                Some('/') => (divide, self.at) = (true, self.at + 1),
                Some('*' | '·') => (divide, self.at) = (false, self.at + 1),
                None | Some(')') => return Ok(all),
                Some(_) => divide = false,
            }
        }
    }

    fn power(&mut self, depth: usize) -> Result<Monomial, String> {
        let base = self.atom(depth)?;
        let exponent = match self.peek() {
            Some('^') => {
                self.at += 1;
                let value = self.integer().ok_or("an exponent that is no whole number")?;
                i32::try_from(value).ok().filter(|&e| e <= 8).ok_or("an exponent above 8")?
            }
            Some('²') => {
                self.at += 1;
                2
            }
            _ => return Ok(base),
        };
        Ok(Monomial {
            factor: base.factor.pow(exponent),
            lambda: base.lambda.checked_mul(exponent).ok_or("an exponent out of range")?,
            pi: base.pi.checked_mul(exponent).ok_or("an exponent out of range")?,
        })
    }

    fn integer(&mut self) -> Option<BigInt> {
        let digits: String = self.characters[self.at..].iter().take_while(|c| c.is_ascii_digit()).collect();
        self.at += digits.len();
        digits.parse().ok()
    }

    fn atom(&mut self, depth: usize) -> Result<Monomial, String> {
        let plain = |factor, lambda, pi| Ok(Monomial { factor, lambda, pi });
        let Some(first) = self.peek() else { return Err("the end where a number, lambda or pi is needed".into()) };
        if first == '(' {
            self.at += 1;
            let inner = self.product(depth + 1)?;
            if self.peek() != Some(')') {
                return Err("a parenthesis that is not closed".into());
            }
            self.at += 1;
            return Ok(inner);
        }
        if first.is_ascii_digit() {
            return match self.integer() {
                Some(value) => plain(BigRational::from(value), 0, 0),
                None => Err("a number that cannot be read".into()),
            };
        }
        for (name, lambda, pi) in [("lambda", 1, 0), ("λ", 1, 0), ("pi", 0, 1), ("π", 0, 1)] {
            let letters: Vec<char> = name.chars().collect();
            if self.characters[self.at..].starts_with(&letters) {
                self.at += letters.len();
                return plain(BigRational::one(), lambda, pi);
            }
        }
        Err(format!("{first:?} where a number, lambda or pi is needed"))
    }
}

#[cfg(test)]
mod tests {
    use super::{formula, parse};
    use num_rational::BigRational;
    use proptest::prelude::*;

    #[test]
    fn common_couplings() {
        for (text, c) in [
            ("lambda/(16 pi^2)", (1, 1)),
            ("g^2 = lambda/(16 pi^2)", (1, 1)),
            ("λ/(8π²)", (2, 1)),
            ("g_YM^2 N/(8 pi^2)", (2, 1)),
            ("lambda/(4 pi)^2", (1, 1)),
            ("lambda/pi^2", (16, 1)),
            ("3 lambda/(32 pi^2)", (3, 2)),
        ] {
            assert_eq!(parse(text).unwrap(), BigRational::new(c.0.into(), c.1.into()), "{text}");
        }
        assert_eq!(formula(&BigRational::from(num_bigint::BigInt::from(2))), "lambda/(8 pi^2)");
        assert_eq!(formula(&BigRational::from(num_bigint::BigInt::from(16))), "lambda/pi^2");
    }

    #[test]
    fn anything_else_is_refused() {
        for bad in ["", "lambda", "lambda^2/pi^2", "lambda/(8 pi", "g", "1/pi^2", "lambda/(0 pi^2)", "lambda/pi^9"] {
            assert!(parse(bad).is_err(), "{bad}");
        }
    }

    proptest! {
        #[test]
        fn arbitrary_text_never_panics(text in "\\PC{0,60}", close in "[0-9lambdapi()^/*λπ²]{0,40}") {
            let _ = parse(&text);
            let _ = parse(&close);
        }
    }
}
