//! What the spectral curve needs of a one-loop state: decimals, nothing else of the engine.

use crate::record::Parity;
use rug::Float;

/// One primary at one loop, at one real embedding of its orbit (formulas §1, variable v = −i u).
#[derive(Clone, Debug)]
pub struct OneLoop {
    /// L.
    pub length: usize,
    /// M.
    pub magnons: usize,
    /// Symmetric states have an even or odd Q.
    pub parity: Parity,
    /// The label of the orbit.
    pub label: String,
    /// ω, which generates the field of the orbit (γ₁ itself where that does).
    pub omega: Float,
    /// γ₁.
    pub gamma1: Float,
    /// T(v): coefficient of v^j as (real part, imaginary part).
    pub transfer: Vec<(Float, Float)>,
    /// Q₁, monic of degree M.
    pub q: Vec<(Float, Float)>,
    /// Q₂, monic of degree L − M + 1, without v^M term.
    pub r: Vec<(Float, Float)>,
}
