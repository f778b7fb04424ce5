use std::format;
use std::string::String;
use std::time::Duration;

use indicatif::{ProgressBar, ProgressDrawTarget, ProgressStyle};

/// Tells a person at a terminal how far an experiment has come; says nothing to a file or a pipe.
pub(super) struct Progress {
    bar: ProgressBar,
    failures: u64,
}

impl Progress {
    /// Of so many runs in all; `done` of them, with `failures`, are on disk from before.
    pub(super) fn new(runs: usize, done: usize, failures: u64, shown: bool) -> Self {
        let target = if shown {
            ProgressDrawTarget::stderr() // hidden by itself where it is no terminal
        } else {
            ProgressDrawTarget::hidden()
        };
        let style =
            ProgressStyle::with_template("{bar:32} {pos} of {len} runs, {msg}, about {eta} left")
                .unwrap_or_else(|_| ProgressStyle::default_bar());
        let bar = ProgressBar::with_draw_target(Some(runs as u64), target)
            .with_style(style)
            .with_message(in_words(failures))
            .with_position(done as u64);
        bar.reset_eta();
        if !bar.is_hidden() {
            bar.enable_steady_tick(Duration::from_millis(500));
        }
        Progress { bar, failures }
    }

    pub(super) fn one_more(&mut self, failed: bool) {
        if failed {
            self.failures += 1;
            self.bar.set_message(in_words(self.failures));
        }
        self.bar.inc(1);
    }

    pub(super) fn finish(self) {
        self.bar.abandon();
    }
}

fn in_words(failures: u64) -> String {
    let word = if failures == 1 { "failure" } else { "failures" };
    format!("{failures} {word}")
}
