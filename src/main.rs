//! Parses, runs, prints the error chain, sets the exit code.

use std::process::ExitCode;

fn main() -> ExitCode {
    match loopladder::cli::run(std::env::args_os()) {
        Ok(()) => ExitCode::SUCCESS,
        Err(error) => {
            eprintln!("loopladder: {}", error.chain());
            ExitCode::from(error.exit_code())
        }
    }
}
