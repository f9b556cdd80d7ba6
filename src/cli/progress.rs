//! A line on a terminal while work takes long; gone when it ends.

use std::io::{self, Write};
use std::sync::mpsc::{self, RecvTimeoutError, Sender};
use std::thread::{self, JoinHandle};
use std::time::{Duration, Instant};

/// Work shorter than this says nothing.
const PATIENCE: Duration = Duration::from_millis(500);
/// How often the line changes.
const BEAT: Duration = Duration::from_millis(500);

/// The line; it goes when this is dropped.
pub(super) struct Progress(Option<(Sender<()>, JoinHandle<()>)>);

impl Progress {
    /// Begins to wait. Nothing is ever shown unless the error stream is a terminal.
    pub(super) fn begin(name: &str, on_terminal: bool) -> Self {
        if !on_terminal {
            return Self(None);
        }
        let name = name.to_owned();
        let (done, wait) = mpsc::channel();
        let work = move || {
            let start = Instant::now();
            let mut pause = PATIENCE;
            let mut shown = false;
            while wait.recv_timeout(pause) == Err(RecvTimeoutError::Timeout) {
                say(&line(&name, start.elapsed()));
                (pause, shown) = (BEAT, true);
            }
            if shown {
                say(CLEAR);
            }
        };
        let thread = thread::Builder::new().spawn(work).ok();
        Self(thread.map(|thread| (done, thread)))
    }
}

impl Drop for Progress {
    fn drop(&mut self) {
        if let Some((done, thread)) = self.0.take() {
            drop(done);
            let _ = thread.join();
        }
    }
}

/// To the start of the line, and the line empty.
const CLEAR: &str = "\r\u{1b}[K";

fn line(name: &str, elapsed: Duration) -> String {
    let tenths = elapsed.as_millis() / 100;
    format!(
        "{CLEAR}working on {name} … {}.{} s",
        tenths / 10,
        tenths % 10
    )
}

/// If this fails there is nowhere to say so.
fn say(text: &str) {
    let mut errors = io::stderr();
    let _ = errors.write_all(text.as_bytes());
    let _ = errors.flush();
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_line_names_the_text_and_the_time() {
        let text = line("filter.cutloop", Duration::from_millis(1_260));
        assert_eq!(text, "\r\u{1b}[Kworking on filter.cutloop … 1.2 s");
    }

    #[test]
    fn short_work_ends_without_waiting() {
        let start = Instant::now();
        drop(Progress::begin("x", true));
        drop(Progress::begin("x", false));
        assert!(start.elapsed() < PATIENCE);
    }
}
