//! `loopladder evaluate`: Δ of chosen states at chosen couplings, as text and JSON.

use super::coupling::Coupling;
use super::interval::{decimal_exponent, parse_number, round_decimal};
use super::numbers::Numbers;
use super::resummation::{RADIUS_G, Sums, bits_for, sum};
use super::zeta::Constants;
use crate::error::{Error, Result};
use crate::record::{Orbit, Record};
use rug::{Float, Rational};
use serde::Serialize;

/// A value of the coupling, as given.
#[derive(Clone, Debug)]
pub struct Point {
    /// The text, for example "g=0.1".
    pub given: String,
    /// g itself when `None`, else the parameter meant.
    parameter: Option<Coupling>,
    value: Rational,
}

impl Point {
    /// Reads "g=0.1", "g^2=1/100", "lambda=1.5" or "lambda/8pi^2=0.02".
    ///
    /// # Errors
    /// An unknown parameter, a number that cannot be read, or a negative one.
    pub fn parse(text: &str) -> Result<Point> {
        let wrong = |what: &str| {
            let words: Vec<&str> = Coupling::ALL.iter().map(|coupling| coupling.word()).collect();
            Error::input(format!(
                "coupling \"{text}\": {what}; write for example g=0.1, g^2=0.01 or lambda=1.5 (parameters: g, g^2, {})",
                words.join(", ")
            ))
        };
        let (name, number) = text.split_once('=').ok_or_else(|| wrong("no equals sign"))?;
        let parameter = match name.trim() {
            "g" => None,
            "g^2" | "g2" | "g²" => Some(Coupling::Over16PiSquared),
            other => Some(Coupling::from_word(other).ok_or_else(|| wrong("unknown parameter"))?),
        };
        let (value, _) = parse_number(number.trim()).ok_or_else(|| wrong("the number cannot be read"))?;
        if value < 0 {
            return Err(wrong("the number is negative, and the sums are made for real g"));
        }
        if value > 1_000_000 {
            return Err(wrong("the number is above 1000000, where a weak-coupling series says nothing"));
        }
        Ok(Point { given: text.trim().to_string(), parameter, value })
    }

    /// h = g².
    pub fn h(&self, bits: u32) -> Float {
        match self.parameter {
            None => Float::with_val(bits, &self.value).square(),
            Some(coupling) => Float::with_val(bits, coupling.scale(1, bits).middle() * &self.value),
        }
    }
}

/// One state at one coupling.
#[derive(Clone, Debug)]
pub struct Estimate {
    /// The orbit's label.
    pub label: String,
    /// Which embedding, from 1, and of how many.
    pub state: (usize, usize),
    /// ω of the state.
    pub omega: String,
    /// L.
    pub length: usize,
    /// The coupling as given.
    pub given: String,
    /// g.
    pub g: Float,
    /// Loops used, and loops complete in the record.
    pub loops: (usize, usize),
    /// Whether the last loop used, or an earlier one, is known by digits only.
    pub digits_only: bool,
    /// γ.
    pub sums: Sums,
}

/// Which states are meant: "L8M4-1" for all embeddings of an orbit, "L8M4-1:2" for one.
#[derive(Clone, Debug)]
pub struct Selection {
    label: String,
    state: Option<usize>,
}

impl Selection {
    /// Reads "L8M4-1" or "L8M4-1:2".
    ///
    /// # Errors
    /// A number after the colon that is not a positive integer.
    pub fn parse(text: &str) -> Result<Selection> {
        let Some((label, number)) = text.split_once(':') else {
            return Ok(Selection { label: text.to_string(), state: None });
        };
        let state = number.parse::<usize>().ok().filter(|&n| n > 0).ok_or_else(|| {
            Error::input(format!("state \"{text}\": after the colon comes the number of the embedding, from 1; write for example L8M4-1:2"))
        })?;
        Ok(Selection { label: label.to_string(), state: Some(state) })
    }

    /// Whether a state (index from 0) of an orbit is meant.
    pub fn has(&self, orbit: &Orbit, state: usize) -> bool {
        self.label == orbit.label && self.state.is_none_or(|number| number == state + 1)
    }
}

/// Checks that every selection names a state of the records.
///
/// # Errors
/// A selection without a state; the message lists the labels there are.
pub fn check_selections(selections: &[Selection], records: &[&Record]) -> Result<()> {
    for selection in selections {
        let orbits = || records.iter().flat_map(|record| &record.orbits);
        if !orbits().any(|orbit| (0..orbit.states.len()).any(|state| selection.has(orbit, state))) {
            let labels: Vec<String> =
                orbits().take(12).map(|orbit| format!("{} (1 to {})", orbit.label, orbit.states.len())).collect();
            return Err(Error::input(format!(
                "state \"{}{}\" is not there; the orbits and their states are {}",
                selection.label,
                selection.state.map(|n| format!(":{n}")).unwrap_or_default(),
                labels.join(", ")
            )));
        }
    }
    Ok(())
}

