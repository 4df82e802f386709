//! One-loop Bethe roots with certain digits.
//!
//! Approximate roots z_i of the monic Q come from Aberth's iteration; the discs around z_i of radius
//! n |Q(z_i)| / Π_{j≠i} |z_i − z_j| then contain all roots, one each when they are disjoint (B. T. Smith,
//! J. ACM 17 (1970) 661). Q is evaluated on enclosures of its coefficients. A part of a root is exactly
//! zero when the mirror image of its disc meets no other disc: the roots u of a state are closed under
//! complex conjugation (the transfer matrix is Hermitian), those of a symmetric one also under u → −u.

use super::complex::Rectangle;
use crate::algebra::flint::{Enclosure, complex_roots};
use crate::algebra::number_field::NumberField;
use crate::algebra::poly;
use crate::algebra::ring::Ring;
use crate::chain::Orbit;
use crate::chain::orbit::OneLoopImage;
use crate::error::{Error, Result};
use crate::record::Parity;
use crate::report::interval::Interval;
use rug::{Float, Rational};
use serde::Serialize;

/// The numbers of one embedding.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct Embedding {
    /// ω.
    pub omega: String,
    /// γ₁.
    pub gamma_1: String,
    /// The Bethe roots u = i v, sorted by real, then imaginary part; of a mirror pair those of one
    /// member (the other has −u).
    pub roots: Vec<Root>,
}

/// One root.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct Root {
    /// Re u.
    pub re: String,
    /// Im u.
    pub im: String,
    /// Whether it is one of u = ±i/2.
    pub singular: bool,
}

const MOST_BITS: u32 = 1 << 17;

/// One entry for each real embedding of ω, sorted by γ₁.
///
/// # Errors
/// Digits that stay undecided, or a number of embeddings other than the degree of ω.
pub fn embeddings(
    orbit: &Orbit,
    field: &NumberField,
    image: &OneLoopImage<Vec<Rational>>,
    q1: &[Vec<Rational>],
    singular: bool,
    digits: usize,
) -> Result<Vec<Embedding>> {
    // Without the exact roots v = ±1/2.
    let mut rest = q1.to_vec();
    if singular {
        for point in [field.ratio(1, 2), field.ratio(-1, 2)] {
            rest = poly::divide_by_root(field, &rest, &point);
        }
    }
    let mut bits = (digits as f64 * std::f64::consts::LOG2_10) as u32 + 128;
    while bits <= MOST_BITS {
        if let Some(found) = attempt(orbit, image, &rest, singular, digits, bits) {
            if found.len() != orbit.degree() {
                return Err(Error::check(format!(
                    "orbit {}: {} embeddings were found for degree {}; please report this orbit",
                    orbit.label,
                    found.len(),
                    orbit.degree()
                )));
            }
            return Ok(found);
        }
        bits *= 2;
    }
    Err(Error::bound(format!(
        "orbit {}: the Bethe roots are undecided at {MOST_BITS} bits; ask for fewer digits",
        orbit.label
    )))
}

fn attempt(
    orbit: &Orbit,
    image: &OneLoopImage<Vec<Rational>>,
    rest: &[Vec<Rational>],
    singular: bool,
    digits: usize,
    bits: u32,
) -> Option<Vec<Embedding>> {
    let symmetric = orbit.parity == Parity::Symmetric;
    let mut points: Vec<Rectangle> = complex_roots(&orbit.field, bits + 64)
        .into_iter()
        .map(|(re, im)| Rectangle { re: interval(&re, bits), im: interval(&im, bits) })
        .collect();
    // Of each mirror pair of embeddings the one with the larger imaginary part comes first.
    points.sort_by(|a, b| b.im.hi().total_cmp(a.im.hi()));
    let mut found: Vec<(Rectangle, Float, Embedding)> = Vec::new();
    for x in &points {
        let value = |element: &[Rational]| {
            let coefficients: Vec<Rectangle> = element.iter().map(|c| Rectangle::rational(c, bits)).collect();
            Rectangle::horner(&coefficients, x)
        };
        let omega = value(&image.omega);
        if found.iter().any(|(other, ..)| other.re.meet(&omega.re).is_some()) {
            continue;
        }
        let coefficients: Vec<Rectangle> = rest.iter().map(|c| value(c)).collect();
        let discs = isolate(&coefficients, bits)?;
        let mut roots = discs
            .iter()
            .enumerate()
            .map(|(index, disc)| {
                let fixed = |mirror: &dyn Fn(&Rectangle) -> Rectangle| {
                    let image = mirror(disc);
                    discs.iter().enumerate().all(|(other, disc)| other == index || apart(&image, disc))
                };
                let zero = Interval::zero(bits);
                // In v: u → ū is v → −v̄, and for symmetric states v → v̄ as well.
                let real = fixed(&|d| Rectangle { re: zero.sub(&d.re), im: d.im.clone() });
                let imaginary = symmetric && fixed(&|d| Rectangle { re: d.re.clone(), im: zero.sub(&d.im) });
                let re = if imaginary { "0".to_string() } else { zero.sub(&disc.im).decimal(digits)? };
                let im = if real { "0".to_string() } else { disc.re.decimal(digits)? };
                Some((zero.sub(&disc.im).middle(), disc.re.middle(), Root { re, im, singular: false }))
            })
            .collect::<Option<Vec<_>>>()?;
        if singular {
            for (im, text) in [(-0.5, "-0.5"), (0.5, "0.5")] {
                let root = Root { re: "0".into(), im: text.into(), singular: true };
                roots.push((Float::new(bits), Float::with_val(bits, im), root));
            }
        }
        // Zero parts are exact in the text; in the middle points they are zero to nearly all bits.
        let size = |part: &Float, text: &str| if text == "0" { Float::new(part.prec()) } else { part.clone() };
        roots.sort_by(|a, b| {
            size(&a.0, &a.2.re)
                .total_cmp(&size(&b.0, &b.2.re))
                .then_with(|| size(&a.1, &a.2.im).total_cmp(&size(&b.1, &b.2.im)))
        });
        let gamma = value(&image.gamma_1);
        let embedding = Embedding {
            omega: number(&image.omega, &omega.re, digits)?,
            gamma_1: number(&image.gamma_1, &gamma.re, digits)?,
            roots: roots.into_iter().map(|(.., root)| root).collect(),
        };
        found.push((omega, gamma.re.middle(), embedding));
    }
    found.sort_by(|a, b| a.1.total_cmp(&b.1));
    Some(found.into_iter().map(|(.., embedding)| embedding).collect())
}

