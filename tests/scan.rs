//! Scans that survive: every promise tested by really doing it, with an invented calculator whose
//! timing can be chosen.

#[path = "scan/invented.rs"]
mod invented;
#[path = "scan/place.rs"]
mod place;
#[path = "scan/process.rs"]
mod process;

use invented::{Invented, Watch};
use loopladder::error::Kind;
use loopladder::family::Family;
use loopladder::scan::{Outcome, Plan, Settings, Shard, State, Summary, prepare, run, survey};
use place::{TinyDisk, contents};
use process::child;
use std::path::Path;
use std::sync::Arc;
use std::sync::atomic::Ordering;
use std::time::{Duration, Instant};

const SMALL: &str = "[[families]]\nlengths = \"4-9\"\n";
const MILLISECOND: Duration = Duration::from_millis(1);

fn settings(directory: &Path, threads: usize) -> Settings {
    Settings { directory: directory.to_path_buf(), threads, memory: None, certificates: false }
}

fn scan_with(
    plan: &str,
    settings: &Settings,
    shard: Option<Shard>,
    calculator: &Arc<Invented>,
    watch: &Arc<Watch>,
) -> Summary {
    let plan = Plan::parse(plan, "plan.toml").unwrap();
    let items = prepare(&plan, &**calculator, settings.certificates, shard);
    run(items, settings, Arc::clone(calculator) as _, Arc::clone(watch) as _).unwrap()
}

fn scan(plan: &str, directory: &Path, threads: usize) -> Summary {
    scan_with(plan, &settings(directory, threads), None, &Arc::new(Invented::new(3, MILLISECOND)), &Arc::default())
}

/// Runs in a process of its own, started by [`child`]; does nothing otherwise.
#[test]
#[ignore = "started by other tests in a process of its own"]
fn child_process() {
    let Some(request) = process::request() else { return };
    let calculator = Arc::new(Invented::new(request.units, Duration::from_millis(request.pause)));
    let watch = Arc::new(Watch::default());
    let summary = scan_with(&request.plan, &settings(&request.directory, request.threads), None, &calculator, &watch);
    summary.verdict().unwrap();
    let computed: Vec<String> = calculator.families.lock().unwrap().iter().map(ToString::to_string).collect();
    std::fs::write(
        &request.report,
        format!(
            "{}\n{}\n{}",
            computed.join(";"),
            calculator.computed.load(Ordering::SeqCst),
            watch.units_found.load(Ordering::SeqCst)
        ),
    )
    .unwrap();
}

#[test]
fn same_files_whatever_the_threads() {
    let (one, three) = (tempfile::tempdir().unwrap(), tempfile::tempdir().unwrap());
    let summary = scan(SMALL, one.path(), 1);
    assert_eq!(summary.count(|outcome| matches!(outcome, Outcome::Computed { records: 1, .. })), 12);
    summary.verdict().unwrap();
    scan(SMALL, three.path(), 3);
    let files = contents(one.path());
    assert_eq!(files.len(), 12, "one record for each family and nothing else: {:?}", files.keys());
    assert_eq!(files, contents(three.path()));
}

#[test]
fn complete_records_are_kept_untouched() {
    let directory = tempfile::tempdir().unwrap();
    scan(SMALL, directory.path(), 2);
    let times = |directory: &Path| {
        let mut times: Vec<_> = std::fs::read_dir(directory)
            .unwrap()
            .map(|entry| (entry.as_ref().unwrap().file_name(), entry.unwrap().metadata().unwrap().modified().unwrap()))
            .collect();
        times.sort();
        times
    };
    let before = times(directory.path());
    let calculator = Arc::new(Invented::new(3, MILLISECOND));
    let summary = scan_with(SMALL, &settings(directory.path(), 2), None, &calculator, &Arc::default());
    assert_eq!(summary.count(|outcome| matches!(outcome, Outcome::Kept)), 12);
    assert!(calculator.families.lock().unwrap().is_empty());
    assert_eq!(before, times(directory.path()));
}

