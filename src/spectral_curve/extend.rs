//! From the exact coefficients through loop L to any order: runs, checks, recognition.

use super::basis::{basis, product_value};
use super::frame::Frame;
use super::input::OneLoop;
use super::plan::{self, Run};
use super::resume;
use super::solver::Solver;
use super::traces::Traces;
use crate::algebra::flint::dense::{Complex, Real, Scalar};
use crate::error::{Error, Result};
use crate::family::Family;
use crate::observer::{Event, Observer};
use crate::record::{Coefficient, Orbit, Parity, Status, Term, Zeta};
use rug::{Float, Rational};
use std::collections::BTreeMap;

/// Spare digits without which a fit does not count.
pub const SPARE_DIGITS: f64 = 30.0;

/// Keeps finished stages under short keys: the two functions of a checkpoint store.
pub struct Stages<'a> {
    /// What was kept under a key.
    pub load: &'a (dyn Fn(&str) -> Option<Vec<u8>> + Sync),
    /// Keeps bytes under a key.
    pub store: &'a (dyn Fn(&str, &[u8]) -> Result<()> + Sync),
}

/// What is asked for: the coefficients of one orbit after its last exact one.
pub struct Request<'a> {
    /// The family.
    pub family: Family,
    /// The orbit with its exact coefficients, at best through loop L.
    pub orbit: &'a Orbit,
    /// The one-loop states at a number of digits, one for each entry of `orbit.states`, in that order.
    pub one_loop: &'a dyn Fn(u32) -> Result<Vec<OneLoop>>,
    /// The last order.
    pub loops: usize,
    /// Digits; chosen from the order and the size of the exact coefficients when absent.
    pub digits: Option<u32>,
    /// A bound on memory in bytes.
    pub memory: Option<u64>,
}

/// The new coefficients and how they were checked.
#[derive(Debug)]
pub struct Extension {
    /// γ_n for every order asked for, ascending: recognised or numeric.
    pub coefficients: Vec<Coefficient>,
    /// Least agreement, in digits, of the overdetermined gluing conditions over all stages and states.
    pub consistency: f64,
    /// Least agreement, in digits, with the exact coefficients (infinite when there are none).
    pub agreement: f64,
}

/// The values of one run: `[embedding][order]` and the digits they are good to.
struct Values {
    omegas: Vec<Float>,
    gamma: Vec<Vec<Float>>,
    certain: u32,
    consistency: f64,
}

/// Computes the orders after the last exact coefficient through `loops`, for one orbit.
///
/// A coefficient is `recognised` when every trace Tr(γ_n ω^k) is an integer relation with at least
/// [`SPARE_DIGITS`] spare digits, else `numeric`, with the digits certain. Loops that are known exactly
/// are computed as well and must agree to all digits: the two computations share nothing but the
/// one-loop states.
///
/// # Errors
/// A bound error before anything is computed when memory does not suffice; a check error when the
/// gluing conditions or the exact coefficients are contradicted; failures of the store; interruption.
pub fn extend(request: &Request, stages: &Stages, observer: &dyn Observer) -> Result<Extension> {
    let Request { family, orbit, .. } = *request;
    let exact = orbit.complete_through().min(family.length);
    let runs = plan::runs(orbit, family.length, exact + 1, request.loops, request.digits);
    for run in &runs {
        let cost = plan::cost(family, orbit.parity, orbit.degree(), run);
        plan::check_memory(family, &orbit.label, run, cost.bytes, request.memory)?;
        observer.event(Event::Remark {
            text: format!(
                "orbit {}: loops {} to {} from the spectral curve at {} digits, {} states; about {:.0} s on one thread and {:.2} GiB",
                orbit.label, run.first, run.last, run.digits, orbit.degree(), cost.seconds, cost.bytes as f64 / f64::from(1u32 << 30)
            ),
        });
    }
    let mut extension = Extension { coefficients: Vec::new(), consistency: f64::INFINITY, agreement: f64::INFINITY };
    for run in &runs {
        let mut found = one_run(request, run, exact, stages, observer, &mut extension)?;
        let missed = |found: &[Coefficient]| found.iter().any(|coefficient| coefficient.status == Status::Numeric);
        if run.recognise && request.digits.is_none() && missed(&found) {
            let again = Run { digits: run.digits * 3 / 2, ..run.clone() };
            let cost = plan::cost(family, orbit.parity, orbit.degree(), &again);
            if request.memory.is_none_or(|limit| cost.bytes <= limit) {
                observer.event(Event::Remark {
                    text: format!(
                        "orbit {}: not every order was recognised at {} digits; once more at {}",
                        orbit.label, run.digits, again.digits
                    ),
                });
                let better = one_run(request, &again, exact, stages, observer, &mut extension)?;
                for (old, new) in found.iter_mut().zip(better) {
                    if old.status == Status::Numeric {
                        *old = new;
                    }
                }
            }
        }
        extension.coefficients.extend(found);
    }
    Ok(extension)
}

