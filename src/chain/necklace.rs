//! Cyclic states of L sites with M magnons, labelled by necklaces.
//!
//! A state invariant under the shift is a function of necklaces: its value on a configuration is
//! its value on the configuration's least rotation.

use crate::family::Family;
use std::collections::HashMap;

/// A configuration: bit k set when site k carries a magnon. L ≤ 128.
pub type Configuration = u128;

/// The necklaces of a family, ascending, with their look-up table.
#[derive(Debug)]
pub struct Necklaces {
    family: Family,
    list: Vec<Configuration>,
    index: HashMap<Configuration, usize>,
}

impl Necklaces {
    /// All necklaces of the family.
    pub fn new(family: Family) -> Necklaces {
        let mut list = Vec::new();
        // Every necklace with a magnon has a rotation with one at site 0; gaps then enumerate all.
        let mut positions = vec![0usize; family.magnons];
        enumerate(family, 1, &mut positions, &mut list);
        list.sort_unstable();
        list.dedup();
        let index = list.iter().enumerate().map(|(i, c)| (*c, i)).collect();
        Necklaces { family, list, index }
    }

    /// The family.
    pub fn family(&self) -> Family {
        self.family
    }

    /// The least rotations, one for each necklace.
    pub fn representatives(&self) -> &[Configuration] {
        &self.list
    }

    /// The number of necklaces.
    pub fn len(&self) -> usize {
        self.list.len()
    }

    /// Never true.
    pub fn is_empty(&self) -> bool {
        self.list.is_empty()
    }

    /// The position of the necklace of a configuration with M magnons.
    pub fn position(&self, configuration: Configuration) -> usize {
        self.index[&least_rotation(configuration, self.family.length)]
    }
}

fn enumerate(family: Family, chosen: usize, positions: &mut Vec<usize>, list: &mut Vec<Configuration>) {
    if chosen >= family.magnons {
        let configuration = positions.iter().fold(0, |c, k| c | (1 << k));
        list.push(least_rotation(if family.magnons == 0 { 0 } else { configuration }, family.length));
        return;
    }
    for site in positions[chosen - 1] + 1..family.length {
        positions[chosen] = site;
        enumerate(family, chosen + 1, positions, list);
    }
}

/// The configuration moved by one site.
pub fn rotate(configuration: Configuration, length: usize) -> Configuration {
    (configuration >> 1) | ((configuration & 1) << (length - 1))
}

/// The least of all rotations.
pub fn least_rotation(configuration: Configuration, length: usize) -> Configuration {
    let mut best = configuration;
    let mut turned = configuration;
    for _ in 1..length {
        turned = rotate(turned, length);
        best = best.min(turned);
    }
    best
}

/// The configuration with the contents of two sites exchanged.
pub fn exchange(configuration: Configuration, i: usize, j: usize) -> Configuration {
    if (configuration >> i) & 1 == (configuration >> j) & 1 {
        configuration
    } else {
        configuration ^ (1 << i) ^ (1 << j)
    }
}

#[cfg(test)]
mod tests {
    use super::{Family, Necklaces};
    use crate::family::necklaces;

    #[test]
    fn all_necklaces_are_found() {
        for length in 2..=12 {
            for magnons in (0..=length / 2).filter(|m| *m != 1) {
                let family = Family { length, magnons };
                assert_eq!(necklaces(length, magnons), Necklaces::new(family).len(), "{family}");
            }
        }
    }
}
