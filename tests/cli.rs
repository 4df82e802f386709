//! The program as people and scripts meet it: exit codes, messages, pipes, colours, and what the commands
//! of the exact engine print.

use std::process::{Command, Output, Stdio};

fn program() -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_loopladder"));
    command.env("RUST_BACKTRACE", "1").env_remove("NO_COLOR").stdin(Stdio::null());
    command
}

fn run(words: &[&str]) -> Output {
    program().args(words).output().unwrap()
}

fn text(bytes: &[u8]) -> &str {
    std::str::from_utf8(bytes).unwrap()
}

/// Standard output of a run that must succeed without a word on standard error.
fn printed(words: &[&str]) -> String {
    let output = run(words);
    assert_eq!(output.status.code(), Some(0), "{words:?}: {}", text(&output.stderr));
    assert!(output.stderr.is_empty(), "{words:?}: {}", text(&output.stderr));
    String::from_utf8(output.stdout).unwrap()
}

/// A run that must fail with this exit code and a message that contains all of `parts`, nothing else.
fn refused(words: &[&str], code: i32, parts: &[&str]) {
    let output = run(words);
    let message = text(&output.stderr);
    assert_eq!(output.status.code(), Some(code), "{words:?}: {message}");
    assert!(output.stdout.is_empty(), "{words:?} printed a result: {}", text(&output.stdout));
    for part in parts {
        assert!(message.contains(part), "{words:?}: \"{part}\" is not in: {message}");
    }
    for word in ["panicked", "backtrace", "RUST_BACKTRACE", "src/"] {
        assert!(!message.contains(word), "{words:?}: {message}");
    }
}

#[test]
fn bad_families() {
    for command in ["series", "crosscheck"] {
        refused(&[command, "6", "4"], 2, &["(6, 4)", "M <= L/2", "M = 2"]);
        refused(&[command, "6", "1"], 2, &["(6, 1)", "descendant", "M >= 2"]);
        refused(&[command, "1", "0"], 2, &["(1, 0)", "below 2", "L >= 2"]);
        refused(&[command, "0", "0"], 2, &["(0, 0)", "below 2"]);
        refused(&[command, "6", "600"], 2, &["M <= L/2"]);
        refused(&[command, "100000", "2"], 2, &["largest length"]);
        refused(&[command, "99999999999999999999999", "2"], 2, &["99999999999999999999999"]);
        refused(&[command, "-6", "3"], 2, &["-6"]);
        refused(&[command, "six", "3"], 2, &["six"]);
        refused(&[command, "6"], 2, &["<MAGNONS>"]);
    }
}

#[test]
fn bad_loop_orders() {
    refused(&["series", "6", "3", "--loops", "0"], 2, &["0 loops", "at least one"]);
    refused(&["series", "6", "3", "--loops", "7", "--incomplete"], 2, &["7 loops", "through loop L = 6", "at most 6"]);
    refused(&["series", "6", "3", "--loops", "241"], 2, &["241 loops", "240"]);
    refused(&["series", "6", "3", "--loops", "18446744073709551615"], 2, &["240"]);
    refused(&["series", "6", "3", "--loops", "18446744073709551616"], 2, &["--loops"]);
    refused(&["series", "6", "0", "--loops", "18446744073709551615"], 2, &["240"]);
    refused(&["series", "6", "0", "--loops", "0"], 2, &["0 loops"]);
    refused(&["crosscheck", "6", "3", "--loops", "0"], 2, &["1 to 3"]);
    refused(&["crosscheck", "6", "3", "--loops", "4"], 2, &["1 to 3"]);
}

#[test]
fn too_large_families() {
    refused(&["series", "40", "20"], 4, &["(40, 20)", "primaries", "smaller family"]);
    refused(&["series", "200", "100", "--loops", "1"], 4, &["(200, 100)", "smaller family"]);
    refused(&["series", "150", "2", "--loops", "1"], 4, &["120 sites"]);
    refused(&["census", "150", "--magnons", "2"], 4, &["120 sites"]);
    refused(&["crosscheck", "30", "15"], 4, &["(30, 15)", "smaller family"]);
}

#[test]
fn bad_options() {
    refused(&["series", "8", "3", "--state", "L8M3-9"], 2, &["L8M3-9", "L8M3-1, L8M3-2"]);
    refused(&["series", "8", "3", "--state", ""], 2, &["L8M3-1, L8M3-2"]);
    refused(&["series", "8", "3", "--threads", "0"], 2, &["--threads 0", "1 and 4096"]);
    refused(&["series", "8", "3", "--threads", "5000"], 2, &["--threads 5000"]);
    refused(&["series", "8", "3", "--memory", "much"], 2, &["much"]);
    refused(&["series", "8", "3", "--memory", "1"], 4, &["memory"]);
    refused(&["series", "8", "3", "--format", "xml"], 2, &["xml", "json"]);
    refused(&["series", "8", "3", "--coupling", "alpha"], 2, &["alpha", "lambda/16pi^2"]);
    refused(&["series", "4", "2", "--certificate", "/nonexistent/directory/c.json"], 6, &["/nonexistent/directory"]);
    refused(&["series", "4", "0", "--certificate", "/nonexistent/directory/c.json"], 2, &["protected"]);
    refused(&["serie", "4", "2"], 2, &["serie"]);
    refused(&[], 2, &["Usage"]);
    refused(&["census", "12-4"], 2, &["12-4"]);
    refused(&["census", "four"], 2, &["four"]);
    refused(&["census", ""], 2, &["lengths"]);
    refused(&["census", "2-3"], 2, &["M <= L/2"]);
}

