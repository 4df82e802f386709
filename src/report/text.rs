//! The text that `loopladder series` prints: one block per orbit, the exact coefficients with the
//! numbers of each state beside them, and a last line on how far the values are complete and why.

use super::coupling::Coupling;
use super::expression::{Notation, Piece};
use super::numbers::Numbers;
use super::zeta::Constants;
use crate::error::Result;
use crate::record::{Coefficient, Orbit, Parity, Record, Status, Term};
use std::collections::BTreeMap;

/// How the text looks.
#[derive(Clone, Debug)]
pub struct Style {
    /// Whether terminal colours are used.
    pub colour: bool,
    /// The coupling of the coefficients.
    pub coupling: Coupling,
    /// Significant digits of the numbers.
    pub digits: usize,
    /// Columns after which exact coefficients are broken into lines.
    pub width: usize,
}

impl Default for Style {
    fn default() -> Style {
        Style { colour: false, coupling: Coupling::default(), digits: 12, width: 100 }
    }
}

/// Where exact coefficients begin.
const INDENT: usize = 12;

/// A record as text, ending in a newline.
///
/// # Errors
/// A record whose decimals contradict its minimal polynomials, or digits that cannot be settled.
pub fn series(record: &Record, style: &Style) -> Result<String> {
    let paint = Paint { colour: style.colour };
    let constants = Constants::default();
    let mut text = heading(record, style, paint);
    for orbit in &record.orbits {
        text.push('\n');
        text.push_str(&block(orbit, style, paint, &constants)?);
    }
    text.push('\n');
    text.push_str(&closing(record));
    text.push('\n');
    Ok(text)
}

fn heading(record: &Record, style: &Style, paint: Paint) -> String {
    let coupling = style.coupling;
    let members: usize = record.orbits.iter().map(|orbit| orbit.members).sum();
    let mut text = paint.strong(&format!("Family ({}, {})", record.length, record.magnons));
    text.push_str(&format!(
        ": {} of length L = {} with M = {} magnons, {}\n",
        count(record.primaries, "primary", "primaries"),
        record.length,
        record.magnons,
        count(record.orbits.len(), "Galois orbit", "Galois orbits"),
    ));
    if members < record.primaries {
        text.push_str(&format!("Only {members} of them shown here.\n"));
    }
    text.push_str(&format!("Δ = {} + Σ γ_n {}ⁿ, {}\n", record.length, bracketed(coupling), coupling.definition()));
    text
}

fn bracketed(coupling: Coupling) -> String {
    if coupling == Coupling::Over16PiSquared { "(g²)".to_string() } else { coupling.symbol().to_string() }
}

fn block(orbit: &Orbit, style: &Style, paint: Paint, constants: &Constants) -> Result<String> {
    let numbers = Numbers::new(orbit, constants)?;
    let mut text = paint.strong(&orbit.label);
    text.push_str(&format!("  {}\n", describe(orbit)));
    let exact_root = orbit.degree() == 1;
    let name = if orbit.generator == "gamma_1" { "γ_1 in g²".to_string() } else { orbit.generator.clone() };
    if !exact_root {
        text.push_str(&format!(
            "  ω = {name}, a root of {}\n",
            Notation::Plain.minimal_polynomial(&orbit.minimal_polynomial)
        ));
        let values = (0..numbers.states())
            .map(|state| {
                numbers.omega_decimal(state, style.digits).map(|number| format!("ω{} = {number}", subscript(state + 1)))
            })
            .collect::<Result<Vec<_>>>()?;
        text.push_str(&columns(&values, 4, style.width, paint));
    } else if orbit.generator != "gamma_1" {
        text.push_str(&format!("  ω = {name} = {}\n", orbit.states[0].omega));
    }
    for coefficient in &orbit.coefficients {
        text.push_str(&line(coefficient, &numbers, style, paint)?);
    }
    Ok(text)
}

