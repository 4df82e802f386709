//! Exact values: Σ (element of Q(ω)) × (product of zeta values), and their arithmetic.

use super::expression::Expression;
use crate::record::{Term, Zeta};
use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::{One, Signed, Zero};
use std::collections::BTreeMap;

/// The largest number of bits of one coefficient before an evaluation is given up.
const BITS: u64 = 20_000;

/// The largest number of zeta monomials, and the largest weight, of one value.
const MONOMIALS: usize = 2_000;

/// An element of Q(ω): coefficients of 1, ω, ω², … below the degree.
pub type Element = Vec<BigRational>;

/// Zeta product (factors ascending) → element; never holds a zero element.
pub type Value = BTreeMap<Vec<Zeta>, Element>;

/// The field in which an expression is evaluated.
#[derive(Clone, Debug)]
pub struct Field {
    /// Minimal polynomial of ω, constant term first, monic.
    pub minimal: Vec<BigRational>,
    /// For degree 2: whether the state is the larger of the two roots; decides the sign of square roots.
    pub larger: Option<bool>,
}

impl Field {
    /// The degree of ω.
    pub fn degree(&self) -> usize {
        self.minimal.len() - 1
    }

    fn scalar(&self, value: BigRational) -> Element {
        let mut element = vec![BigRational::zero(); self.degree()];
        element[0] = value;
        element
    }

    /// ω itself.
    pub fn omega(&self) -> Element {
        let mut omega = vec![BigRational::zero(); self.degree()];
        match omega.get_mut(1) {
            Some(entry) => *entry = BigRational::one(),
            None => omega[0] = -self.minimal[0].clone(),
        }
        omega
    }

    /// a·b modulo the minimal polynomial; degree² products.
    pub fn multiply(&self, a: &Element, b: &Element) -> Element {
        let degree = self.degree();
        let mut product = vec![BigRational::zero(); 2 * degree - 1];
        for (i, x) in a.iter().enumerate().filter(|(_, x)| !x.is_zero()) {
            for (j, y) in b.iter().enumerate().filter(|(_, y)| !y.is_zero()) {
                product[i + j] += x * y;
            }
        }
        for high in (degree..product.len()).rev() {
            let top = std::mem::replace(&mut product[high], BigRational::zero());
            if !top.is_zero() {
                for (low, coefficient) in self.minimal[..degree].iter().enumerate() {
                    product[high - degree + low] -= &top * coefficient;
                }
            }
        }
        product.truncate(degree);
        product
    }

    /// 1/a, by solving a·x = 1; `None` for zero (or when the modulus is not irreducible).
    pub fn inverse(&self, a: &Element) -> Option<Element> {
        let degree = self.degree();
        let mut columns = vec![a.clone()];
        let omega = self.omega();
        for _ in 1..degree {
            columns.push(self.multiply(columns.last()?, &omega));
        }
        let mut rows: Vec<Vec<BigRational>> = (0..degree)
            .map(|row| {
                let mut line: Vec<BigRational> = columns.iter().map(|column| column[row].clone()).collect();
                line.push(if row == 0 { BigRational::one() } else { BigRational::zero() });
                line
            })
            .collect();
        for pivot in 0..degree {
            let row = (pivot..degree).find(|&row| !rows[row][pivot].is_zero())?;
            rows.swap(pivot, row);
            let scale = rows[pivot][pivot].recip();
            let line: Vec<BigRational> = rows[pivot].iter().map(|entry| entry * &scale).collect();
            for (index, other) in rows.iter_mut().enumerate() {
                if index != pivot && !other[pivot].is_zero() {
                    let factor = other[pivot].clone();
                    for (entry, top) in other.iter_mut().zip(&line) {
                        *entry -= &factor * top;
                    }
                }
            }
            rows[pivot] = line;
        }
        Some(rows.into_iter().map(|mut line| line.pop().unwrap_or_else(BigRational::zero)).collect())
    }

