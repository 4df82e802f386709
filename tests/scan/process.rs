//! Scans in processes of their own, which can be killed.

use std::path::{Path, PathBuf};
use std::process::{Child, Command, ExitStatus, Stdio};

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
