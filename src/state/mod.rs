//! One state, or one Galois orbit of them, for further calculations: Baxter polynomials order by order,
//! transfer-matrix eigenvalue, charges, Bethe roots and the one-loop eigenoperator (formulas §1–§3).
//!
//! Everything exact is an element of K = Q\[x\]/f, given by its coefficients of 1, x, x², …; the lift runs
//! over K itself here, which is the slow second route beside the modular images of the driver.

mod complex;
mod operator;
mod roots;
mod text;

pub use operator::Trace;
pub use roots::{Embedding, Root};
pub use text::text;

use crate::algebra::graded::Grading;
use crate::algebra::number_field::NumberField;
use crate::algebra::ring::Ring;
use crate::baxter;
use crate::chain::{self, Orbit};
use crate::error::{Error, Result};
use crate::family::Family;
use crate::lift;
use crate::observer::{Event, Observer};
use crate::record::{CertificateOrder, CertificateTerm, PROGRAM, Parity};
use rug::{Integer, Rational};
use serde::Serialize;

/// An element of K: the coefficients of 1, x, x², …, canonical rationals.
pub type Element = Vec<String>;

/// What is asked for.
#[derive(Clone, Debug)]
pub struct Request {
    /// The family, M ≥ 2.
    pub family: Family,
    /// The orbit.
    pub label: String,
    /// Q₁ and Q₂ through h^{loops−1}; at most L.
    pub loops: usize,
    /// Significant digits of the Bethe roots.
    pub digits: usize,
}

/// One orbit in full.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct State {
    /// Program and version.
    pub program: String,
    /// L.
    pub length: usize,
    /// M.
    pub magnons: usize,
    /// The orbit.
    pub label: String,
    /// Behaviour under v → −v.
    pub parity: Parity,
    /// Primaries in the orbit.
    pub members: usize,
    /// Whether v = ±½ are Bethe roots.
    pub singular: bool,
    /// v = −i u, h = g² = λ/(16π²), in words.
    pub conventions: &'static str,
    /// f, constant first, monic.
    pub field: Vec<String>,
    /// What x is when it is ω ("gamma_1", …); "x" when ω generates a subfield only.
    pub generator: String,
    /// ω in K.
    pub omega: Element,
    /// γ₁ in K.
    pub gamma_1: Element,
    /// T(v): coefficients of v^j.
    pub transfer: Vec<Element>,
    /// Q₁ and Q₂ at each order.
    pub pair: Vec<CertificateOrder>,
    /// P_r, as far as these orders determine them.
    pub charges: Vec<Charge>,
    /// Bethe roots at one loop in each real embedding of ω.
    pub embeddings: Vec<Embedding>,
    /// The one-loop eigenoperator.
    pub operator: Vec<Trace>,
}

/// One charge.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Charge {
    /// r.
    pub r: usize,
    /// Its values at h⁰, h¹, ….
    pub orders: Vec<ChargeOrder>,
}

/// A charge at one order; no term means zero.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct ChargeOrder {
    /// n of hⁿ.
    pub order: usize,
    /// The parts of each zeta product.
    pub terms: Vec<ChargeTerm>,
}

/// (element of K) × (zeta product).
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct ChargeTerm {
    /// Odd arguments, ascending.
    pub zeta: Vec<u32>,
    /// The element.
    pub value: Element,
}

const CONVENTIONS: &str =
    "v = -i u, h = g^2 = lambda/(16 pi^2), n loops = h^n; elements of K are coefficients of 1, x, x^2, ...";

