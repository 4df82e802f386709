//! Plans: which families, through which loop, where to, in TOML.
//!
//! ```toml
//! output = "results"            # or --out
//! threads = 2                   # or --threads
//! memory = "2G"                 # or --memory
//! certificates = true           # or --certificates
//! export = ["html", "csv"]      # tables of this plan's families, written at the end
//!
//! [[families]]
//! lengths = [4, "6-8"]          # a number, a range, or a list of these
//! magnons = "2-4"               # left out: every M >= 2
//! loops = 5                     # a limit; left out: every complete loop
//! max_primaries = 20            # larger families are left out
//! max_degree = 3                # orbits of higher degree are left out
//! parity = "symmetric"          # or "paired": the other orbits are left out
//! ```
//!
//! Everything is checked before anything is computed, and every refusal has line and column.

use super::place::Source;
use super::values::{self, Range};
use crate::error::{Error, Result};
use crate::family::{Family, LONGEST};
use crate::record::Parity;
use crate::report::export::Format;
use std::collections::BTreeMap;
use std::path::{Path, PathBuf};
use toml::Spanned;
use toml::de::{DeTable, DeValue};

/// A plan, checked: never empty, no family twice.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Plan {
    /// The results directory, relative to the working directory.
    pub output: Option<PathBuf>,
    /// Worker threads.
    pub threads: Option<usize>,
    /// Memory bound in bytes.
    pub memory: Option<u64>,
    /// Whether certificates are stored beside the records.
    pub certificates: bool,
    /// Report formats written at the end.
    pub export: Vec<Format>,
    /// What to compute, ascending in (L, M).
    pub tasks: Vec<Task>,
}

/// One family of a plan.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Task {
    /// (L, M).
    pub family: Family,
    /// The highest loop order wanted; `None`: all that are complete.
    pub limit: Option<usize>,
    /// Which orbits.
    pub filter: Filter,
}

/// Which orbits of a family are wanted.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Filter {
    /// Orbits of higher degree are left out.
    pub max_degree: Option<usize>,
    /// Orbits of the other parity are left out.
    pub parity: Option<Parity>,
}

impl Filter {
    /// Whether every orbit passes whatever it is.
    pub fn is_open(&self) -> bool {
        *self == Filter::default()
    }

    /// Whether an orbit passes.
    pub fn admits(&self, degree: usize, parity: Parity) -> bool {
        self.max_degree.is_none_or(|most| degree <= most) && self.parity.is_none_or(|wanted| wanted == parity)
    }
}

const TOP: [&str; 6] = ["output", "threads", "memory", "certificates", "export", "families"];
const TABLE: [&str; 6] = ["lengths", "magnons", "loops", "max_primaries", "max_degree", "parity"];

impl Plan {
    /// Reads a plan file.
    ///
    /// # Errors
    /// An unreadable file (io), or anything [`Plan::parse`] refuses.
    pub fn read(path: &Path) -> Result<Plan> {
        let origin = path.display().to_string();
        let text = std::fs::read(path).map_err(|cause| {
            Error::io(format!("cannot read the plan {origin}; check the path and its permissions"), cause)
        })?;
        let text = String::from_utf8(text).map_err(|cause| {
            Error::input(format!("{origin}: a plan is UTF-8 text; save it as UTF-8")).because(cause)
        })?;
        Plan::parse(&text, &origin)
    }

    /// Reads a plan; `origin` names it in errors.
    ///
    /// # Errors
    /// Text that is not TOML, unknown keys, values out of range, items that select nothing,
    /// contradictions between tables, and empty plans; each with line and column.
    pub fn parse(text: &str, origin: &str) -> Result<Plan> {
        let source = Source { origin, text };
        let document = DeTable::parse(text).map_err(|error| {
            let offset = error.span().map_or(0, |span| span.start);
            source.refuse(offset, format!("{}; a plan is TOML text", error.message().trim_end()))
        })?;
        let table = document.get_ref();
        source.only_known(table, &TOP, "a plan")?;
        let get = |key: &str| table.get(key);

        let output = get("output").map(|v| text_of(source, "output", v)).transpose()?.map(PathBuf::from);
        if output.as_ref().is_some_and(|path| path.as_os_str().is_empty()) {
            let offset = get("output").map_or(0, |v| v.span().start);
            return Err(source.refuse(offset, "output is empty; name a directory"));
        }
        let threads = get("threads").map(|v| positive(source, "threads", v)).transpose()?;
        let memory = get("memory").map(|v| memory_of(source, v)).transpose()?;
        let certificates = match get("certificates") {
            None => false,
            Some(v) => v.get_ref().as_bool().ok_or_else(|| {
                source.refuse(
                    v.span().start,
                    format!("certificates is a {}; write true or false", v.get_ref().type_str()),
                )
            })?,
        };
        let export = get("export").map(|v| formats(source, v)).transpose()?.unwrap_or_default();
        let tasks = tasks(source, get("families"))?;
        Ok(Plan { output, threads, memory, certificates, export, tasks })
    }
}

