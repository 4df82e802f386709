//! One reference entry against the records: agrees exactly, agrees to the printed digits, differs,
//! or not in the results.

use super::coupling;
use super::expression::Expression;
use super::numeric;
use super::reference::{Entry, Part};
use super::state::{self, Choice, Known, Scaled};
use super::value::{self, Value};
use crate::record::{Record, Zeta};
use num_bigint::BigInt;
use num_rational::BigRational;
use num_traits::{One, Signed, Zero};
use rug::{Float, Rational};

/// The answer for one entry.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Verdict {
    /// Equal as exact values.
    Exact,
    /// Equal to the digits printed in the reference (or in the record, where it has only digits).
    Digits,
    /// Different.
    Differs(Box<Difference>),
    /// The results do not contain what the entry is about, with the reason.
    Missing(String),
}

/// How a printed value differs from the record; everything in the entry's coupling.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Difference {
    /// The record's value.
    pub computed: String,
    /// Printed minus computed.
    pub difference: String,
    /// Printed over computed.
    pub ratio: Option<String>,
    /// What the ratio suggests.
    pub hint: Option<String>,
}

/// The answer for one entry, with the label of the orbit it was held against.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Answer {
    /// Orbit label, where one was found.
    pub label: Option<String>,
    /// The verdict.
    pub verdict: Verdict,
}

/// Digits shown for numbers in messages.
const SHOWN: usize = 12;

/// Holds an entry against the records.
///
/// # Errors
/// An entry whose value cannot be read as what it claims to be; the message says why.
pub fn judge(records: &[&Record], entry: &Entry) -> Result<Answer, String> {
    let missing = |reason: String| Ok(Answer { label: None, verdict: Verdict::Missing(reason) });
    let family = (entry.family.length, entry.family.magnons);
    let Some(record) = records.iter().find(|record| (record.length, record.magnons) == family) else {
        return missing(format!("no record of family {}", entry.family));
    };
    let (orbits, choices) = state::select(record, entry)?;
    if choices.is_empty() {
        return missing(no_state(&orbits, entry));
    }
    let mut answers = Vec::new();
    for choice in &choices {
        let orbit = &orbits[choice.0];
        let verdict = match orbit.known(entry.order, entry.part, record.length) {
            Ok(known) => compare(orbit, *choice, &known, entry)?,
            Err(reason) => Verdict::Missing(reason),
        };
        answers.push(Answer { label: Some(orbit.orbit().label.clone()), verdict });
    }
    if answers.len() > 1
        && answers.iter().any(|answer| answer.verdict != answers[0].verdict || !agrees(&answer.verdict))
    {
        let labels: Vec<String> = answers.iter().filter_map(|answer| answer.label.clone()).collect();
        return missing(format!(
            "the selector fits {} states ({}); say which with label or one_loop",
            labels.len(),
            labels.join(", ")
        ));
    }
    Ok(answers.swap_remove(0))
}

fn agrees(verdict: &Verdict) -> bool {
    matches!(verdict, Verdict::Exact | Verdict::Digits)
}

