//! A state as text.

use super::{ChargeTerm, Element, State};
use crate::record::{Parity, Term, Zeta};
use crate::report::expression::{Notation, superscript};

/// The text, ending in a newline; long lines are broken after `width` columns between summands.
pub fn text(state: &State, width: usize) -> String {
    let mut text = format!(
        "{}: family ({}, {}), {}{}\n",
        state.label,
        state.length,
        state.magnons,
        match state.parity {
            Parity::Symmetric => format!("{} with parity symmetric", members(state.members)),
            Parity::Paired => format!("{} in mirror pairs", members(state.members)),
        },
        if state.singular { ", singular" } else { "" }
    );
    let degree = state.field.len() - 1;
    let mut line = |label: &str, value: String| text.push_str(&broken(label, &value, width));
    line("conventions", "v = −i u, h = g² = λ/(16π²), n loops = hⁿ".to_string());
    if degree > 1 {
        let name = name(state);
        line("field", format!("{name}: {} = 0", rename(state, Notation::Plain.minimal_polynomial(&state.field))));
        if state.generator == "x" {
            line("ω", element(state, &state.omega));
        }
    }
    line("γ_1", element(state, &state.gamma_1));
    line("T(v)", polynomial(state, &state.transfer));
    for order in &state.pair {
        for term in &order.terms {
            let zeta: Vec<Zeta> = term.zeta.iter().map(|k| Zeta::Single(*k)).collect();
            let product = Notation::Plain.product(&zeta);
            let at = match (order.order, product.is_empty()) {
                (n, true) => format!("h{}", superscript(n)),
                (n, false) => format!("h{} {product}", superscript(n)),
            };
            line(&format!("Q₁ at {at}"), polynomial(state, &term.q1));
            line(&format!("Q₂ at {at}"), polynomial(state, &term.q2));
        }
    }
    // The even charges of a symmetric state vanish by parity.
    let shown = |r: usize| state.parity == Parity::Paired || r % 2 == 1;
    for charge in state.charges.iter().filter(|charge| shown(charge.r)) {
        for order in &charge.orders {
            let value = rename(state, Notation::Plain.expression(&terms(&order.terms)));
            line(&format!("P_{} at h{}", charge.r, superscript(order.order)), value);
        }
    }
    for (index, embedding) in state.embeddings.iter().enumerate() {
        let roots: Vec<String> = embedding
            .roots
            .iter()
            .map(|root| {
                let number = match (root.re.as_str(), root.im.as_str()) {
                    (re, "0") => re.to_string(),
                    ("0", im) => format!("{im} i"),
                    (re, im) if im.starts_with('-') => format!("{re}{im} i"),
                    (re, im) => format!("{re}+{im} i"),
                };
                if root.singular { format!("{number} (singular)") } else { number }
            })
            .collect();
        let which =
            if state.embeddings.len() > 1 { format!("roots u, state {}", index + 1) } else { "roots u".to_string() };
        line(&which, format!("γ_1 = {}: {}", embedding.gamma_1, roots.join(", ")));
    }
    if state.parity == Parity::Paired {
        line("", "(the mirror states have −u)".to_string());
    }
    line("operator", operator(state));
    text
}

fn members(number: usize) -> String {
    if number == 1 { "1 primary".to_string() } else { format!("{number} primaries") }
}

fn name(state: &State) -> String {
    if state.generator == "x" { "x".to_string() } else { format!("ω = {}", state.generator) }
}

/// Elements of the field are written in ω when x is ω, else in x.
fn rename(state: &State, text: String) -> String {
    if state.generator == "x" { text.replace('ω', "x") } else { text }
}

fn element(state: &State, value: &Element) -> String {
    let pieces = Notation::Plain.polynomial(value);
    rename(state, if pieces.is_empty() { "0".to_string() } else { Notation::Plain.join(&pieces) })
}

/// Σ c_j v^j, highest power first.
fn polynomial(state: &State, coefficients: &[Element]) -> String {
    let mut text = String::new();
    for (power, value) in coefficients.iter().enumerate().rev() {
        let pieces = Notation::Plain.polynomial(value);
        let variable = match power {
            0 => String::new(),
            1 => "v".to_string(),
            _ => format!("v{}", superscript(power)),
        };
        text.push_str(&summand(state, &pieces, &variable, text.is_empty()));
    }
    if text.is_empty() { "0".to_string() } else { text }
}

fn operator(state: &State) -> String {
    let mut text = String::new();
    for trace in &state.operator {
        let pieces = Notation::Plain.polynomial(&trace.coefficient);
        text.push_str(&summand(state, &pieces, &format!("tr {}", trace.word), text.is_empty()));
    }
    text
}

/// A coefficient times a symbol as a summand.
fn summand(state: &State, pieces: &[crate::report::expression::Piece], symbol: &str, first: bool) -> String {
    let (negative, body) = match pieces {
        [] => return String::new(),
        [single] => (single.negative, single.body.clone()),
        many => (false, format!("({})", Notation::Plain.join(many))),
    };
    let body = match (body.as_str(), symbol.is_empty()) {
        ("1", false) => symbol.to_string(),
        (_, true) => body,
        (text, false) if text.contains('/') && !text.contains('(') => format!("({text}) {symbol}"),
        (text, false) => format!("{text} {symbol}"),
    };
    let piece = crate::report::expression::Piece { negative, body };
    rename(state, Notation::Plain.signed(&piece, first))
}

fn terms(list: &[ChargeTerm]) -> Vec<Term> {
    list.iter()
        .map(|term| Term { zeta: term.zeta.iter().map(|k| Zeta::Single(*k)).collect(), value: term.value.clone() })
        .collect()
}

/// A label and a value whose lines end before `width`, broken at blanks before signs or after commas.
fn broken(label: &str, value: &str, width: usize) -> String {
    const INDENT: usize = 18;
    let mut lines = vec![String::new()];
    let spaced = value.replace(" + ", "\n+ ").replace(" − ", "\n− ").replace(", ", ",\n");
    for part in spaced.split('\n') {
        let current = lines.last().map_or(0, |line| line.chars().count());
        if current > 0 && INDENT + current + 1 + part.chars().count() > width {
            lines.push(String::new());
        }
        if let Some(line) = lines.last_mut() {
            if !line.is_empty() {
                line.push(' ');
            }
            line.push_str(part);
        }
    }
    let pad = INDENT.saturating_sub(label.chars().count() + 2);
    format!("  {label}{}{}\n", " ".repeat(pad.max(1)), lines.join(&format!("\n{}", " ".repeat(INDENT))))
}
