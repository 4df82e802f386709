//! The normalisations of the coupling found in the literature, with exact conversion.
//!
//! Records hold γ = Σ γ_n g^{2n} with g² = λ/(16π²), λ = g_YM² N. For another parameter
//! x = λ/(k π²) we have g² = x k/16, so the coefficient of xⁿ is γ_n (k/16)ⁿ, an exact rational
//! multiple. The coefficient of λⁿ itself is γ_n/(16π²)ⁿ: there the number γ_n is printed over
//! (16π²)ⁿ, so that it stays exact. No parameter is ever called by a nickname alone: every output
//! states the formula.

use super::expression::superscript;
use super::interval::Interval;
use crate::record::Term;
use rug::Rational;
use rug::ops::Pow;

/// An expansion parameter.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
pub enum Coupling {
    /// λ/(16π²), the default and the parameter of every record.
    #[default]
    Over16PiSquared,
    /// λ/(8π²).
    Over8PiSquared,
    /// λ/(4π²).
    Over4PiSquared,
    /// λ/π².
    OverPiSquared,
    /// λ itself; coefficients are printed as c/(16π²)ⁿ.
    Lambda,
}

impl Coupling {
    /// Every parameter, the default first.
    pub const ALL: [Coupling; 5] = [
        Coupling::Over16PiSquared,
        Coupling::Over8PiSquared,
        Coupling::Over4PiSquared,
        Coupling::OverPiSquared,
        Coupling::Lambda,
    ];

    /// The word for it on the command line and in machine-readable output: the formula without blanks.
    pub fn word(self) -> &'static str {
        match self {
            Coupling::Over16PiSquared => "lambda/16pi^2",
            Coupling::Over8PiSquared => "lambda/8pi^2",
            Coupling::Over4PiSquared => "lambda/4pi^2",
            Coupling::OverPiSquared => "lambda/pi^2",
            Coupling::Lambda => "lambda",
        }
    }

    /// The parameter that `word` names, blanks and brackets ignored.
    pub fn from_word(word: &str) -> Option<Coupling> {
        let plain: String =
            word.chars().filter(|c| !matches!(c, ' ' | '(' | ')' | '*')).collect::<String>().to_lowercase();
        let plain = plain.replace('λ', "lambda").replace('π', "pi").replace('²', "^2").replace("pi2", "pi^2");
        Coupling::ALL.into_iter().find(|coupling| coupling.word() == plain)
    }

    /// The symbol of the parameter whose powers count loops: g², x or λ.
    pub fn symbol(self) -> &'static str {
        match self {
            Coupling::Over16PiSquared => "g²",
            Coupling::Lambda => "λ",
            _ => "x",
        }
    }

    /// The definition in plain text, as every printed output states it.
    pub fn definition(self) -> &'static str {
        match self {
            Coupling::Over16PiSquared => "g² = λ/(16π²)",
            Coupling::Over8PiSquared => "x = λ/(8π²)",
            Coupling::Over4PiSquared => "x = λ/(4π²)",
            Coupling::OverPiSquared => "x = λ/π²",
            Coupling::Lambda => "λ = g_YM² N",
        }
    }

    /// The symbol in LaTeX.
    pub fn symbol_latex(self) -> &'static str {
        match self {
            Coupling::Over16PiSquared => "g^2",
            Coupling::Lambda => r"\lambda",
            _ => "x",
        }
    }

    /// The definition in LaTeX.
    pub fn definition_latex(self) -> &'static str {
        match self {
            Coupling::Over16PiSquared => r"g^2 = \lambda/(16\pi^2)",
            Coupling::Over8PiSquared => r"x = \lambda/(8\pi^2)",
            Coupling::Over4PiSquared => r"x = \lambda/(4\pi^2)",
            Coupling::OverPiSquared => r"x = \lambda/\pi^2",
            Coupling::Lambda => r"\lambda = g_{\mathrm{YM}}^2 N",
        }
    }

    /// The power of the symbol that goes with loop `order`, in plain text: g^2, g^4, …, x, x^2, ….
    pub fn power(self, order: usize) -> String {
        match (self, order) {
            (Coupling::Over16PiSquared, _) => format!("g^{}", 2 * order),
            (_, 1) => self.symbol().to_string(),
            _ => format!("{}^{order}", self.symbol()),
        }
    }

    /// k/16 for x = λ/(k π²): the exact factor by which γ_n is multiplied, to the power n.
    /// For λ it is 1, and the (16π²)^{−n} is printed beside the number (see [`Coupling::over`]).
    pub fn factor(self, order: usize) -> Rational {
        let base = match self {
            Coupling::Over16PiSquared | Coupling::Lambda => Rational::from(1),
            Coupling::Over8PiSquared => Rational::from((1, 2)),
            Coupling::Over4PiSquared => Rational::from((1, 4)),
            Coupling::OverPiSquared => Rational::from((1, 16)),
        };
        base.pow(order as u32)
    }

    /// The terms of loop `order` in this parameter, exactly (text that is no rational is kept as it is).
    pub fn convert(self, terms: &[Term], order: usize) -> Vec<Term> {
        let factor = self.factor(order);
        let scaled =
            |text: &String| text.parse::<Rational>().map_or(text.clone(), |value| (value * &factor).to_string());
        terms
            .iter()
            .map(|term| Term { zeta: term.zeta.clone(), value: term.value.iter().map(scaled).collect() })
            .collect()
    }

    /// The divisor printed beside an exact coefficient of loop `order`: "(16π²)³" for λ, else nothing.
    pub fn over(self, order: usize) -> Option<String> {
        match (self, order) {
            (Coupling::Lambda, 1) => Some("(16π²)".to_string()),
            (Coupling::Lambda, _) => Some(format!("(16π²){}", superscript(order))),
            _ => None,
        }
    }

    /// The whole factor as an interval: [`Coupling::factor`], for λ over (16π²)ⁿ.
    pub fn scale(self, order: usize, bits: u32) -> Interval {
        let exact = Interval::from_rational(&self.factor(order), bits);
        if self != Coupling::Lambda {
            return exact;
        }
        let pi = Interval::pi(bits);
        let unit = pi.mul(&pi).mul(&Interval::from_rational(&Rational::from(16), bits));
        (0..order).fold(exact, |value, _| value.div(&unit))
    }
}

