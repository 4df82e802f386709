//! The audit of one orbit: from the certificate's pair to every exact number of the record.

use super::charges::{Charges, charges};
use super::decimals::check_states;
use super::field::Field;
use super::finite_size::{ZetaSum, finite_size};
use super::graded::{Graded, Monomial};
use super::irreducible::{Irreducibility, irreducible};
use super::poly::{Poly, ratio};
use super::report::{Findings, OrbitAudit};
use super::spectrum::{Fingerprint, charge, mirror_pairs, transfer};
use super::unique::unique_lift;
use crate::record::{CertificateOrbit, CertificateTerm, Coefficient, Element, Orbit, Parity, Status, Term, Zeta};
use num_rational::BigRational;
use num_traits::{One, Zero};

/// An orbit, its certificate and the family it belongs to.
pub struct Subject<'a> {
    /// L.
    pub length: usize,
    /// M.
    pub magnons: usize,
    /// From the record.
    pub orbit: &'a Orbit,
    /// From the certificate, if it has this orbit.
    pub certificate: Option<&'a CertificateOrbit>,
}

/// What the comparison between orbits needs.
pub struct Outcome {
    /// The report.
    pub audit: OrbitAudit,
    /// Present when there is a certificate.
    pub fingerprint: Option<Fingerprint>,
}

/// Rationals from their checked spelling.
pub fn rationals(texts: &[String]) -> Vec<BigRational> {
    texts.iter().map(|text| text.parse().unwrap_or_else(|_| BigRational::zero())).collect()
}

/// One polynomial of the certificate.
fn polynomial(field: &Field, elements: &[Element]) -> Poly {
    Poly::from_constants(&elements.iter().map(|e| field.element(&rationals(e))).collect::<Vec<_>>())
}

/// The series Q₁ or Q₂ of the certificate.
fn series(field: &Field, orbit: &CertificateOrbit, select: fn(&CertificateTerm) -> &Vec<Element>) -> Graded {
    let mut result = Graded::zero();
    for order in &orbit.pair {
        for term in &order.terms {
            result.set(order.order, term.zeta.clone(), polynomial(field, select(term)));
        }
    }
    result
}

/// ζ3²ζ5 as a person reads it; "1" for none.
fn name(monomial: &[u32]) -> String {
    if monomial.is_empty() {
        return "the rational part".into();
    }
    monomial.iter().map(|k| format!("zeta({k})")).collect::<Vec<_>>().join(" ")
}

fn spell(field: &Field, value: &Poly) -> String {
    let list: Vec<String> = field.coordinates(value).iter().map(ToString::to_string).collect();
    format!("[{}]", list.join(", "))
}

fn irreducibility(findings: &mut Findings, what: &str, f: &[BigRational]) {
    match irreducible(f) {
        Irreducibility::Proved(how) => findings.proved(format!("{what} is irreducible: {how}")),
        Irreducibility::Reducible(why) => findings.refuted(format!("{what} is reducible: {why}")),
        Irreducibility::Unproved(why) => findings.open(format!("irreducibility of {what} unproved: {why}")),
    }
}

/// Audits one orbit.
pub fn audit_orbit(subject: &Subject) -> Outcome {
    let orbit = subject.orbit;
    let mut findings = Findings::default();
    let minimal = rationals(&orbit.minimal_polynomial);
    irreducibility(&mut findings, "the minimal polynomial", &minimal);
    decimals(&mut findings, orbit, &minimal);
    let mut through = 0;
    let mut fingerprint = None;
    if subject.magnons == 0 {
        through = protected(&mut findings, orbit);
    } else if let Some(certificate) = subject.certificate {
        let field = Field::new(&rationals(&certificate.field));
        let state = State::new(subject, certificate, &field);
        state.field_of_x(&mut findings, &minimal);
        state.one_loop(&mut findings);
        fingerprint = Fingerprint::new(&field, &state.q);
        match fingerprint.as_ref().map(Fingerprint::generates) {
            Some(true) => {
                findings.proved("the coefficients of Q generate the field: distinct embeddings are distinct states")
            }
            _ => findings.open("not shown that distinct embeddings of the field are distinct states"),
        }
        if unique_lift(&field, &state.q, &state.q2.leading()) {
            findings.proved("the lift of the one-loop pair is unique");
        } else {
            findings.open("not shown that the lift of the one-loop pair is unique");
        }
        through = state.coefficients(&mut findings);
    } else {
        findings.open("no certificate for this orbit (compute it with --certificate): the coefficients are unchecked");
    }
    let audit = OrbitAudit {
        label: orbit.label.clone(),
        parity: orbit.parity,
        members: orbit.members,
        one_loop: orbit.states.iter().map(|state| state.one_loop.clone()).collect(),
        through,
        findings,
    };
    Outcome { audit, fingerprint }
}

