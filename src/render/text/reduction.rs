//! A reduction drawn for reading.

use crate::analysis::report::Verdict;
use crate::render::linear::READING;
use crate::render::reduction::{Reduced, StepLine};
use crate::render::text::Page;
use crate::render::text::block::columns;
use crate::render::text::fill;
use crate::render::text::paint::Paint;

/// The whole answer about one file, with a newline at its end.
#[must_use]
pub fn reduction(reduced: &Reduced<'_>, page: &Page) -> String {
    let paint = Paint(page.colour);
    let mut sections = Vec::new();
    if let Some(title) = reduced.network.title() {
        sections.push(format!("{}\n", paint.strong(title)));
    }
    let steps = reduced.steps();
    if steps.is_empty() {
        sections.push("Nothing to reduce: no step applies.\n".to_owned());
    } else {
        let lines = drawn(&steps, page);
        sections.push(format!("{}\n{lines}", paint.strong("Steps")));
    }
    if !reduced.remarks.is_empty() {
        let lines: String = reduced
            .remarks
            .iter()
            .map(|it| sentence(it, page))
            .collect();
        sections.push(format!("{}\n{lines}", paint.strong("Remarks")));
    }
    if let Some(text) = reduced.text {
        let lines = text
            .lines()
            .map(|line| format!("{}\n", format!("  {line}").trim_end()));
        let lines: String = lines.collect();
        sections.push(format!(
            "{}\n\n{lines}",
            paint.strong("The reduced network")
        ));
    }
    sections.push(match reduced.proven {
        Verdict::Yes => {
            let functions =
                "proven: every derived function is the same rational function as before";
            format!("  {}\n", paint.good(functions))
        }
        Verdict::No | Verdict::Undecided => {
            let doubts = reduced.doubts.join("; ");
            let lines = sentence(&format!("not proven: {doubts}"), page);
            paint.unsure(&lines)
        }
    });
    sections.join("\n")
}

fn sentence(text: &str, page: &Page) -> String {
    let words: Vec<String> = text.split(' ').map(str::to_owned).collect();
    let lines = fill::words(&words, " ", page.width - 4);
    let indented = lines.iter().enumerate().map(|(index, line)| {
        let indent = if index == 0 { "  " } else { "    " };
        format!("{indent}{line}\n")
    });
    indented.collect()
}

fn drawn(steps: &[StepLine], page: &Page) -> String {
    let digits = steps.len().to_string().len();
    let widest = steps.iter().map(|it| columns(&it.words)).max().unwrap_or(0);
    let lead = digits + 2 + widest + 4;
    let mut text = String::new();
    for (index, step) in steps.iter().enumerate() {
        let gap = " ".repeat(widest - columns(&step.words));
        let front = format!("  {:>digits$}  {}{gap}  ", index + 1, step.words);
        let lines = match &step.makes {
            None => {
                let verb = if step.parts.len() == 1 {
                    "leaves"
                } else {
                    "leave"
                };
                let mut words = step.parts.clone();
                words.push(verb.to_owned());
                fill::words(&words, "  ", page.width.saturating_sub(lead + 2))
            }
            Some((name, short, long)) => {
                let room = page.width.saturating_sub(lead + 2 + columns(name) + 3);
                let indent = " ".repeat(columns(name));
                let mut lines = equal(name, &READING.spell(short), room);
                if let Some(long) = long {
                    lines.extend(equal(&indent, &READING.spell(long), room));
                }
                lines
            }
        };
        for (count, line) in lines.iter().enumerate() {
            if count == 0 {
                text.push_str(&front);
            } else {
                text.push_str(&" ".repeat(columns(&front)));
            }
            text.push_str(line);
            text.push('\n');
        }
    }
    text
}

fn equal(left: &str, right: &str, room: usize) -> Vec<String> {
    let words: Vec<String> = right.split(' ').map(str::to_owned).collect();
    let lines = fill::words(&words, " ", room);
    let indent = " ".repeat(columns(left) + 3);
    let lines = lines.iter().enumerate().map(|(index, line)| match index {
        0 => format!("{left} = {line}"),
        _ => format!("{indent}{line}"),
    });
    lines.collect()
}
