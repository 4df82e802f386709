//! The results directory: what is there already, what is written, and what is never lost.
//!
//! `L08M03.json` is the record of a family, `L08M03.certificate.json` its certificate. Where a
//! filter leaves out orbits, each selected orbit has a record of its own, `L08M03-2.json`. `.work/`
//! holds locks and work units while a scan runs. A file that is not what its name says is moved
//! aside as `L08M03.json.damaged-1` and never overwritten.

use crate::error::{Error, Result};
use crate::family::Family;
use crate::record::{Record, Status, file_name, write_atomically};
use std::io::ErrorKind;
use std::path::{Path, PathBuf};

/// A results directory.
#[derive(Clone, Debug)]
pub struct Store {
    directory: PathBuf,
}

/// What a record file turned out to be.
#[derive(Debug)]
pub enum Found {
    /// There is none.
    Missing,
    /// Everything asked for is there.
    Complete,
    /// A sound record that holds less than is asked for.
    Short(Box<Record>),
    /// Not a record of this family, with the reason: half-written, edited, misnamed.
    Damaged { path: PathBuf, reason: String },
}

impl Store {
    /// The store in `directory`; nothing is created yet.
    pub fn new(directory: &Path) -> Store {
        Store { directory: directory.to_path_buf() }
    }

    /// The directory.
    pub fn directory(&self) -> &Path {
        &self.directory
    }

    /// The directory for locks and work units.
    pub fn work(&self) -> PathBuf {
        self.directory.join(".work")
    }

    /// A file for one family in [`Store::work`].
    pub fn work_file(&self, family: Family, extension: &str) -> PathBuf {
        self.work().join(file_name(family)).with_extension(extension)
    }

    /// The record of a family, or of one of its orbits.
    pub fn record_path(&self, family: Family, orbit: Option<&str>) -> PathBuf {
        let whole = file_name(family);
        let number = orbit.and_then(|label| label.rsplit('-').next());
        self.directory.join(match number {
            None => whole,
            Some(number) => format!("{}-{number}.json", whole.trim_end_matches(".json")),
        })
    }

    /// Creates the directory and its work directory, and makes sure that files can be written.
    ///
    /// # Errors
    /// The directory cannot be created or written to.
    pub fn prepare(&self) -> Result<()> {
        let failed = |cause| {
            Error::io(
                format!(
                    "cannot write into the output directory {}; choose another with --out, or make it writable",
                    self.directory.display()
                ),
                cause,
            )
        };
        std::fs::create_dir_all(self.work()).map_err(failed)?;
        tempfile::tempfile_in(self.work()).map_err(failed)?;
        Ok(())
    }

    /// Removes what killed scans left behind; only when no other scan uses the directory.
    pub fn clear_leftovers(&self) {
        for directory in [self.directory.clone(), self.work()] {
            for entry in std::fs::read_dir(directory).into_iter().flatten().flatten() {
                let name = entry.file_name();
                let name = name.to_string_lossy();
                if name.starts_with(".writing-") || (name.starts_with('L') && name.ends_with(".lock")) {
                    let _ = std::fs::remove_file(entry.path());
                }
            }
        }
    }

    /// Removes the work directory if nothing is left in it.
    pub fn remove_work(&self) {
        let _ = std::fs::remove_dir(self.work());
    }

    /// What is there for a family (or one orbit of it) of which everything through `loops` is wanted.
    ///
    /// # Errors
    /// The file exists and cannot be read.
    pub fn examine(&self, family: Family, orbit: Option<&str>, loops: usize, certificate: bool) -> Result<Found> {
        let path = self.record_path(family, orbit);
        let Some(text) = read(&path)? else { return Ok(Found::Missing) };
        let damaged = |path: PathBuf, reason: String| Ok(Found::Damaged { path, reason });
        let record = match text.map(|text| Record::from_json(&text, &path.display().to_string())) {
            Some(Ok(record)) => record,
            Some(Err(error)) => return damaged(path, error.chain()),
            None => return damaged(path, "not UTF-8 text".to_string()),
        };
        if (record.length, record.magnons) != (family.length, family.magnons) {
            return damaged(path, format!("it is the record of the family ({}, {})", record.length, record.magnons));
        }
        if orbit.is_some_and(|label| record.orbits.len() != 1 || record.orbits[0].label != label) {
            return damaged(path, "it is not the record of that one orbit".to_string());
        }
        if !complete(&record, orbit.is_none(), loops) {
            return Ok(Found::Short(Box::new(record)));
        }
        if certificate {
            let path = certificate_path(&path);
            match read(&path)? {
                None => return Ok(Found::Short(Box::new(record))),
                Some(text) => match text.as_deref().map(|text| certificate_loops(text, family)) {
                    Some(Some(through)) if through >= loops => {}
                    Some(Some(_)) => return Ok(Found::Short(Box::new(record))),
                    _ => return damaged(path, "it is not a certificate of this family".to_string()),
                },
            }
        }
        Ok(Found::Complete)
    }