    /// √r as an element, positive at the selected state.
    fn root(&self, r: &BigRational) -> Result<Element, String> {
        if let Some(root) = rational_root(r) {
            return Ok(self.scalar(root));
        }
        let message = || format!("sqrt({r}) does not lie in the field of this state");
        if self.degree() != 2 {
            return Err(message());
        }
        let four = BigRational::from(BigInt::from(4));
        let discriminant = &self.minimal[1] * &self.minimal[1] - four * &self.minimal[0];
        if !discriminant.is_positive() {
            return Err(message());
        }
        let ratio = rational_root(&(r / &discriminant)).ok_or_else(message)?;
        let larger = self.larger.ok_or(
            "a square root is written, and the selector does not say which of the two states is meant; add one_loop",
        )?;
        // 2ω + b = ±√discriminant, positive at the larger root.
        let ratio = if larger { ratio } else { -ratio };
        Ok(vec![&self.minimal[1] * &ratio, ratio * BigRational::from(BigInt::from(2))])
    }
}

fn rational_root(r: &BigRational) -> Option<BigRational> {
    if r.is_negative() {
        return None;
    }
    let root = BigRational::new(r.numer().sqrt(), r.denom().sqrt());
    (&root * &root == *r).then_some(root)
}

/// Evaluates an expression in a field.
///
/// # Errors
/// A division by zero or by a zeta value, a square root outside the field, or numbers past the
/// bounds of this module.
pub fn evaluate(expression: &Expression, field: &Field) -> Result<Value, String> {
    let single = |zeta: Vec<Zeta>, element: Element| {
        let mut value = Value::new();
        if element.iter().any(|c| !c.is_zero()) {
            value.insert(zeta, element);
        }
        value
    };
    match expression {
        Expression::Number { value, .. } => Ok(single(Vec::new(), field.scalar(value.clone()))),
        Expression::Omega => Ok(single(Vec::new(), field.omega())),
        Expression::Zeta(zeta) => Ok(single(vec![zeta.clone()], field.scalar(BigRational::one()))),
        Expression::Root(r) => Ok(single(Vec::new(), field.root(r)?)),
        Expression::Minus(inner) => Ok(scale(&evaluate(inner, field)?, &-BigRational::one())),
        Expression::Sum(parts) => {
            let mut sum = Value::new();
            for part in parts {
                sum = add(&sum, &evaluate(part, field)?);
                within_bounds(&sum)?;
            }
            Ok(sum)
        }
        Expression::Product(parts) => {
            let mut product = single(Vec::new(), field.scalar(BigRational::one()));
            for (part, divide) in parts {
                let mut factor = evaluate(part, field)?;
                if *divide {
                    let element = match factor.len() {
                        0 => return Err("a division by zero".into()),
                        1 => factor.remove(&Vec::new()),
                        _ => None,
                    };
                    let element = element.ok_or("a division by something with zeta values")?;
                    let inverse = field.inverse(&element).ok_or("a division by zero")?;
                    factor = single(Vec::new(), inverse);
                }
                product = multiply(&product, &factor, field)?;
            }
            Ok(product)
        }
        Expression::Power(base, exponent) => {
            let base = evaluate(base, field)?;
            let mut power = single(Vec::new(), field.scalar(BigRational::one()));
            for _ in 0..*exponent {
                power = multiply(&power, &base, field)?;
            }
            Ok(power)
        }
    }
}

fn within_bounds(value: &Value) -> Result<(), String> {
    let bits = value.values().flatten().map(|c| c.numer().bits() + c.denom().bits()).max().unwrap_or(0);
    if value.len() > MONOMIALS || bits > BITS || value.keys().any(|zeta| zeta.len() > 64) {
        return Err("a value too large to be a loop coefficient".into());
    }
    Ok(())
}

fn multiply(a: &Value, b: &Value, field: &Field) -> Result<Value, String> {
    let mut product = Value::new();
    if a.len().saturating_mul(b.len()) > 50 * MONOMIALS {
        return Err("a value too large to be a loop coefficient".into());
    }
    for (zeta_a, x) in a {
        for (zeta_b, y) in b {
            let mut zeta: Vec<Zeta> = zeta_a.iter().chain(zeta_b).cloned().collect();
            zeta.sort();
            accumulate(&mut product, zeta, &field.multiply(x, y));
        }
    }
    within_bounds(&product)?;
    Ok(product)
}