/// Killed at random moments until it is through: the same bytes as an undisturbed run.
#[test]
fn kill_nine_at_random_moments() {
    let quiet = tempfile::tempdir().unwrap();
    scan_with(SMALL, &settings(quiet.path(), 2), None, &Arc::new(Invented::new(4, 20 * MILLISECOND)), &Arc::default());
    let disturbed = tempfile::tempdir().unwrap();
    let mut kills = 0;
    for attempt in 0..200u32 {
        let mut process = child(SMALL, disturbed.path(), 2, 4, 20);
        // Spread over 60 … 460 ms after the start, no two alike.
        std::thread::sleep(Duration::from_millis(u64::from(60 + attempt * 7919 % 400)));
        if process.try_wait().unwrap().is_some() {
            break;
        }
        process.kill().unwrap();
        process.wait().unwrap();
        kills += 1;
        place::all_records_are_sound(disturbed.path());
    }
    assert!(kills >= 3, "killed only {kills} times; the scan is too short for this test");
    assert!(child(SMALL, disturbed.path(), 2, 4, 20).wait().unwrap().success());
    assert_eq!(contents(quiet.path()), contents(disturbed.path()));
}

/// Inside one long family: a killed scan loses about a second of units, not the family.
#[test]
fn a_long_family_goes_on_from_its_units() {
    let plan = "[[families]]\nlengths = 8\nmagnons = 3\n";
    let directory = tempfile::tempdir().unwrap();
    let mut process = child(plan, directory.path(), 1, 100, 20);
    std::thread::sleep(Duration::from_millis(2600));
    process.kill().unwrap();
    process.wait().unwrap();
    assert!(!directory.path().join("L08M03.json").exists());
    let calculator = Arc::new(Invented::new(100, MILLISECOND));
    let watch = Arc::new(Watch::default());
    scan_with(plan, &settings(directory.path(), 1), None, &calculator, &watch).verdict().unwrap();
    let found = watch.units_found.load(Ordering::SeqCst);
    assert!(found >= 40, "{found} units survived");
    assert_eq!(calculator.reused.load(Ordering::SeqCst), found);
    assert_eq!(calculator.computed.load(Ordering::SeqCst), 200 - found);
    let quiet = tempfile::tempdir().unwrap();
    scan_with(plan, &settings(quiet.path(), 1), None, &Arc::new(Invented::new(100, Duration::ZERO)), &Arc::default());
    assert_eq!(contents(quiet.path()), contents(directory.path()));
}

/// A second scan on the same directory takes other families; none is computed twice.
#[test]
fn two_scans_share_the_work() {
    let directory = tempfile::tempdir().unwrap();
    let mut first = child(SMALL, directory.path(), 1, 4, 30);
    let mut second = child(SMALL, directory.path(), 1, 4, 30);
    assert!(first.wait().unwrap().success() && second.wait().unwrap().success());
    let (first, second) = (first.families(), second.families());
    assert!(!first.is_empty() && !second.is_empty(), "{first:?} {second:?}");
    let mut all = [first, second].concat();
    all.sort();
    let count = all.len();
    all.dedup();
    assert_eq!((count, all.len()), (12, 12), "a family was computed twice or not at all");
    assert_eq!(contents(directory.path()).len(), 12);
}

#[test]
fn stopping_takes_less_than_two_seconds() {
    for (attentive, pause) in [(true, 50), (false, 60_000)] {
        let directory = tempfile::tempdir().unwrap();
        let calculator = Arc::new(Invented { attentive, ..Invented::new(100, Duration::from_millis(pause)) });
        let begin = Instant::now();
        let watch = Arc::new(Watch { cancel_at: Some(begin + Duration::from_millis(200)), ..Watch::default() });
        let summary = scan_with(SMALL, &settings(directory.path(), 2), None, &calculator, &watch);
        let took = begin.elapsed();
        assert!(took < Duration::from_millis(2200), "{took:?}");
        assert!(summary.interrupted);
        assert_eq!(summary.verdict().unwrap_err().kind(), Kind::Interrupted);
        assert!(summary.count(|outcome| matches!(outcome, Outcome::Interrupted)) >= 1);
        assert!(summary.text().contains("not started") && summary.text().contains("run the same command again"));
    }
}

