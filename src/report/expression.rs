//! Exact coefficients as text: one walk over the terms, one notation per output.
//!
//! Terms are put in order of transcendental weight (ζ3: 3, ζ3²: 6, …), then of arguments; inside
//! a term the polynomial in ω ascends. A term whose value is zero is left out unless it is alone.

use crate::record::{Term, Zeta};

/// How the pieces of an expression are written.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Notation {
    /// ω², ζ3, ζ(5,3): for a terminal and for Markdown.
    Plain,
    /// \omega^{2}, \zeta_{3}, \zeta_{5,3}.
    Latex,
    /// ω<sup>2</sup>, ζ<sub>3</sub>.
    Html,
}

/// One summand: a sign and what follows it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Piece {
    /// Whether the sign is minus.
    pub negative: bool,
    /// The rest.
    pub body: String,
}

impl Notation {
    fn minus(self) -> &'static str {
        if self == Notation::Latex { "-" } else { "−" }
    }

    /// ω to a power; empty for 0.
    pub fn omega(self, power: usize) -> String {
        let base = if self == Notation::Latex { r"\omega" } else { "ω" };
        if power == 0 { String::new() } else { format!("{base}{}", self.exponent(power)) }
    }

    /// The exponent of a power; empty for 1.
    fn exponent(self, power: usize) -> String {
        match (self, power) {
            (_, 1) => String::new(),
            (Notation::Plain, _) => superscript(power),
            (Notation::Latex, _) => format!("^{{{power}}}"),
            (Notation::Html, _) => format!("<sup>{power}</sup>"),
        }
    }

    /// One zeta value.
    fn zeta(self, zeta: &Zeta) -> String {
        let arguments = match zeta {
            Zeta::Single(k) => k.to_string(),
            Zeta::Multiple(list) => list.iter().map(u32::to_string).collect::<Vec<_>>().join(","),
        };
        match (self, zeta) {
            (Notation::Plain, Zeta::Single(_)) => format!("ζ{arguments}"),
            (Notation::Plain, Zeta::Multiple(_)) => format!("ζ({arguments})"),
            (Notation::Latex, _) => format!(r"\zeta_{{{arguments}}}"),
            (Notation::Html, _) => format!("ζ<sub>{arguments}</sub>"),
        }
    }

    /// A product of zeta values, equal neighbours as powers; empty for the empty product.
    pub fn product(self, factors: &[Zeta]) -> String {
        let mut text = String::new();
        for chunk in factors.chunk_by(|a, b| a == b) {
            if self == Notation::Plain && !text.is_empty() {
                text.push(' ');
            }
            text.push_str(&self.zeta(&chunk[0]));
            text.push_str(&self.exponent(chunk.len()));
        }
        text
    }

    /// A rational without its sign.
    fn rational(self, text: &str) -> String {
        match (self, text.split_once('/')) {
            (Notation::Latex, Some((n, d))) => format!(r"\tfrac{{{n}}}{{{d}}}"),
            _ => text.to_string(),
        }
    }

    /// The summands of a polynomial in ω, ascending; none for zero.
    pub fn polynomial(self, value: &[String]) -> Vec<Piece> {
        let mut pieces = Vec::new();
        for (power, text) in value.iter().enumerate().filter(|(_, text)| *text != "0") {
            let (negative, size) = text.strip_prefix('-').map_or((false, text.as_str()), |size| (true, size));
            let omega = self.omega(power);
            let body = match (size, omega.is_empty()) {
                ("1", false) => omega,
                (_, true) => self.rational(size),
                (_, false) if size.contains('/') && self != Notation::Latex => {
                    format!("({}) {omega}", self.rational(size))
                }
                (_, false) => {
                    format!("{}{}{omega}", self.rational(size), if self == Notation::Latex { " " } else { "" })
                }
            };
            pieces.push(Piece { negative, body });
        }
        pieces
    }

    /// The summands of a sum of terms; one piece "0" for zero.
    pub fn pieces(self, terms: &[Term]) -> Vec<Piece> {
        let mut ordered: Vec<&Term> = terms.iter().collect();
        ordered.sort_by(|a, b| (weight(&a.zeta), &a.zeta).cmp(&(weight(&b.zeta), &b.zeta)));
        let mut pieces = Vec::new();
        for term in ordered {
            let polynomial = self.polynomial(&term.value);
            let zeta = self.product(&term.zeta);
            if zeta.is_empty() {
                pieces.extend(polynomial);
            } else if let [single] = polynomial.as_slice() {
                let gap = match self {
                    Notation::Plain if single.body.contains(['/', 'ω']) => " ",
                    Notation::Plain => "",
                    Notation::Latex | Notation::Html => {
                        if single.body == "1" {
                            ""
                        } else {
                            " "
                        }
                    }
                };
                let factor = match single.body.as_str() {
                    "1" => String::new(),
                    body if body.contains('/') && !body.contains('(') => format!("({body})"),
                    body => body.to_string(),
                };
                pieces.push(Piece {
                    negative: single.negative,
                    body: format!("{factor}{}{zeta}", if factor.is_empty() { "" } else { gap }),
                });
            } else if !polynomial.is_empty() {
                pieces.push(Piece { negative: false, body: format!("({}) {zeta}", self.join(&polynomial)) });
            }
        }
        if pieces.is_empty() {
            pieces.push(Piece { negative: false, body: "0".to_string() });
        }
        pieces
    }

    /// Summands in one line.
    pub fn join(self, pieces: &[Piece]) -> String {
        let mut text = String::new();
        for (index, piece) in pieces.iter().enumerate() {
            text.push_str(&self.signed(piece, index == 0));
        }
        text
    }

    /// One summand with its sign and the blanks around it.
    pub fn signed(self, piece: &Piece, first: bool) -> String {
        match (first, piece.negative) {
            (true, false) => piece.body.clone(),
            (true, true) => format!("{}{}", self.minus(), piece.body),
            (false, false) => format!(" + {}", piece.body),
            (false, true) => format!(" {} {}", self.minus(), piece.body),
        }
    }

    /// A sum of terms in one line.
    pub fn expression(self, terms: &[Term]) -> String {
        self.join(&self.pieces(terms))
    }

    /// The minimal polynomial, descending.
    pub fn minimal_polynomial(self, coefficients: &[String]) -> String {
        let mut pieces = self.polynomial(coefficients);
        pieces.reverse();
        self.join(&pieces)
    }
}