fn text_of(source: Source, key: &str, value: &Spanned<DeValue>) -> Result<String> {
    value.get_ref().as_str().map(str::to_string).ok_or_else(|| {
        source.refuse(value.span().start, format!("{key} is a {}; write text in quotes", value.get_ref().type_str()))
    })
}

fn positive(source: Source, key: &str, value: &Spanned<DeValue>) -> Result<usize> {
    match values::number(source, key, value)? {
        0 => Err(source.refuse(value.span().start, format!("{key} = 0 leaves nothing to do; give at least 1"))),
        number => Ok(number),
    }
}

fn memory_of(source: Source, value: &Spanned<DeValue>) -> Result<u64> {
    if value.get_ref().is_integer() {
        return positive(source, "memory", value).map(|bytes| bytes as u64);
    }
    let text = text_of(source, "memory", value)?;
    values::parse_size(&text).map_err(|error| source.refuse(value.span().start, error.to_string()))
}

/// The formats by name.
const FORMATS: [(&str, Format); 5] = [
    ("latex", Format::Latex),
    ("markdown", Format::Markdown),
    ("csv", Format::Csv),
    ("json", Format::Json),
    ("html", Format::Html),
];

fn formats(source: Source, value: &Spanned<DeValue>) -> Result<Vec<Format>> {
    let known = FORMATS.map(|(name, _)| name).join(", ");
    let Some(items) = value.get_ref().as_array() else {
        let what = format!("export is not a list; write for example [\"csv\"], from {known}");
        return Err(source.refuse(value.span().start, what));
    };
    let mut formats = Vec::new();
    for item in items.iter() {
        let name = text_of(source, "export", item)?;
        let offset = item.span().start;
        let Some((_, format)) = FORMATS.into_iter().find(|(known, _)| *known == name) else {
            return Err(source.refuse(offset, format!("export names \"{name}\"; the formats are {known}")));
        };
        if formats.contains(&format) {
            return Err(source.refuse(offset, format!("export names \"{name}\" twice; remove one")));
        }
        formats.push(format);
    }
    Ok(formats)
}

/// Expands all [[families]] tables; a family asked for twice must be asked for in the same way.
fn tasks(source: Source, value: Option<&Spanned<DeValue>>) -> Result<Vec<Task>> {
    let empty = |offset| {
        source.refuse(offset, "the plan is empty; add a [[families]] table with lengths, such as lengths = \"4-8\"")
    };
    let Some(value) = value else { return Err(empty(0)) };
    let offset = value.span().start;
    let tables = value.get_ref().as_array().ok_or_else(|| {
        source.refuse(offset, "families is not a list of tables; write [[families]] with double brackets")
    })?;
    if tables.is_empty() {
        return Err(empty(offset));
    }
    let mut all: BTreeMap<Family, (Task, usize)> = BTreeMap::new();
    for item in tables.iter() {
        let offset = item.span().start;
        let table = item.get_ref().as_table().ok_or_else(|| {
            source.refuse(offset, "an entry of families is not a table; write [[families]] and keys below it")
        })?;
        for task in expand(source, table, offset)? {
            match all.get(&task.family) {
                Some((earlier, _)) if *earlier == task => {}
                Some((_, place)) => {
                    return Err(source.refuse(
                        offset,
                        format!(
                            "this table asks for the family {} in another way than the table at {}; keep each family in one table",
                            task.family,
                            source.place(*place)
                        ),
                    ));
                }
                None => {
                    all.insert(task.family, (task, offset));
                }
            }
        }
    }
    Ok(all.into_values().map(|(task, _)| task).collect())
}

