//! Running a plan: order, threads, memory, cancellation.
//!
//! Long families come first and one after the other, each on all threads; then the short ones, one
//! thread each, as many at a time as threads and memory allow. Families locked by another scan are
//! put off, and taken up at the end if that scan did not finish them. Results do not depend on any
//! of this.

use super::calculator::Calculator;
use super::item::{Item, Settings};
use super::lock::{self, Attempt};
use super::resources::{Budget, Presence};
use super::store::{Found, Store, is_storage_failure};
use super::summary::{Outcome, Summary};
use super::work::{Progress, complete_family, units_of};
use crate::error::{Error, Kind, Result};
use crate::family::Family;
use crate::observer::{Event, Observer, Silent};
use std::collections::VecDeque;
use std::sync::atomic::{AtomicBool, Ordering};
use std::sync::mpsc::{RecvTimeoutError, Sender, channel};
use std::sync::{Arc, Mutex, PoisonError};
use std::time::{Duration, Instant};

/// From this estimate on (seconds on one core) a family gets all threads.
const LONG: f64 = 5.0;
/// How long after a request to stop families may still end by themselves; then the scan ends without them.
const GRACE: Duration = Duration::from_millis(1300);
const POLL: Duration = Duration::from_millis(100);

/// What a scan reports beyond what families report themselves.
#[derive(Debug)]
pub enum Step<'a> {
    /// The scan begins.
    Begun {
        /// Families to compute.
        families: usize,
        /// Families that are complete already.
        kept: usize,
        /// Estimated seconds on one core.
        seconds: f64,
        /// Threads that can run at once.
        threads: usize,
    },
    /// A family is taken up.
    Started {
        /// Which.
        family: Family,
        /// Through this loop order.
        loops: usize,
        /// Work units found from an earlier run.
        units: usize,
    },
    /// A family is done with.
    Finished {
        /// Which.
        family: Family,
        /// What became of it.
        outcome: &'a Outcome,
        /// The estimate it had, in seconds.
        estimate: f64,
    },
}