    /// Moves a damaged file aside, to a name that no reader takes for a record.
    ///
    /// # Errors
    /// The file cannot be renamed.
    pub fn set_aside(&self, path: &Path, word: &str) -> Result<PathBuf> {
        let name = path.file_name().unwrap_or_default().to_string_lossy().into_owned();
        for number in 1.. {
            let aside = path.with_file_name(format!("{name}.{word}-{number}"));
            if !aside.exists() {
                std::fs::rename(path, &aside).map_err(|cause| {
                    Error::io(format!("cannot move {} aside; move it away by hand", path.display()), cause)
                })?;
                return Ok(aside);
            }
        }
        Ok(path.to_path_buf())
    }

    /// Writes a record and its certificate. The record comes last: where it is, everything is.
    /// `earlier` is the sound record that it replaces; when the new one does not hold all of it, the
    /// old file is moved aside first, and when they contradict each other nothing is written over.
    ///
    /// # Errors
    /// A record that breaks its own rules or contradicts the earlier one (check), or a failure to write.
    pub fn write(
        &self,
        path: &Path,
        record: &Record,
        certificate: Option<&str>,
        earlier: Option<&Record>,
    ) -> Result<()> {
        let text = record.to_json();
        Record::from_json(&text, &path.display().to_string()).map_err(|error| {
            Error::check("the computed record breaks the rules of records and is not stored; please report this")
                .because(error)
        })?;
        if let Some(earlier) = earlier {
            match holds(record, earlier) {
                Containment::All => {}
                Containment::NotAll => {
                    self.set_aside(path, "replaced")?;
                }
                Containment::Contradiction(what) => {
                    let aside = path.with_file_name(format!(
                        "{}.contradicting",
                        path.file_name().unwrap_or_default().to_string_lossy()
                    ));
                    write_atomically(&aside, text.as_bytes())?;
                    return Err(Error::check(format!(
                        "the record {} and a new computation disagree in {what}; the file is unchanged and the new record is in {}; find out which is wrong",
                        path.display(),
                        aside.display()
                    )));
                }
            }
        }
        if let Some(certificate) = certificate {
            write_atomically(&certificate_path(path), certificate.as_bytes())?;
        }
        write_atomically(path, text.as_bytes())
    }
}

/// `L08M03.json` → `L08M03.certificate.json`.
pub fn certificate_path(record: &Path) -> PathBuf {
    record.with_extension("certificate.json")
}

/// Whether an error means that nothing more can be stored in the directory.
pub fn is_storage_failure(error: &Error) -> bool {
    let mut next: Option<&(dyn std::error::Error + 'static)> = Some(error);
    while let Some(cause) = next {
        if let Some(cause) = cause.downcast_ref::<std::io::Error>() {
            return matches!(
                cause.kind(),
                ErrorKind::StorageFull | ErrorKind::QuotaExceeded | ErrorKind::ReadOnlyFilesystem
            );
        }
        next = cause.source();
    }
    false
}

/// The text of a file; `None` when there is no file, `Some(None)` when it is not UTF-8.
fn read(path: &Path) -> Result<Option<Option<String>>> {
    match std::fs::read(path) {
        Ok(bytes) => Ok(Some(String::from_utf8(bytes).ok())),
        Err(cause) if cause.kind() == ErrorKind::NotFound => Ok(None),
        Err(cause) => Err(Error::io(
            format!("cannot read {}; it is left as it is: move it away or make it readable", path.display()),
            cause,
        )),
    }
}

/// Whether a record has every orbit (when `whole`) complete through `loops`.
fn complete(record: &Record, whole: bool, loops: usize) -> bool {
    let members: usize = record.orbits.iter().map(|orbit| orbit.members).sum();
    record.loops >= loops
        && (!whole || members == record.primaries || (record.orbits.is_empty() && record.magnons == 0))
        && record.orbits.iter().all(|orbit| orbit.complete_through() >= loops)
}

/// The loop order of a certificate of `family`; `None` when the text is something else.
fn certificate_loops(text: &str, family: Family) -> Option<usize> {
    #[derive(serde::Deserialize)]
    struct Head {
        length: usize,
        magnons: usize,
        loops: usize,
    }
    let head: Head = serde_json::from_str(text).ok()?;
    (head.length == family.length && head.magnons == family.magnons).then_some(head.loops)
}

enum Containment {
    All,
    NotAll,
    Contradiction(String),
}

/// Whether `new` holds everything that `old` does.
fn holds(new: &Record, old: &Record) -> Containment {
    let mut all = true;
    for orbit in &old.orbits {
        let Some(same) = new.orbits.iter().find(|candidate| candidate.label == orbit.label) else {
            all = false;
            continue;
        };
        if same.minimal_polynomial != orbit.minimal_polynomial || same.parity != orbit.parity {
            return Containment::Contradiction(format!("the field or parity of {}", orbit.label));
        }
        for coefficient in &orbit.coefficients {
            match same.coefficient(coefficient.order) {
                None => all = false,
                Some(other) if other == coefficient => {}
                Some(other) if other.status == Status::Exact && coefficient.status == Status::Exact => {
                    return Containment::Contradiction(format!("loop {} of {}", coefficient.order, orbit.label));
                }
                // An asymptotic or numeric value gives way to an exact one.
                Some(other) if other.status == Status::Exact => {}
                Some(_) => all = false,
            }
        }
    }
    if all { Containment::All } else { Containment::NotAll }
}