/// The decimals of the states, which need γ₁ only.
fn decimals(findings: &mut Findings, orbit: &Orbit, minimal: &[BigRational]) {
    let plain = |c: &Coefficient| match c.terms.as_slice() {
        [Term { zeta, value }] if zeta.is_empty() => Some(rationals(value)),
        _ => None,
    };
    let Some(one_loop) = orbit.coefficient(1).and_then(plain) else {
        return findings.open("the decimals of the states: there is no one-loop coefficient to compare with");
    };
    let states: Vec<_> = orbit.states.iter().map(|s| (s.omega.clone(), s.one_loop.clone())).collect();
    match check_states(minimal, &one_loop, &states) {
        Ok(()) => findings.proved("every printed decimal; all embeddings are real"),
        Err(what) => findings.refuted(what),
    }
}

/// M = 0: the vacuum, γ = 0 exactly.
fn protected(findings: &mut Findings, orbit: &Orbit) -> usize {
    let zero = |terms: &[Term]| terms.iter().all(|term| term.value.iter().all(|v| v == "0"));
    let mut through = 0;
    for coefficient in &orbit.coefficients {
        let fine = coefficient.status != Status::Numeric
            && zero(&coefficient.terms)
            && coefficient.parts.as_ref().is_none_or(|parts| zero(&parts.asymptotic) && zero(&parts.finite_size));
        findings.check(fine, format!("loop {}: a protected operator has no anomalous dimension", coefficient.order));
        if fine && coefficient.order == through + 1 {
            through += 1;
        }
    }
    let plain = orbit.members == 1 && orbit.minimal_polynomial == ["0", "1"] && !orbit.singular;
    findings.check(plain && orbit.parity == Parity::Symmetric, "one symmetric, regular state with omega = 0");
    through
}

/// An orbit with its certificate over K.
struct State<'a> {
    subject: &'a Subject<'a>,
    certificate: &'a CertificateOrbit,
    field: &'a Field,
    /// ω^k for k below the degree.
    powers: Vec<Poly>,
    q1: Graded,
    q2: Graded,
    /// Q₁ at one loop.
    q: Poly,
}

