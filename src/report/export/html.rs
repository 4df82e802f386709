//! One self-contained page: a table of all states that sorts and filters, exact coefficients that
//! unfold, pictures inline, the methods cited. Nothing is loaded from elsewhere, and without
//! JavaScript everything can still be read (the controls are then absent).

use super::{Options, chosen, completeness, numbers};
use crate::error::Result;
use crate::record::{Orbit, Parity, Record, Status, Term};
use crate::report::expression::Notation;
use crate::report::numbers::Numbers;
use crate::report::plot::{Kind, Request, svg};
use crate::report::text::{describe, note};
use crate::report::zeta::Constants;

const STYLE: &str = include_str!("page.css");
const SCRIPT: &str = include_str!("page.js");
/// Loops whose numbers stand in the table of states; the rest are in the blocks below it.
const TABLE_LOOPS: usize = 4;

/// Methods and their sources.
const METHODS: [(&str, &str); 9] = [
    (
        "One-loop spin chain and its two Baxter polynomials",
        "Beisert, Kristjansen, Staudacher, hep-th/0303060; Pronko, Stroganov, hep-th/9808153",
    ),
    ("Long-range Bethe equations", "Beisert, Dippel, Staudacher, hep-th/0405001; Beisert, Staudacher, hep-th/0504190"),
    ("Dressing phase", "Beisert, Eden, Staudacher, hep-th/0610251; Vieira, Volin, arXiv:1012.3992"),
    ("Transfer matrices", "Beisert, nlin/0610017"),
    ("Leading finite-size term", "Bajnok, Janik, arXiv:0807.0399"),
    ("Singular roots", "Nepomechie, Wang, arXiv:1409.7382"),
    (
        "Loops beyond L (where present): quantum spectral curve",
        "Gromov, Kazakov, Leurent, Volin, arXiv:1305.1939, arXiv:1405.4857",
    ),
    (
        "Four loops of (4, 2), first found from Feynman diagrams",
        "Fiamberti, Santambrogio, Sieg, Zanon, arXiv:0712.3522",
    ),
    ("Error estimates at finite coupling", "spread of Padé approximants and the conformal map of the cut g² ≤ −1/16"),
];

/// The page.
///
/// # Errors
/// Records whose decimals contradict them.
pub fn page(records: &[Record], options: &Options) -> Result<String> {
    let constants = Constants::default();
    let states: usize = records.iter().flat_map(|record| &record.orbits).map(|orbit| orbit.states.len()).sum();
    let coupling = options.coupling;
    let power = if coupling.symbol() == "g²" {
        "g<sup>2n</sup>".to_string()
    } else {
        format!("{}<sup>n</sup>", coupling.symbol())
    };
    let mut text = format!(
        "<!doctype html>\n<html lang=\"en\">\n<head>\n<meta charset=\"utf-8\">\n<meta name=\"viewport\" content=\"width=device-width, initial-scale=1\">\n<title>Anomalous dimensions, SU(2) sector</title>\n<link rel=\"icon\" href=\"data:,\">\n<style>\n{STYLE}</style>\n</head>\n<body>\n<h1>Anomalous dimensions in the SU(2) sector of planar N = 4 super Yang–Mills theory</h1>\n<p>Δ = L + Σ γ<sub>n</sub> {power} with {}. {} in {}. Numbers are correct as printed.</p>\n",
        escape(coupling.definition()),
        plural(states, "state"),
        plural_families(records.len()),
    );
    text.push_str("<h2>States</h2>\n");
    text.push_str(&controls(records));
    text.push_str(&table(records, options, &constants)?);
    text.push_str("<h2>Exact coefficients</h2>\n");
    for record in records {
        text.push_str(&format!("<h3>Family ({}, {})</h3>\n", record.length, record.magnons));
        for orbit in &record.orbits {
            text.push_str(&block(record, orbit, options, &constants)?);
        }
    }
    text.push_str(&pictures(records, options));
    text.push_str("<h2>Methods</h2>\n<ul>\n");
    for (what, source) in METHODS {
        text.push_str(&format!("<li>{}: {}</li>\n", escape(what), escape(source)));
    }
    let mut programs: Vec<&str> = records.iter().map(|record| record.program.as_str()).collect();
    programs.sort_unstable();
    programs.dedup();
    text.push_str(&format!(
        "</ul>\n<p>Computed by {}.</p>\n<script>\n{SCRIPT}</script>\n</body>\n</html>\n",
        escape(&programs.join(", "))
    ));
    Ok(text)
}

