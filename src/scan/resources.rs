//! What the families of one scan share, and what scans on one directory share: memory and presence.

use super::journal::Journal;
use super::lock;
use super::store::Store;
use super::values::show_size;
use crate::error::{Error, Result};
use crate::family::Family;
use crate::observer::{Event, Observer};
use std::fs::TryLockError;
use std::path::PathBuf;
use std::sync::{Condvar, Mutex, PoisonError};
use std::time::Duration;

const POLL: Duration = Duration::from_millis(100);

/// Memory shared out to the families in work.
pub(super) struct Budget {
    limit: Option<u64>,
    used: Mutex<u64>,
    freed: Condvar,
}

/// A part of the budget, returned when dropped.
pub(super) struct Share<'a> {
    budget: &'a Budget,
    bytes: u64,
}

impl Budget {
    pub fn new(limit: Option<u64>) -> Budget {
        Budget { limit, used: Mutex::new(0), freed: Condvar::new() }
    }

    /// Waits until `bytes` fit beside the families in work.
    pub fn take(&self, family: Family, bytes: u64, observer: &dyn Observer) -> Result<Share<'_>> {
        let Some(limit) = self.limit else { return Ok(Share { budget: self, bytes: 0 }) };
        if bytes > limit {
            return Err(Error::bound(format!(
                "the family {family} needs about {} even with one prime at a time, and the memory bound is {}; raise --memory or leave it out",
                show_size(bytes),
                show_size(limit)
            )));
        }
        let mut used = self.used.lock().unwrap_or_else(PoisonError::into_inner);
        let mut said = false;
        while *used + bytes > limit {
            observer.proceed()?;
            if !said {
                said = true;
                observer
                    .event(Event::Remark { text: format!("{family} waits for memory (bound {})", show_size(limit)) });
            }
            used = self.freed.wait_timeout(used, POLL).unwrap_or_else(PoisonError::into_inner).0;
        }
        *used += bytes;
        Ok(Share { budget: self, bytes })
    }
}

impl Drop for Share<'_> {
    fn drop(&mut self) {
        *self.budget.used.lock().unwrap_or_else(PoisonError::into_inner) -= self.bytes;
        self.budget.freed.notify_all();
    }
}

/// Says to other scans that this one uses the directory. Only a scan that is alone removes what
/// killed ones left behind.
pub(super) struct Presence {
    file: Mutex<Option<std::fs::File>>,
    path: PathBuf,
}

impl Presence {
    /// Enters the directory; alone in it, first clears up, `units` (journals and what they must belong to)
    /// included.
    ///
    /// # Errors
    /// The file cannot be created.
    pub fn enter(store: &Store, units: &[(PathBuf, String)], observer: &dyn Observer) -> Result<Presence> {
        let path = store.work().join("scan.lock");
        let failed = |cause| {
            Error::io(format!("cannot create {}; check that the output directory is writable", path.display()), cause)
        };
        loop {
            let file = lock::open(&path).map_err(failed)?;
            let remark = match file.try_lock() {
                Ok(()) if !lock::is_current(&file, &path) => continue,
                Ok(()) => {
                    store.clear_leftovers();
                    units.iter().for_each(|(path, subject)| Journal::discard(path, subject));
                    let _ = file.unlock();
                    None
                }
                Err(TryLockError::WouldBlock) => Some(format!(
                    "another scan works in {}; this one takes the families that are free",
                    store.directory().display()
                )),
                Err(TryLockError::Error(_)) => Some(format!(
                    "the file system of {} has no locks: two scans at once may compute a family twice (results stay the same)",
                    store.directory().display()
                )),
            };
            // Waits at most for somebody who clears up, which takes a moment. Whoever left last has
            // removed the file meanwhile; then this lock is on a file that nobody else can see.
            if file.lock_shared().is_ok() && !lock::is_current(&file, &path) {
                continue;
            }
            if let Some(text) = remark {
                observer.event(Event::Remark { text });
            }
            return Ok(Presence { file: Mutex::new(Some(file)), path });
        }
    }

    /// The scan is over; the last one to leave clears up.
    pub fn leave(&self, store: &Store) {
        if let Some(file) = self.file.lock().unwrap_or_else(PoisonError::into_inner).take() {
            let _ = file.unlock();
            let alone = match file.try_lock() {
                Ok(()) => lock::is_current(&file, &self.path),
                Err(TryLockError::WouldBlock) => false,
                Err(TryLockError::Error(_)) => true,
            };
            if alone {
                let _ = std::fs::remove_file(&self.path);
                store.remove_work();
            }
        }
    }
}
