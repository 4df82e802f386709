//! The README shows real output of the current program. Every ```console block is run, in order, in one
//! scratch directory, and must print exactly what stands there; with REFRESH_README=1 the blocks are
//! rewritten instead.

use std::path::Path;
use std::process::Command;

/// The output of one line "loopladder WORDS [> FILE]", empty when it goes to a file.
fn run(line: &str, place: &Path) -> String {
    let (words, file) = line.split_once(" > ").map_or((line, None), |(words, file)| (words, Some(file)));
    let mut words = words.split_whitespace();
    assert_eq!(words.next(), Some("loopladder"), "the README runs loopladder only");
    let output = Command::new(env!("CARGO_BIN_EXE_loopladder"))
        .args(words)
        .current_dir(place)
        .output()
        .expect("the program starts");
    let text = String::from_utf8(output.stdout).expect("results are UTF-8");
    match file {
        Some(file) => {
            std::fs::write(place.join(file), text).expect("the scratch directory is writable");
            String::new()
        }
        None => text,
    }
}

#[test]
fn every_console_block_is_real() {
    let root = Path::new(env!("CARGO_MANIFEST_DIR"));
    let readme = std::fs::read_to_string(root.join("README.md")).expect("the README is there");
    let place = tempfile::tempdir().expect("a scratch directory");
    for name in ["config", "demo-data"] {
        std::os::unix::fs::symlink(root.join(name), place.path().join(name)).expect("a link");
    }
    let mut fresh = String::new();
    let mut blocks = 0;
    let mut rest = readme.as_str();
    while let Some((before, after)) = rest.split_once("```console\n") {
        let (block, next) = after.split_once("```\n").expect("every block is closed");
        fresh.push_str(before);
        fresh.push_str("```console\n");
        for line in block.lines().filter_map(|line| line.strip_prefix("$ ")) {
            fresh.push_str(&format!("$ {line}\n{}", run(line, place.path())));
        }
        fresh.push_str("```\n");
        blocks += 1;
        rest = next;
    }
    fresh.push_str(rest);
    assert!(blocks >= 5, "the README lost its examples");
    if std::env::var_os("REFRESH_README").is_some() {
        std::fs::write(root.join("README.md"), fresh).expect("the README is writable");
    } else {
        assert_eq!(readme, fresh, "run `REFRESH_README=1 cargo test --release --test readme`");
    }
}
