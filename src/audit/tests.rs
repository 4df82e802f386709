//! Whole audits of families lifted by [`sample`](super::sample), and of damaged ones.

use super::sample::{Seed, family, rational, six_two};
use super::{Audit, Verdict, audit};
use crate::record::{Certificate, Record, Zeta};
use proptest::prelude::{ProptestConfig, any, prop, prop_assert, proptest};
use std::sync::LazyLock;

fn konishi() -> Vec<Seed> {
    vec![rational("12", &["1/12", "0", "1"], false)]
}

fn proved(record: &Record, certificate: &Certificate) -> Audit {
    record.check("sample").unwrap();
    certificate.check("sample").unwrap();
    let audit = audit(record, Some(certificate));
    assert_eq!(audit.verdict(), Verdict::Proved, "{}", audit.text(true));
    audit
}

/// The rational coefficients of an orbit of degree 1 at one loop order: (zeta product, value).
fn values(record: &Record, orbit: usize, order: usize) -> Vec<(Vec<u32>, String)> {
    let zeta = |z: &Zeta| if let Zeta::Single(k) = z { *k } else { panic!("a multiple zeta value") };
    let terms = &record.orbits[orbit].coefficient(order).unwrap().terms;
    terms.iter().map(|t| (t.zeta.iter().map(zeta).collect(), t.value[0].clone())).collect()
}

fn expect(record: &Record, orbit: usize, order: usize, expected: &[(&[u32], &str)]) {
    let expected: Vec<_> = expected.iter().map(|(z, v)| (z.to_vec(), v.to_string())).collect();
    assert_eq!(values(record, orbit, order), expected, "loop {order}");
}

/// L = 4, M = 2: 12, −48, 336, −2496 + 576ζ3 − 1440ζ5 (FSSZ, arXiv:0712.3522).
#[test]
fn konishi_through_four_loops() {
    let (record, certificate) = family(4, 2, 4, &konishi());
    assert_eq!(proved(&record, &certificate).orbits[0].through, 4);
    for (order, value) in [(1, "12"), (2, "-48"), (3, "336")] {
        expect(&record, 0, order, &[(&[], value)]);
    }
    expect(&record, 0, 4, &[(&[], "-2496"), (&[3], "576"), (&[5], "-1440")]);
}

/// L = 5, M = 2: 8, −24, 136, −920 − 128ζ3 (BKS, BDS, dressing phase), and five loops
/// 6664 + 1152ζ3 + 3840ζ5 − 2240ζ7 (FSS, arXiv:0908.0234).
#[test]
fn length_five_through_five_loops() {
    let (record, certificate) = family(5, 2, 5, &[rational("8", &["1/4", "0", "1"], false)]);
    assert_eq!(proved(&record, &certificate).orbits[0].through, 5);
    for (order, value) in [(1, "8"), (2, "-24"), (3, "136")] {
        expect(&record, 0, order, &[(&[], value)]);
    }
    expect(&record, 0, 4, &[(&[], "-920"), (&[3], "-128")]);
    expect(&record, 0, 5, &[(&[], "6664"), (&[3], "1152"), (&[5], "3840"), (&[7], "-2240")]);
}

/// L = 6, M = 3, a singular state: 12, −36, 252, −2484 and the ζ-free 28188 of five loops (BO eq. 4.17
/// times 2ⁿ; BDS), −288ζ3 from the dressing phase. Six loops, −339012 + 7776ζ3 + 12096ζ5 − 18144ζ9,
/// is the value of an independent computation with the full twisted asymptotic equations.
#[test]
fn the_singular_state_of_length_six() {
    let (record, certificate) = family(6, 3, 6, &[rational("12", &["0", "-1/4", "0", "1"], true)]);
    assert_eq!(proved(&record, &certificate).orbits[0].through, 6);
    for (order, value) in [(1, "12"), (2, "-36"), (3, "252"), (4, "-2484")] {
        expect(&record, 0, order, &[(&[], value)]);
    }
    expect(&record, 0, 5, &[(&[], "28188"), (&[3], "-288")]);
    expect(&record, 0, 6, &[(&[], "-339012"), (&[3], "7776"), (&[5], "12096"), (&[9], "-18144")]);
}

