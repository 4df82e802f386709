//! Reports as a user meets them: the program itself, and the tools its output is made for. A test
//! whose outside tool (pdflatex, Chromium, pandoc) is not installed says so and is skipped.

use loopladder::engine::{NoCheckpoint, Request, compute};
use loopladder::family::Family;
use loopladder::observer::Silent;
use loopladder::record::Record;
use loopladder::report::finite::{Point, estimates};
use rug::Float;
use std::path::Path;
use std::process::{Command, Output};
use std::sync::OnceLock;

fn program(words: &[&str]) -> Output {
    Command::new(env!("CARGO_BIN_EXE_loopladder")).args(words).output().unwrap()
}

fn text(output: &Output) -> String {
    assert!(output.status.success(), "{}", String::from_utf8_lossy(&output.stderr));
    String::from_utf8(output.stdout.clone()).unwrap()
}

fn family(length: usize, magnons: usize) -> Record {
    let request = Request::new(Family::new(length, magnons).unwrap(), length);
    compute(&request, None, &NoCheckpoint, &Silent).unwrap().record
}

/// A directory with the records of all families of length 4 to 8, computed once.
fn plan() -> &'static Path {
    static DIRECTORY: OnceLock<tempfile::TempDir> = OnceLock::new();
    DIRECTORY
        .get_or_init(|| {
            let directory = tempfile::tempdir().unwrap();
            for length in 4..=8 {
                for magnons in (0..=length / 2).filter(|magnons| *magnons != 1) {
                    let record = family(length, magnons);
                    let name = loopladder::record::file_name(Family::new(length, magnons).unwrap());
                    std::fs::write(directory.path().join(name), record.to_json()).unwrap();
                }
            }
            directory
        })
        .path()
}

fn available(tool: &str) -> bool {
    let found = Command::new(tool).arg("--version").output().is_ok_and(|output| output.status.success());
    if !found {
        eprintln!("SKIPPED: {tool} is not installed");
    }
    found
}

/// The default plan's table compiles as it is; after the two runs a longtable needs, no box is
/// overfull by more than 10 pt and nothing is undefined.
#[test]
fn latex_compiles() {
    if !available("pdflatex") {
        return;
    }
    let directory = tempfile::tempdir().unwrap();
    let results = plan().to_str().unwrap();
    for coupling in ["lambda/16pi^2", "lambda"] {
        let out = directory.path().join("table.tex");
        text(&program(&[
            "export",
            results,
            "--format",
            "latex",
            "--coupling",
            coupling,
            "--out",
            out.to_str().unwrap(),
        ]));
        let mut log = String::new();
        for _ in 0..2 {
            let run = Command::new("pdflatex")
                .args(["-interaction=nonstopmode", "-halt-on-error", "table.tex"])
                .current_dir(directory.path())
                .output()
                .unwrap();
            log = String::from_utf8_lossy(&run.stdout).into_owned();
            assert!(run.status.success(), "{log}");
        }
        assert!(!log.contains("Undefined") && !log.contains("undefined"), "{log}");
        for line in log.lines().filter(|line| line.starts_with("Overfull")) {
            let size: f64 = line.split_once('(').unwrap().1.split_once("pt").unwrap().0.parse().unwrap();
            assert!(size <= 10.0, "{line}");
        }
    }
}

/// Appended to the page: presses, types, and writes what it sees into the document.
const PROBE: &str = r##"<script>
addEventListener("load", () => {
  const seen = [];
  const rows = () => Array.from(document.querySelectorAll("#states tbody tr")).filter((row) => !row.hidden);
  const column = (n) => rows().map((row) => row.cells[n].textContent);
  const press = (n) => document.querySelectorAll("#states thead button")[n].click();
  const set = (name, value) => {
    const field = document.getElementById(name);
    field.value = value;
    field.dispatchEvent(new Event("input", { bubbles: true }));
  };
  seen.push("rows=" + rows().length);
  press(7);
  seen.push("ascending=" + column(7).slice(0, 30).join(" "));
  press(7);
  seen.push("descending=" + column(7).slice(0, 30).join(" "));
  seen.push("aria=" + document.querySelectorAll("#states thead th")[7].getAttribute("aria-sort"));
  set("parity", "paired");
  seen.push("paired=" + column(2).sort().join(" "));
  set("parity", "");
  set("length", "8");
  set("search", "l8m4");
  seen.push("found=" + column(2).sort().join(" "));
  seen.push("count=" + document.getElementById("count").textContent);
  location.hash = "#L8M4-1";
  setTimeout(() => {
    seen.push("unfolded=" + document.getElementById("L8M4-1").open);
    const out = document.createElement("pre");
    out.id = "seen";
    out.textContent = seen.join("\n");
    document.body.append(out);
  }, 50);
});
</script>"##;

