//! The sizes of one computation: exponents, degrees, precision, lengths of all expansions.

use crate::family::Family;

/// Sizes and precision of the solution for one state.
#[derive(Clone, Debug)]
pub struct Frame {
    /// L.
    pub length: i64,
    /// M.
    pub magnons: i64,
    /// 2 for parity-symmetric states (only every other power occurs), else 1.
    pub step: i64,
    /// The last order in the coupling.
    pub orders: usize,
    /// Decimal digits aimed at.
    pub digits: u32,
    /// Working precision in bits.
    pub bits: i64,
    /// N: the expansions at large v are used at v = N + ½.
    pub points: usize,
    /// The number of terms of the expansions at large v, in units of `step`.
    pub terms: usize,
}

/// Working digits beyond those asked for: a fixed part, and one for each order and each two fields.
const GUARD: f64 = 12.0;

impl Frame {
    /// The frame for `orders` orders at about `digits` certain digits.
    ///
    /// N and the number of terms K satisfy K log₁₀(2πe(N+½)/K) ≥ working digits + 2, the size of the
    /// smallest term kept (and L + orders more, for the powers of k that higher orders bring); N is a fixed multiple of the digits that balances the cost of the
    /// recursion, ∝ N, against that of the expansions, ∝ K².
    pub fn new(family: Family, symmetric: bool, orders: usize, digits: u32) -> Frame {
        let working = f64::from(digits) + orders as f64 + family.length as f64 / 2.0 + GUARD;
        let points = (1.2 * working).ceil() as usize + 2 * family.length + 10;
        let step = if symmetric { 2 } else { 1 };
        let growth = 2.0 * std::f64::consts::PI * std::f64::consts::E * (points as f64 + 0.5);
        let mut terms = 10.0;
        while terms * (growth / terms).log10() < working + 2.0 {
            terms += 1.0;
        }
        let power = (family.length as f64) * (points as f64).log10();
        Frame {
            length: family.length as i64,
            magnons: family.magnons as i64,
            step,
            orders,
            digits,
            bits: ((working + power) * std::f64::consts::LOG2_10).ceil() as i64 + 32,
            points,
            terms: (terms as usize + family.length + orders).div_ceil(step as usize),
        }
    }

    /// L − 2.
    pub fn wrap(&self) -> usize {
        self.length as usize - 2
    }

    /// d_a, the degrees of the polynomial parts of p_a; −1 for p₁, which has none.
    pub fn degrees(&self) -> [i64; 4] {
        let (l, m) = (self.length, self.magnons);
        [-1, m - 2, l - m - 1, l - 2]
    }

    /// z_a = M̂_i − M̃_a at zero coupling: Q_{a|i} ~ v^{z_a}.
    pub fn exponent(&self, i: usize, a: usize) -> i64 {
        let (l, m) = (self.length, self.magnons);
        // Twice the powers.
        let hat = [l, l + 2, -l, 2 - l][i];
        let tilde = [l, l - 2 * m + 2, 2 * m - l, 2 - l][a];
        (hat - tilde) / 2
    }

    /// The number of Taylor coefficients at v = ½ that order n contributes to the gluing conditions.
    pub fn window(&self, n: usize) -> usize {
        2 * (self.orders - n.min(self.orders)) + self.wrap() + 3
    }

    /// The bits worth keeping of Taylor coefficient t at the point j: it enters the result at v = ½
    /// only multiplied by t-th powers of distances, so it is needed to an absolute precision.
    pub fn bits_at(&self, j: usize, t: usize) -> i64 {
        let drop = t as f64 * (j as f64).log2();
        (self.bits - drop as i64).max(64)
    }

    /// The bits worth keeping of the k-th term at large v, at order n.
    pub fn bits_of_term(&self, k: usize, n: usize) -> i64 {
        let depth = (k as i64 * self.step) as f64;
        if depth < 4.0 {
            return self.bits;
        }
        let growth = 2.0 * std::f64::consts::PI * std::f64::consts::E * (self.points as f64 + 0.5);
        let drop = depth * (growth / depth).log2() - (2 * n as i64 + self.length) as f64 * depth.log2() - 60.0;
        (self.bits - drop.max(0.0) as i64).max(64)
    }
}

/// The index of the lowered function behind the upper index b: P¹ = −P₄, P² = P₃, P³ = −P₂, P⁴ = P₁.
pub fn partner(b: usize) -> usize {
    3 - b
}

/// Whether raising to the upper index b changes the sign.
pub fn raising_is_negative(b: usize) -> bool {
    b.is_multiple_of(2)
}
