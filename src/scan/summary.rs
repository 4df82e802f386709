//! What became of every family of a scan.

use super::values::show_time;
use crate::error::{Error, Kind, Result};
use crate::family::Family;
use std::path::PathBuf;

/// What became of one family.
#[derive(Debug)]
pub enum Outcome {
    /// Computed and stored, with the seconds it took.
    Computed {
        /// Wall-clock seconds.
        seconds: f64,
        /// Records written: one, or one for each orbit that the filter admits.
        records: usize,
    },
    /// The complete record was there before.
    Kept,
    /// Another scan on the same directory has computed it meanwhile.
    Elsewhere,
    /// It failed, and why.
    Failed(Error),
    /// It was in work when the scan was interrupted; its finished work units are kept.
    Interrupted,
    /// The scan ended before its turn.
    NotStarted,
}

/// What became of every family, in the order of the plan.
#[derive(Debug)]
pub struct Summary {
    /// Where the records are.
    pub directory: PathBuf,
    /// Families and outcomes.
    pub families: Vec<(Family, Outcome)>,
    /// Wall-clock seconds of the whole scan.
    pub seconds: f64,
    /// Whether the user stopped the scan.
    pub interrupted: bool,
    /// The failure of the file system that ended the scan, if one did.
    pub storage: Option<String>,
}

impl Summary {
    /// How many families have an outcome that `test` accepts.
    pub fn count(&self, test: impl Fn(&Outcome) -> bool) -> usize {
        self.families.iter().filter(|(_, outcome)| test(outcome)).count()
    }

    /// The summary as text: one line of counts, then one line for each family that is not complete.
    pub fn text(&self) -> String {
        let mut counts = Vec::new();
        let mut add = |number: usize, words: &str| {
            if number > 0 {
                counts.push(format!("{number} {words}"));
            }
        };
        add(self.count(|o| matches!(o, Outcome::Computed { .. })), "computed");
        add(self.count(|o| matches!(o, Outcome::Kept)), "kept");
        add(self.count(|o| matches!(o, Outcome::Elsewhere)), "computed by another scan");
        add(self.count(|o| matches!(o, Outcome::Failed(_))), "failed");
        add(self.count(|o| matches!(o, Outcome::Interrupted)), "interrupted");
        add(self.count(|o| matches!(o, Outcome::NotStarted)), "not started");
        let mut text = format!(
            "{} {} in {}: {}; {}\n",
            self.families.len(),
            if self.families.len() == 1 { "family" } else { "families" },
            self.directory.display(),
            counts.join(", "),
            show_time(self.seconds)
        );
        for (family, outcome) in &self.families {
            if let Outcome::Failed(error) = outcome {
                text.push_str(&format!("failed {family}: {}\n", error.chain()));
            }
        }
        if self.interrupted {
            text.push_str("interrupted: everything finished is kept; run the same command again to go on\n");
        }
        text
    }

    /// `Ok` when every family is complete; otherwise the error whose kind is the exit code.
    ///
    /// # Errors
    /// Interrupted (7), a failure of the file system (6), or families that failed (1).
    pub fn verdict(&self) -> Result<()> {
        if self.interrupted {
            return Err(Error::interrupted());
        }
        if let Some(what) = &self.storage {
            return Err(Error::new(
                Kind::Io,
                format!(
                    "the scan ended because nothing more can be stored ({what}); make space or permissions, then run it again"
                ),
            ));
        }
        let failed =
            self.count(|outcome| !matches!(outcome, Outcome::Computed { .. } | Outcome::Kept | Outcome::Elsewhere));
        if failed > 0 {
            return Err(Error::new(
                Kind::Negative,
                format!(
                    "{failed} of {} families failed; the reasons are above, the others are complete",
                    self.families.len()
                ),
            ));
        }
        Ok(())
    }
}
