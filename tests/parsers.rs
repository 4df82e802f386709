//! Parsers of files that people hand in never panic, whatever the bytes are; and they refuse with an
//! input error (exit code 2) that names the file.

use loopladder::compare::Reference;
use loopladder::compare::expression;
use loopladder::record::{Certificate, Record, canonical_rational};
use loopladder::scan::{Plan, parse_range, parse_size};
use proptest::prelude::{Just, ProptestConfig, Strategy, any, prop, prop_assert, prop_oneof, proptest};

/// A record with every kind of entry.
const RECORD: &str = r#"{ "schema": 2, "program": "loopladder", "length": 6, "magnons": 3, "coupling": "g^2 = lambda/(16 pi^2)",
"loops": 7, "primaries": 1, "orbits": [ { "label": "L6M3-1", "parity": "symmetric", "members": 1, "singular": true,
"minimal_polynomial": ["-12", "1"], "generator": "gamma_1", "coefficients": [
{ "loop": 1, "status": "exact", "terms": [ { "zeta": [], "value": ["12"] } ] },
{ "loop": 5, "status": "asymptotic", "terms": [ { "zeta": [], "value": ["28188"] }, { "zeta": [3], "value": ["-288"] } ],
  "parts": { "asymptotic": [ { "zeta": [], "value": ["28188"] } ], "finite_size": [] } },
{ "loop": 6, "status": "recognised", "terms": [ { "zeta": [3, [5, 3]], "value": ["-1/2"] } ], "spare_digits": 20 },
{ "loop": 7, "status": "numeric", "numbers": ["-12.5"] } ],
"states": [ { "omega": "12", "one_loop": "12.000" } ] } ] }"#;

/// L = 4, M = 2 through two loops.
const CERTIFICATE: &str = r#"{"certificate":1,"length":4,"magnons":2,"loops":2,"orbits":[{"label":"L4M2-1","field":["-12","1"],
"omega":["12"],"pair":[{"order":0,"terms":[{"zeta":[],"q1":[["1/12"],["0"],["1"]],"q2":[["0"],["-1/4"],["0"],["1"]]}]},
{"order":1,"terms":[{"zeta":[],"q1":[["4/3"],["0"],["0"]],"q2":[["0"],["0"],["0"],["0"]]}]}]}]}"#;

/// A scan plan with every key.
const PLAN: &str = r#"output = "results"
threads = 2
memory = "4 GB"
certificates = true

[[families]]
lengths = [4, "6-8"]
magnons = "2-4"
loops = 5
max_primaries = 20
max_degree = 3
parity = "symmetric"
"#;

/// The published values that come with the program.
const REFERENCE: &str = include_str!("../demo-data/literature.toml");

#[test]
fn the_samples_are_valid() {
    Reference::from_toml(REFERENCE, "sample").unwrap();
    Record::from_json(RECORD, "sample").unwrap();
    Certificate::from_json(CERTIFICATE, "sample").unwrap();
    Plan::parse(PLAN, "sample").unwrap();
}

/// Both parsers on one text; a refusal is an input error naming the file, an accepted text says the
/// same after writing and reading it again.
fn parse(text: &str) -> Result<(), String> {
    match Record::from_json(text, "handed-in.json") {
        Ok(record) if Record::from_json(&record.to_json(), "again").ok() != Some(record.clone()) => {
            return Err("a record changes when written and read again".into());
        }
        Err(error) if error.exit_code() != 2 || !error.to_string().contains("handed-in.json") => {
            return Err(error.chain());
        }
        _ => (),
    }
    match Certificate::from_json(text, "handed-in.json") {
        Ok(certificate)
            if Certificate::from_json(&certificate.to_json(), "again").ok() != Some(certificate.clone()) =>
        {
            Err("a certificate changes when written and read again".into())
        }
        Err(error) if error.exit_code() != 2 || !error.to_string().contains("handed-in.json") => Err(error.chain()),
        _ => Ok(()),
    }
}