fn accumulate(value: &mut Value, zeta: Vec<Zeta>, element: &Element) {
    let entry = value.entry(zeta.clone()).or_insert_with(|| vec![BigRational::zero(); element.len()]);
    for (sum, part) in entry.iter_mut().zip(element) {
        *sum += part;
    }
    if entry.iter().all(BigRational::is_zero) {
        value.remove(&zeta);
    }
}

/// a + b.
pub fn add(a: &Value, b: &Value) -> Value {
    let mut sum = a.clone();
    for (zeta, element) in b {
        accumulate(&mut sum, zeta.clone(), element);
    }
    sum
}

/// factor · a.
pub fn scale(a: &Value, factor: &BigRational) -> Value {
    if factor.is_zero() {
        return Value::new();
    }
    a.iter().map(|(zeta, element)| (zeta.clone(), element.iter().map(|c| c * factor).collect())).collect()
}

/// The rational q with a = q·b, if there is one (b not zero).
pub fn ratio(a: &Value, b: &Value) -> Option<BigRational> {
    let (zeta, element) = b.iter().next()?;
    let position = element.iter().position(|c| !c.is_zero())?;
    let q = a.get(zeta)?.get(position)? / &element[position];
    (scale(b, &q) == *a).then_some(q)
}

/// The terms of a record as a value.
///
/// # Errors
/// A number that is no rational (a checked record has none).
pub fn from_terms(terms: &[Term]) -> Result<Value, String> {
    let mut value = Value::new();
    for term in terms {
        let element: Option<Element> = term.value.iter().map(|text| text.parse().ok()).collect();
        let element = element.ok_or("a coefficient that is no rational")?;
        let mut zeta = term.zeta.clone();
        zeta.sort();
        accumulate(&mut value, zeta, &element);
    }
    Ok(value)
}

/// The part without zeta values.
pub fn zeta_free(value: &Value) -> Value {
    value.iter().filter(|(zeta, _)| zeta.is_empty()).map(|(zeta, element)| (zeta.clone(), element.clone())).collect()
}

/// The value as text in the language of [`super::expression`].
pub fn text(value: &Value) -> String {
    let mut keys: Vec<&Vec<Zeta>> = value.keys().collect();
    keys.sort_by_key(|zeta| (zeta.len(), (*zeta).clone()));
    let mut out = String::new();
    for zeta in keys {
        let element = &value[zeta];
        let entries: Vec<(usize, &BigRational)> = element.iter().enumerate().filter(|(_, c)| !c.is_zero()).collect();
        let product = zeta_text(zeta);
        if entries.len() == 1 || product.is_empty() {
            for (power, coefficient) in entries {
                push_term(&mut out, coefficient, &[omega_text(power), product.clone()]);
            }
        } else {
            let mut inner = String::new();
            for (power, coefficient) in entries {
                push_term(&mut inner, coefficient, &[omega_text(power)]);
            }
            out.push_str(if out.is_empty() { "" } else { " + " });
            out.push_str(&format!("({inner}) {product}"));
        }
    }
    if out.is_empty() { "0".into() } else { out }
}

fn push_term(out: &mut String, coefficient: &BigRational, names: &[String]) {
    let names: Vec<&str> = names.iter().map(String::as_str).filter(|name| !name.is_empty()).collect();
    let sign = match (out.is_empty(), coefficient.is_negative()) {
        (true, false) => "",
        (true, true) => "-",
        (false, false) => " + ",
        (false, true) => " - ",
    };
    out.push_str(sign);
    let size = coefficient.abs();
    if names.is_empty() || !size.is_one() {
        out.push_str(&size.to_string());
        out.push_str(if names.is_empty() { "" } else { " " });
    }
    out.push_str(&names.join(" "));
}

fn omega_text(power: usize) -> String {
    match power {
        0 => String::new(),
        1 => "w".into(),
        _ => format!("w^{power}"),
    }
}