#[cfg(test)]
mod tests {
    use super::Coupling;
    use rug::Rational;

    /// Published one- and two-loop values of (4, 2) in each parameter: 12, −48 with g² = λ/16π²
    /// (Fiamberti, Santambrogio, Sieg, Zanon, arXiv:0712.3522) and 3λ/4π², −3λ²/16π⁴ (Beisert,
    /// Kristjansen, Staudacher, hep-th/0303060).
    #[test]
    fn konishi_in_every_parameter() {
        let table = [
            (Coupling::Over16PiSquared, (12, 1), (-48, 1)),
            (Coupling::Over8PiSquared, (6, 1), (-12, 1)),
            (Coupling::Over4PiSquared, (3, 1), (-3, 1)),
            (Coupling::OverPiSquared, (3, 4), (-3, 16)),
        ];
        for (coupling, one, two) in table {
            assert_eq!(Rational::from(12) * coupling.factor(1), Rational::from(one), "{coupling:?}");
            assert_eq!(Rational::from(-48) * coupling.factor(2), Rational::from(two), "{coupling:?}");
        }
        // 12/(16 pi^2) = 0.0759908877...
        let number = Coupling::Lambda.scale(1, 100).mul(&super::Interval::from_rational(&Rational::from(12), 100));
        assert_eq!(number.decimal(9).as_deref(), Some("0.0759908877"));
    }

    #[test]
    fn words_are_read_back() {
        for coupling in Coupling::ALL {
            assert_eq!(Coupling::from_word(coupling.word()), Some(coupling));
        }
        assert_eq!(Coupling::from_word("λ/(8π²)"), Some(Coupling::Over8PiSquared));
        assert_eq!(Coupling::from_word("g"), None);
    }
}
