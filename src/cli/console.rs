//! Standard output and standard error as the commands see them: results to the first, messages to
//! the second; a closed pipe ends quietly; plain when not a terminal, and NO_COLOR is honoured.

use crate::error::{Error, Result};
use std::io::{IsTerminal, Write};

/// Where a command prints.
pub struct Console {
    /// Whether results may carry colour.
    pub colour: bool,
    /// Whether progress may be drawn as bars.
    pub interactive: bool,
}

impl Console {
    /// The console of this process.
    pub fn standard() -> Console {
        let plain = std::env::var_os("NO_COLOR").is_some_and(|value| !value.is_empty());
        Console { colour: !plain && std::io::stdout().is_terminal(), interactive: std::io::stderr().is_terminal() }
    }

    /// Writes a result to standard output. A reader that went away ends the program quietly.
    ///
    /// # Errors
    /// Any other failure of writing (for example a full disk behind a redirection).
    pub fn result(&self, text: &str) -> Result<()> {
        let mut out = std::io::stdout().lock();
        match out.write_all(text.as_bytes()).and_then(|()| out.flush()) {
            Err(cause) if cause.kind() == std::io::ErrorKind::BrokenPipe => std::process::exit(0),
            Err(cause) => Err(Error::io("cannot write to standard output; check where it leads", cause)),
            Ok(()) => Ok(()),
        }
    }

    /// Writes a message for people to standard error; a failure there is ignored.
    pub fn message(&self, text: &str) {
        let _ = writeln!(std::io::stderr().lock(), "{text}");
    }
}
