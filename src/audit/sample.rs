//! Records and certificates for tests, lifted here order by order with the audit's own arithmetic.

use super::charges::charges;
use super::field::Field;
use super::finite_size::{ZetaSum, finite_size};
use super::graded::Graded;
use super::orbit::rationals;
use super::poly::{Poly, ratio};
use crate::record::{
    CERTIFICATE, COUPLING, Certificate, CertificateOrbit, CertificateOrder, CertificateTerm, Coefficient, Orbit,
    PROGRAM, Parity, Parts, Record, State, Status, Term, Zeta,
};

/// A symmetric orbit with x = ω = γ₁.
pub struct Seed {
    pub field: Vec<String>,
    /// Coefficients of the one-loop Q in powers of ω.
    pub q: Vec<Vec<String>>,
    pub singular: bool,
    pub states: Vec<(String, String)>,
}

fn words(list: &[&str]) -> Vec<String> {
    list.iter().map(ToString::to_string).collect()
}

/// A rational orbit.
pub fn rational(omega: &str, q: &[&str], singular: bool) -> Seed {
    Seed {
        field: vec![if omega == "0" { "0".into() } else { format!("-{omega}") }, "1".into()],
        q: q.iter().map(|c| words(&[c])).collect(),
        singular,
        states: vec![(omega.into(), format!("{omega}.00000000"))],
    }
}

/// L = 6, M = 2: γ₁ = 10 ∓ 2√5, and Q = v² + 4/γ₁ − 1/4 (two magnons: u = ½ cot(πn/5)).
pub fn six_two() -> Seed {
    Seed {
        field: words(&["80", "-20", "1"]),
        q: vec![words(&["3/4", "-1/20"]), words(&["0", "0"]), words(&["1", "0"])],
        singular: false,
        states: vec![
            ("5.527864045000420607".into(), "5.52786404500042".into()),
            ("14.472135954999579393".into(), "14.472135955".into()),
        ],
    }
}

/// Q₂ of a one-loop Q₁, from the top coefficient down: b_j enters v^{M+j−1} with the factor M − j.
fn second(field: &Field, length: usize, q1: &Poly) -> Poly {
    let m = q1.len() - 1;
    let top = length + 1 - m;
    let mut q2 = Poly::one().times_power(top);
    let (up, down) = (q1.shift(&ratio(1, 2)), q1.shift(&ratio(-1, 2)).negate());
    let target = Poly::integer(2 * m as i64 - length as i64 - 1).times_power(length);
    for j in (0..top).rev().filter(|&j| j != m) {
        let (low, high) = (q2.shift(&ratio(-1, 2)), q2.shift(&ratio(1, 2)));
        let rest = target.sub(&field.dot(&[(&up, &low), (&down, &high)], usize::MAX));
        let b = rest.coefficient(m + j - 1).scale(&ratio(1, m as i64 - j as i64));
        q2 = q2.add(&b.times_power(j));
    }
    q2
}

/// Solves a square system over K by elimination; `None` when it is singular.
fn solve(field: &Field, mut rows: Vec<Vec<Poly>>) -> Option<Vec<Poly>> {
    let n = rows.len();
    for k in 0..n {
        let pivot = (k..n).find(|&i| !rows[i][k].is_zero())?;
        rows.swap(k, pivot);
        let inverse = field.inverse(&rows[k][k])?;
        let row: Vec<Poly> = rows[k].iter().map(|entry| field.mul(entry, &inverse)).collect();
        for (i, other) in rows.iter_mut().enumerate() {
            if i == k || other[k].is_zero() {
                continue;
            }
            let factor = other[k].negate();
            for (target, entry) in other.iter_mut().zip(&row) {
                *target = field.dot(&[(&factor, entry), (&Poly::one(), target)], usize::MAX);
            }
        }
        rows[k] = row;
    }
    rows.into_iter().map(|mut row| row.pop()).collect()
}

/// Solves the lift through h^{loops−1}.
fn lift(field: &Field, length: usize, q: &Poly, loops: usize) -> (Graded, Graded) {
    let m = q.len() - 1;
    let half = |p: &Poly, n: i64| p.shift(&ratio(n, 2));
    let (p0, q0) = (q.clone(), second(field, length, q));
    let (mut q1, mut q2) = (Graded::constant(p0.clone()), Graded::constant(q0.clone()));
    let unknowns: Vec<(bool, usize)> =
        (0..m).map(|j| (true, j)).chain((0..=length - m).filter(|&j| j != m).map(|j| (false, j))).collect();
    let columns: Vec<Poly> = unknowns
        .iter()
        .map(|&(first, j)| {
            let power = Poly::one().times_power(j);
            let (a, b) = if first { (&power, &q0) } else { (&p0, &power) };
            field.dot(&[(&half(a, 1), &half(b, -1)), (&half(a, -1).negate(), &half(b, 1))], usize::MAX)
        })
        .collect();
    let factor = ratio(2 * m as i64 - length as i64 - 1, 1);
    for n in 1..loops {
        let charges = charges(field, length, &q1, n + 1).unwrap();
        let target = charges.potential.polynomial(field, n + 1).scale(&factor);
        let (up, down) = (q1.map(|p| half(p, 1)), q1.map(|p| half(p, -1).negate()));
        let (low, high) = (q2.map(|p| half(p, -1)), q2.map(|p| half(p, 1)));
        let rest = target.sub(&Graded::dot(field, &[(&up, &low), (&down, &high)], n + 1));
        for (monomial, right) in rest.order(n) {
            let rows = (0..length)
                .map(|i| columns.iter().chain([&right]).map(|column| column.coefficient(i)).collect())
                .collect();
            let solution = solve(field, rows).unwrap();
            for (first, target) in [(true, &mut q1), (false, &mut q2)] {
                let sum = unknowns.iter().zip(&solution).filter(|((f, _), _)| *f == first);
                let poly = sum.fold(Poly::zero(), |p, ((_, j), c)| p.add(&c.times_power(*j)));
                target.set(n, monomial.clone(), poly);
            }
        }
    }
    (q1, q2)
}