/// The transcendental weight of a product: the sum of all arguments.
pub fn weight(factors: &[Zeta]) -> u32 {
    factors
        .iter()
        .map(|zeta| match zeta {
            Zeta::Single(k) => *k,
            Zeta::Multiple(list) => list.iter().sum(),
        })
        .sum()
}

/// A number in superscript digits.
pub fn superscript(number: usize) -> String {
    const DIGITS: [char; 10] = ['⁰', '¹', '²', '³', '⁴', '⁵', '⁶', '⁷', '⁸', '⁹'];
    number.to_string().bytes().map(|b| DIGITS[usize::from(b - b'0') % 10]).collect()
}

#[cfg(test)]
mod tests {
    use super::super::testing;
    use super::Notation::{Html, Latex, Plain};
    use crate::record::{Term, Zeta};

    fn term(zeta: &[u32], value: &[&str]) -> Term {
        Term {
            zeta: zeta.iter().map(|&k| Zeta::Single(k)).collect(),
            value: value.iter().map(|v| v.to_string()).collect(),
        }
    }

    #[test]
    fn each_notation() {
        let terms = [
            term(&[5, 5], &["-1", "0"]),
            term(&[3], &["1/2", "-2"]),
            term(&[], &["0", "-9/2"]),
            term(&[3, 3, 5], &["7/3", "0"]),
        ];
        assert_eq!(Plain.expression(&terms), "−(9/2) ω + (1/2 − 2ω) ζ3 − ζ5² + (7/3) ζ3² ζ5");
        assert_eq!(
            Latex.expression(&terms),
            r"-\tfrac{9}{2} \omega + (\tfrac{1}{2} - 2 \omega) \zeta_{3} - \zeta_{5}^{2} + \tfrac{7}{3} \zeta_{3}^{2}\zeta_{5}"
        );
        assert_eq!(
            Html.expression(&terms),
            "−(9/2) ω + (1/2 − 2ω) ζ<sub>3</sub> − ζ<sub>5</sub><sup>2</sup> + (7/3) ζ<sub>3</sub><sup>2</sup>ζ<sub>5</sub>"
        );
        assert_eq!(Plain.expression(&[term(&[], &["0"])]), "0");
        assert_eq!(Plain.expression(&[term(&[], &["0"]), term(&[3], &["-288"])]), "−288ζ3");
    }

    #[test]
    fn multiple_zeta_values_and_minimal_polynomials() {
        let record = testing::konishi_ten_loops();
        let text = Plain.expression(&record.orbits[0].coefficient(8).unwrap().terms);
        assert!(
            text.contains("− (684288/5) ζ3 ζ(5,3) + (65929248/5) ζ11 + (684288/5) ζ(3,5,3) + 23224320ζ3 ζ9"),
            "{text}"
        );
        assert_eq!(Plain.minimal_polynomial(&testing::cubic().orbits[0].minimal_polynomial), "ω³ − 40ω² + 464ω − 1600");
    }
}
