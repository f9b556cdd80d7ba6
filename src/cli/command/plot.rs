//! `plot`: pictures, written to a file or to the output.

use std::fs;
use std::io::{self, Write as _};
use std::path::Path;

use crate::analysis::report::Wanted;
use crate::cli::args::Plot;
use crate::cli::case::{Case, Question};
use crate::cli::command::explain_all;
use crate::cli::exit::Exit;
use crate::cli::input::Origin;
use crate::cli::output::Streams;
use crate::drawing;
use crate::render::svg;

pub(super) fn run(arguments: &Plot, streams: &mut Streams<'_>) -> Exit {
    if !arguments.drawing {
        streams
            .explain("error: plot has one picture: add --drawing for the drawing of the network\n");
        return Exit::Unusable;
    }
    let options = &arguments.options;
    let origin = match (&options.text, &arguments.file) {
        (Some(text), _) => Origin::CommandLine(text.clone()),
        (None, file) => Origin::File(file.clone().unwrap_or_else(|| "-".to_owned())),
    };
    let wanted = Wanted {
        functions: options.of.clone(),
        ..Wanted::default()
    };
    let case = Case::new(&origin, options, &wanted, Question::Optional, streams.input);
    explain_all(&case, streams);
    let Ok(solved) = &case.outcome else {
        return case.exit(&wanted);
    };
    let text = match drawing::draw(&solved.network, &solved.report.order) {
        Ok(drawing) => svg::drawing(&drawing),
        Err(parts) => {
            let most = drawing::MOST_PARTS;
            streams.explain(&format!(
                "error: {parts} parts are too many for one drawing: it is legible up to {most}\n"
            ));
            return Exit::Unusable;
        }
    };
    match arguments.output.as_deref() {
        None | Some("-") => streams.answer(&text, Exit::Answered),
        Some(path) => match write_whole(Path::new(path), &text) {
            Ok(()) => Exit::Answered,
            Err(error) => {
                streams.explain(&format!("error: {path} cannot be written: {error}\n"));
                Exit::System
            }
        },
    }
}

/// Writes beside the target and renames, so that a run that is broken off leaves no partial file.
fn write_whole(path: &Path, text: &str) -> io::Result<()> {
    // What is no plain file (a device, a pipe) cannot be replaced by a rename.
    if fs::metadata(path).is_ok_and(|found| !found.is_file() && !found.is_dir()) {
        return fs::write(path, text);
    }
    let mut name = path.as_os_str().to_owned();
    name.push(format!(".{}.part", std::process::id()));
    let beside = Path::new(&name);
    let written = fs::File::create(beside)
        .and_then(|mut file| file.write_all(text.as_bytes()))
        .and_then(|()| fs::rename(beside, path));
    if written.is_err() {
        let _ = fs::remove_file(beside);
    }
    written
}
