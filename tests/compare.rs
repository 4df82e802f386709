//! `loopladder compare` on the demonstration data, against records computed here.

use std::path::{Path, PathBuf};
use std::process::{Command, Output};
use std::sync::OnceLock;

const PROGRAM: &str = env!("CARGO_BIN_EXE_loopladder");

/// Records of all families with 4 ≤ L ≤ 8, as in the default plan.
fn results() -> &'static Path {
    static RESULTS: OnceLock<tempfile::TempDir> = OnceLock::new();
    RESULTS
        .get_or_init(|| {
            let directory = tempfile::tempdir().unwrap();
            for length in 4..=8usize {
                for magnons in 2..=length / 2 {
                    let output = Command::new(PROGRAM)
                        .args(["series", &length.to_string(), &magnons.to_string(), "--format", "json"])
                        .output()
                        .unwrap();
                    assert!(output.status.success(), "{}", String::from_utf8_lossy(&output.stderr));
                    std::fs::write(directory.path().join(format!("L{length:02}M{magnons:02}.json")), output.stdout)
                        .unwrap();
                }
            }
            directory
        })
        .path()
}

fn demo(name: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("demo-data").join(name)
}

fn compare(reference: &Path, more: &[&str]) -> Output {
    Command::new(PROGRAM).arg("compare").arg(results()).arg(reference).args(more).output().unwrap()
}

fn entries(output: &Output) -> Vec<serde_json::Value> {
    let whole: serde_json::Value = serde_json::from_slice(&output.stdout).unwrap();
    whole["entries"].as_array().unwrap().clone()
}

#[test]
fn the_literature_agrees_wherever_the_results_have_the_value() {
    let output = compare(&demo("literature.toml"), &["--format", "json"]);
    assert_eq!(output.status.code(), Some(0), "{}", String::from_utf8_lossy(&output.stderr));
    let entries = entries(&output);
    let count = |answer: &str| entries.iter().filter(|entry| entry["answer"] == answer).count();
    assert_eq!((count("agrees exactly"), count("agrees to the printed digits"), count("differs")), (31, 15, 0));
    // (9, 2) is no family of the default plan, and Konishi's loops 5 to 8 need the spectral curve.
    for missing in entries.iter().filter(|entry| entry["answer"] == "not in results") {
        assert!(
            missing["length"] == 9 || (missing["length"] == 4 && missing["loop"].as_u64().unwrap() > 4),
            "{missing}"
        );
    }
    assert_eq!(compare(&demo("literature.toml"), &["--require-all"]).status.code(), Some(1));
}

#[test]
fn the_draft_table_has_exactly_the_three_planted_faults() {
    let output = compare(&demo("draft-table.toml"), &["--format", "json"]);
    assert_eq!(output.status.code(), Some(1));
    let differing: Vec<serde_json::Value> = entries(&output)
        .into_iter()
        .filter(|entry| entry["answer"] != "agrees exactly" && entry["answer"] != "agrees to the printed digits")
        .collect();
    let places: Vec<String> =
        differing.iter().map(|e| format!("{} {} {} {}", e["length"], e["magnons"], e["loop"], e["answer"])).collect();
    assert_eq!(places, ["5 2 5 \"differs\"", "6 3 3 \"differs\"", "8 4 3 \"differs\""]);
    assert_eq!(differing[0]["difference"], "-360 zeta(5)");
    assert!(differing[1]["hint"].as_str().unwrap().contains("lambda/(8 pi^2)"));
    assert!(differing[2]["hint"].is_null());
}

#[test]
fn what_people_read() {
    let output = compare(&demo("draft-table.toml"), &[]);
    insta::assert_snapshot!(String::from_utf8(output.stdout).unwrap());
    assert_eq!(String::from_utf8(output.stderr).unwrap(), "loopladder: 3 of 30 values differ from the records\n");
}

#[test]
fn bad_files_get_their_own_exit_codes() {
    let directory = tempfile::tempdir().unwrap();
    let bad = directory.path().join("bad.toml");
    std::fs::write(&bad, [0xff, 0xfe, 0x00]).unwrap();
    assert_eq!(compare(&bad, &[]).status.code(), Some(2));
    std::fs::write(
        &bad,
        "coupling = \"lambda/(16 pi^2)\"\n[[entry]]\nfamily = [4, 2]\nloop = 1\nvalue = \"1/(w-12)\"\n",
    )
    .unwrap();
    let output = compare(&bad, &[]);
    assert_eq!(output.status.code(), Some(2));
    assert!(String::from_utf8_lossy(&output.stderr).contains("entry 1"));
    assert_eq!(compare(&directory.path().join("absent.toml"), &[]).status.code(), Some(6));
}
