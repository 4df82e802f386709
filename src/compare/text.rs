//! Comparisons as text for people and as JSON for programs.

use super::judge::{Answer, Verdict};
use super::reference::Entry;
use super::{Comparison, coupling};
use serde_json::json;

/// The comparison as text: for each entry its state and citation, then its loops; neighbouring
/// loops with the same good answer share a line, and every difference is shown in full.
pub fn plain(comparison: &Comparison, colour: bool) -> String {
    let mut out = String::new();
    if let Some(title) = &comparison.reference.title {
        out.push_str(&format!("{}\n\n", printable(title)));
    }
    let pairs: Vec<(&Entry, &Answer)> = comparison.reference.entries.iter().zip(&comparison.answers).collect();
    for group in pairs.chunk_by(|a, b| a.0.number == b.0.number) {
        let entry = group[0].0;
        let part =
            if entry.part == super::Part::Complete { String::new() } else { format!("{} part; ", entry.part.name()) };
        out.push_str(&format!(
            "{}   [{part}{}; {}]\n",
            state_name(entry),
            coupling::formula(&entry.coupling),
            printable(&entry.citation)
        ));
        for run in group.chunk_by(|a, b| a.1.verdict == b.1.verdict) {
            let (first, last) = (run[0].0.order, run[run.len() - 1].0.order);
            let loops = if first == last { format!("loop {first}") } else { format!("loops {first} to {last}") };
            out.push_str(&format!("  {loops:<13} {}\n", verdict_word(&run[0].1.verdict, run.len() > 1, colour)));
            details(&mut out, run[0].0, run[0].1);
        }
    }
    let tally = comparison.tally();
    out.push_str(&format!(
        "\n{} values: {} agree exactly, {} to the printed digits, {} differ, {} not in the results\n",
        comparison.answers.len(),
        tally.exact,
        tally.digits,
        tally.differs,
        tally.missing
    ));
    out
}

fn verdict_word(verdict: &Verdict, several: bool, colour: bool) -> String {
    let (word, code) = match verdict {
        Verdict::Exact if several => ("agree exactly", "32"),
        Verdict::Exact => ("agrees exactly", "32"),
        Verdict::Digits if several => ("agree to the printed digits", "32"),
        Verdict::Digits => ("agrees to the printed digits", "32"),
        Verdict::Differs(_) => ("DIFFERS", "31"),
        Verdict::Missing(_) => ("not in the results", "33"),
    };
    if colour { format!("\u{1b}[{code}m{word}\u{1b}[0m") } else { word.into() }
}

fn details(out: &mut String, entry: &Entry, answer: &Answer) {
    match &answer.verdict {
        Verdict::Exact | Verdict::Digits => {}
        Verdict::Missing(reason) => out.push_str(&format!("      {reason}\n")),
        Verdict::Differs(difference) => {
            let label = answer.label.as_deref().unwrap_or("");
            let mut line = |name: &str, value: &str| out.push_str(&format!("      {name:<11} {value}\n"));
            line("printed", &printable(&entry.value_text));
            line("computed", &format!("{}   ({label})", difference.computed));
            line("difference", &difference.difference);
            if let Some(ratio) = &difference.ratio {
                line("ratio", ratio);
            }
            if let Some(hint) = &difference.hint {
                line("hint", hint);
            }
        }
    }
}

/// The comparison as a JSON object, ending in a newline.
pub fn json(comparison: &Comparison) -> String {
    let entries: Vec<serde_json::Value> = comparison
        .reference
        .entries
        .iter()
        .zip(&comparison.answers)
        .map(|(entry, answer)| {
            let mut object = json!({
                "entry": entry.number,
                "length": entry.family.length,
                "magnons": entry.family.magnons,
                "loop": entry.order,
                "part": entry.part.name(),
                "coupling": coupling::formula(&entry.coupling),
                "printed": entry.value_text,
                "citation": entry.citation,
                "orbit": answer.label,
            });
            let mut set = |key: &str, value: serde_json::Value| object[key] = value;
            match &answer.verdict {
                Verdict::Exact => set("answer", json!("agrees exactly")),
                Verdict::Digits => set("answer", json!("agrees to the printed digits")),
                Verdict::Missing(reason) => {
                    set("answer", json!("not in results"));
                    set("reason", json!(reason));
                }
                Verdict::Differs(difference) => {
                    set("answer", json!("differs"));
                    set("computed", json!(difference.computed));
                    set("difference", json!(difference.difference));
                    set("ratio", json!(difference.ratio));
                    set("hint", json!(difference.hint));
                }
            }
            object
        })
        .collect();
    let tally = comparison.tally();
    let whole = json!({
        "title": comparison.reference.title,
        "exact": tally.exact, "digits": tally.digits, "differs": tally.differs, "missing": tally.missing,
        "entries": entries,
    });
    format!("{whole:#}\n")
}

fn state_name(entry: &Entry) -> String {
    let state = match (&entry.label, &entry.one_loop_text) {
        (Some(label), _) => format!(" {}", printable(label)),
        (None, Some(one_loop)) => format!(" gamma_1 = {}", printable(one_loop)),
        (None, None) => String::new(),
    };
    format!("{}{state}", entry.family)
}

/// Control characters of a foreign file do not reach the terminal.
fn printable(text: &str) -> String {
    text.chars().map(|c| if c.is_control() { ' ' } else { c }).collect()
}
