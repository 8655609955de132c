//! Ctrl-C during work that can be given up.

use std::sync::Arc;
use std::sync::atomic::AtomicBool;

use signal_hook::consts::{SIGINT, SIGTERM};
use signal_hook::flag;

use super::CliError;

/// What Ctrl-C ends a process with where it is pressed a second time: 128 + SIGINT, as shells have it.
const AT_ONCE: i32 = 130;

/// A flag that becomes true on Ctrl-C (or a request to terminate); a second one ends the process at
/// once. Whatever is under way is in one transaction or written aside, so that either is safe.
pub(super) fn wish() -> Result<Arc<AtomicBool>, CliError> {
    let wish = Arc::new(AtomicBool::new(false));
    for signal in [SIGINT, SIGTERM] {
        flag::register_conditional_shutdown(signal, AT_ONCE, Arc::clone(&wish))
            .and_then(|_| flag::register(signal, Arc::clone(&wish)))
            .map_err(CliError::Signal)?;
    }
    Ok(wish)
}
