//! `loopladder manual`: the manual pages.

use super::Console;
use crate::error::{Error, Result};
use crate::record::write_atomically;
use std::path::PathBuf;

/// The manual page to standard output, or all pages (one for each command) into a directory.
#[derive(clap::Args)]
#[command(after_help = "Examples:\n  \
    loopladder manual > loopladder.1\n  \
    loopladder manual --out ~/.local/share/man/man1")]
pub struct Arguments {
    /// Write loopladder.1 and one page for each command into this directory
    #[arg(long, value_name = "DIR")]
    out: Option<PathBuf>,
}

/// Runs the command.
///
/// # Errors
/// Writing failed.
pub fn run(arguments: &Arguments, console: &Console) -> Result<()> {
    let mut command = super::definition();
    command.build();
    let Some(directory) = &arguments.out else {
        return console.result(&page(command)?);
    };
    std::fs::create_dir_all(directory).map_err(|cause| {
        Error::io(
            format!("cannot create the directory {}; check its parent and permissions", directory.display()),
            cause,
        )
    })?;
    let pages: Vec<clap::Command> = command.get_subcommands().filter(|sub| sub.get_name() != "help").cloned().collect();
    for sub in pages {
        let name = format!("loopladder-{}", sub.get_name());
        let text = page(sub)?;
        write_atomically(&directory.join(format!("{name}.1")), text.as_bytes())?;
    }
    write_atomically(&directory.join("loopladder.1"), page(command)?.as_bytes())
}

fn page(command: clap::Command) -> Result<String> {
    let mut bytes = Vec::new();
    clap_mangen::Man::new(command)
        .render(&mut bytes)
        .map_err(|cause| Error::io("cannot render the manual page", cause))?;
    Ok(String::from_utf8_lossy(&bytes).into_owned())
}
