//! The one-loop eigenoperator as an exact combination of single traces.
//!
//! A cyclic state ψ gives O = Σ_c ψ(c) tr(c) over all configurations c of the chain, that is
//! Σ (L/symmetry of n) ψ(n) tr(n) over necklaces n. For the transfer matrix A = T(3/2), whose
//! eigenvalue in the orbit is τ ∈ K with minimal polynomial μ: if u is an integer state in the span of
//! the orbit, then ψ = Σ_k b_k A^k u with Σ_k b_k t^k = (μ(t) − μ(τ))/(t − τ) is the eigenvector over K.
//! u is the start state with every other orbit's μ(A) applied.

use super::{Element, element, number_field, show};
use crate::algebra::number_field::NumberField;
use crate::algebra::ring::Ring;
use crate::chain::charges::Sparse;
use crate::chain::necklace::{Configuration, Necklaces, rotate};
use crate::chain::{Orbit, charges, spectrum};
use crate::error::{Error, Result};
use crate::family::Family;
use rug::{Integer, Rational};
use serde::Serialize;

/// One trace of the operator.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct Trace {
    /// The word under the trace: Z for the vacuum field, X for a magnon.
    pub word: String,
    /// Its coefficient; the first trace with one has coefficient 1.
    pub coefficient: Element,
}

/// The eigenoperator, checked: (one-loop mixing) O = γ₁ O and highest weight.
///
/// # Errors
/// T(3/2) does not separate the states, or a check failed.
pub fn eigenoperator(
    family: Family,
    orbits: &[Orbit],
    orbit: &Orbit,
    field: &NumberField,
    gamma_1: &Vec<Rational>,
) -> Result<Vec<Trace>> {
    let necklaces = Necklaces::new(family);
    let matrix = charges::transfer(&necklaces);
    let mut state: Vec<Integer> = spectrum::start(&necklaces).into_iter().map(Integer::from).collect();
    let own = minimal_polynomial(orbit)?;
    for other in orbits.iter().filter(|other| other.label != orbit.label) {
        let polynomial = minimal_polynomial(other)?;
        if polynomial == own {
            return Err(Error::bound(format!(
                "orbits {} and {} have the same eigenvalue of T(3/2), so the eigenoperator is not isolated by it; please report this family",
                orbit.label, other.label
            )));
        }
        state = divided(apply_polynomial(&matrix, &polynomial, &state));
    }
    let tau = eigenvalue(orbit, field)?;
    // b_{d−1} = 1, b_{k−1} = μ_k + τ b_k; ψ by Horner from the top: ψ ← A ψ + b_k u.
    let mut weights = vec![field.one()];
    for coefficient in own.iter().rev().skip(1).take(own.len() - 2) {
        let last = field.mul(&weights[weights.len() - 1], &tau);
        weights.push(field.add(&last, &field.constant(&Rational::from(coefficient))));
    }
    let mut vector: Vec<Vec<Rational>> = vec![field.zero(); necklaces.len()];
    for weight in &weights {
        vector = act(&matrix, field, &vector);
        for (target, value) in vector.iter_mut().zip(&state) {
            *target = field.add(target, &field.scale(weight, &Rational::from(value)));
        }
    }
    check(&necklaces, field, &vector, gamma_1, &orbit.label)?;
    let coefficients: Vec<Vec<Rational>> = necklaces
        .representatives()
        .iter()
        .zip(&vector)
        .map(|(n, value)| field.scale(value, &Rational::from(turns(*n, family.length))))
        .collect();
    let Some(unit) = coefficients.iter().find(|c| !c.is_empty()).and_then(|c| field.inverse(c)) else {
        return Err(Error::check(format!(
            "orbit {}: the eigenoperator is zero; please report this orbit",
            orbit.label
        )));
    };
    Ok(necklaces
        .representatives()
        .iter()
        .zip(&coefficients)
        .filter(|(_, coefficient)| !coefficient.is_empty())
        .map(|(n, coefficient)| Trace {
            word: word(*n, family.length),
            coefficient: show(field, &field.mul(coefficient, &unit)),
        })
        .collect())
}

/// The letters of a configuration, site 0 first.
fn word(configuration: Configuration, length: usize) -> String {
    (0..length).map(|site| if (configuration >> site) & 1 == 1 { 'X' } else { 'Z' }).collect()
}

