//! Three loops of whole families against direct diagonalisation of the dilatation operator D₂ + D₄ + D₆
//! (BKS, hep-th/0303060), an independent exact route; and that this route notices what is wrong.

use loopladder::crosscheck::{Report, crosscheck};
use loopladder::engine::{NoCheckpoint, Request, compute};
use loopladder::family::Family;
use loopladder::observer::Silent;
use loopladder::record::{Parity, Record};
use std::process::Command;

fn record(length: usize, magnons: usize) -> Record {
    let family = Family::new(length, magnons).unwrap();
    compute(&Request::new(family, 3), None, &NoCheckpoint, &Silent).unwrap().record
}

fn checked(record: &Record) -> Report {
    crosscheck(record, 3, &Silent).unwrap()
}

#[test]
fn all_families_through_length_nine() {
    for length in 4..=9 {
        for magnons in (0..=length / 2).filter(|m| *m != 1) {
            let report = checked(&record(length, magnons));
            assert!(report.agrees(), "{}", report.text());
            let primaries = Family::new(length, magnons).unwrap().primaries();
            assert_eq!(primaries, report.primaries_even + report.primaries_odd);
        }
    }
}

/// Degenerate one-loop eigenvalues: in (12, 3) a symmetric orbit and a pair share γ₁ = 12, and in (10, 4)
/// and (10, 5) primaries meet descendants.
#[test]
fn degenerate_families() {
    for (length, magnons) in [(10, 3), (10, 4), (10, 5), (12, 3)] {
        let report = checked(&record(length, magnons));
        assert!(report.agrees(), "{}", report.text());
    }
}

/// Exchanged values of the two degenerate orbits of (12, 3), and one given twice.
#[test]
fn mistakes_in_degenerate_orbits_are_found() {
    let right = record(12, 3);
    let place = |parity: Parity| {
        right.orbits.iter().position(|o| o.parity == parity && o.minimal_polynomial == ["-12", "1"]).unwrap()
    };
    let (symmetric, paired) = (place(Parity::Symmetric), place(Parity::Paired));
    let loops: Vec<usize> =
        (2..=3).filter(|n| right.orbits[symmetric].coefficient(*n) != right.orbits[paired].coefficient(*n)).collect();
    assert!(!loops.is_empty(), "the two orbits differ within three loops");
    for order in loops {
        let mut wrong = right.clone();
        wrong.orbits[symmetric].coefficients[order - 1] = right.orbits[paired].coefficients[order - 1].clone();
        let report = checked(&wrong);
        assert!(!report.orbits[symmetric].agrees, "{}", report.text());
        wrong.orbits[paired].coefficients[order - 1] = right.orbits[symmetric].coefficients[order - 1].clone();
        let report = checked(&wrong);
        assert!(!report.orbits[symmetric].agrees && !report.orbits[paired].agrees, "{}", report.text());
    }
}

/// Every coefficient of every orbit, changed by the least bit, is found and put right.
#[test]
fn every_wrong_coefficient_is_found() {
    for (length, magnons) in [(4, 2), (6, 2), (7, 3), (8, 3), (8, 4), (9, 4)] {
        let right = record(length, magnons);
        for orbit in 0..right.orbits.len() {
            for order in 1..=3 {
                for power in 0..right.orbits[orbit].degree() {
                    let mut wrong = right.clone();
                    let terms = &mut wrong.orbits[orbit].coefficients[order - 1].terms;
                    let value: rug::Rational = terms[0].value[power].parse().unwrap();
                    terms[0].value[power] = (value + rug::Rational::from((1, 1_000_000_007))).to_string();
                    let report = checked(&wrong);
                    assert!(!report.agrees());
                    for (other, outcome) in report.orbits.iter().enumerate() {
                        assert_eq!(outcome.agrees, other != orbit, "{}", report.text());
                    }
                    let outcome = &report.orbits[orbit];
                    assert_eq!(outcome.agrees_through, order - 1);
                    if order > 1 {
                        let direct = outcome.direct.as_ref().unwrap();
                        assert_eq!(direct.order, order);
                        let expected = &right.orbits[orbit].coefficients[order - 1].terms[0].value;
                        assert_eq!(&direct.value, expected);
                    }
                }
            }
        }
    }
}

