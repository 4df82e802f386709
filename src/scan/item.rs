//! What a plan comes to: families with loop orders and costs, and what of them is there already.

use super::calculator::Calculator;
use super::plan::{Plan, Task};
use super::shard::{Shard, assign};
use super::store::{Found, Store};
use crate::engine::Cost;
use crate::error::Result;
use crate::family::Family;
use std::path::PathBuf;

/// One family to be computed.
#[derive(Clone, Debug)]
pub struct Item {
    /// What the plan says.
    pub task: Task,
    /// Through this loop order.
    pub loops: usize,
    /// The estimate.
    pub cost: Cost,
}

/// How a plan is run.
#[derive(Clone, Debug)]
pub struct Settings {
    /// Where the records are.
    pub directory: PathBuf,
    /// Worker threads, at least 1.
    pub threads: usize,
    /// Memory bound in bytes.
    pub memory: Option<u64>,
    /// Whether certificates are wanted.
    pub certificates: bool,
}

impl Settings {
    /// Whether a certificate of this family is wanted: the protected one has no pair to certify.
    pub(super) fn certify(&self, family: Family) -> bool {
        self.certificates && !family.is_protected()
    }

    /// How many threads can really run at once: for estimates.
    pub fn workers(&self) -> usize {
        std::thread::available_parallelism().map_or(self.threads, |cores| self.threads.min(cores.get())).max(1)
    }
}

/// What is there for an item before anything is computed.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum State {
    /// The complete record.
    Complete,
    /// Nothing, or less than asked for.
    ToCompute,
    /// A damaged file, which a run would move aside.
    Damaged(PathBuf),
}

/// The items of a plan, or of one shard of it, in the plan's order.
pub fn prepare(plan: &Plan, calculator: &dyn Calculator, certificates: bool, shard: Option<Shard>) -> Vec<Item> {
    let items: Vec<Item> = plan
        .tasks
        .iter()
        .map(|task| {
            let complete = calculator.complete_through(task.family);
            let loops = task.limit.map_or(complete, |limit| limit.min(complete));
            Item { task: task.clone(), loops, cost: calculator.cost(task.family, loops, certificates) }
        })
        .collect();
    let Some(shard) = shard else { return items };
    let seconds: Vec<f64> = items.iter().map(|item| item.cost.seconds).collect();
    let shards = assign(&seconds, shard.count);
    items.into_iter().zip(shards).filter(|(_, place)| *place == shard.index).map(|(item, _)| item).collect()
}

/// What is there for every item.
///
/// # Errors
/// A file exists and cannot be read.
pub fn survey(items: &[Item], settings: &Settings) -> Result<Vec<State>> {
    let store = Store::new(&settings.directory);
    items
        .iter()
        .map(|item| {
            Ok(match store.examine(item.task.family, None, item.loops, settings.certify(item.task.family))? {
                Found::Complete => State::Complete,
                Found::Missing | Found::Short(_) => State::ToCompute,
                Found::Damaged { path, .. } => State::Damaged(path),
            })
        })
        .collect()
}
