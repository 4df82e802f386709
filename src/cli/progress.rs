//! Progress for people: bars on a terminal, sparse plain lines in a log; both on standard error.

use super::Console;
use super::interrupt;
use crate::observer::{Event, Observer};
use crate::scan::{Outcome, Step, Watcher, show_time};
use indicatif::{MultiProgress, ProgressBar, ProgressDrawTarget, ProgressStyle};
use std::collections::BTreeMap;
use std::io::Write;
use std::sync::{Mutex, MutexGuard, PoisonError};
use std::time::{Duration, Instant};

/// Bars appear only when a command lasts longer than this.
const PATIENCE: Duration = Duration::from_millis(400);
/// At least this long between two lines in a log, except for what must be said.
const SPARSE: Duration = Duration::from_secs(10);

/// Draws what it observes; cancels when the user has pressed Ctrl-C.
pub struct Progress {
    bars: Option<MultiProgress>,
    began: Instant,
    state: Mutex<State>,
}

#[derive(Default)]
struct State {
    /// Set by a scan: the bar over all families.
    scan: Option<Scan>,
    families: BTreeMap<String, Active>,
    last_line: Option<Instant>,
}

/// Where a scan stands, in families and in estimated seconds of one core.
struct Scan {
    bar: Option<ProgressBar>,
    families: usize,
    finished: usize,
    estimate: f64,
    done: f64,
    /// Threads that can run at once.
    threads: usize,
}

/// A family in work.
#[derive(Default)]
struct Active {
    bar: Option<ProgressBar>,
    stage: &'static str,
    orbits: Option<(usize, usize)>,
    /// (unit, done, expected) for each orbit.
    units: BTreeMap<String, (&'static str, usize, usize)>,
}

impl Progress {
    /// Bars when the console is a terminal, lines otherwise.
    pub fn new(console: &Console) -> Progress {
        let bars = console.interactive.then(|| MultiProgress::with_draw_target(ProgressDrawTarget::stderr_with_hz(8)));
        Progress { bars, began: Instant::now(), state: Mutex::default() }
    }

    /// Takes all bars off the terminal.
    pub fn finish(&self) {
        let mut state = self.state();
        state.families.clear();
        state.scan = None;
        if let Some(bars) = &self.bars {
            let _ = bars.clear();
        }
    }

    fn state(&self) -> MutexGuard<'_, State> {
        self.state.lock().unwrap_or_else(PoisonError::into_inner)
    }

    /// A line that stays.
    fn say(&self, text: &str) {
        match &self.bars {
            Some(bars) => bars.suspend(|| {
                let _ = writeln!(std::io::stderr().lock(), "{text}");
            }),
            None => {
                let _ = writeln!(std::io::stderr().lock(), "{text}");
            }
        }
    }

    /// A line in a log, unless the last one was a moment ago.
    fn log(&self, state: &mut State, always: bool, text: impl FnOnce(&State) -> String) {
        let last = state.last_line.unwrap_or(self.began);
        if self.bars.is_none() && (always || last.elapsed() >= SPARSE) {
            state.last_line = Some(Instant::now());
            let _ = writeln!(std::io::stderr().lock(), "{}", text(state));
        }
    }

    fn left(&self, scan: &Scan) -> String {
        match time_left(self.began.elapsed().as_secs_f64(), scan.done, scan.estimate, scan.threads) {
            Some(seconds) if seconds < 1.0 => "nearly done".to_string(),
            Some(seconds) => format!("about {} left", show_time(seconds)),
            None => "longer than estimated".to_string(),
        }
    }

    fn draw(&self, state: &mut State, family: &str) {
        let Some(bars) = &self.bars else { return };
        if self.began.elapsed() < PATIENCE {
            return;
        }
        let left = state.scan.as_ref().map(|scan| self.left(scan)).unwrap_or_default();
        if let Some(scan) = &mut state.scan {
            let bar = scan.bar.get_or_insert_with(|| {
                let bar = bars.insert(0, ProgressBar::new(scan.families as u64));
                bar.set_style(style("families {pos}/{len} [{bar:30}] {elapsed}, {msg}"));
                bar
            });
            bar.set_position(scan.finished as u64);
            bar.set_message(left);
        }
        let Some(active) = state.families.get_mut(family) else { return };
        let text = active.text();
        let (done, total) = active.totals();
        let bar = active.bar.get_or_insert_with(|| {
            let bar = bars.add(ProgressBar::new(0));
            bar.set_style(style("{prefix} [{bar:30}] {msg}"));
            bar.set_prefix(family.to_string());
            bar
        });
        bar.set_length(total as u64);
        bar.set_position(done as u64);
        bar.set_message(text);
    }
}

fn style(template: &str) -> ProgressStyle {
    ProgressStyle::with_template(template).unwrap_or_else(|_| ProgressStyle::default_bar()).progress_chars("=> ")
}

/// Seconds left, judging by how long the finished part of the estimate really took; before anything is
/// finished, by the estimate alone, and `None` when that is used up.
fn time_left(elapsed: f64, done: f64, estimate: f64, threads: usize) -> Option<f64> {
    if done > 0.0 && elapsed > 0.5 {
        return Some(elapsed * (estimate - done).max(0.0) / done);
    }
    let left = estimate / threads.max(1) as f64 - elapsed;
    (left > 0.0).then_some(left)
}

