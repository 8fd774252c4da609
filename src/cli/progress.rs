//! Progress on standard error: a bar on a terminal, a line for each new stage elsewhere.

use crate::report::ticks::short;
use crate::study::StepRecord;
use std::io::{IsTerminal, Write};

/// Cells of the bar.
const CELLS: usize = 24;

/// What was shown last.
pub(super) struct Progress {
    on_terminal: bool,
    stage: String,
    bar_shown: bool,
}

impl Progress {
    pub(super) fn new() -> Self {
        Self {
            on_terminal: std::io::stderr().is_terminal(),
            stage: String::new(),
            bar_shown: false,
        }
    }

    /// A stage and how much of it is done.
    pub(super) fn stage(&mut self, text: &str, fraction: f64) {
        if self.on_terminal {
            let done = (fraction.clamp(0.0, 1.0) * CELLS as f64).round() as usize;
            let bar = "#".repeat(done) + &".".repeat(CELLS - done);
            say(&format!("\r[{bar}] {text}\x1b[K"));
            self.bar_shown = true;
        } else if text != self.stage {
            say(&format!("{text}\n"));
        }
        text.clone_into(&mut self.stage);
    }

    /// An iteration of an improvement.
    pub(super) fn step(&mut self, record: &StepRecord, unit: &str) {
        self.clear();
        let taken = if record.accepted { "" } else { ", not taken" };
        let violation = if record.violation > 0.0 {
            format!(", limits missed by {} relative", short(record.violation, 2))
        } else {
            String::new()
        };
        say(&format!(
            "step {}: aim {} {unit}{violation}{taken}{}{}\n",
            record.step,
            short(record.aim_value, 6),
            if record.note.is_empty() { "" } else { ": " },
            record.note
        ));
        self.stage.clear();
    }

    /// Take the bar away.
    pub(super) fn clear(&mut self) {
        if std::mem::take(&mut self.bar_shown) {
            say("\r\x1b[K");
        }
    }
}

/// To standard error; nobody can be told when that is closed.
pub(super) fn say(text: &str) {
    let mut stderr = std::io::stderr().lock();
    let _ = stderr.write_all(text.as_bytes());
    let _ = stderr.flush();
}
