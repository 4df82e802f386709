//! Direct diagonalisation of the dilatation operator as an independent route through three loops
//! (formulas §4): exact, without Bethe or Baxter equations, primes or floating-point numbers.
//!
//! On the cyclic states of each parity the characteristic polynomial of D₂ + h D₄ + h² D₆ is computed over
//! Z[h]/h^{H+1} and divided by that of one magnon fewer: what remains, χ(x, h), belongs to the primaries. A
//! claimed x₀ = γ₁ + hγ₂ + h²γ₃ over the field Q(ω) of an orbit is put in: the Newton polygon of
//! χ(x₀ + y, h) in y tells how many eigenvalues agree with x₀ through n loops (as many as roots y = O(hⁿ)).
//! That settles degenerate eigenvalues too, given H = 2k for k-fold ones.

mod characteristic;
mod dilatation;
mod report;

pub use dilatation::SHORTEST;
pub use report::{Direct, OrbitReport, Report};

use crate::algebra::flint;
use crate::algebra::graded::{Graded, Grading};
use crate::algebra::number_field::NumberField;
use crate::algebra::ring::Ring;
use crate::error::{Error, Result};
use crate::family::Family;
use crate::observer::{Event, Observer};
use crate::record::{Orbit, Parity, Record, Term};
use characteristic::{Polynomial, characteristic, quotient};
use dilatation::{Reversal, Sector};
use rug::{Integer, Rational};

/// The highest loop order of the operator.
pub const LOOPS: usize = 3;

/// More cyclic states of one parity than this are refused: the cost grows with their fourth power.
pub const MOST_STATES: usize = 200;

/// Holds the coefficients of a record through `loops` against the eigenvalues of the dilatation operator.
///
/// # Errors
/// A length or loop order for which the operator is not known, a record without these coefficients, a family
/// that is too large, or interruption.
pub fn crosscheck(record: &Record, loops: usize, observer: &dyn Observer) -> Result<Report> {
    let family = Family::new(record.length, record.magnons)?;
    check(family, loops)?;
    let claims = record.orbits.iter().map(|orbit| Claim::new(orbit, loops)).collect::<Result<Vec<_>>>()?;
    let sectors = [Reversal::Even, Reversal::Odd]
        .into_iter()
        .map(|reversal| primaries(family, reversal, observer))
        .collect::<Result<Vec<_>>>()?;
    let counts = [sectors[0].len() - 1, sectors[1].len() - 1];
    let orbits = record
        .orbits
        .iter()
        .zip(&claims)
        .map(|(orbit, claim)| {
            observer.proceed()?;
            let found: Vec<Found> = sectors.iter().map(|chi| found(chi, claim)).collect();
            Ok(judge(orbit, claim, &claims, loops, &found))
        })
        .collect::<Result<Vec<_>>>()?;
    Ok(Report {
        length: family.length,
        magnons: family.magnons,
        loops,
        primaries_even: counts[0],
        primaries_odd: counts[1],
        primaries_in_record: record.orbits.iter().map(|orbit| orbit.members).sum(),
        orbits,
    })
}

/// Refuses what the operator does not answer.
///
/// # Errors
/// L below [`SHORTEST`], no loops or more than [`LOOPS`], or a family of more than [`MOST_STATES`] states.
pub fn check(family: Family, loops: usize) -> Result<()> {
    if family.length < SHORTEST {
        return Err(Error::input(format!(
            "family {family}: the dilatation operator through three loops reaches over four neighbouring sites and needs L >= {SHORTEST}; give a longer family"
        )));
    }
    if loops == 0 || loops > LOOPS {
        return Err(Error::input(format!(
            "family {family}: {loops} loops were asked for, and the dilatation operator used here is known for 1 to {LOOPS} loops; give --loops between 1 and {LOOPS}"
        )));
    }
    let states = crate::family::necklaces(family.length, family.magnons) / 2u32;
    if states > MOST_STATES {
        return Err(Error::bound(format!(
            "family {family}: about {states} cyclic states of each parity, more than the {MOST_STATES} that direct diagonalisation handles; choose a smaller family"
        )));
    }
    Ok(())
}

