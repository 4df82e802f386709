//! Record files: names, reading, and writing that never leaves a half-written file.

use super::Record;
use crate::error::{Error, Result};
use crate::family::Family;
use std::io::Write;
use std::path::{Path, PathBuf};

/// The name of a family's record inside a results directory: `L08M03.json`.
pub fn file_name(family: Family) -> String {
    format!("L{:02}M{:02}.json", family.length, family.magnons)
}

/// Reads one record.
///
/// # Errors
/// The file cannot be read, or is not a valid record.
pub fn read(path: &Path) -> Result<Record> {
    let text = std::fs::read_to_string(path).map_err(|cause| {
        Error::io(format!("cannot read the record {}; check the path and its permissions", path.display()), cause)
    })?;
    Record::from_json(&text, &path.display().to_string())
}

/// Reads one record, or every record of a directory, sorted by family.
///
/// # Errors
/// As [`read`]; a directory without records is an input error.
pub fn read_all(path: &Path) -> Result<Vec<(PathBuf, Record)>> {
    if !path.is_dir() {
        return Ok(vec![(path.to_path_buf(), read(path)?)]);
    }
    let entries = std::fs::read_dir(path)
        .map_err(|cause| Error::io(format!("cannot list the directory {}", path.display()), cause))?;
    let mut found = Vec::new();
    for entry in entries {
        let entry = entry.map_err(|cause| Error::io(format!("cannot list the directory {}", path.display()), cause))?;
        let name = entry.file_name().to_string_lossy().into_owned();
        if name.starts_with('L') && name.ends_with(".json") && !name.contains("certificate") {
            found.push((entry.path(), read(&entry.path())?));
        }
    }
    if found.is_empty() {
        return Err(Error::input(format!(
            "{} holds no result record (files such as L08M03.json); fill it with `loopladder scan`",
            path.display()
        )));
    }
    found.sort_by_key(|(_, record)| (record.length, record.magnons));
    Ok(found)
}

/// Writes `bytes` to `path` so that the file is either the old one or the complete new one, even
/// after a crash: a temporary file in the same directory, flushed to disk, then renamed.
///
/// # Errors
/// Any failure of the file system; the old file is then untouched.
pub fn write_atomically(path: &Path, bytes: &[u8]) -> Result<()> {
    let directory = path.parent().filter(|p| !p.as_os_str().is_empty()).unwrap_or(Path::new("."));
    let failed = |cause| {
        Error::io(
            format!("cannot write {}; check that the directory exists, is writable and has space left", path.display()),
            cause,
        )
    };
    let mut temporary = tempfile::Builder::new().prefix(".writing-").tempfile_in(directory).map_err(failed)?;
    temporary.write_all(bytes).map_err(failed)?;
    temporary.as_file().sync_all().map_err(failed)?;
    #[cfg(unix)]
    {
        use std::os::unix::fs::PermissionsExt;
        temporary.as_file().set_permissions(std::fs::Permissions::from_mode(0o644)).map_err(failed)?;
    }
    temporary.persist(path).map_err(|error| failed(error.error))?;
    // The rename itself must survive a power cut: flush the directory too.
    if let Ok(handle) = std::fs::File::open(directory) {
        let _ = handle.sync_all();
    }
    Ok(())
}