#[test]
fn one_failing_family_does_not_stop_the_others() {
    let directory = tempfile::tempdir().unwrap();
    let (bad, worse) = (Family::new(8, 3).unwrap(), Family::new(9, 2).unwrap());
    let calculator = Arc::new(Invented { failing: vec![bad], panicking: vec![worse], ..Invented::new(2, MILLISECOND) });
    let summary = scan_with(SMALL, &settings(directory.path(), 2), None, &calculator, &Arc::default());
    assert_eq!(summary.count(|outcome| matches!(outcome, Outcome::Computed { .. })), 10);
    let error = summary.verdict().unwrap_err();
    assert_eq!((error.exit_code(), error.kind()), (1, Kind::Negative));
    let text = summary.text();
    assert!(text.contains("failed (8, 3): invented failure of (8, 3)"), "{text}");
    assert!(text.contains("failed (9, 2): an internal fault") && text.contains("invented panic"), "{text}");
    // Once the cause is gone, only these two are computed.
    let calculator = Arc::new(Invented::new(2, MILLISECOND));
    scan_with(SMALL, &settings(directory.path(), 2), None, &calculator, &Arc::default()).verdict().unwrap();
    assert_eq!(calculator.families.lock().unwrap().len(), 2);
}

#[test]
fn damaged_records_are_moved_aside_and_kept() {
    let directory = tempfile::tempdir().unwrap();
    scan(SMALL, directory.path(), 2);
    let good = contents(directory.path());
    let record = |name: &str| directory.path().join(name);
    let half = &good["L08M03.json"][..good["L08M03.json"].len() / 2];
    std::fs::write(record("L08M03.json"), half).unwrap();
    std::fs::write(record("L08M04.json"), b"\xff\xfe").unwrap();
    std::fs::copy(record("L09M02.json"), record("L09M03.json")).unwrap();
    std::fs::write(record("L04M02.json"), b"").unwrap();
    let watch = Arc::new(Watch::default());
    let calculator = Arc::new(Invented::new(3, MILLISECOND));
    let summary = scan_with(SMALL, &settings(directory.path(), 2), None, &calculator, &watch);
    summary.verdict().unwrap();
    assert_eq!(calculator.families.lock().unwrap().len(), 4);
    let remarks = watch.remarks.lock().unwrap().join("\n");
    assert!(remarks.contains("L08M03.json is damaged and was moved aside to L08M03.json.damaged-1"), "{remarks}");
    assert!(remarks.contains("it is the record of the family (9, 2)"), "{remarks}");
    let after = contents(directory.path());
    assert_eq!(after["L08M03.json.damaged-1"], half);
    assert_eq!(after.len(), 16);
    for (name, bytes) in &good {
        assert_eq!(&after[name], bytes);
    }
    // A second damage of the same record does not write over the first.
    std::fs::write(record("L08M03.json"), b"again").unwrap();
    scan(SMALL, directory.path(), 2).verdict().unwrap();
    assert_eq!(contents(directory.path())["L08M03.json.damaged-2"], b"again");
    assert_eq!(contents(directory.path())["L08M03.json.damaged-1"], half);
}

#[test]
fn shorter_records_are_extended_and_contradictions_are_not_written_over() {
    let directory = tempfile::tempdir().unwrap();
    scan("[[families]]\nlengths = 8\nloops = 3\n", directory.path(), 1);
    let short = contents(directory.path());
    let plan = "[[families]]\nlengths = 8\nloops = 5\n";
    assert_eq!(scan(plan, directory.path(), 1).count(|outcome| matches!(outcome, Outcome::Computed { .. })), 3);
    let long = contents(directory.path());
    assert!(long.len() == 3 && long["L08M03.json"].len() > short["L08M03.json"].len());
    // Fewer loops than are there: kept.
    assert_eq!(
        scan("[[families]]\nlengths = 8\nloops = 2\n", directory.path(), 1).count(|o| matches!(o, Outcome::Kept)),
        3
    );
    assert_eq!(long, contents(directory.path()));
    // A sound record whose loop 2 contradicts the computation.
    let text = String::from_utf8(short["L08M03.json"].clone()).unwrap();
    let mut record = loopladder::record::Record::from_json(&text, "test").unwrap();
    record.orbits[0].coefficients[1].terms[0].value[0] = "123456789".into();
    std::fs::write(directory.path().join("L08M03.json"), record.to_json()).unwrap();
    let summary = scan(plan, directory.path(), 1);
    assert_eq!(summary.verdict().unwrap_err().exit_code(), 1);
    assert!(summary.text().contains("disagree in loop 2 of L8M3-1"), "{}", summary.text());
    let after = contents(directory.path());
    assert_eq!(after["L08M03.json"], record.to_json().into_bytes());
    assert_eq!(after["L08M03.json.contradicting"], long["L08M03.json"]);
}