/// Size, parity, singular roots.
pub(super) fn describe(orbit: &Orbit) -> String {
    let mut text = count(orbit.members, "primary", "primaries");
    match orbit.parity {
        Parity::Symmetric => text.push_str(", parity symmetric"),
        Parity::Paired if orbit.degree() == 1 => text.push_str(", a mirror pair with equal γ_n"),
        Parity::Paired => text.push_str(", mirror pairs with equal γ_n"),
    }
    if orbit.singular {
        text.push_str(", singular (v = ±1/2 are one-loop Bethe roots)");
    }
    text
}

fn line(coefficient: &Coefficient, numbers: &Numbers, style: &Style, paint: Paint) -> Result<String> {
    let order = coefficient.order;
    let label = format!("  γ_{order}");
    let note = note(coefficient);
    if coefficient.status == Status::Numeric {
        let values = values(numbers, |state| numbers.decimal(coefficient, state, style.digits, style.coupling))?;
        let mut text = format!("{}{}\n", pad(&label), paint.note(&note));
        text.push_str(&columns(&values, INDENT, style.width, paint));
        return Ok(text);
    }
    let decimals = |terms: &[Term]| {
        values(numbers, |state| numbers.terms_decimal(terms, order, state, style.digits, style.coupling))
    };
    let mut text = exact(&label, &coefficient.terms, order, &decimals(&coefficient.terms)?, &note, style, paint);
    if let Some(parts) = &coefficient.parts {
        for (name, terms) in [("asymptotic", &parts.asymptotic), ("finite size", &parts.finite_size)] {
            text.push_str(&exact(&format!("    {name}"), terms, order, &decimals(terms)?, "", style, paint));
        }
    }
    Ok(text)
}

fn values(numbers: &Numbers, decimal: impl Fn(usize) -> Result<String>) -> Result<Vec<String>> {
    (0..numbers.states()).map(decimal).collect()
}

/// What a reader must know of a coefficient that is not simply exact and complete.
pub(super) fn note(coefficient: &Coefficient) -> String {
    match coefficient.status {
        Status::Exact => String::new(),
        Status::Asymptotic => "[asymptotic part only]".to_string(),
        Status::Recognised => {
            format!("[recognised from digits, {} to spare]", coefficient.spare_digits.unwrap_or_default())
        }
        Status::Numeric => "[digits only]".to_string(),
    }
}

/// One exact value: label, summands broken into lines, note, and the numbers beside or below.
fn exact(
    label: &str,
    terms: &[Term],
    order: usize,
    decimals: &[String],
    note: &str,
    style: &Style,
    paint: Paint,
) -> String {
    let notation = Notation::Plain;
    let mut pieces = notation.pieces(&style.coupling.convert(terms, order));
    if let Some(divisor) = style.coupling.over(order) {
        pieces = over(&pieces, &divisor, notation);
    }
    let start = INDENT.max(label.chars().count() + 2);
    let lines = broken(&pieces, notation, style.width.saturating_sub(start));
    let mut text = format!("{label}{}", " ".repeat(start - label.chars().count()));
    text.push_str(&lines.join(&format!("\n{}", " ".repeat(start))));
    let rational = matches!(decimals, [single] if plainly_equal(&pieces, single, notation));
    let last = start + lines.last().map_or(0, |line| line.chars().count());
    let tail = if let ([single], false) = (decimals, rational) { format!("= {single}") } else { String::new() };
    let together = [tail.as_str(), note].into_iter().filter(|part| !part.is_empty()).collect::<Vec<_>>().join("  ");
    if !together.is_empty() {
        let beside = last + 2 + together.chars().count() <= style.width;
        text.push_str(&if beside { "  ".to_string() } else { format!("\n{}", " ".repeat(start)) });
        text.push_str(
            &[paint.number(&tail), paint.note(note)]
                .into_iter()
                .filter(|part| !part.is_empty())
                .collect::<Vec<_>>()
                .join("  "),
        );
    }
    text.push('\n');
    if decimals.len() > 1 && notation.join(&pieces) != "ω" {
        text.push_str(&columns(decimals, start, style.width, paint));
    }
    text
}

