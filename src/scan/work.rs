//! One family: look, compute, check, store.

use super::calculator::{Calculator, Job};
use super::item::{Item, Settings};
use super::journal::Journal;
use super::store::{Found, Store};
use crate::error::{Error, Result};
use crate::observer::{Event, Observer};
use crate::record::Record;
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::path::PathBuf;

/// Everything that is needed for one family; the caller holds its lock.
pub(super) struct Order<'a> {
    pub item: &'a Item,
    pub settings: &'a Settings,
    pub store: &'a Store,
    pub calculator: &'a dyn Calculator,
    pub observer: &'a dyn Observer,
    pub pool: &'a rayon::ThreadPool,
    /// Told the number of work units found when computing begins.
    pub started: &'a (dyn Fn(usize) + Sync),
}

pub(super) enum Progress {
    /// So many records were written.
    Written(usize),
    /// Another scan was faster.
    WasThere,
}

/// Completes a family whose lock is held.
///
/// # Errors
/// Whatever computing or storing fails with; a panic below becomes a failed check.
pub(super) fn complete_family(order: &Order) -> Result<Progress> {
    let family = order.item.task.family;
    let earlier = match look(order, None)? {
        Look::Complete => return Ok(Progress::WasThere),
        Look::Needed(earlier) => earlier,
    };
    let (path, subject) = units_of(order.item, order.store, order.settings);
    let journal = Journal::open(&path, &subject);
    (order.started)(journal.len());
    let written = catch_unwind(AssertUnwindSafe(|| order.pool.install(|| compute(order, &journal, earlier))))
        .unwrap_or_else(|panic| Err(fault(family, &*panic)));
    if let Some(trouble) = journal.trouble() {
        order.observer.event(Event::Remark { text: format!("{family}: work units are not kept: {trouble}") });
    }
    // On failure the journal stays, so that the next run starts from the finished units.
    let records = written?;
    journal.remove();
    Ok(Progress::Written(records))
}

/// Computes all records of a family and stores them.
fn compute(order: &Order, journal: &Journal, earlier: Option<Box<Record>>) -> Result<usize> {
    let task = &order.item.task;
    if task.filter.is_open() {
        return one(order, journal, None, earlier).map(|()| 1);
    }
    let orbits = order.calculator.orbits(task.family, order.observer)?;
    let chosen: Vec<_> = orbits.iter().filter(|orbit| task.filter.admits(orbit.degree, orbit.parity)).collect();
    if chosen.len() == orbits.len() {
        return one(order, journal, None, earlier).map(|()| 1);
    }
    for orbit in &chosen {
        if let Look::Needed(earlier) = look(order, Some(&orbit.label))? {
            one(order, journal, Some(&orbit.label), earlier)?;
        }
    }
    Ok(chosen.len())
}

fn one(order: &Order, journal: &Journal, orbit: Option<&str>, earlier: Option<Box<Record>>) -> Result<()> {
    let family = order.item.task.family;
    let job = Job {
        family,
        loops: order.item.loops,
        orbit: orbit.map(str::to_string),
        certificate: order.settings.certify(order.item.task.family),
    };
    let product = order.calculator.compute(&job, order.settings.memory, journal, order.observer)?;
    let path = order.store.record_path(family, orbit);
    order.store.write(&path, &product.record, product.certificate.as_deref(), earlier.as_deref())
}

/// The journal of a family, and what its units belong to.
pub(super) fn units_of(item: &Item, store: &Store, settings: &Settings) -> (PathBuf, String) {
    let (family, loops) = (item.task.family, item.loops);
    let certificate = settings.certify(family);
    let subject = format!("{} {family} through loop {loops}, certificate {certificate}", crate::record::PROGRAM);
    (store.work_file(family, "units"), subject)
}

enum Look {
    Complete,
    /// To be computed; with the sound record that holds a part.
    Needed(Option<Box<Record>>),
}

/// What is there; damaged files are moved aside, and that is said.
fn look(order: &Order, orbit: Option<&str>) -> Result<Look> {
    loop {
        match order.store.examine(
            order.item.task.family,
            orbit,
            order.item.loops,
            order.settings.certify(order.item.task.family),
        )? {
            Found::Complete => return Ok(Look::Complete),
            Found::Missing => return Ok(Look::Needed(None)),
            Found::Short(record) => return Ok(Look::Needed(Some(record))),
            Found::Damaged { path, reason } => {
                let aside = order.store.set_aside(&path, "damaged")?;
                order.observer.event(Event::Remark {
                    text: format!(
                        "{} is damaged and was moved aside to {}; computing it again ({reason})",
                        path.display(),
                        aside.file_name().unwrap_or_default().to_string_lossy()
                    ),
                });
            }
        }
    }
}

fn fault(family: crate::family::Family, panic: &(dyn std::any::Any + Send)) -> Error {
    let what = panic
        .downcast_ref::<String>()
        .map(String::as_str)
        .or_else(|| panic.downcast_ref::<&str>().copied())
        .unwrap_or("no message");
    Error::check(format!("an internal fault while computing {family} ({what}); please report this"))
}
