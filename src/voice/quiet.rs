//! Keeps what sound libraries write to standard error off the tester's screen.
//!
//! ALSA prints lines of its own when a card is missing, over whatever stands there. Promises:
//! standard error is back as it was afterwards; where that cannot be done nothing is changed.

use std::{fs::File, io};

/// Runs something with standard error turned away.
pub fn quietly<T>(run: impl FnOnce() -> T) -> T {
    let kept = turned_away();
    let out = run();
    if let Ok(kept) = kept {
        // If this fails standard error stays turned away: nothing is lost but words of libraries.
        let _ = rustix::stdio::dup2_stderr(&kept);
    }
    out
}

fn turned_away() -> io::Result<std::os::fd::OwnedFd> {
    let kept = rustix::io::dup(rustix::stdio::stderr())?;
    let nowhere = File::options().write(true).open("/dev/null")?;
    rustix::stdio::dup2_stderr(&nowhere)?;
    Ok(kept)
}
