//! Progress on the error stream of a terminal: shown when something takes more than a second, gone when it is done.

use std::io::{IsTerminal, Write};
use std::time::{Duration, Instant};

/// A line of progress with an estimate.
pub struct Progress {
    started: Instant,
    drawn: Option<Instant>,
    shown: bool,
    what: &'static str,
}

impl Progress {
    /// Nothing is shown yet; nothing ever is where the error stream is no terminal, or NO_COLOR is set.
    pub fn new(what: &'static str) -> Self {
        let shown = std::io::stderr().is_terminal() && std::env::var_os("NO_COLOR").is_none();
        Progress {
            started: Instant::now(),
            drawn: None,
            shown,
            what,
        }
    }

    /// Shows how much is done, 0 to 1, with a remark.
    pub fn show(&mut self, done: f64, remark: &str) {
        if !self.shown {
            return;
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
        let left = elapsed.as_secs_f64() * (1.0 - done) / done.max(1e-6);
        let line = format!(
            "\r\x1b[K{} {:3.0} %  {remark}  about {left:.0} s left",
            self.what,
            100.0 * done
        );
        let mut out = std::io::stderr();
        // Progress that cannot be shown is no reason to stop.
        let _ = out.write_all(line.as_bytes()).and_then(|()| out.flush());
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