/// The number of different rotations of a configuration.
fn turns(configuration: Configuration, length: usize) -> u32 {
    let mut turned = rotate(configuration, length);
    let mut count = 1;
    while turned != configuration {
        turned = rotate(turned, length);
        count += 1;
    }
    count
}

/// τ = T(3/2) = Σ_j T_j in K.
fn eigenvalue(orbit: &Orbit, field: &NumberField) -> Result<Vec<Rational>> {
    let image = orbit.image(field, |p| element(field, p))?;
    let mut value = field.zero();
    let point = field.ratio(3, 2);
    for coefficient in image.transfer.iter().rev() {
        value = field.add(&field.scale(&value, &point), coefficient);
    }
    Ok(value)
}

/// The minimal polynomial of τ: the characteristic polynomial of multiplication by τ
/// (Faddeev–LeVerrier: d matrix products), checked to be squarefree enough, that is of degree d.
fn minimal_polynomial(orbit: &Orbit) -> Result<Vec<Integer>> {
    let field = number_field(orbit);
    let tau = eigenvalue(orbit, &field)?;
    let degree = field.degree();
    // Traces of powers, then Newton's identities.
    let mut sums = Vec::with_capacity(degree);
    let mut power = field.one();
    for _ in 0..degree {
        power = field.mul(&power, &tau);
        sums.push(trace(&field, &power));
    }
    let mut symmetric = vec![Rational::from(1)];
    for k in 1..=degree {
        let mut sum = Rational::new();
        for i in 1..=k {
            let product = Rational::from(&symmetric[k - i] * &sums[i - 1]);
            if i % 2 == 1 { sum += product } else { sum -= product }
        }
        symmetric.push(sum / k as u32);
    }
    let coefficients: Vec<Rational> =
        symmetric.into_iter().enumerate().rev().map(|(k, e)| if k % 2 == 1 { -e } else { e }).collect();
    coefficients
        .into_iter()
        .map(|c| {
            if c.is_integer() { Ok(c.numer().clone()) } else {
                Err(Error::check(format!(
                    "orbit {}: T(3/2) is an integer matrix and its eigenvalue is no algebraic integer; please report this orbit",
                    orbit.label
                )))
            }
        })
        .collect()
}

/// The trace of multiplication by an element.
fn trace(field: &NumberField, a: &Vec<Rational>) -> Rational {
    let mut sum = Rational::new();
    let mut basis = vec![Rational::from(1)];
    let x = field.element(&[Rational::new(), Rational::from(1)]);
    for i in 0..field.degree() {
        let product = field.mul(a, &basis);
        if let Some(c) = product.get(i) {
            sum += c;
        }
        basis = field.mul(&basis, &x);
    }
    sum
}

fn apply(matrix: &Sparse, state: &[Integer]) -> Vec<Integer> {
    matrix
        .rows()
        .iter()
        .map(|row| {
            row.iter().fold(Integer::new(), |sum, (column, weight)| sum + Integer::from(&state[*column] * *weight))
        })
        .collect()
}

fn act(matrix: &Sparse, field: &NumberField, vector: &[Vec<Rational>]) -> Vec<Vec<Rational>> {
    matrix
        .rows()
        .iter()
        .map(|row| {
            row.iter().fold(field.zero(), |sum, (column, weight)| {
                field.add(&sum, &field.scale(&vector[*column], &Rational::from(*weight)))
            })
        })
        .collect()
}

fn apply_polynomial(matrix: &Sparse, polynomial: &[Integer], state: &[Integer]) -> Vec<Integer> {
    polynomial.iter().rev().fold(vec![Integer::new(); state.len()], |value, coefficient| {
        apply(matrix, &value).into_iter().zip(state).map(|(a, b)| a + Integer::from(b * coefficient)).collect()
    })
}

/// The state divided by the common divisor of its entries.
fn divided(state: Vec<Integer>) -> Vec<Integer> {
    let common = state.iter().fold(Integer::new(), |common, value| common.gcd(value));
    if common <= 1 { state } else { state.into_iter().map(|value| value / &common).collect() }
}

