//! CSV in long form: one rational number (or one decimal) to a row, no cell with a comma or quote in
//! it, so that every reader takes it without options.
//!
//! γ_n = Σ numerator/denominator · zeta · ω^omega_power over the rows of a label, loop and part;
//! the rows with part "minimal polynomial" give that of ω in the same way (loop 0).

use super::{Options, chosen, ordered, status};
use crate::error::Result;
use crate::record::{Coefficient, Record, Term, Zeta};
use crate::report::coupling::Coupling;

const HEADER: &str = "length,magnons,label,members,parity,loop,part,zeta,omega_power,numerator,denominator,state,number,status,coupling\n";

/// The table.
///
/// # Errors
/// None at present; the signature is that of its siblings.
pub fn table(records: &[Record], options: &Options) -> Result<String> {
    let mut text = HEADER.to_string();
    for record in records {
        for orbit in &record.orbits {
            let parity = format!("{:?}", orbit.parity).to_lowercase();
            let head = format!("{},{},{},{},{parity}", record.length, record.magnons, orbit.label, orbit.members);
            let coupling = options.coupling;
            for (power, value) in orbit.minimal_polynomial.iter().enumerate().filter(|(_, value)| *value != "0") {
                let (numerator, denominator) = fraction(value);
                text.push_str(&format!(
                    "{head},0,minimal polynomial,1,{power},{numerator},{denominator},,,exact,{}\n",
                    Coupling::default().word()
                ));
            }
            for coefficient in chosen(orbit, options) {
                let mut part = |name: &str, terms: &[Term]| {
                    text.push_str(&rows(&head, coefficient, name, terms, coupling));
                };
                if coefficient.numbers.is_empty() {
                    part("whole", &coefficient.terms);
                }
                if let Some(parts) = &coefficient.parts {
                    part("asymptotic", &parts.asymptotic);
                    part("finite size", &parts.finite_size);
                }
                let known = coefficient.numbers.iter().enumerate();
                for (state, number) in known {
                    text.push_str(&format!(
                        "{head},{},whole,,,,,{},{number},numeric,{}\n",
                        coefficient.order,
                        state + 1,
                        Coupling::default().word()
                    ));
                }
            }
        }
    }
    Ok(text)
}

fn rows(head: &str, coefficient: &Coefficient, part: &str, terms: &[Term], coupling: Coupling) -> String {
    let mut text = String::new();
    let order = coefficient.order;
    let over = if coupling == Coupling::Lambda {
        format!("lambda over (16pi^2)^{order}")
    } else {
        coupling.word().to_string()
    };
    let mut row = |zeta: &str, power: usize, value: &str| {
        let (numerator, denominator) = fraction(value);
        text.push_str(&format!(
            "{head},{order},{part},{zeta},{power},{numerator},{denominator},,,{},{over}\n",
            status(coefficient)
        ));
    };
    let converted = ordered(&coupling.convert(terms, order));
    if converted.is_empty() {
        row("1", 0, "0");
    }
    for term in &converted {
        for (power, value) in term.value.iter().enumerate().filter(|(_, value)| *value != "0") {
            row(&product(&term.zeta), power, value);
        }
    }
    text
}

fn fraction(value: &str) -> (&str, &str) {
    value.split_once('/').unwrap_or((value, "1"))
}

/// zeta(3)^2*zeta(5), zeta(5;3) for a multiple one, 1 for the empty product.
fn product(factors: &[Zeta]) -> String {
    if factors.is_empty() {
        return "1".to_string();
    }
    let name = |zeta: &Zeta| match zeta {
        Zeta::Single(k) => format!("zeta({k})"),
        Zeta::Multiple(list) => {
            format!("zeta({})", list.iter().map(u32::to_string).collect::<Vec<_>>().join(";"))
        }
    };
    let powers = factors.chunk_by(|a, b| a == b).map(|equal| match equal.len() {
        1 => name(&equal[0]),
        power => format!("{}^{power}", name(&equal[0])),
    });
    powers.collect::<Vec<_>>().join("*")
}

#[cfg(test)]
mod tests {
    use super::{Options, table};
    use crate::record::{Term, Zeta};
    use crate::report::testing;

    /// Reads the rows of one coefficient back into terms.
    fn read_back(text: &str, label: &str, order: usize, part: &str, degree: usize) -> Vec<Term> {
        let mut terms: Vec<Term> = Vec::new();
        for line in text.lines().skip(1) {
            let cells: Vec<&str> = line.split(',').collect();
            assert_eq!(cells.len(), 15, "{line}");
            if cells[2] != label || cells[5] != order.to_string() || cells[6] != part {
                continue;
            }
            let mut zeta = Vec::new();
            for factor in cells[7].split('*').filter(|factor| *factor != "1") {
                let (base, power) = factor.split_once('^').unwrap_or((factor, "1"));
                let arguments: Vec<u32> = base
                    .trim_start_matches("zeta(")
                    .trim_end_matches(')')
                    .split(';')
                    .map(|k| k.parse().unwrap())
                    .collect();
                let one = if arguments.len() == 1 { Zeta::Single(arguments[0]) } else { Zeta::Multiple(arguments) };
                zeta.extend(std::iter::repeat_n(one, power.parse().unwrap()));
            }
            let value = if cells[10] == "1" { cells[9].to_string() } else { format!("{}/{}", cells[9], cells[10]) };
            let power: usize = cells[8].parse().unwrap();
            match terms.iter_mut().find(|term| term.zeta == zeta) {
                Some(term) => term.value[power] = value,
                None => {
                    let mut values = vec!["0".to_string(); degree];
                    values[power] = value;
                    terms.push(Term { zeta, value: values });
                }
            }
        }
        terms
    }

    #[test]
    fn every_number_comes_back() {
        for record in [testing::konishi_ten_loops(), testing::cubic(), testing::six()] {
            let text = table(std::slice::from_ref(&record), &Options::default()).unwrap();
            assert!(!text.contains('"'));
            for orbit in &record.orbits {
                for coefficient in &orbit.coefficients {
                    let compare = |part: &str, expected: &[Term]| {
                        let found = read_back(&text, &orbit.label, coefficient.order, part, orbit.degree());
                        assert_eq!(found, super::ordered(expected), "{} {} {part}", orbit.label, coefficient.order);
                    };
                    if coefficient.numbers.is_empty() {
                        compare("whole", &coefficient.terms);
                    } else {
                        assert!(text.contains(&format!(",{},numeric,", coefficient.numbers[0])));
                    }
                    if let Some(parts) = &coefficient.parts {
                        compare("asymptotic", &parts.asymptotic);
                        compare("finite size", &parts.finite_size);
                    }
                }
            }
        }
    }
}
