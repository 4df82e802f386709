//! Outside references: general-purpose libraries from the package registries on the same problem
//! (numpy: the chain by brute force; mpmath: long-range Bethe equations and the wrapping integral),
//! and the exact values that an independent program in PARI/GP wrote down.
//!
//! The Python scripts are in `tests/outside/`; their virtual environment lives in the target
//! directory. They are skipped only on a machine without any Python, and say so.

use loopladder::record::{Record, Term};
use std::collections::BTreeMap;
use std::io::Write as _;
use std::path::{Path, PathBuf};
use std::process::Command;
use std::sync::{Mutex, OnceLock};

const PROGRAM: &str = env!("CARGO_BIN_EXE_loopladder");

fn here(path: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("tests").join(path)
}

/// Said past the capture of the test harness, so that it is seen also when the test passes.
fn say(message: &str) {
    let _ = writeln!(std::io::stderr(), "{message}");
}

/// The interpreter of a virtual environment with what `requirements.txt` asks for.
fn python() -> Option<&'static Path> {
    static READY: OnceLock<Option<PathBuf>> = OnceLock::new();
    READY
        .get_or_init(|| {
            let runs = |name: &&&str| Command::new(name).arg("--version").output().is_ok_and(|o| o.status.success());
            let Some(system) = ["python3", "python"].iter().find(runs) else {
                say("SKIPPED: no Python on this machine, so the outside references in tests/outside were not run");
                return None;
            };
            let environment = Path::new(env!("CARGO_TARGET_TMPDIR")).join("outside-python");
            let interpreter = environment.join("bin").join("python");
            let complete = |python: &Path| {
                Command::new(python).args(["-c", "import mpmath, numpy"]).output().is_ok_and(|o| o.status.success())
            };
            if !complete(&interpreter) {
                let run = |command: &mut Command| {
                    let output = command.output().unwrap();
                    assert!(
                        output.status.success(),
                        "{command:?} failed; the outside references need Python's venv module (Debian: python3-venv) and pip:\n{}{}",
                        String::from_utf8_lossy(&output.stdout),
                        String::from_utf8_lossy(&output.stderr)
                    );
                };
                run(Command::new(system).args(["-m", "venv"]).arg(&environment));
                run(Command::new(&interpreter).args(["-m", "pip", "install", "--quiet", "-r"]).arg(here("outside/requirements.txt")));
            }
            Some(interpreter)
        })
        .as_deref()
}

/// One script at a time: each uses all the cores it can get.
fn script(name: &str, expected_lines: usize) {
    static ONE: Mutex<()> = Mutex::new(());
    let guard = ONE.lock();
    let Some(python) = python() else { return };
    let output = Command::new(python).arg("-B").arg(here("outside").join(name)).arg(PROGRAM).output().unwrap();
    let text = String::from_utf8_lossy(&output.stdout);
    assert!(output.status.success(), "{name}:\n{text}{}", String::from_utf8_lossy(&output.stderr));
    assert_eq!(text.lines().filter(|line| line.starts_with("ok ")).count(), expected_lines, "{text}");
    drop(guard);
}

#[test]
fn one_loop_spectrum_by_brute_force_on_the_chain() {
    script("spectrum.py", 12);
}

#[test]
fn long_range_bethe_equations_at_small_coupling() {
    script("bethe.py", 7);
}

#[test]
fn wrapping_integral_by_quadrature() {
    script("wrapping.py", 8);
}

/// Zeta arguments → coefficients, without zero terms.
type Terms = BTreeMap<String, Vec<String>>;

fn of_record(terms: &[Term]) -> Terms {
    terms
        .iter()
        .filter(|term| term.value.iter().any(|c| c != "0"))
        .map(|term| (serde_json::to_string(&term.zeta).unwrap(), term.value.clone()))
        .collect()
}

fn of_reference(terms: &serde_json::Value) -> Terms {
    let parsed: Vec<Term> = serde_json::from_value(terms.clone()).unwrap();
    of_record(&parsed)
}

/// Everything that is compared of one orbit, in a form that sorts.
type Fingerprint = (Vec<String>, String, usize, bool, Vec<Terms>, Terms);

fn compare_with_reference(path: &Path) {
    let reference: serde_json::Value = serde_json::from_slice(&std::fs::read(path).unwrap()).unwrap();
    let number = |key: &str| reference[key].as_u64().unwrap().to_string();
    let output = Command::new(PROGRAM)
        .args(["series", &number("length"), &number("magnons"), "--format", "json"])
        .output()
        .unwrap();
    assert!(output.status.success(), "{}", String::from_utf8_lossy(&output.stderr));
    let record = Record::from_json(&String::from_utf8(output.stdout).unwrap(), "series").unwrap();
    let mut ours: Vec<Fingerprint> = Vec::new();
    for orbit in &record.orbits {
        let gamma = |n: usize| {
            let coefficient = orbit.coefficient(n).unwrap();
            let parts = coefficient.parts.as_ref().filter(|_| n == record.length);
            of_record(parts.map_or(&coefficient.terms, |parts| &parts.asymptotic))
        };
        let last = orbit.coefficient(record.length).unwrap();
        ours.push((
            orbit.minimal_polynomial.clone(),
            serde_json::to_string(&orbit.parity).unwrap(),
            orbit.members,
            orbit.singular,
            (1..=record.length).map(gamma).collect(),
            of_record(&last.parts.as_ref().unwrap().finite_size),
        ));
    }
    let mut theirs: Vec<Fingerprint> = Vec::new();
    for orbit in reference["orbits"].as_array().unwrap() {
        theirs.push((
            serde_json::from_value(orbit["minimal_polynomial"].clone()).unwrap(),
            orbit["parity"].to_string(),
            orbit["members"].as_u64().unwrap() as usize,
            orbit["singular"].as_bool().unwrap(),
            orbit["gamma"].as_array().unwrap().iter().map(of_reference).collect(),
            of_reference(&orbit["finite_size"]),
        ));
    }
    ours.sort();
    theirs.sort();
    assert_eq!(ours.len(), theirs.len(), "{}", path.display());
    for (a, b) in ours.iter().zip(&theirs) {
        assert_eq!(a, b, "{}", path.display());
    }
}

/// `tests/reference/` was written by `tests/baseline/series.gp` (PARI/GP 2.15, exact number-field
/// arithmetic, its own code throughout): all families with 4 ≤ L ≤ 12, complete through loop L.
#[test]
fn exact_values_of_an_independent_program() {
    let mut files: Vec<PathBuf> = std::fs::read_dir(here("reference"))
        .unwrap()
        .map(|entry| entry.unwrap().path())
        .filter(|path| path.extension().is_some_and(|extension| extension == "json"))
        .collect();
    files.sort();
    assert_eq!(files.len(), 25, "one file for each family with 4 <= L <= 12");
    for file in &files {
        compare_with_reference(file);
    }
}
