//! The small language in which reference values are written: rationals, printed decimals, ω, zeta
//! values, square roots of rationals, sums, products, quotients and powers.
//!
//! Accepted spellings: `zeta(3)`, `z3`, `ζ3`, `ζ(3)`; multiple zeta values `zeta(5,3)`; ω as `w`,
//! `omega` or `ω`; powers as `w^2` or `w²`; `*`, `·` or nothing at all for a product; `−` for `-`.
//! Parsing takes time linear in the text and never recurses deeper than [`DEPTH`].

use crate::record::Zeta;
use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::{One, Zero};

/// The deepest nesting of parentheses accepted.
const DEPTH: usize = 48;

/// The longest expression accepted, in bytes.
const LONGEST: usize = 200_000;

/// The most digits of one number accepted.
const DIGITS: usize = 5_000;

/// The largest exponent accepted.
const EXPONENT: u32 = 400;

/// A parsed expression.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Expression {
    /// A number; `places` counts the digits after the point of a printed decimal.
    Number {
        /// The number as written.
        value: BigRational,
        /// Digits after the decimal point (negative for 1.2e9), `None` for an exact integer.
        places: Option<i32>,
    },
    /// ω.
    Omega,
    /// A zeta value.
    Zeta(Zeta),
    /// √r of a non-negative rational, written `sqrt(5)` or `√5`.
    Root(BigRational),
    /// Σ.
    Sum(Vec<Expression>),
    /// Π; `true` marks a factor in the denominator.
    Product(Vec<(Expression, bool)>),
    /// A power with a whole exponent.
    Power(Box<Expression>, u32),
    /// −x.
    Minus(Box<Expression>),
}

/// Reads an expression.
///
/// # Errors
/// A message that says what was met where a number, a name or an operator was expected.
pub fn parse(text: &str) -> Result<Expression, String> {
    if text.len() > LONGEST {
        return Err(format!("longer than {LONGEST} bytes"));
    }
    let tokens = tokenise(text)?;
    let mut parser = Parser { tokens: &tokens, next: 0 };
    let expression = parser.sum(0)?;
    match parser.peek() {
        None => Ok(expression),
        Some(token) => Err(format!("{token} where the expression should end or go on with + - * /")),
    }
}

impl Expression {
    /// Whether a printed decimal occurs anywhere.
    pub fn has_decimals(&self) -> bool {
        match self {
            Expression::Number { places, .. } => places.is_some(),
            Expression::Omega | Expression::Zeta(_) | Expression::Root(_) => false,
            Expression::Sum(parts) => parts.iter().any(Expression::has_decimals),
            Expression::Product(parts) => parts.iter().any(|(part, _)| part.has_decimals()),
            Expression::Power(base, _) | Expression::Minus(base) => base.has_decimals(),
        }
    }

    /// Whether a square root occurs anywhere.
    pub fn has_roots(&self) -> bool {
        match self {
            Expression::Root(_) => true,
            Expression::Omega | Expression::Zeta(_) | Expression::Number { .. } => false,
            Expression::Sum(parts) => parts.iter().any(Expression::has_roots),
            Expression::Product(parts) => parts.iter().any(|(part, _)| part.has_roots()),
            Expression::Power(base, _) | Expression::Minus(base) => base.has_roots(),
        }
    }
}

#[derive(Clone, Debug, PartialEq)]
enum Token {
    Number(BigRational, Option<i32>),
    Name(String),
    Symbol(char),
}

impl std::fmt::Display for Token {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        match self {
            Token::Number(value, _) => write!(f, "the number {value}"),
            Token::Name(name) => write!(f, "\"{name}\""),
            Token::Symbol(symbol) => write!(f, "\"{symbol}\""),
        }
    }
}

fn superscript(c: char) -> Option<char> {
    let digits = ['⁰', '¹', '²', '³', '⁴', '⁵', '⁶', '⁷', '⁸', '⁹'];
    digits.iter().position(|&d| d == c).and_then(|d| char::from_digit(d as u32, 10))
}

fn tokenise(text: &str) -> Result<Vec<Token>, String> {
    let characters: Vec<char> = text.chars().collect();
    let mut tokens = Vec::new();
    let mut at = 0;
    while at < characters.len() {
        let c = characters[at];
        if c.is_whitespace() {
            at += 1;
        } else if c.is_ascii_digit() || (c == '.' && characters.get(at + 1).is_some_and(char::is_ascii_digit)) {
            let (token, end) = number(&characters, at)?;
            tokens.push(token);
            at = end;
        } else if superscript(c).is_some() {
            let digits: String = characters[at..].iter().map_while(|&c| superscript(c)).collect();
            at += digits.chars().count();
            tokens.push(Token::Symbol('^'));
            tokens.push(Token::Number(BigRational::from(digits_value(&digits)?), None));
        } else if c == 'ζ' || c == 'ω' || c == 'π' || c == 'λ' {
            tokens.push(Token::Name(c.to_string()));
            at += 1;
        } else if c == '√' {
            tokens.push(Token::Name("sqrt".into()));
            at += 1;
        } else if c.is_ascii_alphabetic() {
            let name: String = characters[at..].iter().take_while(|c| c.is_ascii_alphabetic()).collect();
            at += name.len();
            tokens.push(Token::Name(name));
        } else {
            let symbol = match c {
                '−' | '–' => '-',
                '·' | '×' => '*',
                '+' | '-' | '*' | '/' | '^' | '(' | ')' | ',' => c,
                other => return Err(format!("the character {other:?}, which has no meaning here")),
            };
            tokens.push(Token::Symbol(symbol));
            at += 1;
        }
    }
    Ok(tokens)
}

