//! The audit of what the engine computes, and `loopladder audit` as a command.

use loopladder::audit::{Verdict, audit as check};
use loopladder::engine::{NoCheckpoint, Request, compute};
use loopladder::family::Family;
use loopladder::observer::Silent;
use loopladder::record::{Certificate, Parity, Record};
use proptest::prelude::{ProptestConfig, any, prop, prop_assert, proptest};
use std::path::Path;
use std::process::{Command, Output};
use std::sync::LazyLock;

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

fn computed(length: usize, magnons: usize, loops: usize) -> (Record, Certificate) {
    let mut request = Request::new(Family::new(length, magnons).unwrap(), loops);
    request.certificate = true;
    let outcome = compute(&request, None, &NoCheckpoint, &Silent).unwrap();
    (outcome.record, outcome.certificate.unwrap())
}

/// Two implementations that share nothing but the formulas agree on every exact number: regular and
/// singular states, mirror pairs, with the finite-size term at loop L.
#[test]
fn whole_families_are_proved_through_loop_l() {
    for (length, magnons) in
        [(4, 2), (5, 2), (6, 2), (6, 3), (7, 2), (7, 3), (8, 2), (8, 3), (8, 4), (9, 3), (9, 4), (10, 3), (10, 5)]
    {
        let (record, certificate) = computed(length, magnons, length);
        let result = check(&record, Some(&certificate));
        assert_eq!(result.verdict(), Verdict::Proved, "{}", result.text(true));
        assert!(result.orbits.iter().all(|orbit| orbit.through == length));
    }
}

/// Even charges matter for mirror pairs only, and P₂ beyond h¹ first at h⁵ (C₁₂ starts at h³): an error
/// there must be seen.
#[test]
fn a_pair_with_a_wrong_even_charge_is_refuted() {
    let (record, mut certificate) = computed(7, 3, 6);
    let term = certificate.orbits[0].pair[5].terms.iter_mut().find(|term| term.zeta == [3]).unwrap();
    term.q1[2][1] = "0".into();
    let result = check(&record, Some(&certificate));
    assert_eq!(result.verdict(), Verdict::Refuted);
    assert!(result.text(false).contains("Wronskian relation fails at h^5, zeta(3)"), "{}", result.text(false));
}

/// Claims about orbits as a whole. (8, 3) has the singular γ₁ = 12 and the mirror pair γ₁ = 8.
#[test]
fn wrong_claims_about_orbits_are_refuted() {
    type Damage = (&'static str, fn(&mut Record, &mut Certificate));
    let damages: [Damage; 6] = [
        ("the orbits are sorted", |r, c| {
            r.orbits.swap(0, 1);
            r.orbits[0].label = "L8M3-1".into();
            r.orbits[1].label = "L8M3-2".into();
            c.orbits[0].label = "L8M3-2".into();
            c.orbits[1].label = "L8M3-1".into();
        }),
        ("Q(1/2) = Q(-1/2) = 0 is true", |r, _| r.orbits[0].singular = false),
        ("the certificate is for family (8, 4)", |_, c| c.magnons = 4),
        ("the certificate has an orbit L8M3-9 that the record lacks", |_, c| c.orbits[1].label = "L8M3-9".into()),
        ("state omega = 8.5, one loop = 8.0000: omega is 8", |r, _| {
            r.orbits[1].states[0].omega = "8.5".into();
            r.orbits[1].states[0].one_loop = "8.0000".into();
        }),
        ("the field has degree 2, the orbit 1 members", |r, _| {
            r.orbits[1].parity = Parity::Symmetric;
            r.orbits[1].members = 1;
        }),
    ];
    let (record, certificate) = computed(8, 3, 2);
    assert_eq!(record.orbits[1].parity, Parity::Paired);
    for (what, damage) in damages {
        let (mut record, mut certificate) = (record.clone(), certificate.clone());
        damage(&mut record, &mut certificate);
        let text = check(&record, Some(&certificate)).text(false);
        assert!(text.contains(&format!("REFUTED: {what}")), "{what}: {text}");
    }
}

/// Mirror pairs over K of degree 2 (where x is no odd charge), a cubic field, and a singular state.
static COMPUTED: LazyLock<Vec<(String, String)>> = LazyLock::new(|| {
    let families = [(7, 3, 7), (8, 4, 6), (8, 3, 8)];
    families.iter().map(|&(l, m, n)| computed(l, m, n)).map(|(r, c)| (r.to_json(), c.to_json())).collect()
});

proptest! {
    #![proptest_config(ProptestConfig { cases: 500, failure_persistence: None, ..ProptestConfig::default() })]

    /// Any digit inside quotes that hold a number, changed to any other digit, is refused.
    #[test]
    fn a_changed_digit_is_refused(
        which in 0usize..3, in_record in any::<bool>(), place in any::<prop::sample::Index>(), step in 1u8..10,
    ) {
        let (record, certificate) = &COMPUTED[which];
        let text = if in_record { record } else { certificate };
        let numeric = |part: &str| !part.is_empty() && part.bytes().all(|b| b.is_ascii_digit() || b"-/.".contains(&b));
        let mut places = Vec::new();
        let mut start = 0;
        for (index, part) in text.split('"').enumerate() {
            if index % 2 == 1 && numeric(part) {
                places.extend((start..start + part.len()).filter(|&i| text.as_bytes()[i].is_ascii_digit()));
            }
            start += part.len() + 1;
        }
        let position = places[place.index(places.len())];
        let mut bytes = text.clone().into_bytes();
        bytes[position] = b'0' + (bytes[position] - b'0' + step) % 10;
        let damaged = String::from_utf8(bytes).unwrap();
        let (record, certificate) = if in_record { (&damaged, certificate) } else { (record, &damaged) };
        let parsed = (Record::from_json(record, "record"), Certificate::from_json(certificate, "certificate"));
        if let (Ok(record), Ok(certificate)) = parsed {
            let result = check(&record, Some(&certificate));
            prop_assert!(result.verdict() == Verdict::Refuted, "byte {position}: {}", result.text(true));
        }
    }
}
