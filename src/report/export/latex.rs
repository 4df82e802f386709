//! LaTeX: a document with one longtable for each family (booktabs rules). A coefficient takes one
//! row for each zeta product, so that no row outgrows a page; long polynomials in ω are broken
//! between rows too, and very long integers may break inside.

use super::{Column, Options, chosen, completeness, numbers, ordered};
use crate::error::Result;
use crate::record::{Coefficient, Orbit, Parity, Record, Status, Term};
use crate::report::expression::{Notation, Piece};
use crate::report::numbers::Numbers;
use crate::report::zeta::Constants;

const BEFORE: &str = r"\documentclass[10pt,a4paper]{article}
\usepackage[T1]{fontenc}
\usepackage{lmodern}
\usepackage{amsmath}
\usepackage{booktabs}
\usepackage{longtable}
\usepackage{array}
\usepackage[margin=20mm]{geometry}
\setlength{\emergencystretch}{3em}
\allowdisplaybreaks
\begin{document}
";

/// Characters of source after which a polynomial goes on in a new row.
const ROW: usize = 1500;
/// Digits after which an integer may break, and after which a fraction is written n/d.
const LONG: usize = 30;
const FRACTION: usize = 20;

/// The document (or its tables alone).
///
/// # Errors
/// Records whose decimals contradict them.
pub fn document(records: &[Record], options: &Options) -> Result<String> {
    let constants = Constants::default();
    let mut text = String::new();
    if options.fragment {
        text.push_str("% needs \\usepackage{amsmath,booktabs,longtable,array}\n");
    } else {
        text.push_str(BEFORE);
    }
    let coupling = options.coupling;
    let power =
        if coupling.symbol_latex() == "g^2" { "g^{2n}".to_string() } else { format!("{}^n", coupling.symbol_latex()) };
    text.push_str(&format!(
        "\\noindent Anomalous dimensions of SU(2)-sector primaries of length $L$ with $M$ magnons in planar $\\mathcal{{N}}=4$ super Yang--Mills theory: $\\Delta = L + \\sum_n \\gamma_n {power}$ with ${}$. In each orbit $\\omega$ is a root of the minimal polynomial given.\n",
        coupling.definition_latex()
    ));
    for record in records {
        text.push('\n');
        text.push_str(&table(record, options, &constants)?);
    }
    if !options.fragment {
        text.push_str("\\end{document}\n");
    }
    Ok(text)
}

fn table(record: &Record, options: &Options, constants: &Constants) -> Result<String> {
    let (length, magnons) = (record.length, record.magnons);
    let mut text = format!(
        "\\begingroup\\renewcommand{{\\arraystretch}}{{1.4}}\n\\begin{{longtable}}{{@{{}}>{{\\raggedleft\\arraybackslash}}p{{0.03\\textwidth}} >{{\\raggedright\\arraybackslash}}p{{0.12\\textwidth}} >{{\\raggedright\\arraybackslash}}p{{\\dimexpr0.85\\textwidth-4\\tabcolsep\\relax}}@{{}}}}\n\
         \\caption{{Family $(L,M) = ({length},{magnons})$: {} {}, coefficients of ${}$.}}\\\\\n\
         \\toprule\n$n$ & & $\\gamma_n$ \\\\\n\\midrule\n\\endfirsthead\n\
         \\multicolumn{{3}}{{@{{}}l}}{{Family $({length},{magnons})$, continued}}\\\\\n\\toprule\n$n$ & & $\\gamma_n$ \\\\\n\\midrule\n\\endhead\n\
         \\bottomrule\n\\endfoot\n",
        record.primaries,
        if record.primaries == 1 { "primary" } else { "primaries" },
        powers(options),
    );
    for (index, orbit) in record.orbits.iter().enumerate() {
        if index > 0 {
            text.push_str("\\midrule\n");
        }
        text.push_str(&block(record, orbit, options, constants)?);
    }
    text.push_str("\\end{longtable}\n\\endgroup\n");
    Ok(text)
}

fn powers(options: &Options) -> String {
    match options.coupling.symbol_latex() {
        "g^2" => "g^{2n}".to_string(),
        other => format!("{other}^n"),
    }
}

