//! The order-by-order solution for one state.

use super::columns::Column;
use super::frame::{Frame, partner, raising_is_negative};
use super::gluing::Cut;
use super::input::OneLoop;
use super::laurent::{Functions, Laurent, divide_by_variable, leading_coefficients, multiply_by_variable};
use super::pivots::{Pivot, pivots};
use super::start::leading_polynomials;
use super::sweep::{Block, LeadingPoints, Orders, sources, sweep};
use super::tail::{Leading, Sources, Tail, add_product, at_far_point, solve};
use super::unknowns::{System, Unknown};
use crate::algebra::flint::dense::{Real, Run, Scalar};
use crate::error::{Error, Result};
use rayon::prelude::*;
use rug::{Float, Rational};

/// What one stage determines.
#[derive(Clone)]
pub struct Stage {
    /// The real unknowns, in the order of `Unknown::of_stage`.
    pub values: Vec<Real>,
    /// Digits by which the overdetermined conditions agree.
    pub consistency: f64,
}

/// The leading-order response of the solution to δp_a = v^exponent.
pub(super) struct Response<S> {
    pub(super) a: usize,
    pub(super) exponent: i64,
    tails: [Tail<S>; 4],
    /// `end[i][b][t]`, t ≤ L'.
    pub(super) end: [[Vec<S>; 4]; 4],
}

/// The solution through some order.
pub struct Solver<S> {
    pub(super) frame: Frame,
    pub(super) functions: Functions<S>,
    lowered: Vec<[Laurent<S>; 4]>,
    raised: Vec<[Laurent<S>; 4]>,
    pivots: [Vec<Pivot>; 4],
    leading: LeadingPoints<S>,
    log: Real,
    tails: Vec<[Tail<S>; 4]>,
    pub(super) orders: Vec<Orders<S>>,
    pub(super) responses: Vec<Response<S>>,
    pub(super) cut: Cut<S>,
    pub(super) third: [Rational; 5],
    pub(super) first: [Rational; 5],
    gamma: Vec<Real>,
    pub(super) alpha: Vec<S>,
    pub(super) beta: Vec<S>,
    pub(super) delta: Vec<S>,
    pub(super) rho: [[Vec<S>; 2]; 2],
    /// Digits by which the gluing conditions agree, stage by stage.
    consistency: Vec<f64>,
}

/// Four arrays computed in parallel over i.
fn for_each_solution<T: Send>(f: impl Fn(usize) -> T + Sync + Send) -> [T; 4] {
    let values: Vec<T> = (0..4usize).into_par_iter().map(f).collect();
    let Ok(array) = <[T; 4]>::try_from(values) else { unreachable!("four solutions") };
    array
}

impl<S: Scalar> Solver<S> {
    /// Sets up the leading order and the responses, and solves stage 0.
    ///
    /// # Errors
    /// A check failure when the one-loop data are not those of a cyclic primary.
    pub fn new(frame: Frame, state: &OneLoop) -> Result<Solver<S>> {
        let bits = frame.bits;
        let convert = |poly: &[(Float, Float)]| -> Vec<S> {
            poly.iter().map(|(re, im)| S::from_parts(&Real::from_float(re), &Real::from_float(im))).collect()
        };
        let (third, first) = leading_coefficients(&frame);
        let [p2, p3, p4] = leading_polynomials(&frame, &convert(&state.q), &convert(&state.r))?;
        let mut functions = Functions::new(&frame);
        let scale = Real::from_rational(&third[0], bits);
        functions.polynomial[1][0] = p2;
        functions.polynomial[2][0] = p3.iter().map(|c| c.scale(&scale, bits)).collect();
        functions.polynomial[3][0] = p4;
        let lowered: [Laurent<S>; 4] = std::array::from_fn(|a| functions.lowered(&frame, a, 0));
        let raised: [Laurent<S>; 4] = std::array::from_fn(|b| functions.raised(&frame, b, 0));
        let far = Float::with_val(bits as u32 + 64, 2 * frame.points + 1) / 2u32;
        let leading = LeadingPoints::new(&frame, &lowered);
        let mut solver = Solver {
            pivots: std::array::from_fn(|i| pivots(&frame, i, &third[0])),
            leading,
            log: Real::from_float(&far.ln()),
            lowered: vec![lowered],
            raised: vec![raised],
            functions,
            tails: Vec::new(),
            orders: Vec::new(),
            responses: Vec::new(),
            cut: Cut::new(&frame),
            third,
            first,
            gamma: vec![Real::zero(), Real::from_float(&state.gamma1)],
            alpha: Vec::new(),
            beta: Vec::new(),
            delta: Vec::new(),
            rho: std::array::from_fn(|_| std::array::from_fn(|_| Vec::new())),
            consistency: Vec::new(),
            frame,
        };
        solver.tails.push(solver.tails_of_order(0)?);
        let len = solver.frame.window(0);
        let order = solver.carry(0, len, &solver.tails[0]);
        solver.orders.push(order);
        solver.responses = Unknown::powers(&solver.frame, solver.frame.orders)
            .into_iter()
            .chain([(0, -1), (2, solver.frame.degrees()[2])])
            .map(|(a, exponent)| solver.response(a, exponent))
            .collect::<Result<_>>()?;
        let stage = solver.solve_stage(0)?;
        solver.enter(0, &stage);
        Ok(solver)
    }