/// The summands in lines of at most `room` columns where possible: whole summands first, and one that
/// fits no line (a long polynomial in brackets) is broken between its own summands.
fn broken(pieces: &[Piece], notation: Notation, room: usize) -> Vec<String> {
    let mut lines = vec![String::new()];
    for (index, piece) in pieces.iter().enumerate() {
        let next = notation.signed(piece, index == 0);
        let parts = if next.chars().count() > room { summands(&next) } else { vec![next] };
        for part in parts {
            let current = lines.last().map_or(0, |line| line.chars().count());
            if current > 0 && current + part.chars().count() > room {
                lines.push(String::new());
            }
            if let Some(line) = lines.last_mut() {
                line.push_str(if line.is_empty() { part.trim_start() } else { &part });
            }
        }
    }
    lines
}

/// The text cut before every " + " and " − ".
fn summands(text: &str) -> Vec<String> {
    let mut parts = Vec::new();
    let mut start = 0;
    for (at, _) in text.match_indices(" + ").chain(text.match_indices(" − ")).collect::<BTreeMap<_, _>>() {
        if at > start {
            parts.push(text[start..at].to_string());
            start = at;
        }
    }
    parts.push(text[start..].to_string());
    parts
}

/// Whether the decimal would only repeat an integer.
fn plainly_equal(pieces: &[Piece], decimal: &str, notation: Notation) -> bool {
    let integer = notation.join(pieces).replace('−', "-");
    let whole = decimal.split_once('.').map_or(decimal, |(whole, _)| whole);
    integer == whole && decimal.bytes().skip(whole.len() + 1).all(|b| b == b'0')
}

fn over(pieces: &[Piece], divisor: &str, notation: Notation) -> Vec<Piece> {
    match pieces {
        [zero] if zero.body == "0" => pieces.to_vec(),
        [single] => vec![Piece { negative: single.negative, body: format!("{} / {divisor}", single.body) }],
        _ => {
            let mut pieces = pieces.to_vec();
            if let Some(first) = pieces.first_mut() {
                first.body = notation.signed(first, true);
                first.body.insert(0, '(');
                first.negative = false;
            }
            if let Some(last) = pieces.last_mut() {
                last.body.push_str(&format!(") / {divisor}"));
            }
            pieces
        }
    }
}

/// Numbers in aligned columns, as many to a line as fit.
fn columns(values: &[String], indent: usize, width: usize, paint: Paint) -> String {
    let widest = values.iter().map(|value| value.chars().count()).max().unwrap_or(0);
    let per_line = (width.saturating_sub(indent) / (widest + 3)).max(1);
    let mut text = String::new();
    for row in values.chunks(per_line) {
        let cells: Vec<String> =
            row.iter().map(|value| format!("{}{value}", " ".repeat(widest - value.chars().count()))).collect();
        text.push_str(&format!("{}{}\n", " ".repeat(indent), paint.number(&cells.join("   "))));
    }
    text
}

fn closing(record: &Record) -> String {
    if record.magnons == 0 {
        return format!(
            "Protected: with M = 0 every γ_n is exactly zero, at every loop order, so Δ = L = {} for any coupling.",
            record.length
        );
    }
    let length = record.length;
    let complete = record.orbits.iter().map(Orbit::complete_through).min().unwrap_or(0);
    let shown = record.loops;
    let digits_only = record
        .orbits
        .iter()
        .flat_map(|orbit| &orbit.coefficients)
        .any(|coefficient| coefficient.status == Status::Numeric);
    let why = if complete < length {
        format!("the asymptotic equations are complete below loop L = {length}, where finite-size corrections begin")
    } else if complete == length {
        format!("loop L = {length} includes the leading finite-size term; later loops need the spectral curve")
    } else if digits_only {
        format!("loops beyond L = {length} come from the spectral curve, the last ones as digits only")
    } else {
        format!("loops beyond L = {length} come from the spectral curve and are recognised from their digits")
    };
    let mut text = format!("Complete through loop {complete}: {why}.");
    if complete < shown {
        text.push_str(&format!(
            " Values beyond are the asymptotic part only: their finite-size term is missing (shown to loop {shown})."
        ));
    }
    text
}