fn digits_value(digits: &str) -> Result<BigInt, String> {
    if digits.len() > DIGITS {
        return Err(format!("a number of more than {DIGITS} digits"));
    }
    if digits.is_empty() {
        Ok(BigInt::zero())
    } else {
        digits.parse().map_err(|_| format!("\"{digits}\" is no number"))
    }
}

fn number(characters: &[char], start: usize) -> Result<(Token, usize), String> {
    let run = |from: usize| characters[from..].iter().take_while(|c| c.is_ascii_digit()).count();
    let text = |from: usize, count: usize| characters[from..from + count].iter().collect::<String>();
    let whole = run(start);
    let mut end = start + whole;
    let mut digits = text(start, whole);
    let mut places = None;
    if characters.get(end) == Some(&'.') {
        let fraction = run(end + 1);
        digits.push_str(&text(end + 1, fraction));
        places = Some(i32::try_from(fraction).map_err(|_| "a number of too many digits".to_string())?);
        end += 1 + fraction;
    }
    if matches!(characters.get(end), Some('e' | 'E')) {
        let signed = matches!(characters.get(end + 1), Some('+' | '-' | '−'));
        let first = end + 1 + usize::from(signed);
        let count = if first <= characters.len() { run(first) } else { 0 };
        if count > 0 {
            let size: i32 =
                text(first, count).parse().ok().filter(|&size| size <= 4000).ok_or("an exponent above 4000")?;
            let negative = signed && characters[end + 1] != '+';
            places = Some(places.unwrap_or(0) - if negative { -size } else { size });
            end = first + count;
        }
    }
    let value = BigRational::from(digits_value(&digits)?);
    let value = match places {
        None | Some(0) => value,
        Some(places) => {
            let ten = BigRational::from(BigInt::from(10).pow(places.unsigned_abs()));
            if places > 0 { value / ten } else { value * ten }
        }
    };
    Ok((Token::Number(value, places), end))
}

struct Parser<'a> {
    tokens: &'a [Token],
    next: usize,
}

