//! Reference files: published (or draft) values in TOML.
//!
//! ```toml
//! title = "..."                       # optional
//! coupling = "lambda/(16 pi^2)"       # of every entry that names none
//! citation = "..."                    # of every entry that names none
//!
//! [[entry]]
//! family = [8, 4]                     # L, M
//! one_loop = "5.45222"                # state: gamma_1, and/or
//! minimal_polynomial = "w^3 - 20 w^2 + 116 w - 200"
//! label = "L8M4-1"
//! coupling = "lambda/(8 pi^2)"        # everything in the entry is in this coupling
//! loop = 2
//! value = "-7.94042"                  # or values = ["5.45222", "-7.94042"] for loops 1, 2, ...
//! part = "complete"                   # or asymptotic, finite-size, zeta-free, asymptotic zeta-free
//! uncertainty = "0.00002"             # optional; otherwise the printed digits
//! citation = "..."
//! note = "..."
//! ```

use super::coupling;
use super::expression::{self, Expression};
use crate::error::{Error, Result};
use crate::family::Family;
use num_rational::BigRational;
use serde::Deserialize;
use std::path::Path;

/// The largest file read, in bytes.
const LARGEST: usize = 16 << 20;

/// Which part of a coefficient a reference value is.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Deserialize)]
pub enum Part {
    /// Everything at this order.
    #[serde(rename = "complete")]
    Complete,
    /// What the asymptotic equations give.
    #[serde(rename = "asymptotic")]
    Asymptotic,
    /// The leading finite-size (wrapping) term.
    #[serde(rename = "finite-size")]
    FiniteSize,
    /// The terms of the complete coefficient without zeta values.
    #[serde(rename = "zeta-free")]
    ZetaFree,
    /// The terms of the asymptotic part without zeta values.
    #[serde(rename = "asymptotic zeta-free")]
    AsymptoticZetaFree,
}

impl Part {
    /// The name used in files.
    pub fn name(self) -> &'static str {
        match self {
            Part::Complete => "complete",
            Part::Asymptotic => "asymptotic",
            Part::FiniteSize => "finite-size",
            Part::ZetaFree => "zeta-free",
            Part::AsymptoticZetaFree => "asymptotic zeta-free",
        }
    }
}

/// One value to compare.
#[derive(Clone, Debug)]
pub struct Entry {
    /// (L, M).
    pub family: Family,
    /// Orbit label of the record.
    pub label: Option<String>,
    /// γ₁ in the entry's coupling.
    pub one_loop: Option<Expression>,
    /// The text of `one_loop`.
    pub one_loop_text: Option<String>,
    /// Minimal polynomial of ω in the entry's coupling.
    pub minimal_polynomial: Option<Expression>,
    /// n.
    pub order: usize,
    /// The value in the entry's coupling.
    pub value: Expression,
    /// The text of `value`.
    pub value_text: String,
    /// Half-width that replaces the printed digits.
    pub uncertainty: Option<BigRational>,
    /// Which part it is.
    pub part: Part,
    /// c in x = c g² ([`coupling::parse`]).
    pub coupling: BigRational,
    /// Where the value was printed.
    pub citation: String,
    /// The position in the file, counted from 1.
    pub number: usize,
}