/// Sees a scan from outside, and may stop it.
pub trait Watcher: Observer + Send {
    /// Something happened.
    fn step(&self, step: Step<'_>);
}

/// Computes what the results directory does not hold yet.
///
/// A family that fails does not stop the others. A full disk or a directory that cannot be written
/// to does. When the watcher cancels, families in work get a short while to end; then `run` returns
/// without them, and their threads go on until they notice.
///
/// # Errors
/// The directory cannot be used at all. Everything else is in the summary.
pub fn run(
    items: Vec<Item>,
    settings: &Settings,
    calculator: Arc<dyn Calculator>,
    watcher: Arc<dyn Watcher>,
) -> Result<Summary> {
    let begin = Instant::now();
    let store = Store::new(&settings.directory);
    let mut outcomes: Vec<Option<Outcome>> = Vec::new();
    for item in &items {
        // An unreadable file is met again, and reported, when the family's turn comes.
        let found = store.examine(item.task.family, None, item.loops, settings.certify(item.task.family));
        outcomes.push(matches!(found, Ok(Found::Complete)).then_some(Outcome::Kept));
    }
    let todo: Vec<usize> = (0..items.len()).filter(|&index| outcomes[index].is_none()).collect();
    let summary = |outcomes: Vec<Option<Outcome>>, interrupted, storage| Summary {
        directory: settings.directory.clone(),
        families: items
            .iter()
            .map(|item| item.task.family)
            .zip(outcomes.into_iter().map(|o| o.unwrap_or(Outcome::NotStarted)))
            .collect(),
        seconds: begin.elapsed().as_secs_f64(),
        interrupted,
        storage,
    };
    watcher.step(Step::Begun {
        families: todo.len(),
        kept: items.len() - todo.len(),
        seconds: todo.iter().map(|&index| items[index].cost.seconds).sum(),
        threads: settings.workers(),
    });
    // Units of complete families, left by a scan that was killed just then.
    let complete = (0..items.len()).filter(|&index| outcomes[index].is_some());
    let units: Vec<_> = complete.map(|index| units_of(&items[index], &store, settings)).collect();
    if todo.is_empty() {
        if store.work().is_dir()
            && let Ok(presence) = Presence::enter(&store, &units, &Silent)
        {
            presence.leave(&store);
        }
        return Ok(summary(outcomes, false, None));
    }

    store.prepare()?;
    let presence = Presence::enter(&store, &units, &*watcher)?;
    let (sender, receiver) = channel();
    let crew = Arc::new(Crew {
        items: items.clone(),
        settings: settings.clone(),
        store: store.clone(),
        calculator,
        watcher: Arc::clone(&watcher),
        budget: Budget::new(settings.memory),
        stop: AtomicBool::new(false),
        running: Mutex::new(Vec::new()),
        presence,
    });
    let handle = {
        let crew = Arc::clone(&crew);
        std::thread::spawn(move || crew.work(todo, &sender))
    };

    let mut storage = None;
    let mut cancelled: Option<Instant> = None;
    loop {
        match receiver.recv_timeout(POLL) {
            Ok((index, outcome)) => {
                let outcome: Outcome = outcome;
                if let Outcome::Failed(error) = &outcome
                    && is_storage_failure(error)
                {
                    storage.get_or_insert(error.to_string());
                }
                let family = crew.items[index].task.family;
                watcher.step(Step::Finished { family, outcome: &outcome, estimate: crew.items[index].cost.seconds });
                outcomes[index] = Some(outcome);
            }
            Err(RecvTimeoutError::Timeout) => {}
            Err(RecvTimeoutError::Disconnected) => {
                // Every thread of the scan has ended.
                handle.join().map_err(|_| {
                    Error::check(
                        "the scan's coordinating thread failed; everything finished is kept, and please report this",
                    )
                })?;
                break;
            }
        }
        if watcher.cancelled() && cancelled.get_or_insert_with(Instant::now).elapsed() > GRACE {
            break;
        }
    }
    for index in crew.running() {
        outcomes[index].get_or_insert(Outcome::Interrupted);
    }
    let interrupted = cancelled.is_some()
        && outcomes.iter().any(|o| !matches!(o, Some(Outcome::Computed { .. } | Outcome::Kept | Outcome::Elsewhere)));
    Ok(summary(outcomes, interrupted, storage))
}

/// Shared by the threads of one scan.
struct Crew {
    items: Vec<Item>,
    settings: Settings,
    store: Store,
    calculator: Arc<dyn Calculator>,
    watcher: Arc<dyn Watcher>,
    budget: Budget,
    stop: AtomicBool,
    running: Mutex<Vec<usize>>,
    presence: Presence,
}

type Results = Sender<(usize, Outcome)>;

impl Crew {
    fn running(&self) -> Vec<usize> {
        self.running.lock().unwrap_or_else(PoisonError::into_inner).clone()
    }

    fn over(&self) -> bool {
        self.stop.load(Ordering::SeqCst) || self.watcher.cancelled()
    }

    fn work(&self, mut todo: Vec<usize>, results: &Results) {
        todo.sort_by(|&a, &b| self.items[b].cost.seconds.total_cmp(&self.items[a].cost.seconds).then(a.cmp(&b)));
        let (long, short): (Vec<usize>, Vec<usize>) =
            todo.into_iter().partition(|&index| self.items[index].cost.seconds >= LONG || self.settings.threads == 1);
        let put_off = Mutex::new(Vec::new());
        self.one_by_one(long, results, &put_off);
        self.side_by_side(short, results, &put_off);
        let mut waiting = put_off.into_inner().unwrap_or_else(PoisonError::into_inner);
        if !waiting.is_empty() && !self.over() {
            let names: Vec<String> = waiting.iter().map(|&index| self.items[index].task.family.to_string()).collect();
            let text = format!("waiting for another scan to finish {}", names.join(", "));
            self.watcher.event(Event::Remark { text });
        }
        while !waiting.is_empty() && !self.over() {
            let again = Mutex::new(Vec::new());
            self.one_by_one(waiting, results, &again);
            waiting = again.into_inner().unwrap_or_else(PoisonError::into_inner);
            std::thread::sleep(POLL);
        }
        self.presence.leave(&self.store);
    }