/// One run: all states, the checks, and the coefficients of its orders.
fn one_run(
    request: &Request,
    run: &Run,
    exact: usize,
    stages: &Stages,
    observer: &dyn Observer,
    extension: &mut Extension,
) -> Result<Vec<Coefficient>> {
    let values = solve_all(request, run, stages, observer)?;
    extension.consistency = extension.consistency.min(values.consistency);
    extension.agreement = extension.agreement.min(agreement(request, &values, exact)?);
    (run.first..=run.last)
        .map(|order| {
            observer.proceed()?;
            let recognised = if run.recognise { recognise(request, &values, order) } else { None };
            Ok(recognised.unwrap_or_else(|| numeric(&values, order)))
        })
        .collect()
}

fn solve_all(request: &Request, run: &Run, stages: &Stages, observer: &dyn Observer) -> Result<Values> {
    let Request { family, orbit, .. } = *request;
    let symmetric = orbit.parity == Parity::Symmetric;
    let frame = Frame::new(family, symmetric, run.last, run.digits);
    let states = (request.one_loop)((frame.bits as f64 * std::f64::consts::LOG10_2) as u32 + 20)?;
    if states.len() != orbit.states.len() {
        return Err(Error::check(format!(
            "orbit {}: {} one-loop states for {} embeddings; the exact record does not belong to this orbit",
            orbit.label,
            states.len(),
            orbit.states.len()
        )));
    }
    let total = states.len() * run.last;
    observer.event(Event::Planned {
        family: family.to_string(),
        orbit: orbit.label.clone(),
        unit: "curve orders",
        total,
    });
    let mut values = Values { omegas: Vec::new(), gamma: Vec::new(), certain: 0, consistency: f64::INFINITY };
    for (index, state) in states.iter().enumerate() {
        let one = Work { frame: &frame, state, index, total: index * run.last, family, label: &orbit.label };
        let (gamma, consistency) =
            if symmetric { one.solve::<Real>(stages, observer)? } else { one.solve::<Complex>(stages, observer)? };
        values.omegas.push(state.omega.clone());
        values.gamma.push(gamma);
        values.consistency = values.consistency.min(consistency);
    }
    // The margin between the agreement of the conditions and the digits claimed: the conditions are
    // compared with the largest term among them, the coefficients may be smaller.
    values.certain = f64::from(run.digits).min(values.consistency - 8.0).max(0.0) as u32;
    Ok(values)
}

/// One state of one run.
struct Work<'a> {
    frame: &'a Frame,
    state: &'a OneLoop,
    index: usize,
    total: usize,
    family: Family,
    label: &'a str,
}

impl Work<'_> {
    fn solve<S: Scalar>(&self, stages: &Stages, observer: &dyn Observer) -> Result<(Vec<Float>, f64)> {
        observer.proceed()?;
        let (orders, digits) = (self.frame.orders, self.frame.digits);
        let mut solver = Solver::<S>::new(self.frame.clone(), self.state)?;
        for n in 1..=orders {
            observer.proceed()?;
            let key = format!("curve-{}-{}-{orders}-{digits}-{n}", self.label, self.index + 1);
            let known = (stages.load)(&key).and_then(|bytes| resume::decode(&bytes));
            let fresh = known.is_none();
            let stage = solver.advance(known)?;
            if fresh {
                (stages.store)(&key, &resume::encode(&stage))?;
            }
            observer.event(Event::Advanced {
                family: self.family.to_string(),
                orbit: self.label.to_string(),
                unit: "curve orders",
                done: self.total + n,
            });
        }
        let gamma = solver.gamma().iter().map(|value| value.to_float(self.frame.bits as u32)).collect();
        Ok((gamma, solver.consistency().iter().copied().fold(f64::INFINITY, f64::min)))
    }
}

