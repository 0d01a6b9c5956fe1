//! Progress on the error stream of a terminal: shown when something takes more than a second, gone when it is done.

use std::io::{IsTerminal, Write};
use std::time::{Duration, Instant};

/// A line of progress with an estimate.
pub struct Progress {
    started: Instant,
    /// What is being done, and since when.
    stage: (&'static str, Instant),
    drawn: Option<Instant>,
    shown: bool,
}

impl Progress {
    /// Nothing is shown yet; nothing ever is where the error stream is no terminal, or NO_COLOR is set.
    pub fn new() -> Self {
        let shown = std::io::stderr().is_terminal() && std::env::var_os("NO_COLOR").is_none();
        let now = Instant::now();
        Progress {
            started: now,
            stage: ("", now),
            drawn: None,
            shown,
        }
    }

    /// Shows how much of what is being done is done, 0 to 1, with a remark.
    pub fn show(&mut self, what: &'static str, done: f64, remark: &str) {
        if !self.shown {
            return;
        }
        if self.stage.0 != what {
            self.stage = (what, Instant::now());
        }
        let now = Instant::now();
        let elapsed = now - self.started;
        let due = self.drawn.map_or(elapsed > Duration::from_secs(1), |last| {
            now - last > Duration::from_millis(200)
        });
        if !due {
            return;
        }
        self.drawn = Some(now);
        let spent = (now - self.stage.1).as_secs_f64();
        let left = spent * (1.0 - done) / done.max(1e-6);
        let line = format!(
            "\r\x1b[K{what} {:3.0} %  {remark}  about {} left",
            100.0 * done,
            rounded(left)
        );
        let mut out = std::io::stderr();
        // Progress that cannot be shown is no reason to stop.
        let _ = out.write_all(line.as_bytes()).and_then(|()| out.flush());
    }
}

/// A span of time as an estimate deserves it: whole seconds, minutes or hours.
fn rounded(seconds: f64) -> String {
    match seconds {
        s if s < 100.0 => format!("{s:.0} s"),
        s if s < 6_000.0 => format!("{:.0} min", s / 60.0),
        s => format!("{:.0} h", s / 3_600.0),
    }
}

impl Drop for Progress {
    fn drop(&mut self) {
        if self.drawn.is_some() {
            let mut out = std::io::stderr();
            let _ = out.write_all(b"\r\x1b[K").and_then(|()| out.flush());
        }
    }
}