#[test]
fn missing_states_and_zeta_values_are_found() {
    let mut fewer = record(8, 3);
    fewer.orbits.pop();
    let report = checked(&fewer);
    assert!(!report.complete() && !report.agrees());
    assert!(report.orbits.iter().all(|orbit| orbit.agrees));
    let mut zeta = record(8, 3);
    let term = zeta.orbits[0].coefficients[2].terms[0].clone();
    zeta.orbits[0].coefficients[2]
        .terms
        .push(loopladder::record::Term { zeta: vec![loopladder::record::Zeta::Single(3)], ..term });
    let report = checked(&zeta);
    assert_eq!((report.orbits[0].agrees_through, report.orbits[1].agrees), (2, true));
}

#[test]
fn what_the_operator_does_not_answer_is_refused() {
    let short = compute(&Request::new(Family::new(3, 0).unwrap(), 3), None, &NoCheckpoint, &Silent).unwrap().record;
    assert!(crosscheck(&short, 3, &Silent).unwrap_err().to_string().contains("L >= 4"));
    let konishi = record(4, 2);
    for loops in [0, 4] {
        assert_eq!(crosscheck(&konishi, loops, &Silent).unwrap_err().exit_code(), 2);
    }
    let one = compute(&Request::new(Family::new(4, 2).unwrap(), 1), None, &NoCheckpoint, &Silent).unwrap().record;
    let error = crosscheck(&one, 3, &Silent).unwrap_err();
    assert!(error.to_string().contains("no exact coefficient at loop 2"), "{error}");
    assert!(crosscheck(&one, 1, &Silent).unwrap().agrees());
}

/// The command: text, JSON, exit codes.
#[test]
fn command() {
    let run =
        |words: &[&str]| Command::new(env!("CARGO_BIN_EXE_loopladder")).arg("crosscheck").args(words).output().unwrap();
    let good = run(&["8", "3"]);
    assert_eq!(good.status.code(), Some(0), "{}", String::from_utf8_lossy(&good.stderr));
    insta::assert_snapshot!(String::from_utf8(good.stdout).unwrap(), @r"
    Family (8, 3) by direct diagonalisation of the dilatation operator, loops 1 to 3, exactly
    3 primaries: 1 even and 2 odd under reversal of the chain

      L8M3-1     symmetric  1 primary    agrees
      L8M3-2     paired     2 primaries  agrees

    all 2 orbits agree exactly through loop 3
    ");
    let json = run(&["8", "3", "--format", "json"]);
    let value: serde_json::Value = serde_json::from_slice(&json.stdout).unwrap();
    assert_eq!(value["orbits"][0]["agrees"], true);
    // A stored record with one wrong digit.
    let directory = tempfile::tempdir().unwrap();
    let path = directory.path().join("L08M03.json");
    let mut wrong = record(8, 3);
    wrong.orbits[1].coefficients[2].terms[0].value[0] = "113".into();
    std::fs::write(&path, wrong.to_json()).unwrap();
    let path = path.to_str().unwrap();
    let bad = run(&["8", "3", "--record", path]);
    assert_eq!(bad.status.code(), Some(1), "{}", String::from_utf8_lossy(&bad.stderr));
    insta::assert_snapshot!(String::from_utf8(bad.stdout).unwrap(), @r"
    Family (8, 3) by direct diagonalisation of the dilatation operator, loops 1 to 3, exactly
    3 primaries: 1 even and 2 odd under reversal of the chain

      L8M3-1     symmetric  1 primary    agrees
      L8M3-2     paired     2 primaries  DIFFERS at loop 3
                 gamma_3 is 112 by diagonalisation, and 113 in the record

    1 of 2 orbits differ
    ");
    assert!(String::from_utf8(bad.stderr).unwrap().contains("1 of 2 orbits differ"));
    assert_eq!(run(&["8", "4", "--record", path]).status.code(), Some(2));
    assert_eq!(run(&["3", "0"]).status.code(), Some(2));
    assert_eq!(run(&["40", "20"]).status.code(), Some(4));
}