impl<'a> State<'a> {
    fn new(subject: &'a Subject<'a>, certificate: &'a CertificateOrbit, field: &'a Field) -> State<'a> {
        let omega = field.element(&rationals(&certificate.omega));
        let mut powers = vec![Poly::one()];
        for k in 1..subject.orbit.degree() {
            powers.push(field.mul(&powers[k - 1], &omega));
        }
        let q1 = series(field, certificate, |term| &term.q1);
        let q2 = series(field, certificate, |term| &term.q2);
        let q = q1.leading();
        State { subject, certificate, field, powers, q1, q2, q }
    }

    fn omega(&self) -> Poly {
        self.field.element(&rationals(&self.certificate.omega))
    }

    /// The field of x, and ω in it.
    fn field_of_x(&self, findings: &mut Findings, minimal: &[BigRational]) {
        let polynomial = rationals(&self.certificate.field);
        if self.subject.orbit.parity == Parity::Symmetric {
            // K is Q(ω) then, and the format has one name for each of its elements.
            let same =
                polynomial == minimal && self.omega() == self.field.element(&[BigRational::zero(), BigRational::one()]);
            findings.check(same, "x is omega");
        } else {
            irreducibility(findings, "the polynomial of the field", &polynomial);
        }
        let expected = self.subject.orbit.members;
        findings.check(
            self.field.degree() == expected,
            format!("the field has degree {}, the orbit {expected} members", self.field.degree()),
        );
        let value = self.field.at(&Poly::from_rationals(minimal), &self.omega());
        findings.check(value.is_zero(), "omega satisfies its minimal polynomial");
    }

    /// Zero momentum, the singular flag and parity.
    fn one_loop(&self, findings: &mut Findings) {
        let Subject { length, magnons, orbit, .. } = *self.subject;
        let transfer = transfer(self.field, length, magnons, &self.q, &self.q2.leading());
        findings.check(transfer.coefficient(0) == Poly::one(), "zero total momentum: T(1/2) = 1");
        match charge(self.field, length, &transfer, &orbit.generator) {
            Some(value) => findings.check(value == self.omega(), format!("omega is {}", orbit.generator)),
            None => findings
                .open(format!("\"{}\" is not a charge known here, so what omega is stays open", orbit.generator)),
        }
        let singular = self.q.at(&ratio(1, 2)).is_zero() && self.q.at(&ratio(-1, 2)).is_zero();
        findings.check(singular == orbit.singular, format!("Q(1/2) = Q(-1/2) = 0 is {singular}"));
        match orbit.parity {
            Parity::Symmetric => {
                let sign = ratio(if magnons.is_multiple_of(2) { 1 } else { -1 }, 1);
                let fine = self.q1.terms().all(|(_, q)| q.mirror().scale(&sign) == *q);
                findings.check(fine, "Q1 is even or odd: symmetric");
            }
            Parity::Paired => match mirror_pairs(self.field, &self.q, &self.omega()) {
                Ok(()) => {
                    findings.proved("v -> -v acts as an automorphism of the field that fixes omega: mirror pairs")
                }
                Err(what) => findings.refuted(format!("mirror pairs: {what}")),
            },
        }
    }

    /// The pair through all orders, then every coefficient. Returns the last loop with everything proved.
    fn coefficients(&self, findings: &mut Findings) -> usize {
        let orders = self.certificate.pair.len();
        let length = self.subject.length;
        if orders == 0 {
            findings.open("the certificate has no orders");
            return 0;
        }
        let charges = match charges(self.field, length, &self.q1, orders) {
            Ok(charges) => charges,
            Err(what) => {
                findings.refuted(format!("the charges of Q1: {what}"));
                return 0;
            }
        };
        let good = self.wronskian(findings, &charges, orders);
        for n in (1..=good.min(length - 1)).filter(|&n| self.subject.orbit.coefficient(n).is_none()) {
            findings.open(format!("loop {n} is absent from the record"));
        }
        let mut through = 0;
        let mut first_loop = true;
        for coefficient in &self.subject.orbit.coefficients {
            let n = coefficient.order;
            if n > good {
                if n > orders || n > length {
                    findings.open(format!("loop {n} ({:?}): beyond the certificate", coefficient.status));
                }
                continue;
            }
            let asymptotic: ZetaSum =
                charges.charges[1].order(n - 1).into_iter().map(|(m, p)| (m, p.scale(&ratio(2, 1)))).collect();
            let fine = self.coefficient(findings, coefficient, asymptotic);
            first_loop &= fine && n == through + 1;
            if first_loop {
                through = n;
            }
        }
        through
    }

    /// Q₁⁺Q₂⁻ − Q₁⁻Q₂⁺ = (2M−L−1) W order by order; returns the number of orders that hold.
    fn wronskian(&self, findings: &mut Findings, charges: &Charges, orders: usize) -> usize {
        let Subject { length, magnons, .. } = *self.subject;
        let shifted = |q: &Graded, n: i64| q.map(|p| p.shift(&ratio(n, 2)));
        let (up, down) = (shifted(&self.q1, 1), shifted(&self.q1, -1).scale(&ratio(-1, 1)));
        let left = Graded::dot(self.field, &[(&up, &shifted(&self.q2, -1)), (&down, &shifted(&self.q2, 1))], orders);
        let factor = ratio(2 * magnons as i64 - length as i64 - 1, 1);
        let right = charges.potential.polynomial(self.field, orders).scale(&factor);
        let difference = left.sub(&right);
        let Some(((order, monomial), poly)) = difference.terms().next() else {
            findings.proved(format!("the Wronskian relation holds through h^{}", orders - 1));
            return orders;
        };
        let power = poly.coefficients().iter().position(|c| !c.is_empty()).unwrap_or(0);
        findings.refuted(format!(
            "the Wronskian relation fails at h^{order}, {}, v^{power}: the two sides differ by {}",
            name(monomial),
            spell(self.field, &poly.coefficient(power))
        ));
        *order
    }

    /// Compares γ_n with the record.
    fn coefficient(&self, findings: &mut Findings, coefficient: &Coefficient, asymptotic: ZetaSum) -> bool {
        let (n, length) = (coefficient.order, self.subject.length);
        let place = format!("loop {n}");
        let mut fine = true;
        if n < length || coefficient.status == Status::Asymptotic {
            fine &= coefficient.status != Status::Numeric
                && self.compare(findings, &place, &coefficient.terms, &asymptotic);
            if coefficient.status != Status::Asymptotic && coefficient.status != Status::Exact {
                findings.open(format!("{place}: status {:?} below loop {length}", coefficient.status));
                fine = false;
            }
            if n < length && coefficient.status == Status::Asymptotic {
                findings.refuted(format!("{place}: marked asymptotic, but it is complete below loop {length}"));
                fine = false;
            }
            if coefficient.parts.is_some() {
                findings.refuted(format!("{place}: two parts, where only the asymptotic one contributes"));
                fine = false;
            }
            return fine;
        }
        let finite = match finite_size(self.field, length, &self.q) {
            Ok(finite) => finite,
            Err(what) => {
                findings.refuted(format!("{place}: the finite-size term: {what}"));
                return false;
            }
        };
        let mut total = asymptotic.clone();
        for (monomial, value) in &finite {
            let sum = total.get(monomial).map_or_else(|| value.clone(), |old| old.add(value));
            total.insert(monomial.clone(), sum);
        }
        if coefficient.status != Status::Exact {
            findings.open(format!("{place}: status {:?}", coefficient.status));
            fine = false;
        }
        fine &= self.compare(findings, &place, &coefficient.terms, &total);
        if let Some(parts) = &coefficient.parts {
            fine &= self.compare(findings, &format!("{place}, asymptotic part"), &parts.asymptotic, &asymptotic);
            fine &= self.compare(findings, &format!("{place}, finite-size part"), &parts.finite_size, &finite);
        }
        fine
    }

    fn compare(&self, findings: &mut Findings, place: &str, terms: &[Term], expected: &ZetaSum) -> bool {
        let mut left: ZetaSum =
            expected.iter().filter(|(_, v)| !v.is_zero()).map(|(m, v)| (m.clone(), v.clone())).collect();
        for term in terms {
            let monomial: Option<Monomial> =
                term.zeta.iter().map(|zeta| if let Zeta::Single(k) = zeta { Some(*k) } else { None }).collect();
            let parts: Vec<(BigRational, &Poly)> = rationals(&term.value).into_iter().zip(&self.powers).collect();
            let value = Poly::combine(&parts);
            let derived = monomial.as_ref().and_then(|m| left.remove(m)).unwrap_or_else(Poly::zero);
            if value != derived {
                findings.refuted(format!(
                    "{place}, {}: the record has {}, the pair gives {} (in powers of x)",
                    monomial.map_or_else(|| format!("{:?}", term.zeta), |m| name(&m)),
                    spell(self.field, &value),
                    spell(self.field, &derived)
                ));
                return false;
            }
        }
        if let Some((monomial, value)) = left.into_iter().next() {
            findings.refuted(format!(
                "{place}, {}: absent from the record, the pair gives {}",
                name(&monomial),
                spell(self.field, &value)
            ));
            return false;
        }
        findings.proved(place.to_string());
        true
    }
}
