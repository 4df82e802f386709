//! Places to scan in: directory listings, small disks, and processes that can be killed.

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};
use std::process::{Child, Command, ExitStatus, Stdio};

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

    pub fn remount(&self, mode: &str) {
        let status = Command::new("mount").args(["-o", &format!("remount,{mode}")]).arg(self.path()).status().unwrap();
        assert!(status.success());
    }
}

impl Drop for TinyDisk {
    fn drop(&mut self) {
        let _ = Command::new("umount").arg(self.directory.path()).status();
    }
}

/// What a scan in a process of its own is asked to do.
pub struct Request {
    pub plan: String,
    pub directory: PathBuf,
    pub threads: usize,
    pub units: usize,
    pub pause: u64,
    pub report: PathBuf,
}

const VARIABLE: &str = "LOOPLADDER_TEST_CHILD";

/// The request to this process, if it is such a process.
pub fn request() -> Option<Request> {
    let text = std::env::var(VARIABLE).ok()?;
    let mut parts = text.splitn(6, '|');
    let mut next = || parts.next().unwrap().to_string();
    Some(Request {
        directory: next().into(),
        report: next().into(),
        threads: next().parse().unwrap(),
        units: next().parse().unwrap(),
        pause: next().parse().unwrap(),
        plan: next(),
    })
}

/// A scan in a process of its own.
pub struct Process {
    child: Child,
    report: tempfile::TempDir,
}

/// Starts a scan in a process of its own: this test program again, with only `child_process`.
pub fn child(plan: &str, directory: &Path, threads: usize, units: usize, pause: u64) -> Process {
    let report = tempfile::tempdir().unwrap();
    let request =
        format!("{}|{}|{threads}|{units}|{pause}|{plan}", directory.display(), report.path().join("report").display());
    let child = Command::new(std::env::current_exe().unwrap())
        .args(["child_process", "--exact", "--ignored", "--test-threads=1"])
        .env(VARIABLE, request)
        .stdout(Stdio::null())
        .spawn()
        .unwrap();
    Process { child, report }
}

impl Process {
    pub fn try_wait(&mut self) -> std::io::Result<Option<ExitStatus>> {
        self.child.try_wait()
    }

    /// SIGKILL.
    pub fn kill(&mut self) -> std::io::Result<()> {
        self.child.kill()
    }

    pub fn wait(&mut self) -> std::io::Result<ExitStatus> {
        self.child.wait()
    }

    /// The families that the finished process computed.
    pub fn families(&self) -> Vec<String> {
        let text = std::fs::read_to_string(self.report.path().join("report")).unwrap();
        let line = text.lines().next().unwrap();
        line.split(';').filter(|name| !name.is_empty()).map(str::to_string).collect()
    }
}
