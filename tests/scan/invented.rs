//! An invented calculator: no physics, chosen timing, and a count of what it really did.

use loopladder::error::{Error, Result};
use loopladder::family::Family;
use loopladder::observer::{Event, Observer};
use loopladder::record::{COUPLING, Coefficient, Orbit, PROGRAM, Parity, Record, State, Status, Term};
use loopladder::scan::{Calculator, Checkpoint, Cost, Job, OrbitOutline, Product, Step, Watcher};
use std::sync::Mutex;
use std::sync::atomic::{AtomicBool, AtomicU64, AtomicUsize, Ordering};
use std::time::{Duration, Instant};

/// Computes invented records: every orbit takes `units` units of `pause` each.
pub struct Invented {
    pub units: usize,
    pub pause: Duration,
    /// Families that fail, and families that panic.
    pub failing: Vec<Family>,
    pub panicking: Vec<Family>,
    /// Whether it looks at the observer between units.
    pub attentive: bool,
    pub bytes: u64,
    /// Units really computed, and units taken from the checkpoint.
    pub computed: AtomicUsize,
    pub reused: AtomicUsize,
    /// Families computed, in order.
    pub families: Mutex<Vec<Family>>,
    /// The most bytes in use at once, by its own estimate.
    pub used: AtomicU64,
    pub most: AtomicU64,
}

impl Invented {
    pub fn new(units: usize, pause: Duration) -> Invented {
        Invented {
            units,
            pause,
            failing: Vec::new(),
            panicking: Vec::new(),
            attentive: true,
            bytes: 0,
            computed: AtomicUsize::new(0),
            reused: AtomicUsize::new(0),
            families: Mutex::new(Vec::new()),
            used: AtomicU64::new(0),
            most: AtomicU64::new(0),
        }
    }

    fn unit(&self, key: &str, checkpoint: &dyn Checkpoint, observer: &dyn Observer) -> Result<u64> {
        if self.attentive {
            observer.proceed()?;
        }
        if let Some(bytes) = checkpoint.load(key) {
            self.reused.fetch_add(1, Ordering::SeqCst);
            return Ok(u64::from_le_bytes(bytes.try_into().expect("a stored unit has eight bytes")));
        }
        std::thread::sleep(self.pause);
        let value = key.bytes().fold(7u64, |sum, byte| sum.wrapping_mul(31).wrapping_add(u64::from(byte)));
        checkpoint.store(key, &value.to_le_bytes())?;
        self.computed.fetch_add(1, Ordering::SeqCst);
        Ok(value)
    }

    fn orbit(
        &self,
        outline: &OrbitOutline,
        members: usize,
        loops: usize,
        checkpoint: &dyn Checkpoint,
        observer: &dyn Observer,
    ) -> Result<Orbit> {
        let mut sum = 0u64;
        for unit in 0..self.units {
            sum = sum.wrapping_add(self.unit(&format!("{}/{unit}", outline.label), checkpoint, observer)?);
        }
        let coefficient = |order: usize| Coefficient {
            order,
            status: Status::Exact,
            terms: vec![Term { zeta: vec![], value: vec![format!("{}", sum % 1000 + order as u64)] }],
            parts: None,
            spare_digits: None,
            numbers: vec![],
        };
        Ok(Orbit {
            label: outline.label.clone(),
            parity: outline.parity,
            members,
            singular: false,
            minimal_polynomial: vec!["-1".into(), "1".into()],
            generator: "invented".into(),
            coefficients: (1..=loops).map(coefficient).collect(),
            states: vec![State { omega: "1".into(), one_loop: "1.0".into() }],
        })
    }
}

/// The first two primaries form a pair where there are three or more; the rest are single.
fn outlines(family: Family) -> Vec<(OrbitOutline, usize)> {
    let primaries = family.primaries().to_usize().expect("a small family");
    let mut left = primaries;
    let mut orbits = Vec::new();
    while left > 0 {
        let members = if orbits.is_empty() && primaries >= 3 { 2 } else { 1 };
        left -= members;
        let label = format!("L{}M{}-{}", family.length, family.magnons, orbits.len() + 1);
        let parity = if members == 2 { Parity::Paired } else { Parity::Symmetric };
        orbits.push((OrbitOutline { label, degree: 1, parity }, members));
    }
    orbits
}

impl Calculator for Invented {
    fn complete_through(&self, family: Family) -> usize {
        family.length - 1
    }

    fn cost(&self, family: Family, _loops: usize, _certificate: bool) -> Cost {
        let seconds = outlines(family).len() as f64 * self.units as f64 * self.pause.as_secs_f64();
        Cost { seconds, bytes: self.bytes, further: self.bytes }
    }

    fn orbits(&self, family: Family, _observer: &dyn Observer) -> Result<Vec<OrbitOutline>> {
        Ok(outlines(family).into_iter().map(|(outline, _)| outline).collect())
    }

    fn compute(
        &self,
        job: &Job,
        _memory: Option<u64>,
        checkpoint: &dyn Checkpoint,
        observer: &dyn Observer,
    ) -> Result<Product> {
        self.families.lock().unwrap().push(job.family);
        if self.failing.contains(&job.family) {
            return Err(Error::check(format!("invented failure of {}", job.family)));
        }
        assert!(!self.panicking.contains(&job.family), "invented panic");
        let now = self.used.fetch_add(self.bytes, Ordering::SeqCst) + self.bytes;
        self.most.fetch_max(now, Ordering::SeqCst);
        let orbits = outlines(job.family)
            .iter()
            .filter(|(outline, _)| job.orbit.as_ref().is_none_or(|label| *label == outline.label))
            .map(|(outline, members)| self.orbit(outline, *members, job.loops, checkpoint, observer))
            .collect::<Result<Vec<Orbit>>>();
        self.used.fetch_sub(self.bytes, Ordering::SeqCst);
        let Family { length, magnons } = job.family;
        let record = Record {
            schema: 1,
            program: PROGRAM.to_string(),
            length,
            magnons,
            coupling: COUPLING.to_string(),
            loops: job.loops,
            primaries: job.family.primaries().to_usize().expect("a small family"),
            orbits: orbits?,
        };
        let certificate = job
            .certificate
            .then(|| format!("{{\"length\": {length}, \"magnons\": {magnons}, \"loops\": {}}}\n", job.loops));
        Ok(Product { record, certificate })
    }
}

/// Remembers remarks; cancels at a chosen time.
#[derive(Default)]
pub struct Watch {
    pub remarks: Mutex<Vec<String>>,
    pub units_found: AtomicUsize,
    pub cancel_at: Option<Instant>,
    pub cancel: AtomicBool,
}

impl Observer for Watch {
    fn event(&self, event: Event) {
        if let Event::Remark { text } = event {
            self.remarks.lock().unwrap().push(text);
        }
    }

    fn cancelled(&self) -> bool {
        self.cancel.load(Ordering::SeqCst) || self.cancel_at.is_some_and(|at| Instant::now() >= at)
    }
}

impl Watcher for Watch {
    fn step(&self, step: Step<'_>) {
        if let Step::Started { units, .. } = step {
            self.units_found.fetch_add(units, Ordering::SeqCst);
        }
    }
}