impl Parser<'_> {
    fn peek(&self) -> Option<&Token> {
        self.tokens.get(self.next)
    }

    fn take(&mut self, symbol: char) -> bool {
        let found = self.peek() == Some(&Token::Symbol(symbol));
        self.next += usize::from(found);
        found
    }

    fn expect(&mut self, symbol: char) -> Result<(), String> {
        if self.take(symbol) { Ok(()) } else { Err(format!("{} where \"{symbol}\" is needed", self.met())) }
    }

    fn met(&self) -> String {
        self.peek().map_or_else(|| "the end".into(), Token::to_string)
    }

    fn sum(&mut self, depth: usize) -> Result<Expression, String> {
        if depth > DEPTH {
            return Err(format!("parentheses nested deeper than {DEPTH}"));
        }
        let mut parts = Vec::new();
        loop {
            let mut negative = false;
            let mut signs = 0;
            loop {
                if self.take('-') {
                    negative = !negative;
                } else if !self.take('+') {
                    break;
                }
                signs += 1;
            }
            if !parts.is_empty() && signs == 0 {
                break;
            }
            let part = self.product(depth)?;
            parts.push(if negative { Expression::Minus(Box::new(part)) } else { part });
        }
        Ok(if parts.len() == 1 { parts.swap_remove(0) } else { Expression::Sum(parts) })
    }

    fn product(&mut self, depth: usize) -> Result<Expression, String> {
        let mut parts = vec![(self.power(depth)?, false)];
        loop {
            if self.take('*') {
                parts.push((self.power(depth)?, false));
            } else if self.take('/') {
                parts.push((self.power(depth)?, true));
            } else if matches!(self.peek(), Some(Token::Name(_) | Token::Symbol('('))) {
                parts.push((self.power(depth)?, false));
            } else {
                break;
            }
        }
        Ok(if parts.len() == 1 { parts.swap_remove(0).0 } else { Expression::Product(parts) })
    }

    fn power(&mut self, depth: usize) -> Result<Expression, String> {
        let base = self.atom(depth)?;
        if !self.take('^') {
            return Ok(base);
        }
        let exponent = self.whole("an exponent")?;
        if exponent > EXPONENT {
            return Err(format!("the exponent {exponent}, above {EXPONENT}"));
        }
        Ok(Expression::Power(Box::new(base), exponent))
    }

    fn whole(&mut self, what: &str) -> Result<u32, String> {
        let value = match self.peek() {
            Some(Token::Number(value, None)) if value.denom().is_one() => u32::try_from(value.numer()).ok(),
            _ => None,
        };
        self.next += usize::from(value.is_some());
        value.ok_or_else(|| format!("{} where {what}, a whole number, is needed", self.met()))
    }

    fn atom(&mut self, depth: usize) -> Result<Expression, String> {
        let token = self.peek().cloned().ok_or("the end where a number or a name is needed")?;
        self.next += 1;
        match token {
            Token::Number(value, places) => Ok(Expression::Number { value, places }),
            Token::Symbol('(') => {
                let inner = self.sum(depth + 1)?;
                self.expect(')')?;
                Ok(inner)
            }
            Token::Name(name) => match name.as_str() {
                "w" | "ω" | "omega" => Ok(Expression::Omega),
                "z" | "ζ" => self.zeta(),
                "zeta" if self.peek() == Some(&Token::Symbol('(')) => self.zeta(),
                "sqrt" => self.root(),
                other => Err(format!("the name \"{other}\"; known are w (or omega), zeta(3) (or z3), sqrt(5)")),
            },
            other => Err(format!("{other} where a number or a name is needed")),
        }
    }

    fn zeta(&mut self) -> Result<Expression, String> {
        let mut arguments = Vec::new();
        if self.take('(') {
            loop {
                arguments.push(self.whole("the argument of a zeta value")?);
                if !self.take(',') {
                    break;
                }
            }
            self.expect(')')?;
        } else {
            arguments.push(self.whole("the argument of a zeta value")?);
        }
        if arguments[0] < 2 || arguments.contains(&0) || arguments.iter().any(|&a| a > 10_000) || arguments.len() > 16 {
            return Err(format!("zeta({arguments:?}), which diverges or is out of range"));
        }
        Ok(Expression::Zeta(if arguments.len() == 1 { Zeta::Single(arguments[0]) } else { Zeta::Multiple(arguments) }))
    }

    fn root(&mut self) -> Result<Expression, String> {
        let closing = self.take('(');
        let mut value = BigRational::from(BigInt::from(self.whole("the argument of a square root")?));
        if closing {
            if self.take('/') {
                let denominator = self.whole("a denominator")?;
                if denominator == 0 {
                    return Err("a denominator of zero".into());
                }
                value /= BigRational::from(BigInt::from(denominator));
            }
            self.expect(')')?;
        }
        Ok(Expression::Root(value))
    }
}

#[cfg(test)]
mod tests {
    use super::{Expression, parse};
    use crate::record::Zeta;
    use num_rational::BigRational;
    use proptest::prelude::*;

    #[test]
    fn spellings_of_the_same_value_parse_alike() {
        let plain = parse("3 * w^2 * zeta(3)^2 - 1/2").unwrap();
        for other in ["3w²ζ3² − 1/2", "3 omega^2 z3^2 - 1/2", "3·ω²·ζ(3)² - 1/2"] {
            assert_eq!(parse(other).unwrap(), plain, "{other}");
        }
        assert_eq!(parse("zeta(5,3)").unwrap(), Expression::Zeta(Zeta::Multiple(vec![5, 3])));
    }

    #[test]
    fn decimals_keep_their_places() {
        for (text, value, count) in [("-352.94", (-35294, 100), 2), ("1.5e3", (1500, 1), -2), ("2e-3", (2, 1000), 3)] {
            let parsed = parse(text).unwrap();
            let inner = if let Expression::Minus(inner) = &parsed { inner.as_ref().clone() } else { parsed.clone() };
            let Expression::Number { value: found, places } = inner else { panic!("{text}: {parsed:?}") };
            assert_eq!(found, BigRational::new((i32::abs(value.0)).into(), value.1.into()), "{text}");
            assert_eq!(places, Some(count), "{text}");
        }
    }

    #[test]
    fn nonsense_is_refused_with_words() {
        for bad in
            ["", "1 +", "(1", "1)", "zeta(1)", "w^w", "w^401", "x", "1 # 2", "zeta", "sqrt(1/0)", "1..2", "zeta(3"]
        {
            let message = parse(bad).unwrap_err();
            assert!(!message.is_empty(), "{bad}");
        }
        assert!(parse(&"(".repeat(100_000)).unwrap_err().contains("nested"));
    }

    proptest! {
        #[test]
        fn arbitrary_bytes_never_panic(bytes in proptest::collection::vec(any::<u8>(), 0..400)) {
            let _ = parse(&String::from_utf8_lossy(&bytes));
        }

        #[test]
        fn arbitrary_words_of_the_language_never_panic(text in "[0-9wz()^*/+.,e ζω²√-]{0,60}") {
            let _ = parse(&text);
        }
    }
}
