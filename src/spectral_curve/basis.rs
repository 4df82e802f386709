//! The numbers that a coefficient is sought among.

use super::mzv::multiple_zeta;
use crate::record::Zeta;
use rug::Float;

/// One basis number: a product of odd zeta values, or a fixed combination of multiple zeta values.
#[derive(Clone, Debug)]
pub struct Element {
    /// Σ integer · product.
    pub terms: Vec<(i64, Vec<Zeta>)>,
    /// The transcendental weight.
    pub weight: u32,
}

/// The basis at `loops` loops, past the wrapping order: products of odd zeta values of weight
/// ≤ 2·loops − 3 and, from 8 loops on, the single-valued combinations of weight ≤ 2·loops − 5 that are
/// no such products: Z₁₁ = −ζ_{3,5,3} + ζ3 ζ_{5,3}, Z₁₃a = −ζ_{5,3,5} + 11ζ5ζ_{5,3} + 5ζ5ζ8,
/// Z₁₃b = −ζ_{3,7,3} + ζ3ζ_{7,3} + 12ζ5ζ_{5,3} + 6ζ5ζ8 (arXiv:1302.1135 and later work; from memory),
/// and ζ3 times them one weight higher. Weights above 13 of these are not covered. At L = 5 the fit
/// needs Z₁₁ already at 8 loops, below double wrapping: the weight decides, not the length.
pub fn basis(loops: usize) -> Vec<Element> {
    let top = (2 * loops).saturating_sub(3) as u32;
    let mut elements = Vec::new();
    products(&mut Vec::new(), 3, top, &mut elements);
    elements.sort_by(|a, b| a.weight.cmp(&b.weight).then_with(|| a.terms.cmp(&b.terms)));
    if loops >= 8 {
        let limit = (2 * loops - 5) as u32;
        let single = Zeta::Single;
        let multiple = |arguments: &[u32]| Zeta::Multiple(arguments.to_vec());
        let special = [
            (11, vec![(-1, vec![multiple(&[3, 5, 3])]), (1, vec![single(3), multiple(&[5, 3])])]),
            (
                13,
                vec![
                    (-1, vec![multiple(&[5, 3, 5])]),
                    (11, vec![single(5), multiple(&[5, 3])]),
                    (5, vec![single(5), single(8)]),
                ],
            ),
            (
                13,
                vec![
                    (-1, vec![multiple(&[3, 7, 3])]),
                    (1, vec![single(3), multiple(&[7, 3])]),
                    (12, vec![single(5), multiple(&[5, 3])]),
                    (6, vec![single(5), single(8)]),
                ],
            ),
        ];
        for (weight, terms) in special {
            if weight + 3 <= limit + 1 {
                let times = |product: &Vec<Zeta>| {
                    let mut product: Vec<Zeta> = [vec![single(3)], product.clone()].concat();
                    product.sort();
                    product
                };
                let terms = terms.iter().map(|(factor, product)| (*factor, times(product))).collect();
                elements.push(Element { terms, weight: weight + 3 });
            }
            if weight <= limit {
                elements.push(Element { terms, weight });
            }
        }
    }
    elements
}

/// The highest order, at most `loops`, at which recognition is attempted: where the basis is complete
/// as far as known, or at least one order past the wrapping order.
pub fn last_with_basis(length: usize, loops: usize) -> usize {
    loops.min(9.max(length + 1))
}

fn products(prefix: &mut Vec<Zeta>, least: u32, room: u32, elements: &mut Vec<Element>) {
    let weight = prefix.iter().map(|zeta| if let Zeta::Single(k) = zeta { *k } else { 0 }).sum();
    elements.push(Element { terms: vec![(1, prefix.clone())], weight });
    for k in (least..=room).step_by(2) {
        prefix.push(Zeta::Single(k));
        products(prefix, k, room - k, elements);
        prefix.pop();
    }
}

impl Element {
    /// The number.
    pub fn value(&self, bits: u32) -> Float {
        let mut sum = Float::new(bits);
        for (factor, product) in &self.terms {
            sum += product_value(product, bits) * *factor;
        }
        sum
    }
}

/// The value of a product of zeta values.
pub fn product_value(product: &[Zeta], bits: u32) -> Float {
    product.iter().fold(Float::with_val(bits, 1), |value, zeta| {
        value
            * match zeta {
                Zeta::Single(k) => Float::with_val(bits, Float::zeta_u(*k)),
                Zeta::Multiple(arguments) => multiple_zeta(arguments, bits),
            }
    })
}

#[cfg(test)]
mod tests {
    use super::basis;

    #[test]
    fn sizes() {
        // Partitions of the weights into odd parts of at least 3.
        for (loops, size) in [(6, 8), (7, 12), (8, 18 + 1), (9, 27 + 4)] {
            assert_eq!(basis(loops).len(), size);
        }
    }
}