/// The tasks of one [[families]] table.
fn expand(source: Source, table: &DeTable, offset: usize) -> Result<Vec<Task>> {
    source.only_known(table, &TABLE, "a [[families]] table")?;
    let get = |key: &str| table.get(key);
    let lengths_value = get("lengths").ok_or_else(|| {
        source.refuse(offset, "this [[families]] table has no lengths; add for example lengths = \"4-8\"")
    })?;
    let lengths = values::ranges(source, "lengths", lengths_value)?;
    if let Some(range) = lengths.iter().find(|range| range.high > LONGEST || range.low < 2) {
        let what = if range.low < 2 {
            format!("lengths start at 2, and this asks for {}; correct it", range.low)
        } else {
            format!("the largest length accepted is {LONGEST}, and this asks for {}; correct it", range.high)
        };
        return Err(source.refuse(range.offset, what));
    }
    let magnons = get("magnons").map(|value| values::ranges(source, "magnons", value)).transpose()?;
    if let Some(range) = magnons.iter().flatten().find(|range| range.low == 1 && range.high == 1) {
        let what = "magnons = 1: one magnon with zero total momentum is a descendant of the protected state, so there is no primary; give M = 0 or M >= 2";
        return Err(source.refuse(range.offset, what));
    }
    let limit = get("loops").map(|value| positive(source, "loops", value)).transpose()?;
    let most = get("max_primaries").map(|value| positive(source, "max_primaries", value)).transpose()?;
    let filter = Filter {
        max_degree: get("max_degree").map(|value| positive(source, "max_degree", value)).transpose()?,
        parity: get("parity").map(|value| parity(source, value)).transpose()?,
    };

    let families = select(source, &lengths, magnons.as_deref())?;
    let tasks: Vec<Task> = families
        .into_iter()
        .filter(|family| most.is_none_or(|most| family.primaries() <= most))
        .map(|family| Task { family, limit, filter })
        .collect();
    if tasks.is_empty() {
        let place = get("max_primaries").map_or(offset, |value| value.span().start);
        return Err(source.refuse(place, "max_primaries leaves no family of this table; raise it or remove the table"));
    }
    Ok(tasks)
}

/// All families with L in `lengths` and M in `magnons`. Every item written must select something:
/// one that does not is a mistake that would otherwise go unseen.
fn select(source: Source, lengths: &[Range], magnons: Option<&[Range]>) -> Result<Vec<Family>> {
    let mut families = Vec::new();
    let mut useful = vec![false; magnons.map_or(0, <[Range]>::len)];
    for range in lengths {
        let before = families.len();
        for length in range.low..=range.high {
            for number in (0..=length / 2).filter(|&number| number != 1) {
                let wanted = match magnons {
                    None => number >= 2,
                    Some(items) => {
                        for (index, item) in items.iter().enumerate() {
                            useful[index] |= item.contains(number);
                        }
                        items.iter().any(|item| item.contains(number))
                    }
                };
                if wanted {
                    families.push(Family::new(length, number)?);
                }
            }
        }
        if families.len() == before {
            let what = match magnons {
                None => "no family with 2 <= M <= L/2 has such a length (the first is L = 4); correct or remove it",
                Some(_) => "no family with the magnons asked for (M <= L/2) has such a length; correct or remove it",
            };
            return Err(source.refuse(range.offset, what));
        }
    }
    if let Some(index) = useful.iter().position(|useful| !useful) {
        let offset = magnons.map_or(0, |items| items[index].offset);
        return Err(source.refuse(
            offset,
            "no length of this table has a family with so many magnons (highest-weight states have M <= L/2); correct or remove it",
        ));
    }
    families.sort();
    families.dedup();
    Ok(families)
}

