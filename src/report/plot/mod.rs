//! Pictures: γ against g for chosen states, the spectrum of a family, the growth of |γ_n|^{1/n}.

mod draw;
mod png;

pub use png::png;

use super::coupling::Coupling;
use super::finite::{Selection, check_selections};
use super::interval::Interval;
use super::numbers::Numbers;
use super::resummation::{RADIUS_G, bits_for, sum};
use super::zeta::Constants;
use crate::error::{Error, Result};
use crate::record::{Orbit, Parity, Record};
use draw::{COLOURS, Curve, Entry, Figure, GREY, Mark, Stroke, render};
use rug::Float;

/// What is drawn.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Kind {
    /// γ of chosen states against the coupling: partial sums, Padé, conformal map.
    Sums,
    /// γ of every state against the coupling.
    Spectrum,
    /// |γ_n|^{1/n} against n.
    Growth,
}

/// A request for a picture.
#[derive(Clone, Debug)]
pub struct Request {
    /// What is drawn.
    pub kind: Kind,
    /// The states; by default all, or the first few where a picture holds no more.
    pub states: Vec<Selection>,
    /// The largest g.
    pub largest: f64,
    /// The coupling on the axis (g itself for the default).
    pub coupling: Coupling,
}

/// The most states a picture with several curves for each can hold.
const MOST_STATES: usize = 7;
const SAMPLES: usize = 160;

struct Line {
    family: (usize, usize),
    label: String,
    kind: usize,
    gamma: Vec<Interval>,
}

/// The picture as SVG text.
///
/// # Errors
/// States that are not there or too many of them, or fewer than two complete loops.
pub fn svg(records: &[Record], request: &Request) -> Result<String> {
    if !(request.largest > 0.0 && request.largest <= 10.0) {
        return Err(Error::input(format!("the largest g is {} and must be above 0 and at most 10", request.largest)));
    }
    check_selections(&request.states, &records.iter().collect::<Vec<_>>())?;
    let lines = lines(records, request)?;
    if lines.is_empty() {
        return Err(Error::input(
            "nothing to draw: the records hold no states with two complete loops (M = 0 is protected, γ = 0)",
        ));
    }
    if request.kind != Kind::Spectrum && lines.len() > MOST_STATES {
        return Err(Error::input(format!(
            "{} states are too many for one picture of this kind, which holds {MOST_STATES}; choose some with --state",
            lines.len()
        )));
    }
    render(&match request.kind {
        Kind::Sums => sums(&lines, request),
        Kind::Spectrum => spectrum(&lines, request),
        Kind::Growth => growth(&lines, request),
    })
}

fn lines(records: &[Record], request: &Request) -> Result<Vec<Line>> {
    let constants = Constants::default();
    let mut lines = Vec::new();
    for record in records {
        for orbit in record.orbits.iter().filter(|orbit| orbit.complete_through() >= 2 && record.magnons > 0) {
            let numbers = Numbers::new(orbit, &constants)?;
            let used = orbit.complete_through();
            for state in 0..numbers.states() {
                let by_default = match request.kind {
                    Kind::Spectrum => true,
                    Kind::Sums => lines.len() < 3,
                    Kind::Growth => lines.len() < MOST_STATES,
                };
                let chosen = if request.states.is_empty() {
                    by_default
                } else {
                    request.states.iter().any(|selection| selection.has(orbit, state))
                };
                if !chosen {
                    continue;
                }
                let bits = bits_for(used, 20);
                let gamma = orbit.coefficients[..used]
                    .iter()
                    .map(|coefficient| numbers.coefficient(coefficient, state, bits))
                    .collect::<Result<Vec<_>>>()?;
                let label =
                    if numbers.states() > 1 { format!("{}:{}", orbit.label, state + 1) } else { orbit.label.clone() };
                lines.push(Line { family: (record.length, record.magnons), label, kind: kind_of(orbit), gamma });
            }
        }
    }
    Ok(lines)
}

const KINDS: [&str; 3] = ["parity symmetric", "symmetric, singular", "mirror pairs"];

fn kind_of(orbit: &Orbit) -> usize {
    match (orbit.parity, orbit.singular) {
        (Parity::Paired, _) => 2,
        (_, true) => 1,
        _ => 0,
    }
}

/// The place of a coupling on the axis: g for the default, else the parameter itself.
fn place(coupling: Coupling, g: f64) -> f64 {
    match coupling {
        Coupling::Over16PiSquared => g,
        _ => g * g / coupling.scale(1, 64).middle().to_f64(),
    }
}

fn axis(coupling: Coupling) -> String {
    match coupling {
        Coupling::Over16PiSquared => "g,   g² = λ/(16π²)".to_string(),
        _ => coupling.definition().to_string(),
    }
}