/// Sorting, filtering, unfolding and the absence of console errors in a real browser.
#[test]
fn page_in_a_browser() {
    let Some(browser) = ["chromium", "chromium-browser"].into_iter().find(|browser| available(browser)) else { return };
    let directory = tempfile::tempdir().unwrap();
    let page = text(&program(&["export", plan().to_str().unwrap(), "--format", "html"]));
    // Nothing from elsewhere: every src and href is a place in the page or data.
    for attribute in ["src=\"", "href=\""] {
        for part in page.split(attribute).skip(1) {
            assert!(part.starts_with('#') || part.starts_with("data:"), "{}", &part[..40]);
        }
    }
    let path = directory.path().join("page.html");
    std::fs::write(&path, page.replace("</body>", &format!("{PROBE}</body>"))).unwrap();
    let profile = directory.path().join("profile");
    let output = Command::new(browser)
        .args(["--headless", "--no-sandbox", "--disable-gpu", "--no-first-run", "--disable-background-networking"])
        .args([
            "--disable-component-update",
            "--disable-sync",
            "--disable-extensions",
            "--enable-logging=stderr",
            "--v=0",
        ])
        .args(["--virtual-time-budget=5000", "--dump-dom"])
        .arg(format!("--user-data-dir={}", profile.display()))
        .arg(format!("file://{}", path.display()))
        .output()
        .unwrap();
    let dom = String::from_utf8_lossy(&output.stdout);
    let messages = String::from_utf8_lossy(&output.stderr);
    let console: Vec<&str> = messages.lines().filter(|line| line.contains("CONSOLE")).collect();
    assert!(console.is_empty(), "{console:?}");
    let seen =
        dom.split("<pre id=\"seen\">").nth(1).expect("the page's script did not run").split("</pre>").next().unwrap();
    let value = |name: &str| {
        seen.lines().find_map(|line| line.strip_prefix(&format!("{name}="))).unwrap_or_else(|| panic!("{name}: {seen}"))
    };
    let numbers = |name: &str| value(name).split(' ').map(|n| n.parse::<f64>().unwrap()).collect::<Vec<f64>>();
    assert!(numbers("ascending").is_sorted() && numbers("ascending").len() > 10, "{seen}");
    assert!(numbers("descending").is_sorted_by(|a, b| a >= b), "{seen}");
    assert_eq!(value("aria"), "descending");
    // The pairs of length up to 8 (counts by parity: the one of L = 7 is in hep-th/0303060).
    assert!(value("paired").contains("L7M3-1"), "{seen}");
    assert!(value("found").starts_with("L8M4-1:1 L8M4-1:2 L8M4-1:3"), "{seen}");
    assert!(value("count").starts_with("3 of "), "{seen}");
    assert_eq!(value("unfolded"), "true");
}

/// pandoc reads the CSV without options: one table with the 15 columns.
#[test]
fn pandoc_reads_the_csv() {
    if !available("pandoc") {
        return;
    }
    let directory = tempfile::tempdir().unwrap();
    let out = directory.path().join("table.csv");
    let record = plan().join("L08M03.json");
    text(&program(&["export", record.to_str().unwrap(), "--format", "csv", "--out", out.to_str().unwrap()]));
    let run = Command::new("pandoc").args(["-f", "csv", "-t", "html"]).arg(&out).output().unwrap();
    let html = text(&run);
    let lines = std::fs::read_to_string(&out).unwrap().lines().count();
    assert_eq!(html.matches("<tr").count(), lines);
    assert_eq!(html.matches("<th>").count() + html.matches("<th ").count(), 15);
}

