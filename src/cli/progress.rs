//! How far a run is: a bar on a terminal, plain lines elsewhere. Writes to standard error.

use crate::batch::Progress;
use indicatif::{ProgressBar, ProgressDrawTarget, ProgressStyle};
use std::io::IsTerminal;
use std::time::{Duration, Instant};

/// How often a plain line comes.
const EVERY: Duration = Duration::from_secs(10);

/// Tells how far a run is.
pub(super) enum Told {
    /// On a terminal.
    Bar(ProgressBar),
    /// Elsewhere.
    Lines {
        /// When the last line was written.
        last: Instant,
    },
}

impl Told {
    /// Fit for standard error as it is.
    pub(super) fn new(households: u64) -> Told {
        if !std::io::stderr().is_terminal() {
            return Told::Lines {
                last: Instant::now(),
            };
        }
        let bar = ProgressBar::with_draw_target(Some(households), ProgressDrawTarget::stderr());
        let style = ProgressStyle::with_template(
            "{wide_bar} {pos} of {len} households, {per_sec}, {eta} left",
        );
        if let Ok(style) = style {
            bar.set_style(style);
        }
        Told::Bar(bar)
    }

    /// Takes the bar away.
    pub(super) fn end(&self) {
        match self {
            Told::Bar(bar) => bar.finish_and_clear(),
            Told::Lines { .. } => {}
        }
    }
}

impl Progress for Told {
    fn advance(&mut self, written: u64, households: u64) {
        match self {
            Told::Bar(bar) => bar.set_position(written),
            Told::Lines { last } => {
                if last.elapsed() >= EVERY {
                    *last = Instant::now();
                    eprintln!("{written} of {households} households");
                }
            }
        }
    }
}
