//! Answers as LaTeX for a note (amsmath): equations with long sums broken into lines, accounts as tables.

mod claims;
mod equation;
mod escape;
mod reduction;
mod spell;
mod states;
mod table;

use crate::analysis::report::FunctionReport;
use crate::render::answer::{Answer, Detail};
use crate::render::ledger;
use crate::render::sentence;
use escape::escape;
pub use reduction::reduction;

/// The whole answer about one file.
#[must_use]
pub fn answer(answer: &Answer<'_>) -> String {
    let mut sections = Vec::new();
    if let Some(title) = answer.network.title() {
        sections.push(format!("\\section*{{{}}}\n", escape(title)));
    }
    match answer.detail {
        Detail::Claims => sections.push(claims::table(answer)),
        Detail::Order => {
            let account = table::account(&ledger::network(answer));
            sections.push(format!("\\paragraph{{Order of the network}}\n{account}"));
        }
        Detail::States => {
            let systems = answer.report.states.iter().flat_map(|it| &it.systems);
            sections.extend(systems.map(|it| states::system(answer, it)));
        }
        Detail::Formula | Detail::Audit => {}
    }
    if answer.detail != Detail::Claims {
        let results = answer.report.results.iter();
        sections.extend(results.map(|result| function(answer, result)));
    }
    sections.retain(|section| !section.is_empty());
    sections.join("\n")
}

fn function(answer: &Answer<'_>, result: &FunctionReport) -> String {
    let asks = &answer.question(result).text;
    let heading = format!("{} = {asks}", result.name);
    let mut text = format!("\\paragraph{{{}}}\n", escape(&heading));
    if answer.detail == Detail::Order {
        text.push_str(&table::account(&ledger::function(answer, result)));
    } else {
        text.push_str(&equation::function(answer, result));
        text.push_str(&format!("% {}\n", ledger::degrees(result)));
    }
    if answer.detail == Detail::Audit {
        text.push_str(&table::cancellations(answer, result));
    }
    if answer.detail == Detail::Order && !result.relied_on.is_empty() {
        let conditions = escape(&sentence::conditions(&result.relied_on));
        text.push_str(&format!("Relies on {conditions}.\n"));
    }
    text
}
