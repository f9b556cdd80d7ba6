//! A reduction as LaTeX: a table of steps, the equations, the network in verbatim.

use crate::analysis::report::Verdict;
use crate::render::latex::escape::{escape, name};
use crate::render::latex::spell::spell;
use crate::render::reduction::{Reduced, StepLine};

/// The whole answer about one file.
#[must_use]
pub fn reduction(reduced: &Reduced<'_>) -> String {
    let mut text = String::new();
    if let Some(title) = reduced.network.title() {
        text.push_str(&format!("\\section*{{{}}}\n\n", escape(title)));
    }
    let steps = reduced.steps();
    if steps.is_empty() {
        text.push_str("Nothing to reduce: no step applies.\n");
    } else {
        text.push_str("\\paragraph{Steps}\n\\begin{enumerate}\n");
        text.extend(steps.iter().map(item));
        text.push_str("\\end{enumerate}\n");
    }
    if !reduced.remarks.is_empty() {
        text.push_str("\n\\paragraph{Remarks}\n\\begin{itemize}\n");
        let remarks = reduced.remarks.iter();
        text.extend(remarks.map(|it| format!("\\item {}\n", escape(it))));
        text.push_str("\\end{itemize}\n");
    }
    if let Some(network) = reduced.text {
        text.push_str("\n\\paragraph{The reduced network}\n");
        text.push_str(&format!(
            "\\begin{{verbatim}}\n{network}\\end{{verbatim}}\n"
        ));
    }
    text.push_str(&match reduced.proven {
        Verdict::Yes => {
            "Every derived function is the same rational function as before (proven).\n".to_owned()
        }
        Verdict::No | Verdict::Undecided => {
            format!("Not proven: {}.\n", escape(&reduced.doubts.join("; ")))
        }
    });
    text
}

fn item(step: &StepLine) -> String {
    let words = escape(&step.words);
    match &step.makes {
        None => {
            let parts: Vec<String> = step
                .parts
                .iter()
                .map(|it| format!("${}$", name(it)))
                .collect();
            let verb = if parts.len() == 1 { "leaves" } else { "leave" };
            format!("\\item {words}: {} {verb}\n", parts.join(", "))
        }
        Some((made, short, long)) => {
            let long = long
                .as_ref()
                .map_or(String::new(), |it| format!(" = {}", spell(it)));
            format!(
                "\\item {words}: ${} = {}{long}$\n",
                name(made),
                spell(short)
            )
        }
    }
}
