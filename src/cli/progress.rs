//! A progress bar, on a terminal only.

use std::io::IsTerminal;
use std::time::Duration;

use indicatif::{ProgressBar, ProgressDrawTarget, ProgressStyle};

/// A bar on standard error; silent where that is no terminal or on `--quiet`.
pub struct Bar(ProgressBar);

impl Bar {
    /// A bar with a word in front; it appears only if the work takes longer than a moment.
    pub fn new(quiet: bool, what: &'static str) -> Self {
        let hidden = quiet || !std::io::stderr().is_terminal();
        let target = if hidden {
            ProgressDrawTarget::hidden()
        } else {
            ProgressDrawTarget::stderr()
        };
        let bar = ProgressBar::with_draw_target(None, target).with_message(what);
        if let Ok(style) = ProgressStyle::with_template("{msg} {bar:30} {percent}%") {
            bar.set_style(style);
        }
        Self(bar)
    }

    /// Shows how far the work has come.
    pub fn show(&self, done: u64, total: u64) {
        self.0.set_length(total);
        self.0.set_position(done);
    }

    /// Shows that work goes on whose length is not known.
    pub fn pulse(&self) {
        self.0.enable_steady_tick(Duration::from_millis(120));
    }

    /// Takes the bar away.
    pub fn finish(&self) {
        self.0.finish_and_clear();
    }
}