fn parity(source: Source, value: &Spanned<DeValue>) -> Result<Parity> {
    match value.get_ref().as_str() {
        Some("symmetric") => Ok(Parity::Symmetric),
        Some("paired") => Ok(Parity::Paired),
        _ => {
            Err(source.refuse(value.span().start, "parity must be \"symmetric\" or \"paired\"; for both, leave it out"))
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn families(text: &str) -> Vec<(usize, usize)> {
        Plan::parse(text, "plan.toml").unwrap().tasks.iter().map(|t| (t.family.length, t.family.magnons)).collect()
    }

    #[test]
    fn numbers_ranges_and_lists_select_families() {
        assert_eq!(families("[[families]]\nlengths = 6"), [(6, 2), (6, 3)]);
        assert_eq!(families("[[families]]\nlengths = \"4-6\""), [(4, 2), (5, 2), (6, 2), (6, 3)]);
        assert_eq!(
            families("[[families]]\nlengths = [4, \"8-9\"]\nmagnons = [0, 4]"),
            [(4, 0), (8, 0), (8, 4), (9, 0), (9, 4)]
        );
        assert_eq!(families("[[families]]\nlengths = 8\nmagnons = \"0-3\""), [(8, 0), (8, 2), (8, 3)]);
        assert_eq!(families("[[families]]\nlengths = 10\nmax_primaries = 4"), [(10, 2), (10, 5)]);
        // The same family asked for twice in the same way is asked for once.
        assert_eq!(families("[[families]]\nlengths = 4\n[[families]]\nlengths = \"4-5\""), [(4, 2), (5, 2)]);
    }

    #[test]
    fn every_key_arrives() {
        let plan = Plan::parse(
            "output = \"out\"\nthreads = 3\nmemory = \"2G\"\ncertificates = true\nexport = [\"csv\"]\n\
             [[families]]\nlengths = 8\nmagnons = 3\nloops = 5\nmax_degree = 2\nparity = \"paired\"\n",
            "plan.toml",
        )
        .unwrap();
        assert_eq!(plan.output, Some(PathBuf::from("out")));
        assert_eq!((plan.threads, plan.memory, plan.certificates), (Some(3), Some(2 << 30), true));
        assert_eq!(plan.export, [Format::Csv]);
        let task = &plan.tasks[0];
        assert_eq!(task.limit, Some(5));
        assert!(task.filter.admits(2, Parity::Paired) && !task.filter.admits(3, Parity::Paired));
        assert!(!task.filter.admits(1, Parity::Symmetric));
    }

    #[test]
    fn mistakes_are_refused_with_line_and_column() {
        for (text, place, words) in [
            ("", "1:1", "empty"),
            ("families = []", "1:12", "empty"),
            ("[families]\nlengths = 4", "1:1", "double brackets"),
            ("[[families]]\nlenghts = 4", "2:1", "unknown key \"lenghts\""),
            ("colour = 1\n[[families]]\nlengths = 4", "1:1", "unknown key \"colour\""),
            ("[[families]]\nlengths = 4\nmagnons", "3:8", "TOML"),
            ("[[families]]\nlengths = \"8-4\"", "2:11", "backwards"),
            ("[[families]]\nlengths = [4, \"x\"]", "2:15", "not a number or a range"),
            ("[[families]]\nlengths = []", "2:11", "selects nothing"),
            ("[[families]]\nlengths = 4.5", "2:11", "holds a float"),
            ("[[families]]\nlengths = -4", "2:11", "negative"),
            ("[[families]]\nlengths = [4, 3]", "2:15", "no family"),
            ("[[families]]\nlengths = 201", "2:11", "largest length"),
            ("[[families]]\nlengths = \"0-8\"", "2:11", "start at 2"),
            ("[[families]]\nmagnons = 2", "1:1", "no lengths"),
            ("[[families]]\nlengths = 6\nmagnons = 1", "3:11", "descendant"),
            ("[[families]]\nlengths = 6\nmagnons = [2, 4]", "3:15", "M <= L/2"),
            ("[[families]]\nlengths = 6\nloops = 0", "3:9", "loops = 0"),
            ("[[families]]\nlengths = 10\nmax_primaries = 3", "3:17", "leaves no family"),
            ("[[families]]\nlengths = 6\nparity = \"odd\"", "3:10", "\"symmetric\" or \"paired\""),
            ("threads = 0\n[[families]]\nlengths = 4", "1:11", "threads = 0"),
            ("memory = \"2X\"\n[[families]]\nlengths = 4", "1:10", "memory size"),
            ("export = \"csv\"\n[[families]]\nlengths = 4", "1:10", "not a list"),
            ("export = [\"csv\", \"pdf\"]\n[[families]]\nlengths = 4", "1:18", "the formats are latex"),
            ("export = [\"csv\", \"csv\"]\n[[families]]\nlengths = 4", "1:18", "twice"),
            ("certificates = 1\n[[families]]\nlengths = 4", "1:16", "true or false"),
            ("[[families]]\nlengths = 4\nlengths = 5", "3:1", "TOML"),
            (
                "[[families]]\nlengths = 8\nloops = 5\n[[families]]\nlengths = \"4-8\"",
                "4:1",
                "the family (8, 2) in another way than the table at plan.toml:1:1",
            ),
        ] {
            let error = Plan::parse(text, "plan.toml").expect_err(text);
            assert_eq!(error.exit_code(), 2);
            let message = error.to_string();
            assert!(message.starts_with(&format!("plan.toml:{place}: ")), "{text:?} gave {message}");
            assert!(message.contains(words), "{text:?} gave {message}");
        }
    }

    #[test]
    fn an_unreadable_plan_is_an_io_error() {
        assert_eq!(Plan::read(Path::new("/nowhere/plan.toml")).unwrap_err().exit_code(), 6);
    }
}