#[test]
fn protected_state_in_words() {
    insta::assert_snapshot!("protected", printed(&["series", "5", "0", "--loops", "3"]));
    let record: serde_json::Value =
        serde_json::from_str(&printed(&["series", "5", "0", "--loops", "2", "--format", "json"])).unwrap();
    assert_eq!(record["primaries"], 1);
    assert_eq!(record["orbits"][0]["coefficients"][1]["terms"][0]["value"][0], "0");
    // More loops than L are no problem for zeros.
    assert!(printed(&["series", "2", "0", "--loops", "30"]).contains("Protected"));
}

#[test]
fn snapshots() {
    for (length, magnons) in [("4", "2"), ("6", "3"), ("8", "4")] {
        let series = printed(&["series", length, magnons]);
        insta::assert_snapshot!(format!("series_{length}_{magnons}_text"), series);
        let json = printed(&["series", length, magnons, "--format", "json"]);
        insta::assert_snapshot!(format!("series_{length}_{magnons}_json"), json);
        for threads in ["1", "2", "3"] {
            assert_eq!(printed(&["series", length, magnons, "--format", "json", "--threads", threads]), json);
        }
        let record = loopladder::record::Record::from_json(&json, "standard output").unwrap();
        assert_eq!(record.to_json(), json, "what is printed is what is read");
    }
    insta::assert_snapshot!("series_6_3_incomplete", printed(&["series", "6", "3", "--incomplete"]));
    insta::assert_snapshot!("series_8_3_state", printed(&["series", "8", "3", "--state", "L8M3-2", "--loops", "4"]));
    insta::assert_snapshot!("census_4_8", printed(&["census", "4-8"]));
    insta::assert_snapshot!("census_10_12_counts", printed(&["census", "10-12", "--counts"]));
}

/// Asymptotic values are never taken for complete ones.
#[test]
fn incomplete_is_labelled() {
    let json = printed(&["series", "4", "2", "--incomplete", "--format", "json"]);
    let record: serde_json::Value = serde_json::from_str(&json).unwrap();
    let coefficients = record["orbits"][0]["coefficients"].as_array().unwrap();
    let statuses: Vec<&str> = coefficients.iter().map(|c| c["status"].as_str().unwrap()).collect();
    assert_eq!(statuses, ["exact", "exact", "exact", "asymptotic"]);
}

/// Somebody who stops reading is no error, and nothing is said about it.
#[test]
fn a_closed_pipe_ends_quietly() {
    for words in [&["census", "4-9"][..], &["series", "8", "4"], &["series", "8", "4", "--format", "json"], &["--help"]]
    {
        let mut child = program().args(words).stdout(Stdio::piped()).stderr(Stdio::piped()).spawn().unwrap();
        drop(child.stdout.take());
        let output = child.wait_with_output().unwrap();
        assert_eq!(output.status.code(), Some(0), "{words:?}");
        assert_eq!(text(&output.stderr), "", "{words:?}");
    }
}

/// A full disk is an error with its own exit code.
#[test]
#[cfg(target_os = "linux")]
fn a_full_disk_is_reported() {
    let full = std::fs::OpenOptions::new().write(true).open("/dev/full").unwrap();
    let output = program().args(["series", "4", "2"]).stdout(full).output().unwrap();
    assert_eq!(output.status.code(), Some(6));
    assert!(text(&output.stderr).contains("standard output"), "{}", text(&output.stderr));
}

/// Colour on a terminal only, and not where NO_COLOR asks for none. The terminal is the one that the program
/// `script` of util-linux makes; without it only the pipe is tested, and the test says so.
#[test]
fn colours() {
    assert!(!printed(&["series", "8", "4"]).contains('\u{1b}'));
    let on_terminal = |no_colour: Option<&str>| {
        let mut command = Command::new("script");
        command.args(["-qefc", &format!("{} series 8 4 2>/dev/null", env!("CARGO_BIN_EXE_loopladder")), "/dev/null"]);
        command.env_remove("NO_COLOR").stdin(Stdio::null());
        if let Some(value) = no_colour {
            command.env("NO_COLOR", value);
        }
        command.output().map(|output| String::from_utf8_lossy(&output.stdout).contains('\u{1b}'))
    };
    match on_terminal(None) {
        Err(_) => eprintln!("colours on a terminal are not tested: the program `script` is not installed"),
        Ok(coloured) => {
            assert!(coloured, "colour on a terminal");
            assert!(!on_terminal(Some("1")).unwrap(), "NO_COLOR");
            assert!(on_terminal(Some("")).unwrap(), "an empty NO_COLOR asks for nothing");
        }
    }
}

#[test]
fn help_and_version() {
    let help = printed(&["--help"]);
    for command in ["series", "census", "crosscheck", "scan", "audit", "compare"] {
        assert!(help.contains(command), "{command}");
        assert!(printed(&[command, "--help"]).contains("Example"), "{command}");
    }
    assert!(printed(&["--version"]).starts_with("loopladder "));
}