struct Sampled {
    mapped: Curve,
    partial: Vec<(f64, f64)>,
    shorter: Vec<(f64, f64)>,
    pade: Vec<(f64, f64)>,
}

fn sampled(line: &Line, request: &Request, colour: (u8, u8, u8)) -> Sampled {
    let used = line.gamma.len();
    let mut mapped = Curve { points: Vec::new(), colour, stroke: Stroke::Full, band: Vec::new() };
    let (mut partial, mut shorter, mut pade) = (Vec::new(), Vec::new(), Vec::new());
    for k in 0..=SAMPLES {
        let g = request.largest * k as f64 / SAMPLES as f64;
        let x = place(request.coupling, g);
        let h = Float::with_val(bits_for(used, 20), g).square();
        let sums = sum(&line.gamma, &h);
        mapped.points.push((x, sums.mapped.to_f64()));
        mapped.band.push(sums.error.to_f64());
        partial.push((x, sums.partial.to_f64()));
        shorter.push((x, partial_sum(&line.gamma[..used - 1], g * g)));
        if let Some(value) = sums.pade.iter().find_map(|pade| pade.value.as_ref()) {
            pade.push((x, value.to_f64()));
        }
    }
    Sampled { mapped, partial, shorter, pade }
}

fn partial_sum(gamma: &[Interval], h: f64) -> f64 {
    gamma.iter().rev().fold(0.0, |value, next| (value + next.middle().to_f64()) * h)
}

fn radius(request: &Request) -> Vec<Mark> {
    if request.largest < RADIUS_G {
        return Vec::new();
    }
    let words = match request.coupling {
        Coupling::Over16PiSquared => "g = 1/4".to_string(),
        coupling => format!("{} = {:.4} (g = 1/4)", coupling.symbol(), place(coupling, RADIUS_G)),
    };
    vec![Mark::Vertical(place(request.coupling, RADIUS_G), format!("radius of convergence, {words}"))]
}

fn families(lines: &[Line]) -> String {
    let mut names: Vec<String> = lines.iter().map(|line| format!("({}, {})", line.family.0, line.family.1)).collect();
    names.dedup();
    match names.as_slice() {
        [one] => format!("family {one}"),
        many if many.len() <= 4 => format!("families {}", many.join(", ")),
        many => format!("{} families, {} to {}", many.len(), many[0], many[many.len() - 1]),
    }
}

fn sums(lines: &[Line], request: &Request) -> Figure {
    let (mut curves, mut legend) = (Vec::new(), Vec::new());
    let mut highest = 0f64;
    for (index, line) in lines.iter().enumerate() {
        let colour = COLOURS[index % COLOURS.len()];
        let sampled = sampled(line, request, colour);
        highest = sampled.mapped.points.iter().fold(highest, |highest, point| highest.max(point.1));
        let plain = |points: Vec<(f64, f64)>, stroke| Curve { points, colour, stroke, band: Vec::new() };
        curves.push(plain(sampled.shorter, Stroke::Dotted));
        curves.push(plain(sampled.partial, Stroke::Dashed));
        curves.push(Curve { points: sampled.pade, colour, stroke: Stroke::Dots, band: Vec::new() });
        curves.push(sampled.mapped);
        legend.push(Entry {
            text: format!("{}, {} loops", line.label, line.gamma.len()),
            sample: Some((colour, Stroke::Full)),
        });
    }
    // A dot at every tenth sample only, so that the mapped sum stays visible.
    for curve in curves.iter_mut().filter(|curve| curve.stroke == Stroke::Dots) {
        curve.points = curve.points.iter().copied().skip(10).step_by(10).collect();
    }
    legend.push(Entry { text: String::new(), sample: None });
    let style = |text: &str, stroke| Entry { text: text.to_string(), sample: Some((GREY, stroke)) };
    legend.push(style("conformal map ± error", Stroke::Full));
    legend.push(style("Padé in g²", Stroke::Dots));
    legend.push(style("partial sum", Stroke::Dashed));
    legend.push(style("one loop fewer", Stroke::Dotted));
    Figure {
        title: format!("Anomalous dimensions, {}", families(lines)),
        x_label: axis(request.coupling),
        y_label: "γ = Δ − L".to_string(),
        x: (0.0, place(request.coupling, request.largest)),
        y: (0.0, 1.25 * highest.max(1e-6)),
        integers: false,
        curves,
        marks: radius(request),
        legend,
    }
}

