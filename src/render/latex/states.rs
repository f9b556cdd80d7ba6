//! State equations with matrices.

use crate::algebra::Fraction;
use crate::analysis::report::states::{Start, StateMethod, StateSystem};
use crate::render::answer::Answer;
use crate::render::latex::escape::{escape, name};
use crate::render::latex::spell::spell;
use crate::render::names::{FrequencyPlace, Names};
use crate::render::states::{self, Manner};

/// One system.
pub(super) fn system(answer: &Answer<'_>, system: &StateSystem) -> String {
    let names = answer.names(FrequencyPlace::First);
    let mut heading = "State equations".to_owned();
    if !system.without.is_empty() {
        heading.push_str(&format!(
            " without {}",
            answer.parts(&system.without).join(", ")
        ));
    }
    let mut text = format!("\\paragraph{{{}}}\n", escape(&heading));
    let x = vector(
        system
            .vector
            .iter()
            .map(|it| name(&states::state_name(answer, it))),
    );
    let u = vector(
        system
            .inputs
            .iter()
            .map(|it| name(&states::input_name(answer, it))),
    );
    let outputs = system.outputs.iter();
    let y = vector(
        outputs.map(|it| format!("\\text{{{}}}", escape(&states::output_name(answer, *it)))),
    );
    let mut rows = Vec::new();
    if !system.vector.is_empty() {
        let right = driven(&system.b, &u, &names);
        let matrix = matrix(&system.a, &names);
        rows.push(format!("  \\frac{{d}}{{dt}} {x} &= {matrix} {x}{right}"));
    }
    if !system.outputs.is_empty() {
        let right = driven(&system.d, &u, &names);
        rows.push(if system.vector.is_empty() {
            format!("  {y} &= {}", right.trim_start_matches(" + "))
        } else {
            format!("  {y} &= {} {x}{right}", matrix(&system.c, &names))
        });
    }
    for dependent in &system.dependent {
        let value = states::affine(answer, system, &dependent.equals, &names, Manner::Laplace);
        let left = name(&states::state_name(answer, &dependent.quantity));
        rows.push(format!("  {left} &= {}", spell(&value)));
    }
    if let Some(start) = &system.start {
        rows.extend(started(answer, system, start, &names));
    }
    text.push_str(&aligned(&rows));
    text.push_str(&format!("% {}\n", method(answer, system)));
    text
}

fn method(answer: &Answer<'_>, system: &StateSystem) -> String {
    match &system.method {
        StateMethod::NormalTree(tree) => format!("normal tree {}", answer.parts(tree).join(" ")),
        StateMethod::Pencil => "states from the pencil, in file order".to_owned(),
    }
}

fn aligned(rows: &[String]) -> String {
    if rows.is_empty() {
        return String::new();
    }
    format!(
        "\\begin{{align*}}\n{}\n\\end{{align*}}\n",
        rows.join(" \\\\\n")
    )
}

fn vector(entries: impl Iterator<Item = String>) -> String {
    let entries: Vec<String> = entries.collect();
    format!(
        "\\begin{{pmatrix}} {} \\end{{pmatrix}}",
        entries.join(" \\\\ ")
    )
}

fn matrix(rows: &[Vec<Fraction>], names: &Names<'_>) -> String {
    let rows = rows.iter().map(|row| {
        let cells = row.iter();
        let cells = cells.map(|it| spell(&states::entry(it, names, Manner::Laplace)));
        cells.collect::<Vec<_>>().join(" & ")
    });
    vector(rows)
}

/// Products with the inputs and their derivatives.
fn driven(matrices: &[Vec<Vec<Fraction>>], inputs: &str, names: &Names<'_>) -> String {
    let mut text = String::new();
    for (power, rows) in matrices.iter().enumerate() {
        if rows.iter().flatten().all(Fraction::is_zero) && (power > 0 || matrices.len() > 1) {
            continue;
        }
        let derivative = match power {
            0 => String::new(),
            1 => "\\frac{d}{dt} ".to_owned(),
            _ => format!("\\frac{{d^{{{power}}}}}{{dt^{{{power}}}}} "),
        };
        text.push_str(&format!(" + {} {derivative}{inputs}", matrix(rows, names)));
    }
    text
}

fn started(
    answer: &Answer<'_>,
    system: &StateSystem,
    start: &Start,
    names: &Names<'_>,
) -> Vec<String> {
    let mut rows = Vec::new();
    for (state, value) in &start.after {
        let value = states::affine(answer, system, value, names, Manner::Laplace);
        let left = name(&states::state_name(answer, state));
        rows.push(format!("  {left}(0^{{+}}) &= {}", spell(&value)));
    }
    for (question, value) in system.outputs.iter().zip(&start.responses) {
        let left = escape(&states::output_name(answer, *question));
        let value = spell(&states::entry(value, names, Manner::Laplace));
        rows.push(format!(
            "  \\text{{{left}}}_{{\\text{{start}}}}(s) &= {value}"
        ));
    }
    rows
}