impl Active {
    fn totals(&self) -> (usize, usize) {
        self.units.values().fold((0, 0), |(done, total), unit| (done + unit.1, total + unit.2.max(unit.1)))
    }

    fn text(&self) -> String {
        let mut parts = vec![self.stage.to_string()];
        if let Some((done, total)) = self.orbits {
            parts.push(format!("orbit {} of {total}", (done + 1).min(total)));
        }
        let (done, total) = self.totals();
        if let Some((unit, _, _)) = self.units.values().next() {
            parts.push(format!("{done} of about {total} {unit}"));
        }
        parts.retain(|part| !part.is_empty());
        parts.join(", ")
    }
}

impl Observer for Progress {
    fn event(&self, event: Event) {
        let mut state = self.state();
        let family = match event {
            Event::Remark { text } => {
                drop(state);
                return self.say(&text);
            }
            Event::Stage { family, stage } => {
                // A new stage counts in its own units (primes, orders, …), from the start.
                let active = state.families.entry(family.clone()).or_default();
                active.stage = stage;
                active.orbits = None;
                active.units.clear();
                family
            }
            Event::Planned { family, orbit, unit, total } => {
                let entry =
                    state.families.entry(family.clone()).or_default().units.entry(orbit).or_insert((unit, 0, 0));
                entry.2 = total;
                family
            }
            Event::Advanced { family, orbit, unit, done } => {
                let entry =
                    state.families.entry(family.clone()).or_default().units.entry(orbit).or_insert((unit, 0, 0));
                entry.1 = entry.1.max(done);
                family
            }
            Event::OrbitDone { family, done, total, .. } => {
                state.families.entry(family.clone()).or_default().orbits = Some((done, total));
                family
            }
        };
        self.draw(&mut state, &family);
        self.log(&mut state, false, |state| {
            let text = state.families.get(&family).map(Active::text).unwrap_or_default();
            format!("{}: {family}: {text}", show_time(self.began.elapsed().as_secs_f64()))
        });
    }

    fn cancelled(&self) -> bool {
        interrupt::requested()
    }
}

impl Watcher for Progress {
    fn step(&self, step: Step<'_>) {
        let mut state = self.state();
        match step {
            Step::Begun { families, kept, seconds, threads } => {
                state.scan = Some(Scan { bar: None, families, finished: 0, estimate: seconds, done: 0.0, threads });
                if families > 0 {
                    let wall = show_time(seconds / threads.max(1) as f64);
                    let plural = if threads == 1 { "thread" } else { "threads" };
                    self.say(&format!(
                        "{families} to compute, {kept} complete already; estimated time {wall} on {threads} {plural}"
                    ));
                }
            }
            Step::Started { family, loops, units } => {
                let name = family.to_string();
                if units > 0 {
                    self.say(&format!("{name}: going on from {units} work units of an earlier run"));
                }
                state.families.insert(name.clone(), Active { stage: "begins", ..Active::default() });
                self.draw(&mut state, &name);
                self.log(&mut state, false, |_| format!("{name}: begins, through loop {loops}"));
            }
            Step::Finished { family, outcome, estimate } => {
                let name = family.to_string();
                if let Some(bar) = state.families.remove(&name).and_then(|active| active.bar) {
                    bar.finish_and_clear();
                }
                if let Some(scan) = &mut state.scan {
                    scan.finished += 1;
                    scan.done += estimate;
                }
                let what = match outcome {
                    Outcome::Computed { seconds, .. } => format!("computed in {}", show_time(*seconds)),
                    Outcome::Kept => "kept".to_string(),
                    Outcome::Elsewhere => "computed by another scan".to_string(),
                    Outcome::Failed(error) => format!("failed: {error}"),
                    Outcome::Interrupted => "interrupted".to_string(),
                    Outcome::NotStarted => "not started".to_string(),
                };
                if matches!(outcome, Outcome::Failed(_)) {
                    self.say(&format!("{name}: {what}"));
                }
                self.draw(&mut state, &name);
                self.log(&mut state, false, |state| {
                    let scan = state.scan.as_ref();
                    let counts = scan
                        .map(|scan| format!("; {} of {} families, {}", scan.finished, scan.families, self.left(scan)));
                    format!(
                        "{}: {name} {what}{}",
                        show_time(self.began.elapsed().as_secs_f64()),
                        counts.unwrap_or_default()
                    )
                });
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn time_left_follows_what_the_finished_part_took() {
        assert_eq!(time_left(30.0, 10.0, 40.0, 2), Some(90.0));
        assert_eq!(time_left(30.0, 40.0, 40.0, 2), Some(0.0));
        assert_eq!(time_left(5.0, 0.0, 40.0, 2), Some(15.0));
        assert_eq!(time_left(30.0, 0.0, 40.0, 2), None);
    }

    #[test]
    fn a_family_is_described_by_stage_orbit_and_units() {
        let mut active = Active { stage: "lift", orbits: Some((1, 3)), ..Active::default() };
        active.units.insert("L8M3-1".into(), ("primes", 4, 4));
        active.units.insert("L8M3-2".into(), ("primes", 3, 10));
        assert_eq!(active.text(), "lift, orbit 2 of 3, 7 of about 14 primes");
        assert_eq!(Active { stage: "chain spectrum", ..Active::default() }.text(), "chain spectrum");
    }
}
