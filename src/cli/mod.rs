//! The outside world: arguments, files, streams, exit statuses.
//!
//! [`main`] hands the streams of the process to [`run`]; everything below writes to the streams it is
//! handed. Answers go to the output, diagnostics to the errors.

pub mod args;
mod case;
mod command;
pub mod exit;
pub mod explain;
mod input;
mod output;
mod progress;

use std::ffi::OsString;
use std::io::{self, IsTerminal, Write};
use std::process::ExitCode;
use std::thread;

use clap::Parser;

use args::Arguments;
pub use exit::Exit;
pub use output::{Streams, Terminal};

/// Stack of the working thread: deep expressions are walked by recursion in a few places.
const STACK: usize = 256 << 20;

/// Runs the process: its arguments, its streams, its exit status.
#[must_use]
pub fn main() -> ExitCode {
    let terminal = Terminal::of_process();
    let work = move || {
        let (mut input, mut answers, mut errors) = (io::stdin(), io::stdout(), io::stderr());
        let mut streams = Streams {
            input: &mut input,
            answers: &mut answers,
            errors: &mut errors,
            terminal,
        };
        run(std::env::args_os(), &mut streams)
    };
    let exit = match thread::Builder::new().stack_size(STACK).spawn(work) {
        Ok(worker) => worker.join().unwrap_or_else(|_| broken()),
        Err(error) => no_thread(&error),
    };
    exit.into()
}

/// Reads the arguments, answers, and says how it went.
pub fn run(arguments: impl IntoIterator<Item = OsString>, streams: &mut Streams<'_>) -> Exit {
    match Arguments::try_parse_from(arguments) {
        Ok(arguments) => command::run(&arguments.command, streams),
        Err(refusal) => usage(&refusal, streams),
    }
}

/// Help, version, or a mistake in the arguments.
fn usage(refusal: &clap::Error, streams: &mut Streams<'_>) -> Exit {
    let text = refusal.render();
    let draw = |colour: bool| {
        if colour {
            text.ansi().to_string()
        } else {
            text.to_string()
        }
    };
    if refusal.use_stderr() {
        streams.explain(&draw(streams.terminal.colour_errors));
        Exit::Unusable
    } else {
        streams.answer(&draw(streams.terminal.colour_answers), Exit::Answered)
    }
}

fn broken() -> Exit {
    say("cutloop: this is our bug; nothing is answered");
    Exit::Disagreed
}

fn no_thread(error: &io::Error) -> Exit {
    say(&format!("cutloop: the system gave no thread: {error}"));
    Exit::System
}

/// A last word where no streams are at hand; nothing is left to do if it fails.
fn say(text: &str) {
    let _ = writeln!(io::stderr(), "{text}");
}

impl Terminal {
    /// What the process stands in front of.
    #[must_use]
    pub fn of_process() -> Self {
        let coloured = |choice: anstream::ColorChoice| choice != anstream::ColorChoice::Never;
        let columns = std::env::var("COLUMNS").ok();
        Self {
            colour_answers: coloured(anstream::AutoStream::choice(&io::stdout())),
            colour_errors: coloured(anstream::AutoStream::choice(&io::stderr())),
            progress: io::stderr().is_terminal(),
            width: columns
                .filter(|_| io::stdout().is_terminal())
                .and_then(|columns| columns.parse().ok()),
        }
    }
}
