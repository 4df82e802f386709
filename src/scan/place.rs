//! Places in a plan file: every refusal says file, line and column.

use crate::error::Error;
use toml::de::DeTable;

/// A plan's text and the name it goes by in messages.
#[derive(Clone, Copy)]
pub(super) struct Source<'a> {
    pub origin: &'a str,
    pub text: &'a str,
}

impl<'a> Source<'a> {
    /// Line and column of a byte offset, both from 1; the column counts characters.
    pub fn line_and_column(&self, offset: usize) -> (usize, usize) {
        let before = self.text.get(..offset).unwrap_or(self.text);
        let line = before.matches('\n').count() + 1;
        let column = before.rsplit('\n').next().map_or(0, |start| start.chars().count()) + 1;
        (line, column)
    }

    /// "plan.toml:3:7", the form that editors jump to.
    pub fn place(&self, offset: usize) -> String {
        let (line, column) = self.line_and_column(offset);
        format!("{}:{line}:{column}", self.origin)
    }

    /// An input error at a byte offset.
    pub fn refuse(&self, offset: usize, what: impl AsRef<str>) -> Error {
        Error::input(format!("{}: {}", self.place(offset), what.as_ref()))
    }

    /// Refuses the first key of `table` that is not among `known`.
    pub fn only_known(&self, table: &DeTable<'a>, known: &[&str], where_: &str) -> Result<(), Error> {
        let unknown = table.keys().filter(|key| !known.contains(&key.get_ref().as_ref()));
        match unknown.min_by_key(|key| key.span().start) {
            None => Ok(()),
            Some(key) => Err(self.refuse(
                key.span().start,
                format!(
                    "unknown key \"{}\"; {where_} may have {}; correct or remove it",
                    key.get_ref(),
                    known.join(", ")
                ),
            )),
        }
    }
}