fn controls(records: &[Record]) -> String {
    let choices = |values: Vec<usize>| {
        let mut values = values;
        values.sort_unstable();
        values.dedup();
        values.iter().map(|value| format!("<option>{value}</option>")).collect::<String>()
    };
    format!(
        "<form id=\"controls\" hidden>\n<label>Search <input id=\"search\" type=\"search\" placeholder=\"label, number\"></label>\n\
         <label>L <select id=\"length\"><option value=\"\">all</option>{}</select></label>\n\
         <label>M <select id=\"magnons\"><option value=\"\">all</option>{}</select></label>\n\
         <label>Parity <select id=\"parity\"><option value=\"\">all</option><option>symmetric</option><option>singular</option><option>paired</option></select></label>\n\
         <output id=\"count\"></output>\n</form>\n",
        choices(records.iter().map(|record| record.length).collect()),
        choices(records.iter().map(|record| record.magnons).collect()),
    )
}

fn table(records: &[Record], options: &Options, constants: &Constants) -> Result<String> {
    let orders: Vec<usize> = (1..).filter(|order| options.loops.contains(order)).take(TABLE_LOOPS).collect();
    let mut head = vec!["L", "M", "state", "parity", "primaries", "degree", "loops"]
        .into_iter()
        .map(str::to_string)
        .collect::<Vec<_>>();
    head.extend(orders.iter().map(|order| format!("γ<sub>{order}</sub>")));
    let mut text = "<div class=\"scroll\"><table id=\"states\">\n<thead><tr>".to_string();
    for name in &head {
        text.push_str(&format!("<th scope=\"col\">{name}</th>"));
    }
    text.push_str("</tr></thead>\n<tbody>\n");
    for record in records {
        for orbit in &record.orbits {
            let of = Numbers::new(orbit, constants)?;
            let multiple = if orbit.parity == Parity::Paired { 2 } else { 1 };
            for state in 0..of.states() {
                let name = if of.states() > 1 { format!("{}:{}", orbit.label, state + 1) } else { orbit.label.clone() };
                text.push_str(&format!(
                    "<tr><td>{}</td><td>{}</td><td><a href=\"#{}\">{}</a></td><td>{}</td><td>{multiple}</td><td>{}</td><td>{}</td>",
                    record.length,
                    record.magnons,
                    escape(&orbit.label),
                    escape(&name),
                    parity(orbit),
                    orbit.degree(),
                    if record.magnons == 0 { "all".to_string() } else { orbit.complete_through().to_string() },
                ));
                for order in &orders {
                    let cell = match orbit.coefficient(*order) {
                        Some(coefficient) => of.decimal(coefficient, state, options.digits, options.coupling)?,
                        None => String::new(),
                    };
                    let class = match orbit.coefficient(*order).map(|coefficient| coefficient.status) {
                        Some(Status::Asymptotic) => " class=\"partial\" title=\"asymptotic part only\"",
                        _ => "",
                    };
                    text.push_str(&format!("<td{class}>{cell}</td>"));
                }
                text.push_str("</tr>\n");
            }
        }
    }
    text.push_str("</tbody>\n</table></div>\n");
    Ok(text)
}

fn parity(orbit: &Orbit) -> &'static str {
    match (orbit.parity, orbit.singular) {
        (Parity::Paired, _) => "paired",
        (_, true) => "singular",
        _ => "symmetric",
    }
}

