//! Scans: many families from one plan, safe against interruption at any moment.
//!
//! A [`Plan`] says which families; [`prepare`] turns it into [`Item`]s with loop orders and costs and
//! picks a shard; [`run`] computes what the results directory does not hold yet. What computes is a
//! [`Calculator`].

mod calculator;
mod engine;
mod item;
mod journal;
mod lock;
mod place;
mod plan;
mod resources;
mod run;
mod shard;
mod store;
mod summary;
mod values;
mod work;

pub use crate::engine::{Checkpoint, Cost};
pub use calculator::{Calculator, Job, OrbitOutline, Product};

pub use engine::Engine;
pub use journal::Journal;
pub use plan::{Filter, Plan, Task};
pub use item::{Item, Settings, State, prepare, survey};
pub use run::{Step, Watcher, run};
pub use shard::{Shard, assign};
pub use store::{Found, Store, certificate_path};
pub use summary::{Outcome, Summary};
pub use values::{parse_range, parse_size, show_size, show_time};
