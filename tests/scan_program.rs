//! `loopladder scan` as a user meets it: the program itself, run, interrupted and killed.

#[path = "scan/place.rs"]
mod place;

use place::{TinyDisk, contents};
use std::path::Path;
use std::process::{Child, Command, Output, Stdio};
use std::time::{Duration, Instant};

fn program() -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_loopladder"));
    command.env_remove("NO_COLOR").stdin(Stdio::null());
    command
}

fn plan(directory: &Path, text: &str) -> String {
    let path = directory.join("plan.toml");
    std::fs::write(&path, text).unwrap();
    path.display().to_string()
}

fn scan(plan: &str, out: &Path, more: &[&str]) -> Output {
    program().args(["scan", plan, "--out"]).arg(out).args(more).output().unwrap()
}

fn out(output: &Output) -> String {
    String::from_utf8(output.stdout.clone()).unwrap()
}

fn err(output: &Output) -> String {
    String::from_utf8(output.stderr.clone()).unwrap()
}

fn signal(child: &Child, name: &str) {
    assert!(Command::new("kill").args([name, &child.id().to_string()]).status().unwrap().success());
}

#[test]
fn the_default_plan_gives_nine_records() {
    let place = tempfile::tempdir().unwrap();
    let plan = concat!(env!("CARGO_MANIFEST_DIR"), "/config/first-table.toml");
    let one = scan(plan, &place.path().join("one"), &["--threads", "1"]);
    assert!(one.status.success(), "{}", err(&one));
    assert!(out(&one).contains("9 families in") && out(&one).contains(": 9 computed;"), "{}", out(&one));
    let two = scan(plan, &place.path().join("two"), &["--threads", "2", "--memory", "1G"]);
    assert!(two.status.success(), "{}", err(&two));
    let files = contents(&place.path().join("one"));
    assert_eq!(files.len(), 9);
    assert_eq!(files, contents(&place.path().join("two")));
    // L = 6, M = 3: 12, −36, 252 (BDS, hep-th/0405001; BO, JHEP 09 (2006) 016, eq. 4.17).
    let record = loopladder::record::read(&place.path().join("one/L06M03.json")).unwrap();
    let values: Vec<&str> = record.orbits[0].coefficients[..3].iter().map(|c| c.terms[0].value[0].as_str()).collect();
    assert_eq!(values, ["12", "-36", "252"]);
    // Again: all kept, and nothing on standard error.
    let again = scan(plan, &place.path().join("one"), &[]);
    assert!(out(&again).contains(": 9 kept;"), "{}", out(&again));
    assert_eq!(err(&again), "");
}

#[test]
fn a_dry_run_says_what_would_be_done_and_does_nothing() {
    let place = tempfile::tempdir().unwrap();
    let plan = plan(place.path(), "[[families]]\nlengths = [6, 8]\n");
    let results = place.path().join("results");
    let output = scan(&plan, &results, &["--dry-run", "--threads", "2"]);
    assert!(output.status.success(), "{}", err(&output));
    let text = out(&output);
    assert!(text.contains("(8, 3)             3"), "{text}");
    assert!(text.contains("5 of 5 to compute; estimated time "), "{text}");
    assert!(!results.exists());
    let shard = scan(&plan, &results, &["--dry-run", "--shard", "1/2"]);
    assert!(out(&shard).contains("shard 1/2: ") && out(&shard).contains(" % of the estimated time"), "{}", out(&shard));
    let tight = scan(&plan, &results, &["--dry-run", "--memory", "1K"]);
    assert!(out(&tight).contains("over the memory bound: would be refused"), "{}", out(&tight));
}