pub(super) fn count(number: usize, one: &str, many: &str) -> String {
    format!("{number} {}", if number == 1 { one } else { many })
}

fn pad(label: &str) -> String {
    format!("{label}{}", " ".repeat(INDENT.saturating_sub(label.chars().count())))
}

fn subscript(number: usize) -> String {
    const DIGITS: [char; 10] = ['₀', '₁', '₂', '₃', '₄', '₅', '₆', '₇', '₈', '₉'];
    number.to_string().bytes().map(|b| DIGITS[usize::from(b - b'0') % 10]).collect()
}

/// Terminal colours, or none.
#[derive(Clone, Copy)]
struct Paint {
    colour: bool,
}

impl Paint {
    fn wrap(self, code: &str, text: &str) -> String {
        if self.colour && !text.is_empty() { format!("\x1b[{code}m{text}\x1b[0m") } else { text.to_string() }
    }

    fn strong(self, text: &str) -> String {
        self.wrap("1", text)
    }

    fn number(self, text: &str) -> String {
        self.wrap("36", text)
    }

    fn note(self, text: &str) -> String {
        self.wrap("33", text)
    }
}

#[cfg(test)]
mod tests {
    use super::super::coupling::Coupling;
    use super::super::testing;
    use super::{Style, series};
    use crate::record::Status;

    /// What people read, for (4, 2) through ten loops, (6, 3), (8, 4) and a pair.
    #[test]
    fn snapshots() {
        let style = Style::default();
        insta::assert_snapshot!("series_4_2", series(&testing::konishi_ten_loops(), &style).unwrap());
        insta::assert_snapshot!("series_6_3", series(&testing::six(), &style).unwrap());
        insta::assert_snapshot!("series_8_4", series(&testing::cubic(), &style).unwrap());
        insta::assert_snapshot!(
            "series_7_3",
            series(&testing::pair(), &Style { coupling: Coupling::Over8PiSquared, ..style }).unwrap()
        );
    }

    /// No line is longer than asked, also where one summand alone is.
    #[test]
    fn lines_fit() {
        let mut record = testing::cubic();
        let digits = "1234567890".repeat(3);
        record.orbits[0].coefficients[2].terms[0].zeta = vec![crate::record::Zeta::Single(3)];
        record.orbits[0].coefficients[2].terms[0].value = vec![digits.clone(), format!("-{digits}"), digits];
        let text = series(&record, &Style { width: 80, ..Style::default() }).unwrap();
        let block = &text[text.find("γ_1 ").unwrap()..text.find("Complete").unwrap()];
        assert!(block.lines().all(|line| line.chars().count() <= 80), "{block}");
    }

    #[test]
    fn colour_only_adds_escapes() {
        let plain = Style { coupling: Coupling::Lambda, ..Style::default() };
        let text = series(&testing::konishi(), &plain).unwrap();
        let mut coloured = series(&testing::konishi(), &Style { colour: true, ..plain }).unwrap();
        assert!(coloured.contains('\x1b'));
        for code in ["1", "36", "33", "0"] {
            coloured = coloured.replace(&format!("\x1b[{code}m"), "");
        }
        assert_eq!(text, coloured);
        insta::assert_snapshot!("series_4_2_lambda", text);
    }

    /// M = 0 in words; an asymptotic coefficient is labelled, and the last line says so.
    #[test]
    fn words_for_special_cases() {
        let mut record = testing::konishi();
        let coefficient = &mut record.orbits[0].coefficients[3];
        coefficient.status = Status::Asymptotic;
        coefficient.parts = None;
        let text = series(&record, &Style::default()).unwrap();
        assert!(text.contains("[asymptotic part only]"), "{text}");
        assert!(text.contains("Complete through loop 3:") && text.contains("finite-size term is missing"), "{text}");
        record.magnons = 0;
        assert!(series(&record, &Style::default()).unwrap().contains("Protected"));
    }
}