/// The least number of digits to which the exact coefficients are met.
fn agreement(request: &Request, values: &Values, exact: usize) -> Result<f64> {
    let mut least = f64::INFINITY;
    for coefficient in request.orbit.coefficients.iter().filter(|c| c.order <= exact && c.status == Status::Exact) {
        for (omega, gamma) in values.omegas.iter().zip(&values.gamma) {
            let Some(found) = gamma.get(coefficient.order) else { continue };
            let expected = value_at(&coefficient.terms, omega, found.prec());
            let difference = Float::with_val(found.prec(), found - &expected).abs();
            let scale = Float::with_val(found.prec(), expected.abs_ref()).max(&Float::with_val(53, 1));
            let digits = if difference.is_zero() {
                f64::INFINITY
            } else {
                -Float::with_val(53, difference / scale).log10().to_f64()
            };
            if digits < f64::from(values.certain) {
                return Err(Error::check(format!(
                    "orbit {}, loop {}, omega = {:.10}: the spectral curve and the exact coefficient agree to {digits:.1} digits, and {} are claimed; one of the two is wrong, so nothing past loop {exact} is given; please report this state",
                    request.orbit.label, coefficient.order, omega, values.certain
                )));
            }
            least = least.min(digits);
        }
    }
    Ok(least)
}

/// Σ value(ω) · zeta product.
fn value_at(terms: &[Term], omega: &Float, bits: u32) -> Float {
    terms.iter().fold(Float::new(bits), |sum, term| {
        let number = plan::values(term).iter().rev().fold(Float::new(bits), |inner, c| inner * omega + c);
        sum + number * product_value(&term.zeta, bits)
    })
}

/// The error of a value good to `certain` digits.
fn error_of(value: &Float, certain: u32) -> Float {
    let scale = Float::with_val(53, rug::ops::Pow::pow(Float::with_val(53, 10), -(certain as i32)));
    Float::with_val(53, value.abs_ref()).max(&Float::with_val(53, 1)) * scale
}

fn recognise(request: &Request, values: &Values, order: usize) -> Option<Coefficient> {
    let elements = basis(order);
    let gamma: Vec<Float> = values.gamma.iter().map(|list| list[order].clone()).collect();
    let errors: Vec<Float> = gamma.iter().map(|value| error_of(value, values.certain)).collect();
    let bits = gamma.first()?.prec();
    let numbers: Vec<Float> = elements.iter().map(|element| element.value(bits)).collect();
    let traces = Traces::new(&plan::minimal_polynomial(request.orbit));
    let (coefficients, spare) = traces.recognise(&values.omegas, &gamma, &errors, &numbers)?;
    if spare < SPARE_DIGITS {
        return None;
    }
    let degree = request.orbit.degree();
    let mut products: BTreeMap<Vec<Zeta>, Vec<Rational>> = BTreeMap::new();
    for (element, value) in elements.iter().zip(&coefficients) {
        for (factor, product) in &element.terms {
            let entry = products.entry(product.clone()).or_insert_with(|| vec![Rational::new(); degree]);
            entry.iter_mut().zip(value).for_each(|(sum, c)| *sum += Rational::from(c * *factor));
        }
    }
    let mut terms: Vec<Term> = products
        .into_iter()
        .filter(|(_, value)| value.iter().any(|c| !c.is_zero()))
        .map(|(zeta, value)| Term { zeta, value: value.iter().map(Rational::to_string).collect() })
        .collect();
    if terms.is_empty() {
        terms.push(Term { zeta: Vec::new(), value: vec!["0".to_string(); degree] });
    }
    Some(Coefficient {
        order,
        status: Status::Recognised,
        terms,
        parts: None,
        spare_digits: Some(spare as u32),
        numbers: Vec::new(),
    })
}

fn numeric(values: &Values, order: usize) -> Coefficient {
    let numbers = values.gamma.iter().map(|list| decimal(&list[order], values.certain)).collect();
    Coefficient { order, status: Status::Numeric, terms: Vec::new(), parts: None, spare_digits: None, numbers }
}

/// A plain decimal with `digits` significant digits, the last one rounded.
pub fn decimal(value: &Float, digits: u32) -> String {
    let magnitude = value.get_exp().map_or(0, |e| (f64::from(e) * std::f64::consts::LOG10_2).ceil() as i64);
    let places = (i64::from(digits.max(1)) - magnitude.max(0)).max(1) as usize;
    fixed(value, places)
}

/// Fixed-point notation with `places` decimals, exactly rounded.
fn fixed(value: &Float, places: usize) -> String {
    let bits = value.prec() + (places as u32) * 4 + 64;
    let scale = rug::Integer::from(rug::Integer::u_pow_u(10, places as u32));
    let scaled = Float::with_val(bits, value) * &scale;
    let rounded = scaled.round().to_integer().unwrap_or_default();
    let negative = rounded < 0;
    let text = format!("{:0>width$}", rounded.abs().to_string(), width = places + 1);
    let (whole, fraction) = text.split_at(text.len() - places);
    format!("{}{whole}.{fraction}", if negative { "-" } else { "" })
}
