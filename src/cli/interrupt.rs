//! Ctrl-C and friends (SIGINT, SIGTERM, SIGHUP): the first one asks to stop, the second one stops.

use crate::error::{Error, Result};
use std::io::Write;
use std::sync::OnceLock;
use std::sync::atomic::{AtomicUsize, Ordering};
use std::time::Duration;

static REQUESTS: AtomicUsize = AtomicUsize::new(0);

/// Whether the user has asked to stop.
pub fn requested() -> bool {
    REQUESTS.load(Ordering::Relaxed) > 0
}

/// Listens from now on. A first signal makes [`requested`] true; when the program is still there
/// `grace` later, it ends with the exit code of an interruption. A second signal ends it at once.
/// Results are safe either way: files are written whole or not at all.
///
/// # Errors
/// The system refuses the handler.
pub fn listen(grace: Duration) -> Result<()> {
    static INSTALLED: OnceLock<bool> = OnceLock::new();
    let installed = *INSTALLED.get_or_init(|| {
        ctrlc::set_handler(move || {
            if REQUESTS.fetch_add(1, Ordering::SeqCst) > 0 {
                leave();
            }
            let _ = writeln!(std::io::stderr().lock(), "stopping; once more to stop at once");
            std::thread::spawn(move || {
                std::thread::sleep(grace);
                leave();
            });
        })
        .is_ok()
    });
    if installed {
        return Ok(());
    }
    Err(Error::check("cannot listen for Ctrl-C: another handler is installed; please report this"))
}

/// Ends the process as `main` would for [`Error::interrupted`].
fn leave() -> ! {
    let error = Error::interrupted();
    let _ = writeln!(std::io::stderr().lock(), "loopladder: {error}");
    std::process::exit(i32::from(error.exit_code()));
}
