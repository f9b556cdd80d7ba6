//! The commands.

mod check;
mod json;
mod one;
mod plot;
mod reduce;

use crate::analysis::report::Wanted;
use crate::cli::args::{Command, FormName, Format};
use crate::cli::case::{Case, Question};
use crate::cli::exit::Exit;
use crate::cli::explain::explain;
use crate::cli::output::{Streams, Terminal};
use crate::render::sentence::counted;
use crate::render::text::Page;
use crate::render::{Answer, Detail, FormStyle, latex, text};

/// Runs a command.
pub(super) fn run(command: &Command, streams: &mut Streams<'_>) -> Exit {
    match command {
        Command::Check(arguments) => check::run(arguments, streams),
        Command::Order(arguments) => one::run(arguments, shown(Detail::Order), streams),
        Command::Formula(arguments) => {
            let style = style(arguments.form);
            let shown = Shown {
                style,
                time_constants: arguments.time_constants,
                ..shown(Detail::Formula)
            };
            one::run(&arguments.one, shown, streams)
        }
        Command::Reduce(arguments) => reduce::run(arguments, streams),
        Command::Audit(arguments) => one::run(arguments, shown(Detail::Audit), streams),
        Command::States(arguments) => one::run(arguments, shown(Detail::States), streams),
        Command::Plot(arguments) => plot::run(arguments, streams),
    }
}

/// What is shown, and how.
#[derive(Clone, Copy)]
struct Shown {
    detail: Detail,
    style: FormStyle,
    time_constants: bool,
}

fn shown(detail: Detail) -> Shown {
    Shown {
        detail,
        style: FormStyle::default(),
        time_constants: false,
    }
}

fn style(form: FormName) -> FormStyle {
    match form {
        FormName::Coefficients => FormStyle::Coefficients,
        FormName::Normalised => FormStyle::Normalised,
        FormName::Designer => FormStyle::Designer,
        FormName::Nested => FormStyle::Nested,
    }
}

/// More messages than this about one file help nobody.
const MOST_MESSAGES: usize = 50;

/// Draws the messages about a case on the error stream.
fn explain_all(case: &Case, streams: &mut Streams<'_>) {
    let diagnostics = case.diagnostics();
    for diagnostic in diagnostics.iter().take(MOST_MESSAGES) {
        let text = explain(diagnostic, &case.sources, streams.terminal.colour_errors);
        streams.explain(&text);
    }
    if let Some(more) = diagnostics.len().checked_sub(MOST_MESSAGES)
        && more > 0
    {
        let messages = counted(more, "further message", "further messages");
        streams.explain(&format!("… {messages} about {}\n", case.name));
    }
}

/// The answer in words; empty where there is none.
fn in_words(case: &Case, shown: Shown, format: Format, terminal: Terminal) -> String {
    let Some(answer) = case.answer(shown.detail) else {
        return String::new();
    };
    let answer = Answer {
        style: shown.style,
        ..answer
    };
    match format {
        Format::Latex => latex::answer(&answer),
        Format::Text | Format::Json => text::answer(&answer, &page(terminal)),
    }
}

fn page(terminal: Terminal) -> Page {
    let page = Page::default();
    Page {
        width: terminal.width.unwrap_or(page.width),
        colour: terminal.colour_answers,
    }
}

/// What a command needs to know.
fn wanted(detail: Detail, format: Format, of: &[String]) -> Wanted {
    Wanted {
        functions: of.to_vec(),
        formulas: matches!(detail, Detail::Formula | Detail::Audit),
        forms: matches!(detail, Detail::Formula | Detail::Audit),
        time_constants: false,
        claims: detail == Detail::Claims,
        figures: detail == Detail::Audit,
        cancellations: match detail {
            Detail::Audit => true,
            Detail::Order => format != Format::Json,
            Detail::Claims | Detail::Formula | Detail::States => false,
        },
        states: detail == Detail::States,
    }
}

fn question(detail: Detail) -> Question {
    match detail {
        Detail::Claims | Detail::Order | Detail::States => Question::Optional,
        Detail::Formula | Detail::Audit => Question::Needed,
    }
}
