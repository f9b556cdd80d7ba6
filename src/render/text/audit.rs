//! What cancels between numerator and denominator, and why.

use crate::analysis::report::{Cancellation, FunctionReport, Hides};
use crate::numeric::FunctionFigures;
use crate::numeric::drift::Cancelled;
use crate::render::answer::Answer;
use crate::render::figures;
use crate::render::ledger::{self, Evidence};
use crate::render::math;
use crate::render::names::FrequencyPlace;
use crate::render::sentence;
use crate::render::text::Page;
use crate::render::text::block::columns;
use crate::render::text::columns::evidence_lines;
use crate::render::text::fill;
use crate::render::text::paint::Paint;

/// The cancellations of one function; empty for functions of functions.
pub(super) fn section(answer: &Answer<'_>, result: &FunctionReport, page: &Page) -> String {
    let paint = Paint(page.colour);
    let Some(list) = &result.cancellations else {
        return cut_short(result, page);
    };
    let figures = answer.figures_of(result);
    let mut text = String::new();
    if list.is_empty() && !result.zero && result.unaudited.is_none() {
        text.push_str("  Nothing cancels.\n");
    }
    for (index, it) in list.iter().enumerate() {
        let numbers = figures.and_then(|figures| figures.cancelled.get(index));
        text.push_str(&cancellation(answer, it, numbers, page));
    }
    if let Some(figures) = figures {
        text.push_str(&near(figures, page));
    }
    // Lines are broken: the blanks inside quantities need no more protection.
    text = text.replace('\u{a0}', " ");
    text.push_str(&cut_short(result, page));
    if !result.nominals_missing.is_empty() {
        let mut items = result.nominals_missing.clone();
        items[0] = format!(
            "coincidences were not looked for: no nominal value for {}",
            items[0]
        );
        for line in fill::words(&items, ", ", page.width - 2) {
            text.push_str(&format!("  {}\n", paint.quiet(&line)));
        }
    }
    text
}

fn cut_short(result: &FunctionReport, page: &Page) -> String {
    let words = sentence::cut_short(result).unwrap_or_default();
    let items: Vec<String> = words.split_terminator("; ").map(str::to_owned).collect();
    fill::words(&items, "; ", page.width - 2)
        .iter()
        .map(|line| format!("  {}\n", Paint(page.colour).quiet(line)))
        .collect()
}

/// Pairs that almost cancel.
fn near(figures: &FunctionFigures, page: &Page) -> String {
    let upper = figures.near.iter().filter(|it| it.pole.im >= 0.0);
    let mut text = String::new();
    for it in upper {
        let mut front = format!("{:<COLUMN$}", "  near");
        for (index, clause) in figures::near(it).into_iter().enumerate() {
            for line in evidence_lines(&Evidence::Clause(clause), page.width - COLUMN) {
                let line = match index {
                    0 => line,
                    _ => Paint(page.colour).quiet(&line),
                };
                text.push_str(&format!("{front}{line}\n"));
                front = " ".repeat(COLUMN);
            }
        }
    }
    text
}

/// What one per cent of a part does to a cancelled pair.
fn drifts(numbers: &Cancelled, page: &Page) -> String {
    let paint = Paint(page.colour);
    let mut text = String::new();
    for rows in numbers
        .drifts
        .iter()
        .filter_map(|list| figures::drifts(list))
    {
        let mut widths = [0; 4];
        for row in &rows {
            for (width, cell) in widths.iter_mut().zip(row) {
                *width = (*width).max(columns(cell));
            }
        }
        for row in &rows {
            let mut line = String::new();
            for (width, cell) in widths.iter().zip(row) {
                line.push_str(cell);
                line.push_str(&" ".repeat(width + 3 - columns(cell)));
            }
            let line = paint.quiet(line.trim_end());
            text.push_str(&format!("{}{line}\n", " ".repeat(COLUMN)));
        }
    }
    text
}

/// Where the words about a cancellation begin.
const COLUMN: usize = 17;

fn cancellation(
    answer: &Answer<'_>,
    it: &Cancellation,
    numbers: Option<&Cancelled>,
    page: &Page,
) -> String {
    let names = answer.names(FrequencyPlace::First);
    let factor = math::by_powers_of_s(&it.factor, &names).power(it.multiplicity);
    let mut text = format!("  {}", sentence::class(it.class));
    text.push_str(&" ".repeat(COLUMN - columns(&text)));
    for (index, line) in fill::lines(&factor, page.width - COLUMN, 0)
        .iter()
        .enumerate()
    {
        let blank = if index == 0 { 0 } else { COLUMN };
        text.push_str(&format!("{}{line}\n", " ".repeat(blank)));
    }
    let mut clauses = ledger::cause(answer, it);
    if let Some(hides) = it.hides {
        let modes = it.degree * it.multiplicity;
        clauses.push(Evidence::Clause(hidden_side(hides, modes)));
    }
    if !it.factored {
        clauses.push(Evidence::clause(
            "a product that was not split into its factors",
        ));
    }
    clauses.extend(numbers.and_then(figures::modes).map(Evidence::Clause));
    for clause in clauses {
        for line in evidence_lines(&clause, page.width - COLUMN) {
            let line = Paint(page.colour).quiet(&line);
            text.push_str(&format!("{}{line}\n", " ".repeat(COLUMN)));
        }
    }
    if let Some(numbers) = numbers {
        text.push_str(&drifts(numbers, page));
    }
    text
}

fn hidden_side(hides: Hides, modes: u32) -> String {
    let modes = if modes == 1 {
        "a mode that is".to_owned()
    } else {
        format!("{modes} modes that are")
    };
    match hides {
        Hides::NotDriven => format!("{modes} not driven by the source"),
        Hides::NotSeen => format!("{modes} not seen at the output"),
        Hides::Both => format!("{modes} neither driven nor seen"),
    }
}