/// L = 7, M = 2 at two and three loops: 4, −6, 37/2 and 12, −42, 555/2 (BKS, from memory).
#[test]
fn two_rational_orbits() {
    let seeds = [rational("12", &["1/12", "0", "1"], false), rational("4", &["3/4", "0", "1"], false)];
    let (record, certificate) = family(7, 2, 7, &seeds);
    proved(&record, &certificate);
    for (orbit, list) in [["12", "-42", "555/2"], ["4", "-6", "37/2"]].iter().enumerate() {
        for (order, value) in list.iter().enumerate() {
            expect(&record, orbit, order + 1, &[(&[], value)]);
        }
    }
}

/// L = 6, M = 2: over Q(√5). Two loops: −256 s⁴[1/4 + c²/5] with s² = γ₁/16 (BKS, from memory), that is
/// −9γ₁²/20 + γ₁³/80; with γ₁² = 20γ₁ − 80: (20γ₁² − 80γ₁)/80 − 9γ₁²/20 = −γ₁²/5 − γ₁ = 16 − 5γ₁.
#[test]
fn a_quadratic_orbit() {
    let (record, certificate) = family(6, 2, 6, &[six_two()]);
    assert_eq!(proved(&record, &certificate).orbits[0].through, 6);
    assert_eq!(record.orbits[0].coefficient(2).unwrap().terms[0].value, ["16", "-5"]);
}

#[test]
fn what_cannot_be_checked_is_not_called_proved() {
    let (record, certificate) = family(4, 2, 3, &konishi());
    let alone = audit(&record, None);
    assert_eq!((alone.verdict(), alone.orbits[0].through), (Verdict::NotCovered, 0));
    let (longer, _) = family(4, 2, 4, &konishi());
    let short = audit(&longer, Some(&certificate));
    assert_eq!((short.verdict(), short.orbits[0].through), (Verdict::NotCovered, 3));
    assert!(short.text(false).contains("loop 4 (Exact): beyond the certificate"), "{}", short.text(false));
}

#[test]
fn a_refutation_names_the_place() {
    let (mut record, mut certificate) = family(6, 3, 5, &[rational("12", &["0", "-1/4", "0", "1"], true)]);
    record.orbits[0].coefficients[4].terms[1].value[0] = "-289".into();
    let text = audit(&record, Some(&certificate)).text(false);
    assert!(text.contains("REFUTED: loop 5, zeta(3): the record has [-289], the pair gives [-288]"), "{text}");
    certificate.orbits[0].pair[2].terms[0].q2[1][0] = "7/5".into();
    let text = audit(&record, Some(&certificate)).text(false);
    assert!(text.contains("Wronskian relation fails at h^2, the rational part"), "{text}");
    record.orbits[0].singular = false;
    let text = audit(&record, Some(&certificate)).text(false);
    assert!(text.contains("Q(1/2) = Q(-1/2) = 0 is true"), "{text}");
}

#[test]
fn the_same_state_twice_is_refuted() {
    let (mut record, certificate) =
        family(7, 2, 2, &[rational("12", &["1/12", "0", "1"], false), rational("12", &["1/12", "0", "1"], false)]);
    let text = audit(&record, Some(&certificate)).text(false);
    assert!(text.contains("L7M2-1 and L7M2-2 are the same states"), "{text}");
    record.orbits.pop();
    let text = audit(&record, None).text(false);
    assert!(text.contains("not covered: the orbits present hold 1 of 2 primaries"), "{text}");
}