/// Killed after the last record was written and before clearing up: the next scan finds nothing to
/// compute and clears up, but leaves units that belong to something else.
#[test]
fn leftovers_of_a_killed_scan_go_even_when_nothing_is_left_to_do() {
    let directory = tempfile::tempdir().unwrap();
    scan(SMALL, directory.path(), 2);
    let good = contents(directory.path());
    let work = directory.path().join(".work");
    let leave = |name: &str, text: &str| std::fs::write(work.join(name), text).unwrap();
    std::fs::create_dir(&work).unwrap();
    leave("scan.lock", "");
    leave("L08M03.lock", "");
    let program = loopladder::record::PROGRAM;
    leave("L08M03.units", &format!("loopladder work units 1: {program} (8, 3) through loop 7, certificate false\n"));
    std::fs::write(directory.path().join(".writing-abc"), "half").unwrap();
    scan(SMALL, directory.path(), 2).verdict().unwrap();
    assert_eq!(good, contents(directory.path()));
    let other = format!("loopladder work units 1: {program} (8, 3) through loop 9, certificate false\n");
    std::fs::create_dir(&work).unwrap();
    leave("L08M03.units", &other);
    scan(SMALL, directory.path(), 2).verdict().unwrap();
    assert_eq!(contents(directory.path())[".work/L08M03.units"], other.into_bytes());
}

#[test]
fn certificates_come_with_records() {
    let directory = tempfile::tempdir().unwrap();
    let plan = "[[families]]\nlengths = \"4-6\"\n";
    scan(plan, directory.path(), 1);
    let wanted = Settings { certificates: true, ..settings(directory.path(), 1) };
    let calculator = Arc::new(Invented::new(3, Duration::ZERO));
    scan_with(plan, &wanted, None, &calculator, &Arc::default()).verdict().unwrap();
    let files = contents(directory.path());
    assert_eq!(files.len(), 8);
    assert!(files.contains_key("L06M03.certificate.json"));
    // A half-written certificate is moved aside and made again; the others are kept.
    std::fs::write(directory.path().join("L06M03.certificate.json"), "{\"length\": 6,").unwrap();
    let calculator = Arc::new(Invented::new(3, Duration::ZERO));
    scan_with(plan, &wanted, None, &calculator, &Arc::default()).verdict().unwrap();
    assert_eq!(calculator.families.lock().unwrap().len(), 1);
    let after = contents(directory.path());
    assert_eq!(after["L06M03.certificate.json"], files["L06M03.certificate.json"]);
    assert_eq!(after["L06M03.certificate.json.damaged-1"], b"{\"length\": 6,");
}

#[test]
fn four_shards_give_the_directory_of_one_run() {
    let (whole, parts) = (tempfile::tempdir().unwrap(), tempfile::tempdir().unwrap());
    scan(SMALL, whole.path(), 2);
    let mut families = 0;
    for index in 1..=4 {
        let shard = Some(Shard { index, count: 4 });
        let calculator = Arc::new(Invented::new(3, MILLISECOND));
        let summary = scan_with(SMALL, &settings(parts.path(), 2), shard, &calculator, &Arc::default());
        assert_eq!(summary.count(|outcome| matches!(outcome, Outcome::Computed { .. })), summary.families.len());
        families += summary.families.len();
    }
    assert_eq!(families, 12);
    assert_eq!(contents(whole.path()), contents(parts.path()));
}

#[test]
fn memory_is_bounded_by_estimate() {
    let directory = tempfile::tempdir().unwrap();
    let bounded = Settings { memory: Some(250), ..settings(directory.path(), 4) };
    let calculator = Arc::new(Invented { bytes: 100, ..Invented::new(3, 2 * MILLISECOND) });
    scan_with(SMALL, &bounded, None, &calculator, &Arc::default()).verdict().unwrap();
    assert_eq!(calculator.most.load(Ordering::SeqCst), 200, "two families at a time, not three or four");
    let tight = tempfile::tempdir().unwrap();
    let bounded = Settings { memory: Some(99), ..settings(tight.path(), 4) };
    let summary = scan_with(SMALL, &bounded, None, &calculator, &Arc::default());
    assert_eq!(summary.count(|outcome| matches!(outcome, Outcome::Failed(error) if error.kind() == Kind::Bound)), 12);
    assert!(summary.text().contains("the memory bound is 99 B; raise --memory"), "{}", summary.text());
}

