//! The streams of a run.

use std::io::{self, ErrorKind, Read, Write};

use crate::cli::exit::Exit;

/// What is known of the place where the output is read.
#[derive(Clone, Copy, Debug, Default)]
pub struct Terminal {
    /// Answers may be coloured.
    pub colour_answers: bool,
    /// Diagnostics may be coloured.
    pub colour_errors: bool,
    /// Long work may show that it goes on.
    pub progress: bool,
    /// Columns, where known.
    pub width: Option<usize>,
}

/// The streams a run reads and writes.
pub struct Streams<'a> {
    /// Standard input.
    pub input: &'a mut dyn Read,
    /// Answers.
    pub answers: &'a mut dyn Write,
    /// Diagnostics and summaries.
    pub errors: &'a mut dyn Write,
    /// Where they are read.
    pub terminal: Terminal,
}

impl Streams<'_> {
    /// Writes an answer whole and keeps its exit status. A reader that has gone away is no failure;
    /// any other trouble with the output is.
    pub fn answer(&mut self, text: &str, exit: Exit) -> Exit {
        match write_all(self.answers, text) {
            Err(error) if error.kind() != ErrorKind::BrokenPipe => {
                self.explain(&format!(
                    "cutloop: the answer could not be written: {error}\n"
                ));
                exit.max(Exit::System)
            }
            _ => exit,
        }
    }

    /// Writes a diagnostic; if that fails there is nowhere to say so.
    pub fn explain(&mut self, text: &str) {
        let _ = write_all(self.errors, text);
    }
}

fn write_all(stream: &mut dyn Write, text: &str) -> io::Result<()> {
    stream.write_all(text.as_bytes())?;
    stream.flush()
}
