//! `loopladder completions`: shell completions.

use super::Console;
use crate::error::Result;

/// Completions for a shell, to standard output.
#[derive(clap::Args)]
#[command(
    after_help = "Example:\n  loopladder completions bash > ~/.local/share/bash-completion/completions/loopladder"
)]
pub struct Arguments {
    /// The shell
    #[arg(value_enum)]
    shell: clap_complete::Shell,
}

/// Runs the command.
///
/// # Errors
/// Writing failed.
pub fn run(arguments: &Arguments, console: &Console) -> Result<()> {
    let mut bytes = Vec::new();
    clap_complete::generate(arguments.shell, &mut super::definition(), "loopladder", &mut bytes);
    console.result(&String::from_utf8_lossy(&bytes))
}