/// χ(x, h) of the primaries in one parity sector, through h^{2k} where one-loop eigenvalues are at most k-fold.
fn primaries(family: Family, reversal: Reversal, observer: &dyn Observer) -> Result<Polynomial> {
    observer.event(Event::Stage { family: family.to_string(), stage: "direct diagonalisation" });
    let whole = Sector::new(family, reversal);
    let fewer = (family.magnons > 0)
        .then(|| Sector::new(Family { length: family.length, magnons: family.magnons - 1 }, reversal));
    let chi = |order: usize| -> Result<Polynomial> {
        let all = characteristic(&whole, order, observer)?;
        let Some(fewer) = &fewer else { return Ok(all) };
        quotient(&all, &characteristic(fewer, order, observer)?).ok_or_else(|| {
            Error::check(format!(
                "family {family}: the eigenvalues of the descendants are not among those of the dilatation operator; please report this family"
            ))
        })
    };
    let one_loop: Vec<Integer> = chi(0)?.into_iter().map(|mut c| c.swap_remove(0)).collect();
    let most = flint::factor(&one_loop).iter().map(|(_, multiplicity)| *multiplicity).max().unwrap_or(1);
    chi(2 * most)
}

/// γ₁, γ₂, γ₃ of an orbit as a record has them.
struct Claim {
    field: NumberField,
    minimal: Vec<Rational>,
    generator_is_gamma_1: bool,
    paired: bool,
    /// γ_n as coefficients of 1, ω, ….
    values: Vec<Vec<Rational>>,
    /// The first loop at which zeta values are claimed, which the operator excludes.
    zeta: Option<usize>,
}

impl Claim {
    fn new(orbit: &Orbit, loops: usize) -> Result<Claim> {
        let number = |text: &String| {
            text.parse::<Rational>().map_err(|cause| {
                Error::input(format!("orbit {}: \"{text}\" is not a rational number", orbit.label)).because(cause)
            })
        };
        let minimal = orbit.minimal_polynomial.iter().map(number).collect::<Result<Vec<_>>>()?;
        let mut values = Vec::new();
        let mut zeta = None;
        for order in 1..=loops {
            let Some(coefficient) = orbit.coefficient(order).filter(|c| !c.terms.is_empty()) else {
                return Err(Error::input(format!(
                    "orbit {}: no exact coefficient at loop {order}; compute the family through {loops} loops",
                    orbit.label
                )));
            };
            let (plain, other): (Vec<&Term>, Vec<&Term>) =
                coefficient.terms.iter().partition(|term| term.zeta.is_empty());
            if other.iter().any(|term| term.value.iter().any(|c| c != "0")) {
                zeta = zeta.or(Some(order));
            }
            let mut value = match plain.first() {
                Some(term) => term.value.iter().map(number).collect::<Result<Vec<_>>>()?,
                None => Vec::new(),
            };
            value.resize(orbit.degree(), Rational::new());
            values.push(value);
        }
        Ok(Claim {
            field: NumberField::new(minimal.clone()),
            minimal,
            generator_is_gamma_1: orbit.generator == "gamma_1",
            paired: orbit.parity == Parity::Paired,
            values,
            zeta,
        })
    }

    /// How many eigenvalues of each embedding this claim stands for.
    fn states(&self) -> usize {
        if self.paired { 2 } else { 1 }
    }

    /// Whether another claim says the same through n loops.
    fn same(&self, other: &Claim, n: usize) -> bool {
        self.minimal == other.minimal
            && self.generator_is_gamma_1
            && other.generator_is_gamma_1
            && self.values[..n] == other.values[..n]
    }
}

/// What a sector has of a claim.
struct Found {
    /// How many eigenvalues agree with it through 1, 2, … loops.
    agreeing: Vec<usize>,
    /// Where one eigenvalue has this γ₁ and differs later: the loop and γ_n − (claimed γ_n).
    correction: Option<(usize, Vec<Rational>)>,
}