#[test]
fn mistakes_have_their_exit_code_and_compute_nothing() {
    let place = tempfile::tempdir().unwrap();
    let good = plan(place.path(), "[[families]]\nlengths = 4\n");
    let results = place.path().join("results");
    std::fs::write(place.path().join("file"), "").unwrap();
    for (text, options, code, words) in [
        (Some("[[families]]\nlengths = 4\nloop = 3\n"), &[][..], 2, "plan.toml:3:1: unknown key \"loop\""),
        (Some(""), &[], 2, "plan.toml:1:1: the plan is empty"),
        (Some("[[families]\n"), &[], 2, "plan.toml:1:"),
        (None, &["--threads", "0"], 2, "--threads 0"),
        (None, &["--threads", "many"], 2, "--threads"),
        (None, &["--memory", "lots"], 2, "not a memory size"),
        (None, &["--shard", "5/4"], 2, "not a shard"),
        (None, &["--colour"], 2, "--colour"),
        (None, &["--memory", "1K"], 1, "families failed"),
    ] {
        let name = text.map_or_else(
            || good.clone(),
            |text| {
                let path = place.path().join("bad/plan.toml");
                std::fs::create_dir_all(path.parent().unwrap()).unwrap();
                std::fs::write(&path, text).unwrap();
                path.display().to_string()
            },
        );
        let output = scan(&name, &results, options);
        let message = err(&output);
        assert_eq!(output.status.code(), Some(code), "{options:?} {text:?}: {message}");
        assert!(message.contains(words) && !message.contains("panicked"), "{options:?} {text:?}: {message}");
        assert!(!results.exists() || contents(&results).keys().all(|name| !name.ends_with("json")));
    }
    let file = scan(&good, &place.path().join("file"), &[]);
    assert_eq!(file.status.code(), Some(2), "{}", err(&file));
    let missing = scan("nowhere.toml", &results, &[]);
    assert_eq!(missing.status.code(), Some(6));
    let nowhere = program().args(["scan", &good]).output().unwrap();
    assert!(nowhere.status.code() == Some(2) && err(&nowhere).contains("give --out DIR"), "{}", err(&nowhere));
}

/// A plan that cannot be through in the time of a test, stopped by each signal that asks politely.
#[test]
fn a_signal_ends_the_scan_within_two_seconds_with_a_summary() {
    let place = tempfile::tempdir().unwrap();
    let plan = plan(place.path(), "[[families]]\nlengths = \"14-16\"\n");
    for (index, name) in ["-INT", "-TERM"].into_iter().enumerate() {
        let results = place.path().join(format!("results-{index}"));
        let child = program()
            .args(["scan", &plan, "--threads", "2", "--out"])
            .arg(&results)
            .stdout(Stdio::piped())
            .stderr(Stdio::piped())
            .spawn()
            .unwrap();
        std::thread::sleep(Duration::from_millis(1200));
        signal(&child, name);
        let begin = Instant::now();
        let output = child.wait_with_output().unwrap();
        let took = begin.elapsed();
        assert!(took < Duration::from_secs(2), "{took:?}");
        assert_eq!(output.status.code(), Some(7), "{}", err(&output));
        assert!(out(&output).contains("interrupted: everything finished is kept"), "{}", out(&output));
        assert!(err(&output).contains("loopladder: interrupted"), "{}", err(&output));
        place::all_records_are_sound(&results);
    }
}

/// The smaller version of scripts/test-kills: six kills, lengths 4 to 9.
#[test]
fn kill_nine_and_resume_gives_the_same_bytes() {
    let place = tempfile::tempdir().unwrap();
    let plan = plan(place.path(), "[[families]]\nlengths = \"4-9\"\n");
    let begin = Instant::now();
    assert!(scan(&plan, &place.path().join("quiet"), &[]).status.success());
    let whole = begin.elapsed();
    let killed = place.path().join("killed");
    for kill in 0..6u32 {
        let mut child = program()
            .args(["scan", &plan, "--out"])
            .arg(&killed)
            .stdout(Stdio::null())
            .stderr(Stdio::null())
            .spawn()
            .unwrap();
        // Six different moments of the first half of an undisturbed run.
        std::thread::sleep(whole * (kill * 5 % 6 + 1) / 12);
        child.kill().unwrap();
        child.wait().unwrap();
        place::all_records_are_sound(&killed);
    }
    let last = scan(&plan, &killed, &[]);
    assert!(last.status.success(), "{}", err(&last));
    assert_eq!(contents(&place.path().join("quiet")), contents(&killed));
}

#[test]
fn four_shards_and_one_run_give_the_same_directory() {
    let place = tempfile::tempdir().unwrap();
    let plan = plan(place.path(), "[[families]]\nlengths = \"4-8\"\n");
    assert!(scan(&plan, &place.path().join("whole"), &[]).status.success());
    let mut children: Vec<Child> = (1..=4)
        .map(|index| {
            program()
                .args(["scan", &plan, "--threads", "1", "--shard", &format!("{index}/4"), "--out"])
                .arg(place.path().join("shards"))
                .stdout(Stdio::null())
                .stderr(Stdio::null())
                .spawn()
                .unwrap()
        })
        .collect();
    for child in &mut children {
        assert!(child.wait().unwrap().success());
    }
    assert_eq!(contents(&place.path().join("whole")), contents(&place.path().join("shards")));
}