fn terms(field: &Field, sum: &ZetaSum) -> Vec<Term> {
    let nonzero = sum.iter().filter(|(_, value)| !value.is_zero());
    nonzero
        .map(|(monomial, value)| Term {
            zeta: monomial.iter().map(|&k| Zeta::Single(k)).collect(),
            value: field.coordinates(value).iter().map(ToString::to_string).collect(),
        })
        .collect()
}

/// The record and certificate of a family whose orbits are `seeds`, in order.
pub fn family(length: usize, magnons: usize, loops: usize, seeds: &[Seed]) -> (Record, Certificate) {
    let mut record = Record {
        schema: 1,
        program: PROGRAM.into(),
        length,
        magnons,
        coupling: COUPLING.into(),
        loops,
        primaries: seeds.iter().map(|seed| seed.field.len() - 1).sum(),
        orbits: Vec::new(),
    };
    let mut certificate = Certificate { certificate: CERTIFICATE, length, magnons, loops, orbits: Vec::new() };
    for (index, seed) in seeds.iter().enumerate() {
        let field = Field::new(&rationals(&seed.field));
        let q = Poly::from_constants(&seed.q.iter().map(|c| field.element(&rationals(c))).collect::<Vec<_>>());
        let (q1, q2) = lift(&field, length, &q, loops);
        let p1 = charges(&field, length, &q1, loops).unwrap().charges.swap_remove(1).scale(&ratio(2, 1));
        let coefficients = (1..=loops)
            .map(|n| {
                let asymptotic: ZetaSum = p1.order(n - 1);
                let mut total = asymptotic.clone();
                let mut parts = None;
                if n == length {
                    let finite = finite_size(&field, length, &q).unwrap();
                    for (monomial, value) in &finite {
                        let sum = total.get(monomial).map_or(value.clone(), |old| old.add(value));
                        total.insert(monomial.clone(), sum);
                    }
                    parts = Some(Parts { asymptotic: terms(&field, &asymptotic), finite_size: terms(&field, &finite) });
                }
                let (spare_digits, numbers) = (None, Vec::new());
                Coefficient {
                    order: n,
                    status: Status::Exact,
                    terms: terms(&field, &total),
                    parts,
                    spare_digits,
                    numbers,
                }
            })
            .collect();
        let label = format!("L{length}M{magnons}-{}", index + 1);
        record.orbits.push(Orbit {
            label: label.clone(),
            parity: Parity::Symmetric,
            members: field.degree(),
            singular: seed.singular,
            minimal_polynomial: seed.field.clone(),
            generator: "gamma_1".into(),
            coefficients,
            states: seed.states.iter().map(|(a, b)| State { omega: a.clone(), one_loop: b.clone() }).collect(),
        });
        let spell = |p: &Poly, count: usize| {
            (0..count).map(|j| field.coordinates(&p.coefficient(j)).iter().map(ToString::to_string).collect()).collect()
        };
        let pair = (0..loops).map(|n| {
            let (a, b) = (q1.order(n), q2.order(n));
            let mut monomials: Vec<_> = a.keys().chain(b.keys()).cloned().collect();
            monomials.sort();
            monomials.dedup();
            let entry = |list: &ZetaSum, m: &Vec<u32>| list.get(m).cloned().unwrap_or_else(Poly::zero);
            let terms = monomials.into_iter().map(|zeta| CertificateTerm {
                q1: spell(&entry(&a, &zeta), magnons + 1),
                q2: spell(&entry(&b, &zeta), length - magnons + 2),
                zeta,
            });
            CertificateOrder { order: n, terms: terms.collect() }
        });
        let mut omega = words(&["0", "1"]);
        omega.resize(field.degree().max(2), "0".into());
        if field.degree() == 1 {
            omega = vec![field.coordinates(&field.generator())[0].to_string()];
        }
        certificate.orbits.push(CertificateOrbit { label, field: seed.field.clone(), omega, pair: pair.collect() });
    }
    (record, certificate)
}
