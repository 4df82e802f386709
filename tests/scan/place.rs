//! Places to scan in: directory listings and small disks.

use std::collections::BTreeMap;
use std::path::Path;
use std::process::{Command, Stdio};

/// Every file below `directory` with its bytes; hidden ones too, so leftovers show.
pub fn contents(directory: &Path) -> BTreeMap<String, Vec<u8>> {
    let mut files = BTreeMap::new();
    for entry in std::fs::read_dir(directory).unwrap() {
        let path = entry.unwrap().path();
        let name = path.file_name().unwrap().to_string_lossy().into_owned();
        if path.is_dir() {
            files.insert(format!("{name}/"), Vec::new());
            files.extend(contents(&path).into_iter().map(|(inner, bytes)| (format!("{name}/{inner}"), bytes)));
        } else {
            files.insert(name, std::fs::read(path).unwrap());
        }
    }
    files
}

/// Every record file present can be read: never half a record under its own name.
pub fn all_records_are_sound(directory: &Path) {
    for entry in std::fs::read_dir(directory).into_iter().flatten() {
        let path = entry.unwrap().path();
        if path.extension().is_some_and(|extension| extension == "json") {
            loopladder::record::read(&path).unwrap();
        }
    }
}

/// A small file system in memory, unmounted when dropped.
pub struct TinyDisk {
    directory: tempfile::TempDir,
}

impl TinyDisk {
    /// Mounts one; says so and gives `None` where that is not allowed.
    pub fn mount(options: &str) -> Option<TinyDisk> {
        let directory = tempfile::tempdir().unwrap();
        let mounted = Command::new("mount")
            .args(["-t", "tmpfs", "-o", options, "none"])
            .arg(directory.path())
            .stderr(Stdio::null())
            .status()
            .is_ok_and(|status| status.success());
        if !mounted {
            eprintln!("SKIPPED: mounting a small disk needs root; run the tests as root to include this one");
            return None;
        }
        Some(TinyDisk { directory })
    }

    pub fn path(&self) -> &Path {
        self.directory.path()
    }

    /// Fills the disk but for about `left` bytes.
    pub fn fill(&self, left: usize) -> usize {
        let filler = self.path().join("filler");
        let mut size = 0;
        let mut file = std::fs::File::create(&filler).unwrap();
        while std::io::Write::write_all(&mut file, &[0; 4096]).is_ok() {
            size += 4096;
        }
        file.set_len((size - left) as u64).unwrap();
        left
    }

    pub fn empty(&self) {
        std::fs::remove_file(self.path().join("filler")).unwrap();
    }
}

impl Drop for TinyDisk {
    fn drop(&mut self) {
        let _ = Command::new("umount").arg(self.directory.path()).status();
    }
}
