//! A solved stage as text, for checkpoints: the agreement in digits, then one unknown a line as
//! hexadecimal mantissa and binary exponent, then a closing line that tells a complete file from a cut one.

use super::solver::Stage;
use crate::algebra::flint::dense::Real;
use rug::Integer;

/// The text of a stage.
pub fn encode(stage: &Stage) -> Vec<u8> {
    let mut text = format!("{}\n", stage.consistency);
    for value in &stage.values {
        let (mantissa, exponent) = value.to_scaled();
        text.push_str(&format!("{} {exponent}\n", mantissa.to_string_radix(16)));
    }
    text.push_str("end\n");
    text.into_bytes()
}

/// The stage, unless the text is damaged.
pub fn decode(bytes: &[u8]) -> Option<Stage> {
    let text = std::str::from_utf8(bytes).ok()?;
    let body = text.strip_suffix("end\n")?;
    let mut lines = body.lines();
    let consistency: f64 = lines.next()?.parse().ok()?;
    let values = lines
        .map(|line| {
            let (mantissa, exponent) = line.split_once(' ')?;
            let mantissa = Integer::from(Integer::parse_radix(mantissa, 16).ok()?);
            Some(Real::from_scaled(&mantissa, exponent.parse().ok()?))
        })
        .collect::<Option<Vec<Real>>>()?;
    Some(Stage { values, consistency })
}
