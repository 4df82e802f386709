//! Shards: the same plan on several machines, each taking its part, with no word between them.

use crate::error::{Error, Result};

/// Part `index` of `count`, from 1.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Shard {
    /// 1 … count.
    pub index: usize,
    /// How many parts there are.
    pub count: usize,
}

impl std::str::FromStr for Shard {
    type Err = Error;

    fn from_str(text: &str) -> Result<Shard> {
        let parse = |part: &str| part.parse::<usize>().ok();
        match text.split_once('/').map(|(index, count)| (parse(index), parse(count))) {
            Some((Some(index), Some(count))) if (1..=count).contains(&index) => Ok(Shard { index, count }),
            _ => Err(Error::input(format!("\"{text}\" is not a shard; write i/n with 1 <= i <= n, such as 2/4"))),
        }
    }
}

impl std::fmt::Display for Shard {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "{}/{}", self.index, self.count)
    }
}

/// The shard, from 1, of every item: longest first, each to the shard with the least to do so far
/// (the first one of several). No shard then has more than the average plus one item. Costs are
/// counted in whole microseconds, so that every machine comes to the same division.
pub fn assign(seconds: &[f64], count: usize) -> Vec<usize> {
    let micro: Vec<u64> = seconds.iter().map(|s| (s * 1e6).round().clamp(1.0, 1e18) as u64).collect();
    let mut order: Vec<usize> = (0..micro.len()).collect();
    order.sort_by_key(|&item| (std::cmp::Reverse(micro[item]), item));
    let mut loads = vec![0u128; count.max(1)];
    let mut shards = vec![0; micro.len()];
    for item in order {
        let least = (0..loads.len()).min_by_key(|&shard| (loads[shard], shard)).unwrap_or(0);
        loads[least] += u128::from(micro[item]);
        shards[item] = least + 1;
    }
    shards
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::{ProptestConfig, prop_assert, prop_assert_eq, proptest};

    #[test]
    fn shards_are_written_i_of_n() {
        assert_eq!("2/4".parse::<Shard>().unwrap(), Shard { index: 2, count: 4 });
        for bad in ["", "2", "0/4", "5/4", "a/b", "1/0", "-1/2", "1/2/3"] {
            assert_eq!(bad.parse::<Shard>().unwrap_err().exit_code(), 2, "{bad}");
        }
    }

    #[test]
    fn longest_first_to_the_least_loaded() {
        assert_eq!(assign(&[1.0, 5.0, 3.0, 3.0, 1.0], 2), [1, 1, 2, 2, 1]);
        assert_eq!(assign(&[], 3), Vec::<usize>::new());
        assert_eq!(assign(&[2.0, 1.0], 5), [1, 2]);
    }

    proptest! {
        #![proptest_config(ProptestConfig::with_cases(200))]
        /// Graham's bound for any list schedule: no shard above average + longest.
        #[test]
        fn shards_are_balanced(seconds in proptest::collection::vec(0.001f64..1000.0, 1..60), count in 1usize..9) {
            let shards = assign(&seconds, count);
            prop_assert_eq!(&shards, &assign(&seconds, count));
            let longest = seconds.iter().fold(0.0, |a: f64, &b| a.max(b));
            let average = seconds.iter().sum::<f64>() / count as f64;
            for shard in 1..=count {
                let load: f64 = seconds.iter().zip(&shards).filter(|(_, s)| **s == shard).map(|(t, _)| t).sum();
                prop_assert!(load <= average + longest + 1e-3);
            }
            prop_assert!(shards.iter().all(|shard| (1..=count).contains(shard)));
        }
    }
}