/// Checks H ψ = γ₁ ψ and that lowering annihilates ψ (a highest weight).
fn check(
    necklaces: &Necklaces,
    field: &NumberField,
    vector: &[Vec<Rational>],
    gamma_1: &Vec<Rational>,
    label: &str,
) -> Result<()> {
    let mixed = act(&charges::one_loop(necklaces), field, vector);
    let eigen = mixed.iter().zip(vector).all(|(a, b)| *a == field.mul(b, gamma_1));
    let Family { length, magnons } = necklaces.family();
    // (S ψ)(c) = Σ over empty sites of ψ(c with a magnon there), for all c with M − 1 magnons; for a cyclic ψ
    // it is enough to take c = (necklace without one of its magnons).
    let highest = necklaces.representatives().iter().all(|n| {
        (0..length).filter(|site| (n >> site) & 1 == 1).all(|site| {
            let fewer = n & !(1 << site);
            let sum = (0..length)
                .filter(|empty| (fewer >> empty) & 1 == 0)
                .fold(field.zero(), |sum, empty| field.add(&sum, &vector[necklaces.position(fewer | (1 << empty))]));
            sum.is_empty()
        })
    });
    if eigen && highest && magnons > 0 {
        return Ok(());
    }
    Err(Error::check(format!(
        "orbit {label}: the eigenoperator does not satisfy the one-loop mixing equation or is no highest weight; please report this orbit"
    )))
}

#[cfg(test)]
mod tests {
    use super::super::{Request, compute};
    use crate::algebra::number_field::NumberField;
    use crate::algebra::ring::Ring;
    use crate::family::Family;
    use crate::observer::Silent;
    use rug::Rational;
    use std::collections::BTreeMap;

    /// The mixing of traces written out on words, independent of the chain: D tr(w) = 2 Σ_k [tr(w) −
    /// tr(w with letters k, k+1 exchanged)] (Minahan, Zarembo, hep-th/0212208, in g² = λ/16π²).
    fn mixing(words: &[(String, Vec<Rational>)], field: &NumberField) -> BTreeMap<String, Vec<Rational>> {
        let least = |word: &str| (0..word.len()).map(|k| format!("{}{}", &word[k..], &word[..k])).min().unwrap();
        let mut result: BTreeMap<String, Vec<Rational>> = BTreeMap::new();
        let mut add = |word: String, value: Vec<Rational>| {
            let entry = result.entry(word).or_default();
            *entry = field.add(entry, &value);
        };
        for (word, coefficient) in words {
            let letters: Vec<char> = word.chars().collect();
            for k in 0..letters.len() {
                let mut other = letters.clone();
                other.swap(k, (k + 1) % letters.len());
                add(least(word), field.scale(coefficient, &Rational::from(2)));
                add(least(&other.iter().collect::<String>()), field.scale(coefficient, &Rational::from(-2)));
            }
        }
        result.retain(|_, value| !value.is_empty());
        result
    }

    #[test]
    fn eigenoperators_satisfy_the_mixing_equation() {
        for (length, magnons, orbits) in [(5, 2, 1), (6, 3, 1), (7, 2, 2), (7, 3, 1), (8, 4, 1), (8, 3, 2)] {
            for orbit in 1..=orbits {
                let request = Request {
                    family: Family { length, magnons },
                    label: format!("L{length}M{magnons}-{orbit}"),
                    loops: 1,
                    digits: 10,
                };
                let state = compute(&request, &Silent).unwrap();
                let numbers = |list: &[String]| list.iter().map(|c| c.parse::<Rational>().unwrap()).collect::<Vec<_>>();
                let field = NumberField::new(numbers(&state.field));
                let words: Vec<(String, Vec<Rational>)> = state
                    .operator
                    .iter()
                    .map(|trace| (trace.word.clone(), field.element(&numbers(&trace.coefficient))))
                    .collect();
                let gamma = field.element(&numbers(&state.gamma_1));
                let mixed = mixing(&words, &field);
                assert_eq!(mixed.len(), words.len());
                for (word, coefficient) in &words {
                    let least = (0..word.len()).map(|k| format!("{}{}", &word[k..], &word[..k])).min().unwrap();
                    assert_eq!(mixed[&least], field.mul(coefficient, &gamma), "{} {word}", request.label);
                }
            }
        }
    }
}
