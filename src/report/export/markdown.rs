//! Markdown for notes: one heading for each family, one table for each orbit.

use super::{Column, Options, chosen, completeness, numbers};
use crate::error::Result;
use crate::record::{Orbit, Record, Status, Term};
use crate::report::expression::Notation;
use crate::report::numbers::Numbers;
use crate::report::text::describe;
use crate::report::zeta::Constants;

/// The document.
///
/// # Errors
/// Records whose decimals contradict them.
pub fn document(records: &[Record], options: &Options) -> Result<String> {
    let constants = Constants::default();
    let mut text = format!(
        "Δ = L + Σ γ_n {}ⁿ, {}.\n",
        if options.coupling.symbol() == "g²" { "(g²)" } else { options.coupling.symbol() },
        options.coupling.definition()
    );
    for record in records {
        text.push_str(&format!("\n## Family ({}, {})\n", record.length, record.magnons));
        for orbit in &record.orbits {
            text.push_str(&table(record, orbit, options, &constants)?);
        }
    }
    Ok(text)
}

fn table(record: &Record, orbit: &Orbit, options: &Options, constants: &Constants) -> Result<String> {
    let of = Numbers::new(orbit, constants)?;
    let mut text = format!("\n### {}\n\n{}; {}.", orbit.label, describe(orbit), completeness(record, orbit));
    if orbit.degree() > 1 {
        let name = if orbit.generator == "gamma_1" { "γ_1 in g²".to_string() } else { orbit.generator.clone() };
        text.push_str(&format!(
            " ω = {name} is a root of {}.",
            Notation::Plain.minimal_polynomial(&orbit.minimal_polynomial)
        ));
    }
    let mut head = vec!["n".to_string()];
    if options.shows(Column::Exact) {
        head.push("γ_n".to_string());
    }
    if options.shows(Column::Number) {
        let states = of.states();
        head.extend(
            (1..=states).map(|state| if states == 1 { "number".to_string() } else { format!("state {state}") }),
        );
    }
    if options.shows(Column::Status) {
        head.push("status".to_string());
    }
    let numeric = head.iter().map(|name| if name.starts_with("state ") || name == "number" { "---:" } else { "---" });
    text.push_str(&format!("\n\n| {} |\n| {} |\n", head.join(" | "), numeric.collect::<Vec<_>>().join(" | ")));
    for coefficient in chosen(orbit, options) {
        let order = coefficient.order;
        let exact = |terms: &[Term]| {
            let expression = Notation::Plain.expression(&options.coupling.convert(terms, order));
            match options.coupling.over(order) {
                Some(divisor) => format!("({expression}) / {divisor}"),
                None => expression,
            }
        };
        let mut row = |name: String, whole: bool, terms: &[Term], decimals: Vec<String>, status: &str| {
            let mut cells = vec![name];
            if options.shows(Column::Exact) {
                cells.push(if whole { exact(terms) } else { String::new() });
            }
            if options.shows(Column::Number) {
                cells.extend(decimals);
            }
            if options.shows(Column::Status) {
                cells.push(status.to_string());
            }
            text.push_str(&format!("| {} |\n", cells.join(" | ")));
        };
        let decimals = if options.shows(Column::Number) { numbers(coefficient, &of, options)? } else { Vec::new() };
        row(
            order.to_string(),
            coefficient.status != Status::Numeric,
            &coefficient.terms,
            decimals,
            super::status(coefficient),
        );
        if let Some(parts) = coefficient.parts.as_ref().filter(|_| options.shows(Column::Parts)) {
            for (name, terms) in [("asymptotic", &parts.asymptotic), ("finite size", &parts.finite_size)] {
                let decimals = (0..of.states())
                    .map(|state| of.terms_decimal(terms, order, state, options.digits, options.coupling))
                    .collect::<Result<Vec<_>>>()?;
                row(format!("{order}, {name}"), true, terms, decimals, "part");
            }
        }
    }
    Ok(text)
}