fn block(record: &Record, orbit: &Orbit, options: &Options, constants: &Constants) -> Result<String> {
    let of = Numbers::new(orbit, constants)?;
    let mut about = format!("\\textbf{{{}}}: {}", escape(&orbit.label), describe(orbit));
    about.push_str(&format!("; {}", completeness(record, orbit)));
    if orbit.degree() > 1 {
        let name = if orbit.generator == "gamma_1" { "$\\gamma_1$".to_string() } else { escape(&orbit.generator) };
        let mut pieces = Notation::Latex.polynomial(&orbit.minimal_polynomial);
        pieces.reverse();
        about.push_str(&format!(
            "; $\\omega = {{}}${name} in $g^2$, a root of ${}$",
            breakable(&Notation::Latex.join(&pieces))
        ));
        let values =
            (0..of.states()).map(|state| of.omega_decimal(state, options.digits)).collect::<Result<Vec<_>>>()?;
        about.push_str(&format!(": {}", values.join(", ")));
    }
    let mut text = format!("\\multicolumn{{3}}{{@{{}}p{{\\textwidth}}@{{}}}}{{\\raggedright {about}.}} \\\\*\n");
    for coefficient in chosen(orbit, options) {
        text.push_str(&rows(coefficient, &of, options)?);
    }
    Ok(text)
}

fn describe(orbit: &Orbit) -> String {
    let members = if orbit.members == 1 { "1 primary".to_string() } else { format!("{} primaries", orbit.members) };
    let parity = match orbit.parity {
        Parity::Symmetric => "parity symmetric",
        Parity::Paired => "mirror pairs with equal $\\gamma_n$",
    };
    let singular = if orbit.singular { ", singular" } else { "" };
    format!("{members}, {parity}{singular}")
}

fn rows(coefficient: &Coefficient, of: &Numbers, options: &Options) -> Result<String> {
    let order = coefficient.order;
    let mut text = String::new();
    let mut first = order.to_string();
    let mut line = |name: &str, value: &str| {
        text.push_str(&format!("{first} & {name} & {value} \\\\\n"));
        first.clear();
    };
    let remark = match coefficient.status {
        Status::Exact => String::new(),
        Status::Asymptotic => "asymptotic part only".to_string(),
        Status::Recognised => {
            format!("recognised from digits, {} to spare", coefficient.spare_digits.unwrap_or_default())
        }
        Status::Numeric => "digits only".to_string(),
    };
    let remark =
        if options.shows(Column::Status) && !remark.is_empty() { format!("({remark})") } else { String::new() };
    let single = of.states() == 1;
    let decimals = if options.shows(Column::Number) { numbers(coefficient, of, options)? } else { Vec::new() };
    if coefficient.status == Status::Numeric {
        line("", &[decimals.join(", "), remark].join(" "));
        return Ok(text);
    }
    if options.shows(Column::Exact) {
        let exact = exact(&coefficient.terms, order, single, options);
        let plain = single && !exact.iter().any(|(_, value)| value.contains("zeta") || value.contains("frac"));
        let last = exact.len().saturating_sub(1);
        for (index, (name, value)) in exact.into_iter().enumerate() {
            let mut value = format!("${value}$");
            if index == last && single && !plain && !decimals.is_empty() {
                value.push_str(&format!(" ${{}}= {}$", decimals.join(", ")));
            }
            if index == last && !remark.is_empty() {
                value.push_str(&format!(" {remark}"));
            }
            line(&name, &value);
        }
        if !single && !decimals.is_empty() {
            line("\\emph{numbers}", &dollars(&decimals));
        }
    } else {
        line("", &format!("{} {remark}", dollars(&decimals)));
    }
    if let Some(parts) = coefficient.parts.as_ref().filter(|_| options.shows(Column::Parts)) {
        for (title, terms) in [("asymptotic", &parts.asymptotic), ("finite size", &parts.finite_size)] {
            let mut title = format!("\\emph{{{title}}}");
            for (name, value) in exact(terms, order, single, options) {
                let label = [std::mem::take(&mut title), name].into_iter().filter(|part| !part.is_empty());
                line(&label.collect::<Vec<_>>().join(" "), &format!("${value}$"));
            }
        }
    }
    Ok(text)
}

