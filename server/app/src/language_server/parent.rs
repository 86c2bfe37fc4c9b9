//! The process that started the session: when it is gone, nobody is left to serve.
//!
//! A client that dies does not always close the streams, since others may hold them.

use std::time::Duration;

/// How often is looked.
const PERIOD: Duration = Duration::from_secs(2);

/// Comes back when there is no such process any more.
pub async fn gone(id: u32) {
    loop {
        tokio::time::sleep(PERIOD).await;
        if !exists(id) {
            return;
        }
    }
}

#[cfg(unix)]
fn exists(id: u32) -> bool {
    use rustix::io::Errno;
    use rustix::process::{Pid, test_kill_process};
    let Some(pid) = i32::try_from(id).ok().and_then(Pid::from_raw) else { return true };
    // A process of somebody else exists, too.
    test_kill_process(pid) != Err(Errno::SRCH)
}

/// Where there is no way to ask, the end of standard input must do.
#[cfg(not(unix))]
fn exists(_: u32) -> bool {
    true
}

#[cfg(all(test, unix))]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    #[test]
    fn a_process_that_has_ended_is_gone() {
        let mut child = std::process::Command::new("true").spawn().unwrap();
        child.wait().unwrap();
        assert!(!exists(child.id()));
        assert!(exists(std::process::id()));
    }
}
