//! Progress on standard error: only on a terminal, and only when the work lasts.

use std::sync::atomic::{AtomicBool, Ordering};
use std::time::{Duration, Instant};

use indicatif::{ProgressBar, ProgressDrawTarget, ProgressStyle};

/// Shorter work shows nothing.
const PATIENCE: Duration = Duration::from_millis(500);

/// A bar that counts files.
pub struct Progress {
    bar: ProgressBar,
    since: Instant,
    shown: AtomicBool,
}

impl Progress {
    /// A bar for so many files; never shown if not `wanted`.
    pub fn new(files: usize, wanted: bool) -> Self {
        let bar = ProgressBar::with_draw_target(Some(files as u64), ProgressDrawTarget::hidden());
        if let Ok(style) = ProgressStyle::with_template("{bar:30} {pos} of {len} files, {elapsed} so far") {
            bar.set_style(style);
        }
        Self { bar, since: Instant::now(), shown: AtomicBool::new(!wanted) }
    }

    /// So many more files are done.
    pub fn advance(&self, files: usize) {
        if self.since.elapsed() > PATIENCE && !self.shown.swap(true, Ordering::Relaxed) {
            // This target stays dark where standard error is no terminal.
            self.bar.set_draw_target(ProgressDrawTarget::stderr());
        }
        self.bar.inc(files as u64);
    }

    /// Removes the bar.
    pub fn finish(&self) {
        self.bar.finish_and_clear();
    }
}