/// The value from two loops fewer lies within its own stated error of the full one.
#[test]
fn two_loops_fewer() {
    let points = [Point::parse("g=0.1").unwrap(), Point::parse("g=0.2").unwrap()];
    for (length, magnons) in [(8, 2), (8, 4), (10, 5)] {
        let record = family(length, magnons);
        let full = estimates(&record, &[], &points, None, 30).unwrap();
        let fewer = estimates(&record, &[], &points, Some(length - 2), 30).unwrap();
        assert_eq!(full.len(), fewer.len());
        for (full, fewer) in full.iter().zip(&fewer) {
            let distance = Float::with_val(200, &full.sums.mapped - &fewer.sums.mapped).abs();
            assert!(
                distance <= fewer.sums.error,
                "{} {:?} at {}: {distance:.3e} apart, {:.3e} stated",
                full.label,
                full.state,
                full.given,
                fewer.sums.error
            );
        }
    }
}

/// Δ(0.1) and Δ(0.2) of (4, 2), arXiv:1504.06640 (from memory), lie within the printed errors.
#[test]
fn evaluate_against_published_numbers() {
    let output = text(&program(&["evaluate", "4", "2", "--at", "g=0.1,g=0.2", "--format", "json"]));
    let rows: serde_json::Value = serde_json::from_str(&output).unwrap();
    let number = |row: usize, key: &str| rows[row][key].as_str().unwrap().parse::<f64>().unwrap();
    for (row, published, bound) in [(0, 4.115_506_377_945_221, 5e-6), (1, 4.418_859_880_802_351, 5e-3)] {
        assert!((number(row, "delta") - published).abs() <= number(row, "error_estimate"));
        assert!(number(row, "error_estimate") < bound);
    }
    let protected = text(&program(&["evaluate", "6", "0", "--at", "g=0.3"]));
    assert!(protected.contains("± 0"), "{protected}");
}

/// Completions, manual pages and a help text with an example for every command.
#[test]
fn completions_manual_and_help() {
    for shell in ["bash", "zsh", "fish", "elvish", "powershell"] {
        assert!(text(&program(&["completions", shell])).contains("evaluate"));
    }
    let directory = tempfile::tempdir().unwrap();
    text(&program(&["manual", "--out", directory.path().to_str().unwrap()]));
    let pages: Vec<String> =
        std::fs::read_dir(&directory).unwrap().map(|entry| entry.unwrap().file_name().into_string().unwrap()).collect();
    for command in ["series", "evaluate", "export", "plot", "state", "completions", "manual"] {
        assert!(pages.contains(&format!("loopladder-{command}.1")), "{pages:?}");
        let help = text(&program(&[command, "--help"]));
        assert!(help.contains("Example"), "{help}");
    }
}

/// Mistakes end with code 2 (or 6 for files), a message that names the rule, and no output.
#[test]
fn mistakes() {
    let record = plan().join("L08M04.json");
    let record = record.to_str().unwrap();
    let cases: [(&[&str], i32, &str); 10] = [
        (&["state", "6", "3", "L6M3-2"], 2, "its orbits are"),
        (&["evaluate", "4", "2", "--at", "0.1"], 2, "equals sign"),
        (&["evaluate", "4", "2", "--at", "g=0.1", "--loops", "999"], 2, "loops"),
        (&["evaluate", "--at", "g=0.1"], 2, "required"),
        (&["evaluate", "--from", "/nonexistent.json", "--at", "g=0.1"], 6, "cannot read"),
        (&["export", record, "--format", "json", "--coupling", "lambda"], 2, "csv"),
        (&["export", record, "--format", "csv", "--loops", "5-1"], 2, "ascending"),
        (&["export", record, "--format", "csv", "--coupling", "g_YM"], 2, "not a coupling"),
        (&["plot", record, "--out", "picture.gif"], 2, ".svg or .png"),
        (&["plot", record, "--out", "/nonexistent/picture.svg"], 6, "cannot write"),
    ];
    for (words, code, message) in cases {
        let output = program(words);
        let said = String::from_utf8_lossy(&output.stderr);
        assert_eq!(output.status.code(), Some(code), "{words:?}: {said}");
        assert!(said.contains(message) && output.stdout.is_empty(), "{words:?}: {said}");
    }
}