/// A reference file.
#[derive(Clone, Debug)]
pub struct Reference {
    /// What the file says it is.
    pub title: Option<String>,
    /// Its values, in the order of the file.
    pub entries: Vec<Entry>,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct RawFile {
    title: Option<String>,
    coupling: Option<String>,
    citation: Option<String>,
    #[serde(default)]
    entry: Vec<RawEntry>,
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct RawEntry {
    family: (usize, usize),
    label: Option<String>,
    one_loop: Option<String>,
    minimal_polynomial: Option<String>,
    #[serde(rename = "loop")]
    order: Option<usize>,
    value: Option<String>,
    values: Option<Vec<String>>,
    uncertainty: Option<String>,
    part: Option<Part>,
    coupling: Option<String>,
    citation: Option<String>,
    #[serde(rename = "note")]
    _note: Option<String>,
}

impl Reference {
    /// Reads a file.
    ///
    /// # Errors
    /// The file cannot be read, is larger than 16 MB, or breaks a rule of the format.
    pub fn read(path: &Path) -> Result<Reference> {
        let bytes = std::fs::read(path).map_err(|cause| {
            Error::io(
                format!("cannot read the reference file {}; check the path and its permissions", path.display()),
                cause,
            )
        })?;
        let origin = path.display().to_string();
        let text = String::from_utf8(bytes).map_err(|cause| {
            Error::input(format!("{origin}: not a text file in UTF-8; save it as UTF-8")).because(cause)
        })?;
        Reference::from_toml(&text, &origin)
    }

    /// Reads TOML text; `origin` names it in errors.
    ///
    /// # Errors
    /// Text that is not TOML, unknown keys, or a value that breaks a rule; the message names the entry.
    pub fn from_toml(text: &str, origin: &str) -> Result<Reference> {
        if text.len() > LARGEST {
            return Err(Error::bound(format!("{origin}: larger than 16 MB; split the reference file")));
        }
        let raw: RawFile = toml::from_str(text).map_err(|cause| {
            Error::input(format!(
                "{origin}: not a reference file; its format is described by `loopladder compare --help`"
            ))
            .because(cause)
        })?;
        if raw.entry.is_empty() {
            return Err(Error::input(format!("{origin}: no [[entry]], so there is nothing to compare; add one")));
        }
        let mut entries = Vec::new();
        for (index, entry) in raw.entry.iter().enumerate() {
            let number = index + 1;
            let family = Family::new(entry.family.0, entry.family.1)
                .map_err(|error| error.within(format!("{origin}: entry {number}: not a family")))?;
            let refuse = |key: &str, what: String| {
                Error::input(format!("{origin}: entry {number}, family {family}: {key}: {what}"))
            };
            let read = |key: &str, text: &str| {
                expression::parse(text).map_err(|what| refuse(key, format!("\"{}\": {what}", shorten(text))))
            };
            let formula = entry.coupling.as_ref().or(raw.coupling.as_ref()).ok_or_else(|| {
                refuse("coupling", "missing; name the coupling of the paper, such as \"lambda/(16 pi^2)\", here or at the top of the file".into())
            })?;
            let coupling = coupling::parse(formula).map_err(|what| {
                refuse(
                    "coupling",
                    format!("\"{}\": {what}; write something like \"lambda/(8 pi^2)\"", shorten(formula)),
                )
            })?;
            let uncertainty = match &entry.uncertainty {
                None => None,
                Some(text) => match read("uncertainty", text)? {
                    Expression::Number { value, .. } => Some(value),
                    _ => {
                        return Err(refuse("uncertainty", format!("\"{}\" is not one positive number", shorten(text))));
                    }
                },
            };
            let list: Vec<(usize, &String)> = match (entry.order, &entry.value, &entry.values) {
                (Some(order), Some(value), None) => vec![(order, value)],
                (None, None, Some(values)) => values.iter().enumerate().map(|(i, value)| (i + 1, value)).collect(),
                _ => {
                    return Err(refuse(
                        "value",
                        "give either loop and value, or values = [...] for loops 1, 2, ...".into(),
                    ));
                }
            };
            for (order, text) in list {
                if order == 0 || order > 1000 {
                    return Err(refuse("loop", format!("{order} is not between 1 and 1000")));
                }
                entries.push(Entry {
                    family,
                    label: entry.label.clone(),
                    one_loop: entry.one_loop.as_ref().map(|text| read("one_loop", text)).transpose()?,
                    one_loop_text: entry.one_loop.clone(),
                    minimal_polynomial: entry
                        .minimal_polynomial
                        .as_ref()
                        .map(|text| read("minimal_polynomial", text))
                        .transpose()?,
                    order,
                    value: read("value", text)?,
                    value_text: text.clone(),
                    uncertainty: uncertainty.clone(),
                    part: entry.part.unwrap_or(Part::Complete),
                    coupling: coupling.clone(),
                    citation: entry
                        .citation
                        .as_ref()
                        .or(raw.citation.as_ref())
                        .cloned()
                        .unwrap_or_else(|| "no citation".into()),
                    number,
                });
            }
        }
        Ok(Reference { title: raw.title, entries })
    }
}

/// At most 60 characters of what a file holds, for messages.
fn shorten(text: &str) -> String {
    let mut short: String = text.chars().take(60).map(|c| if c.is_control() { ' ' } else { c }).collect();
    if text.chars().count() > 60 {
        short.push_str("...");
    }
    short
}

#[cfg(test)]
mod tests {
    use super::Reference;
    use proptest::prelude::*;

    const GOOD: &str = "coupling = \"lambda/(16 pi^2)\"\n[[entry]]\nfamily = [4, 2]\nvalues = [\"12\", \"-48\"]\n";

    #[test]
    fn a_list_of_values_is_loops_one_two() {
        let reference = Reference::from_toml(GOOD, "test").unwrap();
        assert_eq!(reference.entries.iter().map(|entry| entry.order).collect::<Vec<_>>(), [1, 2]);
    }

    #[test]
    fn broken_files_are_refused_naming_the_entry() {
        for (change, word) in [
            ("coupling = \"lambda\"\n[[entry]]\nfamily = [4, 2]\nvalues = []", "coupling"),
            ("[[entry]]\nfamily = [4, 2]\nloop = 1\nvalue = \"1\"", "coupling"),
            ("title = \"x\"", "nothing to compare"),
            ("[[entry]]\nfamily = [4, 2]\nloop = 1", "entry 1"),
            ("coupling = \"lambda/pi^2\"\n[[entry]]\nfamily = [4, 3]\nloop = 1\nvalue = \"1\"", "not a family"),
            ("coupling = \"lambda/pi^2\"\n[[entry]]\nfamily = [4, 2]\nloop = 1\nvalue = \"1 +\"", "value"),
            ("coupling = \"lambda/pi^2\"\n[[entry]]\nfamily = [4, 2]\nloop = 0\nvalue = \"1\"", "loop"),
            ("colour = 1", "not a reference file"),
        ] {
            let error = Reference::from_toml(change, "test").unwrap_err();
            assert_eq!(error.exit_code(), 2, "{change}");
            assert!(error.chain().contains(word), "{change}: {}", error.chain());
        }
    }

    proptest! {
        #[test]
        fn arbitrary_bytes_never_panic(bytes in proptest::collection::vec(any::<u8>(), 0..300)) {
            let _ = Reference::from_toml(&String::from_utf8_lossy(&bytes), "fuzz");
        }

        #[test]
        fn damaged_files_never_panic(at in 0usize..100, byte in 0u8..128) {
            let mut bytes = GOOD.as_bytes().to_vec();
            let at = at % bytes.len();
            bytes[at] = byte;
            let _ = Reference::from_toml(&String::from_utf8_lossy(&bytes), "fuzz");
        }
    }
}