#[test]
fn a_closed_pipe_is_quiet_and_a_full_one_is_an_error() {
    let place = tempfile::tempdir().unwrap();
    let plan = plan(place.path(), "[[families]]\nlengths = 4\n");
    let mut child = program()
        .args(["scan", &plan, "--dry-run", "--out"])
        .arg(place.path().join("results"))
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .unwrap();
    drop(child.stdout.take());
    let output = child.wait_with_output().unwrap();
    assert!(output.status.success() && output.stderr.is_empty(), "{}", err(&output));
    if let Ok(full) = std::fs::OpenOptions::new().write(true).open("/dev/full") {
        let output = program().args(["scan", &plan, "--dry-run", "--out", "results"]).stdout(full).output().unwrap();
        assert_eq!(output.status.code(), Some(6), "{}", err(&output));
    }
}

#[test]
fn a_full_disk_is_said_and_the_next_run_completes() {
    let Some(disk) = TinyDisk::mount("size=256k") else { return };
    let place = tempfile::tempdir().unwrap();
    let plan = plan(place.path(), "[[families]]\nlengths = \"4-8\"\n");
    disk.fill(16_000);
    let output = scan(&plan, disk.path(), &["--threads", "2"]);
    assert_eq!(output.status.code(), Some(6), "{}", err(&output));
    assert!(err(&output).contains("nothing more can be stored"), "{}", err(&output));
    place::all_records_are_sound(disk.path());
    disk.empty();
    assert!(scan(&plan, disk.path(), &[]).status.success());
    assert!(scan(&plan, &place.path().join("quiet"), &[]).status.success());
    assert_eq!(contents(disk.path()), contents(&place.path().join("quiet")));
}

/// Inside one long family, with the engine: the next run goes on from the primes that were finished.
#[test]
fn a_long_family_goes_on_from_its_primes() {
    let place = tempfile::tempdir().unwrap();
    let plan = plan(place.path(), "[[families]]\nlengths = 12\nmagnons = 5\n");
    let killed = place.path().join("killed");
    let mut child = program()
        .args(["scan", &plan, "--threads", "1", "--out"])
        .arg(&killed)
        .stdout(Stdio::null())
        .stderr(Stdio::null())
        .spawn()
        .unwrap();
    let units = killed.join(".work/L12M05.units");
    let begin = Instant::now();
    while std::fs::metadata(&units).map_or(0, |file| file.len()) < 1000 {
        assert!(begin.elapsed() < Duration::from_secs(60) && child.try_wait().unwrap().is_none());
        std::thread::sleep(Duration::from_millis(2));
    }
    child.kill().unwrap();
    child.wait().unwrap();
    assert!(!killed.join("L12M05.json").exists());
    let again = scan(&plan, &killed, &["--threads", "2"]);
    assert!(again.status.success(), "{}", err(&again));
    assert!(err(&again).contains("(12, 5): going on from "), "{}", err(&again));
    assert!(scan(&plan, &place.path().join("quiet"), &[]).status.success());
    assert_eq!(contents(&place.path().join("quiet")), contents(&killed));
}

#[test]
fn certificates_tables_and_filters_from_one_plan() {
    let place = tempfile::tempdir().unwrap();
    let plan = plan(
        place.path(),
        "certificates = true\nexport = [\"csv\", \"html\"]\n\
         [[families]]\nlengths = \"4-7\"\n\
         [[families]]\nlengths = 9\nmagnons = 4\nparity = \"symmetric\"\n\
         [[families]]\nlengths = 8\nmagnons = 3\nloops = 4\nmax_degree = 1\n",
    );
    let results = place.path().join("results");
    let output = scan(&plan, &results, &[]);
    assert!(output.status.success(), "{}", err(&output));
    let names: Vec<String> = contents(&results).into_keys().collect();
    // (9, 4): two symmetric primaries in one orbit, one pair left out. (8, 3): one rational singular
    // state, and a pair of degree 1 (both with gamma_1 rational).
    assert!(
        names.iter().any(|name| name.starts_with("L09M04-")) && !names.contains(&"L09M04.json".to_string()),
        "{names:?}"
    );
    for name in ["L04M02.json", "L04M02.certificate.json", "L07M03.json", "table.csv", "table.html"] {
        assert!(names.contains(&name.to_string()), "{name} is missing: {names:?}");
    }
    let audit = program().arg("audit").arg(&results).output().unwrap();
    // Everything stored is proved; of (9, 4) the audit says that the pair is not there.
    assert!(err(&audit).contains("nothing is refuted, but 1 of 8 records are not covered in full"), "{}", err(&audit));
    assert!(
        out(&audit).contains("L9M4-2  2 symmetric") && out(&audit).contains("hold 2 of 4 primaries"),
        "{}",
        out(&audit)
    );
    // Changing nothing changes nothing.
    let before = contents(&results);
    assert!(scan(&plan, &results, &[]).status.success());
    assert_eq!(before, contents(&results));
}
