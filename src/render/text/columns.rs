//! Accounts in columns: sign, number, what it is, and its evidence.

use crate::render::ledger::{Between, Evidence, Line};
use crate::render::linear::READING;
use crate::render::text::Page;
use crate::render::text::block::columns;
use crate::render::text::fill;
use crate::render::text::paint::Paint;

/// Words beside a number, broken to a width.
pub(super) fn evidence_lines(evidence: &Evidence, width: usize) -> Vec<String> {
    match evidence {
        Evidence::Items(items, between) => fill::words(items, separator(*between), width),
        Evidence::Clause(text) => {
            let words: Vec<String> = text.split(' ').map(str::to_owned).collect();
            fill::words(&words, " ", width)
        }
        Evidence::Formula(math) => fill::lines(math, width, 0),
        Evidence::Equation(before, left, right) => {
            let blank = if before.is_empty() { "" } else { " " };
            let (left, right) = (READING.spell(left), READING.spell(right));
            let words = [format!("{before}{blank}{left}"), format!("= {right}")];
            fill::words(&words, " ", width)
        }
    }
}

fn separator(between: Between) -> &'static str {
    match between {
        Between::Blank => "  ",
        Between::Dash => " – ",
        Between::Bar => " | ",
        Between::Comma => ", ",
    }
}

/// Draws an account; evidence stands in a column of its own.
pub(super) fn draw(lines: &[Line], page: &Page) -> String {
    let widest = lines.iter().map(label_width).max().unwrap_or(0);
    let digits = lines.iter().map(number_width).max().unwrap_or(1);
    let figures = digits + 5;
    let column = (figures + widest.clamp(28, 44) + 2).min(page.width - 20);
    let mut text = String::new();
    for line in lines {
        match line {
            Line::Rule => text.push_str(&format!(" {}\n", "─".repeat(digits + 2))),
            Line::Entry {
                taken,
                number,
                label,
                evidence,
            } => {
                let sign = if *taken { '−' } else { ' ' };
                let front = format!(" {sign} {number:>digits$}  {label}");
                push_line(&mut text, &front, evidence, column, page);
            }
            Line::Note { label, evidence } => {
                let front = format!("{}{label}", " ".repeat(figures));
                push_line(&mut text, &front, evidence, column, page);
            }
        }
    }
    text
}

fn label_width(line: &Line) -> usize {
    match line {
        Line::Rule => 0,
        Line::Entry { label, .. } | Line::Note { label, .. } => columns(label),
    }
}

fn number_width(line: &Line) -> usize {
    match line {
        Line::Rule | Line::Note { .. } => 1,
        Line::Entry { number, .. } => number.to_string().len(),
    }
}

/// What stands in front, and the evidence beside it, in lines of its own where there is more.
pub(super) fn push_line(
    text: &mut String,
    front: &str,
    evidence: &[Evidence],
    column: usize,
    page: &Page,
) {
    let paint = Paint(page.colour);
    let room = page.width.saturating_sub(column);
    let mut lines = evidence.iter().flat_map(|it| evidence_lines(it, room));
    text.push_str(front);
    if columns(front) < column
        && let Some(first) = lines.next()
    {
        text.push_str(&" ".repeat(column - columns(front)));
        text.push_str(&paint.quiet(&first));
    }
    text.push('\n');
    for line in lines {
        text.push_str(&format!("{}{}\n", " ".repeat(column), paint.quiet(&line)));
    }
}