fn block(record: &Record, orbit: &Orbit, options: &Options, constants: &Constants) -> Result<String> {
    let of = Numbers::new(orbit, constants)?;
    let notation = Notation::Html;
    let mut text = format!(
        "<details id=\"{}\"><summary><b>{}</b> {}; {}</summary>\n",
        escape(&orbit.label),
        escape(&orbit.label),
        escape(&describe(orbit)),
        completeness(record, orbit)
    );
    if orbit.degree() > 1 {
        let name =
            if orbit.generator == "gamma_1" { "γ<sub>1</sub> in g²".to_string() } else { escape(&orbit.generator) };
        let values =
            (0..of.states()).map(|state| of.omega_decimal(state, options.digits)).collect::<Result<Vec<_>>>()?;
        text.push_str(&format!(
            "<p>ω = {name} is a root of {}: {}</p>\n",
            notation.minimal_polynomial(&orbit.minimal_polynomial),
            values.join(", ")
        ));
    }
    text.push_str("<div class=\"scroll\"><table class=\"exact\"><thead><tr><th scope=\"col\">n</th><th scope=\"col\">γ<sub>n</sub></th><th scope=\"col\">numbers</th><th scope=\"col\"></th></tr></thead><tbody>\n");
    for coefficient in chosen(orbit, options) {
        let order = coefficient.order;
        let exact = |terms: &[Term]| {
            let value = notation.expression(&options.coupling.convert(terms, order));
            match options.coupling.over(order) {
                Some(_) => format!("({value}) / (16π²)<sup>{order}</sup>"),
                None => value,
            }
        };
        let mut row = |name: String, value: String, decimals: &[String], remark: &str| {
            text.push_str(&format!(
                "<tr><td>{name}</td><td>{value}</td><td>{}</td><td>{remark}</td></tr>\n",
                decimals.join("<br>")
            ));
        };
        let value = if coefficient.status == Status::Numeric { String::new() } else { exact(&coefficient.terms) };
        row(order.to_string(), value, &numbers(coefficient, &of, options)?, &note(coefficient));
        if let Some(parts) = &coefficient.parts {
            for (name, terms) in [("asymptotic", &parts.asymptotic), ("finite size", &parts.finite_size)] {
                let decimals = (0..of.states())
                    .map(|state| of.terms_decimal(terms, order, state, options.digits, options.coupling))
                    .collect::<Result<Vec<_>>>()?;
                row(format!("{order}, {name}"), exact(terms), &decimals, "");
            }
        }
    }
    text.push_str("</tbody></table></div></details>\n");
    Ok(text)
}

/// The spectrum of each family, and the growth of the first states' coefficients; a picture that
/// has nothing to show (too few loops) is left out.
fn pictures(records: &[Record], options: &Options) -> String {
    let request = |kind| Request { kind, states: Vec::new(), largest: 0.4, coupling: options.coupling };
    let mut text = "<h2>Pictures</h2>\n".to_string();
    let mut add = |title: String, records: &[Record], kind, open: bool| {
        if let Ok(picture) = svg(records, &request(kind)) {
            let open = if open { " open" } else { "" };
            text.push_str(&format!("<details{open}><summary>{title}</summary>\n{picture}\n</details>\n"));
        }
    };
    add("Growth of the coefficients".to_string(), records, Kind::Growth, true);
    for record in records {
        let title = format!("Spectrum of family ({}, {})", record.length, record.magnons);
        add(title, std::slice::from_ref(record), Kind::Spectrum, records.len() == 1);
    }
    text
}

fn plural(number: usize, word: &str) -> String {
    format!("{number} {word}{}", if number == 1 { "" } else { "s" })
}

fn plural_families(number: usize) -> String {
    format!("{number} {}", if number == 1 { "family" } else { "families" })
}

fn escape(text: &str) -> String {
    text.replace('&', "&amp;").replace('<', "&lt;").replace('>', "&gt;").replace('"', "&quot;")
}