fn dollars(decimals: &[String]) -> String {
    decimals.iter().map(|number| format!("${number}$")).collect::<Vec<_>>().join(", ")
}

/// The rows of an exact value: (zeta product, polynomial); one row in all for a rational orbit.
fn exact(terms: &[Term], order: usize, single: bool, options: &Options) -> Vec<(String, String)> {
    let notation = Notation::Latex;
    let converted = ordered(&options.coupling.convert(terms, order));
    let divisor = options.coupling.over(order).map(|_| format!(" / (16\\pi^2)^{{{order}}}")).unwrap_or_default();
    if single || converted.is_empty() {
        let value = breakable(&notation.expression(&converted));
        return vec![(String::new(), if divisor.is_empty() { value } else { format!("({value}){divisor}") })];
    }
    let mut rows = Vec::new();
    for term in converted {
        let zeta = notation.product(&term.zeta);
        let mut name = match (zeta.is_empty(), divisor.is_empty()) {
            (true, true) => String::new(),
            (true, false) => format!("$1{divisor}$"),
            _ => format!("${zeta}{divisor}$"),
        };
        let mut value = String::new();
        for piece in notation.polynomial(&term.value) {
            if value.len() > ROW {
                rows.push((std::mem::take(&mut name), breakable(&std::mem::take(&mut value))));
                value.push_str(&notation.signed(&Piece { negative: false, body: "{}".to_string() }, true));
            }
            let first = value.is_empty();
            value.push_str(&notation.signed(&piece, first));
        }
        rows.push((name, breakable(&value)));
    }
    rows
}

/// Long integers get places where the line may break; a fraction with one becomes n/d.
fn breakable(math: &str) -> String {
    let mut text = String::new();
    let mut rest = math;
    while let Some(at) = rest.find(r"\tfrac{") {
        text.push_str(&digits(&rest[..at]));
        let inside = &rest[at + 7..];
        let Some((numerator, tail)) = inside.split_once("}{") else { break };
        let Some((denominator, tail)) = tail.split_once('}') else { break };
        if numerator.len().max(denominator.len()) > FRACTION {
            text.push_str(&format!("({}/\\allowbreak {})", digits(numerator), digits(denominator)));
        } else {
            text.push_str(&format!("\\tfrac{{{numerator}}}{{{denominator}}}"));
        }
        rest = tail;
    }
    text.push_str(&digits(rest));
    text
}

fn digits(text: &str) -> String {
    let mut out = String::new();
    let bytes = text.as_bytes();
    let mut at = 0;
    while at < bytes.len() {
        let run = bytes[at..].iter().take_while(|b| b.is_ascii_digit()).count();
        if run > LONG {
            for (index, chunk) in bytes[at..at + run].chunks(15).enumerate() {
                if index > 0 {
                    out.push_str("\\allowbreak ");
                }
                out.push_str(&String::from_utf8_lossy(chunk));
            }
            at += run;
        } else {
            let step = run.max(1);
            out.push_str(&String::from_utf8_lossy(&bytes[at..at + step]));
            at += step;
        }
    }
    out
}

/// Text that is not mathematics.
fn escape(text: &str) -> String {
    let mut out = String::new();
    for c in text.chars() {
        match c {
            '_' | '&' | '%' | '$' | '#' | '{' | '}' => out.extend(['\\', c]),
            '^' => out.push_str("\\textasciicircum{}"),
            '~' => out.push_str("\\textasciitilde{}"),
            '\\' => out.push_str("\\textbackslash{}"),
            c => out.push(c),
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::{breakable, escape};

    #[test]
    fn long_numbers_may_break() {
        let number = "1234567890".repeat(4);
        assert_eq!(
            breakable(&format!("{number} \\omega + \\tfrac{{1}}{{2}}")),
            "123456789012345\\allowbreak 678901234567890\\allowbreak 1234567890 \\omega + \\tfrac{1}{2}"
        );
        assert_eq!(
            breakable("\\tfrac{123456789012345678901}{7} \\omega^{2}"),
            "(123456789012345678901/\\allowbreak 7) \\omega^{2}"
        );
        assert_eq!(escape("T(1/3)_x"), "T(1/3)\\_x");
    }
}