/// A zeta product: "zeta(3)^2 zeta(5)".
pub fn zeta_text(zeta: &[Zeta]) -> String {
    let mut parts: Vec<String> = Vec::new();
    let mut rest = zeta;
    while let Some(first) = rest.first() {
        let count = rest.iter().take_while(|other| *other == first).count();
        let name = match first {
            Zeta::Single(k) => format!("zeta({k})"),
            Zeta::Multiple(ks) => format!("zeta({})", ks.iter().map(u32::to_string).collect::<Vec<_>>().join(",")),
        };
        parts.push(if count == 1 { name } else { format!("{name}^{count}") });
        rest = &rest[count..];
    }
    parts.join(" ")
}

#[cfg(test)]
mod tests {
    use super::{Element, Field, evaluate, ratio, text};
    use crate::compare::expression::parse;
    use num_bigint::BigInt;
    use num_rational::BigRational;
    use num_traits::One;
    use proptest::prelude::*;

    fn rationals(values: &[i64]) -> Element {
        values.iter().map(|&v| BigRational::from(BigInt::from(v))).collect()
    }

    fn cubic() -> Field {
        Field { minimal: rationals(&[-1600, 464, -40, 1]), larger: None }
    }

    fn quadratic(larger: bool) -> Field {
        Field { minimal: rationals(&[80, -20, 1]), larger: Some(larger) }
    }

    #[test]
    fn the_generator_satisfies_its_polynomial() {
        assert_eq!(text(&evaluate(&parse("w^3 - 40 w^2 + 464 w - 1600").unwrap(), &cubic()).unwrap()), "0");
    }

    #[test]
    fn inverses() {
        let field = cubic();
        for entries in [[1, 2, 3], [0, 1, 0], [-7, 0, 5]] {
            let a = rationals(&entries);
            let mut product = field.multiply(&a, &field.inverse(&a).unwrap());
            assert!(product.remove(0).is_one() && product.iter().all(num_traits::Zero::is_zero));
        }
        assert!(field.inverse(&rationals(&[0, 0, 0])).is_none());
    }

    #[test]
    fn square_roots_in_quadratic_fields_take_the_sign_of_the_state() {
        let at = |larger, what: &str| text(&evaluate(&parse(what).unwrap(), &quadratic(larger)).unwrap());
        assert_eq!(at(true, "10 + 2 sqrt(5)"), "w");
        assert_eq!(at(false, "10 - 2 sqrt(5)"), "w");
        assert_eq!(at(false, "sqrt(9/4)"), "3/2");
        assert!(evaluate(&parse("sqrt(3)").unwrap(), &quadratic(true)).is_err());
    }

    #[test]
    fn huge_values_are_refused_and_not_computed() {
        for huge in ["((9^400)^400)^400", "(z3 + z5 + z7 + z9 + z11 + z13)^400", "z3^400", "1/z3", "1/(w - w)"] {
            assert!(evaluate(&parse(huge).unwrap(), &cubic()).is_err(), "{huge}");
        }
    }

    #[test]
    fn ratios() {
        let field = cubic();
        let value = |what: &str| evaluate(&parse(what).unwrap(), &field).unwrap();
        assert_eq!(ratio(&value("8 w + 16 z3"), &value("w + 2 z3")), Some(BigRational::from(BigInt::from(8))));
        assert_eq!(ratio(&value("8 w + 17 z3"), &value("w + 2 z3")), None);
        assert_eq!(ratio(&value("w"), &value("0")), None);
    }

    proptest! {
        /// What is printed parses back to the same value.
        #[test]
        fn text_round_trips(entries in proptest::collection::vec((-99i64..99, 1i64..9, 0u32..3, 0u32..3, 0u32..3), 0..8)) {
            let field = cubic();
            let source = entries
                .iter()
                .map(|(n, d, w, a, b)| format!("({n}/{d}) w^{w} z3^{a} z5^{b}"))
                .collect::<Vec<_>>()
                .join(" + ");
            let source = if source.is_empty() { "0".to_string() } else { source };
            let value = evaluate(&parse(&source).unwrap(), &field).unwrap();
            prop_assert_eq!(&evaluate(&parse(&text(&value)).unwrap(), &field).unwrap(), &value);
        }
    }
}
