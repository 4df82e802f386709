//! Truncated power series in the coupling h whose coefficients are polynomials in odd zeta values.
//!
//! ζ3, ζ5, … are independent symbols. Wherever ζ(k) enters here it brings at least h^{(k+3)/2}
//! (formulas §2: C_{rs} starts at h^{r+s} with ζ(r+s), and r + s ≥ 3), so the zeta products
//! allowed at order hⁿ are those of *cost* Σ (k+3)/2 ≤ n, a finite list. An element is a flat
//! array over the pairs (n, product); a table of products made once says which pairs of entries
//! contribute to which.

use super::ring::Ring;
use std::collections::HashMap;
use std::ops::Range;

/// The index set of graded series through order h^N: zeta products, offsets and the product table.
#[derive(Debug)]
pub struct Grading {
    order: usize,
    products: Vec<Vec<u32>>,
    /// How many products (a prefix of `products`) are allowed at each order.
    allowed: Vec<usize>,
    offsets: Vec<usize>,
    /// For each entry, the pairs (a, b) of entries with a·b landing on it.
    table: Vec<Vec<(u32, u32)>>,
    index: HashMap<Vec<u32>, usize>,
}

/// The lowest order in h at which ζ(k) appears, for odd k ≥ 3.
pub fn zeta_cost(k: u32) -> usize {
    (k as usize + 3) / 2
}

impl Grading {
    /// The grading of series through h^`order`.
    pub fn new(order: usize) -> Grading {
        let mut products: Vec<(usize, Vec<u32>)> = vec![(0, Vec::new())];
        let mut next = 0;
        while next < products.len() {
            let (cost, product) = products[next].clone();
            let mut k = product.last().copied().unwrap_or(3);
            while cost + zeta_cost(k) <= order {
                let mut longer = product.clone();
                longer.push(k);
                products.push((cost + zeta_cost(k), longer));
                k += 2;
            }
            next += 1;
        }
        products.sort();
        Grading::over(order, products)
    }

    /// Plain truncated power series through the given order, in any variable: no zeta values.
    pub fn plain(order: usize) -> Grading {
        Grading::over(order, vec![(0, Vec::new())])
    }

    fn over(order: usize, products: Vec<(usize, Vec<u32>)>) -> Grading {
        let allowed: Vec<usize> = (0..=order).map(|n| products.iter().filter(|(cost, _)| *cost <= n).count()).collect();
        let mut offsets = vec![0];
        for count in &allowed {
            offsets.push(offsets[offsets.len() - 1] + count);
        }
        let products: Vec<Vec<u32>> = products.into_iter().map(|(_, product)| product).collect();
        let index: HashMap<Vec<u32>, usize> = products.iter().cloned().enumerate().map(|(i, p)| (p, i)).collect();
        let mut table = vec![Vec::new(); offsets[order + 1]];
        for n in 0..=order {
            for a in 0..=n {
                for x in 0..allowed[a] {
                    for y in 0..allowed[n - a] {
                        let mut product = products[x].clone();
                        product.extend(&products[y]);
                        product.sort_unstable();
                        let target = offsets[n] + index[&product];
                        table[target].push(((offsets[a] + x) as u32, (offsets[n - a] + y) as u32));
                    }
                }
            }
        }
        Grading { order, products, allowed, offsets, table, index }
    }

    /// N.
    pub fn order(&self) -> usize {
        self.order
    }

    /// The number of entries of an element.
    pub fn len(&self) -> usize {
        self.table.len()
    }

    /// Never true: the entry of h⁰ always exists.
    pub fn is_empty(&self) -> bool {
        self.table.is_empty()
    }

    /// The entries of order hⁿ; their products are `products(n)`, in the same sequence.
    pub fn entries(&self, n: usize) -> Range<usize> {
        self.offsets[n]..self.offsets[n + 1]
    }

    /// The zeta products allowed at order hⁿ.
    pub fn products(&self, n: usize) -> &[Vec<u32>] {
        &self.products[..self.allowed[n]]
    }

    /// The entry of hⁿ times a zeta product, if it is allowed.
    pub fn entry(&self, n: usize, product: &[u32]) -> Option<usize> {
        let position = *self.index.get(product)?;
        (n <= self.order && position < self.allowed[n]).then(|| self.offsets[n] + position)
    }

    /// The pairs of entries whose product lands on `entry`.
    pub fn pairs(&self, entry: usize) -> &[(u32, u32)] {
        &self.table[entry]
    }
}

/// The ring of graded series over a coefficient ring. Implements [`Ring`].
#[derive(Debug)]
pub struct Graded<'a, R> {
    ring: &'a R,
    grading: &'a Grading,
}

impl<R> Clone for Graded<'_, R> {
    fn clone(&self) -> Self {
        *self
    }
}

impl<R> Copy for Graded<'_, R> {}

/// An element: one coefficient for each entry of the grading.
pub type Series<R> = Vec<<R as Ring>::Elem>;

