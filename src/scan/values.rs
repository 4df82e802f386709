//! The values of a plan: whole numbers, ranges such as "4-8", lists of both, and sizes such as "2G".

use super::place::Source;
use crate::error::{Error, Result};
use toml::Spanned;
use toml::de::DeValue;

/// The inclusive range low … high and where it stands in the file.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Range {
    pub low: usize,
    pub high: usize,
    pub offset: usize,
}

impl Range {
    pub fn contains(&self, number: usize) -> bool {
        (self.low..=self.high).contains(&number)
    }
}

/// A non-negative whole number.
pub(super) fn number(source: Source, key: &str, value: &Spanned<DeValue>) -> Result<usize> {
    let offset = value.span().start;
    let integer = value.get_ref().as_integer().ok_or_else(|| {
        source
            .refuse(offset, format!("{key} is a {}, and must be a whole number such as 8", value.get_ref().type_str()))
    })?;
    usize::from_str_radix(integer.as_str(), integer.radix()).map_err(|_| {
        source.refuse(offset, format!("{key} = {integer} is negative or absurdly large; give a whole number such as 8"))
    })
}

/// A number, a range "low-high", or a list of these, in the order written.
pub(super) fn ranges(source: Source, key: &str, value: &Spanned<DeValue>) -> Result<Vec<Range>> {
    match value.get_ref() {
        DeValue::Array(items) if items.is_empty() => {
            Err(source
                .refuse(value.span().start, format!("{key} is an empty list, so it selects nothing; name a value")))
        }
        DeValue::Array(items) => items.iter().map(|item| one_range(source, key, item)).collect(),
        _ => Ok(vec![one_range(source, key, value)?]),
    }
}

fn one_range(source: Source, key: &str, value: &Spanned<DeValue>) -> Result<Range> {
    let offset = value.span().start;
    let Some(text) = value.get_ref().as_str() else {
        if value.get_ref().is_integer() {
            let low = number(source, key, value)?;
            return Ok(Range { low, high: low, offset });
        }
        return Err(source.refuse(
            offset,
            format!(
                "{key} holds a {}; write a number (8), a range (\"4-8\"), or a list of these ([4, \"6-8\"])",
                value.get_ref().type_str()
            ),
        ));
    };
    let (low, high) = parse_range(text).map_err(|what| source.refuse(offset, format!("{key}: {what}")))?;
    Ok(Range { low, high, offset })
}

/// Reads "8" or "4-8" (inclusive).
///
/// # Errors
/// What is wrong, in words, without a place.
pub fn parse_range(text: &str) -> std::result::Result<(usize, usize), String> {
    let wrong = || format!("\"{text}\" is not a number or a range such as \"4-8\"");
    let whole = |part: &str| {
        let part = part.trim();
        if part.is_empty() || !part.bytes().all(|b| b.is_ascii_digit()) {
            return Err(wrong());
        }
        part.parse::<usize>().map_err(|_| wrong())
    };
    let (low, high) = match text.split_once('-') {
        None => (whole(text)?, whole(text)?),
        Some((low, high)) => (whole(low)?, whole(high)?),
    };
    if low > high {
        return Err(format!("the range \"{text}\" runs backwards and is empty; write \"{high}-{low}\""));
    }
    Ok((low, high))
}

/// A size in bytes: "512M", "2G", "1.5 GiB", "3000000"; K, M, G, T are powers of 1024.
///
/// # Errors
/// Text that is not such a size, or a size of zero.
pub fn parse_size(text: &str) -> Result<u64> {
    let wrong = || {
        Error::input(format!(
            "\"{text}\" is not a memory size; write a number with K, M, G or T (powers of 1024), such as 512M or 2G"
        ))
    };
    let trimmed = text.trim();
    let split = trimmed.find(|c: char| !c.is_ascii_digit() && c != '.').unwrap_or(trimmed.len());
    let (digits, unit) = trimmed.split_at(split);
    let scale: u64 = match unit.trim().to_ascii_lowercase().as_str() {
        "" | "b" => 1,
        "k" | "kb" | "kib" => 1 << 10,
        "m" | "mb" | "mib" => 1 << 20,
        "g" | "gb" | "gib" => 1 << 30,
        "t" | "tb" | "tib" => 1 << 40,
        _ => return Err(wrong()),
    };
    let amount: f64 = digits.parse().map_err(|_| wrong())?;
    let bytes = amount * scale as f64;
    if !(1.0..1e18).contains(&bytes) {
        return Err(wrong());
    }
    Ok(bytes as u64)
}

/// A size for people: "1.5 GB" (powers of 1024, as in [`parse_size`]).
pub fn show_size(bytes: u64) -> String {
    if bytes > 1000 << 40 {
        return "over 1000 TB".to_string();
    }
    let units = [(1u64 << 40, "TB"), (1 << 30, "GB"), (1 << 20, "MB"), (1 << 10, "KB")];
    for (scale, unit) in units {
        if bytes >= scale {
            let amount = bytes as f64 / scale as f64;
            return if amount < 10.0 { format!("{amount:.1} {unit}") } else { format!("{amount:.0} {unit}") };
        }
    }
    format!("{bytes} B")
}

/// A time for people: "0.4 s", "35 s", "4 min", "2 h 10 min", "3 d 4 h".
pub fn show_time(seconds: f64) -> String {
    let whole = seconds.round().clamp(0.0, 1e15) as u64;
    match whole {
        _ if seconds > 3e10 => "over 1000 years".to_string(),
        _ if seconds < 0.095 => "under 0.1 s".to_string(),
        _ if seconds < 9.95 => format!("{seconds:.1} s"),
        0..120 => format!("{whole} s"),
        120..7200 => format!("{} min", (whole + 30) / 60),
        7200..172_800 => format!("{} h {} min", whole / 3600, whole % 3600 / 60),
        _ => format!("{} d {} h", whole / 86_400, whole % 86_400 / 3600),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ranges_and_sizes_have_one_meaning() {
        assert_eq!(parse_range("4-8"), Ok((4, 8)));
        assert_eq!(parse_range(" 7 "), Ok((7, 7)));
        for bad in ["", "-", "4-", "-4", "4-8-9", "a", "4..8", "4-+8", "99999999999999999999999"] {
            assert!(parse_range(bad).is_err(), "{bad}");
        }
        assert!(parse_range("8-4").unwrap_err().contains("backwards"));
        assert_eq!(parse_size("512M").unwrap(), 512 << 20);
        assert_eq!(parse_size("1.5 GiB").unwrap(), 3 << 29);
        assert_eq!(parse_size("100").unwrap(), 100);
        for bad in ["", "G", "-1G", "2X", "0", "1e3", "1.2.3M", "9999999T"] {
            assert_eq!(parse_size(bad).unwrap_err().exit_code(), 2, "{bad}");
        }
    }

    #[test]
    fn sizes_and_times_read_well() {
        assert_eq!(show_size(3 << 29), "1.5 GB");
        assert_eq!(show_size(300 << 20), "300 MB");
        assert_eq!(show_size(12), "12 B");
        for (seconds, text) in [
            (0.01, "under 0.1 s"),
            (0.44, "0.4 s"),
            (35.2, "35 s"),
            (240.0, "4 min"),
            (7800.0, "2 h 10 min"),
            (273_600.0, "3 d 4 h"),
            (1e12, "over 1000 years"),
        ] {
            assert_eq!(show_time(seconds), text);
        }
    }
}
