//! `loopladder audit` as a command: exit codes and messages, on files.

use std::path::Path;
use std::process::{Command, Output};

/// L = 4, M = 2: 12, −48, 336, −2496 + 576ζ3 − 1440ζ5 (FSSZ, arXiv:0712.3522), the finite-size part
/// 324 + 864ζ3 − 1440ζ5 (BJ, arXiv:0807.0399).
const RECORD: &str = r#"{ "schema": 1, "program": "loopladder", "length": 4, "magnons": 2, "coupling": "g^2 = lambda/(16 pi^2)",
"loops": 4, "primaries": 1, "orbits": [ { "label": "L4M2-1", "parity": "symmetric", "members": 1, "singular": false,
"minimal_polynomial": ["-12", "1"], "generator": "gamma_1", "coefficients": [
{ "loop": 1, "status": "exact", "terms": [ { "zeta": [], "value": ["12"] } ] },
{ "loop": 2, "status": "exact", "terms": [ { "zeta": [], "value": ["-48"] } ] },
{ "loop": 3, "status": "exact", "terms": [ { "zeta": [], "value": ["336"] } ] },
{ "loop": 4, "status": "exact", "terms": [ { "zeta": [], "value": ["-2496"] }, { "zeta": [3], "value": ["576"] }, { "zeta": [5], "value": ["-1440"] } ],
  "parts": { "asymptotic": [ { "zeta": [], "value": ["-2820"] }, { "zeta": [3], "value": ["-288"] } ],
  "finite_size": [ { "zeta": [], "value": ["324"] }, { "zeta": [3], "value": ["864"] }, { "zeta": [5], "value": ["-1440"] } ] } } ],
"states": [ { "omega": "12", "one_loop": "12.000" } ] } ] }"#;

/// The lifted pair of L = 4, M = 2: Q₁ = v² + 1/12 + 4h/3 + 2h² + (8ζ3 − 8)h³, Q₂ = v³ − v/4 + 6h²v − 24h³v.
const CERTIFICATE: &str = r#"{"certificate":1,"length":4,"magnons":2,"loops":4,"orbits":[{"label":"L4M2-1","field":["-12","1"],"omega":["12"],
"pair":[{"order":0,"terms":[{"zeta":[],"q1":[["1/12"],["0"],["1"]],"q2":[["0"],["-1/4"],["0"],["1"]]}]},
{"order":1,"terms":[{"zeta":[],"q1":[["4/3"],["0"],["0"]],"q2":[["0"],["0"],["0"],["0"]]}]},
{"order":2,"terms":[{"zeta":[],"q1":[["2"],["0"],["0"]],"q2":[["0"],["6"],["0"],["0"]]}]},
{"order":3,"terms":[{"zeta":[],"q1":[["-8"],["0"],["0"]],"q2":[["0"],["-24"],["0"],["0"]]},
{"zeta":[3],"q1":[["8"],["0"],["0"]],"q2":[["0"],["0"],["0"],["0"]]}]}]}]}"#;

fn audit(arguments: &[&Path]) -> Output {
    Command::new(env!("CARGO_BIN_EXE_loopladder")).arg("audit").args(arguments).output().unwrap()
}

fn outcome(output: &Output) -> (i32, String, String) {
    let text = |bytes: &[u8]| String::from_utf8(bytes.to_vec()).unwrap();
    (output.status.code().unwrap(), text(&output.stdout), text(&output.stderr))
}

fn directory(record: &str, certificate: Option<&str>) -> tempfile::TempDir {
    let directory = tempfile::tempdir().unwrap();
    std::fs::write(directory.path().join("L04M02.json"), record).unwrap();
    if let Some(certificate) = certificate {
        std::fs::write(directory.path().join("L04M02.certificate.json"), certificate).unwrap();
    }
    directory
}

#[test]
fn a_good_record_is_proved() {
    let place = directory(RECORD, Some(CERTIFICATE));
    for path in [place.path(), &place.path().join("L04M02.json")] {
        let (code, out, _) = outcome(&audit(&[path]));
        assert_eq!(code, 0, "{out}");
        assert!(out.contains("L4M2-1  1 symmetric, gamma_1 = 12.000: proved through loop 4"), "{out}");
        assert!(out.ends_with("1 of 1 records proved\n"), "{out}");
    }
    let (_, out, _) = outcome(&audit(&[place.path(), Path::new("--verbose")]));
    assert!(out.contains("proved: loop 4, finite-size part"), "{out}");
}

#[test]
fn a_wrong_coefficient_is_refuted_and_located() {
    let place = directory(&RECORD.replace("\"576\"", "\"577\""), Some(CERTIFICATE));
    let (code, out, err) = outcome(&audit(&[place.path()]));
    assert_eq!(code, 1);
    assert!(out.contains("REFUTED: loop 4, zeta(3): the record has [577], the pair gives [576]"), "{out}");
    assert!(err.contains("1 of 1 records REFUTED"), "{err}");
    // Both parts changed so that they still add up to the total.
    let parts = RECORD.replace("\"-2820\"", "\"-2821\"").replace("\"324\"", "\"325\"");
    let (code, out, _) = outcome(&audit(&[directory(&parts, Some(CERTIFICATE)).path()]));
    assert_eq!(code, 1);
    assert!(out.contains("loop 4, asymptotic part") && out.contains("loop 4, finite-size part"), "{out}");
}

#[test]
fn a_wrong_certificate_is_refuted_and_located() {
    let place = directory(RECORD, Some(&CERTIFICATE.replace("\"-24\"", "\"-25\"")));
    let (code, out, _) = outcome(&audit(&[place.path()]));
    assert_eq!(code, 1);
    assert!(out.contains("REFUTED: the Wronskian relation fails at h^3, the rational part"), "{out}");
}

#[test]
fn a_missing_certificate_is_not_covered() {
    let place = directory(RECORD, None);
    let (code, out, err) = outcome(&audit(&[place.path()]));
    assert_eq!(code, 1);
    assert!(out.contains("not covered: no certificate for this orbit"), "{out}");
    assert!(err.contains("nothing is refuted, but 1 of 1 records are not covered in full"), "{err}");
}

#[test]
fn unreadable_input_has_other_exit_codes() {
    let damaged = directory(RECORD, Some(&CERTIFICATE.replace("\"1/12\"", "\"2/24\"")));
    let (code, _, err) = outcome(&audit(&[damaged.path()]));
    assert_eq!(code, 2);
    assert!(err.contains("L04M02.certificate.json") && err.contains("lowest terms"), "{err}");
    let (code, _, err) = outcome(&audit(&[&damaged.path().join("L05M02.json")]));
    assert_eq!(code, 6, "{err}");
    let place = directory(RECORD, Some(CERTIFICATE));
    let named = place.path().join("L04M02.certificate.json");
    let (code, _, err) = outcome(&audit(&[place.path(), Path::new("--certificate"), &named]));
    assert_eq!(code, 2);
    assert!(err.contains("--certificate names one file"), "{err}");
}