#[test]
fn a_protected_record_needs_no_certificate() {
    let text = r#"{ "schema": 1, "program": "test", "length": 5, "magnons": 0, "coupling": "g^2 = lambda/(16 pi^2)",
        "loops": 1, "primaries": 1, "orbits": [ { "label": "L5M0-1", "parity": "symmetric", "members": 1, "singular": false,
        "minimal_polynomial": ["0", "1"], "generator": "gamma_1",
        "coefficients": [ { "loop": 1, "status": "exact", "terms": [ { "zeta": [], "value": ["0"] } ] } ],
        "states": [ { "omega": "0", "one_loop": "0.0000" } ] } ] }"#;
    let mut record = Record::from_json(text, "test").unwrap();
    let good = audit(&record, None);
    assert_eq!((good.verdict(), good.orbits[0].through), (Verdict::Proved, 1), "{}", good.text(true));
    record.orbits[0].coefficients[0].terms[0].value[0] = "1".into();
    assert_eq!(audit(&record, None).verdict(), Verdict::Refuted);
}

/// Every digit of a JSON text except in the program version and the names of q1 and q2.
fn exact_digits(text: &str) -> Vec<usize> {
    let skipped: Vec<_> = text
        .match_indices("\"program\"")
        .map(|(start, _)| start..start + text[start..].find([',', '\n']).unwrap())
        .collect();
    let digit = |&(_, b): &(usize, u8)| b.is_ascii_digit();
    let places = text.bytes().enumerate().filter(digit).map(|(i, _)| i);
    places
        .filter(|i| !skipped.iter().any(|range| range.contains(i)))
        .filter(|&i| text.as_bytes()[i - 1] != b'q')
        .collect()
}

struct Sample {
    record: String,
    certificate: String,
}

static SAMPLES: LazyLock<Vec<Sample>> = LazyLock::new(|| {
    let families = [
        family(4, 2, 4, &konishi()),
        family(6, 3, 6, &[rational("12", &["0", "-1/4", "0", "1"], true)]),
        family(6, 2, 5, &[six_two()]),
    ];
    families.iter().map(|(r, c)| Sample { record: r.to_json(), certificate: c.to_json() }).collect()
});

/// Whether the pair of texts passes both parsers and the audit.
fn passes(record: &str, certificate: &str) -> bool {
    let (Ok(record), Ok(certificate)) = (Record::from_json(record, "r"), Certificate::from_json(certificate, "c"))
    else {
        return false;
    };
    audit(&record, Some(&certificate)).verdict() == Verdict::Proved
}

#[test]
fn the_samples_pass() {
    assert!(SAMPLES.iter().all(|s| passes(&s.record, &s.certificate)));
}

/// Whether the text with one digit moved on by `step` passes.
fn passes_damaged(sample: &Sample, in_record: bool, position: usize, step: u8) -> bool {
    let mut bytes = if in_record { &sample.record } else { &sample.certificate }.clone().into_bytes();
    bytes[position] = b'0' + (bytes[position] - b'0' + step) % 10;
    let damaged = String::from_utf8(bytes).unwrap();
    if in_record { passes(&damaged, &sample.certificate) } else { passes(&sample.record, &damaged) }
}

/// Every digit of the smallest sample, changed to every other digit.
#[test]
fn all_changed_digits_are_refused() {
    let sample = &SAMPLES[0];
    for (in_record, text) in [(true, &sample.record), (false, &sample.certificate)] {
        for position in exact_digits(text) {
            for step in 1..10 {
                assert!(!passes_damaged(sample, in_record, position, step), "byte {position} of {text}");
            }
        }
    }
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 600, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn a_changed_digit_is_refused(
        which in 1usize..3, in_record in any::<bool>(), place in any::<prop::sample::Index>(), step in 1u8..10,
    ) {
        let sample = &SAMPLES[which];
        let text = if in_record { &sample.record } else { &sample.certificate };
        let places = exact_digits(text);
        let position = places[place.index(places.len())];
        prop_assert!(!passes_damaged(sample, in_record, position, step), "byte {position} of {text}");
    }
}