/// Computes everything about one orbit.
///
/// # Errors
/// A protected family, an unknown label, too many loops, or a failed check.
pub fn compute(request: &Request, observer: &dyn Observer) -> Result<State> {
    let Request { family, label, loops, digits } = request;
    if family.is_protected() {
        return Err(Error::input(format!(
            "family {family}: the protected operator tr Z^{} has no Bethe roots and every charge zero; give M >= 2",
            family.length
        )));
    }
    if *loops == 0 || *loops > family.length {
        return Err(Error::input(format!(
            "family {family}: {loops} loops were asked for, and the Baxter polynomials are defined through loop L = {}; give 1 to {}",
            family.length, family.length
        )));
    }
    let orbits = chain::spectrum(*family, observer)?;
    let Some(orbit) = orbits.iter().find(|orbit| orbit.label == *label) else {
        let known: Vec<&str> = orbits.iter().map(|orbit| orbit.label.as_str()).collect();
        return Err(Error::input(format!(
            "family {family} has no orbit \"{label}\"; its orbits are {}",
            known.join(", ")
        )));
    };
    let field = number_field(orbit);
    let image = orbit.image(&field, |p| element(&field, p))?;
    let pair = baxter::one_loop(&field, *family, &image.transfer)?;
    observer.event(Event::Stage { family: family.to_string(), stage: "lift over the number field" });
    let symmetric = orbit.parity == Parity::Symmetric;
    let grading = Grading::new(loops - 1);
    let lifted = lift::lift(&field, *family, &grading, &pair, symmetric)?;
    let twice = field.scale(&lifted.charges[0][0], &Rational::from(2));
    if twice != image.gamma_1 {
        return Err(Error::check(format!("orbit {label}: 2 P_1 is not gamma_1 at one loop; please report this orbit")));
    }
    observer.proceed()?;
    observer.event(Event::Stage { family: family.to_string(), stage: "eigenoperator" });
    let operator = operator::eigenoperator(*family, &orbits, orbit, &field, &image.gamma_1)?;
    let embeddings = roots::embeddings(orbit, &field, &image, &pair.q1, lifted.singular, *digits)?;
    let show = |a: &Vec<Rational>| show(&field, a);
    let order = |n: usize| CertificateOrder {
        order: n,
        terms: grading
            .entries(n)
            .zip(grading.products(n))
            .filter(|(entry, _)| {
                [&lifted.q1[*entry], &lifted.q2[*entry]].iter().any(|q| q.iter().any(|c| !c.is_empty()))
            })
            .map(|(entry, product)| CertificateTerm {
                zeta: product.clone(),
                q1: padded(&lifted.q1[entry], family.magnons + 1).iter().map(show).collect(),
                q2: padded(&lifted.q2[entry], family.length - family.magnons + 2).iter().map(show).collect(),
            })
            .collect(),
    };
    let charges = lifted.charges.iter().enumerate().map(|(index, charge)| {
        let r = index + 1;
        // P_r needs S_{r+2i} at h^{n−i}, known through h^{loops−1−(r+2i−1)/2}.
        let last = (loops - 1).checked_sub((r - 1) / 2);
        let orders = last.map_or(0..0, |last| 0..last + 1);
        Charge {
            r,
            orders: orders
                .map(|n| ChargeOrder {
                    order: n,
                    terms: grading
                        .entries(n)
                        .zip(grading.products(n))
                        .filter(|(entry, _)| !charge[*entry].is_empty())
                        .map(|(entry, product)| ChargeTerm { zeta: product.clone(), value: show(&charge[entry]) })
                        .collect(),
                })
                .collect(),
        }
    });
    Ok(State {
        program: PROGRAM.into(),
        length: family.length,
        magnons: family.magnons,
        label: label.clone(),
        parity: orbit.parity,
        members: orbit.members(),
        singular: lifted.singular,
        conventions: CONVENTIONS,
        field: orbit.field.iter().map(Integer::to_string).collect(),
        generator: if symmetric { orbit.generator.name().into() } else { "x".into() },
        omega: show(&image.omega),
        gamma_1: show(&image.gamma_1),
        transfer: image.transfer.iter().map(show).collect(),
        pair: (0..*loops).map(order).collect(),
        charges: charges.filter(|charge| !charge.orders.is_empty()).collect(),
        embeddings,
        operator,
    })
}

impl State {
    /// The JSON text, ending in a newline.
    pub fn to_json(&self) -> String {
        let mut text = serde_json::to_string_pretty(self).unwrap_or_default();
        text.push('\n');
        text
    }
}

fn number_field(orbit: &Orbit) -> NumberField {
    NumberField::new(orbit.field.iter().map(Rational::from).collect())
}

fn element(field: &NumberField, polynomial: &[Integer]) -> Vec<Rational> {
    field.element(&polynomial.iter().map(Rational::from).collect::<Vec<_>>())
}

fn show(field: &NumberField, a: &[Rational]) -> Element {
    field.coefficients(a).iter().map(Rational::to_string).collect()
}

fn padded(polynomial: &[Vec<Rational>], size: usize) -> Vec<Vec<Rational>> {
    let mut full = polynomial.to_vec();
    full.resize(size, Vec::new());
    full
}

