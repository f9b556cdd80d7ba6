//! Answers drawn for reading in a terminal or a plain text file.

mod audit;
mod block;
mod claims;
mod columns;
mod constants;
mod fill;
mod formula;
mod order;
mod paint;
mod reduction;
mod states;

use crate::render::answer::{Answer, Detail};
use paint::Paint;
pub use reduction::reduction;

/// How the text is drawn.
#[derive(Clone, Copy, Debug)]
pub struct Page {
    /// Columns, at least 60.
    pub width: usize,
    /// Whether colour codes may be used.
    pub colour: bool,
}

impl Default for Page {
    fn default() -> Self {
        Self {
            width: 96,
            colour: false,
        }
    }
}

/// The whole answer about one file, with a newline at its end; empty if there is nothing to say.
#[must_use]
pub fn answer(answer: &Answer<'_>, page: &Page) -> String {
    let page = Page {
        width: page.width.max(60),
        ..*page
    };
    if answer.detail == Detail::Claims && answer.report.claims.is_empty() {
        return String::new();
    }
    let paint = Paint(page.colour);
    let mut sections = Vec::new();
    if let Some(title) = answer.network.title() {
        sections.push(format!("{}\n", paint.strong(title)));
    }
    match answer.detail {
        Detail::Claims => sections.push(claims::section(answer, &page)),
        Detail::Order => {
            sections.push(order::network(answer, &page));
            for result in &answer.report.results {
                sections.push(order::function(answer, result, &page));
            }
        }
        Detail::Formula => {
            for result in &answer.report.results {
                sections.push(formula::section(answer, result, &page));
            }
        }
        Detail::Audit => {
            for result in &answer.report.results {
                sections.push(formula::section(answer, result, &page));
                sections.push(audit::section(answer, result, &page));
            }
        }
        Detail::States => {
            let systems = answer.report.states.iter().flat_map(|it| &it.systems);
            sections.extend(systems.map(|it| states::system(answer, it, &page)));
            sections.push(states::no_output(answer, &page));
        }
    }
    sections.retain(|section| !section.is_empty());
    sections.join("\n")
}