    /// γ_1 … γ_n so far (index 0 unused).
    pub fn gamma(&self) -> &[Real] {
        &self.gamma
    }

    /// Digits by which the overdetermined gluing conditions agree, for each stage done.
    pub fn consistency(&self) -> &[f64] {
        &self.consistency
    }

    fn leading_at(&self, i: usize) -> Leading<'_, S> {
        Leading { lowered: &self.lowered[0], raised: &self.raised[0], pivots: &self.pivots[i] }
    }

    /// The expansions at large v at order n for the functions entered so far.
    fn tails_of_order(&self, n: usize) -> Result<[Tail<S>; 4]> {
        let frame = &self.frame;
        let results = for_each_solution(|i| {
            let mut source = Sources::new(frame, n);
            for m in 1..=n {
                let before = &self.tails[n - m][i];
                for a in 0..4 {
                    add_product(&mut source.s, &self.raised[m][a], &before.mu[a], frame, n);
                    add_product(&mut source.r[a], &self.lowered[m][a], &before.s, frame, n);
                }
            }
            solve(frame, &self.leading_at(i), i, n, n, source, n == 0)
        });
        let violated = results.iter().map(|(_, violated)| *violated).max().unwrap_or(0);
        if violated > -frame.bits / 2 {
            return Err(self
                .failed(n, &format!("the expansion at large v needs a higher power of the logarithm (2^{violated})")));
        }
        Ok(results.map(|(tail, _)| tail))
    }

    /// The solution at order n at all points.
    fn carry(&self, n: usize, len: usize, tails: &[Tail<S>; 4]) -> Orders<S> {
        let start = self.start(tails, len);
        let blocks = sources(&self.frame, n, len, &self.raised[1..], &self.lowered[1..], &self.orders);
        sweep(&self.frame, &self.leading, len, start, blocks)
    }

    fn start(&self, tails: &[Tail<S>; 4], len: usize) -> [[Vec<S>; 4]; 4] {
        for_each_solution(|i| {
            std::array::from_fn(|a| {
                at_far_point(&self.frame, &tails[i].b[a], self.frame.exponent(i, a), len, &self.log)
            })
        })
    }

    fn response(&self, a: usize, exponent: i64) -> Result<Response<S>> {
        let frame = &self.frame;
        let b = partner(a);
        let depth = ((frame.degrees()[a] - exponent) / frame.step) as usize;
        let results = for_each_solution(|i| {
            let zero = &self.tails[0][i];
            let mut source = Sources::new(frame, 1);
            for k in depth..=frame.terms {
                source.r[a][0][k] = zero.s[0][k - depth].clone();
                source.s[0][k] = zero.mu[b][0][k - depth].clone();
                if raising_is_negative(b) {
                    source.s[0][k].negate();
                }
            }
            solve(frame, &self.leading_at(i), i, 1, 1, source, false)
        });
        if let Some((_, violated)) = results.iter().find(|(_, violated)| *violated > -frame.bits / 2) {
            return Err(
                self.failed(1, &format!("a response at large v needs a higher power of the logarithm (2^{violated})"))
            );
        }
        let tails = results.map(|(tail, _)| tail);
        let len = frame.wrap() + 1;
        let start = self.start(&tails, len);
        let zero = &self.orders[0];
        let blocks: Vec<[Block<S>; 4]> = (1..=frame.points)
            .into_par_iter()
            .map(|j| {
                std::array::from_fn(|i| {
                    let old = &zero.blocks[j - 1][i];
                    let mut block = S::zeros(5 * len);
                    let mut up = old[b * zero.len..b * zero.len + len].to_vec();
                    let mut down = old[4 * zero.len..4 * zero.len + len].to_vec();
                    multiply_power(&mut up, j, exponent - frame.wrap() as i64, frame.bits);
                    multiply_power(&mut down, j, exponent, frame.bits);
                    if raising_is_negative(b) {
                        up.iter_mut().for_each(Scalar::negate);
                    }
                    for (t, (up, down)) in up.into_iter().zip(down).enumerate() {
                        block[4 * len + t] = up;
                        block[a * len + t] = down;
                    }
                    block
                })
            })
            .collect();
        let end = sweep(frame, &self.leading, len, start, blocks).end;
        Ok(Response { a, exponent, tails, end })
    }

    /// Solves the next order, or enters it when its unknowns are already known from an interrupted
    /// run; the last order stops as soon as γ_n is known. Returns what was solved for.
    ///
    /// # Errors
    /// A check failure when the gluing conditions do not determine the unknowns or contradict each other.
    pub fn advance(&mut self, known: Option<Stage>) -> Result<Stage> {
        let n = self.orders.len();
        self.enter_leading(n);
        self.expand_functions(n);
        let known = known.filter(|stage| stage.values.len() == Unknown::of_stage(&self.frame, n).len());
        if let (Some(stage), true) = (&known, n == self.frame.orders) {
            self.enter(n, stage);
            return Ok(stage.clone());
        }
        let mut tails = self.tails_of_order(n)?;
        let stage = match known {
            Some(stage) => stage,
            None => {
                let order = self.carry(n, self.frame.wrap() + 1, &tails);
                self.orders.push(order);
                let stage = self.solve_stage(n)?;
                self.orders.pop();
                stage
            }
        };
        let changes = self.enter(n, &stage);
        if n == self.frame.orders {
            return Ok(stage);
        }
        for (index, factor) in &changes {
            for (tail, response) in tails.iter_mut().zip(&self.responses[*index].tails) {
                tail.add_scaled(response, factor, self.frame.bits);
            }
        }
        self.expand_functions(n);
        let order = self.carry(n, self.frame.window(n), &tails);
        self.tails.push(tails);
        self.orders.push(order);
        self.update_cut(n);
        Ok(stage)
    }

    /// Expands P_a at order n from the coefficients entered so far.
    fn expand_functions(&mut self, n: usize) {
        self.lowered.truncate(n);
        self.raised.truncate(n);
        self.lowered.push(std::array::from_fn(|a| self.functions.lowered(&self.frame, a, n)));
        self.raised.push(std::array::from_fn(|b| self.functions.raised(&self.frame, b, n)));
    }

    fn update_cut(&mut self, n: usize) {
        let ends: Vec<[[Vec<S>; 4]; 4]> = self.orders.iter().map(|order| order.end.clone()).collect();
        self.cut.update(&self.frame, n, &self.functions, &ends);
    }

    /// Enters the leading coefficients A₃ at order n and A₁ = G c_{1,1} at order n − 1 of c_{1,1}, from
    /// γ_1 … γ_n as far as known (γ_n = 0 before it is solved for).
    fn enter_leading(&mut self, n: usize) {
        let bits = self.frame.bits;
        // h = Σ γ_m G^m / 2 through order n and its powers.
        let half: Vec<Real> = (0..=n)
            .map(|m| {
                let mut value = self.gamma.get(m).cloned().unwrap_or_else(Real::zero);
                value.shift(-1);
                value
            })
            .collect();
        let mut power: Vec<Real> = (0..=n).map(|m| Real::from_i64(i64::from(m == 0))).collect();
        let (mut third, mut first) = (Real::zero(), Real::zero());
        for e in 0..5 {
            third.add_mul(&power[n], &Real::from_rational(&self.third[e], bits), bits);
            first.add_mul(&power[n], &Real::from_rational(&self.first[e], bits), bits);
            power = (0..=n)
                .map(|m| {
                    let mut sum = Real::zero();
                    sum.dot(false, Run::forward(&power, 0), Run::backward(&half, m), m + 1, bits);
                    sum
                })
                .collect();
        }
        let degree = self.frame.degrees()[2] as usize;
        self.functions.polynomial[2][n][degree] = S::from_real(&third);
        self.functions.pole[0][n - 1][1] = S::from_real(&first);
    }

    /// Room for the coefficients of the gluing matrix through order n.
    fn reserve(&mut self, n: usize) {
        for list in [&mut self.alpha, &mut self.beta, &mut self.delta].into_iter().chain(self.rho.iter_mut().flatten())
        {
            while list.len() <= n {
                list.push(S::zero());
            }
        }
    }

    /// Sets up and solves the gluing conditions of stage n.
    fn solve_stage(&mut self, n: usize) -> Result<Stage> {
        self.reserve(n);
        self.update_cut(n);
        let unknowns = Unknown::of_stage(&self.frame, n);
        let columns: Vec<Column<S>> = unknowns.iter().map(|unknown| self.column(*unknown)).collect();
        let wrap = self.frame.wrap() as i64;
        let last = n as i64 + wrap;
        let places: Vec<(i64, i64)> =
            (0..=last).map(|x| (x, n as i64 - x)).chain((-last..=-wrap - 1).rev().map(|y| (last, y))).collect();
        let mut system = System { rows: Vec::new() };
        for equation in 0..2 {
            let rows: Vec<Vec<S>> = places
                .par_iter()
                .map(|&(x, y)| {
                    columns
                        .iter()
                        .map(|column| self.column_at(n, column, equation, x, y))
                        .chain([self.value_at(equation, x, y)])
                        .collect()
                })
                .collect();
            rows.iter().for_each(|row| system.push(row));
        }
        let Some(solution) = system.solve(unknowns.len(), self.frame.bits) else {
            return Err(self.failed(n, "the gluing conditions do not determine all unknowns"));
        };
        let consistency = -(solution.inconsistency as f64) * std::f64::consts::LOG10_2;
        if consistency < 10.0 {
            return Err(
                self.failed(n, &format!("the overdetermined gluing conditions agree to {consistency:.1} digits only"))
            );
        }
        Ok(Stage { values: solution.values, consistency })
    }

    /// Enters the unknowns of stage n. Returns the coefficients by which the responses (index, factor)
    /// enter order n.
    fn enter(&mut self, n: usize, stage: &Stage) -> Vec<(usize, S)> {
        self.reserve(n);
        self.consistency.push(stage.consistency);
        let unknowns = Unknown::of_stage(&self.frame, n);
        let mut changes = Vec::new();
        for (unknown, value) in unknowns.iter().zip(&stage.values) {
            let mut number = S::from_real(value);
            number.turn(unknown.phase(&self.frame));
            match *unknown {
                Unknown::Gamma => self.gamma.push(value.clone()),
                Unknown::Alpha => self.alpha[n] = number,
                Unknown::Beta => self.beta[n - 1] = number,
                Unknown::Delta => self.delta[n] = number,
                Unknown::Rho { row, column, lag } => self.rho[row][column - 2][n - lag] = number,
                Unknown::Power { a, exponent } => {
                    if exponent >= 0 {
                        self.functions.polynomial[a][n][exponent as usize] = number.clone();
                    } else {
                        let k = exponent.unsigned_abs() as usize;
                        self.functions.pole[a][n - k][k] = number.clone();
                    }
                    changes.push((self.response_index(a, exponent), number));
                }
            }
            if *unknown == Unknown::Gamma {
                for (index, weight) in self.gamma_weights() {
                    changes.push((index, S::from_real(&weight.mul(value, self.frame.bits))));
                }
            }
        }
        if n >= 2 {
            self.enter_leading(n);
        }
        changes
    }

    fn failed(&self, n: usize, what: &str) -> Error {
        Error::check(format!(
            "spectral curve at L = {}, M = {}, order {n}, {} digits: {what}; ask for more digits, and report this state if that does not help",
            self.frame.length, self.frame.magnons, self.frame.digits
        ))
    }
}

/// Multiplies a power series in x by (j + x)^exponent.
fn multiply_power<S: Scalar>(series: &mut [S], j: usize, exponent: i64, bits: i64) {
    for _ in 0..exponent.max(0) {
        multiply_by_variable(series, j, bits);
    }
    for _ in 0..(-exponent).max(0) {
        divide_by_variable(series, j, bits);
    }
}