fn spectrum(lines: &[Line], request: &Request) -> Figure {
    let colours = [COLOURS[0], COLOURS[1], COLOURS[2]];
    let strokes = [Stroke::Full, Stroke::Dashed, Stroke::Dotted];
    let mut highest = 0f64;
    let mut curves = Vec::new();
    for line in lines {
        let mut curve = sampled(line, request, colours[line.kind]).mapped;
        curve.stroke = strokes[line.kind];
        curve.band.clear();
        highest = curve.points.iter().fold(highest, |highest, point| highest.max(point.1));
        curves.push(curve);
    }
    let mut legend: Vec<Entry> = (0..3)
        .filter(|kind| lines.iter().any(|line| line.kind == *kind))
        .map(|kind| {
            let number = lines.iter().filter(|line| line.kind == kind).count();
            Entry { text: format!("{} ({number})", KINDS[kind]), sample: Some((colours[kind], strokes[kind])) }
        })
        .collect();
    legend.push(Entry { text: String::new(), sample: None });
    let loops = |f: fn(usize, usize) -> usize| lines.iter().map(|line| line.gamma.len()).reduce(f).unwrap_or(0);
    let (least, most) = (loops(usize::min), loops(usize::max));
    let from = if least == most { format!("{least} loops") } else { format!("{least} to {most} loops") };
    legend.push(Entry { text: format!("conformal map, {from}"), sample: None });
    Figure {
        title: format!("Spectrum of {}", families(lines)),
        x_label: axis(request.coupling),
        y_label: "γ = Δ − L".to_string(),
        x: (0.0, place(request.coupling, request.largest)),
        y: (0.0, 1.08 * highest.max(1e-6)),
        integers: false,
        curves,
        marks: radius(request),
        legend,
    }
}

fn growth(lines: &[Line], request: &Request) -> Figure {
    // In x = λ/(kπ²) the coefficients are γ_n (x/g²)^{-n}, so the root is scaled once.
    let scale = request.coupling.scale(1, 64).middle().to_f64();
    let limit = 16.0 * scale;
    let (mut curves, mut legend) = (Vec::new(), Vec::new());
    let (mut highest, mut last) = (limit, 2usize);
    for (index, line) in lines.iter().enumerate() {
        let colour = COLOURS[index % COLOURS.len()];
        let points: Vec<(f64, f64)> = line
            .gamma
            .iter()
            .enumerate()
            .map(|(n, gamma)| {
                let order = n as f64 + 1.0;
                (order, gamma.middle().abs().to_f64().powf(1.0 / order) * scale)
            })
            .collect();
        highest = points.iter().fold(highest, |highest, point| highest.max(point.1));
        last = last.max(points.len());
        curves.push(Curve { points, colour, stroke: Stroke::Marked, band: Vec::new() });
        legend.push(Entry { text: line.label.clone(), sample: Some((colour, Stroke::Marked)) });
    }
    Figure {
        title: format!("Growth of the coefficients, {}", families(lines)),
        x_label: "loop order n".to_string(),
        y_label: format!("|γ_n|^(1/n),  {}", request.coupling.definition()),
        x: (0.5, last as f64 + 0.5),
        y: (0.0, 1.12 * highest),
        integers: true,
        curves,
        marks: vec![Mark::Horizontal(limit, "1/radius of convergence (g = 1/4)".to_string())],
        legend,
    }
}

#[cfg(test)]
mod tests {
    use super::super::coupling::Coupling;
    use super::super::finite::Selection;
    use super::super::testing;
    use super::{Kind, Request, png, svg};

    fn request(kind: Kind) -> Request {
        Request { kind, states: Vec::new(), largest: 0.4, coupling: Coupling::default() }
    }

    /// Every kind draws; the radius is marked; the same picture comes out as PNG.
    #[test]
    fn every_kind() {
        let records = [testing::konishi_ten_loops(), testing::six(), testing::two_orbits(), testing::cubic()];
        for (kind, word) in [(Kind::Sums, "g = 1/4"), (Kind::Spectrum, "Spectrum"), (Kind::Growth, "loop order n")] {
            let picture = svg(&records, &request(kind)).unwrap();
            assert!(picture.starts_with("<svg") && picture.contains(word), "{word}");
            assert!(!picture.contains("NaN") && !picture.contains("inf"));
            let bytes = png(&picture).unwrap();
            assert_eq!(&bytes[1..4], b"PNG");
            if let Some(directory) = std::env::var_os("LOOPLADDER_TEST_PICTURES") {
                let path = std::path::Path::new(&directory).join(format!("{kind:?}.png"));
                std::fs::write(path, bytes).unwrap();
            }
        }
    }

    #[test]
    fn mistakes_are_named() {
        let records = [testing::cubic()];
        let wrong = Request { states: vec![Selection::parse("L8M4-2").unwrap()], ..request(Kind::Sums) };
        assert!(svg(&records, &wrong).unwrap_err().to_string().contains("not there"));
        let wrong = Request { largest: 0.0, ..request(Kind::Sums) };
        assert!(svg(&records, &wrong).unwrap_err().to_string().contains("largest g"));
    }
}