/// Δ of the selected states (all when none is selected) at every point, from `loops` complete loops
/// (all complete ones when absent).
///
/// # Errors
/// Fewer than two complete loops, more asked for than are complete, or a selection that is not there.
pub fn estimates(
    record: &Record,
    selections: &[Selection],
    points: &[Point],
    loops: Option<usize>,
    digits: usize,
) -> Result<Vec<Estimate>> {
    check_selections(selections, &[record])?;
    let constants = Constants::default();
    let mut found = Vec::new();
    for orbit in &record.orbits {
        let wanted =
            |state: usize| selections.is_empty() || selections.iter().any(|selection| selection.has(orbit, state));
        if !(0..orbit.states.len()).any(wanted) {
            continue;
        }
        let complete = orbit.complete_through();
        let used = loops.unwrap_or(complete);
        if used > complete || used < 2 {
            return Err(Error::input(format!(
                "orbit {}: {used} loops cannot be used, because {complete} are complete here and a sum needs at least two; compute more loops, or give --loops between 2 and {complete}",
                orbit.label
            )));
        }
        let numbers = Numbers::new(orbit, &constants)?;
        let bits = bits_for(used, digits);
        for state in (0..numbers.states()).filter(|&state| wanted(state)) {
            let series = orbit.coefficients[..used]
                .iter()
                .map(|coefficient| numbers.coefficient(coefficient, state, bits))
                .collect::<Result<Vec<_>>>()?;
            for point in points {
                let h = point.h(bits);
                found.push(Estimate {
                    label: orbit.label.clone(),
                    state: (state + 1, numbers.states()),
                    omega: if numbers.states() == 1 {
                        orbit.states[0].omega.clone()
                    } else {
                        numbers.omega_decimal(state, 12)?
                    },
                    length: record.length,
                    given: point.given.clone(),
                    g: h.clone().sqrt(),
                    loops: (used, complete),
                    digits_only: orbit.coefficients[..used].iter().any(|c| !c.numbers.is_empty()),
                    sums: sum(&series, &h),
                });
            }
        }
    }
    Ok(found)
}

/// L + γ with enough digits to see the error (two digits of it), or `digits` significant ones.
fn delta(estimate: &Estimate, gamma: &Float, digits: Option<usize>) -> String {
    let Some(gamma) = gamma.to_rational() else { return "undefined".to_string() };
    let value = gamma + estimate.length as u32;
    let error = estimate.sums.error.to_rational().unwrap_or_default();
    let places = match digits {
        Some(digits) => digits as i64 - 1 - decimal_exponent(&value),
        None if error.is_zero() => 20,
        None => (1 - decimal_exponent(&error)).clamp(1, 60),
    };
    round_decimal(&value, places)
}

/// The error with two significant digits, rounded up.
fn error_text(error: &Float) -> String {
    let Some(exact) = error.to_rational() else { return "infinite".to_string() };
    if exact.is_zero() {
        return "0".to_string();
    }
    let e = decimal_exponent(&exact);
    let unit = Rational::from((1, 1)) * power(e - 1);
    let up = (exact / &unit).ceil() * unit;
    if (-4..4).contains(&e) {
        return round_decimal(&up, (1 - e).max(0));
    }
    let e = decimal_exponent(&up);
    format!("{}e{e}", round_decimal(&(up * power(-e)), 1))
}

fn power(e: i64) -> Rational {
    use rug::ops::Pow;
    let power = Rational::from(rug::Integer::from(10).pow(e.unsigned_abs() as u32));
    if e < 0 { power.recip() } else { power }
}

/// The estimates as text.
pub fn text(estimates: &[Estimate], digits: Option<usize>) -> String {
    let mut text = String::new();
    for estimate in estimates {
        let (state, states) = estimate.state;
        let which = if states > 1 { format!(", state {state} of {states}") } else { String::new() };
        let (used, complete) = estimate.loops;
        let sums = &estimate.sums;
        text.push_str(&format!("{}{which} (ω = {}) at {}", estimate.label, estimate.omega, estimate.given));
        let g = estimate.g.to_rational().unwrap_or_default();
        if !estimate.given.starts_with("g=") {
            text.push_str(&format!(", g = {}", round_decimal(&g, 7 - decimal_exponent(&g))));
        }
        text.push_str(", g² = λ/(16π²)\n");
        text.push_str(&format!(
            "  from loops 1 to {used}, complete at each of them{}{}\n",
            if used < complete { format!(" ({complete} are complete)") } else { String::new() },
            if estimate.digits_only { ", some known by digits only" } else { "" }
        ));
        let outside = if estimate.g >= RADIUS_G { "   beyond its radius of convergence, g = 1/4" } else { "" };
        let mut row = |name: &str, value: String, note: &str| {
            text.push_str(&format!(
                "  {name}{}{value}{note}\n",
                " ".repeat(24usize.saturating_sub(name.chars().count()))
            ));
        };
        row("partial sum", delta(estimate, &sums.partial, digits), outside);
        for pade in &sums.pade {
            let name = format!("Padé [{}/{}] in g²", pade.numerator, pade.denominator);
            match &pade.value {
                Some(value) => row(&name, delta(estimate, value, digits), ""),
                None => row(&name, "none".to_string(), "   (does not exist, or has a pole before this coupling)"),
            }
        }
        row("conformal map", delta(estimate, &sums.mapped, digits), "");
        row("Δ", format!("{} ± {}", delta(estimate, &sums.mapped, digits), error_text(&sums.error)), "   (estimate)");
        text.push('\n');
    }
    text.push_str(
        "The error is estimated from the last two terms of the mapped series and the spread of the sums; it is not a bound.\n",
    );
    text
}

