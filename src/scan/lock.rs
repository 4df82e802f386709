//! One lock file per family, so that two scans on one directory share the work. The operating
//! system holds the lock, not the file: when a process dies, however it dies, its locks are gone.

use crate::error::{Error, Result};
use std::fs::{File, OpenOptions, TryLockError};
use std::path::{Path, PathBuf};

/// A lock held until dropped; the file goes with it.
pub struct Lock {
    path: PathBuf,
    /// Open while the lock is held.
    _file: File,
}

/// The answer to a try.
pub enum Attempt {
    /// Ours now.
    Held(Lock),
    /// Another scan has it.
    Busy,
    /// The file system knows no locks; the file is there, and means nothing.
    Unsupported,
}

/// Tries to take the lock at `path` (its directory is created when missing).
///
/// # Errors
/// The file cannot be created.
pub fn attempt(path: &Path) -> Result<Attempt> {
    let failed = |cause| {
        Error::io(
            format!(
                "cannot create the lock file {}; check that the output directory is writable and has space left",
                path.display()
            ),
            cause,
        )
    };
    loop {
        let file = open(path).map_err(failed)?;
        match file.try_lock() {
            Ok(()) => {}
            Err(TryLockError::WouldBlock) => return Ok(Attempt::Busy),
            Err(TryLockError::Error(_)) => {
                let _ = std::fs::remove_file(path);
                return Ok(Attempt::Unsupported);
            }
        }
        // A former holder may have removed the file between opening and locking; then this lock is on a
        // file that nobody else can see, and the try starts again.
        if is_current(&file, path) {
            return Ok(Attempt::Held(Lock { path: path.to_path_buf(), _file: file }));
        }
    }
}

/// Opens or creates a lock file, and its directory when missing.
pub(super) fn open(path: &Path) -> std::io::Result<File> {
    let options = || OpenOptions::new().read(true).write(true).create(true).truncate(false).open(path);
    match options() {
        Err(cause) if cause.kind() == std::io::ErrorKind::NotFound => {
            if let Some(directory) = path.parent() {
                std::fs::create_dir_all(directory)?;
            }
            options()
        }
        other => other,
    }
}

/// Whether the file opened is the one now at `path`.
#[cfg(unix)]
pub(super) fn is_current(file: &File, path: &Path) -> bool {
    use std::os::unix::fs::MetadataExt;
    match (file.metadata(), std::fs::metadata(path)) {
        (Ok(ours), Ok(there)) => ours.ino() == there.ino() && ours.dev() == there.dev(),
        _ => false,
    }
}

/// Whether there still is a file at `path`.
#[cfg(not(unix))]
pub(super) fn is_current(_file: &File, path: &Path) -> bool {
    path.exists()
}

impl Drop for Lock {
    fn drop(&mut self) {
        // Removed while still held: whoever opened it before sees in `attempt` that it is gone.
        let _ = std::fs::remove_file(&self.path);
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::sync::atomic::{AtomicUsize, Ordering};

    #[test]
    fn a_lock_excludes_and_vanishes() {
        let directory = tempfile::tempdir().unwrap();
        let path = directory.path().join("deep/L08M03.lock");
        let Attempt::Held(lock) = attempt(&path).unwrap() else { panic!("not held") };
        assert!(matches!(attempt(&path).unwrap(), Attempt::Busy));
        drop(lock);
        assert!(!path.exists());
        assert!(matches!(attempt(&path).unwrap(), Attempt::Held(_)));
    }

    #[test]
    fn never_two_holders() {
        let directory = tempfile::tempdir().unwrap();
        let path = directory.path().join("lock");
        let (holders, taken) = (AtomicUsize::new(0), AtomicUsize::new(0));
        std::thread::scope(|scope| {
            for _ in 0..4 {
                scope.spawn(|| {
                    let mut mine = 0;
                    while mine < 50 {
                        if let Attempt::Held(lock) = attempt(&path).unwrap() {
                            assert_eq!(holders.fetch_add(1, Ordering::SeqCst), 0);
                            taken.fetch_add(1, Ordering::SeqCst);
                            mine += 1;
                            std::thread::yield_now();
                            holders.fetch_sub(1, Ordering::SeqCst);
                            drop(lock);
                        }
                    }
                });
            }
        });
        assert_eq!(taken.into_inner(), 200);
    }
}