/// The plan parser and the parsers of the values in a plan.
fn parse_plan(text: &str) -> Result<(), String> {
    let _ = (parse_range(text), parse_size(text));
    match Plan::parse(text, "handed-in.toml") {
        Err(error) if error.exit_code() != 2 || !error.to_string().contains("handed-in.toml") => Err(error.chain()),
        _ => Ok(()),
    }
}

/// The parser of reference files.
fn parse_reference(text: &str) -> Result<(), String> {
    match Reference::from_toml(text, "handed-in.toml") {
        Err(error) if error.exit_code() != 2 || !error.chain().contains("handed-in.toml") => Err(error.chain()),
        _ => Ok(()),
    }
}

/// Nesting and sizes that exhaust a careless parser.
#[test]
fn extreme_expressions_are_refused_quietly() {
    let deep = ["(".repeat(200_000), "-".repeat(200_000), "sqrt(".repeat(50_000), "((1".repeat(50_000)];
    let large = [
        "2^999999999",
        "9^9^9^9^9",
        "1e999999999",
        "zeta(99999999999999999999)",
        "w^99999999",
        "1/0",
        "(1-1)^-1",
        "sqrt(-4)",
    ];
    for text in deep.iter().map(String::as_str).chain(large) {
        let _ = expression::parse(text);
        let file = format!(
            "[[entry]]\nfamily = [4, 2]\none_loop = \"{text}\"\nloop = 1\nvalue = \"{text}\"\ncitation = \"c\"\n"
        );
        parse_reference(&file).unwrap();
    }
}

