//! Commands about one file: order, formula, audit.

use crate::analysis::report::Wanted;
use crate::cli::args::{Format, One};
use crate::cli::case::Case;
use crate::cli::command::{Shown, explain_all, in_words, json, question, wanted};
use crate::cli::exit::Exit;
use crate::cli::input::Origin;
use crate::cli::output::Streams;
use crate::cli::progress::Progress;

pub(super) fn run(arguments: &One, shown: Shown, streams: &mut Streams<'_>) -> Exit {
    let options = &arguments.options;
    let origin = match (&options.text, &arguments.file) {
        (Some(text), _) => Origin::CommandLine(text.clone()),
        (None, file) => Origin::File(file.clone().unwrap_or_else(|| "-".to_owned())),
    };
    let detail = shown.detail;
    let wanted = Wanted {
        time_constants: shown.time_constants,
        ..wanted(detail, options.format, &options.of)
    };
    let progress = Progress::begin(origin.name(), streams.terminal.progress);
    let case = Case::new(&origin, options, &wanted, question(detail), streams.input);
    drop(progress);
    explain_all(&case, streams);
    let text = match options.format {
        Format::Json => json::pretty(&json::of_case(&case, detail, false)),
        format => in_words(&case, shown, format, streams.terminal),
    };
    streams.answer(&text, case.exit(&wanted))
}