#[test]
fn filters_select_orbits() {
    let directory = tempfile::tempdir().unwrap();
    // (8, 3) has an invented pair and a single orbit; (6, 3) only a single one.
    let plan = "[[families]]\nlengths = [6, 8]\nmagnons = 3\nparity = \"symmetric\"\n";
    scan(plan, directory.path(), 2).verdict().unwrap();
    let files = contents(directory.path());
    assert_eq!(files.keys().collect::<Vec<_>>(), ["L06M03.json", "L08M03-2.json"]);
    place::all_records_are_sound(directory.path());
    // Again: nothing changes. Without the filter: the whole record as well.
    let calculator = Arc::new(Invented::new(3, MILLISECOND));
    scan_with(plan, &settings(directory.path(), 1), None, &calculator, &Arc::default()).verdict().unwrap();
    assert!(calculator.families.lock().unwrap().is_empty());
    assert_eq!(files, contents(directory.path()));
}

#[test]
fn a_full_disk_loses_nothing() {
    let Some(disk) = TinyDisk::mount("size=256k") else { return };
    let quiet = tempfile::tempdir().unwrap();
    scan(SMALL, quiet.path(), 2);
    // Five pages are left: some records fit.
    let free = disk.fill(20_000);
    let summary = scan(SMALL, disk.path(), 1);
    let computed = summary.count(|outcome| matches!(outcome, Outcome::Computed { .. }));
    assert!((1..12).contains(&computed), "{computed} with {free} bytes left");
    let error = summary.verdict().unwrap_err();
    assert_eq!(error.exit_code(), 6, "{}", error.chain());
    assert!(summary.text().contains("has space left"), "{}", summary.text());
    assert_eq!(summary.count(|outcome| matches!(outcome, Outcome::Failed(_))), 1, "the scan ends at the first failure");
    place::all_records_are_sound(disk.path());
    disk.empty();
    scan(SMALL, disk.path(), 2).verdict().unwrap();
    assert_eq!(contents(quiet.path()), contents(disk.path()));
}

fn remount(disk: &TinyDisk, mode: &str) {
    let options = format!("remount,{mode}");
    let status = std::process::Command::new("mount").args(["-o", &options]).arg(disk.path()).status().unwrap();
    assert!(status.success());
}

#[test]
fn a_read_only_directory_is_refused_and_complete_ones_are_still_read() {
    let Some(disk) = TinyDisk::mount("size=1m") else { return };
    scan("[[families]]\nlengths = \"4-6\"\n", disk.path(), 1).verdict().unwrap();
    let before = contents(disk.path());
    remount(&disk, "ro");
    let calculator = Arc::new(Invented::new(3, MILLISECOND));
    let items = prepare(&Plan::parse(SMALL, "plan.toml").unwrap(), &*calculator, false, None);
    let error =
        run(items, &settings(disk.path(), 2), Arc::clone(&calculator) as _, Arc::new(Watch::default())).unwrap_err();
    assert_eq!(error.exit_code(), 6);
    assert!(error.to_string().contains("choose another with --out, or make it writable"), "{error}");
    assert!(calculator.families.lock().unwrap().is_empty(), "nothing is computed that cannot be stored");
    // Everything is there already: no writing is needed, and the scan says so.
    let summary = scan("[[families]]\nlengths = \"4-6\"\n", disk.path(), 1);
    assert_eq!(summary.count(|outcome| matches!(outcome, Outcome::Kept)), 4);
    remount(&disk, "rw");
    assert_eq!(before, contents(disk.path()));
    scan(SMALL, disk.path(), 1).verdict().unwrap();
}

#[test]
fn a_survey_changes_nothing() {
    let directory = tempfile::tempdir().unwrap();
    let plan = Plan::parse(SMALL, "plan.toml").unwrap();
    let calculator = Invented::new(3, MILLISECOND);
    let items = prepare(&plan, &calculator, false, None);
    let missing = directory.path().join("not/there");
    assert!(survey(&items, &settings(&missing, 1)).unwrap().iter().all(|state| *state == State::ToCompute));
    assert!(!missing.exists());
    std::fs::write(directory.path().join("L04M02.json"), "half").unwrap();
    let states = survey(&items, &settings(directory.path(), 1)).unwrap();
    assert_eq!(states[0], State::Damaged(directory.path().join("L04M02.json")));
    assert_eq!(contents(directory.path()).len(), 1);
}