#[derive(Serialize)]
struct Row<'a> {
    label: &'a str,
    state: usize,
    omega: &'a str,
    at: &'a str,
    g: String,
    loops_used: usize,
    loops_complete: usize,
    digits_only: bool,
    partial_sum: String,
    partial_sum_converges: bool,
    pade: Vec<Approximant>,
    conformal_map: String,
    delta: String,
    error_estimate: String,
}

#[derive(Serialize)]
struct Approximant {
    numerator: usize,
    denominator: usize,
    value: Option<String>,
}

/// The estimates as a JSON array; numbers are strings.
pub fn json(estimates: &[Estimate], digits: Option<usize>) -> String {
    let rows: Vec<Row> = estimates
        .iter()
        .map(|estimate| {
            let value = |gamma: &Float| delta(estimate, gamma, digits);
            let g = estimate.g.to_rational().unwrap_or_default();
            Row {
                label: &estimate.label,
                state: estimate.state.0,
                omega: &estimate.omega,
                at: &estimate.given,
                g: round_decimal(&g, 19 - decimal_exponent(&g)),
                loops_used: estimate.loops.0,
                loops_complete: estimate.loops.1,
                digits_only: estimate.digits_only,
                partial_sum: value(&estimate.sums.partial),
                partial_sum_converges: estimate.g < RADIUS_G,
                pade: estimate
                    .sums
                    .pade
                    .iter()
                    .map(|pade| Approximant {
                        numerator: pade.numerator,
                        denominator: pade.denominator,
                        value: pade.value.as_ref().map(value),
                    })
                    .collect(),
                conformal_map: value(&estimate.sums.mapped),
                delta: value(&estimate.sums.mapped),
                error_estimate: error_text(&estimate.sums.error),
            }
        })
        .collect();
    let mut text = serde_json::to_string_pretty(&rows).unwrap_or_default();
    text.push('\n');
    text
}

#[cfg(test)]
mod tests {
    use super::super::testing;
    use super::{Point, Selection, estimates, json, text};

    #[test]
    fn text_and_json() {
        let point = |text| Point::parse(text).unwrap();
        let found = estimates(&testing::konishi(), &[], &[point("g=0.1"), point("lambda=20")], None, 20).unwrap();
        insta::assert_snapshot!("evaluate_text", text(&found, None));
        insta::assert_snapshot!("evaluate_json", json(&found[..1], Some(12)));
    }

    #[test]
    fn the_same_coupling_in_every_parameter() {
        for text in
            ["g=0.1", "g^2=1/100", "lambda/8pi^2=0.02", "lambda/pi^2=0.16", "lambda=1.5791367041742973790135185599802"]
        {
            let h = Point::parse(text).unwrap().h(90);
            assert!((h.to_f64() - 0.01).abs() < 1e-17, "{text}: {h}");
        }
    }

    #[test]
    fn mistakes_are_named() {
        for (text, what) in
            [("0.1", "equals"), ("q=1", "unknown"), ("g=x", "cannot be read"), ("g=-1", "negative"), ("g=1e9", "above")]
        {
            let error = Point::parse(text).unwrap_err();
            assert!(error.to_string().contains(what), "{error}");
        }
        let points = [Point::parse("g=0.1").unwrap()];
        let selection = [Selection::parse("L8M4-1:4").unwrap()];
        let error = estimates(&testing::cubic(), &selection, &points, None, 20).unwrap_err();
        assert!(error.to_string().contains("L8M4-1 (1 to 3)"), "{error}");
        let error = estimates(&testing::cubic(), &[], &points, Some(4), 20).unwrap_err();
        assert!(error.to_string().contains("3 are complete"), "{error}");
        assert!(Selection::parse("L8M4-1:0").is_err());
        let one = [Selection::parse("L8M4-1:2").unwrap()];
        assert_eq!(estimates(&testing::cubic(), &one, &points, None, 20).unwrap()[0].state, (2, 3));
    }
}