impl<'a, R: Ring> Graded<'a, R> {
    /// The ring of series of this grading over `ring`.
    pub fn new(ring: &'a R, grading: &'a Grading) -> Graded<'a, R> {
        Graded { ring, grading }
    }

    /// The coefficient ring.
    pub fn base(&self) -> &'a R {
        self.ring
    }

    /// The grading.
    pub fn grading(&self) -> &'a Grading {
        self.grading
    }

    /// Σ a·b over the given pairs, entries of order above `top` left zero.
    pub fn sum_of_products(&self, terms: &[(&Series<R>, &Series<R>)], top: usize) -> Series<R> {
        let mut acc = self.ring.accumulator();
        let end = self.grading.offsets[top.min(self.grading.order) + 1];
        let mut result = vec![self.ring.zero(); self.grading.len()];
        for (entry, slot) in result[..end].iter_mut().enumerate() {
            for (a, b) in terms {
                for &(i, j) in self.grading.pairs(entry) {
                    let (x, y) = (&a[i as usize], &b[j as usize]);
                    if !self.ring.is_zero(x) && !self.ring.is_zero(y) {
                        self.ring.accumulate(&mut acc, x, y);
                    }
                }
            }
            *slot = self.ring.collect(&mut acc);
        }
        result
    }

    /// a · hⁿ · (a zeta product) · c for a constant c; what goes beyond the truncation is dropped.
    pub fn times_monomial(&self, a: &Series<R>, n: usize, product: &[u32], c: &R::Scalar) -> Series<R> {
        let mut result = vec![self.ring.zero(); self.grading.len()];
        for order in 0..=self.grading.order.saturating_sub(n) {
            if order + n > self.grading.order {
                break;
            }
            for (entry, own) in self.grading.entries(order).zip(self.grading.products(order)) {
                if self.ring.is_zero(&a[entry]) {
                    continue;
                }
                let mut longer = own.clone();
                longer.extend(product);
                longer.sort_unstable();
                if let Some(target) = self.grading.entry(order + n, &longer) {
                    result[target] = self.ring.scale(&a[entry], c);
                }
            }
        }
        result
    }

    /// The lowest order with a non-zero entry, or N + 1 for zero.
    pub fn valuation(&self, a: &Series<R>) -> usize {
        (0..=self.grading.order)
            .find(|&n| self.grading.entries(n).any(|entry| !self.ring.is_zero(&a[entry])))
            .unwrap_or(self.grading.order + 1)
    }
}

impl<R: Ring> Ring for Graded<'_, R> {
    type Elem = Series<R>;
    type Scalar = R::Scalar;
    type Acc = Vec<R::Acc>;

    fn zero(&self) -> Series<R> {
        vec![self.ring.zero(); self.grading.len()]
    }
    fn one(&self) -> Series<R> {
        let mut one = self.zero();
        one[0] = self.ring.one();
        one
    }
    fn scalar(&self, value: &rug::Rational) -> R::Scalar {
        self.ring.scalar(value)
    }
    fn constant(&self, value: &R::Scalar) -> Series<R> {
        let mut constant = self.zero();
        constant[0] = self.ring.constant(value);
        constant
    }
    fn is_zero(&self, a: &Series<R>) -> bool {
        a.iter().all(|c| self.ring.is_zero(c))
    }
    fn add(&self, a: &Series<R>, b: &Series<R>) -> Series<R> {
        a.iter().zip(b).map(|(x, y)| self.ring.add(x, y)).collect()
    }
    fn sub(&self, a: &Series<R>, b: &Series<R>) -> Series<R> {
        a.iter().zip(b).map(|(x, y)| self.ring.sub(x, y)).collect()
    }
    fn neg(&self, a: &Series<R>) -> Series<R> {
        a.iter().map(|x| self.ring.neg(x)).collect()
    }
    fn mul(&self, a: &Series<R>, b: &Series<R>) -> Series<R> {
        self.sum_of_products(&[(a, b)], self.grading.order)
    }
    fn scale(&self, a: &Series<R>, c: &R::Scalar) -> Series<R> {
        a.iter().map(|x| self.ring.scale(x, c)).collect()
    }
    /// Order by order: b₀ = 1/a₀, and each later entry from the earlier ones.
    fn inverse(&self, a: &Series<R>) -> Option<Series<R>> {
        let start = self.ring.inverse(&a[0])?;
        let mut result = self.zero();
        result[0] = start.clone();
        let mut acc = self.ring.accumulator();
        for entry in 1..self.grading.len() {
            for &(i, j) in self.grading.pairs(entry) {
                if i == 0 {
                    continue;
                }
                let (x, y) = (&a[i as usize], &result[j as usize]);
                if !self.ring.is_zero(x) && !self.ring.is_zero(y) {
                    self.ring.accumulate(&mut acc, x, y);
                }
            }
            let sum = self.ring.collect(&mut acc);
            result[entry] = self.ring.neg(&self.ring.mul(&sum, &start));
        }
        Some(result)
    }
    fn accumulator(&self) -> Vec<R::Acc> {
        (0..self.grading.len()).map(|_| self.ring.accumulator()).collect()
    }
    fn accumulate(&self, acc: &mut Vec<R::Acc>, a: &Series<R>, b: &Series<R>) {
        for (entry, sum) in acc.iter_mut().enumerate() {
            for &(i, j) in self.grading.pairs(entry) {
                let (x, y) = (&a[i as usize], &b[j as usize]);
                if !self.ring.is_zero(x) && !self.ring.is_zero(y) {
                    self.ring.accumulate(sum, x, y);
                }
            }
        }
    }
    fn collect(&self, acc: &mut Vec<R::Acc>) -> Series<R> {
        acc.iter_mut().map(|sum| self.ring.collect(sum)).collect()
    }
}