    fn one_by_one(&self, items: Vec<usize>, results: &Results, put_off: &Mutex<Vec<usize>>) {
        for index in items {
            if self.over() {
                return;
            }
            self.one(index, self.settings.threads, results, put_off);
        }
    }

    /// As many threads as there is memory for primes: a thread that only waits for its turn would still
    /// hold on to memory that it once used.
    fn threads_for(&self, item: &Item, most: usize) -> usize {
        let Some(limit) = self.settings.memory else { return most };
        let further = limit.saturating_sub(item.cost.bytes) / item.cost.further.max(1);
        let threads = most.min(usize::try_from(further).unwrap_or(usize::MAX).saturating_add(1));
        if threads < most {
            let plural = if threads == 1 { "thread" } else { "threads" };
            let text = format!("{}: the memory bound leaves {threads} {plural}", item.task.family);
            self.watcher.event(Event::Remark { text });
        }
        threads
    }

    fn side_by_side(&self, items: Vec<usize>, results: &Results, put_off: &Mutex<Vec<usize>>) {
        let least = items.iter().map(|&index| self.items[index].cost.bytes).min().unwrap_or(0).max(1);
        let fit = self.settings.memory.map_or(usize::MAX, |limit| usize::try_from(limit / least).unwrap_or(usize::MAX));
        let threads = self.settings.threads.min(items.len()).min(fit.max(1));
        let queue = Mutex::new(VecDeque::from(items));
        let take = || queue.lock().unwrap_or_else(PoisonError::into_inner).pop_front();
        std::thread::scope(|scope| {
            for _ in 0..threads {
                scope.spawn(|| {
                    while !self.over()
                        && let Some(index) = take()
                    {
                        self.one(index, 1, results, put_off);
                    }
                });
            }
        });
    }

    /// Computes one item, or puts it off when another scan has it.
    fn one(&self, index: usize, threads: usize, results: &Results, put_off: &Mutex<Vec<usize>>) {
        let item = &self.items[index];
        let family = item.task.family;
        let begin = Instant::now();
        let lock = match lock::attempt(&self.store.work_file(family, "lock")) {
            Ok(Attempt::Busy) => {
                put_off.lock().unwrap_or_else(PoisonError::into_inner).push(index);
                return;
            }
            Ok(Attempt::Held(lock)) => Some(lock),
            Ok(Attempt::Unsupported) => None,
            Err(error) => {
                let _ = results.send((index, Outcome::Failed(error)));
                return;
            }
        };
        self.running.lock().unwrap_or_else(PoisonError::into_inner).push(index);
        let report = |units| self.watcher.step(Step::Started { family, loops: item.loops, units });
        let result = self.budget.take(family, item.cost.bytes, &*self.watcher).and_then(|_share| {
            let pool = pool(self.threads_for(item, threads))?;
            complete_family(&super::work::Order {
                item,
                settings: &self.settings,
                store: &self.store,
                calculator: &*self.calculator,
                observer: &*self.watcher,
                pool: &pool,
                started: &report,
            })
        });
        drop(lock);
        self.running.lock().unwrap_or_else(PoisonError::into_inner).retain(|&other| other != index);
        let outcome = match result {
            Ok(Progress::Written(records)) => Outcome::Computed { seconds: begin.elapsed().as_secs_f64(), records },
            Ok(Progress::WasThere) => Outcome::Elsewhere,
            Err(error) if error.kind() == Kind::Interrupted => Outcome::Interrupted,
            Err(error) => {
                if is_storage_failure(&error) {
                    self.stop.store(true, Ordering::SeqCst);
                }
                Outcome::Failed(error)
            }
        };
        let _ = results.send((index, outcome));
    }
}

fn pool(threads: usize) -> Result<rayon::ThreadPool> {
    rayon::ThreadPoolBuilder::new().num_threads(threads.max(1)).build().map_err(|cause| {
        Error::bound(format!("cannot start {threads} worker threads; ask for fewer with --threads")).because(cause)
    })
}