fn no_state(orbits: &[Scaled<'_>], entry: &Entry) -> String {
    let mut reason = format!("no state of family {} fits the selector", entry.family);
    if let Some(wanted) = &entry.one_loop
        && let Some(k) = state::misread_coupling(orbits, wanted)
    {
        let other = &entry.coupling / BigRational::from(BigInt::from(2)).pow(-k);
        reason.push_str(&format!(
            "; one has gamma_1 = {} times the one given, as if the coupling were {} and not {}",
            BigRational::from(BigInt::from(2)).pow(k),
            coupling::formula(&other),
            coupling::formula(&entry.coupling)
        ));
    }
    reason
}

fn compare(orbit: &Scaled<'_>, choice: Choice, known: &Known, entry: &Entry) -> Result<Verdict, String> {
    let computed = match known {
        Known::Exact(value) => value,
        Known::Numbers(numbers) => return against_numbers(orbit, choice, numbers, entry),
    };
    if entry.value.has_decimals() || entry.uncertainty.is_some() {
        return printed(orbit, choice, computed, entry);
    }
    match value::evaluate(&entry.value, &orbit.field(choice.1)) {
        Ok(stated) if stated == *computed => Ok(Verdict::Exact),
        Ok(stated) => {
            let difference = value::add(&stated, &value::scale(computed, &-BigRational::one()));
            let exact = value::ratio(&stated, computed);
            let hint = exact.as_ref().and_then(|ratio| coupling_hint(entry, |factor| *ratio == *factor, "exactly"));
            let ratio = match exact {
                Some(ratio) => Some(ratio.to_string()),
                None => numeric_ratio(orbit, choice, &stated, computed),
            };
            let hint = hint.or_else(|| part_hint(entry, &difference, computed));
            Ok(differs(value::text(computed), value::text(&difference), ratio, hint))
        }
        Err(what) => match choice.1 {
            // For example a square root outside the field: different, and shown as numbers.
            Some(state) if entry.value.has_roots() => {
                let omega = orbit.omega(state, 256)?;
                let found = numeric::evaluate(computed, &omega, 256)?.value;
                let stated = numeric::expression(&entry.value, Some(&omega.value), 256).ok_or(what)?;
                Ok(numeric_difference(&found, &stated, None))
            }
            _ => Err(what),
        },
    }
}

/// Printed decimals: alone (held against the number), or as coefficients of zeta products (term by term).
fn printed(orbit: &Scaled<'_>, choice: Choice, computed: &Value, entry: &Entry) -> Result<Verdict, String> {
    let terms = flat_terms(&entry.value)?;
    let Some(state) = choice.1 else {
        return Ok(Verdict::Missing(format!(
            "the selector means an orbit of {} states and the value is a number; add one_loop",
            orbit.orbit().degree()
        )));
    };
    let by_term = terms.iter().any(|(zeta, ..)| !zeta.is_empty());
    let mut keys: Vec<Vec<Zeta>> = terms.iter().map(|(zeta, ..)| zeta.clone()).collect();
    if by_term {
        keys.extend(computed.keys().cloned());
    }
    keys.sort();
    keys.dedup();
    let mut worst = None;
    for key in keys {
        let (mut stated, mut unit) = (BigRational::zero(), BigRational::zero());
        for (_, value, last) in terms.iter().filter(|(zeta, ..)| *zeta == key) {
            stated += value;
            unit += last;
        }
        let part: Value = if by_term {
            computed.get(&key).map(|element| Value::from([(Vec::new(), element.clone())])).unwrap_or_default()
        } else {
            computed.clone()
        };
        let tolerance = entry.uncertainty.clone().map_or(Tolerance::Unit(unit), Tolerance::Within);
        let found = precise(orbit, state, &part, &tolerance)?;
        if !tolerance.accepts(&found, &stated) {
            let stated_float = Float::with_val(found.prec(), numeric::rational(&stated));
            let hint = coupling_hint(
                entry,
                |factor| tolerance.accepts_scaled(&found, &stated, factor),
                "to the printed digits",
            );
            let name = if by_term && !key.is_empty() { Some(value::zeta_text(&key)) } else { None };
            worst.get_or_insert_with(|| numeric_difference_with(&found, &stated_float, hint, name));
        }
    }
    Ok(worst.unwrap_or(Verdict::Digits))
}

/// How close a printed number must be.
enum Tolerance {
    /// Unit of the last digit: correctly rounded, or cut off towards zero.
    Unit(BigRational),
    /// A stated half-width.
    Within(BigRational),
}

impl Tolerance {
    fn size(&self) -> &BigRational {
        match self {
            Tolerance::Unit(size) | Tolerance::Within(size) => size,
        }
    }

    fn accepts(&self, found: &Float, stated: &BigRational) -> bool {
        let stated = numeric::rational(stated);
        let size = numeric::rational(self.size());
        let bits = found.prec() + 64;
        let slack = Float::with_val(bits, &size) / 1_000_000u32;
        let distance = Float::with_val(bits, found - &stated).abs();
        match self {
            Tolerance::Within(_) => distance <= Float::with_val(bits, &size) + slack,
            Tolerance::Unit(_) => {
                let rounded = distance <= Float::with_val(bits, &size) / 2u32 + &slack;
                let short = Float::with_val(bits, found.abs_ref()) - Rational::from(stated.abs_ref());
                let same_sign = found.is_sign_negative() == (stated < 0) || stated == 0;
                rounded || (same_sign && short >= -slack.clone() && short <= Float::with_val(bits, &size) + slack)
            }
        }
    }

    fn accepts_scaled(&self, found: &Float, stated: &BigRational, factor: &BigRational) -> bool {
        // printed = factor × computed
        self.accepts(&Float::with_val(found.prec(), found * numeric::rational(factor)), stated)
    }
}

/// The computed number, precise enough for the tolerance.
fn precise(orbit: &Scaled<'_>, state: usize, part: &Value, tolerance: &Tolerance) -> Result<Float, String> {
    let wanted = Float::with_val(64, numeric::rational(tolerance.size())) / 10_000_000u32;
    let mut bits = 256;
    loop {
        let found = numeric::evaluate(part, &orbit.omega(state, bits)?, bits)?;
        if found.error <= wanted {
            return Ok(found.value);
        }
        bits *= 2;
        if bits > 1 << 17 {
            // An exact value written with an uncertainty of zero, or digits beyond any use.
            return if wanted.is_zero() {
                Ok(found.value)
            } else {
                Err("more printed digits than can be checked".into())
            };
        }
    }
}

/// Σ (number × zeta product) as (product, number, unit of its last digit).
fn flat_terms(source: &Expression) -> Result<Vec<(Vec<Zeta>, BigRational, BigRational)>, String> {
    let parts = match source {
        Expression::Sum(parts) => parts.as_slice(),
        other => std::slice::from_ref(other),
    };
    parts
        .iter()
        .map(|part| {
            flat_term(part).ok_or_else(|| {
                "printed decimals can stand only alone or as coefficients of zeta values in a sum".to_string()
            })
        })
        .collect()
}

fn flat_term(source: &Expression) -> Option<(Vec<Zeta>, BigRational, BigRational)> {
    match source {
        Expression::Minus(inner) => flat_term(inner).map(|(zeta, value, unit)| (zeta, -value, unit)),
        Expression::Number { value, places } => {
            let unit = places.map_or_else(BigRational::zero, |places| BigRational::from(BigInt::from(10)).pow(-places));
            Some((Vec::new(), value.clone(), unit))
        }
        Expression::Zeta(zeta) => Some((vec![zeta.clone()], BigRational::one(), BigRational::zero())),
        Expression::Power(base, exponent) => match base.as_ref() {
            Expression::Zeta(zeta) if *exponent <= 64 => {
                Some((vec![zeta.clone(); *exponent as usize], BigRational::one(), BigRational::zero()))
            }
            _ => None,
        },
        Expression::Product(factors) => {
            let (mut zeta, mut value, mut unit) = (Vec::new(), BigRational::one(), BigRational::zero());
            for (factor, divide) in factors {
                let (more, number, last) = flat_term(factor)?;
                if *divide && (!more.is_empty() || number.is_zero() || !last.is_zero()) {
                    return None;
                }
                let number = if *divide { number.recip() } else { number };
                unit = (unit * &number).abs() + (last * &value).abs();
                value *= number;
                zeta.extend(more);
            }
            zeta.sort();
            Some((zeta, value, unit))
        }
        Expression::Omega | Expression::Root(_) | Expression::Sum(_) => None,
    }
}

/// The record has only digits: the reference, evaluated, must agree to them.
fn against_numbers(
    orbit: &Scaled<'_>,
    choice: Choice,
    numbers: &[(BigRational, BigRational)],
    entry: &Entry,
) -> Result<Verdict, String> {
    let Some((number, unit)) = choice.1.and_then(|state| numbers.get(state)) else {
        return Ok(Verdict::Missing("the record has only decimals at this loop; say which state with one_loop".into()));
    };
    let state = choice.1.unwrap_or(0);
    let bits = 512;
    let omega = orbit.omega(state, bits)?;
    let Some(stated) = numeric::expression(&entry.value, Some(&omega.value), bits) else {
        return Ok(Verdict::Missing(
            "the record has only decimals at this loop, and the value has none that can be evaluated".into(),
        ));
    };
    let mut tolerance = unit.clone();
    if let Some((_, last)) = state::single_decimal(&entry.value) {
        tolerance += last;
    }
    if let Some(width) = &entry.uncertainty {
        tolerance += width;
    }
    let found = Float::with_val(bits, numeric::rational(number));
    let distance = Float::with_val(bits, &stated - &found).abs();
    if distance <= numeric::rational(&tolerance) {
        Ok(Verdict::Digits)
    } else {
        Ok(numeric_difference(&found, &stated, None))
    }
}

fn differs(computed: String, difference: String, ratio: Option<String>, hint: Option<String>) -> Verdict {
    Verdict::Differs(Box::new(Difference { computed, difference, ratio, hint }))
}

fn numeric_difference(found: &Float, stated: &Float, hint: Option<String>) -> Verdict {
    numeric_difference_with(found, stated, hint, None)
}

fn numeric_difference_with(found: &Float, stated: &Float, hint: Option<String>, term: Option<String>) -> Verdict {
    let difference = Float::with_val(found.prec(), stated - found);
    let ratio = (!found.is_zero()).then(|| numeric::text(&Float::with_val(found.prec(), stated / found), SHOWN));
    let suffix = term.map(|term| format!(" {term}")).unwrap_or_default();
    differs(
        format!("{}{suffix}", numeric::text(found, SHOWN)),
        format!("{}{suffix}", numeric::text(&difference, 6)),
        ratio,
        hint,
    )
}

fn numeric_ratio(orbit: &Scaled<'_>, choice: Choice, stated: &Value, computed: &Value) -> Option<String> {
    let omega = orbit.omega(choice.1?, 256).ok()?;
    let a = numeric::evaluate(stated, &omega, 256).ok()?.value;
    let b = numeric::evaluate(computed, &omega, 256).ok()?.value;
    (!b.is_zero()).then(|| numeric::text(&Float::with_val(256, a / b), SHOWN))
}

/// printed/computed = tⁿ with t = 2^k: the value is in the coupling of x' = (c/t) g².
fn coupling_hint(entry: &Entry, matches: impl Fn(&BigRational) -> bool, how: &str) -> Option<String> {
    for k in [1i32, -1, 2, -2, 3, -3, 4, -4] {
        let t = BigRational::from(BigInt::from(2)).pow(k);
        let factor = t.pow(entry.order as i32);
        if matches(&factor) {
            let exponent = k * entry.order as i32;
            return Some(format!(
                "the ratio is {how} 2^{}, a coupling mismatch: at loop {} the printed value is right in the coupling {}, not in {}",
                if exponent < 0 { format!("({exponent})") } else { exponent.to_string() },
                entry.order,
                coupling::formula(&(&entry.coupling / &t)),
                coupling::formula(&entry.coupling)
            ));
        }
    }
    let minus = -BigRational::one();
    matches(&minus).then(|| "the sign alone is opposite".to_string())
}

/// The difference is exactly what another part would explain.
fn part_hint(entry: &Entry, difference: &Value, computed: &Value) -> Option<String> {
    if entry.part == Part::Complete && entry.order >= entry.family.length {
        return None;
    }
    let zetas = value::add(computed, &value::scale(&value::zeta_free(computed), &-BigRational::one()));
    (!zetas.is_empty() && value::scale(&zetas, &-BigRational::one()) == *difference)
        .then(|| "all zeta values are missing, as in a value without the dressing phase; if that is meant, write part = \"zeta-free\"".to_string())
}

#[cfg(test)]
mod tests {
    use crate::compare::{Reference, Verdict, run};
    use crate::record::Record;
    use proptest::prelude::*;

    /// (4, 2): FSSZ arXiv:0712.3522, wrapping part BJ arXiv:0807.0399; (8, 4): γ₁ and γ₂ of the cubic
    /// orbit, BO JHEP 09 (2006) 016 in exact form.
    fn records() -> Vec<Record> {
        let konishi = r#"{"schema":1,"program":"test","length":4,"magnons":2,"coupling":"g^2 = lambda/(16 pi^2)","loops":4,
            "primaries":1,"orbits":[{"label":"L4M2-1","parity":"symmetric","members":1,"singular":false,
            "minimal_polynomial":["-12","1"],"generator":"gamma_1","coefficients":[
            {"loop":1,"status":"exact","terms":[{"zeta":[],"value":["12"]}]},
            {"loop":2,"status":"exact","terms":[{"zeta":[],"value":["-48"]}]},
            {"loop":4,"status":"exact","terms":[{"zeta":[],"value":["-2496"]},{"zeta":[3],"value":["576"]},{"zeta":[5],"value":["-1440"]}],
             "parts":{"asymptotic":[{"zeta":[],"value":["-2820"]},{"zeta":[3],"value":["-288"]}],
             "finite_size":[{"zeta":[],"value":["324"]},{"zeta":[3],"value":["864"]},{"zeta":[5],"value":["-1440"]}]}}],
            "states":[{"omega":"12","one_loop":"12.000000"}]}]}"#;
        let cubic = r#"{"schema":1,"program":"test","length":8,"magnons":4,"coupling":"g^2 = lambda/(16 pi^2)","loops":2,
            "primaries":3,"orbits":[{"label":"L8M4-1","parity":"symmetric","members":3,"singular":false,
            "minimal_polynomial":["-1600","464","-40","1"],"generator":"gamma_1","coefficients":[
            {"loop":1,"status":"exact","terms":[{"zeta":[],"value":["0","1","0"]}]},
            {"loop":2,"status":"exact","terms":[{"zeta":[],"value":["400/13","-80/13","1/26"]}]}],
            "states":[{"omega":"6.4911785","one_loop":"6.4911785"},{"omega":"10.9044375","one_loop":"10.9044375"},
            {"omega":"22.6043840","one_loop":"22.6043840"}]}]}"#;
        [konishi, cubic].iter().map(|text| Record::from_json(text, "test").unwrap()).collect()
    }

    fn answer(entry: &str) -> Verdict {
        let text = format!("coupling = \"lambda/(16 pi^2)\"\n[[entry]]\n{entry}");
        let records = records();
        let records: Vec<&Record> = records.iter().collect();
        run(&records, Reference::from_toml(&text, "test").unwrap()).unwrap().answers.remove(0).verdict
    }

    fn konishi(rest: &str) -> Verdict {
        answer(&format!("family = [4, 2]\n{rest}"))
    }

    #[test]
    fn exact_values_and_parts() {
        assert_eq!(konishi("loop = 4\nvalue = \"-2496 + 576 zeta(3) - 1440 zeta(5)\""), Verdict::Exact);
        assert_eq!(konishi("loop = 4\npart = \"asymptotic\"\nvalue = \"-2820 - 288 z3\""), Verdict::Exact);
        assert_eq!(konishi("loop = 4\npart = \"finite-size\"\nvalue = \"324 + 864 z3 - 1440 z5\""), Verdict::Exact);
        assert_eq!(konishi("loop = 4\npart = \"zeta-free\"\nvalue = \"-2496\""), Verdict::Exact);
        assert_eq!(konishi("loop = 4\npart = \"asymptotic zeta-free\"\nvalue = \"-2820\""), Verdict::Exact);
        assert_eq!(konishi("loop = 2\npart = \"finite-size\"\nvalue = \"0\""), Verdict::Exact);
        assert_eq!(
            konishi("loop = 4\ncoupling = \"lambda/(8 pi^2)\"\nvalue = \"-156 + 36 z3 - 90 z5\""),
            Verdict::Exact
        );
    }

    #[test]
    fn printed_digits_rounded_or_cut_off() {
        // −2496 + 576 ζ3 − 1440 ζ5 = −3296.7911…
        for good in ["-3296.8", "-3296.7", "-3296.79", "-2496.0 + 576.0 z3 - 1440.0 z5"] {
            assert_eq!(konishi(&format!("loop = 4\nvalue = \"{good}\"")), Verdict::Digits, "{good}");
        }
        for bad in ["-3296.6", "-3296.9", "3296.8", "-2496.0 + 576.0 z3 - 1440.2 z5", "-2496.0 + 576.0 z3"] {
            assert!(matches!(konishi(&format!("loop = 4\nvalue = \"{bad}\"")), Verdict::Differs(_)), "{bad}");
        }
        assert_eq!(konishi("loop = 4\nvalue = \"-3300\"\nuncertainty = \"5\""), Verdict::Digits);
    }

    #[test]
    fn differences_say_difference_ratio_and_cause() {
        let Verdict::Differs(found) = konishi("loop = 2\nvalue = \"-12\"") else { panic!("must differ") };
        assert_eq!(
            (found.computed.as_str(), found.difference.as_str(), found.ratio.as_deref()),
            ("-48", "36", Some("1/4"))
        );
        assert!(found.hint.unwrap().contains("lambda/(8 pi^2)"));
        let Verdict::Differs(found) = konishi("loop = 2\nvalue = \"-12.0\"") else { panic!("must differ") };
        assert!(found.hint.unwrap().contains("to the printed digits"));
        let Verdict::Differs(found) = konishi("loop = 2\nvalue = \"48\"") else { panic!("must differ") };
        assert!(found.hint.unwrap().contains("sign"));
        let Verdict::Differs(found) = konishi("loop = 2\nvalue = \"-84\"") else { panic!("must differ") };
        assert_eq!(found.hint, None);
        assert!(matches!(konishi("loop = 2\none_loop = \"12\"\nvalue = \"-40 - sqrt(3)\""), Verdict::Differs(_)));
    }

    #[test]
    fn number_fields() {
        let at = |rest: &str| answer(&format!("family = [8, 4]\nloop = 2\n{rest}"));
        assert_eq!(at("label = \"L8M4-1\"\nvalue = \"w^2/26 - 80/13 w + 400/13\""), Verdict::Exact);
        // The same, with γ₁ and ω in the other coupling.
        let half = "coupling = \"lambda/(8 pi^2)\"\nminimal_polynomial = \"w^3 - 20w^2 + 116w - 200\"\n";
        assert_eq!(at(&format!("{half}value = \"w^2/26 - 40/13 w + 100/13\"")), Verdict::Exact);
        assert_eq!(at("coupling = \"lambda/(8 pi^2)\"\none_loop = \"11.3022\"\nvalue = \"-22.1706\""), Verdict::Digits);
        assert!(matches!(at("value = \"-31.76\""), Verdict::Missing(reason) if reason.contains("one_loop")));
        assert!(
            matches!(at("one_loop = \"11.3022\"\nvalue = \"1\""), Verdict::Missing(reason) if reason.contains("2 times") && reason.contains("lambda/(8 pi^2)"))
        );
    }

    #[test]
    fn what_the_records_lack_is_said() {
        assert!(
            matches!(answer("family = [6, 2]\nloop = 1\nvalue = \"1\""), Verdict::Missing(reason) if reason.contains("no record"))
        );
        assert!(matches!(konishi("loop = 3\nvalue = \"336\""), Verdict::Missing(reason) if reason.contains("loop 3")));
        assert!(
            matches!(konishi("label = \"L4M2-2\"\nloop = 1\nvalue = \"12\""), Verdict::Missing(reason) if reason.contains("no state"))
        );
    }

    #[test]
    fn the_protected_state_has_zeros() {
        let text = r#"{"schema":1,"program":"test","length":3,"magnons":0,"coupling":"g^2 = lambda/(16 pi^2)","loops":1,
            "primaries":1,"orbits":[{"label":"L3M0-1","parity":"symmetric","members":1,"singular":false,
            "minimal_polynomial":["0","1"],"generator":"gamma_1","coefficients":[
            {"loop":1,"status":"exact","terms":[{"zeta":[],"value":["0"]}]}],"states":[{"omega":"0","one_loop":"0.000"}]}]}"#;
        let record = Record::from_json(text, "test").unwrap();
        let verdict = |value: &str| {
            let entry = format!(
                "coupling = \"lambda/pi^2\"\n[[entry]]\nfamily = [3, 0]\none_loop = \"0\"\nloop = 1\nvalue = \"{value}\""
            );
            run(&[&record], Reference::from_toml(&entry, "test").unwrap()).unwrap().answers.remove(0).verdict
        };
        assert_eq!(verdict("0"), Verdict::Exact);
        assert_eq!(verdict("0.0"), Verdict::Digits);
        assert!(matches!(verdict("1"), Verdict::Differs(_)));
    }

    proptest! {
        #![proptest_config(ProptestConfig::with_cases(300))]
        /// Whatever the value and the selector say, there is an answer or an error.
        #[test]
        fn any_words_of_the_language_get_an_answer(
            value in "[0-9w(z3)+*/ .-]{0,24}",
            one_loop in "(12|1[0-9]\\.9044|w|sqrt\\([0-9]\\)|[0-9]{1,3}/[0-9])",
            family in "(\\[4, 2\\]|\\[8, 4\\])",
            part in "(complete|asymptotic|finite-size|zeta-free)",
        ) {
            let text = format!("coupling = \"lambda/(16 pi^2)\"\n[[entry]]\nfamily = {family}\nloop = 2\none_loop = \"{one_loop}\"\npart = \"{part}\"\nvalue = \"{value}\"");
            let records = records();
            let records: Vec<&Record> = records.iter().collect();
            if let Ok(reference) = Reference::from_toml(&text, "fuzz") {
                let _ = run(&records, reference);
            }
        }
    }
}
