//! `reduce`: the simplest network with the same derived functions.

use crate::analysis::report::{Report, Verdict, Wanted};
use crate::analysis::{self, equivalent, equivalent::proof};

use crate::budget::Budget;
use crate::cli::args::{Format, Options, Reduce};
use crate::cli::case::{Case, Question};
use crate::cli::command::{explain_all, json as errors, page};
use crate::cli::exit::Exit;
use crate::cli::input::{Origin, used};
use crate::cli::output::{Streams, Terminal};
use crate::diagnostic::Diagnostic;
use crate::language::{self, ReadOptions};
use crate::network::Network;
use crate::render::netlist::netlist;
use crate::render::reduction::{Reduced, remarks};
use crate::render::{Detail, json, latex, text};
use crate::source::Sources;

pub(super) fn run(arguments: &Reduce, streams: &mut Streams<'_>) -> Exit {
    let options = &arguments.one.options;
    let origin = match (&options.text, &arguments.one.file) {
        (Some(text), _) => Origin::CommandLine(text.clone()),
        (None, file) => Origin::File(file.clone().unwrap_or_else(|| "-".to_owned())),
    };
    let wanted = wanted(&options.of);
    let case = Case::new(&origin, options, &wanted, Question::Needed, streams.input);
    explain_all(&case, streams);
    let Ok(solved) = &case.outcome else {
        let answer = match options.format {
            Format::Json => errors::pretty(&errors::of_case(&case, Detail::Formula, false)),
            Format::Text | Format::Latex => String::new(),
        };
        return streams.answer(&answer, case.exit(&wanted));
    };
    let reduction = equivalent::reduce(&solved.network, &wanted, arguments.star_delta);
    let written = netlist(&solved.network, &reduction);
    let trial = Trial::new(&written.text, options);
    let mut doubts = written.missing.clone();
    let mut proven = Verdict::Undecided;
    match &trial.answer {
        Err(message) => doubts.push(message.clone()),
        Ok(again) if doubts.is_empty() => {
            let spelled = |name: &str| written.spelled(name);
            let budget = Budget::new(options.budget.unwrap_or_default());
            let first = (&solved.network, &solved.report);
            proven = proof::same(first, (&again.0, &again.1), &spelled, &budget);
            if proven == Verdict::Undecided {
                doubts.push("the functions were not compared whole within the budget".to_owned());
            }
        }
        Ok(_) => {}
    }
    if proven == Verdict::No {
        let message = "the reduced network has other functions than the original";
        let bug = Diagnostic::whole(message)
            .help("this is a bug of ours and nothing is answered; please report the file");
        let colour = streams.terminal.colour_errors;
        streams.explain(&crate::cli::explain::explain(&bug, &case.sources, colour));
        return Exit::Disagreed;
    }
    let again = trial.answer.as_ref().ok();
    let reduced = Reduced {
        network: &solved.network,
        reduction: &reduction,
        text: again.map(|_| written.text.as_str()),
        proven,
        doubts,
        remarks: again.map_or(Vec::new(), |it| remarks(&it.0, &it.1)),
    };
    let exit = match proven {
        Verdict::Yes => Exit::Answered,
        Verdict::No | Verdict::Undecided => Exit::Undecided,
    };
    let answer = answer(&reduced, &case.name, options.format, streams.terminal);
    streams.answer(&answer, exit)
}

fn answer(reduced: &Reduced<'_>, file: &str, format: Format, terminal: Terminal) -> String {
    match format {
        Format::Json => errors::pretty(&json::reduction(reduced, file)),
        Format::Latex => latex::reduction(reduced),
        Format::Text => text::reduction(reduced, &page(terminal)),
    }
}

fn wanted(of: &[String]) -> Wanted {
    Wanted {
        functions: of.to_vec(),
        formulas: true,
        ..Wanted::default()
    }
}

/// The printed network, read and answered like any other.
struct Trial {
    answer: Result<(Network, Report), String>,
}

impl Trial {
    fn new(text: &str, options: &Options) -> Self {
        let budget = Budget::new(options.budget.unwrap_or_default());
        let read = Self::read(text);
        let answer =
            read.and_then(
                |network| match analysis::answer(&network, &wanted(&[]), &budget) {
                    Ok(report) => Ok((network, report)),
                    Err(failure) => Err(format!(
                        "the reduced network was not solved: {}",
                        crate::cli::case::told(&failure)
                    )),
                },
            );
        Self { answer }
    }

    fn read(text: &str) -> Result<Network, String> {
        let mut sources = Sources::new();
        let source = sources.add("reduced", text.to_owned());
        let reading = language::read(
            &mut sources,
            source,
            &ReadOptions {
                set: &[],
                load: &used,
            },
        );
        reading.network.ok_or_else(|| {
            let error = reading.diagnostics.iter().find(|it| it.is_error());
            let message = error.map_or("", |it| it.message.as_str());
            format!("the reduced network cannot be written in the language yet: {message}")
        })
    }
}