#[cfg(test)]
mod tests {
    use super::{Request, State, compute, text};
    use crate::engine::{self, NoCheckpoint};
    use crate::family::Family;
    use crate::observer::Silent;

    fn state(length: usize, magnons: usize, orbit: usize, loops: usize) -> State {
        let family = Family { length, magnons };
        let request = Request { family, label: format!("L{length}M{magnons}-{orbit}"), loops, digits: 20 };
        compute(&request, &Silent).unwrap()
    }

    /// (4, 2): Q = v² + 1/12, so u = ±1/(2√3) = 0.28867513459481288225…, and the operator
    /// tr ZZXX − tr ZXZX (Beisert, Kristjansen, Staudacher, hep-th/0303060).
    #[test]
    fn konishi() {
        let state = state(4, 2, 1, 3);
        assert_eq!(state.pair[0].terms[0].q1, [["1/12"], ["0"], ["1"]]);
        let roots: Vec<(&str, &str)> =
            state.embeddings[0].roots.iter().map(|root| (root.re.as_str(), root.im.as_str())).collect();
        assert_eq!(roots, [("-0.28867513459481288225", "0"), ("0.28867513459481288225", "0")]);
        let operator: Vec<(&str, &str)> =
            state.operator.iter().map(|trace| (trace.word.as_str(), trace.coefficient[0].as_str())).collect();
        assert_eq!(operator, [("XXZZ", "1"), ("XZXZ", "-1")]);
        insta::assert_snapshot!("state_4_2", text(&state, 100));
    }

    /// γ_n = 2 P_1 at h^{n−1}, over the field, agrees with the modular route of the driver; T, parity
    /// pairs and singular roots included.
    #[test]
    fn both_routes_agree() {
        for (length, magnons, orbit) in [(5, 2, 1), (6, 3, 1), (8, 4, 1)] {
            let state = state(length, magnons, orbit, 4);
            let request = engine::Request::new(Family { length, magnons }, 4);
            let record = engine::compute(&request, None, &NoCheckpoint, &Silent).unwrap().record;
            for order in &state.charges[0].orders {
                let coefficient = record.orbits[orbit - 1].coefficient(order.order + 1).unwrap();
                assert_eq!(order.terms.len(), coefficient.terms.len(), "({length}, {magnons}) {order:?}");
                for term in &order.terms {
                    let zeta: Vec<_> = term.zeta.iter().map(|k| crate::record::Zeta::Single(*k)).collect();
                    let known = coefficient.terms.iter().find(|other| other.zeta == zeta).unwrap();
                    let doubled: Vec<String> =
                        term.value.iter().map(|v| (v.parse::<rug::Rational>().unwrap() * 2u32).to_string()).collect();
                    assert_eq!(doubled, known.value);
                }
            }
        }
    }

    /// The singular state of (6, 3) has roots u = 0, ±i/2, exactly.
    #[test]
    fn singular_roots_are_marked() {
        let state = state(6, 3, 1, 1);
        let roots: Vec<(&str, &str, bool)> =
            state.embeddings[0].roots.iter().map(|root| (root.re.as_str(), root.im.as_str(), root.singular)).collect();
        assert_eq!(roots, [("0", "-0.5", true), ("0", "0", false), ("0", "0.5", true)]);
    }

    /// The pair of (7, 3): both mirror states have γ₁ = 10, one embedding of ω, roots not symmetric.
    #[test]
    fn mirror_pair() {
        let state = state(7, 3, 1, 2);
        assert_eq!((state.members, state.embeddings.len(), state.embeddings[0].gamma_1.as_str()), (2, 1, "10"));
        assert_eq!(state.embeddings[0].roots.len(), 3);
        insta::assert_snapshot!("state_7_3", text(&state, 100));
    }

    #[test]
    fn mistakes_are_named() {
        let request = |magnons, label: &str, loops| Request {
            family: Family { length: 6, magnons },
            label: label.into(),
            loops,
            digits: 10,
        };
        for (request, what) in [
            (request(0, "L6M0-1", 1), "protected"),
            (request(3, "L6M3-2", 1), "its orbits are L6M3-1"),
            (request(3, "L6M3-1", 7), "1 to 6"),
        ] {
            let error = compute(&request, &Silent).unwrap_err();
            assert!(error.to_string().contains(what), "{error}");
        }
    }
}