/// An exact rational as it is, anything else as a decimal.
fn number(exact: &[Rational], enclosure: &Interval, digits: usize) -> Option<String> {
    match exact {
        [] => Some("0".to_string()),
        [rational] => Some(rational.to_string()),
        _ => enclosure.decimal(digits),
    }
}

fn interval(enclosure: &Enclosure, bits: u32) -> Interval {
    Interval::from_bounds(&enclosure.low, &enclosure.high, bits)
}

fn apart(a: &Rectangle, b: &Rectangle) -> bool {
    a.re.meet(&b.re).is_none() || a.im.meet(&b.im).is_none()
}

/// Disjoint rectangles with one root of the monic polynomial each, or `None` at too few bits.
fn isolate(coefficients: &[Rectangle], bits: u32) -> Option<Vec<Rectangle>> {
    let degree = coefficients.len() - 1;
    if degree == 0 {
        return Some(Vec::new());
    }
    let derivative: Vec<Rectangle> = coefficients
        .iter()
        .enumerate()
        .skip(1)
        .map(|(k, c)| c.mul(&Rectangle::rational(&Rational::from(k as u32), bits)))
        .collect();
    let mut points = start(coefficients, bits);
    for _ in 0..60 + bits.ilog2() * 8 {
        let mut largest = Float::new(bits);
        for index in 0..degree {
            let z = points[index].clone();
            let quotient =
                Rectangle::horner(coefficients, &z).middle().div(&Rectangle::horner(&derivative, &z).middle());
            let mut repulsion = Rectangle::rational(&Rational::new(), bits);
            for other in (0..degree).filter(|other| *other != index) {
                let one = Rectangle::rational(&Rational::from(1), bits);
                repulsion = repulsion.add(&one.div(&z.sub(&points[other])));
            }
            let one = Rectangle::rational(&Rational::from(1), bits);
            let step = quotient.div(&one.sub(&quotient.mul(&repulsion))).middle();
            if !step.re.lo().is_finite() || !step.im.lo().is_finite() {
                return None;
            }
            largest = largest.max(&step.size().1);
            points[index] = z.sub(&step).middle();
        }
        if largest.is_zero() || largest.get_exp().unwrap_or(0) < 16 - bits as i32 {
            break;
        }
    }
    let discs: Vec<Rectangle> = (0..degree)
        .map(|index| {
            let z = &points[index];
            let mut radius = Rectangle::horner(coefficients, z).size().1 * degree as u32;
            for other in (0..degree).filter(|other| *other != index) {
                // Rounded up by a unit in the last place, which covers this division and product.
                radius /= z.sub(&points[other]).size().0;
                radius.next_up();
            }
            radius.next_up();
            let ball = Interval::between(-radius.clone(), radius);
            Rectangle { re: z.re.add(&ball), im: z.im.add(&ball) }
        })
        .collect();
    let finite = discs.iter().all(|disc| disc.re.hi().is_finite() && disc.im.hi().is_finite());
    let disjoint = (0..degree).all(|i| (0..i).all(|j| apart(&discs[i], &discs[j])));
    (finite && disjoint).then_some(discs)
}

/// Points on a circle around the roots' centre, none of them special.
fn start(coefficients: &[Rectangle], bits: u32) -> Vec<Rectangle> {
    let degree = coefficients.len() - 1;
    let radius = coefficients
        .iter()
        .take(degree)
        .enumerate()
        .map(|(k, c)| c.size().1.to_f64().powf(1.0 / (degree - k) as f64))
        .fold(1e-3, f64::max);
    (0..degree)
        .map(|k| {
            let angle = 0.4 + std::f64::consts::TAU * k as f64 / degree as f64;
            let point = |value: f64| Interval::between(Float::with_val(bits, value), Float::with_val(bits, value));
            Rectangle { re: point(radius * angle.cos()), im: point(radius * angle.sin()) }
        })
        .collect()
}