/// Any JSON value whose keys and strings are those of the formats, in any place.
fn json() -> impl Strategy<Value = String> {
    let number = prop_oneof![
        any::<i64>().prop_map(|n| n.to_string()),
        any::<u64>().prop_map(|n| n.to_string()),
        any::<f64>().prop_filter("JSON", |x| x.is_finite()).prop_map(|x| format!("{x:e}")),
        (0u8..12).prop_map(|n| n.to_string()),
    ];
    let word = prop_oneof![
        prop::sample::select(vec![
            "0",
            "1",
            "-12",
            "1/2",
            "-9/2",
            "1/0",
            "exact",
            "numeric",
            "symmetric",
            "paired",
            "L6M3-1",
            "gamma_1",
            ""
        ])
        .prop_map(String::from),
        "[-0-9/.]{0,8}",
    ];
    let leaf = prop_oneof![number, word.prop_map(|w| format!("\"{w}\"")), Just("null".into()), Just("true".into())];
    leaf.prop_recursive(4, 32, 6, |inner| {
        let keys = prop::sample::select(vec![
            "schema",
            "program",
            "length",
            "magnons",
            "coupling",
            "loops",
            "primaries",
            "orbits",
            "label",
            "parity",
            "members",
            "singular",
            "minimal_polynomial",
            "generator",
            "coefficients",
            "states",
            "loop",
            "status",
            "terms",
            "zeta",
            "value",
            "parts",
            "omega",
            "one_loop",
            "certificate",
            "field",
            "pair",
            "order",
            "q1",
            "q2",
        ]);
        prop_oneof![
            prop::collection::vec(inner.clone(), 0..5).prop_map(|list| format!("[{}]", list.join(","))),
            prop::collection::vec((keys, inner), 0..8).prop_map(|list| {
                let entries: Vec<String> = list.iter().map(|(key, value)| format!("\"{key}\":{value}")).collect();
                format!("{{{}}}", entries.join(","))
            }),
        ]
    })
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 512, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn arbitrary_bytes(bytes in prop::collection::vec(any::<u8>(), 0..400)) {
        let text = String::from_utf8_lossy(&bytes);
        let outcome = parse(&text).and_then(|()| parse_plan(&text)).and_then(|()| parse_reference(&text));
        prop_assert!(outcome.is_ok(), "{outcome:?}");
    }

    /// Lines of a plan with any keys and values of the right look.
    #[test]
    fn arbitrary_plans(lines in prop::collection::vec(
        ("(output|threads|memory|certificates|lengths|magnons|loops|families|max_primaries|max_degree|parity|[a-z]{1,6})",
         "([-0-9a-zA-Z., ]{0,8}|\"[-0-9a-zA-Z. /]{0,8}\"|\\[[-0-9, \"]{0,10}\\]|[0-9]{15,25}|true)", any::<bool>()), 0..8),
    ) {
        let line = |(key, value, table): &(String, String, bool)| {
            if *table { format!("[[{key}]]\n") } else { format!("{key} = {value}\n") }
        };
        let text: String = lines.iter().map(line).collect();
        let outcome = parse_plan(&text).and_then(|()| parse(&text));
        prop_assert!(outcome.is_ok(), "{text}: {outcome:?}");
    }

    /// A valid plan with one stretch of bytes replaced.
    #[test]
    fn damaged_plans(
        place in any::<prop::sample::Index>(), length in 0usize..12,
        filling in prop_oneof!["[-0-9a-zA-Z.,=\"\\[\\]{} \n]{0,12}".prop_map(String::into_bytes), prop::collection::vec(any::<u8>(), 0..12)],
    ) {
        let mut bytes = PLAN.as_bytes().to_vec();
        let start = place.index(bytes.len());
        let end = (start + length).min(bytes.len());
        bytes.splice(start..end, filling);
        let text = String::from_utf8_lossy(&bytes);
        let outcome = parse_plan(&text);
        prop_assert!(outcome.is_ok(), "{text}: {outcome:?}");
    }

    /// An entry with any expression.
    #[test]
    fn arbitrary_expressions(one_loop in "[-+*/^(). 0-9w]{0,16}", value in "([-+*/^().0-9 ]|w|zeta|sqrt|pi){0,24}", order in any::<i64>()) {
        let _ = expression::parse(&value);
        let text = format!(
            "[[entry]]\nfamily = [8, 4]\none_loop = \"{one_loop}\"\nloop = {order}\nvalue = \"{value}\"\ncitation = \"c\"\n"
        );
        let outcome = parse_reference(&text);
        prop_assert!(outcome.is_ok(), "{text}: {outcome:?}");
    }

    /// The shipped reference file with one stretch of bytes replaced.
    #[test]
    fn damaged_references(
        place in any::<prop::sample::Index>(), length in 0usize..12,
        filling in prop_oneof!["[-0-9a-zA-Z.,=^()\"\\[\\] \n]{0,12}".prop_map(String::into_bytes), prop::collection::vec(any::<u8>(), 0..12)],
    ) {
        let mut bytes = REFERENCE.as_bytes().to_vec();
        let start = place.index(bytes.len());
        let end = (start + length).min(bytes.len());
        bytes.splice(start..end, filling);
        let outcome = parse_reference(&String::from_utf8_lossy(&bytes));
        prop_assert!(outcome.is_ok(), "{outcome:?}");
    }

    #[test]
    fn arbitrary_json(text in json()) {
        let outcome = parse(&text);
        prop_assert!(outcome.is_ok(), "{outcome:?}");
    }

    /// A valid text with one stretch of bytes replaced.
    #[test]
    fn damaged_files(
        record in any::<bool>(), place in any::<prop::sample::Index>(), length in 0usize..12,
        filling in prop_oneof![prop::collection::vec(any::<u8>(), 0..12), "[-0-9/.,:\"\\[\\]{}]{0,12}".prop_map(String::into_bytes)],
    ) {
        let text = if record { RECORD } else { CERTIFICATE };
        let mut bytes = text.as_bytes().to_vec();
        let start = place.index(bytes.len());
        let end = (start + length).min(bytes.len());
        bytes.splice(start..end, filling);
        let outcome = parse(&String::from_utf8_lossy(&bytes));
        prop_assert!(outcome.is_ok(), "{outcome:?}");
    }

    #[test]
    fn rationals(text in "[-+0-9/. ]{0,12}") {
        if canonical_rational(&text) {
            let value: num_rational::BigRational = text.parse().unwrap();
            prop_assert!(value.to_string() == text, "{text} is read as {value}");
        }
    }
}
