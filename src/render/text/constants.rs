//! Time constants below a formula.

use crate::analysis::form::{Constant, Pair, Reactive, TimeConstants};
use crate::render::form;
use crate::render::linear::READING;
use crate::render::names::{Names, natural};
use crate::render::text::block::columns;

/// What each part sees, and the sums its time constant stands in.
pub(super) fn section(found: &TimeConstants, names: &Names<'_>) -> String {
    let sums = match found {
        TimeConstants::Sums(sums) => sums,
        TimeConstants::None(why) => return format!("\n  no sum of time constants: {why}\n"),
    };
    let mut rows: Vec<Vec<String>> = sums.first.iter().map(|it| row(it, "", names)).collect();
    rows.sort_by(|left, right| natural(&left[0], &right[0]));
    let mut text = String::from(
        "\n  b1, the sum of the time constants, all others at zero value (C open, L shorted)\n",
    );
    text.push_str(&table(&rows));
    if !sums.second.is_empty() {
        text.push_str(
            "\n  b2, the sum of products; the other part at infinite value (C shorted, L open)\n",
        );
        let rows: Vec<Vec<String>> = sums.second.iter().map(|it| pair(it, names)).collect();
        text.push_str(&table(&rows));
    }
    if let Some(delay) = &sums.elmore {
        let delay = READING.spell(&form::math(delay, names));
        text.push_str(&format!("\n  Elmore delay b1 − a1 = {delay}\n"));
    }
    text
}

fn row(it: &Constant, condition: &str, names: &Names<'_>) -> Vec<String> {
    let spelled = |form| READING.spell(&form::math(form, names));
    vec![
        names.name(it.part).to_owned(),
        format!("sees {}{condition}", spelled(&it.sees)),
        format!("τ = {}", spelled(&it.tau)),
    ]
}

fn pair(it: &Pair, names: &Names<'_>) -> Vec<String> {
    let first = names.name(it.at_infinity);
    let state = match it.kind {
        Reactive::Capacitor => "shorted",
        Reactive::Inductor => "open",
    };
    match &it.other {
        Ok(other) => {
            let mut cells = row(other, &format!(" with {first} {state}"), names);
            cells[2] = format!("× τ({first})");
            cells
        }
        Err(other) => {
            let product = READING.spell(&form::math(&it.product, names));
            let both = format!("{first}, {}", names.name(*other));
            vec![both, format!("together {product}"), String::new()]
        }
    }
}

/// Rows in columns.
fn table(rows: &[Vec<String>]) -> String {
    let width = |column: usize| {
        rows.iter()
            .map(|it| columns(&it[column]))
            .max()
            .unwrap_or(0)
    };
    let widths = [width(0), width(1)];
    let pad = |cell: &str, width: usize| format!("{cell}{}", " ".repeat(width - columns(cell)));
    let lines = rows.iter().map(|row| {
        let line = format!(
            "    {}  {}  {}",
            pad(&row[0], widths[0]),
            pad(&row[1], widths[1]),
            row[2]
        );
        format!("{}\n", line.trim_end())
    });
    lines.collect()
}