/// Newton polygon of χ(x₀ + y, h): first the expansion at x = γ₁, whose coefficients are small, then the shift
/// by hγ₂ + h²γ₃, for which the terms through y^{k + H} suffice.
fn found(chi: &Polynomial, claim: &Claim) -> Found {
    let field = &claim.field;
    let order = chi[0].len() - 1;
    let terms = (order / 2 + order + 1).min(chi.len());
    let one_loop = field.element(&claim.values[0]);
    let columns: Vec<Vec<Vec<Rational>>> = (0..=order)
        .map(|j| {
            let column = chi.iter().map(|c| field.constant(&Rational::from(&c[j]))).collect();
            expansion(field, column, &one_loop, terms)
        })
        .collect();
    let expanded = (0..terms).map(|i| columns.iter().map(|column| column[i].clone()).collect()).collect();
    let grading = Grading::plain(order);
    let ring = Graded::new(field, &grading);
    let mut step = ring.zero();
    for (slot, value) in step.iter_mut().zip(&claim.values).skip(1) {
        *slot = field.element(value);
    }
    let mut coefficients = expansion(&ring, expanded, &step, order / 2 + 1);
    let unit = coefficients.iter().position(|c| ring.valuation(c) == 0);
    coefficients.truncate(unit.map_or(coefficients.len(), |k| k + 1));
    let valuations: Vec<usize> = coefficients.iter().map(|c| ring.valuation(c)).collect();
    let agreeing: Vec<usize> = (1..=claim.values.len())
        .map(|slope| {
            // The largest i with val(c_i) + slope · i minimal; unknown valuations belong to smaller i.
            (0..valuations.len())
                .filter(|i| valuations[*i] <= order)
                .min_by_key(|i| (valuations[*i] + slope * i, std::cmp::Reverse(*i)))
                .unwrap_or(0)
        })
        .collect();
    let mut correction = None;
    if valuations.len() == 2
        && (1..claim.values.len()).contains(&valuations[0])
        && let Some(inverse) = field.inverse(&coefficients[1][0])
    {
        let step = field.neg(&field.mul(&coefficients[0][valuations[0]], &inverse));
        correction = Some((valuations[0] + 1, field.coefficients(&step)));
    }
    Found { agreeing, correction }
}

/// The first `count` coefficients of p(x₀ + y) in y, by repeated synthetic division.
fn expansion<R: Ring>(ring: &R, mut polynomial: Vec<R::Elem>, point: &R::Elem, count: usize) -> Vec<R::Elem> {
    let mut coefficients = Vec::with_capacity(count);
    while coefficients.len() < count && !polynomial.is_empty() {
        let mut remainder = ring.zero();
        for slot in polynomial.iter_mut().rev() {
            let next = ring.add(&ring.mul(&remainder, point), slot);
            *slot = std::mem::replace(&mut remainder, next);
        }
        coefficients.push(remainder);
        polynomial.pop();
    }
    coefficients
}

fn judge(orbit: &Orbit, claim: &Claim, claims: &[Claim], loops: usize, found: &[Found]) -> OrbitReport {
    let agrees = |n: usize| {
        let counts = [found[0].agreeing[n - 1], found[1].agreeing[n - 1]];
        let own = claim.states();
        let wanted: usize = claims.iter().filter(|other| claim.same(other, n)).map(Claim::states).sum();
        let total = counts[0] + counts[1];
        // Where ω is not γ₁, several embeddings may share an eigenvalue, and only the lower bound is certain.
        (if claim.generator_is_gamma_1 { total == wanted } else { total >= own })
            && (!claim.paired || counts.iter().all(|count| *count >= 1))
            && claim.zeta.is_none_or(|zeta| n < zeta)
    };
    let agrees_through = (1..=loops).take_while(|n| agrees(*n)).count();
    let direct = found
        .iter()
        .filter(|_| agrees_through < loops)
        .find_map(|found| found.correction.as_ref().filter(|(order, _)| *order == agrees_through + 1))
        .map(|(order, step)| Direct {
            order: *order,
            claimed: claim.values[order - 1].iter().map(Rational::to_string).collect(),
            value: claim.values[order - 1].iter().zip(step).map(|(c, s)| Rational::from(c + s).to_string()).collect(),
        });
    OrbitReport {
        label: orbit.label.clone(),
        parity: orbit.parity,
        members: orbit.members,
        minimal_polynomial: orbit.minimal_polynomial.clone(),
        generator: orbit.generator.clone(),
        agrees: agrees_through == loops,
        agrees_through,
        direct,
    }
}
